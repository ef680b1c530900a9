//! What a search found.

use serde::Serialize;

use crate::cli::materials::{Setting, mismatch, table};
use crate::materials::optics::Optics;
use crate::materials::{GapKind, Material, OriginKind, SharedMaterial};
use crate::resolve::materials::{End, Fit, Search, Wish};

/// A material as if it had been searched for; `None` without a gap.
pub(super) fn fit(material: SharedMaterial, setting: &Setting) -> Option<Fit> {
    let gap = material.gap(setting.temperature_k)?;
    let mismatch = mismatch(&material, setting.wafer.as_deref(), setting.temperature_k);
    Some(Fit { material, gap, mismatch, end: None })
}

/// The weakest origin of a quantity: the last in the order measured, published, joined, model,
/// estimate, from memory.
fn weakest(material: &Material, what: &str) -> Option<OriginKind> {
    material.origins.iter().filter(|origin| origin.what == what).map(|origin| origin.kind).max()
}

/// As [`OriginKind::word`], without the preposition that a heading makes needless.
fn word(kind: Option<OriginKind>) -> &'static str {
    match kind {
        None => "stated",
        Some(OriginKind::Memory) => "memory",
        Some(kind) => kind.word(),
    }
}

fn index_word(material: &Material) -> &'static str {
    match material.optics {
        Optics::None | Optics::Ideal(_) => "none",
        _ => word(weakest(material, "index")),
    }
}

fn transport_word(material: &Material) -> &'static str {
    if material.carriers.mobility.is_empty() {
        return "none";
    }
    word(weakest(material, "mobility"))
}

/// `1.7 to 1.9 eV at 300 K on GaAs within 0.1 %`
fn wished(wish: &Wish<'_>) -> String {
    let (low, high) = wish.gap_ev;
    let on = wish.wafer.map_or_else(String::new, |wafer| {
        format!(" on {} within {} %", wafer.label, table::short(wish.mismatch * 100.0, 3))
    });
    format!("{low} to {high} eV at {} K{on}", table::short(wish.temperature_k, 5))
}

/// Label of a row: the ends of a range say which they are.
fn label(fit: &Fit) -> String {
    match fit.end {
        None => fit.material.label.clone(),
        Some(End::From) => format!("from {}", fit.material.label),
        Some(End::To) => format!("  to {}", fit.material.label),
    }
}

fn edge(kind: GapKind) -> &'static str {
    match kind {
        GapKind::Direct => "direct",
        GapKind::IndirectX => "at X",
        GapKind::IndirectL => "at L",
    }
}

/// The rows, numbered, and what was not looked at.
pub(super) fn table(found: &Search, wish: &Wish<'_>, width: usize) -> String {
    let first = found.fits.iter().map(|fit| label(fit).chars().count()).max().unwrap_or(0).max(8);
    // Without a wafer there is no mismatch to show.
    let off = |text: &str| wish.wafer.map_or_else(String::new, |_| format!("{text:>6}  "));
    let line = |number: &str, label: &str, gap: &str, edge: &str, off: &str, data: [&str; 2]| {
        let [index, mobility] = data;
        let row = format!("{number:>2} {label:first$}  {gap:>5}  {edge:6} {off}{index:8} {mobility}");
        row.trim_end().to_owned() + "\n"
    };
    let mut text = format!("{}\n\n", wished(wish));
    text.push_str(&line("", "material", "eV", "gap", &off("off, %"), ["n,k", "mobility"]));
    for (fit, number) in found.fits.iter().zip(1..) {
        let mismatch = fit.mismatch.map_or_else(String::new, |mismatch| percent(mismatch, 3));
        let data = [index_word(&fit.material), transport_word(&fit.material)];
        let gap = format!("{:.3}", fit.gap.ev);
        text.push_str(&line(
            &number.to_string(),
            &label(fit),
            &gap,
            edge(fit.gap.kind),
            &off(&mismatch),
            data,
        ));
    }
    let mut notes = Vec::new();
    if !found.left_out.is_empty() {
        let way = if wish.wafer.is_none() { "name a wafer with `--on`" } else { "name their fractions" };
        notes.push(format!("Not searched, too many open fractions ({way}): {}.", found.left_out.join(", ")));
    }
    if wish.wafer.is_some() {
        notes.push("Materials without a lattice constant, such as films, are left out.".to_owned());
    }
    for note in notes {
        text.push('\n');
        text.push_str(&table::hanging("", &note, 0, width));
    }
    text
}

/// Signed, in percent; a zero has no sign.
fn percent(share: f64, decimals: usize) -> String {
    let text = format!("{:+.decimals$}", share * 100.0);
    if text.contains(|c: char| ('1'..='9').contains(&c)) { text } else { text[1..].to_owned() }
}

/// That nothing has it.
pub(super) fn nothing(wish: &Wish<'_>) -> String {
    format!("nothing in the library has {}", wished(wish))
}

/// What comes nearest, one way out each.
pub(super) fn nearest(found: &Search, wish: &Wish<'_>) -> Vec<String> {
    let mut lines: Vec<String> = found
        .nearest
        .iter()
        .map(|fit| {
            let off = fit.mismatch.map_or_else(String::new, |mismatch| {
                format!(
                    ", {:+.3} % from {}",
                    mismatch * 100.0,
                    wish.wafer.map_or("it", |it| it.label.as_str())
                )
            });
            format!(
                "the nearest is `{}`: {:.3} eV, {}{off}",
                fit.material.label,
                fit.gap.ev,
                fit.gap.kind.word()
            )
        })
        .collect();
    if lines.is_empty() {
        lines.push("widen the range, or leave `--on` out".to_owned());
    }
    lines.dedup();
    lines
}

#[derive(Serialize)]
struct Row<'a> {
    name: &'a str,
    label: &'a str,
    gap_ev: f64,
    gap_kind: &'static str,
    /// Relaxed, as a share.
    mismatch: Option<f64>,
    index: &'static str,
    mobility: &'static str,
    /// `from` and `to` where a family covers a range.
    end: Option<&'static str>,
}

fn row(fit: &Fit) -> Row<'_> {
    Row {
        name: &fit.material.name,
        label: &fit.material.label,
        gap_ev: fit.gap.ev,
        gap_kind: fit.gap.kind.word(),
        mismatch: fit.mismatch,
        index: index_word(&fit.material),
        mobility: transport_word(&fit.material),
        end: fit.end.map(|end| if end == End::From { "from" } else { "to" }),
    }
}

/// The search for programs.
pub(super) fn json(found: &Search, wish: &Wish<'_>) -> String {
    let rows = |fits: &[Fit]| table::value(&fits.iter().map(row).collect::<Vec<_>>());
    table::document(serde_json::json!({
        "temperature_k": wish.temperature_k,
        "gap_ev": [wish.gap_ev.0, wish.gap_ev.1],
        "wafer": wish.wafer.map(|wafer| wafer.label.clone()),
        "mismatch": wish.mismatch,
        "found": rows(&found.fits),
        "nearest": rows(&found.nearest),
        "left_out": found.left_out,
    }))
}
