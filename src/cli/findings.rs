//! Findings on a stream, in the format asked for, and what they mean for the exit code.

use clap::{Args, ValueEnum};

use crate::cli::Exit;
use crate::cli::console::{Console, Stream};
use crate::compile::{Compiled, shown};
use crate::finding::json::Document;
use crate::finding::render::render;
use crate::finding::{Severity, github};
use crate::world::ReadError;

/// How findings are told.
#[derive(Args, Clone, Debug)]
pub(crate) struct Telling {
    /// How findings are written
    #[arg(long, value_enum, default_value_t, value_name = "FORMAT")]
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
    pub(crate) fn exit(&self, all: &[Compiled]) -> Exit {
        let each = all.iter().map(|compiled| {
            if compiled.unreadable.is_some() {
                Exit::Trouble
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
            document.add(compiled, self.limit());
        }
        // Strings and whole numbers only: this cannot fail.
        let mut text = serde_json::to_string_pretty(&document).unwrap_or_default();
        text.push('\n');
        text
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
