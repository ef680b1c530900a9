//! `gap.bsf-low`: a back surface field with a smaller gap than the absorber it stands behind.

use super::junctions::{JunctionFacts, describe};
use super::show::ev;
use super::{Context, Report, Rule, Threshold};
use crate::design::{Duty, Layer};
use crate::finding::{Finding, Severity};
use crate::growth::ROOM_K;
use crate::numerics::constants::CHARGE;

pub(super) static RULE: Rule = Rule {
    code: "gap.bsf-low",
    severity: Severity::Warning,
    title: "a back surface field has a smaller gap than its base",
    threshold: Some(Threshold {
        default: 0.01 * CHARGE,
        unit: "eV",
        meaning: "how far its gap lies below the base's",
    }),
    needs_results: false,
    run,
};

/// Barrier that turns minority carriers back well at room temperature: about 4 kT.
const USEFUL_BARRIER_EV: f64 = 0.1;

fn run(context: &Context, report: &mut Report) {
    for facts in &context.junctions {
        for (_, layer) in facts.layers.iter().filter(|(_, layer)| layer.duty == Duty::Bsf) {
            if is_low(context, facts, layer)
                && let Some(finding) = finding(context, facts, layer)
            {
                report.push([layer.path.as_str()], finding);
            }
        }
    }
}

/// Whether the gap of `layer` lies below that of the junction by more than the threshold.
pub(super) fn is_low(context: &Context, facts: &JunctionFacts, layer: &Layer) -> bool {
    let slack = context.threshold(&RULE) / CHARGE;
    let own = layer.material.as_ref().and_then(|material| material.gap(ROOM_K));
    own.zip(facts.gap()).is_some_and(|(own, gap)| own.ev < gap.ev - slack)
}

fn finding(context: &Context, facts: &JunctionFacts, layer: &Layer) -> Option<Finding> {
    let own = layer.material.as_ref()?.gap(ROOM_K)?.ev;
    let gap = facts.gap()?.ev;
    let (_, base) = facts.main_absorber()?;
    let message = format!(
        "{} has a gap of {}, less than the {} of its {}: it collects carriers instead of turning them back",
        describe(context.design, layer),
        ev(own),
        ev(gap),
        base.duty.word()
    );
    Some(
        Finding::warning(RULE.code, message)
            .at(layer.spans.material, format!("gap {}", ev(own)))
            .beside(base.spans.material, format!("gap {}", ev(gap)))
            .help(format!("choose a material with a gap of at least {}", ev(gap + USEFUL_BARRIER_EV))),
    )
}
