//! `require.failed`: what the designer asked for does not hold.

use super::show::significant;
use super::{Context, Report, Rule};
use crate::design::{Comparison, Requirement};
use crate::finding::{Finding, Severity};
use crate::results::{ConditionResult, RequirementResult};

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
                "current_mismatch" => super::current_mismatch::balance_help(context, condition),
                _ => None,
            })
            .unwrap_or_else(|| {
                format!(
                    "change the design, or write `{} {} {}`, which holds",
                    requirement.metric.value,
                    requirement.comparison.sign(),
                    holding(requirement, worst)
                )
            });
        let finding = finding.help(help);
        report.push([requirement.metric.value.as_str()], finding);
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
    let others = if others.is_empty() { String::new() } else { format!(", and {}", others.join(", ")) };
    format!(
        "`{}` is {}{}, not {} {}{others}",
        requirement.metric.value,
        in_unit(worst.value, requirement, worst),
        under(worst),
        requirement.comparison.sign(),
        requirement.bound_text,
    )
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
    let avoidable = condition.ledger_w_per_m2.iter().filter_map(|line| {
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
