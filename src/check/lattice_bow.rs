//! `lattice.bow`: the layers bend the wafer further than tools hold it.

use super::show::{length, significant};
use super::{Context, Report, Rule, Threshold};
use crate::finding::{Finding, Severity};
use crate::growth::bow::BOW_DIAMETER_M;
use crate::growth::record::{Grown, record};
use crate::growth::wafer;

pub(super) static RULE: Rule = Rule {
    code: "lattice.bow",
    severity: Severity::Warning,
    title: "the layers bend the wafer",
    threshold: Some(Threshold {
        default: 1e-3,
        unit: "um",
        meaning: "how far the middle of 100 mm of wafer stands off its edge",
    }),
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let design = context.design;
    let Some(wafer) = wafer(design).map(|at| &design.layers[at]) else { return };
    let record = record(design, &context.lattice);
    let (Some(bow), Some(thickness)) = (record.bow_m, wafer.thickness_m) else { return };
    let allowed = context.threshold(&RULE);
    // Beyond a tenth of the span the formula does not hold; films that thick relax or crack first.
    if bow.abs() <= allowed {
        return;
    }
    let push = |grown: &Grown| {
        let layer = design.layers[grown.layer].thickness_m.unwrap_or(0.0);
        grown.stress_gpa.unwrap_or(0.0) * layer * bow.signum()
    };
    let Some(most) = record.steps.iter().max_by(|a, b| push(a).total_cmp(&push(b))) else { return };
    let layer = &design.layers[most.layer];
    let stress = most.stress_gpa.unwrap_or(0.0);
    // Stoney: the bow falls with the square of the wafer's thickness.
    let thick = thickness * (bow.abs() / allowed).sqrt();
    report.push(
        [wafer.path.as_str(), layer.path.as_str()],
        Finding::warning(
            RULE.code,
            format!(
                "the layers pull with {} N/m and bend {} of wafer by {} over {} mm",
                significant(record.force_n_per_m, 2),
                length(thickness),
                length(bow.abs()),
                significant(BOW_DIAMETER_M * 1e3, 3)
            ),
        )
        .at(wafer.spans.thickness, if bow > 0.0 { "bends hollow" } else { "bends round" })
        .beside(
            layer.spans.material,
            format!(
                "most of it: {} GPa of {}",
                significant(stress.abs(), 2),
                if stress > 0.0 { "tension" } else { "compression" }
            ),
        )
        .help(format!("grow on a wafer of {} and thin it later", length((thick * 1e6).ceil() * 1e-6))),
    );
}
