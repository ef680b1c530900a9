//! Current against voltage in the dark, on a logarithmic axis of current: each junction, and the
//! stack, whose voltage at any current is the sum of the junctions'.

use crate::report::context::Context;
use crate::report::figure::plot::{Scale, axis_below, axis_left, cut, interpolate, meets, thin};
use crate::report::figure::{Drawing, Label};
use crate::report::number::{fixed, superscript};
use crate::report::palette::style_number;
use crate::report::text::visible;
use crate::report::width::fit;

type Point = (f64, f64);

const WIDTH: f64 = 408.0;
const HEIGHT: f64 = 240.0;
const LEFT: f64 = 44.0;
const TOP: f64 = 26.0;

/// One curve in the dark.
#[derive(Clone, Debug)]
pub struct DarkLine {
    /// `stack`, or the junction's name.
    pub name: String,
    /// `None` for the stack.
    pub junction: Option<usize>,
    /// V, and the logarithm to base ten of mA/cm2.
    pub points: Vec<Point>,
    /// What it makes in light, mA/cm2; `None` where it makes nothing.
    pub light_ma: Option<f64>,
}

impl DarkLine {
    /// V at a current, mA/cm2; `None` outside the curve.
    pub fn voltage_at(&self, milliampere: f64) -> Option<f64> {
        let (v, log): (Vec<f64>, Vec<f64>) = self.points.iter().copied().unzip();
        let wanted = milliampere.log10();
        let inside = *log.first()? <= wanted && wanted <= *log.last()?;
        inside.then(|| interpolate(&log, &v, wanted)).flatten()
    }

    /// d ln J / dV at a current, as the factor n of `exp(V/n kT)`; `None` outside the curve, and
    /// within four kT/q of zero, where the current is no exponential.
    pub fn slope_factor(&self, milliampere: f64, thermal_v: f64) -> Option<f64> {
        self.voltage_at(milliampere).filter(|v| *v > 4.0 * thermal_v)?;
        let step = 10f64.powf(0.125);
        let (low, high) = (self.voltage_at(milliampere / step)?, self.voltage_at(milliampere * step)?);
        Some((high - low) / (2.0 * step.ln()) / thermal_v).filter(|n| n.is_finite())
    }
}

/// Every curve; none where nothing was driven.
pub fn lines(context: &Context<'_>) -> Vec<DarkLine> {
    let drawn = context.drawn;
    let curve = &drawn.dark_curve;
    let points = |voltages: &[f64]| -> Vec<Point> {
        let both = voltages.iter().zip(&curve.current_ma_per_cm2);
        both.filter(|(v, j)| v.is_finite() && **j < 0.0).map(|(v, j)| (*v, (-j).log10())).collect()
    };
    let positive = |ma: f64| Some(ma).filter(|ma| *ma > 0.0);
    let mut out: Vec<DarkLine> = drawn
        .junctions
        .iter()
        .enumerate()
        .filter_map(|(index, junction)| {
            let points = points(curve.junction_voltage_v.get(&junction.name)?);
            let light_ma = positive(junction.photocurrent_ma_per_cm2);
            Some(DarkLine { name: visible(&junction.name), junction: Some(index), points, light_ma })
        })
        .collect();
    if out.len() > 1 && !curve.voltage_v.is_empty() && !context.separate() {
        let light_ma = drawn.jsc_ma_per_cm2.and_then(positive);
        let points = points(&curve.voltage_v);
        out.push(DarkLine { name: "stack".into(), junction: None, points, light_ma });
    }
    out.retain(|line| line.points.len() > 2);
    out
}

/// The drawing; half a column wide.
pub fn draw(lines: &[DarkLine]) -> Drawing {
    let ends = |of: fn(&Point) -> f64| {
        lines
            .iter()
            .flat_map(|line| &line.points)
            .map(of)
            .fold((f64::MAX, f64::MIN), |e, v| (e.0.min(v), e.1.max(v)))
    };
    let (_, last_v) = ends(|p| p.0);
    let (first, last) = ends(|p| p.1);
    let foot = TOP + HEIGHT;
    let mut drawing = Drawing::new(WIDTH, foot + 42.0);
    let x = Scale::new(0.0, (last_v * 1.03).max(0.1), (LEFT, WIDTH - 10.0));
    let y = Scale::new(first.floor(), last.ceil(), (foot, TOP));
    let step = if y.to - y.from > 8.5 { 2 } else { 1 };
    let decades: Vec<(f64, String)> = (y.from as i32..=y.to as i32)
        .filter(|decade| decade.rem_euclid(step) == 0)
        .map(|decade| (f64::from(decade), format!("10{}", superscript(decade))))
        .collect();
    drawing.text(Label::at(LEFT, TOP - 11.0, "current, mA/cm²").size(11.5).class("q"));
    axis_left(&mut drawing, y, LEFT, &decades);
    let (ticks, decimals) = x.ticks(5);
    let ticks: Vec<(f64, String)> =
        ticks.into_iter().map(|v| (v, if v == 0.0 { "0".into() } else { fixed(v, decimals) })).collect();
    axis_below(&mut drawing, x, foot, &ticks);
    drawing.text(Label::at(x.at.1, foot + 36.0, "voltage, V").size(11.5).class("q").end());
    let placed: Vec<(&DarkLine, Vec<Point>)> = lines
        .iter()
        .map(|line| (line, line.points.iter().map(|p| (x.of(p.0), y.of(p.1))).collect()))
        .collect();
    for (line, points) in &placed {
        let class = line.junction.map_or_else(|| "cs".into(), |index| format!("c{}", style_number(index)));
        for run in cut(points, (LEFT, TOP), (x.at.1, foot)) {
            drawing.polyline(&class, &thin(&run, 0.12));
        }
    }
    for (line, _) in &placed {
        let Some((ma, v)) = line.light_ma.and_then(|ma| Some((ma, line.voltage_at(ma)?))) else { continue };
        let class = line.junction.map_or_else(|| "mk".into(), |index| format!("mk{}", style_number(index)));
        drawing.dot(&class, (x.of(v), y.of(ma.log10())), 3.2);
    }
    let crowded = lines.iter().filter(|line| line.junction.is_some()).count() > CROWD;
    for (line, points) in &placed {
        if crowded && line.junction.is_some() {
            continue;
        }
        name(&mut drawing, line, points, &placed);
    }
    if crowded {
        key(&mut drawing, &placed);
    }
    drawing
}

/// With more junctions than this their names stand in a column, each with a piece of its line.
const CROWD: usize = 4;

/// Names right of all junctions' curves, where they lie lowest and leave the most room.
fn key(drawing: &mut Drawing, placed: &[(&DarkLine, Vec<Point>)]) {
    let junctions = || placed.iter().filter(|(line, _)| line.junction.is_some());
    let rows = junctions().count() as f64;
    let top = TOP + HEIGHT - 17.0 * rows - 4.0;
    let below = junctions().flat_map(|(_, points)| points).filter(|p| p.1 > top - 14.0).map(|p| p.0);
    let left = below.fold(LEFT, f64::max) + 14.0;
    for (row, (line, _)) in junctions().enumerate() {
        let Some(index) = line.junction else { continue };
        let y = top + 17.0 * row as f64 + 8.0;
        let words = fit(&line.name, 12.5, true, (WIDTH - left - 40.0).min(120.0));
        let label = Label::at(left + 30.0, y, &words).bold().junction("i", index).halo();
        if drawing.text_where_free([label]) {
            let class = format!("c{}", style_number(index));
            drawing.line(&class, (left, y - 4.0), (left + 24.0, y - 4.0));
        }
    }
}

/// The name beside its curve: where no curve runs, if there is such a place.
fn name(drawing: &mut Drawing, line: &DarkLine, own: &[Point], all: &[(&DarkLine, Vec<Point>)]) {
    let words = fit(&line.name, 12.5, true, 110.0);
    let (heights, across): (Vec<f64>, Vec<f64>) = own.iter().rev().map(|p| (p.1, p.0)).unzip();
    let places = (1..=14).flat_map(|row| {
        let base = TOP + HEIGHT * (0.18 + 0.055 * f64::from(row));
        let at = |y: f64| interpolate(&heights, &across, y).unwrap_or(LEFT);
        // Upright curves lean to the right on their way up: the words keep clear of both ends.
        let (left, right) = (at(base) - 9.0, at(base - 10.0) + 8.0);
        [(right, base, false), (left, base, true)]
    });
    let labels: Vec<Label> = places
        .map(|(x, y, ends)| {
            let label = Label::at(x, y, &words).bold().halo();
            let label = line.junction.map_or(label.clone(), |index| label.junction("i", index));
            if ends { label.end() } else { label }
        })
        .filter(|label| label.bounds().left > LEFT + 4.0)
        .collect();
    let clear = |label: &Label| {
        let b = label.bounds();
        !all.iter().any(|(_, points)| meets(points, (b.left - 2.0, b.top), (b.right + 2.0, b.bottom)))
    };
    let (free, crossed): (Vec<Label>, Vec<Label>) = labels.into_iter().partition(clear);
    if !drawing.text_where_free(free) {
        drawing.text_where_free(crossed);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// `J = J0 exp(V/n kT)`: the slope is n, the inverse function is exact.
    #[test]
    fn an_exponential_has_its_slope_factor() {
        let thermal_v = 0.025_692_579;
        let points = (-80..=20)
            .map(|step| f64::from(step) / 8.0)
            .map(|log| (2.0 * thermal_v * (log + 12.0) * std::f64::consts::LN_10, log))
            .collect();
        let line = DarkLine { name: "a".into(), junction: Some(0), points, light_ma: None };
        assert!((line.slope_factor(0.3, thermal_v).expect("inside") - 2.0).abs() < 1e-9);
        let exact = 2.0 * thermal_v * (1e12_f64 * 0.3).ln();
        assert!((line.voltage_at(0.3).expect("inside") - exact).abs() < 1e-12);
        assert_eq!(line.voltage_at(1e9), None);
    }
}
