//! What a run over several files found, as every format reads it.

use crate::finding::{Finding, Severity};
use crate::source::Sources;

/// A whole run. Its formats say the same; they only lay it out.
#[derive(Debug, Default)]
pub struct Run<'a> {
    /// In the order given.
    pub files: Vec<FileRun<'a>>,
    /// How many findings `--max-findings` left out.
    pub left_out: usize,
    /// What is known of a code, for formats that list the rules.
    pub about: Option<fn(&str) -> About>,
}

/// What a code is about.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct About {
    /// In a few words.
    pub title: String,
    /// What it reports, a few sentences.
    pub reports: String,
}

/// One file of it.
#[derive(Debug)]
pub struct FileRun<'a> {
    /// As given, forward slashes.
    pub path: String,
    /// Every text read for it.
    pub sources: &'a Sources,
    /// What stands, in the order shown.
    pub findings: Vec<&'a Finding>,
    /// What is accepted, with the reason.
    pub accepted: Vec<(&'a Finding, &'a str)>,
    /// What was asked for and judged.
    pub asked: Vec<Asked>,
    /// Why it could not be read.
    pub unreadable: Option<String>,
}

/// One `require` under one condition.
#[derive(Clone, Debug, PartialEq)]
pub struct Asked {
    /// The stack's name.
    pub stack: String,
    /// As written.
    pub text: String,
    /// The condition, where the metric has one.
    pub condition: Option<String>,
    /// Whether it holds.
    pub met: bool,
    /// What came out, with its unit.
    pub value: String,
}

impl<'a> Run<'a> {
    /// Every finding that stands, with the texts it lies in.
    pub fn findings(&self) -> impl Iterator<Item = (&'a Finding, &'a Sources)> {
        self.files.iter().flat_map(|file| file.findings.iter().map(|finding| (*finding, file.sources)))
    }

    /// Every code found or accepted, sorted, once, with its gravest severity.
    pub fn codes(&self) -> Vec<(&'static str, Severity)> {
        let accepted = self.files.iter().flat_map(|file| file.accepted.iter().map(|(it, _)| *it));
        let mut codes: Vec<(&'static str, Severity)> = self
            .findings()
            .map(|(finding, _)| finding)
            .chain(accepted)
            .map(|finding| (finding.code, finding.severity))
            .collect();
        codes.sort_by(|a, b| a.0.cmp(b.0).then(b.1.cmp(&a.1)));
        codes.dedup_by_key(|(code, _)| *code);
        codes
    }
}
