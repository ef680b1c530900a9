//! `free.unsettled`: a free value without a number, so that nothing can be evaluated.

use super::free::{range, show};
use super::{Context, Report, Rule};
use crate::design::FreeValue;
use crate::finding::{Finding, Severity};
use crate::source::Span;

pub(super) static RULE: Rule = Rule {
    code: "free.unsettled",
    severity: Severity::Error,
    title: "a free value has no number yet",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    for free in context.design.free_values.iter().filter(|free| free.value.is_none()) {
        let middle = show(free, 0.5 * (free.range.0 + free.range.1));
        report.push(
            [free.path.as_str()],
            Finding::error(
                RULE.code,
                format!("`{}` is free within {} and has no value to evaluate with", free.path, range(free)),
            )
            .at(free.span, "no number yet")
            .help(format!("write a number before `free`, for a start `{middle}`"))
            .fix(before(free), format!("{middle} "), false),
        );
    }
}

/// An empty place just before the range.
fn before(free: &FreeValue) -> Span {
    Span { end: free.span.start, ..free.span }
}
