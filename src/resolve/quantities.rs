//! Numbers and names in force: every `let` in sight, evaluated by dimension to SI values.

use std::collections::{HashMap, HashSet};

use crate::finding::{Finding, Findings, Severity};
use crate::source::{Span, Spanned};
use crate::syntax::{Expression, Value};
use crate::units::{Dimension, Quantity, Unit, UnknownUnit};

mod arithmetic;
mod fit;
mod roles;
mod slots;

pub use roles::Role;
pub use slots::Slot;
use slots::unit_text;

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
    /// Whether it is a parameter with the value given where the part is placed.
    argument: bool,
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

/// Names that stand for names, followed to find where a value was written.
const LONGEST: usize = 64;

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

    /// How many errors there are so far.
    pub fn error_count(&self) -> usize {
        self.findings.count(Severity::Error)
    }

    /// How many findings there are so far.
    pub fn finding_count(&self) -> usize {
        self.findings.0.len()
    }

    /// Binds a name in the innermost block. A second binding of the same block is a finding.
    pub fn define(&mut self, name: &Spanned<String>, value: &Value) {
        let home = self.current;
        self.define_at(home, name, value, false);
    }

    /// Binds a name in the innermost block to a value whose own names belong to the block
    /// around the part: an argument of `place`.
    pub fn define_argument(&mut self, name: &Spanned<String>, value: &Value, caller: usize) {
        self.define_at(caller, name, value, true);
    }

    fn define_at(&mut self, home: usize, name: &Spanned<String>, value: &Value, argument: bool) {
        let binding =
            Binding { name: name.clone(), value: value.clone(), home, argument, state: State::Waiting };
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

    /// The frame that binds a name, from the innermost outwards.
    fn find(&self, name: &str) -> Option<usize> {
        self.find_from(self.current, name)
    }

    fn find_from(&self, frame: usize, name: &str) -> Option<usize> {
        let mut frame = Some(frame);
        while let Some(at) = frame {
            if self.frames[at].bindings.contains_key(name) {
                return Some(at);
            }
            frame = self.frames[at].parent;
        }
        None
    }

    /// The bindings behind an expression that is a name, and behind that one where it is a name
    /// again, each looked up where it was written. Ends after [`LONGEST`] of them: a circle is told
    /// where names are evaluated.
    fn trace(&self, expression: &Expression) -> Vec<&Binding> {
        let mut found: Vec<&Binding> = Vec::new();
        let (mut frame, mut at) = (self.current, Some(expression));
        while let Some(Expression::Name(name)) = at {
            let binding =
                self.find_from(frame, &name.value).and_then(|it| self.frames[it].bindings.get(&name.value));
            let Some(binding) = binding.filter(|_| found.len() < LONGEST) else { break };
            found.push(binding);
            (frame, at) = (binding.home, binding.value.expression.as_ref());
        }
        found
    }

    fn binding(&self, name: &str) -> Option<&Binding> {
        self.frames[self.find(name)?].bindings.get(name)
    }
}
