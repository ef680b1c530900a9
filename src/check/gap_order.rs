//! `gap.order`: a junction with a smaller gap stands in the light of one with a wider gap.

use super::show::ev;
use super::{Context, Report, Rule};
use crate::finding::{Finding, Severity};
use crate::numerics::constants::CHARGE;

pub(super) static RULE: Rule = Rule {
    code: "gap.order",
    severity: Severity::Error,
    title: "a smaller gap stands sunward of a wider one",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    for pair in context.junctions.windows(2) {
        let [upper, lower] = pair else { continue };
        let (Some(above), Some(below)) = (upper.gap(), lower.gap()) else { continue };
        // Closer than this they are the same gap: `gap.equal`.
        if above.ev > below.ev - context.threshold(&super::gap_equal::RULE) / CHARGE {
            continue;
        }
        let (Some((_, shading)), Some((_, shaded))) = (upper.main_absorber(), lower.main_absorber()) else {
            continue;
        };
        let (top, bottom) = (upper.name(), lower.name());
        report.push(
            [top, bottom],
            Finding::error(
                RULE.code,
                format!(
                    "`{top}` absorbs from {} and stands sunward of `{bottom}`, whose gap is {}: no light is left for `{bottom}`",
                    ev(above.ev),
                    ev(below.ev)
                ),
            )
            .at(shading.spans.material, format!("gap {}", ev(above.ev)))
            .beside(shaded.spans.material, format!("in its shade, gap {}", ev(below.ev)))
            .help(format!("write junction `{bottom}` sunward of `{top}`")),
        );
    }
}
