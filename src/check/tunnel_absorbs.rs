//! `tunnel.absorbs`: a tunnel junction takes light from the junctions below it.

use super::gap_window_absorbs::{Loss, thinner, worst};
use super::junctions::JunctionFacts;
use super::show::{current, ev, length, percent};
use super::{Context, Report, Rule, Threshold};
use crate::design::{Extent, Interconnect, Layer};
use crate::finding::{Finding, Severity};
use crate::growth::ROOM_K;

pub(super) static RULE: Rule = Rule {
    code: "tunnel.absorbs",
    severity: Severity::Warning,
    title: "a tunnel junction absorbs light",
    threshold: Some(Threshold {
        default: 0.03,
        unit: "%",
        meaning: "the current lost in its layers, as a share of the junction's below",
    }),
    needs_results: true,
    run,
};

fn run(context: &Context, report: &mut Report) {
    for tunnel in &context.design.interconnects {
        let Some(below) = context.junctions.get(tunnel.below_junctions) else { continue };
        let layers = context.design.layers.get(tunnel.layers.clone()).unwrap_or_default();
        let mut losses: Vec<(&Layer, Loss)> = layers
            .iter()
            .filter(|layer| layer.extent == Extent::Everywhere)
            .filter_map(|layer| Some((layer, worst(context, below.name(), &layer.path)?)))
            .collect();
        losses.sort_by(|a, b| b.1.lost.total_cmp(&a.1.lost));
        if let Some(finding) = finding(context, tunnel, below, &losses) {
            let paths = losses.iter().map(|(layer, _)| layer.path.as_str());
            report.push(paths.chain([tunnel.name.value.as_str()]), finding);
        }
    }
}

/// One finding for all layers of a tunnel junction, the most absorbing first.
fn finding(
    context: &Context,
    tunnel: &Interconnect,
    below: &JunctionFacts,
    losses: &[(&Layer, Loss)],
) -> Option<Finding> {
    let allowed = context.threshold(&RULE);
    let (most, loss) = losses.first()?;
    let lost: f64 = losses.iter().map(|(_, loss)| loss.lost).sum();
    let share = lost / loss.photocurrent;
    if share <= allowed {
        return None;
    }
    let gap = |layer: &Layer| layer.material.as_ref().and_then(|material| material.gap(ROOM_K));
    let says = |layer: &Layer| gap(layer).map_or_else(String::new, |gap| format!("gap {}", ev(gap.ev)));
    let mut finding = Finding::warning(
        RULE.code,
        format!(
            "`{}` absorbs {} under `{}`, {} of what `{}` below makes",
            tunnel.name.value,
            current(lost),
            loss.condition.name,
            percent(share),
            below.name()
        ),
    )
    .at(most.spans.material, says(most));
    for (layer, _) in &losses[1..] {
        finding = finding.beside(layer.spans.material, says(layer));
    }
    let narrow = below.gap().filter(|below| gap(most).is_some_and(|own| own.ev <= below.ev));
    let thin = thinner(loss.condition, most, allowed / share);
    Some(finding.help(match (narrow, thin) {
        (Some(below), _) => format!("choose materials with a gap above {}", ev(below.ev)),
        (None, Some(thin)) => format!("thin its layers to {}", length(thin)),
        (None, None) => "choose materials with a wider gap".to_string(),
    }))
}
