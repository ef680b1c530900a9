//! Measurements laid over the prediction, with what they differ by.

use crate::report::context::Context;
use crate::report::figure::Figure;
use crate::report::figure::measured::{Overlay, draw};
use crate::report::number::{current, fixed, signed, significant, with_unit};
use crate::report::text::{Text, visible};
use crate::report::view::layers::{capital, joined};
use crate::report::view::{Section, Table};
use crate::results::{ConditionResult, MeasuredResult};

/// Rows of one measurement's table at most.
const ROWS: usize = 41;

/// The section; empty where nothing was measured.
pub fn measured(context: &Context<'_>) -> Section {
    let mut section = Section::new("measured", "Measured against predicted");
    let all: Vec<&MeasuredResult> = context
        .results
        .measured
        .iter()
        .filter(|it| it.at.len() > 1 && it.at.len() == it.measured.len())
        .collect();
    if all.is_empty() {
        return section;
    }
    let told: Vec<String> = all.iter().take(3).map(|it| sentence(it)).collect();
    section.lede = Some(Text::of(format!("{}.", capital(&joined(&told)))));
    for (index, it) in all.iter().enumerate() {
        section.beside.figures.push(figure(context, it, index + 1));
    }
    section.tables.push(table(&all));
    section.notes.push(Text::of(
        "Dots are measured, lines predicted; stems beneath show what they differ by, at each point.",
    ));
    if all.iter().any(|it| it.spectral_mismatch_factor.is_some()) {
        section.notes.push(Text::of(
            "Spectral mismatch factor in the form of IEC 60904-7, of the condition’s light against AM1.5G.",
        ));
    }
    section
}

fn is_eqe(it: &MeasuredResult) -> bool {
    it.kind == "eqe"
}

fn of(it: &MeasuredResult) -> String {
    it.junction.as_deref().map_or_else(|| "the stack".into(), visible)
}

/// `the measured quantum efficiency of top lies 1.2 points below the predicted one on average`
fn sentence(it: &MeasuredResult) -> String {
    let side = if it.bias < 0.0 { "below" } else { "above" };
    let (what, amount) = if is_eqe(it) {
        ("quantum efficiency", with_unit(&fixed(it.bias.abs() * 100.0, 2), "points"))
    } else {
        ("current", current(it.bias.abs()))
    };
    format!("the measured {what} of {} lies {amount} {side} the predicted one on average", of(it))
}

fn figure(context: &Context<'_>, it: &MeasuredResult, number: usize) -> Figure {
    let condition = context.results.conditions.iter().find(|condition| condition.name == it.condition);
    let scale = if is_eqe(it) { 100.0 } else { 1.0 };
    let mut points: Vec<(f64, f64, f64)> = it
        .at
        .iter()
        .zip(it.measured.iter().zip(&it.predicted))
        .map(|(at, (measured, predicted))| (*at, measured * scale, predicted * scale))
        .collect();
    points.sort_by(|a, b| a.0.total_cmp(&b.0));
    let ends = (points.first().map_or(0.0, |p| p.0), points.last().map_or(0.0, |p| p.0));
    let curve = condition
        .and_then(|condition| curve(condition, it))
        .unwrap_or_default()
        .into_iter()
        .filter(|p| (ends.0..=ends.1).contains(&p.0))
        .map(|p| (p.0, p.1 * scale))
        .collect();
    let overlay = Overlay {
        value: if is_eqe(it) { "quantum efficiency, %" } else { "current, mA/cm²" },
        at: if is_eqe(it) { "wavelength, nm" } else { "voltage, V" },
        points,
        curve,
        junction: it.junction.as_deref().map(|name| context.junction_index(name)),
    };
    let what = if is_eqe(it) { "Quantum efficiency" } else { "Current against voltage" };
    let mut figure = Figure::new(
        "measured",
        &format!("{what} of {}, measured and predicted", of(it)),
        format!(
            "{what} of {} under {}: {} measured points as dots over the predicted curve, and beneath it the difference of each. {}.",
            of(it),
            visible(&it.condition),
            it.at.len(),
            capital(&sentence(it))
        ),
    )
    .counted(number)
    .drawn(draw(&overlay), None);
    figure.half = true;
    figure.caption = Text::of(format!("{what} of {} under {}; measured: ", of(it), visible(&it.condition)))
        .c(it.file.clone())
        .p(".");
    figure.data = points_table(&overlay);
    figure
}

/// The prediction between the measured points, where the results hold more of it.
fn curve(condition: &ConditionResult, it: &MeasuredResult) -> Option<Vec<(f64, f64)>> {
    let (x, y): (&[f64], &[f64]) = match (&it.junction, is_eqe(it)) {
        (Some(junction), true) => (&condition.spectral.wavelength_nm, condition.spectral.eqe.get(junction)?),
        (Some(junction), false) => {
            let own = condition.junction_curves.iter().find(|curve| curve.name == *junction)?;
            (&own.voltage_v, &own.current_ma_per_cm2)
        }
        (None, false) => (&condition.curve.voltage_v, &condition.curve.current_ma_per_cm2),
        (None, true) => return None,
    };
    Some(x.iter().copied().zip(y.iter().copied()).collect())
}

fn points_table(overlay: &Overlay) -> Table {
    let mut table = Table::new(
        Text::of(overlay.value),
        &[&format!(">{}", overlay.at), ">measured", ">predicted", ">difference"],
    );
    for (at, measured, predicted) in overlay.points.iter().step_by(overlay.points.len().div_ceil(ROWS).max(1))
    {
        table.row(vec![
            Text::of(significant(*at, 4).replace('\u{202f}', "")),
            Text::of(fixed(*measured, 2)),
            Text::of(fixed(*predicted, 2)),
            Text::of(signed(measured - predicted, 2)),
        ]);
    }
    table
}

fn table(all: &[&MeasuredResult]) -> Table {
    let mut table = Table::new(
        Text::of("What measured and predicted differ by"),
        &[
            "measurement",
            "of",
            "under",
            ">rms difference",
            ">mean difference",
            ">measured Jsc",
            ">predicted Jsc",
            ">measured Voc, V",
            ">measured power",
            ">spectral mismatch factor",
        ],
    );
    table.kind = "roomy";
    let none = || "–".to_string();
    for it in all {
        let amount = |value: f64, with_sign: bool| {
            let number =
                |v: f64, decimals: usize| if with_sign { signed(v, decimals) } else { fixed(v, decimals) };
            if is_eqe(it) {
                with_unit(&number(value * 100.0, 2), "points")
            } else {
                with_unit(&number(value, 3), "mA/cm²")
            }
        };
        table.row(vec![
            Text::code(it.file.clone()),
            Text::of(of(it)),
            Text::of(it.condition.clone()),
            Text::of(amount(it.rms, false)),
            Text::of(amount(it.bias, true)),
            Text::of(it.measured_jsc_ma_per_cm2.map_or_else(none, current)),
            Text::of(it.predicted_jsc_ma_per_cm2.map_or_else(none, current)),
            Text::of(it.measured_voc_v.map_or_else(none, |v| fixed(v, 3))),
            Text::of(it.measured_power_w_per_m2.map_or_else(none, crate::report::figure::power::power_words)),
            Text::of(it.spectral_mismatch_factor.map_or_else(none, |factor| fixed(factor, 4))),
        ]);
    }
    table
}
