//! What the designer asks for, leaves open, tolerates and accepts.

use crate::design::{Comparison, ToleranceMeaning};
use crate::source::{Span, Spanned};

/// One `require`.
#[derive(Clone, Debug)]
pub struct Requirement {
    /// Dotted path.
    pub metric: Spanned<String>,
    /// The sign between.
    pub comparison: Comparison,
    /// SI (fractions plain, gaps in J).
    pub bound: f64,
    /// The bound as written, for people.
    pub bound_text: String,
    /// Conditions by name; empty means all.
    pub under: Vec<Spanned<String>>,
    /// `at yield 95 %` as a fraction.
    pub at_yield: Option<f64>,
    /// The whole statement as written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}

/// A value left free.
#[derive(Clone, Debug, PartialEq)]
pub struct FreeValue {
    /// `top.base.thickness`, `top.base.gap`, `coat1.thickness`
    pub path: String,
    /// SI bounds.
    pub range: (f64, f64),
    /// SI value in force, `None` while not settled.
    pub value: Option<f64>,
    /// The range as written.
    pub text: String,
    /// From the number or `free` on.
    pub span: Span,
}

/// What is sought.
#[derive(Clone, Debug, PartialEq)]
pub struct Seek {
    /// As written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}

/// A chart asked for.
#[derive(Clone, Debug, PartialEq)]
pub struct Chart {
    /// As written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}

/// A tolerance of one quantity.
#[derive(Clone, Debug, PartialEq)]
pub struct Tolerance {
    /// `top.base.thickness`
    pub path: String,
    /// SI half width or standard deviation, > 0.
    pub amount: f64,
    /// Which of them.
    pub meaning: ToleranceMeaning,
    /// As written, `± 3 % sigma`.
    pub text: String,
    /// From the sign on.
    pub span: Span,
}

/// A measurement to lay over.
#[derive(Clone, Debug, PartialEq)]
pub struct Measured {
    /// As written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}

/// A threshold set for this file.
#[derive(Clone, Debug, PartialEq)]
pub struct Limit {
    /// The code.
    pub code: Spanned<String>,
    /// SI.
    pub value: f64,
    /// As written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}
