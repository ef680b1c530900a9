//! Arguments of the properties in `material` and `alloy` blocks, one shape at a time.

use crate::finding::Finding;
use crate::resolve::quantities::{Expected, Role, Scope};
use crate::source::{Span, Spanned};
use crate::syntax::{Argument, Block, Property, Statement, Value};
use crate::units::{Dimension, ELEMENTARY_CHARGE};

/// Words that may stand several times in one block.
const REPEATED: &[&str] = &["cite", "sample", "source"];

/// The properties of a block in order. What is no property is a finding.
pub(super) fn properties<'a>(block: &'a Block, scope: &mut Scope) -> Vec<&'a Property> {
    let mut all: Vec<&Property> = Vec::new();
    for statement in &block.statements {
        match statement {
            Statement::Property(property) => {
                let name = &property.name.value;
                let first = all.iter().find(|known| known.name.value == *name);
                if let Some(first) = first.filter(|_| !REPEATED.contains(&name.as_str())) {
                    scope.report(
                        Finding::error("material.statement", format!("`{name}` is stated twice"))
                            .at(property.name.span, "stated again here")
                            .beside(first.name.span, "first stated here")
                            .help("keep one of them"),
                    );
                    continue;
                }
                all.push(property);
            }
            Statement::Invalid(_) => {}
            other => scope.report(
                Finding::error("name.unknown", "this statement has no place in a material")
                    .at(other.span(), "belongs in a stack")
                    .help("move it into the stack, or delete it"),
            ),
        }
    }
    all
}

/// Walks through the arguments of one property.
pub(super) struct Arguments<'a> {
    property: &'a Property,
    next: usize,
}

impl<'a> Arguments<'a> {
    pub(super) fn of(property: &'a Property) -> Self {
        Self { property, next: 0 }
    }

    fn peek(&self) -> Option<&'a Argument> {
        self.property.arguments.get(self.next)
    }

    /// The next argument if it is a word.
    pub(super) fn word(&mut self) -> Option<&'a Spanned<String>> {
        match self.peek()? {
            Argument::Word(word) => {
                self.next += 1;
                Some(word)
            }
            _ => None,
        }
    }

    /// Steps over `word` if it stands next.
    pub(super) fn keyword(&mut self, word: &str) -> bool {
        let found = matches!(self.peek(), Some(Argument::Word(next)) if next.value == word);
        self.next += usize::from(found);
        found
    }

    /// The next argument if it is a quoted text.
    pub(super) fn text(&mut self) -> Option<&'a Spanned<String>> {
        match self.peek()? {
            Argument::Text(text) => {
                self.next += 1;
                Some(text)
            }
            _ => None,
        }
    }

    /// The next argument if it may be a quantity: a number, or a name that stands for one.
    pub(super) fn value(&mut self) -> Option<Value> {
        match self.peek()? {
            Argument::Value(value) => {
                self.next += 1;
                Some(value.clone())
            }
            Argument::Word(word) => {
                self.next += 1;
                Some(Value {
                    expression: Some(crate::syntax::Expression::Name(word.clone())),
                    up_to: None,
                    free: None,
                    tolerance: None,
                    span: word.span,
                })
            }
            Argument::Text(_) => None,
        }
    }

    /// Where something is missing or wrong.
    pub(super) fn place(&self) -> Span {
        self.peek().map_or(self.property.name.span, Argument::span)
    }

    /// Whether anything is left.
    pub(super) fn has_more(&self) -> bool {
        self.peek().is_some()
    }

    /// Reports whatever is left over.
    pub(super) fn end(&self, scope: &mut Scope) {
        if let Some(extra) = self.peek() {
            scope.report(
                Finding::error(
                    "material.statement",
                    format!("`{}` says more than it can", self.property.name.value),
                )
                .at(extra.span(), "nothing is expected here")
                .help("delete it, or put it on a line of its own"),
            );
        }
    }
}

/// What one quantity of a block is.
#[derive(Clone, Copy)]
pub(super) struct Kind {
    pub(super) dimension: Dimension,
    pub(super) role: Role,
    /// SI units in the unit that is kept.
    unit: f64,
    /// How it is written, for help.
    sample: &'static str,
}

impl Kind {
    const fn new(dimension: Dimension, role: Role, unit: f64, sample: &'static str) -> Self {
        Self { dimension, role, unit, sample }
    }
    /// Any other dimension, kept in `unit` SI units.
    pub(super) const fn of(dimension: Dimension, unit: f64, sample: &'static str) -> Self {
        Self::new(dimension, Role::NotNegative, unit, sample)
    }

    /// As [`Kind::of`], above zero.
    pub(super) const fn positive(dimension: Dimension, unit: f64, sample: &'static str) -> Self {
        Self::new(dimension, Role::Positive, unit, sample)
    }

    /// What a slot of that name takes.
    pub(super) fn expected(self, slot: &str) -> Expected<'_> {
        Expected::new(slot, self.dimension, self.role)
    }

    /// eV
    pub(super) const ENERGY: Self = Self::new(Dimension::ENERGY, Role::Any, ELEMENTARY_CHARGE, "1.42 eV");
    /// eV, zero or more
    pub(super) const NOT_NEGATIVE_ENERGY: Self = Self::of(Dimension::ENERGY, ELEMENTARY_CHARGE, "10 meV");
    /// eV, above zero
    pub(super) const GAP: Self = Self::new(Dimension::ENERGY, Role::Positive, ELEMENTARY_CHARGE, "1.42 eV");
    /// eV/K
    pub(super) const ENERGY_PER_KELVIN: Self =
        Self::new(Dimension::ENERGY_PER_TEMPERATURE, Role::Any, ELEMENTARY_CHARGE, "0.54 meV/K");
    /// K
    pub(super) const KELVIN: Self = Self::new(Dimension::TEMPERATURE, Role::NotNegative, 1.0, "204 K");
    /// Å
    pub(super) const ANGSTROM: Self = Self::new(Dimension::LENGTH, Role::Positive, 1e-10, "5.6533 Å");
    /// Å/K
    pub(super) const ANGSTROM_PER_KELVIN: Self =
        Self::new(Dimension::LENGTH_PER_TEMPERATURE, Role::Any, 1e-10, "3.88e-5 Å/K");
    /// 1/K
    pub(super) const PER_KELVIN: Self = Self::new(Dimension::PER_TEMPERATURE, Role::Any, 1.0, "6.9e-6 /K");
    /// GPa
    pub(super) const GIGAPASCAL: Self = Self::new(Dimension::PRESSURE, Role::Positive, 1e9, "122.1 GPa");
    /// g/cm3
    pub(super) const DENSITY: Self = Self::new(Dimension::DENSITY, Role::Positive, 1e3, "5.32 g/cm3");
    /// m
    pub(super) const METRE: Self = Self::new(Dimension::LENGTH, Role::Positive, 1.0, "600 nm");
    /// m2
    pub(super) const SQUARE_METRE: Self = Self::new(Dimension::AREA, Role::Any, 1.0, "0.004 um2");
    /// A plain number
    pub(super) const PLAIN: Self = Self::new(Dimension::NONE, Role::Any, 1.0, "0.067");
    /// A plain number ≥ 0
    pub(super) const NOT_NEGATIVE: Self = Self::new(Dimension::NONE, Role::NotNegative, 1.0, "1.38");
    /// A fraction of a sublattice
    pub(super) const FRACTION: Self = Self::new(Dimension::NONE, Role::Fraction, 1.0, "0.3");
}

/// The next argument as a quantity, in the unit of `kind`; a missing one is a finding.
pub(super) fn quantity(
    arguments: &mut Arguments<'_>,
    slot: &str,
    kind: Kind,
    scope: &mut Scope,
) -> Option<f64> {
    let place = arguments.place();
    let Some(value) = arguments.value() else {
        scope.report(
            Finding::error("material.incomplete", format!("`{slot}` lacks its value"))
                .at(place, "a quantity is due here")
                .help(format!("write `{slot} {}`", kind.sample)),
        );
        return None;
    };
    let open = value.free.as_ref().map(|free| free.span);
    if let Some(span) = open.or(value.tolerance.as_ref().map(|tolerance| tolerance.span)) {
        scope.report(
            Finding::error("material.statement", format!("`{slot}` of a material is one settled value"))
                .at(span, "neither a free range nor a tolerance belongs here")
                .help("state it in the layer instead, such as a thickness `600 nm ± 3 % sigma`"),
        );
        return None;
    }
    scope.quantity(&value, kind.expected(slot)).map(|si| si / kind.unit)
}

/// A property that is one quantity and nothing else.
pub(super) fn single(property: &Property, kind: Kind, scope: &mut Scope) -> Option<f64> {
    let mut arguments = Arguments::of(property);
    let value = quantity(&mut arguments, &property.name.value, kind, scope);
    arguments.end(scope);
    value
}
