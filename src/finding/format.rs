//! The formats findings are written in, and the one place that knows them all.

use crate::finding::json::{Document, lines};
use crate::finding::render::{Look, render};
use crate::finding::run::Run;
use crate::finding::{github, gitlab, junit, narrated, sarif, short};

/// How findings are written.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Format {
    /// For people: the source framed.
    #[default]
    Human,
    /// For people, one line a finding.
    Short,
    /// For people who listen: sentences, no drawing.
    Narrated,
    /// One JSON document.
    Json,
    /// One JSON object a line.
    Jsonl,
    /// SARIF 2.1.0.
    Sarif,
    /// Annotations on a pull request of GitHub.
    Github,
    /// A code quality report of GitLab.
    Gitlab,
    /// JUnit XML: each requirement and each finding a test case.
    Junit,
}

impl Format {
    /// Every format with its word.
    pub const ALL: &[(Self, &'static str)] = &[
        (Self::Human, "human"),
        (Self::Short, "short"),
        (Self::Narrated, "narrated"),
        (Self::Json, "json"),
        (Self::Jsonl, "jsonl"),
        (Self::Sarif, "sarif"),
        (Self::Github, "github"),
        (Self::Gitlab, "gitlab"),
        (Self::Junit, "junit"),
    ];

    /// The format of that word.
    pub fn of_word(word: &str) -> Option<Self> {
        Self::ALL.iter().find(|(_, known)| *known == word).map(|(format, _)| *format)
    }

    /// Whether people read it as it is.
    pub fn is_for_people(self) -> bool {
        matches!(self, Self::Human | Self::Short | Self::Narrated)
    }

    /// Whether files that could not be read are told within it.
    pub fn tells_unreadable(self) -> bool {
        matches!(self, Self::Json | Self::Jsonl | Self::Sarif | Self::Junit)
    }

    /// `run` in this format. Only [`Format::Human`] looks at colour and width.
    pub fn text(self, run: &Run, look: Look) -> String {
        match self {
            Self::Json => Document::of(run).text(),
            Self::Jsonl => lines(run),
            Self::Sarif => sarif::document(run),
            Self::Gitlab => gitlab::document(run),
            Self::Junit => junit::document(run),
            Self::Human | Self::Short | Self::Narrated | Self::Github => self.listed(run, look),
        }
    }

    fn listed(self, run: &Run, look: Look) -> String {
        let mut out = String::new();
        for (finding, sources) in run.findings() {
            match self {
                Self::Short => out.push_str(&short::line(finding, sources)),
                Self::Narrated => out.push_str(&narrated::told(finding, sources)),
                Self::Github => out.push_str(&github::annotation(finding, sources)),
                _ => {
                    out.push_str(&render(finding, sources, look));
                    out.push('\n');
                }
            }
        }
        let more = run.left_out;
        match self {
            _ if more == 0 => {}
            Self::Github => {
                out.push_str(&format!("::notice title=bandloom::{more} more findings not shown\n"));
            }
            _ => out.push_str(&format!("{more} more not shown; `--max-findings 0` shows all\n\n")),
        }
        out
    }
}
