//! [`Design`] + [`Results`] + findings → the design sheet, as HTML, Markdown, JSON and CSV.
//!
//! The sheet is prepared in three steps: [`view`] turns numbers into words (every number is
//! formatted there, none in a template), [`figure`] draws, [`mod@render`] fills the templates.
//! A user's folder may replace any template; the view model is the contract it is written for.

use serde::Serialize;

use crate::design::Design;
use crate::results::Results;

pub mod context;
pub mod figure;
pub mod number;
pub mod numbers;
pub mod palette;
pub mod render;
pub mod text;
pub mod view;
pub mod width;

/// All that a sheet is made from.
#[derive(Clone, Copy, Debug)]
pub struct ReportInput<'a> {
    /// What the stack means.
    pub design: &'a Design,
    /// What came out.
    pub results: &'a Results,
    /// What was found, in the order shown, without those that the file accepts.
    pub findings: &'a [FindingRow],
    /// Findings that an `accept` of the file silenced.
    pub accepted: &'a [AcceptedRow],
}

/// One finding as plain data: the row of the numbers file and of `check --format json`.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct FindingRow {
    /// `gap.order`
    pub code: String,
    /// `error`, `warning`, `advice`
    pub severity: String,
    /// On one line.
    pub message: String,
    /// The file as given; `None` where the finding has no place.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub file: Option<String>,
    /// From 1.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub line: Option<usize>,
    /// In characters, from 1.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub column: Option<usize>,
    /// From 1.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub end_line: Option<usize>,
    /// In characters, from 1, exclusive.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub end_column: Option<usize>,
    /// Ways out, each one action.
    pub help: Vec<String>,
    /// An edit that cures it, where one exists.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub fix: Option<FixRow>,
}

/// An edit: what stands between the two places is replaced.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct FixRow {
    /// The file as given.
    pub file: String,
    /// From 1.
    pub line: usize,
    /// In characters, from 1.
    pub column: usize,
    /// From 1.
    pub end_line: usize,
    /// In characters, from 1, exclusive.
    pub end_column: usize,
    /// The new text.
    pub replacement: String,
    /// Whether the cure is certain, so that it may be applied without asking.
    pub safe: bool,
}

/// A finding that the file accepts, with the reason given there.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct AcceptedRow {
    /// What would have been reported.
    pub finding: FindingRow,
    /// `because "…"`
    pub reason: String,
}

/// What to write.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Format {
    /// `sheet.html`, complete in itself.
    Html,
    /// `sheet.md` and its figures as SVG files beside it.
    Markdown,
    /// `results.json`, the numbers file.
    Json,
    /// `curves.csv`: the current–voltage curves; `charts.csv` and `season.csv` where they are asked
    /// for.
    Csv,
}

impl Format {
    /// Every format with the word that asks for it.
    pub const ALL: &[(Self, &'static str)] =
        &[(Self::Html, "html"), (Self::Markdown, "md"), (Self::Json, "json"), (Self::Csv, "csv")];

    /// The format a word asks for.
    pub fn of_word(word: &str) -> Option<Self> {
        Self::ALL.iter().find(|(_, w)| *w == word).map(|(format, _)| *format)
    }
}

/// Templates that stand in for the built-in ones, by the name of the built-in one
/// (`sheet.html`, `parts/verdict.html`, `sheet.css`, `sheet.md`).
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Templates {
    /// Name and text.
    pub replaced: Vec<(String, String)>,
}

impl Templates {
    /// The names that can be replaced, with the built-in text of each.
    pub fn built_in() -> &'static [(&'static str, &'static str)] {
        render::BUILT_IN
    }
}

/// One file to write, relative to the stack's folder.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OutputFile {
    /// `sheet.html`
    pub name: String,
    /// Its content.
    pub bytes: Vec<u8>,
}

/// Why a sheet could not be made. Built-in templates never give one.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ReportError {
    /// The template's name, where one is to blame.
    pub template: Option<String>,
    /// Its line, from 1.
    pub line: Option<usize>,
    /// What is wrong, on one line.
    pub message: String,
}

impl std::fmt::Display for ReportError {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match (&self.template, self.line) {
            (Some(template), Some(line)) => write!(f, "template `{template}`, line {line}: {}", self.message),
            (Some(template), None) => write!(f, "template `{template}`: {}", self.message),
            _ => f.write_str(&self.message),
        }
    }
}

impl std::error::Error for ReportError {}

/// Makes every file of `formats`, in the order html, md, json, csv. The same input gives the
/// same bytes.
///
/// # Errors
/// Where a replaced template does not parse or asks for what the view does not have; where a
/// figure is not finite (which evaluation rules out).
pub fn render(
    input: &ReportInput<'_>,
    formats: &[Format],
    templates: &Templates,
) -> Result<Vec<OutputFile>, ReportError> {
    let mut files = Vec::new();
    let wants = |format| formats.contains(&format);
    if wants(Format::Html) || wants(Format::Markdown) {
        let sheet = view::sheet(input).ok_or_else(|| ReportError {
            template: None,
            line: None,
            message: "no condition was evaluated, so there is nothing to put on a sheet".into(),
        })?;
        let engine = render::engine(templates)?;
        if wants(Format::Html) {
            let html = render::html(&engine, &sheet, templates)?;
            files.push(OutputFile { name: "sheet.html".into(), bytes: html.into_bytes() });
        }
        if wants(Format::Markdown) {
            let markdown = render::markdown(&engine, &sheet)?;
            files.push(OutputFile { name: "sheet.md".into(), bytes: markdown.into_bytes() });
            files.extend(sheet.figures().map(|figure| OutputFile {
                name: figure.file.clone(),
                bytes: figure.standalone().into_bytes(),
            }));
        }
    }
    if wants(Format::Json) {
        let json = numbers::json(input.results, input.findings)?;
        files.push(OutputFile { name: "results.json".into(), bytes: json.into_bytes() });
    }
    if wants(Format::Csv) {
        files.push(OutputFile { name: "curves.csv".into(), bytes: numbers::csv(input.results).into_bytes() });
        let asked = [
            ("charts.csv", numbers::charts_csv(input.results)),
            ("season.csv", numbers::season_csv(input.results)),
        ];
        files.extend(
            asked
                .into_iter()
                .filter_map(|(name, text)| Some(OutputFile { name: name.into(), bytes: text?.into_bytes() })),
        );
    }
    Ok(files)
}
