//! A measurement over the prediction: dots on the curve, and beneath it what they differ by.

use crate::report::figure::plot::{Scale, axis_below, axis_left, cut, thin};
use crate::report::figure::{Drawing, Label};
use crate::report::number::{fixed, signed};
use crate::report::palette::style_number;

type Point = (f64, f64);

const WIDTH: f64 = 408.0;
const HEIGHT: f64 = 190.0;
const STRIP: f64 = 62.0;
const LEFT: f64 = 48.0;
const TOP: f64 = 28.0;

/// What is drawn.
#[derive(Clone, Debug)]
pub struct Overlay {
    /// `quantum efficiency, %`
    pub value: &'static str,
    /// `wavelength, nm`
    pub at: &'static str,
    /// Place, measured, predicted, in these units; places ascend.
    pub points: Vec<(f64, f64, f64)>,
    /// The prediction between them, where more of it is known.
    pub curve: Vec<Point>,
    /// `None` for the stack.
    pub junction: Option<usize>,
}

/// The drawing; half a column wide.
pub fn draw(overlay: &Overlay) -> Drawing {
    let foot = TOP + HEIGHT;
    let strip = (foot + 34.0, foot + 34.0 + STRIP);
    let mut drawing = Drawing::new(WIDTH, strip.1 + 42.0);
    let right = WIDTH - 12.0;
    let range = |of: &dyn Fn(&(f64, f64, f64)) -> f64| {
        overlay.points.iter().map(of).fold((f64::MAX, f64::MIN), |e, v| (e.0.min(v), e.1.max(v)))
    };
    let across = range(&|p| p.0);
    if across.0 > across.1 {
        return drawing;
    }
    let pad = 0.02 * (across.1 - across.0).max(1e-9);
    let x = Scale::new(across.0 - pad, across.1 + pad, (LEFT, right));
    let most = overlay.curve.iter().map(|p| p.1).fold(range(&|p| p.1.max(p.2)).1, f64::max).max(1e-9);
    let least = range(&|p| p.1.min(p.2)).0.min(0.0);
    let y = Scale::new(least, most * 1.06, (foot, TOP));
    drawing.text(Label::at(0.0, TOP - 13.0, overlay.value).size(11.5).class("q"));
    let (ticks, decimals) = y.ticks(8);
    let ticks: Vec<(f64, String)> = ticks.into_iter().map(|v| (v, fixed(v, decimals))).collect();
    axis_left(&mut drawing, y, LEFT, &ticks);

    let predicted: Vec<Point> = if overlay.curve.len() > 1 {
        overlay.curve.clone()
    } else {
        overlay.points.iter().map(|p| (p.0, p.2)).collect()
    };
    let class = overlay.junction.map_or_else(|| "cs".into(), |index| format!("c{}", style_number(index)));
    let placed: Vec<Point> = predicted.iter().map(|p| (x.of(p.0), y.of(p.1))).collect();
    for run in cut(&placed, (LEFT, TOP), (right, foot)) {
        drawing.polyline(&class, &thin(&run, 0.12));
    }
    // Dots that would merge are left out; the table and the residuals' numbers hold all of them.
    let mut shown: Vec<(f64, f64, f64)> = Vec::new();
    for point in &overlay.points {
        let apart = |last: &(f64, f64, f64)| {
            (x.of(point.0) - x.of(last.0)).hypot(y.of(point.1) - y.of(last.1)) >= 5.0
        };
        if shown.last().is_none_or(apart) {
            shown.push(*point);
        }
    }
    for (at, measured, _) in &shown {
        drawing.dot("ring", (x.of(*at), y.of(*measured)), 2.6);
    }

    let off = overlay.points.iter().map(|p| (p.1 - p.2).abs()).fold(0.0, f64::max).max(1e-12);
    let difference = Scale::new(-1.15 * off, 1.15 * off, (strip.1, strip.0));
    drawing.text(Label::at(LEFT, strip.0 - 8.0, "measured less predicted").size(11.5).class("q"));
    let (ticks, decimals) = difference.ticks(6);
    let words = |v: f64| if v == 0.0 { "0".to_string() } else { signed(v, decimals) };
    let ticks: Vec<(f64, String)> = ticks.into_iter().map(|v| (v, words(v))).collect();
    axis_left(&mut drawing, difference, LEFT, &ticks);
    drawing.line("zero", (LEFT, difference.of(0.0)), (right, difference.of(0.0)));
    let mut stems: Vec<(Point, Point)> = Vec::new();
    for point in &overlay.points {
        let at = x.of(point.0);
        if stems.last().is_none_or(|(last, _)| at - last.0 >= 2.5) {
            stems.push(((at, difference.of(0.0)), (at, difference.of(point.1 - point.2))));
        }
    }
    drawing.lines("thin", &stems);
    let (ticks, decimals) = x.ticks(6);
    let plain = |v: f64| fixed(v, decimals).replace('\u{202f}', "");
    let ticks: Vec<(f64, String)> = ticks.into_iter().map(|v| (v, plain(v))).collect();
    axis_below(&mut drawing, x, strip.1, &ticks);
    drawing.text(Label::at(right, strip.1 + 36.0, overlay.at).size(11.5).class("q").end());
    drawing
}
