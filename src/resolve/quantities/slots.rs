//! What may stand where a quantity is due: a number, a range, a free range, a tolerance.

use crate::finding::Finding;
use crate::resolve::quantities::{Expected, Scope};
use crate::source::{Span, Spanned};
use crate::syntax::{Expression, Tolerance, Value};
use crate::units::Dimension;

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

impl Scope {
    /// The SI value in force of a slot that takes one quantity. `None` where it is wrong, which
    /// is reported, or where it is free and not settled, which is not.
    ///
    /// A free range and a tolerance have no meaning here, which is said: see [`Scope::slot`] for
    /// places where they have one.
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
        if slot.wrong {
            return None;
        }
        if let Some((_, span)) = slot.free
            && slot.value.is_none()
        {
            self.report(
                Finding::error(
                    "value.missing",
                    format!("{} is left free and has no value", expected.called()),
                )
                .at(span, "no number yet")
                .help(format!("write a number before `free`, such as `{}`", expected.example())),
            );
        } else if slot.free.is_some() || slot.tolerance.is_some() {
            self.report(
                Finding::advice(
                    "feature.pending",
                    format!("a free range or a tolerance of {} is not evaluated yet", expected.called()),
                )
                .at(value.span, "only the number counts")
                .help("write the number alone"),
            );
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
        let expression = value.expression.as_ref()?;
        let behind = self.trace(expression);
        if behind.is_empty() {
            return None;
        }
        let mut whole = value.clone();
        for binding in &behind {
            let bound = &binding.value;
            whole.up_to = whole.up_to.or_else(|| bound.up_to.clone());
            whole.free = whole.free.or_else(|| bound.free.clone());
            whole.tolerance = whole.tolerance.or_else(|| bound.tolerance.clone());
            if bound.expression.is_none() {
                whole.expression = None;
            }
        }
        (whole != *value).then_some(whole)
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
pub(super) fn unit_text(expression: &Expression) -> Option<Spanned<String>> {
    match expression {
        Expression::Number(number) => number.unit.clone(),
        Expression::Negate(inner, _) => unit_text(inner),
        _ => None,
    }
}
