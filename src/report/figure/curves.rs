//! Current against voltage: each junction by itself and the stack, with its operating point.
//!
//! Dotted lines of equal current join the points whose voltages add up to the stack's: at the
//! greatest power, and at short circuit, where a limiting junction is driven backwards. A strip
//! over the plot magnifies the currents between them.

use crate::report::context::Context;
use crate::report::figure::plot::{Scale, axis_below, axis_left, cut, interpolate, thin};
use crate::report::figure::{Drawing, Label, SLIM, WIDE};
use crate::report::number::fixed;
use crate::report::palette::style_number;
use crate::report::text::visible;

mod names;

use names::{plot_labels, strip_labels};

type Point = (f64, f64);

/// One curve: V and mA/cm2.
struct Line {
    name: String,
    junction: Option<usize>,
    points: Vec<Point>,
    /// At its own open circuit.
    voc: f64,
    /// Where it is when the stack gives its greatest power.
    at_power: Option<Point>,
    /// Where it is when the stack is short-circuited.
    at_short: Option<Point>,
}

impl Line {
    fn class(&self) -> String {
        self.junction.map_or_else(|| "cs".into(), |index| format!("c{}", style_number(index)))
    }

    fn mark(&self) -> String {
        self.junction.map_or_else(|| "mk".into(), |index| format!("mk{}", style_number(index)))
    }

    fn coloured(&self, label: Label) -> Label {
        match self.junction {
            Some(index) => label.junction("i", index),
            None => label,
        }
    }

    fn current_at(&self, voltage: f64) -> Option<f64> {
        let (v, j): (Vec<f64>, Vec<f64>) = self.points.iter().copied().unzip();
        interpolate(&v, &j, voltage)
    }
}

/// Each junction's voltage when the stack's terminals are joined, in the order of the junctions.
pub fn short_circuit_voltages(context: &Context<'_>) -> Vec<Option<f64>> {
    let curve = &context.drawn.curve;
    context
        .drawn
        .junctions
        .iter()
        .map(|junction| {
            let voltages = curve.junction_voltage_v.get(&junction.name)?;
            interpolate(&curve.voltage_v, voltages, 0.0)
        })
        .collect()
}

fn lines(context: &Context<'_>) -> Vec<Line> {
    let first = context.drawn;
    let short = short_circuit_voltages(context);
    let series = !context.separate() && first.junctions.len() > 1;
    let mut out: Vec<Line> = first
        .junctions
        .iter()
        .enumerate()
        .map(|(index, junction)| {
            let mut points: Vec<Point> = first
                .junction_curves
                .iter()
                .find(|curve| curve.name == junction.name)
                .map(|curve| {
                    curve.voltage_v.iter().copied().zip(curve.current_ma_per_cm2.iter().copied()).collect()
                })
                .unwrap_or_default();
            // Backwards it is known from where the stack drives it.
            let from = points.first().map_or(f64::MAX, |p| p.0);
            if let Some(voltages) = first.curve.junction_voltage_v.get(&junction.name) {
                points.extend(
                    voltages
                        .iter()
                        .copied()
                        .zip(first.curve.current_ma_per_cm2.iter().copied())
                        .filter(|(v, _)| *v < from),
                );
                points.sort_by(|a, b| a.0.total_cmp(&b.0));
            }
            let at_power = if series {
                first.jmp_ma_per_cm2.map(|j| (junction.voltage_at_mpp_v, j))
            } else {
                Some(junction.voltage_at_mpp_v)
                    .filter(|v| *v > 0.0)
                    .map(|v| (v, junction.power_w_per_m2 / v / 10.0))
            };
            let at_short = first.jsc_ma_per_cm2.filter(|_| series).and_then(|j| short[index].map(|v| (v, j)));
            Line {
                name: visible(&junction.name),
                junction: Some(index),
                points,
                voc: junction.voc_v,
                at_power,
                at_short,
            }
        })
        .collect();
    if series && first.curve.voltage_v.len() > 1 {
        out.push(Line {
            name: "stack".into(),
            junction: None,
            points: first
                .curve
                .voltage_v
                .iter()
                .copied()
                .zip(first.curve.current_ma_per_cm2.iter().copied())
                .collect(),
            voc: first.voc_v.unwrap_or(0.0),
            at_power: first.vmp_v.zip(first.jmp_ma_per_cm2),
            at_short: first.jsc_ma_per_cm2.map(|j| (0.0, j)),
        });
    }
    out
}

/// Both drawings.
pub fn draw(context: &Context<'_>) -> (Drawing, Drawing) {
    let lines = lines(context);
    (draw_in(context, &lines, (WIDE, 44.0)), draw_in(context, &lines, (SLIM, 36.0)))
}

/// The magnified range of currents, mA/cm2, where it shows more than the whole plot does.
fn strip_range(context: &Context<'_>, most: f64) -> Option<(f64, f64)> {
    let (jsc, jmp) = (context.drawn.jsc_ma_per_cm2?, context.drawn.jmp_ma_per_cm2?);
    if context.separate() || context.drawn.junctions.len() < 2 {
        return None;
    }
    let near = context
        .drawn
        .junctions
        .iter()
        .map(|j| j.photocurrent_ma_per_cm2)
        .filter(|j| *j <= 1.3 * jsc)
        .fold(jsc, f64::max);
    let span = (near - jmp).max(0.03 * jsc);
    let range = (jmp - 0.35 * span, near + 0.3 * span);
    ((range.1 - range.0) < 0.5 * most).then_some(range)
}

fn draw_in(context: &Context<'_>, lines: &[Line], (width, left): (f64, f64)) -> Drawing {
    let slim = width < 500.0;
    let most = context.drawn.junctions.iter().map(|j| j.photocurrent_ma_per_cm2).fold(0.0, f64::max) * 1.05;
    let most = most.max(context.drawn.jsc_ma_per_cm2.unwrap_or(0.0) * 1.05).max(1e-9);
    let greatest = lines.iter().map(|l| l.voc).fold(0.0, f64::max);
    let least = lines.iter().filter_map(|l| l.at_short).map(|p| p.0).fold(0.0, f64::min);
    let x = Scale::new(
        if least < 0.0 { least * 1.08 } else { 0.0 },
        (greatest * 1.04).max(0.1),
        (left, width - if slim { 8.0 } else { 20.0 }),
    );
    let strip = strip_range(context, most);
    let strip_height = if slim { 116.0 } else { 140.0 };
    let plot_height = if slim { 180.0 } else { 200.0 };
    let top = if strip.is_some() { 22.0 + strip_height + 36.0 } else { 24.0 };
    let foot = top + plot_height;
    let mut drawing = Drawing::new(width, foot + 42.0);
    let unit = context.scale.unit;
    let of = |ma: f64| context.scale.of(ma);
    let caption = |y: f64, words: &str| Label::at(left, y, words).size(11.5).class("q");

    if let Some((low, high)) = strip {
        let y = Scale::new(low, high, (22.0 + strip_height, 22.0));
        let shown = |ma: f64| fixed(of(ma), if of(high) - of(low) < 1.0 { 2 } else { 1 });
        drawing.text(caption(12.0, &format!("between {} and {} {unit}, magnified", shown(low), shown(high))));
        plane(&mut drawing, context, lines, (x, y));
        strip_labels(&mut drawing, context, lines, (x, y));
    }
    let y = Scale::new(0.0, most, (foot, top));
    drawing.text(caption(top - 9.0, &format!("current, {unit}")));
    plane(&mut drawing, context, lines, (x, y));
    plot_labels(&mut drawing, context, lines, (x, y), strip.is_some());
    let (ticks, decimals) = x.ticks(if slim { 5 } else { 10 });
    let ticks: Vec<(f64, String)> =
        ticks.into_iter().map(|v| (v, if v == 0.0 { "0".into() } else { fixed(v, decimals) })).collect();
    axis_below(&mut drawing, x, foot, &ticks);
    drawing.text(Label::at(x.at.1, foot + 36.0, "voltage, V").size(11.5).class("q").end());
    drawing
}

/// Axis, zero, lines of equal current, curves, marks; labels come later, over all of it.
fn plane(drawing: &mut Drawing, context: &Context<'_>, lines: &[Line], (x, y): (Scale, Scale)) {
    let in_unit = Scale::new(context.scale.of(y.from), context.scale.of(y.to), y.at);
    let (ticks, decimals) = in_unit.ticks(4);
    let ticks: Vec<(f64, String)> = ticks.into_iter().map(|v| (v, fixed(v, decimals))).collect();
    axis_left(drawing, in_unit, x.at.0, &ticks);
    if x.from < 0.0 {
        drawing.line("zero", (x.of(0.0), y.at.0), (x.of(0.0), y.at.1));
    }
    let frame = ((x.at.0, y.at.1), (x.at.1, y.at.0));
    if lines.iter().any(|line| line.junction.is_none()) {
        for of in [|l: &Line| l.at_power, |l: &Line| l.at_short] {
            let points: Vec<Point> = lines.iter().filter_map(of).collect();
            let ends = points.iter().fold((f64::MAX, f64::MIN), |e, p| (e.0.min(p.0), e.1.max(p.0)));
            if let Some((_, j)) = points.first()
                && (y.from..=y.to).contains(j)
                && ends.0 < ends.1
            {
                drawing.line("eq", (x.of(ends.0), y.of(*j)), (x.of(ends.1), y.of(*j)));
            }
        }
    }
    for line in lines {
        let points: Vec<Point> = line.points.iter().map(|(v, j)| (x.of(*v), y.of(*j))).collect();
        for run in cut(&points, frame.0, frame.1) {
            drawing.polyline(&line.class(), &thin(&run, 0.1));
        }
    }
    for line in lines {
        for (v, j) in [line.at_power, line.at_short].into_iter().flatten() {
            if (x.from..=x.to).contains(&v) && (y.from..=y.to).contains(&j) {
                drawing.dot(&line.mark(), (x.of(v), y.of(j)), 3.2);
            }
        }
    }
}
