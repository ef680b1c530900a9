//! Layers as written: the duty, the material phrase, and what follows it.

use crate::source::{Span, Spanned};
use crate::syntax::{Argument, Block, Value};

/// A layer: its duty, its material, and what is said of it on the line.
#[derive(Clone, Debug, PartialEq)]
pub struct LayerStatement {
    /// `window`, `emitter`, `base`, `coat`, `buffer`, `wafer`, `metal`, …: the word as written.
    pub duty: Spanned<String>,
    /// The material phrase; `None` where none was written (`air`).
    pub material: Option<MaterialPhrase>,
    /// Everything else on the line, in order.
    pub attributes: Vec<Attribute>,
    /// `as name`
    pub alias: Option<Spanned<String>>,
    /// `{ diffusion_length 20 um … }`
    pub block: Option<Block>,
    /// The whole statement.
    pub span: Span,
}

/// `GaInP matched of gap 2.1 eV`, `Ga0.51In0.49P`, `ideal of gap 1.42 eV`
#[derive(Clone, Debug, PartialEq)]
pub struct MaterialPhrase {
    /// `graded` before the name.
    pub graded: Option<Span>,
    /// `diffused` before or instead of a material: a doped skin of the wafer.
    pub diffused: Option<Span>,
    /// The name or formula exactly as written, `(Al0.3Ga0.7)0.51In0.49P`.
    pub name: Spanned<String>,
    /// What narrows it down, in order.
    pub qualifiers: Vec<Qualifier>,
    /// The whole phrase.
    pub span: Span,
}

/// One narrowing of a material phrase.
#[derive(Clone, Debug, PartialEq)]
pub enum Qualifier {
    /// `matched`, `matched to buffer`
    Matched {
        /// The layer it is matched to, if named.
        to: Option<Spanned<String>>,
        /// The words.
        span: Span,
    },
    /// `of gap 2.1 eV`
    OfGap {
        /// The gap asked for.
        value: Value,
        /// The words and the value.
        span: Span,
    },
    /// `ordered to 1.85 eV`
    OrderedTo {
        /// The gap asked for.
        value: Value,
        /// The words and the value.
        span: Span,
    },
    /// `with In 0.49`, `with In 0.49 .. 0.72`
    With {
        /// The element.
        element: Spanned<String>,
        /// Its fraction of its sublattice.
        value: Value,
        /// The words and the value.
        span: Span,
    },
}

/// One thing said of a layer after its material.
#[derive(Clone, Debug, PartialEq)]
pub enum Attribute {
    /// A quantity in the place of a thickness: `612 nm free 300 .. 1200 nm ± 3 % sigma`, `d`
    Value(Value),
    /// `n 2e18 /cm3 Si`
    Doping {
        /// `n` or `p`.
        polarity: Spanned<Polarity>,
        /// The density.
        value: Value,
        /// The dopant.
        species: Option<Spanned<String>>,
        /// All of it.
        span: Span,
    },
    /// `removed`
    Removed(Span),
    /// `only under fingers`
    OnlyUnderFingers(Span),
    /// `relaxed`
    Relaxed(Span),
    /// `pseudomorphic`
    Pseudomorphic(Span),
    /// `collecting`
    Collecting(Span),
    /// `in 8 steps of 250 nm`
    Steps {
        /// How many.
        count: Value,
        /// Each how thick.
        of: Option<Value>,
        /// All of it.
        span: Span,
    },
    /// `absorbs all_above_gap`, `absorbs 95 %`
    Absorbs {
        /// The word or the share.
        argument: Argument,
        /// All of it.
        span: Span,
    },
    /// `offcut 6 deg`
    Offcut {
        /// The angle.
        value: Value,
        /// All of it.
        span: Span,
    },
    /// A word that is none of the above.
    Word(Spanned<String>),
    /// A quoted text.
    Text(Spanned<String>),
}

/// The sign of the majority carriers.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Polarity {
    /// Electrons.
    N,
    /// Holes.
    P,
}

/// Words that open a layer statement.
pub const DUTIES: &[&str] = &[
    "absorber",
    "adhesive",
    "air",
    "base",
    "bsf",
    "buffer",
    "cap",
    "coat",
    "contact",
    "cover",
    "electron_contact",
    "emitter",
    "etch_stop",
    "handle",
    "hole_contact",
    "intrinsic",
    "layer",
    "metal",
    "mirror",
    "passivation",
    "wafer",
    "window",
];
