//! `current.mismatch`: light that could lift the limiting junction makes surplus elsewhere.
//!
//! Only surplus that can be moved counts. Light goes down: a junction above the limiting one can be
//! thinned, and what it then lets through is absorbed further down. Light goes up only as far as
//! the junctions below now live on photons that the limiting one could absorb itself. The rest of a
//! mismatch, as in the surplus of a germanium junction, belongs to the gaps and is no fault.

use super::show::{current, current_beside, ev, length, percent};
use super::{Context, Report, Rule, Threshold};
use crate::design::Terminals;
use crate::finding::{Finding, Severity};
use crate::results::ConditionResult;

mod balance;

use balance::{Shift, gap_for, shift, thickness_for};

pub(super) static RULE: Rule = Rule {
    code: "current.mismatch",
    severity: Severity::Warning,
    title: "one junction holds back the current of the others",
    threshold: Some(Threshold {
        default: 0.1,
        unit: "%",
        meaning: "how far a junction that could give light away is above the limiting one",
    }),
    needs_results: true,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let Some(results) = context.results else { return };
    let design = context.design;
    if design.terminals != Terminals::Two || design.junctions.iter().any(|junction| junction.separate) {
        return;
    }
    let shifts: Option<Vec<(&ConditionResult, Shift)>> =
        results.conditions.iter().map(|condition| shift(condition).map(|shift| (condition, shift))).collect();
    // A design can be balanced for one light only: where it is under any, or where lights pull
    // apart, it is a compromise and no fault.
    let Some(shifts) = shifts else { return };
    let same = |(_, shift): &(&ConditionResult, Shift)| {
        shifts
            .first()
            .is_some_and(|(_, first)| (shift.to, shift.from > shift.to) == (first.to, first.from > first.to))
    };
    if !shifts.iter().all(same) {
        return;
    }
    let least = shifts.iter().min_by(|a, b| a.1.excess.total_cmp(&b.1.excess));
    let Some((condition, shift)) = least.filter(|(_, shift)| shift.excess > context.threshold(&RULE)) else {
        return;
    };
    if let Some(finding) = finding(context, condition, shift) {
        report.push(design.junctions.iter().map(|junction| junction.name.value.as_str()), finding);
    }
}

fn finding(context: &Context, condition: &ConditionResult, shift: &Shift) -> Option<Finding> {
    let (limiting, rich) = (condition.junctions.get(shift.to)?, condition.junctions.get(shift.from)?);
    let (low, high) = (limiting.photocurrent_ma_per_cm2, rich.photocurrent_ma_per_cm2);
    let place = |index: usize| context.design.junctions.get(index).map(|junction| junction.name.span);
    let finding = Finding::warning(
        RULE.code,
        format!(
            "`{}` limits the stack to {} under `{}` while `{}` makes {}, {} more",
            limiting.name,
            current_beside(low, high),
            condition.name,
            rich.name,
            current(high),
            percent(high / low - 1.0)
        ),
    )
    .at(place(shift.to)?, format!("limits: {}", current_beside(low, high)))
    .beside(place(shift.from)?, format!("surplus: {}", current(high)));
    Some(match help(context, condition, shift) {
        Some(help) => finding.help(help),
        None => finding,
    })
}

/// What would lift the limiting current under `condition`, whatever the threshold.
pub(super) fn balance_help(context: &Context, condition: &ConditionResult) -> Option<String> {
    let shift = shift(condition).filter(|shift| shift.excess > 0.0)?;
    help(context, condition, &shift)
}

/// The same where it brings the mismatch of all junctions to `bound`; a surplus that no light can
/// be moved from, as that of a germanium junction, stays.
pub(super) fn balance_within(context: &Context, condition: &ConditionResult, bound: f64) -> Option<String> {
    let shift = shift(condition).filter(|it| it.excess > 0.0 && it.mismatch_after(condition) <= bound)?;
    help(context, condition, &shift)
}

/// The change of one junction that balances the two: a thickness where it has one, else a gap.
fn help(context: &Context, condition: &ConditionResult, shift: &Shift) -> Option<String> {
    // The upper of the two decides how the light is shared.
    let changed = shift.from.min(shift.to);
    let facts = context.junctions.get(changed)?;
    let (_, layer) = facts.main_absorber()?;
    let target = shift.upper_target;
    let each = current(shift.balanced);
    if let Some(now) = layer.thickness_m
        && let Some(then) = thickness_for(context, condition, changed, target)
    {
        let verb = if then < now { "thin" } else { "thicken" };
        return Some(format!("{verb} `{}` to about {}, for some {each} each", layer.path, length(then)));
    }
    if shift.from < shift.to {
        let gap = gap_for(condition, &condition.junctions.get(changed)?.name, target)?;
        return Some(format!("raise the gap of `{}` to {}, for some {each} each", facts.name(), ev(gap)));
    }
    Some(format!("let `{}` absorb more of the light above its gap, for some {each} each", facts.name()))
}
