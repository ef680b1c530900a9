//! The greatest power, one panel a condition: the solid rectangle spans the operating voltage and
//! current, so its area is what is delivered; the dotted box is V oc times J sc.

use crate::report::context::Context;
use crate::report::figure::plot::{Scale, cut, thin};
use crate::report::figure::{Drawing, Label};
use crate::report::number::{CurrentScale, celsius, fixed, percent, with_unit};
use crate::report::palette::style_number;
use crate::report::text::visible;
use crate::report::width::fit;
use crate::results::ConditionResult;

/// Height of a panel.
const PANEL: f64 = 206.0;
/// Conditions that are drawn; the others stand in the table.
pub const MOST: usize = 8;

/// Whether all panels share one scale of current: not where concentration sets them apart.
pub fn shared_scale(conditions: &[ConditionResult]) -> bool {
    let currents: Vec<f64> = conditions.iter().map(greatest_current).collect();
    let most = currents.iter().copied().fold(0.0, f64::max);
    let least = currents.iter().copied().fold(f64::MAX, f64::min);
    most <= 3.0 * least
}

fn greatest_current(condition: &ConditionResult) -> f64 {
    condition
        .jsc_ma_per_cm2
        .unwrap_or_else(|| condition.junctions.iter().map(|j| j.jsc_ma_per_cm2).fold(0.0, f64::max))
}

fn greatest_voltage(condition: &ConditionResult) -> f64 {
    condition.voc_v.unwrap_or_else(|| condition.junctions.iter().map(|j| j.voltage_at_mpp_v).sum())
}

/// `across` panels side by side in a drawing `width` units wide.
pub fn draw(context: &Context<'_>, across: usize, width: f64) -> Drawing {
    let gap = 26.0;
    let across = across.max(1);
    let panel_width = ((width - gap * (across - 1) as f64) / across as f64).min(300.0);
    let conditions: Vec<&ConditionResult> = context.results.conditions.iter().take(MOST).collect();
    let shared = shared_scale(&context.results.conditions);
    let most = |of: fn(&ConditionResult) -> f64| conditions.iter().map(|c| of(c)).fold(0.0, f64::max);
    let voltage = most(greatest_voltage);
    let current = most(greatest_current);
    let panels_down = conditions.len().div_ceil(across).max(1);
    let height = panels_down as f64 * (PANEL + 14.0) - 8.0;
    let mut drawing = Drawing::new(width, height);
    for (index, condition) in conditions.iter().enumerate() {
        let at = ((index % across) as f64 * (panel_width + gap), (index / across) as f64 * (PANEL + 14.0));
        let scale = if shared { current } else { greatest_current(condition) };
        panel(&mut drawing, condition, (at, panel_width), (voltage, scale));
    }
    drawing
}

fn panel(
    drawing: &mut Drawing,
    condition: &ConditionResult,
    ((left, top), width): ((f64, f64), f64),
    most: (f64, f64),
) {
    let temperature =
        Label::at(left + width - 2.0, top + 14.0, &celsius(condition.temperature_k)).class("q").end();
    let room = width - temperature.width() - 16.0;
    drawing.text(Label::at(left + 2.0, top + 14.0, &fit(&visible(&condition.name), 12.5, true, room)).bold());
    drawing.text(temperature);
    let foot = top + 172.0;
    let x = Scale::new(0.0, most.0 * 1.06, (left + 2.0, left + width));
    let y = Scale::new(0.0, most.1 * 1.02, (foot, top + 52.0));
    let scale = CurrentScale::for_largest(greatest_current(condition));
    match (condition.voc_v, condition.jsc_ma_per_cm2, condition.vmp_v, condition.jmp_ma_per_cm2) {
        (Some(voc), Some(jsc), Some(vmp), Some(jmp)) => {
            drawing.rect("fd", (x.of(0.0), y.of(jmp)), (x.of(vmp) - x.of(0.0), foot - y.of(jmp)));
            drawing.rect("box", (x.of(0.0), y.of(jsc)), (x.of(voc) - x.of(0.0), foot - y.of(jsc)));
            let points: Vec<(f64, f64)> = condition
                .curve
                .voltage_v
                .iter()
                .zip(&condition.curve.current_ma_per_cm2)
                .map(|(v, j)| (x.of(*v), y.of(*j)))
                .collect();
            for run in cut(&points, (x.of(0.0), top + 30.0), (left + width, foot)) {
                drawing.polyline("cs", &thin(&run, 0.12));
            }
            drawing.line("axis", (left + 2.0, foot), (left + width, foot));
            figures(drawing, condition, (x.of(0.0), x.of(vmp)), (y.of(jmp), foot), "od");
            drawing.text(Label::at(left + 2.0, y.of(jsc) - 6.0, &scale.text(jsc)).size(11.5));
            let voltage = with_unit(&fixed(voc, 3), "V");
            let label =
                Label::at((x.of(voc) + 6.0).min(left + width), foot + 15.0, &voltage).size(11.5).end();
            drawing.text(label);
            if let Some(ff) = condition.fill_factor {
                let words = format!("fill factor {}", percent(ff, 1));
                drawing.text(Label::at(left + 2.0, foot + 32.0, &words).size(11.5).class("q"));
            }
        }
        _ => separate(drawing, condition, (x, y), foot),
    }
}

/// Each junction with terminals of its own: rectangles side by side, their areas add up.
fn separate(drawing: &mut Drawing, condition: &ConditionResult, (x, y): (Scale, Scale), foot: f64) {
    let mut volts = 0.0;
    for (index, junction) in condition.junctions.iter().enumerate() {
        let v = junction.voltage_at_mpp_v;
        if v <= 0.0 {
            continue;
        }
        // W/m2 per V is A/m2; ten of them are one mA/cm2.
        let j = junction.power_w_per_m2 / v / 10.0;
        let n = style_number(index);
        drawing.rect(
            &format!("f{n}"),
            (x.of(volts), y.of(j)),
            (x.of(volts + v) - x.of(volts), foot - y.of(j)),
        );
        let middle = (x.of(volts) + x.of(volts + v)) / 2.0;
        let room = x.of(volts + v) - x.of(volts) - 4.0;
        let share = percent(junction.power_w_per_m2 / condition.incident_w_per_m2, 1);
        let label =
            Label::at(middle, (y.of(j) + foot) / 2.0 + 4.0, &share).bold().junction("o", index).middle();
        if label.width() <= room {
            drawing.text(label);
        }
        volts += v;
    }
    drawing.line("axis", (x.at.0, foot), (x.at.1, foot));
    let total = format!("{} in all", percent(condition.efficiency, 2));
    drawing.text(Label::at(x.at.0, foot + 16.0, &total).bold());
    drawing.text(Label::at(x.at.0, foot + 32.0, &power(condition)).size(11.5).class("q"));
}

fn power(condition: &ConditionResult) -> String {
    power_words(condition.power_w_per_m2)
}

/// W/m², or kW/m² where the light is concentrated.
pub fn power_words(w_per_m2: f64) -> String {
    if w_per_m2 >= 10_000.0 {
        with_unit(&fixed(w_per_m2 / 1000.0, 2), "kW/m²")
    } else {
        with_unit(&fixed(w_per_m2, 1), "W/m²")
    }
}

/// Efficiency and power inside the solid area, or above it where it is too small.
fn figures(
    drawing: &mut Drawing,
    condition: &ConditionResult,
    (left, right): (f64, f64),
    (top, foot): (f64, f64),
    class: &'static str,
) {
    let middle = (left + right) / 2.0;
    let centre = (top + foot) / 2.0;
    let efficiency = percent(condition.efficiency, 2);
    let size = [31.0, 24.0, 15.0]
        .into_iter()
        .find(|size| Label::at(0.0, 0.0, &efficiency).size(*size).bold().width() <= right - left - 8.0);
    let power = power(condition);
    match size {
        Some(size) if foot - top > 60.0 => {
            drawing
                .text(Label::at(middle, centre + 2.0, &efficiency).size(size).bold().class(class).middle());
            let label = Label::at(middle, centre + 22.0, &power).class(class).middle();
            if label.width() <= right - left - 4.0 {
                drawing.text(label);
            }
        }
        _ => {
            drawing.text_where_free([Label::at(left, top - 24.0, &format!("{efficiency}, {power}")).bold()]);
        }
    }
}
