//! What the user wrote: items, statements, values, each with its span, and every comment.
//!
//! No physics and no meaning: a number keeps the unit that was written, a word stays a word.
//! The tree is permissive on purpose (a bare number, a decimal comma, an unknown statement all
//! have a shape here), so that later passes can say what is wrong in the trade's terms.

use crate::source::{Span, Spanned};

/// A whole file.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct File {
    /// Top-level items in order.
    pub items: Vec<Item>,
    /// Every `//` comment of the file, in order, from the slashes to the end of the line.
    pub comments: Vec<Spanned<String>>,
}

/// One top-level item.
#[derive(Clone, Debug, PartialEq)]
pub enum Item {
    /// `use "parts/tunnels.stack"`
    Use(Use),
    /// `let d = 700 nm`
    Let(Let),
    /// `condition noon { … }`
    Condition(Named),
    /// `spectrum lamp { … }`
    Spectrum(Named),
    /// `material Foo { … }`
    Material(Named),
    /// `alloy FooBar { … }`
    Alloy(Named),
    /// `part name(a, b = 15 nm) { … }`
    Part(Part),
    /// `stack "Name" like "Other" { … }`
    Stack(Stack),
    /// A statement that belongs inside a block, or a word that is no item.
    Stray(Statement),
    /// Text that could not be read; already reported.
    Invalid(Span),
}

/// `use "path"`
#[derive(Clone, Debug, PartialEq)]
pub struct Use {
    /// The path as written.
    pub path: Spanned<String>,
    /// The whole statement.
    pub span: Span,
}

/// `let name = value`
#[derive(Clone, Debug, PartialEq)]
pub struct Let {
    /// The name.
    pub name: Spanned<String>,
    /// What it stands for.
    pub value: Value,
    /// The whole statement.
    pub span: Span,
}

/// An item of the form `keyword name { statements }`.
#[derive(Clone, Debug, PartialEq)]
pub struct Named {
    /// The name.
    pub name: Spanned<String>,
    /// Its body.
    pub block: Block,
    /// The whole item.
    pub span: Span,
}

/// `part name(a, b = 15 nm) { … }`
#[derive(Clone, Debug, PartialEq)]
pub struct Part {
    /// The name.
    pub name: Spanned<String>,
    /// Parameters with their default, if any.
    pub parameters: Vec<(Spanned<String>, Option<Value>)>,
    /// Its body.
    pub block: Block,
    /// The whole item.
    pub span: Span,
}

/// `stack "Name" like "Other" { … }`
#[derive(Clone, Debug, PartialEq)]
pub struct Stack {
    /// The name shown to people.
    pub name: Spanned<String>,
    /// The stack it starts from.
    pub like: Option<Spanned<String>>,
    /// Its body.
    pub block: Block,
    /// The whole item.
    pub span: Span,
}

/// Statements between braces.
#[derive(Clone, Debug, PartialEq)]
pub struct Block {
    /// In order.
    pub statements: Vec<Statement>,
    /// From `{` to `}`, both included.
    pub span: Span,
}

/// One statement inside a block.
#[derive(Clone, Debug, PartialEq)]
pub enum Statement {
    /// `base GaInP matched 612 nm p 1e17 /cm3 Zn { … } as thick`
    Layer(Box<LayerStatement>),
    /// `junction top { … }`, `tunnel as lower { … }`, `recombination { … }`, `repeat 20 { … }`
    Group(Box<Group>),
    /// `name argument argument … { … }`: `light AM1.5G`, `shading 3 %`, `voltage from fit { … }`,
    /// `fingers { … }`, `growth inverted`
    Property(Property),
    /// `let d = 700 nm`
    Let(Let),
    /// `place NAME(12 nm, b = 3 nm) as lower`
    Place(Place),
    /// `require METRIC COMPARISON QUANTITY under CONDITION at yield P`
    Require(Box<Require>),
    /// `seek highest efficiency under noon weighing noon 3, roof 1`
    Seek(Box<Seek>),
    /// `chart efficiency against top.base.thickness over 0.2 .. 1.5 um, 40 points`
    Chart(Chart),
    /// `vary together top.* ± 2 % sigma`
    Vary(Box<Vary>),
    /// `measured eqe "run-17.csv" of top under noon`
    Measured(Measured),
    /// `accept lattice.mismatch on buffer because "…"`
    Accept(Accept),
    /// `limit lattice.mismatch 0.05 %`
    Limit(Limit),
    /// `top.base 580 nm p 2e17 /cm3`: in a stack made `like` another
    Replace(Box<Replace>),
    /// `remove top.bsf`
    Remove(Remove),
    /// `insert after top.window { … }`
    Insert(Insert),
    /// Text that could not be read; already reported.
    Invalid(Span),
}

impl Statement {
    /// Where the statement stands.
    pub fn span(&self) -> Span {
        match self {
            Self::Layer(it) => it.span,
            Self::Group(it) => it.span,
            Self::Property(it) => it.span,
            Self::Let(it) => it.span,
            Self::Place(it) => it.span,
            Self::Require(it) => it.span,
            Self::Seek(it) => it.span,
            Self::Chart(it) => it.span,
            Self::Vary(it) => it.span,
            Self::Measured(it) => it.span,
            Self::Accept(it) => it.span,
            Self::Limit(it) => it.span,
            Self::Replace(it) => it.span,
            Self::Remove(it) => it.span,
            Self::Insert(it) => it.span,
            Self::Invalid(span) => *span,
        }
    }
}

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

/// `junction top { … }`, `tunnel { … }`, `recombination { … }`, `repeat 20 { … }`
#[derive(Clone, Debug, PartialEq)]
pub struct Group {
    /// Which of them.
    pub kind: Spanned<GroupKind>,
    /// `top` after `junction`; after `as` for the others.
    pub name: Option<Spanned<String>>,
    /// `20` after `repeat`.
    pub count: Option<Value>,
    /// Words between the head and the block: `separate`.
    pub words: Vec<Spanned<String>>,
    /// Its body.
    pub block: Block,
    /// The whole statement.
    pub span: Span,
}

/// Which kind of group.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum GroupKind {
    /// A subcell.
    Junction,
    /// A tunnel junction.
    Tunnel,
    /// A recombination contact.
    Recombination,
    /// The same layers several times.
    Repeat,
}

/// `name argument … { … }`
#[derive(Clone, Debug, PartialEq)]
pub struct Property {
    /// The first word.
    pub name: Spanned<String>,
    /// What follows on the line; commas between arguments are dropped.
    pub arguments: Vec<Argument>,
    /// `{ … }`
    pub block: Option<Block>,
    /// The whole statement.
    pub span: Span,
}

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

/// `measured eqe "run-17.csv" of top under noon`
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
