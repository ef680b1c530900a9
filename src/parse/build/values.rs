//! Values, ranges, tolerances and arithmetic.

use crate::finding::Finding;
use crate::parse::OPERATOR_LIMIT;
use crate::parse::build::Builder;
use crate::parse::grammar::{Node, Rule};
use crate::source::{Span, Spanned};
use crate::syntax::{Argument, Expression, FreeRange, Number, Operator, Tolerance, ToleranceMeaning, Value};

/// One operand with the minus signs before it.
struct Operand {
    signs: Vec<Span>,
    term: Expression,
}

impl Builder<'_> {
    /// A `value` or `inner_value`.
    pub(super) fn value(&mut self, node: Node<'_>) -> Value {
        self.operators = 0;
        let span = self.span(&node);
        let mut value = Value { expression: None, up_to: None, free: None, tolerance: None, span };
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::up_to | Rule::inner_up_to => {
                    value.up_to = part.into_inner().next().map(|it| self.expression(it));
                }
                Rule::free | Rule::inner_free => value.free = self.free(part).map(Box::new),
                Rule::tolerance | Rule::inner_tolerance => {
                    value.tolerance = self.tolerance(part).map(Box::new)
                }
                _ => value.expression = Some(self.expression(part)),
            }
        }
        value
    }

    /// `string`, `nested_formula` or `value` where a word may stand too.
    pub(super) fn argument(&mut self, node: Node<'_>) -> Argument {
        match node.as_rule() {
            Rule::string => Argument::Text(self.text(&node)),
            Rule::value => {
                let value = self.value(node);
                match bare_name(&value) {
                    Some(name) => Argument::Word(name.clone()),
                    None => Argument::Value(value),
                }
            }
            _ => Argument::Word(self.word(&node)),
        }
    }

    fn free(&mut self, node: Node<'_>) -> Option<FreeRange> {
        let span = self.span(&node);
        let mut bounds =
            node.into_inner().filter(|part| part.as_rule() != Rule::dots).map(|it| self.expression(it));
        Some(FreeRange { low: bounds.next()?, high: bounds.next()?, span })
    }

    pub(super) fn tolerance(&mut self, node: Node<'_>) -> Option<Tolerance> {
        let span = self.span(&node);
        let (mut amount, mut meaning) = (None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::plus_minus => {}
                Rule::meaning => {
                    let which = match part.as_str() {
                        "limits" => ToleranceMeaning::Limits,
                        _ => ToleranceMeaning::Sigma,
                    };
                    meaning = Some(Spanned::new(which, self.span(&part)));
                }
                _ => amount = Some(self.expression(part)),
            }
        }
        Some(Tolerance { amount: amount?, meaning, span })
    }

    /// An `expression` or `inner`: gathered flat, then folded by strength, without recursion.
    fn expression(&mut self, node: Node<'_>) -> Expression {
        let span = self.span(&node);
        let mut operators = Vec::new();
        let mut operands = Vec::new();
        let mut signs = Vec::new();
        let arithmetic = |part: &Node<'_>| matches!(part.as_rule(), Rule::operator | Rule::sign);
        if self.too_many(node.clone().into_inner().filter(arithmetic).count(), span) {
            return nothing(span);
        }
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::operator => operators.push(Spanned::new(operator(part.as_str()), self.span(&part))),
                Rule::sign => signs.push(self.span(&part)),
                _ => operands.push(Operand { signs: std::mem::take(&mut signs), term: self.term(part) }),
            }
        }
        fold(operands, operators).unwrap_or_else(|| nothing(span))
    }

    fn too_many(&mut self, here: usize, span: Span) -> bool {
        let before = self.operators;
        self.operators += here;
        if self.operators <= OPERATOR_LIMIT {
            return false;
        }
        if before <= OPERATOR_LIMIT {
            self.findings.push(
                Finding::error(
                    "syntax.limit",
                    format!("an expression with more than {OPERATOR_LIMIT} arithmetic signs"),
                )
                .at(span, format!("more than {OPERATOR_LIMIT} signs here"))
                .help("name its parts with `let` and write the expression with those names"),
            );
        }
        self.broken = true;
        true
    }

    fn term(&mut self, node: Node<'_>) -> Expression {
        let span = self.span(&node);
        match node.as_rule() {
            Rule::number | Rule::inner_number => Expression::Number(self.number(node)),
            Rule::bracket | Rule::inner_bracket => {
                node.into_inner().next().map_or_else(|| nothing(span), |inside| self.expression(inside))
            }
            Rule::call => {
                let mut function = Spanned::new(String::new(), span);
                let mut arguments = Vec::new();
                for part in node.into_inner() {
                    match part.as_rule() {
                        Rule::function => function = self.word(&part),
                        _ => arguments.push(self.expression(part)),
                    }
                }
                Expression::Call { function, arguments, span }
            }
            _ => Expression::Name(self.word(&node)),
        }
    }

    fn number(&mut self, node: Node<'_>) -> Number {
        let span = self.span(&node);
        let text = Spanned::new(String::new(), span);
        let mut number = Number { value: 0.0, text, decimal_comma: false, unit: None, span };
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::unit => number.unit = Some(self.word(&part)),
                rule => {
                    number.decimal_comma = rule == Rule::comma_number;
                    number.text = self.word(&part);
                    number.value = self.digits(&number.text);
                }
            }
        }
        number
    }

    /// A count without a unit.
    pub(super) fn count(&mut self, node: &Node<'_>) -> Value {
        let text = self.word(node);
        let span = text.span;
        let value = self.digits(&text);
        let number = Number { value, text, decimal_comma: false, unit: None, span };
        Value { expression: Some(Expression::Number(number)), up_to: None, free: None, tolerance: None, span }
    }

    fn digits(&mut self, text: &Spanned<String>) -> f64 {
        let plain = text.value.parse::<f64>().ok();
        let value = plain.or_else(|| text.value.replace('_', "").replace(',', ".").parse().ok());
        match value {
            Some(value) if value.is_finite() => value,
            _ => {
                self.broken = true;
                self.findings.push(
                    Finding::error("syntax.number", format!("`{}` is too large for a number", text.value))
                        .at(text.span, "numbers end at 1.8e308")
                        .help("write a smaller power of ten, such as `1e18`"),
                );
                0.0
            }
        }
    }
}

/// The name, where the value is a name and nothing else.
pub(super) fn bare_name(value: &Value) -> Option<&Spanned<String>> {
    match value {
        Value {
            expression: Some(Expression::Name(name)), up_to: None, free: None, tolerance: None, ..
        } => Some(name),
        _ => None,
    }
}

/// Stands in for what could not be made; its statement becomes `Invalid`.
fn nothing(span: Span) -> Expression {
    Expression::Name(Spanned::new(String::new(), span))
}

fn operator(sign: &str) -> Operator {
    match sign {
        "+" => Operator::Add,
        "*" => Operator::Multiply,
        "/" => Operator::Divide,
        "^" => Operator::Power,
        _ => Operator::Subtract,
    }
}

/// Powers first (to the right, tighter than a minus before them), then products, then sums.
fn fold(mut operands: Vec<Operand>, operators: Vec<Spanned<Operator>>) -> Option<Expression> {
    let mut terms: Vec<Expression> = Vec::new();
    let mut between: Vec<Spanned<Operator>> = Vec::new();
    let last = operands.pop()?;
    let mut right = negate(last.signs, last.term);
    for (operand, operator) in operands.into_iter().zip(operators).rev() {
        if operator.value == Operator::Power {
            right = negate(operand.signs, binary(operator, operand.term, right));
        } else {
            terms.push(std::mem::replace(&mut right, negate(operand.signs, operand.term)));
            between.push(operator);
        }
    }
    // Both were gathered from the right.
    let mut sums: Vec<Spanned<Operator>> = Vec::new();
    let mut products = vec![right];
    while let (Some(term), Some(operator)) = (terms.pop(), between.pop()) {
        match operator.value {
            Operator::Multiply | Operator::Divide => {
                let left = products.pop()?;
                products.push(binary(operator, left, term));
            }
            _ => {
                sums.push(operator);
                products.push(term);
            }
        }
    }
    let mut products = products.into_iter();
    let first = products.next()?;
    Some(products.zip(sums).fold(first, |left, (right, operator)| binary(operator, left, right)))
}

fn binary(operator: Spanned<Operator>, left: Expression, right: Expression) -> Expression {
    let span = left.span().to(right.span());
    Expression::Binary { operator, left: Box::new(left), right: Box::new(right), span }
}

fn negate(signs: Vec<Span>, term: Expression) -> Expression {
    signs.into_iter().rev().fold(term, |term, sign| {
        let span = sign.to(term.span());
        Expression::Negate(Box::new(term), span)
    })
}
