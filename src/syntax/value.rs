//! Values as written: numbers with their unit, expressions, ranges, tolerances.

use crate::source::{Span, Spanned};

/// One argument of a property.
#[derive(Clone, Debug, PartialEq)]
pub enum Argument {
    /// A quantity.
    Value(Value),
    /// A word or dotted path: `AM1.5G`, `inverted`, `top.base`
    Word(Spanned<String>),
    /// A quoted text.
    Text(Spanned<String>),
}

impl Argument {
    /// Where it stands.
    pub fn span(&self) -> Span {
        match self {
            Self::Value(value) => value.span,
            Self::Word(word) => word.span,
            Self::Text(text) => text.span,
        }
    }
}

/// What may stand where a quantity is due.
///
/// A name alone (`base GaAs d`) is a value whose expression is [`Expression::Name`] when it
/// stands in a slot that takes only values; where a word may stand too (a property's arguments)
/// a name alone is an [`Argument::Word`] and the reader of that property decides.
#[derive(Clone, Debug, PartialEq)]
pub struct Value {
    /// The number in force; `None` for `free 300 .. 1200 nm` that is not settled yet.
    pub expression: Option<Expression>,
    /// `.. 0.72` after the first number.
    pub up_to: Option<Expression>,
    /// `free 300 .. 1200 nm`
    pub free: Option<Box<FreeRange>>,
    /// `± 3 % sigma`
    pub tolerance: Option<Box<Tolerance>>,
    /// All of it.
    pub span: Span,
}

/// `free low .. high`
#[derive(Clone, Debug, PartialEq)]
pub struct FreeRange {
    /// Lower bound. A bound without a unit takes the other's.
    pub low: Expression,
    /// Upper bound.
    pub high: Expression,
    /// From `free` on.
    pub span: Span,
}

/// `± 3 % sigma`, `± 5 nm limits`
#[derive(Clone, Debug, PartialEq)]
pub struct Tolerance {
    /// How much.
    pub amount: Expression,
    /// `sigma` or `limits`; `None` where left out, which a later pass reports.
    pub meaning: Option<Spanned<ToleranceMeaning>>,
    /// From the sign on.
    pub span: Span,
}

/// What a tolerance means.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum ToleranceMeaning {
    /// One standard deviation of a normal distribution.
    Sigma,
    /// Half width of a uniform distribution.
    Limits,
}

/// Arithmetic on quantities. Checked by dimension in `resolve`.
#[derive(Clone, Debug, PartialEq)]
pub enum Expression {
    /// `612 nm`, `0.7`, `1,5 um`
    Number(Number),
    /// `d`, `top.base.thickness`
    Name(Spanned<String>),
    /// `-x`
    Negate(Box<Expression>, Span),
    /// `a + b`
    Binary {
        /// The sign between.
        operator: Spanned<Operator>,
        /// Left of it.
        left: Box<Expression>,
        /// Right of it.
        right: Box<Expression>,
        /// All of it.
        span: Span,
    },
    /// `min(a, b)`
    Call {
        /// The function.
        function: Spanned<String>,
        /// Its arguments.
        arguments: Vec<Expression>,
        /// All of it.
        span: Span,
    },
}

impl Expression {
    /// Where it stands.
    pub fn span(&self) -> Span {
        match self {
            Self::Number(number) => number.span,
            Self::Name(name) => name.span,
            Self::Negate(_, span) | Self::Binary { span, .. } | Self::Call { span, .. } => *span,
        }
    }
}

/// Arithmetic signs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Operator {
    /// `+`
    Add,
    /// `-`
    Subtract,
    /// `*`
    Multiply,
    /// `/`
    Divide,
    /// `^`
    Power,
}

/// A number as written, with its unit as written.
#[derive(Clone, Debug, PartialEq)]
pub struct Number {
    /// Its value before the unit; a decimal comma is read as a point.
    pub value: f64,
    /// Digits as written, `1_000`, `0,7`.
    pub text: Spanned<String>,
    /// Whether it was written with a decimal comma.
    pub decimal_comma: bool,
    /// `nm`, `/cm3`, `mohm cm2`: the text as written, `None` for a bare number.
    pub unit: Option<Spanned<String>>,
    /// Number and unit.
    pub span: Span,
}
