//! The whole library, by what it is looked for.

use serde::Serialize;

use crate::cli::materials::table;
use crate::resolve::materials::{Entry, Group};

/// A heading for each group, then a line for each material.
pub(super) fn table(entries: &[Entry]) -> String {
    let width = entries.iter().map(|entry| entry.name.chars().count()).max().unwrap_or(0);
    let mut sorted: Vec<&Entry> = entries.iter().collect();
    sorted.sort_by_key(|entry| entry.group);
    let mut text = format!("{:width$}  {:<13}  {:3}  {:1}  what\n", "name", "eV at 300 K", "n,k", "µ");
    let mut group: Option<Group> = None;
    for entry in sorted {
        if group != Some(entry.group) {
            group = Some(entry.group);
            text.push_str(&format!("\n{}\n", entry.group.heading()));
        }
        text.push_str(&row(entry, width));
    }
    text.push_str(
        "\nn,k: has an index; µ: has mobilities. Details: `bandloom materials NAME`;\nsearch: `bandloom materials --over gap 1.7..1.9 --on GaAs`.\n",
    );
    text
}

fn row(entry: &Entry, width: usize) -> String {
    let gap = match entry.gap_ev {
        Some((low, high)) if entry.is_family && high > low => format!("{low:.2} to {high:.2}"),
        Some((low, _)) => format!("{low:.3}"),
        None => String::new(),
    };
    let index = if entry.has_index { "yes" } else { "" };
    let transport = if entry.has_transport { "µ" } else { "" };
    let line = format!("{:width$}  {gap:<13}  {index:3}  {transport:1}  ", entry.name);
    table::hanging(&line, &entry.about, width + 26, 80)
}

/// One material of the list.
#[derive(Serialize)]
struct Line<'a> {
    name: &'a str,
    group: Group,
    about: &'a str,
    is_family: bool,
    /// Smallest and largest; equal for a compound.
    gap_ev: Option<[f64; 2]>,
    has_index: bool,
    has_transport: bool,
}

/// The list for programs, gaps at 300 K.
pub(super) fn json(entries: &[Entry]) -> String {
    let lines: Vec<Line<'_>> = entries
        .iter()
        .map(|entry| Line {
            name: &entry.name,
            group: entry.group,
            about: &entry.about,
            is_family: entry.is_family,
            gap_ev: entry.gap_ev.map(|(low, high)| [low, high]),
            has_index: entry.has_index,
            has_transport: entry.has_transport,
        })
        .collect();
    table::document(serde_json::json!({ "temperature_k": 300.0, "library": table::value(&lines) }))
}
