//! The figures of a section under further conditions.

use crate::report::context::{Context, under};
use crate::report::number::percent;
use crate::report::text::Text;
use crate::report::view::layers::capital;
use crate::report::view::{Beside, Fold, condition_words};
use crate::results::ConditionResult;

/// Conditions drawn at most, the first among them; all are in the tables and the numbers file.
pub const DRAWN: usize = 5;

/// One fold a further condition, as far as it differs from the first in what `same` compares.
pub fn folds(
    context: &Context<'_>,
    same: &dyn Fn(&ConditionResult, &ConditionResult) -> bool,
    make: &dyn Fn(&Context<'_>) -> Beside,
) -> Vec<Fold> {
    let conditions = &context.results.conditions;
    let mut out = Vec::new();
    for (index, condition) in conditions.iter().enumerate().take(DRAWN).skip(1) {
        if conditions[..index].iter().any(|other| same(condition, other)) {
            continue;
        }
        let there = context.under(index);
        let beside = make(&there);
        if !beside.is_empty() {
            out.push(Fold { head: head(&there), beside });
        }
    }
    out
}

fn head(context: &Context<'_>) -> Text {
    Text::of(format!(
        "{}: {}; efficiency {}",
        capital(&under(context.drawn)),
        condition_words(context, context.drawn),
        percent(context.drawn.efficiency, 2)
    ))
}

/// Whether light takes the same way under both: one drawing serves them.
pub fn same_light(a: &ConditionResult, b: &ConditionResult) -> bool {
    let (a_light, b_light) = (&a.spectral, &b.spectral);
    a.light == b.light
        && a_light.wavelength_nm == b_light.wavelength_nm
        && a_light.reflectance == b_light.reflectance
        && a_light.eqe == b_light.eqe
        && a_light.absorptance == b_light.absorptance
}

/// Says which conditions share the drawing of another, and which are not drawn at all.
pub fn words(context: &Context<'_>, same: &dyn Fn(&ConditionResult, &ConditionResult) -> bool) -> Vec<Text> {
    let conditions = &context.results.conditions;
    let mut out = Vec::new();
    for (index, condition) in conditions.iter().enumerate().take(DRAWN).skip(1) {
        if let Some(other) = conditions[..index].iter().find(|other| same(condition, other)) {
            let (this, that) = (capital(&under(condition)), under(other));
            out.push(Text::of(format!("{this} the shares are those {that}.")));
        }
    }
    if conditions.len() > DRAWN {
        let more = crate::report::number::counted(conditions.len() - DRAWN, "condition");
        out.push(Text::of(format!("{} more are in the tables and the numbers file.", capital(&more))));
    }
    out
}
