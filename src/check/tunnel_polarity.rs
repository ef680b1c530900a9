//! `tunnel.polarity`: a tunnel junction the wrong way round, or with one sign only.

use super::junctions::{JunctionFacts, letter, opposite, sign};
use super::{Context, Report, Rule};
use crate::design::{Interconnect, Layer, Polarity};
use crate::finding::{Finding, Severity};
use crate::units::{Dimension, trade};

pub(super) static RULE: Rule = Rule {
    code: "tunnel.polarity",
    severity: Severity::Error,
    title: "a tunnel junction is the wrong way round",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    for tunnel in &context.design.interconnects {
        let layers = context.design.layers.get(tunnel.layers.clone()).unwrap_or_default();
        let doped: Vec<(&Layer, Polarity)> =
            layers.iter().filter_map(|layer| sign(layer).map(|sign| (layer, sign))).collect();
        let (Some((first, sunward)), Some((last, rear))) = (doped.first(), doped.last()) else { continue };
        let due = due(context, tunnel);
        let wrong = match due {
            _ if doped.len() > 1 && sunward == rear => one_sign(tunnel, first, last, due.unwrap_or(*sunward)),
            Some(due) if *sunward != due && doped.len() > 1 => {
                let above = tunnel.below_junctions.checked_sub(1).and_then(|at| context.junctions.get(at));
                let Some(above) = above else { continue };
                reversed(above, tunnel, first, due)
            }
            _ => continue,
        };
        report.push([tunnel.name.value.as_str()], wrong);
    }
}

/// The sign its sunward side must have: that of the rear of the junction above, which is the
/// other than the front of the junction below. `None` where the two do not agree on it (one of
/// them is flipped, which is a finding of its own) or neither tells.
fn due(context: &Context, tunnel: &Interconnect) -> Option<Polarity> {
    let above = tunnel.below_junctions.checked_sub(1).and_then(|index| context.junctions.get(index));
    let below = context.junctions.get(tunnel.below_junctions);
    let above = above.and_then(|facts| facts.rear_sign());
    let below = below.and_then(|facts| facts.sunward_sign()).map(opposite);
    match (above, below) {
        (Some(above), Some(below)) => (above == below).then_some(above),
        (one, other) => one.or(other),
    }
}

fn reversed(above: &JunctionFacts, tunnel: &Interconnect, first: &Layer, due: Polarity) -> Finding {
    let name = &tunnel.name.value;
    let finding = Finding::error(
        RULE.code,
        format!(
            "`{name}` turns its {} side to the {} side of `{}` above: both its faces block the current",
            letter(opposite(due)),
            letter(due),
            above.name()
        ),
    )
    .at(span_of_sign(first), format!("{} towards the sun", letter(opposite(due))))
    .help(format!("write the {}-doped layer of `{name}` first", letter(due)));
    let rear = above.layers.iter().rev().find(|(_, layer)| sign(layer) == Some(due));
    match rear.and_then(|(_, layer)| layer.doping.as_ref()) {
        Some(doping) => finding.beside(doping.span, format!("{} side of `{}`", letter(due), above.name())),
        None => finding,
    }
}

fn one_sign(tunnel: &Interconnect, first: &Layer, last: &Layer, due: Polarity) -> Finding {
    let own = sign(first).unwrap_or(due);
    // The side that must change is the one that does not fit its junction.
    let (wrong, other) = if own == due { (last, first) } else { (first, last) };
    let finding = Finding::error(
        RULE.code,
        format!("both sides of `{}` are {}-doped: nothing to tunnel through", tunnel.name.value, letter(own)),
    )
    .at(span_of_sign(wrong), format!("{} here", letter(own)))
    .beside(span_of_sign(other), format!("{} too", letter(own)));
    match &wrong.doping {
        Some(doping) => finding.help(format!(
            "write `{} {}`, with a dopant of that sign",
            letter(opposite(own)),
            trade(doping.density_per_m3, Dimension::PER_VOLUME)
        )),
        None => finding,
    }
}

fn span_of_sign(layer: &Layer) -> crate::source::Span {
    layer.doping.as_ref().map_or(layer.spans.statement, |doping| doping.span)
}
