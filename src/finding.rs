//! What a pass has to say about the input: one plain value for every output format.
//!
//! A [`Finding`] is worded where the fault is detected. Renderers only lay it out; `miette` is
//! named in the terminal renderer and nowhere else.

use crate::source::Span;

pub mod apply;
mod excerpt;
mod fingerprint;
pub mod format;
pub mod github;
pub mod gitlab;
pub mod json;
pub mod junit;
pub mod narrated;
pub mod render;
pub mod run;
pub mod sarif;
pub mod short;
pub mod suggest;

/// How much a finding weighs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Severity {
    /// Something to know; never fails a run.
    Advice,
    /// Probably a fault; fails a run under `--strict`.
    Warning,
    /// A fault; the run fails.
    Error,
}

impl Severity {
    /// The word shown to people and written to JSON.
    pub fn word(self) -> &'static str {
        match self {
            Self::Advice => "advice",
            Self::Warning => "warning",
            Self::Error => "error",
        }
    }
}

/// A place and what is there.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Label {
    /// Where.
    pub span: Span,
    /// What is here; may be empty.
    pub text: String,
}

/// An edit that cures the finding.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fix {
    /// What is replaced.
    pub span: Span,
    /// The new text.
    pub replacement: String,
    /// Whether the cure is certain, so that it may be applied without asking.
    pub safe: bool,
}

/// One thing found, with its place, its way out and, where it is certain, its cure.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Finding {
    /// Kebab words under a family, `lattice.mismatch`; never reused for another meaning.
    pub code: &'static str,
    /// How much it weighs.
    pub severity: Severity,
    /// The fault with the user's values and units; lower case, no full stop, names in backticks.
    pub message: String,
    /// The place that is wrong. `None` for trouble that has no place in a text.
    pub primary: Option<Label>,
    /// The other half of the story: first definition, the lattice beneath, …
    pub secondary: Vec<Label>,
    /// Each one action with a concrete value.
    pub helps: Vec<String>,
    /// An edit, where one exists.
    pub fix: Option<Fix>,
}

impl Finding {
    /// A finding of `severity` without a place yet.
    pub fn new(severity: Severity, code: &'static str, message: impl Into<String>) -> Self {
        Self {
            code,
            severity,
            message: message.into(),
            primary: None,
            secondary: Vec::new(),
            helps: Vec::new(),
            fix: None,
        }
    }

    /// An error.
    pub fn error(code: &'static str, message: impl Into<String>) -> Self {
        Self::new(Severity::Error, code, message)
    }

    /// A warning.
    pub fn warning(code: &'static str, message: impl Into<String>) -> Self {
        Self::new(Severity::Warning, code, message)
    }

    /// Advice.
    pub fn advice(code: &'static str, message: impl Into<String>) -> Self {
        Self::new(Severity::Advice, code, message)
    }

    /// Sets the primary place and says what is there.
    #[must_use]
    pub fn at(mut self, span: Span, text: impl Into<String>) -> Self {
        self.primary = Some(Label { span, text: text.into() });
        self
    }

    /// Adds a secondary place.
    #[must_use]
    pub fn beside(mut self, span: Span, text: impl Into<String>) -> Self {
        self.secondary.push(Label { span, text: text.into() });
        self
    }

    /// Adds a way out.
    #[must_use]
    pub fn help(mut self, text: impl Into<String>) -> Self {
        self.helps.push(text.into());
        self
    }

    /// Adds the edit that cures it. `safe` where the cure is certain.
    #[must_use]
    pub fn fix(mut self, span: Span, replacement: impl Into<String>, safe: bool) -> Self {
        self.fix = Some(Fix { span, replacement: replacement.into(), safe });
        self
    }
}

/// Findings in the order they were made; [`Findings::sorted`] gives the order they are shown in.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Findings(pub Vec<Finding>);

impl Findings {
    /// None yet.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds one.
    pub fn push(&mut self, finding: Finding) {
        self.0.push(finding);
    }

    /// Adds all of another pass.
    pub fn extend(&mut self, other: Self) {
        self.0.extend(other.0);
    }

    /// Whether one of error level is among them.
    pub fn has_errors(&self) -> bool {
        self.count(Severity::Error) > 0
    }

    /// How many of one severity.
    pub fn count(&self, severity: Severity) -> usize {
        self.0.iter().filter(|finding| finding.severity == severity).count()
    }

    /// All of them.
    pub fn iter(&self) -> impl Iterator<Item = &Finding> {
        self.0.iter()
    }

    /// Whether there are none.
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    /// By place (source, then offset), those without a place first, equal ones once.
    #[must_use]
    pub fn sorted(mut self) -> Self {
        self.0.sort_by(|a, b| {
            let key = |f: &Finding| f.primary.as_ref().map(|label| label.span);
            key(a).cmp(&key(b)).then(b.severity.cmp(&a.severity)).then(a.code.cmp(b.code))
        });
        self.0.dedup();
        self
    }
}

/// What a pass gives back: as much of the value as could be made, and all it has to say.
#[derive(Clone, Debug)]
pub struct Outcome<T> {
    /// `None` where nothing useful could be made.
    pub value: Option<T>,
    /// Everything found on the way, whether or not there is a value.
    pub findings: Findings,
}

impl<T> Outcome<T> {
    /// A value with nothing to say.
    pub fn of(value: T) -> Self {
        Self { value: Some(value), findings: Findings::new() }
    }

    /// A value with findings.
    pub fn with(value: T, findings: Findings) -> Self {
        Self { value: Some(value), findings }
    }

    /// No value, only findings.
    pub fn nothing(findings: Findings) -> Self {
        Self { value: None, findings }
    }
}
