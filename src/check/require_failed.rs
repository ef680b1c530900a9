//! `require.failed`: what the designer asked for does not hold.

use super::show::{current, ev, significant};
use super::{Context, Report, Rule};
use crate::design::{Comparison, Requirement};
use crate::finding::{Finding, Severity};
use crate::results::{ConditionResult, JunctionResult, RequirementResult};

pub(super) static RULE: Rule = Rule {
    code: "require.failed",
    severity: Severity::Error,
    title: "a requirement does not hold",
    threshold: None,
    needs_results: true,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let Some(results) = context.results else { return };
    for requirement in &context.design.requirements {
        let mut failed: Vec<&RequirementResult> = results
            .requirements
            .iter()
            .filter(|result| !result.met && result.text == requirement.text)
            .collect();
        failed.sort_by(|a, b| a.margin.total_cmp(&b.margin));
        let Some((worst, others)) = failed.split_first() else { continue };
        let finding = Finding::error(RULE.code, message(requirement, worst, others))
            .at(requirement.span, format!("off by {}", difference(worst.margin.abs(), requirement, worst)));
        let condition = worst
            .condition
            .as_ref()
            .and_then(|name| results.conditions.iter().find(|condition| condition.name == *name));
        let help = condition
            .and_then(|condition| match requirement.metric.value.as_str() {
                "efficiency" | "power" => largest_loss(condition),
                "current_mismatch" => {
                    super::current_mismatch::balance_within(context, condition, worst.bound)
                        .or_else(|| extremes(condition))
                }
                "jsc" | "jmp" => {
                    super::current_mismatch::balance_help(context, condition).or_else(|| limiting(condition))
                }
                "voc" | "vmp" => largest_deficit(condition),
                "fill_factor" => resistance(condition),
                _ => None,
            })
            .unwrap_or_else(|| margin_help(requirement, worst));
        report.push([requirement.metric.value.as_str()], finding.help(help));
    }
}

fn message(requirement: &Requirement, worst: &RequirementResult, others: &[&RequirementResult]) -> String {
    let under = |result: &RequirementResult| {
        result.condition.as_ref().map_or_else(String::new, |name| format!(" under `{name}`"))
    };
    let others: Vec<String> = others
        .iter()
        .map(|other| format!("{}{}", in_unit(other.value, requirement, other), under(other)))
        .collect();
    let others = if others.is_empty() { String::new() } else { format!("; {}", others.join(", ")) };
    let off = worst.margin.abs();
    // Exactly on a bound that has to be passed, there is no distance to tell.
    let off = if off > 0.0 {
        format!("{} {} ", difference(off, requirement, worst), side(requirement))
    } else {
        "not ".to_owned()
    };
    format!(
        "`{}`{} is {}, {off}`{} {}`{others}",
        requirement.metric.value,
        under(worst),
        in_unit(worst.value, requirement, worst),
        requirement.comparison.sign(),
        requirement.bound_text,
    )
}

/// On which side of its bound a value that fails lies.
fn side(requirement: &Requirement) -> &'static str {
    match requirement.comparison {
        Comparison::AtLeast | Comparison::Above => "below",
        Comparison::AtMost | Comparison::Below => "above",
    }
}

/// What is left to do where no cause is known: the margin, and the bound that the design meets.
fn margin_help(requirement: &Requirement, worst: &RequirementResult) -> String {
    let verb = match requirement.comparison {
        Comparison::AtLeast | Comparison::Above => "raise",
        Comparison::AtMost | Comparison::Below => "lower",
    };
    let bound = holding(requirement, worst);
    if worst.margin == 0.0 {
        return format!("{verb} `{}`, or require {bound}", requirement.metric.value);
    }
    format!(
        "{verb} `{}` by {}, or require {bound}",
        requirement.metric.value,
        difference(worst.margin.abs(), requirement, worst)
    )
}

/// The junctions of the smallest and the largest photocurrent, where no light can be moved.
fn extremes(condition: &ConditionResult) -> Option<String> {
    let by = |a: &&JunctionResult, b: &&JunctionResult| {
        a.photocurrent_ma_per_cm2.total_cmp(&b.photocurrent_ma_per_cm2)
    };
    let low = condition.junctions.iter().min_by(by)?;
    let high = condition.junctions.iter().max_by(by)?;
    (low.name != high.name).then(|| {
        format!(
            "narrow the gap of `{}`, which limits with {}, or widen that of `{}`, which makes {}",
            low.name,
            current(low.photocurrent_ma_per_cm2),
            high.name,
            current(high.photocurrent_ma_per_cm2)
        )
    })
}

/// The junction that limits the current.
fn limiting(condition: &ConditionResult) -> Option<String> {
    let name = condition.limiting_junction.as_ref()?;
    let junction = condition.junctions.iter().find(|junction| junction.name == *name)?;
    let makes = current(junction.photocurrent_ma_per_cm2);
    Some(format!("let `{name}` absorb more, it limits with {makes}"))
}

/// The junction whose voltage lies furthest below its gap.
fn largest_deficit(condition: &ConditionResult) -> Option<String> {
    let deficit = |junction: &JunctionResult| junction.gap_ev - junction.voc_v;
    let worst = condition.junctions.iter().max_by(|a, b| deficit(a).total_cmp(&deficit(b)))?;
    Some(format!(
        "start with `{}`: its {} V are {} V below its gap of {}",
        worst.name,
        significant(worst.voc_v, 4),
        significant(deficit(worst), 3),
        ev(worst.gap_ev)
    ))
}

/// A value of a requirement in the unit people read it in.
fn in_unit(value: f64, requirement: &Requirement, result: &RequirementResult) -> String {
    match result.unit.as_str() {
        "1" if requirement.bound_text.contains('%') => format!("{} %", significant(value * 100.0, 4)),
        "1" | "" => significant(value, 4),
        unit => format!("{} {unit}", significant(value, 4)),
    }
}

/// A difference of two such values.
fn difference(value: f64, requirement: &Requirement, result: &RequirementResult) -> String {
    match result.unit.as_str() {
        "1" if requirement.bound_text.contains('%') => format!("{} points", significant(value * 100.0, 3)),
        "1" | "" => significant(value, 3),
        unit => format!("{} {unit}", significant(value, 3)),
    }
}

/// The nearest bound of three digits that holds.
fn holding(requirement: &Requirement, result: &RequirementResult) -> String {
    let percent = result.unit == "1" && requirement.bound_text.contains('%');
    let (value, unit) = match result.unit.as_str() {
        _ if percent => (result.value * 100.0, "%"),
        "1" => (result.value, ""),
        unit => (result.value, unit),
    };
    let step = 10f64.powi((value.abs().max(1e-300)).log10().floor() as i32 - 2);
    let rounded = match requirement.comparison {
        Comparison::AtLeast | Comparison::Above => (value / step - 1e-9).floor() * step,
        Comparison::AtMost | Comparison::Below => (value / step + 1e-9).ceil() * step,
    };
    format!("{} {unit}", significant(rounded, 3)).trim_end().to_string()
}

/// Ledger lines that a design can act on; heat and what passes belong to the gaps.
const AVOIDABLE: &[(&str, &str)] = &[
    ("fingers", "shading by the fingers"),
    ("reflected", "reflection"),
    ("absorbed", "absorption"),
    ("not_collected", "light not collected"),
    ("mismatch", "current mismatch"),
    ("tunnel", "tunnel junction resistance"),
    ("series", "series resistance"),
];

/// The largest loss that a design can act on.
fn largest_loss(condition: &ConditionResult) -> Option<String> {
    let names: Vec<&str> = AVOIDABLE.iter().map(|(name, _)| *name).collect();
    largest_of(condition, &names)
}

/// The larger resistance, where it takes more than a thousandth of what is delivered.
fn resistance(condition: &ConditionResult) -> Option<String> {
    let of = |line: &str| -> f64 {
        let same = condition.ledger_w_per_m2.iter().filter(|known| known.line == line);
        same.map(|known| known.value).sum()
    };
    let matters = of("tunnel").max(of("series")) > 1e-3 * condition.power_w_per_m2;
    matters.then(|| largest_of(condition, &["tunnel", "series"])).flatten()
}

/// The largest of some lines of the ledger.
fn largest_of(condition: &ConditionResult, names: &[&str]) -> Option<String> {
    let avoidable = condition.ledger_w_per_m2.iter().filter(|line| names.contains(&line.line.as_str()));
    let avoidable = avoidable.filter_map(|line| {
        AVOIDABLE.iter().find(|(name, _)| *name == line.line).map(|(_, words)| (line, *words))
    });
    let (line, words) =
        avoidable.reduce(|most, next| if next.0.value > most.0.value { next } else { most })?;
    let place = line.layer.as_ref().or(line.junction.as_ref());
    let place = place.map_or_else(String::new, |path| format!(" in `{path}`"));
    (line.value > 0.0).then(|| {
        format!(
            "start with {words}{place}: {} W/m2, {} points",
            significant(line.value, 3),
            significant(line.value / condition.incident_w_per_m2 * 100.0, 2)
        )
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::{Span, Spanned};

    fn asked(comparison: Comparison, bound_text: &str) -> Requirement {
        Requirement {
            metric: Spanned::new("metric".into(), Span::default()),
            comparison,
            bound: 0.0,
            bound_text: bound_text.into(),
            under: Vec::new(),
            at_yield: None,
            text: String::new(),
            span: Span::default(),
        }
    }

    fn came_out(value: f64, unit: &str) -> RequirementResult {
        RequirementResult {
            text: String::new(),
            condition: None,
            value,
            bound: 0.0,
            unit: unit.into(),
            met: false,
            margin: 0.0,
        }
    }

    #[test]
    fn the_bound_offered_holds() {
        // Rounded towards the side on which the value lies, three digits.
        for (comparison, bound, value, unit, offered) in [
            (Comparison::AtLeast, "40 %", 0.320_47, "1", "32 %"),
            (Comparison::AtMost, "3 %", 0.058_81, "1", "5.89 %"),
            (Comparison::AtLeast, "1.05 V", 1.045_3, "V", "1.04 V"),
            (Comparison::AtLeast, "0.9", 0.854_9, "1", "0.854"),
            // A value on a whole step goes one down: `>` would not hold on it.
            (Comparison::Above, "30 %", 0.28, "1", "27.9 %"),
        ] {
            assert_eq!(holding(&asked(comparison, bound), &came_out(value, unit)), offered);
        }
    }
}
