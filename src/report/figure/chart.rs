//! Charts that the file asks for: one figure of merit against one quantity as lines, against two
//! as contours.

use crate::report::figure::plot::{Scale, axis_below, axis_left, cut, interpolate, meets, thin};
use crate::report::figure::{Drawing, Label};
use crate::report::number::{fixed, short, trimmed};
use crate::report::text::visible;
use crate::report::width::fit;
use crate::results::ChartAxisResult;

pub mod map;

type Point = (f64, f64);

/// Units across of one chart; two stand abreast.
pub const WIDTH: f64 = 408.0;
const HEIGHT: f64 = 230.0;
const LEFT: f64 = 52.0;
const TOP: f64 = 30.0;

/// A quantity along an edge: linear, or in decades where the concentration spans one.
#[derive(Clone, Copy, Debug)]
pub struct Axis {
    scale: Scale,
    decades: bool,
}

impl Axis {
    /// Over the values of `axis`, along `at`.
    pub fn new(axis: &ChartAxisResult, at: (f64, f64)) -> Self {
        let (low, high) = axis.values.iter().fold((f64::MAX, f64::MIN), |e, v| (e.0.min(*v), e.1.max(*v)));
        let decades = axis.path == "concentration" && low > 0.0 && high / low >= 9.99;
        let scale = |v: f64| if decades { v.log10() } else { v };
        Self { scale: Scale::new(scale(low), scale(high), at), decades }
    }

    /// Units of a value.
    pub fn of(self, value: f64) -> f64 {
        self.scale.of(if self.decades { value.max(f64::MIN_POSITIVE).log10() } else { value })
    }

    /// The scale, and round values on it with their words.
    pub fn ticks(self, wanted: usize) -> (Scale, Vec<(f64, String)>) {
        if !self.decades {
            let (values, decimals) = self.scale.ticks(wanted);
            let words = |v: f64| fixed(v, decimals);
            return (self.scale, values.into_iter().map(|v| (v, words(v))).collect());
        }
        let (first, last) = (self.scale.from.floor() as i32, self.scale.to.ceil() as i32);
        let steps: &[f64] = if last - first > 3 { &[1.0] } else { &[1.0, 2.0, 5.0] };
        let values =
            (first..=last).flat_map(|decade| steps.iter().map(move |step| step * 10f64.powi(decade)));
        let inside = |v: &f64| (self.scale.from - 1e-9..=self.scale.to + 1e-9).contains(&v.log10());
        (self.scale, values.filter(inside).map(|v| (v.log10(), short(v))).collect())
    }

    /// `temperature, °C`
    pub fn words(axis: &ChartAxisResult) -> String {
        let path = visible(&axis.path);
        let unit = match axis.unit.as_str() {
            "degC" => "°C",
            "deg" => "degrees",
            "um" => "µm",
            other => other,
        };
        if unit.is_empty() || unit == "1" { path } else { format!("{path}, {unit}") }
    }
}

/// One line of a chart: under which condition, and its points, in the figure's own unit.
#[derive(Clone, Debug)]
pub struct ChartLine {
    /// The condition's name.
    pub name: String,
    /// Ascending in the quantity.
    pub points: Vec<Point>,
}

impl ChartLine {
    /// Where it is highest.
    pub fn peak(&self) -> Option<Point> {
        self.points.iter().copied().max_by(|a, b| a.1.total_cmp(&b.1))
    }
}

/// Lines beyond this stay in the table.
pub const LINES: usize = 6;

/// Strokes by line: the first as the stack's curves, the others lighter and broken.
const CLASSES: [&str; LINES] = ["cs", "d2", "d3", "d4", "d5", "d6"];

/// The drawing; `metric` names the vertical axis with its unit.
pub fn lines(lines: &[ChartLine], axis: &ChartAxisResult, metric: &str) -> Drawing {
    let foot = TOP + HEIGHT;
    let mut drawing = Drawing::new(WIDTH, foot + 42.0);
    let x = Axis::new(axis, (LEFT, WIDTH - 14.0));
    let drawn = &lines[..lines.len().min(LINES)];
    let all = drawn.iter().flat_map(|line| &line.points).map(|p| p.1);
    let (low, high) = all.fold((f64::MAX, f64::MIN), |e, v| (e.0.min(v), e.1.max(v)));
    if low > high {
        return drawing;
    }
    let room = ((high - low) * 0.12).max(high.abs() * 0.002).max(1e-9);
    let y = Scale::new(low - room, high + room, (foot, TOP));
    let (ticks, decimals) = y.ticks(8);
    let ticks: Vec<(f64, String)> = ticks.into_iter().map(|v| (v, fixed(v, decimals))).collect();
    drawing.text(Label::at(0.0, TOP - 14.0, &fit(metric, 11.5, false, WIDTH)).size(11.5).class("q"));
    axis_left(&mut drawing, y, LEFT, &ticks);
    let (scale, ticks) = x.ticks(8);
    axis_below(&mut drawing, scale, foot, &ticks);
    let words = fit(&Axis::words(axis), 11.5, false, WIDTH - 60.0);
    drawing.text(Label::at(WIDTH - 14.0, foot + 36.0, &words).size(11.5).class("q").end());
    let placed: Vec<Vec<Point>> =
        drawn.iter().map(|line| line.points.iter().map(|p| (x.of(p.0), y.of(p.1))).collect()).collect();
    for (points, class) in placed.iter().zip(CLASSES) {
        for run in cut(points, (LEFT, TOP), (WIDTH - 14.0, foot)) {
            drawing.polyline(class, &thin(&run, 0.1));
        }
    }
    for (line, points) in drawn.iter().zip(&placed) {
        peak(&mut drawing, line, points, &placed);
    }
    if drawn.len() > 1 {
        for (line, points) in drawn.iter().zip(&placed) {
            name(&mut drawing, line, points, &placed);
        }
    }
    drawing
}

/// The highest point, with its value, where it is no end of the line.
fn peak(drawing: &mut Drawing, line: &ChartLine, points: &[Point], all: &[Vec<Point>]) {
    let best = points.iter().enumerate().min_by(|a, b| a.1.1.total_cmp(&b.1.1));
    let Some((at, place)) = best.filter(|(at, _)| *at > 0 && *at + 1 < points.len()) else { return };
    drawing.dot("mk", *place, 3.2);
    let Some((x, value)) = line.points.get(at) else { return };
    let words = format!("{} at {}", trimmed(*value), short(*x));
    let label = |dx: f64, dy: f64| Label::at(place.0 + dx, place.1 + dy, &words).size(11.5).bold().halo();
    put(
        drawing,
        all,
        vec![
            label(0.0, -9.0).middle(),
            label(-6.0, -9.0).end(),
            label(6.0, -9.0),
            label(0.0, 18.0).middle(),
            label(-6.0, 18.0).end(),
        ],
    );
}

fn name(drawing: &mut Drawing, line: &ChartLine, points: &[Point], all: &[Vec<Point>]) {
    let words = fit(&line.name, 12.5, false, 120.0);
    let (xs, ys): (Vec<f64>, Vec<f64>) = points.iter().copied().unzip();
    let (Some(first), Some(last)) = (xs.first(), xs.last()) else { return };
    let places = [0.98, 0.85, 0.7, 0.55, 0.4, 0.25, 0.02].into_iter().flat_map(|share| {
        let x = first + share * (last - first);
        let y = interpolate(&xs, &ys, x).unwrap_or(TOP);
        [-8.0, 17.0, -22.0, 31.0].map(|dy| (x, y + dy))
    });
    let labels = places.map(|(x, y)| {
        let label = Label::at(x, y, &words).halo();
        if x > WIDTH / 2.0 { label.end() } else { label }
    });
    put(drawing, all, labels.filter(|label| label.bounds().left > LEFT + 2.0).collect());
}

/// The first label that no line crosses; else the first that is free of others.
fn put(drawing: &mut Drawing, lines: &[Vec<Point>], labels: Vec<Label>) {
    let inside = |label: &Label| {
        let b = label.bounds();
        b.top > TOP - 12.0 && b.bottom < TOP + HEIGHT - 2.0
    };
    let clear = |label: &Label| {
        let b = label.bounds();
        !lines.iter().any(|line| meets(line, (b.left - 1.0, b.top), (b.right + 1.0, b.bottom)))
    };
    let (free, crossed): (Vec<Label>, Vec<Label>) = labels.into_iter().filter(inside).partition(clear);
    if !drawing.text_where_free(free) {
        drawing.text_where_free(crossed);
    }
}
