//! What was built, in a few lines for each stack, within 80 columns.

use crate::cli::build::{Built, file_in};
use crate::compile::Stack;
use crate::finding::Severity;
use crate::finding::render::Look;
use crate::results::{ConditionResult, Results};

/// The stack's verdict, its headline figures by condition, and where its files are.
pub(crate) fn summary(stack: &Stack, results: &Results, built: &Built, look: Look) -> String {
    let mut lines = vec![format!("{}: {}", visible_name(stack), verdict(stack, results))];
    lines.extend(requirements(results, look));
    lines.extend(figures(results));
    let first = built.files.first().map(|file| file_in(built, &file.name)).unwrap_or_default();
    let more = match built.files.len() {
        0 | 1 => String::new(),
        2 => " and 1 more file".to_owned(),
        count => format!(" and {} more files", count - 1),
    };
    if built.is_written {
        lines.push(format!("  {first}{more}"));
    }
    lines.into_iter().map(|line| line + "\n").collect()
}

/// A stack that stands in a file but has no figures.
pub(crate) fn unbuilt(stack: &Stack) -> String {
    format!("{}: not built\n", visible_name(stack))
}

fn visible_name(stack: &Stack) -> String {
    stack.design.name.value.chars().map(|c| if c.is_control() { '\u{fffd}' } else { c }).collect()
}

fn verdict(stack: &Stack, results: &Results) -> String {
    let met = results.requirements.iter().filter(|requirement| requirement.met).count();
    let requirements = match results.requirements.len() {
        0 => "built".to_owned(),
        1 if met == 1 => "the requirement is met".to_owned(),
        1 => "the requirement fails".to_owned(),
        2 if met == 2 => "both requirements are met".to_owned(),
        all if met == all => format!("all {all} requirements are met"),
        all if all - met == 1 => format!("1 of {all} requirements fails"),
        all => format!("{} of {all} requirements fail", all - met),
    };
    let count = |severity| stack.findings.count(severity);
    let mut parts = vec![requirements];
    // A failed requirement is an error too and has been counted.
    let failed = stack.findings.iter().filter(|finding| finding.code == "require.failed").count();
    for (number, word) in
        [(count(Severity::Error).saturating_sub(failed), "error"), (count(Severity::Warning), "warning")]
    {
        match number {
            0 => {}
            1 => parts.push(format!("1 {word}")),
            number => parts.push(format!("{number} {word}s")),
        }
    }
    parts.join(", ")
}

fn requirements(results: &Results, look: Look) -> Vec<String> {
    let failed = results.requirements.iter().filter(|requirement| !requirement.met);
    let (on, off) = if look.color { ("\u{1b}[31m", "\u{1b}[0m") } else { ("", "") };
    failed
        .map(|requirement| {
            let under = match &requirement.condition {
                Some(condition) if !requirement.text.contains(" under ") => format!(" under {condition}"),
                _ => String::new(),
            };
            let (value, unit) = if requirement.unit == "1" {
                (requirement.value * 100.0, "%")
            } else {
                (requirement.value, requirement.unit.as_str())
            };
            let text = requirement.text.split_whitespace().collect::<Vec<_>>().join(" ");
            format!("  {on}fails:{off} {text}{under}: it is {} {unit}", significant(value))
        })
        .collect()
}

/// One line for each condition, in columns.
fn figures(results: &Results) -> Vec<String> {
    let rows: Vec<Vec<String>> = results.conditions.iter().map(row).collect();
    let columns = rows.iter().map(Vec::len).max().unwrap_or(0);
    let widths: Vec<usize> = (0..columns)
        .map(|column| {
            rows.iter().filter_map(|row| row.get(column)).map(|cell| cell.chars().count()).max().unwrap_or(0)
        })
        .collect();
    rows.iter()
        .map(|row| {
            let mut line = String::from(" ");
            for (index, (cell, &width)) in row.iter().zip(&widths).enumerate() {
                let space = " ".repeat(width - cell.chars().count());
                // Words to the left, numbers to the right.
                let worded = index == 0 || index + 1 == row.len();
                line.push(' ');
                line.push_str(&if worded { format!("{cell}{space}") } else { format!("{space}{cell}") });
                line.push(' ');
            }
            line.trim_end().to_owned()
        })
        .collect()
}

fn row(condition: &ConditionResult) -> Vec<String> {
    let mut cells = vec![condition.name.clone(), format!("{:.2} %", condition.efficiency * 100.0)];
    if let (Some(voc), Some(jsc), Some(fill)) =
        (condition.voc_v, condition.jsc_ma_per_cm2, condition.fill_factor)
    {
        cells.push(format!("{voc:.3} V"));
        cells.push(format!("{} mA/cm2", significant(jsc)));
        cells.push(format!("FF {:.1} %", fill * 100.0));
    } else {
        cells.push(format!("{} W/m2", significant(condition.power_w_per_m2)));
    }
    if let Some(limiting) = &condition.limiting_junction {
        cells.push(format!("limited by {limiting}"));
    } else {
        cells.push(String::new());
    }
    cells
}

/// Four digits that count, without an exponent where it reads without.
fn significant(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return format!("{value}");
    }
    let digits = 3 - value.abs().log10().floor() as i32;
    if (-2..=8).contains(&digits) {
        format!("{value:.*}", digits.max(0) as usize)
    } else {
        format!("{value:.3e}")
    }
}

#[cfg(test)]
mod tests {
    use super::significant;

    #[test]
    fn four_digits_count() {
        for (value, text) in [
            (0.0, "0"),
            (13.8267, "13.83"),
            (1366.1, "1366"),
            (289.04, "289.0"),
            (123_456.0, "123456"),
            (-0.01234, "-0.01234"),
            (9.99999, "10.000"),
            (1e-12, "1.000e-12"),
        ] {
            assert_eq!(significant(value), text);
        }
    }
}
