//! `bandloom materials`: what the library holds.

use clap::Args;

use crate::cli::Exit;
use crate::cli::console::{Console, Stream};
use crate::materials::{Material, Origin, OriginKind, ROOM_TEMPERATURE_K};
use crate::resolve::materials::{Entry, entries, look_up, with_gap};

mod family;

const EXAMPLES: &str = "\
Examples:
  bandloom materials                           the whole library, a line each
  bandloom materials GaAs Ga0.51In0.49P        gap, lattice, index, sources
  bandloom materials GaInP                     what a family reaches
  bandloom materials \"AlGaInP matched of gap 2.1 eV\" --on GaAs
  bandloom materials --gap 1.7..1.9 --on GaAs  what has that gap and fits";

/// Show what the material library holds
#[derive(Args, Clone, Debug)]
#[command(before_help = EXAMPLES, help_template = super::TEMPLATE)]
pub(crate) struct Materials {
    /// Materials as they would stand in a layer; nothing for the whole list
    #[arg(value_name = "MATERIAL")]
    phrases: Vec<String>,
    /// The wafer: what `matched` is to, and what a mismatch is against
    #[arg(long, value_name = "MATERIAL")]
    on: Option<String>,
    /// Only what has a gap in this range, eV at 300 K
    #[arg(long, value_name = "LOW..HIGH", value_parser = range, conflicts_with = "phrases")]
    gap: Option<(f64, f64)>,
    /// The wavelength of the index shown, nm
    #[arg(long, value_name = "NM", default_value_t = 589.3, value_parser = wavelength)]
    at: f64,
}

fn range(text: &str) -> Result<(f64, f64), String> {
    let wanted = || "write LOW..HIGH in eV, as in `1.7..1.9`".to_owned();
    let (low, high) = text.trim().trim_end_matches("eV").split_once("..").ok_or_else(wanted)?;
    let (low, high) = (low.trim().parse::<f64>(), high.trim().parse::<f64>());
    match (low, high) {
        (Ok(low), Ok(high)) if low >= 0.0 && low <= high && high.is_finite() => Ok((low, high)),
        _ => Err(wanted()),
    }
}

fn wavelength(text: &str) -> Result<f64, String> {
    match text.trim().trim_end_matches("nm").trim().parse::<f64>() {
        Ok(nm) if nm.is_finite() && nm > 0.0 => Ok(nm),
        _ => Err("write a wavelength in nm above zero, as in `650`".to_owned()),
    }
}

/// Runs the command: the list or the sheets on standard output.
pub(crate) fn run(command: &Materials, console: &Console) -> Exit {
    let wafer = match command.on.as_deref().map(|phrase| (phrase, found(phrase, None, console))) {
        Some((_, None)) => return Exit::Trouble,
        Some((phrase, Some(wafer))) => Some((phrase, wafer)),
        None => None,
    };
    let on = wafer.as_ref().map(|(_, wafer)| wafer);
    if let Some((low, high)) = command.gap {
        let fits = with_gap((low + high) / 2.0, (high - low) / 2.0, on);
        return match fits.as_slice() {
            [] => console
                .trouble("nothing in the library has such a gap", &["widen `--gap`, or leave `--on` out"]),
            fits => console.result(&fits.iter().map(|material| line(material, on)).collect::<String>()),
        };
    }
    if command.phrases.is_empty() {
        return console.result(&list(&entries()));
    }
    let mut exit = Exit::Fine;
    let mut text = String::new();
    for phrase in &command.phrases {
        let width = console.look(Stream::Out).width;
        let shown = match crate::resolve::materials::family(phrase) {
            Some(family) => Some(family::sheet(&family, on, width)),
            None => found(phrase, command.on.as_deref(), console)
                .map(|material| sheet(&material, on, command.at, width)),
        };
        let Some(shown) = shown else {
            exit = Exit::Trouble;
            continue;
        };
        if !text.is_empty() {
            text.push('\n');
        }
        text.push_str(&shown);
    }
    exit.max(console.result(&text))
}

/// The material of a phrase; what is wrong with it is told.
fn found(phrase: &str, on: Option<&str>, console: &Console) -> Option<Material> {
    let (outcome, _) = look_up(phrase, on);
    for finding in outcome.findings.iter() {
        let helps: Vec<&str> = finding.helps.iter().map(String::as_str).collect();
        console.trouble(&finding.message, &helps);
    }
    if outcome.value.is_none() && outcome.findings.is_empty() {
        console.trouble(&format!("`{phrase}` is no material"), &["`bandloom materials` lists the library"]);
    }
    outcome.value.filter(|_| !outcome.findings.has_errors()).map(|material| (*material).clone())
}

fn list(entries: &[Entry]) -> String {
    let width = entries.iter().map(|entry| entry.name.chars().count()).max().unwrap_or(0);
    let row = |entry: &Entry| {
        let gap = match entry.gap_ev {
            Some((low, high)) if entry.is_family && high > low => format!("{low:.2} to {high:.2} eV"),
            Some((low, _)) => format!("{low:.3} eV"),
            None => String::new(),
        };
        let index = if entry.has_index { "n,k" } else { "" };
        format!("{:width$}  {gap:<15}  {index:3}  {}", entry.name, entry.about).trim_end().to_owned() + "\n"
    };
    let head = format!("{:width$}  {:<15}  {:3}  what\n", "name", "gap at 300 K", "");
    head + &entries.iter().map(row).collect::<String>()
}

fn mismatch(material: &Material, on: Option<&Material>) -> Option<f64> {
    let own = material.lattice_constant(ROOM_TEMPERATURE_K)?;
    Some(own / on?.lattice_constant(ROOM_TEMPERATURE_K)? - 1.0)
}

/// One line: label, gap, lattice constant, mismatch.
fn line(material: &Material, on: Option<&Material>) -> String {
    let mut cells = vec![format!("{:<28}", material.label)];
    if let Some(gap) = material.gap(ROOM_TEMPERATURE_K) {
        cells.push(format!("{:.3} eV {:<12}", gap.ev, gap.kind.word()));
    }
    if let Some(a) = material.lattice_constant(ROOM_TEMPERATURE_K) {
        cells.push(format!("{a:.4} Å"));
    }
    if let Some(mismatch) = mismatch(material, on) {
        cells.push(format!("{:+.3} %", mismatch * 100.0));
    }
    cells.join("  ").trim_end().to_owned() + "\n"
}

/// Everything known of one material, a line each.
fn sheet(material: &Material, on: Option<&Material>, at_nm: f64, width: usize) -> String {
    let mut rows: Vec<(&str, String)> = Vec::new();
    if let Some(gap) = material.gap(ROOM_TEMPERATURE_K) {
        rows.push(("gap", format!("{:.4} eV at 300 K, {}", gap.ev, gap.kind.word())));
    }
    if let Some(bands) = &material.bands {
        let valleys = [("Γ", &bands.gamma), ("X", &bands.x), ("L", &bands.l)];
        let known: Vec<String> = valleys
            .into_iter()
            .filter_map(|(name, valley)| {
                Some(format!("{name} {:.3} eV", valley.as_ref()?.at(ROOM_TEMPERATURE_K)))
            })
            .collect();
        if known.len() > 1 {
            rows.push(("valleys", known.join(", ")));
        }
    }
    if let Some(a) = material.lattice_constant(ROOM_TEMPERATURE_K) {
        rows.push(("lattice", format!("{a:.5} Å at 300 K")));
    }
    if let (Some(mismatch), Some(on)) = (mismatch(material, on), on) {
        rows.push(("mismatch", format!("{:+.4} % on {}", mismatch * 100.0, on.label)));
    }
    rows.push((
        "index",
        match material.index(at_nm * 1e-9, ROOM_TEMPERATURE_K) {
            Some((n, k)) => format!("n = {n:.4}, k = {k:.3e} at {at_nm} nm"),
            None => format!("no data at {at_nm} nm"),
        },
    ));
    if let Some(density) = material.density_g_per_cm3 {
        rows.push(("density", format!("{density:.3} g/cm3")));
    }
    if !material.cautions.is_empty() {
        rows.push(("caution", material.cautions.join(", ")));
    }
    written(&material.label, &rows, &material.origins, width)
}

/// A heading, rows of two columns, and the sources.
fn written(label: &str, rows: &[(&str, String)], origins: &[Origin], width: usize) -> String {
    let mut text = format!("{label}\n");
    for (what, value) in rows {
        text.push_str(&format!("  {what:<10}{value}\n"));
    }
    // What comes from one publication stands in one entry.
    let mut cited: Vec<(String, Vec<&str>)> = Vec::new();
    for origin in origins {
        let kind = match origin.kind {
            OriginKind::Published => String::new(),
            kind => format!(" [{}]", kind.word()),
        };
        let cite = format!("{}{kind}", origin.cite);
        match cited.iter_mut().find(|(known, _)| *known == cite) {
            Some((_, what)) if what.contains(&origin.what.as_str()) => {}
            Some((_, what)) => what.push(&origin.what),
            None => cited.push((cite, vec![&origin.what])),
        }
    }
    if !cited.is_empty() {
        text.push_str("  sources\n");
    }
    for (cite, what) in cited {
        text.push_str(&hanging(&format!("{}: {cite}", what.join(", ").replace('_', " ")), width));
    }
    text
}

/// An entry indented by four, its further lines by six, broken at spaces.
fn hanging(text: &str, width: usize) -> String {
    let mut out = String::from("   ");
    let mut used = 3;
    for word in text.split_whitespace() {
        let length = word.chars().count();
        if used + 1 + length > width && used > 6 {
            out.push_str("\n     ");
            used = 5;
        }
        out.push(' ');
        out.push_str(word);
        used += 1 + length;
    }
    out.push('\n');
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranges_and_wavelengths_are_numbers_in_their_unit() {
        assert_eq!(range("1.7..1.9"), Ok((1.7, 1.9)));
        assert_eq!(range("1.7 .. 1.9 eV"), Ok((1.7, 1.9)));
        for bad in ["1.7", "1.9..1.7", "a..b", "-1..2", "1..inf", ""] {
            assert!(range(bad).is_err(), "{bad}");
        }
        assert_eq!(wavelength("650 nm"), Ok(650.0));
        assert!(wavelength("0").is_err() && wavelength("NaN").is_err());
    }
}
