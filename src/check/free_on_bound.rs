//! `free.on-bound`: a free value whose number lies on a bound of its range.

use super::free::{range, show};
use super::{Context, Report, Rule, Threshold};
use crate::finding::{Finding, Severity};

pub(super) static RULE: Rule = Rule {
    code: "free.on-bound",
    severity: Severity::Advice,
    title: "a free value lies on a bound of its range",
    threshold: Some(Threshold {
        default: 1e-3,
        unit: "%",
        meaning: "the distance from the bound, as a share of the range",
    }),
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    for free in &context.design.free_values {
        let Some(value) = free.value else { continue };
        let (low, high) = free.range;
        let near = context.threshold(&RULE) * (high - low);
        if value < low || value > high || (value - low > near && high - value > near) {
            continue;
        }
        let which = if value - low <= near { "lower" } else { "upper" };
        report.push(
            [free.path.as_str()],
            Finding::advice(
                RULE.code,
                format!(
                    "`{}` is {}, on the {which} bound of {}: the best value may lie beyond",
                    free.path,
                    show(free, value),
                    range(free)
                ),
            )
            .at(free.span, format!("on the {which} bound"))
            .help(format!(
                "widen the range beyond {}",
                show(free, if which == "lower" { low } else { high })
            )),
        );
    }
}
