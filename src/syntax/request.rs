//! Statements that ask for something or change another stack.

use crate::source::{Span, Spanned};
use crate::syntax::{Attribute, Block, MaterialPhrase, Tolerance, Value};

/// `place NAME(12 nm, b = 3 nm) as lower`
#[derive(Clone, Debug, PartialEq)]
pub struct Place {
    /// The part.
    pub part: Spanned<String>,
    /// Arguments, by position or by name.
    pub arguments: Vec<(Option<Spanned<String>>, Value)>,
    /// `as lower`
    pub alias: Option<Spanned<String>>,
    /// The whole statement.
    pub span: Span,
}

/// `require METRIC COMPARISON QUANTITY [under CONDITION] [at yield P]`
#[derive(Clone, Debug, PartialEq)]
pub struct Require {
    /// Dotted path.
    pub metric: Spanned<String>,
    /// The sign between.
    pub comparison: Spanned<Comparison>,
    /// The bound.
    pub bound: Value,
    /// `under noon`; empty means every condition.
    pub under: Vec<Spanned<String>>,
    /// `at yield 95 %`
    pub at_yield: Option<Value>,
    /// The whole statement.
    pub span: Span,
}

/// How a requirement compares.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Comparison {
    /// `>=`
    AtLeast,
    /// `<=`
    AtMost,
    /// `>`
    Above,
    /// `<`
    Below,
}

impl Comparison {
    /// As written.
    pub fn sign(self) -> &'static str {
        match self {
            Self::AtLeast => ">=",
            Self::AtMost => "<=",
            Self::Above => ">",
            Self::Below => "<",
        }
    }
}

/// `seek highest efficiency`, `seek top.jsc equal 14 mA/cm2`
#[derive(Clone, Debug, PartialEq)]
pub struct Seek {
    /// Dotted path.
    pub metric: Spanned<String>,
    /// What of it.
    pub target: SeekTarget,
    /// `under noon`
    pub under: Vec<Spanned<String>>,
    /// `weighing noon 3, roof 1`
    pub weighing: Vec<(Spanned<String>, Value)>,
    /// The whole statement.
    pub span: Span,
}

/// What is sought of a metric.
#[expect(clippy::large_enum_variant, reason = "a stack holds one or two of them")]
#[derive(Clone, Debug, PartialEq)]
pub enum SeekTarget {
    /// `highest`
    Highest,
    /// `least`
    Least,
    /// `equal 14 mA/cm2`
    Equal(Value),
}

/// `chart METRIC against PATH over RANGE, N points [against …] [under …]`
#[derive(Clone, Debug, PartialEq)]
pub struct Chart {
    /// What is drawn.
    pub metric: Spanned<String>,
    /// One or two axes.
    pub axes: Vec<ChartAxis>,
    /// `under noon`
    pub under: Vec<Spanned<String>>,
    /// The whole statement.
    pub span: Span,
}

/// `against top.base.thickness over 0.2 .. 1.5 um, 40 points`
#[derive(Clone, Debug, PartialEq)]
pub struct ChartAxis {
    /// What varies.
    pub path: Spanned<String>,
    /// Between what.
    pub over: Value,
    /// In how many points.
    pub points: Option<Value>,
}

/// `vary together top.* ± 2 % sigma`
#[derive(Clone, Debug, PartialEq)]
pub struct Vary {
    /// Paths, with `*`.
    pub paths: Vec<Spanned<String>>,
    /// By how much.
    pub tolerance: Tolerance,
    /// The whole statement.
    pub span: Span,
}

/// `measured eqe "run-17.csv" of top under noon { … }`
#[derive(Clone, Debug, PartialEq)]
pub struct Measured {
    /// `eqe`, `jv`
    pub what: Spanned<String>,
    /// The file.
    pub file: Spanned<String>,
    /// `of top`
    pub of: Option<Spanned<String>>,
    /// `under noon`
    pub under: Option<Spanned<String>>,
    /// Which column is what, and the reference device.
    pub block: Option<Block>,
    /// The whole statement.
    pub span: Span,
}

/// `accept CODE [on PATH] because "…"`
#[derive(Clone, Debug, PartialEq)]
pub struct Accept {
    /// The code.
    pub code: Spanned<String>,
    /// Where; `None` for the whole stack.
    pub on: Option<Spanned<String>>,
    /// Why; `None` where left out, which a later pass reports.
    pub because: Option<Spanned<String>>,
    /// The whole statement.
    pub span: Span,
}

/// `limit CODE QUANTITY`
#[derive(Clone, Debug, PartialEq)]
pub struct Limit {
    /// The code.
    pub code: Spanned<String>,
    /// The threshold.
    pub value: Value,
    /// The whole statement.
    pub span: Span,
}

/// `top.base GaInP matched 580 nm { … }`: what is said replaces what was said, the rest stays.
#[derive(Clone, Debug, PartialEq)]
pub struct Replace {
    /// Dotted path with at least one dot, or the name of a layer of the stack.
    pub path: Spanned<String>,
    /// A new material, if the first thing said is one.
    pub material: Option<MaterialPhrase>,
    /// What else is said.
    pub attributes: Vec<Attribute>,
    /// `{ … }`
    pub block: Option<Block>,
    /// The whole statement.
    pub span: Span,
}

/// `remove top.bsf`
#[derive(Clone, Debug, PartialEq)]
pub struct Remove {
    /// Dotted path.
    pub path: Spanned<String>,
    /// The whole statement.
    pub span: Span,
}

/// `insert after top.window { … }`, `insert before …`
#[derive(Clone, Debug, PartialEq)]
pub struct Insert {
    /// Whether behind the path (away from the sun) or before it.
    pub after: bool,
    /// Dotted path.
    pub path: Spanned<String>,
    /// What comes in.
    pub block: Block,
    /// The whole statement.
    pub span: Span,
}
