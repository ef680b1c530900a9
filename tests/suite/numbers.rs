//! Expected numbers: `//= top.jsc under noon 14.2 mA/cm2 ± 0.5 % -- source`.
//!
//! The source is mandatory and must be independent of this program; no switch rewrites the line.
//! A line inside a stack speaks of that stack, else of the first of the file. Words are compared
//! as words: `//= limiting_junction top -- source`.

use std::path::Path;

use bandloom::design::Design;
use bandloom::results::{ConditionResult, Results};

use crate::run::Ran;

/// A figure and the unit it stands in, or a word.
enum Figure {
    Number(f64, &'static str),
    Word(String),
}

struct Line<'a> {
    metric: &'a str,
    under: Option<&'a str>,
    value: &'a str,
    unit: &'a str,
    /// Amount and its unit; `%` is relative to the expected value.
    tolerance: Option<(f64, &'a str)>,
}

/// Checks every `//=` line of the file at `path`.
pub(crate) fn hold(ran: &Ran, path: &Path) -> Result<(), String> {
    let Some(source) = ran.sources.by_path(path) else { return Ok(()) };
    let mut offset = 0;
    let mut trouble = Vec::new();
    for (index, line) in source.text.split_inclusive('\n').enumerate() {
        let at = offset;
        offset += line.len();
        let Some(body) = line.trim().strip_prefix("//=") else { continue };
        let home = ran
            .stacks
            .iter()
            .find(|(design, _)| design.span.source == source.id && design.span.range().contains(&at))
            .or(ran.stacks.first());
        let verdict = match home {
            Some((design, results)) => holds(body.trim(), design, results.as_ref()),
            None => Err("there is no stack".to_owned()),
        };
        if let Err(why) = verdict {
            trouble.push(format!("line {}: {why}: {}", index + 1, body.trim()));
        }
    }
    if trouble.is_empty() { Ok(()) } else { Err(trouble.join("\n")) }
}

fn holds(body: &str, design: &Design, results: Option<&Results>) -> Result<(), String> {
    let (left, source) = body.split_once(" -- ").ok_or("no ` -- source`")?;
    if source.trim().len() < 4 {
        return Err("the source is not named".to_owned());
    }
    let line = parse(left)?;
    match find(&line, design, results)? {
        Figure::Word(word) if word == line.value => Ok(()),
        Figure::Word(word) => Err(format!("is `{word}`")),
        Figure::Number(number, unit) => {
            let parsed: f64 = line.value.parse().map_err(|_| format!("`{}` is no number", line.value))?;
            let wanted = converted(parsed, line.unit, unit)?;
            let (amount, amount_unit) = line.tolerance.ok_or("no ` ± tolerance`")?;
            let allowed = match amount_unit {
                "%" => wanted.abs() * amount / 100.0,
                "points" => amount / 100.0,
                other => converted(amount, other, unit)?,
            };
            if (number - wanted).abs() <= allowed {
                return Ok(());
            }
            let by = if wanted == 0.0 {
                String::new()
            } else {
                format!(", {:+.3} %", (number / wanted - 1.0) * 100.0)
            };
            Err(format!("is {number} {unit}{by}"))
        }
    }
}

fn parse(left: &str) -> Result<Line<'_>, String> {
    let (figure, tolerance) = match left.split_once('±') {
        Some((figure, tolerance)) => (figure, Some(tolerance)),
        None => (left, None),
    };
    let mut words = figure.split_whitespace();
    let metric = words.next().ok_or("no metric")?;
    let mut next = words.next().ok_or("no value")?;
    let mut under = None;
    if next == "under" {
        under = Some(words.next().ok_or("no condition after `under`")?);
        next = words.next().ok_or("no value")?;
    }
    let unit = words.next().unwrap_or("1");
    if words.next().is_some() {
        return Err("more words than metric, value and unit".to_owned());
    }
    let tolerance = tolerance
        .map(|text| {
            let mut words = text.split_whitespace();
            let amount = words.next().and_then(|word| word.parse().ok()).ok_or("no tolerance after ±")?;
            Ok::<_, String>((amount, words.next().unwrap_or("1")))
        })
        .transpose()?;
    Ok(Line { metric, under, value: next, unit, tolerance })
}

fn converted(value: f64, from: &str, to: &str) -> Result<f64, String> {
    let factor = match (from, to) {
        (from, to) if from == to => 1.0,
        ("%", "1") => 1e-2,
        ("mV", "V") | ("meV", "eV") | ("um", "mm") => 1e-3,
        ("um" | "µm", "nm") => 1e3,
        ("nm", "Å") => 10.0,
        ("A/m2", "mA/cm2") => 0.1,
        ("A/cm2", "mA/cm2") => 1e3,
        ("mA/cm2", "A/cm2") => 1e-3,
        ("A/m2", "A/cm2") => 1e-4,
        ("mW/cm2", "W/m2") => 10.0,
        ("W/cm2", "W/m2") => 1e4,
        _ => return Err(format!("the figure stands in {to}, not in {from}")),
    };
    Ok(value * factor)
}

fn find(line: &Line<'_>, design: &Design, results: Option<&Results>) -> Result<Figure, String> {
    if let Some(figure) = of_layer(line.metric, design) {
        return Ok(figure);
    }
    let results = results.ok_or("the stack was not evaluated")?;
    let condition = match line.under {
        Some(name) => results.conditions.iter().find(|condition| condition.name == name),
        None => results.conditions.first(),
    };
    let condition = condition.ok_or_else(|| format!("no condition `{}`", line.under.unwrap_or_default()))?;
    of_results(line.metric, results, condition).ok_or_else(|| format!("no metric `{}`", line.metric))
}

/// Figures known before evaluation, at 25 °C: `top.base.gap`, `top.base.lattice_constant`,
/// `top.base.thickness`, `top.base.composition.In`, `top.base.gap_kind`, `top.base.material`.
fn of_layer(metric: &str, design: &Design) -> Option<Figure> {
    const ROOM_K: f64 = 298.15;
    let number = |value: f64, unit| Some(Figure::Number(value, unit));
    let (path, what) = metric.rsplit_once('.')?;
    if let Some(path) = path.strip_suffix(".composition") {
        let material = design.layer(path)?.material.as_ref()?;
        return material.composition.iter().find(|(e, _)| e == what).and_then(|(_, x)| number(*x, "1"));
    }
    let layer = design.layer(path)?;
    let material = layer.material.as_ref()?;
    match what {
        "gap" => number(material.gap(ROOM_K)?.ev, "eV"),
        "gap_kind" => Some(Figure::Word(material.gap(ROOM_K)?.kind.word().replace(' ', "_"))),
        "material" => Some(Figure::Word(material.label.clone())),
        "lattice_constant" => number(material.lattice_constant(ROOM_K)?, "Å"),
        "thickness" => number(layer.thickness_m? * 1e9, "nm"),
        _ => None,
    }
}

fn of_results(metric: &str, results: &Results, condition: &ConditionResult) -> Option<Figure> {
    let number = |value: f64, unit| Some(Figure::Number(value, unit));
    if let Some(line) = metric.strip_prefix("ledger.") {
        let matching = condition.ledger_w_per_m2.iter().filter(|entry| {
            let name = match &entry.junction {
                Some(junction) => format!("{}.{junction}", entry.line),
                None => entry.line.clone(),
            };
            name == line || entry.line == line
        });
        let values: Vec<f64> = matching.map(|entry| entry.value).collect();
        return (!values.is_empty()).then(|| Figure::Number(values.iter().sum(), "W/m2"));
    }
    let whole = match metric {
        "efficiency" => Some((condition.efficiency, "1")),
        "power" => Some((condition.power_w_per_m2, "W/m2")),
        "incident" => Some((condition.incident_w_per_m2, "W/m2")),
        "reflected_current" => Some((condition.reflected_ma_per_cm2, "mA/cm2")),
        "voc" => condition.voc_v.map(|value| (value, "V")),
        "jsc" => condition.jsc_ma_per_cm2.map(|value| (value, "mA/cm2")),
        "fill_factor" => condition.fill_factor.map(|value| (value, "1")),
        "vmp" => condition.vmp_v.map(|value| (value, "V")),
        "jmp" => condition.jmp_ma_per_cm2.map(|value| (value, "mA/cm2")),
        "current_mismatch" => condition.current_mismatch.map(|value| (value, "1")),
        "limiting_junction" => return condition.limiting_junction.clone().map(Figure::Word),
        _ => None,
    };
    if let Some((value, unit)) = whole {
        return number(value, unit);
    }
    let (name, what) = metric.rsplit_once('.')?;
    if let Some(junction) = condition.junctions.iter().find(|junction| junction.name == name) {
        return match what {
            "gap" => number(junction.gap_ev, "eV"),
            "photocurrent" => number(junction.photocurrent_ma_per_cm2, "mA/cm2"),
            "jsc" => number(junction.jsc_ma_per_cm2, "mA/cm2"),
            "voc" => number(junction.voc_v, "V"),
            "fill_factor" => number(junction.fill_factor, "1"),
            "power" => number(junction.power_w_per_m2, "W/m2"),
            "voltage_at_mpp" => number(junction.voltage_at_mpp_v, "V"),
            "dark_current_radiative" => number(junction.dark_current_radiative_a_per_cm2, "A/cm2"),
            _ => None,
        };
    }
    if let Some(layer) = results.layers.iter().find(|layer| layer.name == name) {
        let light = condition.layers.iter().find(|layer| layer.name == name);
        return match what {
            "mismatch" => number(layer.mismatch?, "1"),
            "strain" => number(layer.strain?, "1"),
            "absorbed" => number(light?.absorbed_ma_per_cm2, "mA/cm2"),
            "collected" => number(light?.collected_ma_per_cm2, "mA/cm2"),
            _ => None,
        };
    }
    None
}
