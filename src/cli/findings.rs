//! Findings on a stream, in the format asked for, and what they mean for the exit code.

use clap::{Args, ValueEnum};

use crate::cli::Exit;
use crate::cli::console::{Console, Stream};
use crate::compile::Compiled;
use crate::finding::json::{AcceptedEntry, Document, Entry, Unreadable};
use crate::finding::render::render;
use crate::finding::{Severity, github};
use crate::source::shown;
use crate::world::ReadError;

/// How findings are told.
#[derive(Args, Clone, Debug)]
pub(crate) struct Telling {
    /// How findings are written: framed for people, one JSON document, annotations on a pull request
    #[arg(long, value_enum, default_value_t, value_name = "human|json|github", hide_possible_values = true)]
    pub(crate) format: Format,
    /// Warnings fail the run too
    #[arg(long)]
    pub(crate) strict: bool,
    /// Show at most N findings, 0 for all; 50 where people read, all where programs do
    #[arg(long, value_name = "N")]
    pub(crate) max_findings: Option<usize>,
}

/// `--format`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub(crate) enum Format {
    /// For people: the source framed
    #[default]
    Human,
    /// One JSON document
    Json,
    /// Annotations on a pull request
    Github,
}

const SHOWN_TO_PEOPLE: usize = 50;

impl Telling {
    fn limit(&self) -> Option<usize> {
        match (self.max_findings, self.format) {
            (Some(0), _) | (None, Format::Json) => None,
            (Some(limit), _) => Some(limit),
            (None, Format::Human | Format::Github) => Some(SHOWN_TO_PEOPLE),
        }
    }

    /// What `all` mean for the exit code.
    pub(crate) fn exit(&self, all: &[Compiled], console: &Console) -> Exit {
        let each = all.iter().map(|compiled| {
            if compiled.unreadable.is_some() {
                Exit::Trouble
            } else if compiled.unexplained() {
                let path = shown(&compiled.path);
                console.trouble(
                    &format!("`{path}` was not evaluated, and no finding says why"),
                    &["this is a fault of bandloom; please report it with the file"],
                )
            } else if compiled.failed(self.strict) {
                Exit::Found
            } else {
                Exit::Fine
            }
        });
        each.max().unwrap_or(Exit::Fine)
    }

    /// The findings of `all` in the format asked for; for people without a closing line.
    /// Files that could not be read are told on standard error, except in JSON.
    pub(crate) fn text(&self, all: &[Compiled], console: &Console, stream: Stream) -> String {
        if self.format == Format::Json {
            return self.json(all);
        }
        for compiled in all {
            if let Some(why) = &compiled.unreadable {
                unreadable(compiled, why, console);
            }
        }
        let mut out = String::new();
        let mut room = self.limit().unwrap_or(usize::MAX);
        let mut left_out = 0;
        for compiled in all {
            for finding in compiled.findings.iter() {
                if room == 0 {
                    left_out += 1;
                    continue;
                }
                room -= 1;
                match self.format {
                    Format::Github => out.push_str(&github::annotation(finding, &compiled.sources)),
                    Format::Human | Format::Json => {
                        out.push_str(&render(finding, &compiled.sources, console.look(stream)));
                        out.push('\n');
                    }
                }
            }
        }
        if left_out > 0 && self.format == Format::Human {
            out.push_str(&format!("{left_out} more not shown; `--max-findings 0` shows all\n\n"));
        } else if left_out > 0 {
            out.push_str(&format!("::notice title=bandloom::{left_out} more findings not shown\n"));
        }
        out
    }

    fn json(&self, all: &[Compiled]) -> String {
        let mut document = Document::new();
        for compiled in all {
            add(&mut document, compiled, self.limit());
        }
        // Strings and whole numbers only: this cannot fail.
        let mut text = serde_json::to_string_pretty(&document).unwrap_or_default();
        text.push('\n');
        text
    }
}

/// Adds what came of one file; at most `limit` findings stand in the document in all.
fn add(document: &mut Document, compiled: &Compiled, limit: Option<usize>) {
    if let Some(why) = &compiled.unreadable {
        document.unreadable.push(Unreadable { file: shown(&compiled.path), message: why.worded() });
    }
    let entry = |finding| Entry::of(finding, &compiled.sources);
    let room = limit.map_or(usize::MAX, |limit| limit.saturating_sub(document.findings.len()));
    document.findings.extend(compiled.findings.iter().take(room).map(entry));
    document.left_out += compiled.findings.0.len().saturating_sub(room);
    for accepted in compiled.stacks.iter().flat_map(|stack| &stack.accepted) {
        let because = accepted.because.clone();
        document.accepted.push(AcceptedEntry { finding: entry(&accepted.finding), because });
    }
}

fn unreadable(compiled: &Compiled, why: &ReadError, console: &Console) {
    let path = shown(&compiled.path);
    let help = match why {
        ReadError::Missing => "check the path, or create the file".to_owned(),
        ReadError::Directory => format!("name a file in it, as in `{path}/example.stack`"),
        ReadError::NotUtf8 { .. } => "save it as UTF-8".to_owned(),
        ReadError::TooLarge { .. } => "split it with `use`".to_owned(),
        ReadError::Outside => "move it into the project".to_owned(),
        ReadError::Other(_) => "check the file and its permissions".to_owned(),
    };
    console.trouble(&format!("cannot read `{path}`: {}", why.worded()), &[&help]);
}

/// `3 errors, 1 warning`; `no findings`.
pub(crate) fn counted(compiled: &Compiled) -> String {
    let parts: Vec<String> = [Severity::Error, Severity::Warning, Severity::Advice]
        .into_iter()
        .map(|severity| (severity, compiled.findings.count(severity)))
        .filter(|(_, count)| *count > 0)
        .map(|(severity, count)| match (severity, count) {
            (Severity::Advice, 1) => "1 piece of advice".to_owned(),
            (Severity::Advice, count) => format!("{count} pieces of advice"),
            (severity, 1) => format!("1 {}", severity.word()),
            (severity, count) => format!("{count} {}s", severity.word()),
        })
        .collect();
    if parts.is_empty() { "no findings".to_owned() } else { parts.join(", ") }
}
