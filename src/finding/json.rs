//! Findings for programs: one document, or one object a line, with their own version and a schema
//! (`schemas/findings.schema.json`).
//!
//! Lines and columns count from 1, columns in characters; the end is exclusive. Byte offsets
//! count from 0 in the UTF-8 text, a byte order mark left out. Keys keep their meaning once
//! shipped; new ones may be added.

use serde::Serialize;

use crate::finding::Finding;
use crate::finding::run::Run;
use crate::source::{Sources, Span, shown};

/// Version of the findings document.
pub const SCHEMA_VERSION: u32 = 1;

/// A whole run.
#[derive(Clone, Debug, Serialize)]
pub struct Document {
    /// [`SCHEMA_VERSION`].
    pub schema_version: u32,
    /// `bandloom 0.1.0`
    pub tool: String,
    /// In the order of the files given, then as shown to people.
    pub findings: Vec<Entry>,
    /// Found, and silenced by an `accept`.
    pub accepted: Vec<AcceptedEntry>,
    /// Files that could not be read.
    pub unreadable: Vec<Unreadable>,
    /// How many findings `--max-findings` left out.
    pub left_out: usize,
}

/// A file that could not be read.
#[derive(Clone, Debug, Serialize)]
pub struct Unreadable {
    /// As given.
    pub file: String,
    /// Why.
    pub message: String,
}

/// A finding silenced.
#[derive(Clone, Debug, Serialize)]
pub struct AcceptedEntry {
    /// The finding.
    #[serde(flatten)]
    pub finding: Entry,
    /// The reason given.
    pub because: String,
}

/// One finding. Where it has no place in a text, `place` is left out.
#[derive(Clone, Debug, Serialize)]
pub struct Entry {
    /// `gap.order`
    pub code: &'static str,
    /// `error`, `warning`, `advice`
    pub severity: &'static str,
    /// One line.
    pub message: String,
    /// Where, and what is there.
    #[serde(flatten)]
    pub place: Option<Place>,
    /// The other half of the story.
    pub related: Vec<Place>,
    /// Each one action.
    pub help: Vec<String>,
    /// An edit that cures it.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub fix: Option<FixEntry>,
}

/// A range of a file.
#[derive(Clone, Debug, Serialize)]
pub struct Place {
    /// As given, forward slashes.
    pub file: String,
    /// From 1.
    pub line: usize,
    /// Characters, from 1.
    pub column: usize,
    /// From 1.
    pub end_line: usize,
    /// Characters, from 1, exclusive.
    pub end_column: usize,
    /// From 0.
    pub start_byte: u32,
    /// From 0, exclusive.
    pub end_byte: u32,
    /// What is there; left out where there is nothing to say.
    #[serde(skip_serializing_if = "String::is_empty")]
    pub label: String,
}

/// An edit.
#[derive(Clone, Debug, Serialize)]
pub struct FixEntry {
    /// What is replaced.
    #[serde(flatten)]
    pub place: Place,
    /// The new text.
    pub replacement: String,
    /// Whether it may be applied without asking.
    pub safe: bool,
}

impl Place {
    /// The place of `span`.
    pub fn of(span: Span, label: &str, sources: &Sources) -> Self {
        let source = sources.get(span.source);
        let start = source.position(span.start as usize);
        let end = source.position(span.end as usize);
        Self {
            file: shown(&source.path),
            line: start.line,
            column: start.column,
            end_line: end.line,
            end_column: end.column,
            start_byte: span.start,
            end_byte: span.end,
            label: label.to_owned(),
        }
    }
}

impl Entry {
    /// `finding` with its places worked out.
    pub fn of(finding: &Finding, sources: &Sources) -> Self {
        let place = |span: Span, label: &str| Place::of(span, label, sources);
        Self {
            code: finding.code,
            severity: finding.severity.word(),
            message: finding.message.clone(),
            place: finding.primary.as_ref().map(|label| place(label.span, &label.text)),
            related: finding.secondary.iter().map(|label| place(label.span, &label.text)).collect(),
            help: finding.helps.clone(),
            fix: finding.fix.as_ref().map(|fix| FixEntry {
                place: place(fix.span, ""),
                replacement: fix.replacement.clone(),
                safe: fix.safe,
            }),
        }
    }
}

impl Document {
    /// Nothing yet.
    pub fn new() -> Self {
        Self {
            schema_version: SCHEMA_VERSION,
            tool: format!("bandloom {}", env!("CARGO_PKG_VERSION")),
            findings: Vec::new(),
            accepted: Vec::new(),
            unreadable: Vec::new(),
            left_out: 0,
        }
    }

    /// The document of `run`.
    pub fn of(run: &Run) -> Self {
        let mut document = Self::new();
        document.left_out = run.left_out;
        for file in &run.files {
            if let Some(message) = &file.unreadable {
                document.unreadable.push(Unreadable { file: file.path.clone(), message: message.clone() });
            }
            let entry = |finding: &Finding| Entry::of(finding, file.sources);
            document.findings.extend(file.findings.iter().map(|it| entry(it)));
            document.accepted.extend(file.accepted.iter().map(|(finding, because)| AcceptedEntry {
                finding: entry(finding),
                because: (*because).to_owned(),
            }));
        }
        document
    }

    /// As text, ended by a line break.
    pub fn text(&self) -> String {
        // Strings and whole numbers only: this cannot fail.
        let mut text = serde_json::to_string_pretty(self).unwrap_or_default();
        text.push('\n');
        text
    }
}

/// One line of the line format.
#[derive(Serialize)]
#[serde(tag = "kind", rename_all = "snake_case")]
enum Line<'a> {
    /// The first line.
    Begin {
        schema_version: u32,
        tool: &'a str,
    },
    Finding(&'a Entry),
    Accepted(&'a AcceptedEntry),
    Unreadable(&'a Unreadable),
    /// The last line: a reader that has it has everything.
    End {
        findings: usize,
        left_out: usize,
    },
}

/// `run` as one JSON object a line: `begin`, then what the document lists, then `end`.
pub fn lines(run: &Run) -> String {
    let document = Document::of(run);
    let begin = Line::Begin { schema_version: SCHEMA_VERSION, tool: &document.tool };
    let end = Line::End { findings: document.findings.len(), left_out: document.left_out };
    let all = std::iter::once(begin)
        .chain(document.findings.iter().map(Line::Finding))
        .chain(document.accepted.iter().map(Line::Accepted))
        .chain(document.unreadable.iter().map(Line::Unreadable))
        .chain([end]);
    // Strings and whole numbers only: this cannot fail.
    all.map(|line| serde_json::to_string(&line).unwrap_or_default() + "\n").collect()
}

impl Default for Document {
    fn default() -> Self {
        Self::new()
    }
}
