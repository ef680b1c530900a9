//! `free.outside`: a free value whose number lies outside its own range.

use super::free::{range, show};
use super::{Context, Report, Rule};
use crate::finding::{Finding, Severity};

pub(super) static RULE: Rule = Rule {
    code: "free.outside",
    severity: Severity::Warning,
    title: "a free value lies outside its range",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    for free in &context.design.free_values {
        let Some(value) = free.value else { continue };
        let (low, high) = free.range;
        if value >= low && value <= high {
            continue;
        }
        let nearest = if value < low { low } else { high };
        report.push(
            [free.path.as_str()],
            Finding::warning(
                RULE.code,
                format!("`{}` is {}, outside its range {}", free.path, show(free, value), range(free)),
            )
            .at(free.span, "outside")
            .help(format!("write `{}`, the nearest value within, or widen the range", show(free, nearest))),
        );
    }
}
