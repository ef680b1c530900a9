//! What stands in a slot of a layer: its value, and what goes with it into the design, a free range
//! and a tolerance.

use crate::design::{Design, FreeValue, Tolerance};
use crate::finding::{Finding, Severity};
use crate::resolve::Resolver;
use crate::resolve::properties::pending;
use crate::resolve::quantities::{Expected, Role};
use crate::syntax::{self, Value};
use crate::units::Dimension;

/// The SI value in force of a slot of a layer; its free range and its tolerance go into the
/// design under the layer's path and the slot's word.
pub(super) fn slot(
    resolver: &mut Resolver<'_, '_>,
    design: &mut Design,
    (path, what): (&str, &str),
    value: &Value,
    expected: Expected<'_>,
) -> Option<f64> {
    let slot = resolver.scope.slot(value, expected);
    if value.up_to.is_some() && !slot.wrong {
        // Says that one value is due; the same wording for every such slot.
        return resolver.scope.quantity(value, expected);
    }
    let path = format!("{path}.{what}");
    if let Some((range, span)) = slot.free {
        let whole = value.free.as_ref().map_or(span, |_| value.span);
        let text = resolver.text(span);
        design.free_values.push(FreeValue {
            path: path.clone(),
            range,
            value: slot.value,
            text,
            span: whole,
        });
    }
    if let Some(tolerance) = &slot.tolerance {
        tolerance_of(resolver, design, (path, slot.value), tolerance, expected);
    }
    slot.value
}

fn tolerance_of(
    resolver: &mut Resolver<'_, '_>,
    design: &mut Design,
    (path, value): (String, Option<f64>),
    tolerance: &syntax::Tolerance,
    expected: Expected<'_>,
) {
    let text = resolver.text(tolerance.span);
    let Some(meaning) = &tolerance.meaning else {
        resolver.scope.report(
            Finding::error("value.missing", format!("`{text}` does not say what it means"))
                .at(tolerance.span, "one standard deviation, or limits?")
                .help(format!("write `{text} sigma` for one standard deviation, or `{text} limits`")),
        );
        return;
    };
    if design.tolerances.is_empty() {
        pending(
            &mut resolver.scope,
            Severity::Advice,
            "what tolerances do to the figures is",
            tolerance.span,
            "read the figures as those of the nominal design",
        );
    }
    let Some(amount) = tolerance_amount(resolver, tolerance, value, expected) else { return };
    design.tolerances.push(Tolerance { path, amount, meaning: meaning.value, text, span: tolerance.span });
}

/// SI amount: a share of the value, or an amount of the same dimension.
fn tolerance_amount(
    resolver: &mut Resolver<'_, '_>,
    tolerance: &syntax::Tolerance,
    value: Option<f64>,
    expected: Expected<'_>,
) -> Option<f64> {
    let whole = Value {
        expression: Some(tolerance.amount.clone()),
        up_to: None,
        free: None,
        tolerance: None,
        span: tolerance.span,
    };
    let (dimension, bare) = resolver.scope.dimension(&whole)?;
    if dimension.is_none() && (!expected.dimension.is_none() || !bare) {
        let share = Expected::new("tolerance", Dimension::NONE, Role::PositiveShare);
        let share = resolver.scope.number(&tolerance.amount, share)?;
        return value.map(|value| (share * value).abs());
    }
    let role = if expected.dimension == Dimension::TEMPERATURE { Role::Difference } else { Role::Positive };
    resolver.scope.number(&tolerance.amount, Expected::new("tolerance", expected.dimension, role))
}
