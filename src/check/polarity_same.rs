//! `polarity.same`: emitter and base of one sign, so that there is no p–n junction.

use super::junctions::{JunctionFacts, letter, opposite, sign};
use super::{Context, Report, Rule};
use crate::design::{Doping, Duty, Layer, Polarity};
use crate::finding::{Finding, Severity};
use crate::units::Dimension;
use crate::units::trade;

pub(super) static RULE: Rule = Rule {
    code: "polarity.same",
    severity: Severity::Error,
    title: "emitter and base are doped alike",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    for (index, facts) in context.junctions.iter().enumerate() {
        let Some(shared) = shared_sign(facts) else { continue };
        let (Some(emitter), Some(base)) = (doped(facts, is_emitter), doped(facts, is_base)) else { continue };
        let emitter_is_wrong = wrong_side_is_emitter(context, index, shared);
        let (wrong, other) = if emitter_is_wrong { (emitter, base) } else { (base, emitter) };
        let cure =
            format!("{} {}", letter(opposite(shared)), trade(wrong.1.density_per_m3, Dimension::PER_VOLUME));
        report.push(
            [facts.name(), wrong.0.path.as_str()],
            Finding::error(
                RULE.code,
                format!(
                    "{} and {} of `{}` are both {}-doped, so there is no p–n junction between them",
                    emitter.0.duty.word(),
                    base.0.duty.word(),
                    facts.name(),
                    letter(shared)
                ),
            )
            .at(wrong.1.span, format!("{} like the {}", letter(shared), other.0.duty.word()))
            .beside(other.1.span, format!("{} too", letter(shared)))
            .help(format!("write `{cure}` for the {}, with a dopant of that sign", wrong.0.duty.word())),
        );
    }
}

/// The sign that emitter and base of a junction share, if they do.
pub(super) fn shared_sign(facts: &JunctionFacts) -> Option<Polarity> {
    let emitter = doped(facts, is_emitter)?.1.polarity;
    let base = doped(facts, is_base)?.1.polarity;
    let absorbing = facts.absorbers().filter_map(|(_, layer)| sign(layer));
    (emitter == base && absorbing.into_iter().all(|sign| sign == emitter)).then_some(emitter)
}

fn is_emitter(layer: &Layer) -> bool {
    layer.duty == Duty::Emitter
}

fn is_base(layer: &Layer) -> bool {
    matches!(layer.duty, Duty::Base | Duty::Wafer)
}

fn doped<'a>(facts: &JunctionFacts<'a>, wanted: fn(&Layer) -> bool) -> Option<(&'a Layer, &'a Doping)> {
    let layer =
        facts.absorbers().map(|(_, layer)| layer).find(|layer| wanted(layer) && layer.doping.is_some())?;
    Some((layer, layer.doping.as_ref()?))
}

/// Which of the two to blame: the one that disagrees with its barrier, else with the other
/// junctions, else the base.
fn wrong_side_is_emitter(context: &Context, index: usize, shared: Polarity) -> bool {
    let facts = &context.junctions[index];
    let barrier = |duty: Duty| {
        facts.layers.iter().find(|(_, layer)| layer.duty == duty).and_then(|(_, layer)| sign(layer))
    };
    let (window, bsf) = (barrier(Duty::Window), barrier(Duty::Bsf));
    let window_disagrees = window.is_some_and(|sign| sign != shared);
    let bsf_disagrees = bsf.is_some_and(|sign| sign != shared);
    if window_disagrees != bsf_disagrees {
        return window_disagrees;
    }
    let others = context.junctions.iter().enumerate().filter(|(other, _)| *other != index);
    others.filter_map(|(_, other)| other.sunward_sign()).next().is_some_and(|sunward| sunward != shared)
}
