//! `tunnel.absorbs`: a tunnel junction takes light from the junctions below it.

use super::gap_window_absorbs::{thinner, worst};
use super::junctions::describe;
use super::show::{current, ev, length, percent};
use super::{Context, Report, Rule, Threshold};
use crate::design::Extent;
use crate::finding::{Finding, Severity};
use crate::growth::ROOM_K;

pub(super) static RULE: Rule = Rule {
    code: "tunnel.absorbs",
    severity: Severity::Warning,
    title: "a tunnel junction absorbs light",
    threshold: Some(Threshold {
        default: 0.03,
        unit: "%",
        meaning: "the current lost in a layer, as a share of the junction's below",
    }),
    needs_results: true,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let allowed = context.threshold(&RULE);
    for tunnel in &context.design.interconnects {
        let Some(below) = context.junctions.get(tunnel.below_junctions) else { continue };
        let layers = context.design.layers.get(tunnel.layers.clone()).unwrap_or_default();
        for layer in layers.iter().filter(|layer| layer.extent == Extent::Everywhere) {
            let Some(loss) = worst(context, below.name(), &layer.path) else { continue };
            let share = loss.lost / loss.photocurrent;
            if share <= allowed {
                continue;
            }
            let gap = layer.material.as_ref().and_then(|material| material.gap(ROOM_K));
            let finding = Finding::warning(
                RULE.code,
                format!(
                    "{} absorbs {} under `{}`, {} of what `{}` below makes",
                    describe(context.design, layer),
                    current(loss.lost),
                    loss.condition,
                    percent(share),
                    below.name()
                ),
            )
            .at(
                layer.spans.material,
                gap.map_or_else(|| "its light is lost".to_string(), |gap| format!("gap {}", ev(gap.ev))),
            );
            let wanted = below.gap().filter(|below| gap.is_none_or(|own| own.ev <= below.ev));
            let thin = layer.thickness_m.and_then(|thickness| thinner(thickness, share, allowed));
            let finding = match (wanted, thin) {
                (Some(below), _) => {
                    finding.help(format!("choose a material with a gap above {}", ev(below.ev)))
                }
                (None, Some(thin)) => finding.help(format!("thin it to {}", length(thin))),
                (None, None) => finding.help("choose a material with a wider gap"),
            };
            report.push([layer.path.as_str(), tunnel.name.value.as_str()], finding);
        }
    }
}
