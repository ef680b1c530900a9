//! Statements of the form `name argument …`: which are known where, and what they take.

use std::borrow::Cow;
use std::collections::HashMap;

use crate::finding::Finding;
use crate::resolve::names;
use crate::resolve::quantities::{Expected, Scope};
use crate::source::{Span, Spanned};
use crate::syntax::{Argument, Block, Expression, Property, Statement, Value};
use crate::units::table::near as near_unit;

/// The properties of a block that holds nothing else, in order; `place` is what the block is,
/// with its article. Unknown words, statements that belong elsewhere and properties stated twice
/// are reported; a second statement is left out. Names of the block go into the open frame.
pub(super) fn of_block<'s>(
    scope: &mut Scope,
    block: &'s Block,
    place: &str,
    allowed: &[&str],
) -> Vec<&'s Property> {
    let mut kept = Kept::default();
    let mut found = Vec::new();
    for statement in &block.statements {
        match statement {
            Statement::Property(property) => {
                if known(scope, property, place, allowed) && kept.keep(scope, property) {
                    found.push(property);
                }
            }
            Statement::Let(item) => scope.define(&item.name, &item.value),
            Statement::Invalid(_) => {}
            other => misplaced(scope, other, place),
        }
    }
    found
}

/// Whether a property may stand in `place`; else reported with the near name.
pub(super) fn known(scope: &mut Scope, property: &Property, place: &str, allowed: &[&str]) -> bool {
    let name = &property.name;
    if allowed.contains(&name.value.as_str()) {
        return true;
    }
    let list = allowed.iter().map(|word| format!("`{word}`")).collect::<Vec<_>>().join(", ");
    let finding = Finding::error("name.unknown", format!("{place} has no `{}`", name.value));
    let finding = match names::near(&name.value, allowed.iter().copied()) {
        Some(near) => finding
            .at(name.span, format!("did you mean `{near}`?"))
            .help(format!("write `{near}`"))
            .fix(name.span, near.clone(), names::alike(&name.value, &near)),
        None => finding.at(name.span, "an unknown word here").help(format!("{place} takes {list}")),
    };
    scope.report(finding);
    false
}

/// Properties stated so far in one block.
#[derive(Default)]
pub(super) struct Kept<'s>(HashMap<&'s str, Span>);

impl<'s> Kept<'s> {
    /// Whether it is the first of its name; a second one is reported.
    pub(super) fn keep(&mut self, scope: &mut Scope, property: &'s Property) -> bool {
        let name = &property.name;
        match self.0.get(name.value.as_str()) {
            Some(first) => {
                scope.report(
                    Finding::error("name.duplicate", format!("`{}` is stated twice", name.value))
                        .at(name.span, "stated again here")
                        .beside(*first, "first stated here")
                        .help(format!("keep one `{}`", name.value)),
                );
                false
            }
            None => {
                self.0.insert(&name.value, name.span);
                true
            }
        }
    }
}

/// The first word of a statement and where it stands.
pub(super) fn head(statement: &Statement) -> (String, Span) {
    let start = |word: &str, span: Span| {
        let end = span.start.saturating_add(word.len() as u32).min(span.end);
        (word.to_owned(), Span { end, ..span })
    };
    match statement {
        Statement::Layer(it) => (it.duty.value.clone(), it.duty.span),
        Statement::Group(it) => (group_word(it.kind.value).to_owned(), it.kind.span),
        Statement::Property(it) => (it.name.value.clone(), it.name.span),
        Statement::Replace(it) => (it.path.value.clone(), it.path.span),
        Statement::Let(it) => start("let", it.span),
        Statement::Place(it) => start("place", it.span),
        Statement::Require(it) => start("require", it.span),
        Statement::Seek(it) => start("seek", it.span),
        Statement::Chart(it) => start("chart", it.span),
        Statement::Vary(it) => start("vary", it.span),
        Statement::Measured(it) => start("measured", it.span),
        Statement::Accept(it) => start("accept", it.span),
        Statement::Limit(it) => start("limit", it.span),
        Statement::Remove(it) => start("remove", it.span),
        Statement::Insert(it) => start("insert", it.span),
        Statement::Invalid(span) => (String::new(), *span),
    }
}

/// The word that opens a group.
pub(super) fn group_word(kind: crate::syntax::GroupKind) -> &'static str {
    use crate::syntax::GroupKind;
    match kind {
        GroupKind::Junction => "junction",
        GroupKind::Tunnel => "tunnel",
        GroupKind::Recombination => "recombination",
        GroupKind::Repeat => "repeat",
    }
}

/// Reports a statement that belongs elsewhere.
pub(super) fn misplaced(scope: &mut Scope, statement: &Statement, place: &str) {
    let (word, span) = head(statement);
    let home = match statement {
        Statement::Layer(_) | Statement::Group(_) | Statement::Place(_) => {
            "a `stack`, a `junction` or a `part`"
        }
        Statement::Replace(_) | Statement::Remove(_) | Statement::Insert(_) => "a `stack … like` another",
        _ => "a `stack`",
    };
    scope.report(
        Finding::error("structure.nesting", format!("`{word}` cannot stand in {place}"))
            .at(span, format!("belongs in {home}"))
            .help(format!("move it into {home}")),
    );
}

/// The one quantity a property takes, SI. `None` where it is wrong, which is reported.
pub(super) fn quantity(scope: &mut Scope, property: &Property, expected: Expected<'_>) -> Option<f64> {
    let value = first_value(scope, property, expected)?;
    no_more(scope, property, 1);
    scope.quantity(&value, expected)
}

/// The first argument as a value, with a unit misread as a word put right.
pub(super) fn first_value<'s>(
    scope: &mut Scope,
    property: &'s Property,
    expected: Expected<'_>,
) -> Option<Cow<'s, Value>> {
    match property.arguments.as_slice() {
        [] => {
            missing(scope, property, &format!("write `{} {}`", property.name.value, expected.example()));
            None
        }
        [Argument::Value(value), Argument::Word(word), ..] if lone_unit(scope, value, word) => None,
        [first, ..] => {
            let value = as_value(first);
            if value.is_none() {
                scope.report(
                    Finding::error(
                        "value.missing",
                        format!("`{}` takes {}, not a text", property.name.value, expected.dimension.name()),
                    )
                    .at(first.span(), "a text")
                    .help("write a number with its unit"),
                );
            }
            value
        }
    }
}

/// Reports `25 C`, a number followed by a word that is nearly a unit.
pub(super) fn lone_unit(scope: &mut Scope, value: &Value, word: &Spanned<String>) -> bool {
    let Some(Expression::Number(number)) = &value.expression else { return false };
    if number.unit.is_some() || scope.knows(&word.value) {
        return false;
    }
    let Some(meant) = near_unit(&word.value) else { return false };
    scope.report(
        Finding::error("unit.unknown", format!("`{}` is not a unit", word.value))
            .at(word.span, format!("did you mean `{meant}`?"))
            .help(format!("write `{} {meant}`", number.text.value))
            .fix(word.span, meant, false),
    );
    true
}

/// An argument as a value: a word alone is a name.
pub(super) fn as_value(argument: &Argument) -> Option<Cow<'_, Value>> {
    match argument {
        Argument::Value(value) => Some(Cow::Borrowed(value)),
        Argument::Word(word) => Some(Cow::Owned(Value {
            expression: Some(Expression::Name(word.clone())),
            up_to: None,
            free: None,
            tolerance: None,
            span: word.span,
        })),
        Argument::Text(_) => None,
    }
}

/// Reports what stands behind the first `taken` arguments, once.
pub(super) fn no_more(scope: &mut Scope, property: &Property, taken: usize) {
    let Some(more) = property.arguments.get(taken) else { return };
    let what = match more {
        Argument::Word(word) => format!("`{}`", word.value),
        Argument::Text(text) => format!("\"{}\"", text.value),
        Argument::Value(_) => "a further value".to_owned(),
    };
    scope.report(
        Finding::error("name.unknown", format!("{what} has no meaning behind `{}`", property.name.value))
            .at(more.span(), "not expected here")
            .help("take it out, or put it on a line of its own"),
    );
}

/// The one word a property takes, out of `words`.
pub(super) fn word<'w>(scope: &mut Scope, property: &Property, words: &[&'w str]) -> Option<&'w str> {
    let list = words.iter().map(|word| format!("`{word}`")).collect::<Vec<_>>().join(" or ");
    match property.arguments.first() {
        Some(Argument::Word(given)) => match words.iter().find(|word| **word == given.value) {
            Some(found) => Some(found),
            None => {
                let finding = names::unknown(
                    &format!("choice of `{}`", property.name.value),
                    given,
                    words.iter().copied(),
                    &format!("write {list}"),
                );
                scope.report(finding);
                None
            }
        },
        Some(other) => {
            scope.report(
                Finding::error("value.missing", format!("`{}` takes {list}", property.name.value))
                    .at(other.span(), "not one of these")
                    .help(format!("write `{} {}`", property.name.value, words.first().unwrap_or(&""))),
            );
            None
        }
        None => {
            missing(
                scope,
                property,
                &format!("write `{} {}`", property.name.value, words.first().unwrap_or(&"")),
            );
            None
        }
    }
}

/// The quoted text a property takes.
pub(super) fn text<'s>(scope: &mut Scope, property: &'s Property) -> Option<&'s Spanned<String>> {
    match property.arguments.first() {
        Some(Argument::Text(text)) => {
            no_more(scope, property, 1);
            Some(text)
        }
        Some(other) => {
            scope.report(
                Finding::error("value.missing", format!("`{}` takes a text in quotes", property.name.value))
                    .at(other.span(), "not in quotes")
                    .help(format!("write `{} \"…\"`", property.name.value)),
            );
            None
        }
        None => {
            missing(scope, property, &format!("write `{} \"…\"`", property.name.value));
            None
        }
    }
}

/// A property without what it takes.
pub(super) fn missing(scope: &mut Scope, property: &Property, help: &str) {
    scope.report(
        Finding::error("value.missing", format!("`{}` says nothing", property.name.value))
            .at(property.name.span, "nothing stands behind it")
            .help(help),
    );
}

/// Something that is not said where it is due.
pub(super) fn missing_of(scope: &mut Scope, message: &str, span: Span, help: &str) {
    scope.report(Finding::error("value.missing", message).at(span, "nothing stands behind it").help(help));
}

/// A statement that parses and resolves and is not evaluated yet: named, never passed over.
pub(super) fn pending(
    scope: &mut Scope,
    severity: crate::finding::Severity,
    what: &str,
    span: Span,
    help: &str,
) {
    scope.report(
        Finding::new(severity, "feature.pending", format!("{what} not evaluated yet"))
            .at(span, "read and kept, without effect on the figures")
            .help(help),
    );
}

/// Whether a statement of the block could not be read: what it said is unknown, so nothing is said
/// of what the block lacks.
pub(super) fn is_broken(block: &Block) -> bool {
    block.statements.iter().any(|statement| matches!(statement, Statement::Invalid(_)))
}

/// Two statements that each settle the same thing.
pub(super) fn conflict(scope: &mut Scope, message: String, second: Span, first: Span, help: &str) {
    scope.report(
        Finding::error("value.conflict", message)
            .at(second, "stated here too")
            .beside(first, "stated here")
            .help(help),
    );
}

/// A placed part whose parameter has neither a value nor a default.
pub(super) fn missing_argument(scope: &mut Scope, part: &Spanned<String>, parameter: &Spanned<String>) {
    scope.report(
        Finding::error(
            "value.missing",
            format!("`{}` of part `{}` has no value", parameter.value, part.value),
        )
        .at(part.span, "placed without it")
        .beside(parameter.span, "has no default")
        .help(format!("write `place {}({} = 15 nm)`, with the value you need", part.value, parameter.value)),
    );
}
