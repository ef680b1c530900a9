//! Findings on a stream, in the format asked for, and what they mean for the exit code.

use std::path::PathBuf;

use clap::Args;

use crate::check;
use crate::cli::Exit;
use crate::cli::console::{Console, Stream};
use crate::cli::output::write;
use crate::compile::{Compiled, Stack};
use crate::finding::Severity;
use crate::finding::format::Format;
use crate::finding::render::{Look, PLAIN_WIDTH};
use crate::finding::run::{About, Asked, FileRun, Run};
use crate::results::RequirementResult;
use crate::source::shown;
use crate::units::number;
use crate::why;
use crate::world::ReadError;

/// How findings are told.
#[derive(Args, Clone, Debug)]
pub(crate) struct Telling {
    /// How findings are written: framed for people, one line each, in sentences for screen readers,
    /// as JSON, as SARIF 2.1.0, as annotations of a pull or merge request, as JUnit XML
    #[arg(
        long,
        value_parser = format,
        default_value = "human",
        value_name = "human|short|narrated|json|jsonl|sarif|github|gitlab|junit"
    )]
    pub(crate) format: Format,
    /// Write the findings to a file as well, as in `sarif=findings.sarif`; repeatable
    #[arg(long, value_name = "FORMAT=PATH", value_parser = output)]
    pub(crate) output: Vec<(Format, PathBuf)>,
    /// Warnings fail the run too
    #[arg(long)]
    pub(crate) strict: bool,
    /// Show at most N findings, 0 for all; 50 where people read, all where programs do
    #[arg(long, value_name = "N")]
    pub(crate) max_findings: Option<usize>,
}

const SHOWN_TO_PEOPLE: usize = 50;

fn format(word: &str) -> Result<Format, String> {
    Format::of_word(word).ok_or_else(|| {
        let known: Vec<&str> = Format::ALL.iter().map(|(_, word)| *word).collect();
        format!("write one of {}", known.join(", "))
    })
}

fn output(text: &str) -> Result<(Format, PathBuf), String> {
    match text.split_once('=') {
        Some((word, path)) if !path.is_empty() => Ok((format(word)?, PathBuf::from(path))),
        _ => Err("write FORMAT=PATH, as in `sarif=findings.sarif`".to_owned()),
    }
}

impl Telling {
    fn limit(&self, format: Format) -> Option<usize> {
        match self.max_findings {
            Some(0) => None,
            Some(limit) => Some(limit),
            None if format.is_for_people() || format == Format::Github => Some(SHOWN_TO_PEOPLE),
            None => None,
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
    /// Files that could not be read are told on standard error, except where the format tells them.
    pub(crate) fn text(&self, all: &[Compiled], console: &Console, stream: Stream) -> String {
        if !self.format.tells_unreadable() {
            for compiled in all {
                if let Some(why) = &compiled.unreadable {
                    unreadable(compiled, why, console);
                }
            }
        }
        self.format.text(&run_of(all, self.limit(self.format)), console.look(stream))
    }

    /// Writes the files of `--output`, all findings in each unless a number was asked for.
    pub(crate) fn write(&self, all: &[Compiled], console: &Console) -> Exit {
        let look = Look { color: false, width: PLAIN_WIDTH };
        let mut exit = Exit::Fine;
        for (format, path) in &self.output {
            let limit = self.max_findings.filter(|most| *most > 0);
            let text = format.text(&run_of(all, limit), look);
            if let Err(why) = write(path, text.as_bytes()) {
                let text = format!("cannot write `{}`: {}", shown(&why.path), why.message);
                exit = exit.max(console.trouble(&text, &["name another file with `--output`"]));
            }
        }
        exit
    }
}

/// What every format reads; at most `limit` findings stand in it.
fn run_of(all: &[Compiled], limit: Option<usize>) -> Run<'_> {
    let mut run = Run { about: Some(about), ..Run::default() };
    let mut room = limit.unwrap_or(usize::MAX);
    for compiled in all {
        let findings: Vec<_> = compiled.findings.iter().take(room).collect();
        room -= findings.len();
        run.left_out += compiled.findings.0.len() - findings.len();
        let accepted = compiled.stacks.iter().flat_map(|stack| &stack.accepted);
        run.files.push(FileRun {
            path: shown(&compiled.path),
            sources: &compiled.sources,
            findings,
            accepted: accepted.map(|it| (&it.finding, it.because.as_str())).collect(),
            asked: compiled.stacks.iter().flat_map(asked).collect(),
            unreadable: compiled.unreadable.as_ref().map(ReadError::worded),
        });
    }
    run
}

fn asked(stack: &Stack) -> Vec<Asked> {
    let Some(results) = &stack.results else { return Vec::new() };
    let one = |it: &RequirementResult| Asked {
        stack: stack.design.name.value.clone(),
        text: it.text.clone(),
        condition: it.condition.clone(),
        met: it.met,
        value: if it.unit == "1" { number(it.value) } else { format!("{} {}", number(it.value), it.unit) },
    };
    results.requirements.iter().map(one).collect()
}

/// The rule's title and what its page reports.
fn about(code: &str) -> About {
    let page = why::page(code).unwrap_or_default();
    let section = page.split("## What it reports").nth(1).and_then(|rest| rest.split("\n## ").next());
    let words: Vec<&str> = section.unwrap_or_default().split_whitespace().collect();
    let title = check::rule(code).map_or_else(String::new, |rule| rule.title.to_owned());
    About { title, reports: words.join(" ") }
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
