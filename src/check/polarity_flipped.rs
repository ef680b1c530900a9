//! `polarity.flipped`: a junction, or a layer within one, the wrong way round.

use super::junctions::{JunctionFacts, describe, letter, opposite, sign, stays};
use super::polarity_same::shared_sign;
use super::{Context, Report, Rule};
use crate::design::{Design, Duty, Growth, Layer, Place, Polarity, Terminals};
use crate::finding::{Finding, Severity};
use crate::source::Span;
use crate::units::{Dimension, trade};

pub(super) static RULE: Rule = Rule {
    code: "polarity.flipped",
    severity: Severity::Error,
    title: "a junction or a layer is doped the wrong way round",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let reference = sunward_sign_of_stack(context);
    let mut flipped = vec![false; context.junctions.len()];
    if context.design.terminals == Terminals::Two
        && let Some((sunward, model)) = reference
    {
        for (index, facts) in context.junctions.iter().enumerate() {
            if facts.junction.separate || facts.sunward_sign().is_none_or(|own| own == sunward) {
                continue;
            }
            flipped[index] = true;
            report.push([facts.name()], flipped_junction(facts, &context.junctions[model], sunward));
        }
    }
    for facts in &context.junctions {
        barriers(context, facts, report);
    }
    ends(context, &flipped, report);
}

/// The orientation most series junctions have, with one junction that has it; on a tie the one
/// that the wafer agrees with, else that of the first junction.
fn sunward_sign_of_stack(context: &Context) -> Option<(Polarity, usize)> {
    let signs: Vec<(Polarity, usize)> = context
        .junctions
        .iter()
        .enumerate()
        .filter(|(_, facts)| !facts.junction.separate)
        .filter_map(|(index, facts)| facts.sunward_sign().map(|sign| (sign, index)))
        .collect();
    let count = |polarity: Polarity| signs.iter().filter(|(sign, _)| *sign == polarity).count();
    let first = signs.first()?.0;
    let wafer = rear_wafer(context).and_then(|(_, layer)| sign(layer)).map(opposite);
    let wanted = match count(Polarity::N).cmp(&count(Polarity::P)) {
        std::cmp::Ordering::Greater => Polarity::N,
        std::cmp::Ordering::Less => Polarity::P,
        std::cmp::Ordering::Equal => wafer.unwrap_or(first),
    };
    signs.into_iter().find(|(sign, _)| *sign == wanted)
}

fn flipped_junction(facts: &JunctionFacts, model: &JunctionFacts, sunward: Polarity) -> Finding {
    let way = |sunward: Polarity| format!("{} on {}", letter(sunward), letter(opposite(sunward)));
    let (name, other) = (facts.name(), model.name());
    Finding::error(
        RULE.code,
        format!(
            "`{name}` is {}, `{other}` is {}: in series they drive against each other",
            way(opposite(sunward)),
            way(sunward)
        ),
    )
    .at(place_of_sign(facts), way(opposite(sunward)))
    .beside(place_of_sign(model), way(sunward))
    .help(format!("dope `{name}` {} like `{other}`: swap n and p in each of its layers", way(sunward)))
}

/// Where a junction shows its orientation: from its first doped absorber to its name.
fn place_of_sign(facts: &JunctionFacts) -> Span {
    facts.junction.name.span
}

/// Window against the absorber beneath it, back surface field against the one above it.
fn barriers(context: &Context, facts: &JunctionFacts, report: &mut Report) {
    if shared_sign(facts).is_some() {
        return;
    }
    let absorbing = || facts.absorbers().filter(|(_, layer)| sign(layer).is_some());
    let (Some((first, front)), Some((last, rear))) = (absorbing().next(), absorbing().next_back()) else {
        return;
    };
    for (index, layer) in &facts.layers {
        // On the wrong side they are `structure.order`.
        let (neighbour, side) = match layer.duty {
            Duty::Window if *index < first => (front, "above"),
            Duty::Bsf if *index > last => (rear, "behind"),
            _ => continue,
        };
        // A window that is itself the emitter of an absorber without one: both signs are right.
        let carries_the_junction = layer.duty == Duty::Window && sign(front) == sign(rear);
        let (Some(own), Some(due)) = (sign(layer), sign(neighbour)) else { continue };
        if own == due || carries_the_junction {
            continue;
        }
        report.push(
            [layer.path.as_str()],
            against(context, layer, neighbour, &format!("lies {side} the {}-doped", letter(due))),
        );
    }
}

/// The cap over the first junction and the wafer under the last carry the stack's current.
fn ends(context: &Context, flipped: &[bool], report: &mut Report) {
    let design = context.design;
    if design.terminals != Terminals::Two {
        return;
    }
    if let Some(first) = context.junctions.first()
        && !flipped.first().copied().unwrap_or(false)
        && let Some(due) = first.sunward_sign()
        && let Some((_, edge)) = first.layers.iter().find(|(_, layer)| sign(layer) == Some(due))
    {
        for layer in design.layers.iter().filter(|layer| layer.duty == Duty::Cap && stays(layer)) {
            if layer.place == Place::Front && sign(layer).is_some_and(|own| own != due) {
                let finding = against(context, layer, edge, &format!("contacts the {}-doped", letter(due)));
                report.push([layer.path.as_str()], finding);
            }
        }
    }
    if let Some(last) = context.junctions.last()
        && !flipped.last().copied().unwrap_or(false)
        && let Some(due) = last.rear_sign()
        && let Some((wafer, layer)) = rear_wafer(context)
        && sign(layer).is_some_and(|own| own != due)
        && let Some((at, edge)) = last.layers.iter().rev().find(|(_, layer)| sign(layer) == Some(due))
        // Doped layers of the other sign in between are a tunnel junction of the user's own.
        && between(design, *at, wafer).iter().all(|layer| sign(layer).is_none_or(|own| own == due))
    {
        let finding =
            against(context, layer, edge, &format!("carries the current of the {}-doped", letter(due)));
        report.push([layer.path.as_str()], finding);
    }
}

/// The layers after `upper` and before `lower`.
fn between(design: &Design, upper: usize, lower: usize) -> &[Layer] {
    design.layers.get(upper + 1..lower).unwrap_or_default()
}

/// The wafer under the last junction, where the current leaves through it.
fn rear_wafer<'a>(context: &Context<'a>) -> Option<(usize, &'a Layer)> {
    let design = context.design;
    let upright = design.growth == Growth::Upright;
    let below = |layer: &Layer| layer.duty == Duty::Wafer && layer.place == Place::Rear && stays(layer);
    design.layers.iter().enumerate().find(|(_, layer)| upright && below(layer))
}

fn against(context: &Context, layer: &Layer, neighbour: &Layer, how: &str) -> Finding {
    let design = context.design;
    let own = sign(layer).map_or("un", letter);
    let span = layer.doping.as_ref().map_or(layer.spans.statement, |doping| doping.span);
    let finding = Finding::error(
        RULE.code,
        format!("{} is {own}-doped but {how} {}", describe(design, layer), describe(design, neighbour)),
    )
    .at(span, format!("{own} here"));
    let finding = match &neighbour.doping {
        Some(doping) => finding.beside(doping.span, format!("{} here", letter(doping.polarity))),
        None => finding,
    };
    match (&layer.doping, sign(neighbour)) {
        (Some(doping), Some(due)) => finding.help(format!(
            "write `{} {}`, with a dopant of that sign",
            letter(due),
            trade(doping.density_per_m3, Dimension::PER_VOLUME)
        )),
        _ => finding,
    }
}
