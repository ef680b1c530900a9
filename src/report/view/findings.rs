//! What was found, and what the file accepts with its reason.

use serde::Serialize;

use crate::report::FindingRow;
use crate::report::context::Context;
use crate::report::text::Text;
use crate::report::view::Table;

/// The section of findings.
#[derive(Clone, Debug, Serialize)]
pub struct FindingsView {
    /// How many of what, in words.
    pub lede: Text,
    /// Errors first.
    pub rows: Vec<FindingLine>,
    /// What the file accepts; no rows where it accepts nothing.
    pub accepted: Table,
    /// Whether something is accepted.
    pub has_accepted: bool,
}

/// One finding.
#[derive(Clone, Debug, Serialize)]
pub struct FindingLine {
    /// `error`, `warning`, `advice`
    pub severity: String,
    /// Whether it fails the check.
    pub fails: bool,
    /// What is wrong.
    pub message: Text,
    /// `gap.order`
    pub code: String,
    /// ` at sandpiper.stack:53:14`; empty without a place.
    pub place: Text,
    /// Ways out.
    pub helps: Vec<Text>,
}

/// Builds it; errors first, else in the order given.
pub fn findings(context: &Context<'_>) -> FindingsView {
    let mut order: Vec<&FindingRow> = context.input.findings.iter().collect();
    let weight = |row: &FindingRow| match row.severity.as_str() {
        "error" => 0,
        "warning" => 1,
        _ => 2,
    };
    order.sort_by_key(|row| weight(row));
    let rows = order.iter().map(|row| line(row)).collect();
    let counts =
        ["error", "warning", "advice"].map(|word| order.iter().filter(|row| row.severity == word).count());
    let (accepted, has_accepted) = accepted(context);
    FindingsView { lede: lede(counts), rows, accepted, has_accepted }
}

fn lede([errors, warnings, advice]: [usize; 3]) -> Text {
    let mut parts = Vec::new();
    if errors > 0 {
        parts.push(crate::report::number::counted(errors, "error"));
    }
    if warnings > 0 {
        parts.push(crate::report::number::counted(warnings, "warning"));
    }
    if advice > 0 {
        parts.push(format!("{} of advice", crate::report::number::counted(advice, "piece")));
    }
    match parts.len() {
        0 => Text::of("No rule has anything to say."),
        1 => Text::of(format!("{}.", capital(&parts[0]))),
        _ => {
            let last = parts.pop().unwrap_or_default();
            Text::of(format!("{} and {last}.", capital(&parts.join(", "))))
        }
    }
}

fn capital(words: &str) -> String {
    let mut chars = words.chars();
    chars.next().map(|first| first.to_uppercase().chain(chars).collect()).unwrap_or_default()
}

fn line(row: &FindingRow) -> FindingLine {
    FindingLine {
        severity: row.severity.clone(),
        fails: row.severity == "error",
        message: Text::message(&row.message),
        code: row.code.clone(),
        place: place(row),
        helps: row.help.iter().map(|help| Text::message(help)).collect(),
    }
}

fn place(row: &FindingRow) -> Text {
    let Some(file) = &row.file else { return Text::new() };
    match (row.line, row.column) {
        (Some(line), Some(column)) => Text::of(format!("at {file}:{line}:{column}")),
        (Some(line), None) => Text::of(format!("at {file}:{line}")),
        _ => Text::of(format!("in {file}")),
    }
}

/// What was silenced comes with its message; an `accept` that silenced nothing known still shows
/// its reason.
fn accepted(context: &Context<'_>) -> (Table, bool) {
    let mut table = Table::new(
        Text::of("Accepted in the file, with the reason given there"),
        &["finding", "where", "what it reports", "reason"],
    );
    table.kind = "roomy";
    let quoted = |reason: &str| {
        if reason.is_empty() { Text::of("none given") } else { Text::of(format!("“{reason}”")) }
    };
    for row in context.input.accepted {
        let finding = &row.finding;
        table.row(vec![
            Text::code(finding.code.clone()),
            place(finding),
            Text::message(&finding.message),
            quoted(&row.reason),
        ]);
    }
    for accept in &context.design.accepts {
        let code = &accept.code.value;
        if context.input.accepted.iter().any(|row| row.finding.code == *code) {
            continue;
        }
        let on =
            accept.on.as_ref().map_or_else(|| Text::of("whole stack"), |on| Text::code(on.value.clone()));
        let reason = accept.because.as_ref().map_or("", |because| because.value.as_str());
        table.row(vec![Text::code(code.clone()), on, Text::of("–"), quoted(reason)]);
    }
    let has_rows = table.groups.iter().any(|group| !group.rows.is_empty());
    (table, has_rows)
}
