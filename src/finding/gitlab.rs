//! Findings as a code quality report, which GitLab shows beside the lines of a merge request.
//!
//! One list; every entry has a description, a check name, a fingerprint of its own, a severity of
//! five and a path without `./` with a first line. What has no place is put on line 1 of its file.

use serde::Serialize;

use crate::finding::fingerprint::Fingerprints;
use crate::finding::run::Run;
use crate::finding::{Finding, Severity};
use crate::source::{Sources, shown};

#[derive(Serialize)]
struct Entry {
    description: String,
    check_name: &'static str,
    fingerprint: String,
    severity: &'static str,
    location: Location,
}

#[derive(Serialize)]
struct Location {
    path: String,
    positions: Positions,
}

#[derive(Serialize)]
struct Positions {
    begin: Position,
    end: Position,
}

#[derive(Serialize)]
struct Position {
    line: usize,
    column: usize,
}

/// The report of `run`.
pub fn document(run: &Run) -> String {
    let mut prints = Fingerprints::default();
    let mut entries = Vec::new();
    for file in &run.files {
        for finding in &file.findings {
            entries.push(Entry {
                description: description(finding),
                check_name: finding.code,
                fingerprint: prints.next(finding, file.sources),
                severity: match finding.severity {
                    Severity::Error => "critical",
                    Severity::Warning => "major",
                    Severity::Advice => "info",
                },
                location: location(finding, file.sources, &file.path),
            });
        }
    }
    // Strings and whole numbers only: this cannot fail.
    let mut text = serde_json::to_string_pretty(&entries).unwrap_or_default();
    text.push('\n');
    text
}

fn description(finding: &Finding) -> String {
    let mut text = finding.message.clone();
    for help in &finding.helps {
        text.push_str("; help: ");
        text.push_str(help);
    }
    text
}

fn location(finding: &Finding, sources: &Sources, file: &str) -> Location {
    let first = || Position { line: 1, column: 1 };
    let Some(label) = &finding.primary else {
        return Location { path: bare(file), positions: Positions { begin: first(), end: first() } };
    };
    let source = sources.get(label.span.source);
    let at = |offset: u32| {
        let position = source.position(offset as usize);
        Position { line: position.line, column: position.column }
    };
    Location {
        path: bare(&shown(&source.path)),
        positions: Positions { begin: at(label.span.start), end: at(label.span.end) },
    }
}

fn bare(path: &str) -> String {
    path.trim_start_matches("./").to_owned()
}
