//! Numbers and names in force: every `let` in sight, evaluated by dimension to SI values.

use std::collections::{HashMap, HashSet};

use crate::finding::{Finding, Findings};
use crate::source::{Span, Spanned};
use crate::syntax::{Expression, Tolerance, Value};
use crate::units::{Dimension, Quantity, Unit, UnknownUnit};

mod arithmetic;
mod fit;
mod roles;

pub use roles::Role;

/// What a slot takes.
#[derive(Clone, Copy, Debug)]
pub struct Expected<'a> {
    /// What people call the slot: `thickness`, `series_resistance`, `let d`.
    pub slot: &'a str,
    /// What it measures.
    pub dimension: Dimension,
    /// What it is for.
    pub role: Role,
}

impl<'a> Expected<'a> {
    /// A slot.
    pub fn new(slot: &'a str, dimension: Dimension, role: Role) -> Self {
        Self { slot, dimension, role }
    }

    /// The slot as it stands in a sentence: a word of the language in backticks, a phrase that
    /// holds backticks of its own as it is.
    pub(crate) fn called(&self) -> String {
        if self.slot.contains('`') { self.slot.to_owned() } else { format!("`{}`", self.slot) }
    }

    /// What it takes, with its article.
    pub(crate) fn kind(&self) -> String {
        if self.dimension.is_none() && self.role.units(self.dimension) == ["%"] {
            return "a share".to_owned();
        }
        self.dimension.name()
    }
}

/// What stands in a slot that allows more than a number.
#[derive(Clone, Debug, PartialEq)]
pub struct Slot {
    /// SI value in force; `None` where it is free and not settled, or was wrong (reported).
    pub value: Option<f64>,
    /// SI value after `..`.
    pub up_to: Option<f64>,
    /// SI bounds of a free value, low then high, and where they were written.
    pub free: Option<((f64, f64), Span)>,
    /// The tolerance as written.
    pub tolerance: Option<Tolerance>,
    /// Whether something in it was wrong and has been reported.
    pub wrong: bool,
}

/// An evaluated expression.
#[derive(Clone, Copy, Debug)]
struct Evaluated {
    quantity: Quantity,
    /// Whether no unit was written anywhere in it.
    bare: bool,
    /// Whether it is a literal on the Celsius scale.
    celsius: bool,
}

/// A name that stands for a value.
#[derive(Clone, Debug)]
struct Binding {
    name: Spanned<String>,
    value: Value,
    /// The frame its own names are looked up in.
    home: usize,
    state: State,
}

#[derive(Clone, Copy, Debug)]
enum State {
    Waiting,
    Working,
    Done(Option<Evaluated>),
}

#[derive(Clone, Debug, Default)]
struct Frame {
    bindings: HashMap<String, Binding>,
    parent: Option<usize>,
}

/// Words that open something else on a layer's line, where a name would be read as one of them.
const RESERVED: &[&str] = &[
    "absorbs",
    "as",
    "collecting",
    "diffused",
    "free",
    "graded",
    "in",
    "matched",
    "n",
    "of",
    "offcut",
    "only",
    "ordered",
    "p",
    "pseudomorphic",
    "relaxed",
    "removed",
    "to",
    "with",
];

/// Every name in sight, the findings made on the way, and what was reported already.
///
/// Names do not depend on their order: a `let` may use one that stands below it. A block and a
/// placed part see their own names first, then those around them.
#[derive(Debug)]
pub struct Scope {
    frames: Vec<Frame>,
    current: usize,
    /// Names being evaluated, for the whole of a cycle.
    trail: Vec<(usize, String)>,
    units: HashMap<String, Result<Unit, UnknownUnit>>,
    reported: HashSet<(&'static str, Span)>,
    findings: Findings,
}

impl Default for Scope {
    fn default() -> Self {
        Self {
            frames: vec![Frame::default()],
            current: 0,
            trail: Vec::new(),
            units: HashMap::new(),
            reported: HashSet::new(),
            findings: Findings::new(),
        }
    }
}

impl Scope {
    /// Without any names.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a finding, unless the same code was reported at the same place already (a part that
    /// is placed twice, a `let` that is used twice).
    pub fn report(&mut self, finding: Finding) {
        match &finding.primary {
            Some(label) if !self.reported.insert((finding.code, label.span)) => {}
            _ => self.findings.push(finding),
        }
    }

    /// Adds all findings of another pass, as they are.
    pub fn extend(&mut self, findings: Findings) {
        self.findings.extend(findings);
    }

    /// Takes the findings made so far.
    pub fn take_findings(&mut self) -> Findings {
        std::mem::take(&mut self.findings)
    }

    /// Whether something of error level was found so far.
    pub fn has_errors(&self) -> bool {
        self.findings.has_errors()
    }

    /// How many findings there are so far.
    pub fn finding_count(&self) -> usize {
        self.findings.0.len()
    }

    /// Binds a name in the innermost block. A second binding of the same block is a finding.
    pub fn define(&mut self, name: &Spanned<String>, value: &Value) {
        let home = self.current;
        self.define_at(home, name, value);
    }

    /// Binds a name in the innermost block to a value whose own names belong to the block
    /// around the part: an argument of `place`.
    pub fn define_argument(&mut self, name: &Spanned<String>, value: &Value, caller: usize) {
        self.define_at(caller, name, value);
    }

    fn define_at(&mut self, home: usize, name: &Spanned<String>, value: &Value) {
        let binding = Binding { name: name.clone(), value: value.clone(), home, state: State::Waiting };
        if RESERVED.contains(&name.value.as_str()) {
            self.report(
                Finding::error(
                    "name.reserved",
                    format!("`{}` says something of a layer already", name.value),
                )
                .at(name.span, "no name for a value")
                .help(format!("choose another name, such as `{}_side`", name.value)),
            );
        }
        let first = self.frames[self.current].bindings.get(&name.value).map(|known| known.name.span);
        match first {
            Some(first) => self.report(
                Finding::error("name.duplicate", format!("`let {}` is stated twice", name.value))
                    .at(name.span, "stated again here")
                    .beside(first, "first stated here")
                    .help(format!("give one of them another name, such as `{}_2`", name.value)),
            ),
            None => {
                self.frames[self.current].bindings.insert(name.value.clone(), binding);
            }
        }
    }

    /// Replaces the value of a file-level name; `false` where there is no such name.
    pub fn override_name(&mut self, name: &str, value: Value) -> bool {
        match self.frames[0].bindings.get_mut(name) {
            Some(binding) => {
                binding.value = value;
                binding.state = State::Waiting;
                true
            }
            None => false,
        }
    }

    /// Opens a block whose names hide those around it; give the result to [`Scope::close`].
    pub fn open(&mut self) -> usize {
        self.open_under(self.current)
    }

    /// Opens a block that sees only file-level names: the body of a placed part.
    pub fn open_part(&mut self) -> usize {
        self.open_under(0)
    }

    fn open_under(&mut self, parent: usize) -> usize {
        let outer = self.current;
        self.frames.push(Frame { bindings: HashMap::new(), parent: Some(parent) });
        self.current = self.frames.len() - 1;
        outer
    }

    /// Looks names up in `frame` from now on; gives back where it was, for [`Scope::close`].
    pub fn enter(&mut self, frame: usize) -> usize {
        std::mem::replace(&mut self.current, frame)
    }

    /// Goes back to the block that [`Scope::open`] returned.
    pub fn close(&mut self, outer: usize) {
        self.current = outer;
    }

    /// The innermost block, for [`Scope::define_argument`].
    pub fn here(&self) -> usize {
        self.current
    }

    /// File-level names, sorted.
    pub fn file_names(&self) -> Vec<String> {
        let mut names: Vec<String> = self.frames[0].bindings.keys().cloned().collect();
        names.sort_unstable();
        names
    }

    /// Whether a name is in sight.
    pub fn knows(&self, name: &str) -> bool {
        self.find(name).is_some()
    }

    /// Evaluates every file-level name once, so that a wrong one is reported although unused.
    pub fn evaluate_file_names(&mut self) {
        for name in self.file_names() {
            let Some(span) = self.frames[0].bindings.get(&name).map(|it| it.name.span) else { continue };
            self.name_value(&Spanned::new(name, span));
        }
    }

    /// The SI value of an expression in a slot; `None` where it is wrong, which is reported.
    pub fn number(&mut self, expression: &Expression, expected: Expected<'_>) -> Option<f64> {
        let evaluated = self.evaluate(expression, None)?;
        self.fit(evaluated, expression, expected)
    }

    /// The SI value in force of a slot that takes one quantity. `None` where it is wrong, which
    /// is reported, or where it is free and not settled, which is not.
    ///
    /// A free range and a tolerance are dropped: use [`Scope::slot`] where they have a meaning.
    pub fn quantity(&mut self, value: &Value, expected: Expected<'_>) -> Option<f64> {
        let slot = self.slot(value, expected);
        if let (Some(up_to), false) = (&value.up_to, slot.wrong) {
            self.report(
                Finding::error("value.range", format!("{} takes one value, not a range", expected.called()))
                    .at(value.span, "a range")
                    .beside(up_to.span(), "the second bound")
                    .help(format!("write one value, or `free {}`", self.text_of_range(value))),
            );
            return None;
        }
        slot.value
    }

    /// What a value measures, and whether it has no unit; `None` where it is wrong, which is
    /// reported, or where it holds no number.
    pub fn dimension(&mut self, value: &Value) -> Option<(Dimension, bool)> {
        let whole = self.expanded(value);
        let value = whole.as_ref().unwrap_or(value);
        let lent = value.up_to.as_ref().and_then(unit_text);
        let (expression, lent) = match (&value.expression, &value.free) {
            (Some(expression), _) => (expression, lent),
            (None, Some(free)) => (&free.low, unit_text(&free.high)),
            (None, None) => return None,
        };
        let evaluated = self.evaluate(expression, lent.as_ref())?;
        Some((evaluated.quantity.dimension, evaluated.bare))
    }

    /// Everything that stands in a slot.
    pub fn slot(&mut self, value: &Value, expected: Expected<'_>) -> Slot {
        let whole = self.expanded(value);
        let value = whole.as_ref().unwrap_or(value);
        let mut slot = Slot {
            value: None,
            up_to: None,
            free: None,
            tolerance: value.tolerance.as_deref().cloned(),
            wrong: false,
        };
        let lent = value.up_to.as_ref().and_then(unit_text);
        if let Some(expression) = &value.expression {
            slot.value = self.lent(expression, lent, expected);
            slot.wrong |= slot.value.is_none();
        }
        if let Some(up_to) = &value.up_to {
            slot.up_to = self.lent(up_to, None, expected);
            slot.wrong |= slot.up_to.is_none();
        }
        if let Some(free) = &value.free {
            let (low_unit, high_unit) = (unit_text(&free.low), unit_text(&free.high));
            let low = self.lent(&free.low, high_unit, expected);
            let high = self.lent(&free.high, low_unit, expected);
            match (low, high) {
                (Some(low), Some(high)) if low < high => slot.free = Some(((low, high), free.span)),
                (Some(_), Some(_)) => {
                    slot.wrong = true;
                    self.report(
                        Finding::error(
                            "value.range",
                            format!("the free range of {} is empty", expected.called()),
                        )
                        .at(free.span, "the lower bound is not below the upper one")
                        .help("write the smaller bound first, such as `free 300 .. 1200 nm`"),
                    );
                }
                _ => slot.wrong = true,
            }
        }
        slot
    }

    /// A name alone that stands for a free or toleranced value brings those along.
    fn expanded(&self, value: &Value) -> Option<Value> {
        let Some(Expression::Name(name)) = &value.expression else { return None };
        let bound = &self.binding(&name.value)?.value;
        let adds = (bound.free.is_some() && value.free.is_none())
            || (bound.tolerance.is_some() && value.tolerance.is_none())
            || (bound.up_to.is_some() && value.up_to.is_none());
        adds.then(|| Value {
            expression: bound.expression.as_ref().and(value.expression.clone()),
            up_to: value.up_to.clone().or_else(|| bound.up_to.clone()),
            free: value.free.clone().or_else(|| bound.free.clone()),
            tolerance: value.tolerance.clone().or_else(|| bound.tolerance.clone()),
            span: value.span,
        })
    }

    fn lent(
        &mut self,
        expression: &Expression,
        unit: Option<Spanned<String>>,
        expected: Expected<'_>,
    ) -> Option<f64> {
        let evaluated = self.evaluate(expression, unit.as_ref())?;
        self.fit(evaluated, expression, expected)
    }

    /// The frame that binds a name, from the innermost outwards.
    fn find(&self, name: &str) -> Option<usize> {
        let mut frame = Some(self.current);
        while let Some(at) = frame {
            if self.frames[at].bindings.contains_key(name) {
                return Some(at);
            }
            frame = self.frames[at].parent;
        }
        None
    }

    fn binding(&self, name: &str) -> Option<&Binding> {
        self.frames[self.find(name)?].bindings.get(name)
    }

    fn text_of_range(&self, value: &Value) -> String {
        let part = |expression: Option<&Expression>| match expression {
            Some(Expression::Number(number)) => match &number.unit {
                Some(unit) => format!("{} {}", number.text.value, unit.value),
                None => number.text.value.clone(),
            },
            Some(Expression::Name(name)) => name.value.clone(),
            _ => "…".to_owned(),
        };
        format!("{} .. {}", part(value.expression.as_ref()), part(value.up_to.as_ref()))
    }
}

/// The unit of a number alone, to be lent to a bound that has none.
fn unit_text(expression: &Expression) -> Option<Spanned<String>> {
    match expression {
        Expression::Number(number) => number.unit.clone(),
        Expression::Negate(inner, _) => unit_text(inner),
        _ => None,
    }
}
