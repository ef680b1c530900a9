//! `structure.no-wafer`: a crystalline stack that says nothing of what it is grown on.

use super::show::count;
use super::{Context, Report, Rule};
use crate::finding::{Finding, Severity};
use crate::growth;
use crate::materials::MaterialClass;

pub(super) static RULE: Rule = Rule {
    code: "structure.no-wafer",
    severity: Severity::Advice,
    title: "a crystalline stack names no wafer",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let design = context.design;
    if growth::wafer(design).is_some() || context.has_faults() {
        return;
    }
    let crystals: Vec<_> = context
        .junctions
        .iter()
        .flat_map(|facts| facts.layers.iter().map(|(_, layer)| *layer))
        .filter(|layer| {
            layer.material.as_ref().is_some_and(|material| {
                material.class == MaterialClass::Semiconductor && material.lattice.is_some()
            })
        })
        .collect();
    // The last one written is what most often equals the wafer.
    let Some(nearest) = crystals.last().and_then(|layer| layer.material.as_ref()) else { return };
    let ground = context
        .junctions
        .last()
        .and_then(|facts| facts.main_absorber())
        .and_then(|(_, layer)| layer.material.as_ref())
        .unwrap_or(nearest);
    report.push(
        [design.name.value.as_str()],
        Finding::advice(
            RULE.code,
            format!(
                "`{}` has {} and no wafer, so mismatch and strain are not judged",
                design.name.value,
                count(crystals.len(), "crystalline layer")
            ),
        )
        .at(design.name.span, "grown on nothing")
        .help(format!("add `wafer {} 350 um` as the last line of layers", ground.name)),
    );
}
