//! `doping.missing`: a layer of a p–n junction without its doping.

use super::junctions::{describe, letter, opposite, sign};
use super::{Context, Report, Rule};
use crate::design::{Duty, Extent, InterconnectKind, Layer, Polarity, VoltageModel};
use crate::finding::{Finding, Severity};
use crate::materials::MaterialClass;

pub(super) static RULE: Rule = Rule {
    code: "doping.missing",
    severity: Severity::Warning,
    title: "an emitter, base or tunnel layer says no doping",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    junctions(context, report);
    tunnels(context, report);
}

/// In a junction, where its neighbours are doped or its voltage is worked out from its layers.
fn junctions(context: &Context, report: &mut Report) {
    for facts in &context.junctions {
        let needed = facts.junction.voltage == VoltageModel::Layers
            || facts.layers.iter().any(|(_, layer)| layer.doping.is_some());
        if !needed || facts.is_gap_model() {
            continue;
        }
        for (_, layer) in facts.layers.iter().filter(|(_, layer)| is_bare(context, layer)) {
            let (usual, partner) = match layer.duty {
                Duty::Emitter => ("2e18", Duty::Base),
                Duty::Base => ("1e17", Duty::Emitter),
                _ => continue,
            };
            let partner = facts.layers.iter().find(|(_, it)| it.duty == partner).and_then(|(_, it)| sign(it));
            let polarity =
                partner.map_or(if layer.duty == Duty::Emitter { Polarity::N } else { Polarity::P }, opposite);
            let from_layers = facts.junction.voltage == VoltageModel::Layers;
            let label = if from_layers {
                format!("neither n nor p: `{}` is shown at its radiative limit", facts.junction.name.value)
            } else {
                "neither n nor p".to_owned()
            };
            report.push([layer.path.as_str()], finding((context, layer), label, polarity, usual));
        }
    }
}

fn tunnels(context: &Context, report: &mut Report) {
    for tunnel in &context.design.interconnects {
        if tunnel.kind != InterconnectKind::Tunnel {
            continue;
        }
        let layers: Vec<&Layer> =
            context.design.layers.get(tunnel.layers.clone()).unwrap_or_default().iter().collect();
        let doped: Vec<Polarity> = layers.iter().filter_map(|layer| sign(layer)).collect();
        let bare: Vec<&&Layer> = layers.iter().filter(|layer| is_bare(context, layer)).collect();
        // With both sides doped, a further layer may well be an undoped spacer.
        if doped.contains(&Polarity::N) && doped.contains(&Polarity::P) {
            continue;
        }
        for layer in bare {
            let polarity = match doped.first() {
                Some(known) => opposite(*known),
                None if layer.path == layers[0].path => Polarity::P,
                None => Polarity::N,
            };
            report.push(
                [layer.path.as_str(), tunnel.name.value.as_str()],
                finding((context, layer), "neither n nor p".to_owned(), polarity, "3e19"),
            );
        }
    }
}

/// A semiconductor that is there everywhere and says no doping that could be read.
fn is_bare(context: &Context, layer: &Layer) -> bool {
    layer.doping.is_none()
        && !context.is_spoilt(layer.spans.statement)
        && layer.extent == Extent::Everywhere
        && layer.material.as_ref().is_some_and(|material| material.class == MaterialClass::Semiconductor)
}

fn finding(
    (context, layer): (&Context, &Layer),
    label: String,
    polarity: Polarity,
    density: &str,
) -> Finding {
    Finding::warning(RULE.code, format!("{} says no doping", describe(context.design, layer)))
        .at(layer.spans.statement, label)
        .help(format!(
            "write `{} {density} /cm3` after its thickness, with your own density",
            letter(polarity)
        ))
}
