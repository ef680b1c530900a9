//! `lattice.thermal`: layers that shrink more than the wafer as they cool, and may crack.

use super::junctions::describe;
use super::show::{celsius, length, significant};
use super::{Context, Report, Rule, Threshold};
use crate::finding::{Finding, Severity};
use crate::growth::bow::CLEAVAGE_J_PER_M2;
use crate::growth::record::{Grown, Record, record};
use crate::growth::{LayerGrowth, wafer};

pub(super) static RULE: Rule = Rule {
    code: "lattice.thermal",
    severity: Severity::Warning,
    title: "layers in tension after cooling may crack",
    threshold: Some(Threshold {
        default: 3.0,
        unit: "%",
        meaning: "the energy a crack sets free, as a share of what its two faces cost",
    }),
    needs_results: false,
    run,
};

/// Thermal strain below which cooling is not what pulls.
const LEAST_STRAIN: f64 = 2e-4;

fn run(context: &Context, report: &mut Report) {
    let design = context.design;
    let Some(wafer) = wafer(design) else { return };
    let record = record(design, &context.lattice);
    let share = record.crack_energy_j_per_m2 / CLEAVAGE_J_PER_M2;
    if share <= context.threshold(&RULE) {
        return;
    }
    let Some(most) = hardest_pull(context, &record) else { return };
    let Grown { state: LayerGrowth { growth_temperature_k, thermal_strain, .. }, .. } = *most;
    // Strain of growth alone is told by the rules of the lattice.
    if thermal_strain < LEAST_STRAIN {
        return;
    }
    let (layer, wafer) = (&design.layers[most.layer], &design.layers[wafer]);
    let Some(stress) = most.stress_gpa else { return };
    let safe = record.steps.last().map_or(0.0, |last| last.grown_m) / share * context.threshold(&RULE);
    report.push(
        [layer.path.as_str()],
        Finding::warning(
            RULE.code,
            format!(
                "{} cools from {} under {} GPa of tension: a crack through the layers sets free {} times what it costs",
                describe(design, layer),
                celsius(growth_temperature_k),
                significant(stress, 2),
                significant(share, 2)
            ),
        )
        .at(layer.spans.material, format!("shrinks {} more than the wafer", super::show::percent(thermal_strain)))
        .beside(wafer.spans.material, "holds it stretched")
        .help(format!(
            "grow less than about {} in all, or at a lower temperature, or on a wafer that expands alike",
            length(safe)
        )),
    );
}

/// The layer with the largest tension times thickness.
fn hardest_pull<'a>(context: &Context, record: &'a Record) -> Option<&'a Grown> {
    let pull = |grown: &Grown| {
        let thickness = context.design.layers[grown.layer].thickness_m.unwrap_or(0.0);
        grown.stress_gpa.unwrap_or(0.0) * thickness
    };
    record.steps.iter().max_by(|a, b| pull(a).total_cmp(&pull(b))).filter(|most| pull(most) > 0.0)
}
