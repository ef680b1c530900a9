//! `lattice.needless-relaxed`: a layer said to be relaxed that has no reason to relax.

use super::junctions::describe;
use super::show::{length, percent};
use super::{Context, Report, Rule, Threshold};
use crate::design::Strain;
use crate::finding::{Finding, Severity};
use crate::growth::critical::Critical;

pub(super) static RULE: Rule = Rule {
    code: "lattice.needless-relaxed",
    severity: Severity::Warning,
    title: "a layer said to be relaxed would stay strained",
    threshold: Some(Threshold {
        default: 2e-4,
        unit: "%",
        meaning: "the mismatch from which relaxing or not makes a difference",
    }),
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let design = context.design;
    for (index, layer) in design.layers.iter().enumerate() {
        let Some(state) = context.lattice[index] else { continue };
        let (Some(beneath), Some(thickness)) = (state.beneath, layer.thickness_m) else { continue };
        let mismatch = state.mismatch_at_growth;
        // Without a mismatch it is relaxed whatever is said.
        if layer.strain != Strain::Relaxed || mismatch.abs() <= context.threshold(&RULE) {
            continue;
        }
        let Some(safe) = Critical::of(design, &context.lattice, index).and_then(|critical| critical.safe_m)
        else {
            continue;
        };
        if thickness >= safe {
            continue;
        }
        let ground = &design.layers[beneath];
        report.push(
            [layer.path.as_str()],
            Finding::warning(
                RULE.code,
                format!(
                    "{} is said to be relaxed, but at {} of mismatch its {} stay strained: it relaxes beyond {}",
                    describe(design, layer),
                    percent(mismatch.abs()),
                    length(thickness),
                    length(safe)
                ),
            )
            .at(layer.spans.thickness, "too thin to relax")
            .beside(ground.spans.material, "the lattice it keeps")
            .help(format!("grow well over {}, or remove `relaxed`", length(safe))),
        );
    }
}
