//! What the designer asks for, leaves open, tolerates and accepts.

use crate::design::{Comparison, Condition, ToleranceMeaning};
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
    /// Dotted path of what is drawn.
    pub metric: Spanned<String>,
    /// One or two; empty where one of them cannot be evaluated yet, which is reported.
    pub axes: Vec<ChartAxis>,
    /// Conditions by name; empty means all.
    pub under: Vec<Spanned<String>>,
    /// As written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}

/// What a chart is drawn against.
#[derive(Clone, Debug, PartialEq)]
pub struct ChartAxis {
    /// As written: `temperature`, `top.base.thickness`.
    pub path: Spanned<String>,
    /// What it changes.
    pub kind: AxisKind,
    /// SI, as written.
    pub from: f64,
    /// SI, as written; may lie below `from`.
    pub to: f64,
    /// At least 2.
    pub points: usize,
}

/// What an axis changes.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum AxisKind {
    /// Cell temperature of the condition, K.
    Temperature,
    /// Multiple of the condition's light.
    Concentration,
    /// Angle of incidence, rad.
    Incidence,
    /// Thickness of the layer of that index, m.
    Thickness(usize),
}

impl ChartAxis {
    /// The unit its values are shown in.
    pub fn unit(&self) -> &'static str {
        match self.kind {
            AxisKind::Temperature => "degC",
            AxisKind::Concentration => "times",
            AxisKind::Incidence => "deg",
            AxisKind::Thickness(_) => "nm",
        }
    }

    /// SI values, from one end to the other: even, but in the logarithm for a concentration over a
    /// decade or more.
    pub fn values(&self) -> Vec<f64> {
        let count = self.points.max(2);
        let share = |i: usize| i as f64 / (count - 1) as f64;
        let ratio = self.to / self.from;
        let wide = self.kind == AxisKind::Concentration && ratio > 0.0 && ratio.ln().abs() >= 10f64.ln();
        (0..count)
            .map(|i| match i {
                0 => self.from,
                i if i + 1 == count => self.to,
                i if wide => self.from * ratio.powf(share(i)),
                i => self.from + (self.to - self.from) * share(i),
            })
            .collect()
    }
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

/// Weighted conditions, one a row of a table.
#[derive(Clone, Debug)]
pub struct Season {
    /// The table, as named.
    pub file: String,
    /// Index of the condition its rows start from.
    pub condition: usize,
    /// In the order of the table.
    pub rows: Vec<SeasonRow>,
    /// The whole statement.
    pub span: Span,
}

/// One of them.
#[derive(Clone, Debug)]
pub struct SeasonRow {
    /// Weight, s, ≥ 0.
    pub seconds: f64,
    /// The condition it starts from with what the row states; a concentration of 0 is the night.
    pub condition: Condition,
}

/// What is measured.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum MeasuredKind {
    /// External quantum efficiency of a junction against wavelength.
    Eqe,
    /// Current against voltage.
    Jv,
}

/// A measurement to lay over.
#[derive(Clone, Debug, PartialEq)]
pub struct Measured {
    /// What.
    pub kind: MeasuredKind,
    /// The table, as named.
    pub file: String,
    /// Index of the junction; `None` for the whole stack.
    pub junction: Option<usize>,
    /// Index of the condition it is laid over.
    pub condition: usize,
    /// Wavelength in m, or voltage in V.
    pub at: Vec<f64>,
    /// Plain share, or A/m2.
    pub values: Vec<f64>,
    /// Wavelength in m and response of the reference device, if stated.
    pub reference: Option<(Vec<f64>, Vec<f64>)>,
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
