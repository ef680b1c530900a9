//! `free.unsettled`, `free.outside`, `free.on-bound`: values the designer left open.

use super::show::significant;
use super::{Context, Report, Rule, Threshold};
use crate::design::FreeValue;
use crate::finding::{Finding, Severity};
use crate::units::{self, Dimension};

/// A free value without a number: nothing can be evaluated.
pub(super) static UNSETTLED: Rule = Rule {
    code: "free.unsettled",
    severity: Severity::Error,
    title: "a free value has no number yet",
    threshold: None,
    needs_results: false,
    run: unsettled,
};

/// A number outside its own range.
pub(super) static OUTSIDE: Rule = Rule {
    code: "free.outside",
    severity: Severity::Warning,
    title: "a free value lies outside its range",
    threshold: None,
    needs_results: false,
    run: outside,
};

/// A number on the edge of its range.
pub(super) static ON_BOUND: Rule = Rule {
    code: "free.on-bound",
    severity: Severity::Advice,
    title: "a free value lies on a bound of its range",
    threshold: Some(Threshold {
        default: 1e-3,
        unit: "%",
        meaning: "the distance from the bound, as a share of the range",
    }),
    needs_results: false,
    run: on_bound,
};

fn unsettled(context: &Context, report: &mut Report) {
    for free in context.design.free_values.iter().filter(|free| free.value.is_none()) {
        let middle = show(free, 0.5 * (free.range.0 + free.range.1));
        report.push(
            [free.path.as_str()],
            Finding::error(
                UNSETTLED.code,
                format!("`{}` is free within {} and has no value to evaluate with", free.path, range(free)),
            )
            .at(free.span, "no number yet")
            .help(format!("write a number before `free`, for a start `{middle}`"))
            .fix(before(free), format!("{middle} "), false),
        );
    }
}

fn outside(context: &Context, report: &mut Report) {
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
                OUTSIDE.code,
                format!("`{}` is {}, outside its range {}", free.path, show(free, value), range(free)),
            )
            .at(free.span, "outside")
            .help(format!("write `{}`, the nearest value within, or widen the range", show(free, nearest))),
        );
    }
}

fn on_bound(context: &Context, report: &mut Report) {
    for free in &context.design.free_values {
        let Some(value) = free.value else { continue };
        let (low, high) = free.range;
        let near = context.threshold(&ON_BOUND) * (high - low);
        if value < low || value > high || (value - low > near && high - value > near) {
            continue;
        }
        let which = if value - low <= near { "lower" } else { "upper" };
        report.push(
            [free.path.as_str()],
            Finding::advice(
                ON_BOUND.code,
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

/// An empty place just before the range.
fn before(free: &FreeValue) -> crate::source::Span {
    crate::source::Span { end: free.span.start, ..free.span }
}

/// `300 nm .. 1200 nm`
fn range(free: &FreeValue) -> String {
    format!("{} .. {}", show(free, free.range.0), show(free, free.range.1))
}

/// A value in the trade's unit, told from what the path ends in.
fn show(free: &FreeValue, si: f64) -> String {
    match free.path.rsplit('.').next() {
        Some("thickness") => units::trade(si, Dimension::LENGTH),
        Some("gap") => units::trade(si, Dimension::ENERGY),
        _ => significant(si, 4),
    }
}
