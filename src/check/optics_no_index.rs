//! `optics.no-index`: light passes through a layer of which no optical data is known.

use super::junctions::describe;
use super::{Context, Report, Rule};
use crate::design::{Duty, Extent, Layer};
use crate::finding::{Finding, Severity};
use crate::materials::optics::Optics;

pub(super) static RULE: Rule = Rule {
    code: "optics.no-index",
    severity: Severity::Error,
    title: "a layer in the light has no optical data",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let design = context.design;
    // Light that has passed the last absorber makes no difference to any figure.
    let Some(last) = design.layers.iter().rposition(|layer| layer.collects() && in_the_light(layer)) else {
        return;
    };
    for layer in design.layers[..=last].iter().filter(|layer| in_the_light(layer)) {
        let Some(material) = &layer.material else { continue };
        if material.optics != Optics::None {
            continue;
        }
        let named = describe(design, layer);
        let finding = if layer.collects() {
            Finding::error(RULE.code, format!("{named} has no optical data, so it would make no current"))
        } else {
            Finding::warning(RULE.code, format!("{named} has no optical data: what it absorbs is left out"))
        };
        report.push(
            [layer.path.as_str()],
            finding
                .at(layer.spans.material, "no n and k are known of this material")
                .help(format!(
                    "define one with `index {{ table \"{}.csv\"; cite \"…\" }}`, or choose a material marked `n,k` by `bandloom materials`",
                    material.name
                )),
        );
    }
}

fn in_the_light(layer: &Layer) -> bool {
    layer.extent == Extent::Everywhere
        && !matches!(layer.duty, Duty::Metal | Duty::Mirror | Duty::Air | Duty::Handle)
}
