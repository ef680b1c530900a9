//! `structure.no-contact`: contacts on one side of the cell, and nothing that takes the current
//! from the other.

use super::{Context, Report, Rule};
use crate::design::{Duty, Extent, Layer, Place};
use crate::finding::{Finding, Severity};
use crate::materials::MaterialClass;

pub(super) static RULE: Rule = Rule {
    code: "structure.no-contact",
    severity: Severity::Warning,
    title: "one side of the cell has no contact",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let design = context.design;
    // Limit studies speak of no contacts; what was misread may be one.
    if context.has_faults() || context.junctions.iter().all(|facts| facts.is_gap_model()) {
        return;
    }
    let (Some(first), Some(last)) = (design.junctions.first(), design.junctions.last()) else { return };
    let front: Vec<&Layer> = design.layers.iter().take(first.layers.start).collect();
    let rear: Vec<&Layer> = design.layers.iter().skip(last.layers.end).collect();
    let inside = |at: usize| design.layers.iter().filter(move |layer| layer.place == Place::Junction(at));
    let top = design.fingers.is_some() || front.iter().any(|layer| takes_current(layer));
    let bottom = rear.iter().any(|layer| takes_current(layer));
    // A wafer that is doped, or is itself the junction, can be contacted anywhere later.
    let conducts = rear.iter().copied().chain(inside(design.junctions.len() - 1)).any(|layer| {
        layer.duty == Duty::Wafer && (layer.doping.is_some() || matches!(layer.place, Place::Junction(_)))
    });
    let cover = rear.iter().any(|layer| layer.duty == Duty::Handle);
    let (name, side, help) = match (top, bottom) {
        (false, true) => (
            &first.name,
            "sunward",
            "write `fingers { shading 3 %; series_resistance 20 mohm cm2 }`, or a `contact` above it",
        ),
        (true, false) if !conducts && !cover => {
            (&last.name, "rear", "write `metal Au` as the last line, or a `contact` below it")
        }
        _ => return,
    };
    let other = if side == "rear" { "sunward" } else { "rear" };
    let mut finding = Finding::warning(
        RULE.code,
        format!(
            "nothing takes the current from the {side} side of `{}`, while the {other} side has a contact",
            name.value
        ),
    )
    .at(name.span, format!("no contact on its {side} side"))
    .help(help);
    if let Some(contact) = front.iter().chain(&rear).find(|layer| takes_current(layer)) {
        finding = finding.beside(contact.spans.statement, "a contact");
    } else if let Some(fingers) = &design.fingers {
        finding = finding.beside(fingers.span, "a contact");
    }
    report.push([name.value.as_str()], finding);
}

/// Whether a layer outside the junctions is there to carry current out.
fn takes_current(layer: &Layer) -> bool {
    let metallic = layer
        .material
        .as_ref()
        .is_some_and(|material| matches!(material.class, MaterialClass::Metal | MaterialClass::Contact));
    layer.extent != Extent::Removed
        && (matches!(layer.duty, Duty::Metal | Duty::Contact | Duty::Cap) || metallic)
}
