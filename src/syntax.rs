//! What the user wrote: items, statements, values, each with its span, and every comment.
//!
//! No physics and no meaning: a number keeps the unit that was written, a word stays a word.
//! The tree is permissive on purpose (a bare number, a decimal comma, an unknown statement all
//! have a shape here), so that later passes can say what is wrong in the trade's terms.

use crate::source::{Span, Spanned};

mod layer;
mod request;
mod value;

pub use layer::{Attribute, DUTIES, LayerStatement, MaterialPhrase, Polarity, Qualifier};
pub use request::{
    Accept, Chart, ChartAxis, Comparison, Insert, Limit, Measured, Place, Remove, Replace, Require, Seek,
    SeekTarget, Vary,
};
pub use value::{Argument, Expression, FreeRange, Number, Operator, Tolerance, ToleranceMeaning, Value};

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
    /// Text that could not be read, or an item whose braces do not pair; already reported.
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
    /// Where `replaces` stands, if it does.
    pub replaces: Option<Span>,
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
    Measured(Box<Measured>),
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
