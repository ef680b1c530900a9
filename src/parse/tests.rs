use proptest::prelude::*;

use crate::finding::{Findings, Outcome};
use crate::parse::{NESTING_LIMIT, OPERATOR_LIMIT, SIZE_LIMIT, parse};
use crate::source::{Source, SourceId, Span, Spanned};
use crate::syntax::{
    self, Argument, Attribute, Comparison, Expression, Item, LayerStatement, Number, Operator, Polarity,
    Property, Qualifier, SeekTarget, Statement, ToleranceMeaning, Value,
};

const TWO_JUNCTIONS: &str = include_str!("../../tests/fixtures/parse/two_junctions.stack");

fn source(text: &str) -> Source {
    Source::new(SourceId(0), "a.stack", text)
}

fn read(text: &str) -> Outcome<syntax::File> {
    parse(&source(text))
}

#[track_caller]
fn sound(text: &str) -> syntax::File {
    let outcome = read(text);
    assert!(outcome.findings.is_empty(), "{text}\n{:#?}", outcome.findings);
    outcome.value.expect("a sound text has a value")
}

/// The statements of a stack with this body.
#[track_caller]
fn body(text: &str) -> Vec<Statement> {
    let file = sound(&format!("stack \"A\" {{\n{text}\n}}\n"));
    match file.items.into_iter().next() {
        Some(Item::Stack(stack)) => stack.block.statements,
        other => panic!("{other:?}"),
    }
}

#[track_caller]
fn only<T>(mut all: Vec<T>) -> T {
    assert_eq!(all.len(), 1);
    all.pop().expect("just counted")
}

#[track_caller]
fn layer(text: &str) -> LayerStatement {
    match only(body(text)) {
        Statement::Layer(layer) => *layer,
        other => panic!("{text}: {other:?}"),
    }
}

#[track_caller]
fn property(text: &str) -> Property {
    match only(body(text)) {
        Statement::Property(property) => property,
        other => panic!("{text}: {other:?}"),
    }
}

/// The value after `x`.
#[track_caller]
fn value(text: &str) -> Value {
    match sound(&format!("let x = {text}\n")).items.into_iter().next() {
        Some(Item::Let(it)) => it.value,
        other => panic!("{text}: {other:?}"),
    }
}

#[track_caller]
fn number(text: &str) -> Number {
    match value(text).expression {
        Some(Expression::Number(number)) => number,
        other => panic!("{text}: {other:?}"),
    }
}

/// Arithmetic with every bracket written.
fn shown(expression: &Expression) -> String {
    match expression {
        Expression::Number(number) => match &number.unit {
            Some(unit) => format!("{} {}", number.text.value, unit.value),
            None => number.text.value.clone(),
        },
        Expression::Name(name) => name.value.clone(),
        Expression::Negate(inside, _) => format!("-[{}]", shown(inside)),
        Expression::Binary { operator, left, right, .. } => {
            let sign = match operator.value {
                Operator::Add => "+",
                Operator::Subtract => "-",
                Operator::Multiply => "*",
                Operator::Divide => "/",
                Operator::Power => "^",
            };
            format!("[{} {sign} {}]", shown(left), shown(right))
        }
        Expression::Call { function, arguments, .. } => {
            format!("{}({})", function.value, arguments.iter().map(shown).collect::<Vec<_>>().join(", "))
        }
    }
}

#[track_caller]
fn arithmetic(text: &str) -> String {
    shown(value(text).expression.as_ref().expect("a number in force"))
}

fn codes(findings: &Findings) -> Vec<&'static str> {
    findings.iter().map(|finding| finding.code).collect()
}

mod forms;
mod limits;
mod mistakes;
mod numbers;
mod pieces;
mod properties;
