//! Whether the requirements are met, failing ones first, in words.

use serde::Serialize;

use crate::design::{Comparison, Requirement};
use crate::report::context::Context;
use crate::report::number::{MINUS, count, fixed, signed, with_unit};
use crate::report::text::Text;
use crate::results::RequirementResult;

/// The verdict.
#[derive(Clone, Debug, Serialize)]
pub struct Verdict {
    /// In one or two sentences.
    pub sentence: Text,
    /// Each requirement under each condition, failing ones first.
    pub rows: Vec<VerdictRow>,
    /// Whether one fails.
    pub fails: bool,
}

/// One requirement under one condition.
#[derive(Clone, Debug, Serialize)]
pub struct VerdictRow {
    /// `met`, `fails`
    pub mark: &'static str,
    /// Whether it fails.
    pub fails: bool,
    /// As written.
    pub requirement: Text,
    /// `under noon`; empty where the figure has no condition.
    pub under: Text,
    /// What was reached.
    pub reached: String,
    /// By how much it is met or missed.
    pub margin: String,
}

/// Builds it from the results.
pub fn verdict(context: &Context<'_>) -> Verdict {
    let all = &context.results.requirements;
    let mut order: Vec<&RequirementResult> = all.iter().collect();
    order.sort_by_key(|requirement| requirement.met);
    let rows = order.iter().map(|requirement| row(context, requirement)).collect();
    let failing: Vec<&RequirementResult> = order.iter().copied().filter(|r| !r.met).collect();
    Verdict { sentence: sentence(context, all.len(), &failing), rows, fails: !failing.is_empty() }
}

fn capital(words: &str) -> String {
    let mut chars = words.chars();
    chars.next().map(|first| first.to_uppercase().chain(chars).collect()).unwrap_or_default()
}

fn sentence(context: &Context<'_>, all: usize, failing: &[&RequirementResult]) -> Text {
    if all == 0 {
        return Text::of("No requirement is stated; nothing is judged.");
    }
    if failing.is_empty() {
        return Text::of(match all {
            1 => "The one requirement is met.".into(),
            2 => "Both requirements are met.".into(),
            n => format!("All {} requirements are met.", count(n)),
        });
    }
    let met = all - failing.len();
    let begin = match (met, all) {
        (0, 1) => "The one requirement is not met. ".to_string(),
        (0, 2) => "Neither of two requirements is met. ".to_string(),
        (0, n) => format!("None of {} requirements is met. ", count(n)),
        (met, n) => format!(
            "{} of {} requirements {} met. ",
            capital(&count(met)),
            count(n),
            if met == 1 { "is" } else { "are" }
        ),
    };
    let mut text = Text::of(begin);
    for requirement in failing.iter().take(2) {
        text = text.fail(format!("{}. ", failure(context, requirement)));
    }
    if failing.len() > 2 {
        let more = failing.len() - 2;
        let verb = if more == 1 { "fails" } else { "fail" };
        text = text.fail(format!("{} more {verb}.", capital(&count(more))));
    }
    text
}

/// `Efficiency under summer_roof is 27.58 %, 0.42 points short of 28 %`
fn failure(context: &Context<'_>, result: &RequirementResult) -> String {
    let stated = stated(context, result);
    let metric = match metric(result, stated) {
        "voc" => "open-circuit voltage".to_string(),
        "jsc" => "short-circuit current".to_string(),
        path if path.contains('.') => path.to_string(),
        path => path.replace('_', " "),
    };
    let under = result.condition.as_ref().map(|c| format!(" under {c}")).unwrap_or_default();
    let (decimals, difference) = difference(result, false);
    let upper = matches!(comparison(result, stated), Some(Comparison::AtMost | Comparison::Below));
    let side = if upper { "over" } else { "short of" };
    format!(
        "{}{under} is {}, {difference} {side} {}",
        capital(&metric),
        figure(result, result.value, decimals),
        bound(result, stated)
    )
}

fn stated<'a>(context: &Context<'a>, result: &RequirementResult) -> Option<&'a Requirement> {
    context.design.requirements.iter().find(|requirement| requirement.text == result.text)
}

fn metric<'a>(result: &'a RequirementResult, stated: Option<&'a Requirement>) -> &'a str {
    match stated {
        Some(requirement) => &requirement.metric.value,
        None => words(&result.text).split(' ').next().unwrap_or("figure"),
    }
}

fn comparison(result: &RequirementResult, stated: Option<&Requirement>) -> Option<Comparison> {
    let from_text = || {
        [
            ("<=", Comparison::AtMost),
            (">=", Comparison::AtLeast),
            ("<", Comparison::Below),
            (">", Comparison::Above),
        ]
        .into_iter()
        .find(|(sign, _)| result.text.contains(sign))
        .map(|(_, comparison)| comparison)
    };
    stated.map(|requirement| requirement.comparison).or_else(from_text)
}

fn bound(result: &RequirementResult, stated: Option<&Requirement>) -> String {
    match stated {
        // The number and its unit stay on one line.
        Some(requirement) if !requirement.bound_text.is_empty() => {
            requirement.bound_text.replace(' ', "\u{a0}")
        }
        _ => figure(result, result.bound, 2),
    }
}

/// Without `require` and without the condition, which has its own place.
fn words(text: &str) -> &str {
    let text = text.trim();
    let text = text.strip_prefix("require").map_or(text, str::trim_start);
    text.split(" under ").next().unwrap_or(text).trim_end()
}

/// A number and its unit stay on one line.
fn unbroken(text: &str) -> String {
    let mut out = String::new();
    let mut after_digit = false;
    for c in text.chars() {
        out.push(if c == ' ' && after_digit { '\u{a0}' } else { c });
        after_digit = c.is_ascii_digit();
    }
    out.replace("<= ", "<=\u{a0}").replace(">= ", ">=\u{a0}").replace("\u{a0}at yield", " at yield")
}

fn row(context: &Context<'_>, result: &RequirementResult) -> VerdictRow {
    let at_yield = stated(context, result).is_some_and(|requirement| requirement.at_yield.is_some());
    let (decimals, difference) = difference(result, true);
    let shown = unbroken(&words(&result.text).split_whitespace().collect::<Vec<_>>().join(" "));
    let under = match (&result.condition, at_yield) {
        (Some(condition), false) => Text::of(format!("under {condition}")),
        (Some(condition), true) => Text::of(format!("under {condition}, nominal device")),
        (None, _) => Text::new(),
    };
    VerdictRow {
        mark: if result.met { "met" } else { "fails" },
        fails: !result.met,
        requirement: Text::code(shown),
        under,
        reached: figure(result, result.value, decimals),
        margin: difference,
    }
}

fn is_fraction(result: &RequirementResult) -> bool {
    result.unit == "1" || result.unit.is_empty() || result.unit == "%"
}

/// A value in the requirement's unit.
fn figure(result: &RequirementResult, value: f64, decimals: usize) -> String {
    if is_fraction(result) {
        let value = if result.unit == "%" { value } else { value * 100.0 };
        return with_unit(&fixed(value, decimals), "%");
    }
    with_unit(&fixed(value, decimals), &unit_words(&result.unit))
}

pub(super) fn unit_words(unit: &str) -> String {
    unit.replace("cm2", "cm²")
        .replace("m2", "m²")
        .replace("cm3", "cm³")
        .replace('u', "µ")
        .replace("degC", "°C")
}

/// Decimals with which value and difference are shown, and the difference in words: as few as
/// usual, as many as it takes for a failure not to read as nothing.
fn difference(result: &RequirementResult, with_sign: bool) -> (usize, String) {
    let fraction = is_fraction(result);
    let amount = if fraction && result.unit != "%" { result.margin * 100.0 } else { result.margin };
    let usual = match result.unit.as_str() {
        "V" | "eV" => 3,
        _ => 2,
    };
    let shows = |decimals: usize| fixed(amount.abs(), decimals).bytes().any(|b| (b'1'..=b'9').contains(&b));
    let decimals = (usual..=7).find(|d| amount == 0.0 || shows(*d)).unwrap_or(7);
    let number = if with_sign { signed(amount, decimals) } else { fixed(amount.abs(), decimals) };
    let number = if with_sign && !result.met && amount == 0.0 {
        format!("{MINUS}{}", fixed(0.0, decimals))
    } else {
        number
    };
    let unit = if fraction { "points".to_string() } else { unit_words(&result.unit) };
    (decimals, with_unit(&number, &unit))
}
