//! Where the light goes: every photon of the sun, divided into what becomes current and what is
//! lost.
//!
//! The horizontal axis is stretched so that equal widths are equal photon current, the vertical
//! one is the share of the photons: every area reads in mA/cm², and each cell of the grid is a
//! round amount.

use crate::report::context::Context;
use crate::report::figure::hatch::strokes;
use crate::report::figure::plot::{Scale, axis_left, round_step, thin};
use crate::report::figure::staircase::{GAP, Hung, arrange};
use crate::report::figure::{Drawing, Label, LabelBox, SLIM, WIDE};
use crate::report::number::{fixed, trimmed};
use crate::report::width::fit;

mod axis;
pub mod bands;

use axis::wavelengths;
pub use bands::{Band, Light, layer_words};

/// Both drawings.
pub fn draw(context: &Context<'_>, light: &Light) -> (Drawing, Drawing) {
    let wide = Frame { width: WIDE, left: 44.0, right: 796.0, height: 300.0, slim: false };
    let slim = Frame { width: SLIM, left: 34.0, right: 380.0, height: 250.0, slim: true };
    (draw_in(context, light, &wide), draw_in(context, light, &slim))
}

struct Frame {
    width: f64,
    left: f64,
    right: f64,
    height: f64,
    slim: bool,
}

/// What the parts of one drawing share.
#[derive(Clone, Copy)]
struct Stage<'a> {
    context: &'a Context<'a>,
    light: &'a Light,
    frame: &'a Frame,
    x: Scale,
    /// Where the plot begins.
    top: f64,
}

/// A band in units: its outline, thinned, and its edges for finding room.
struct Shape<'a> {
    band: &'a Band,
    lower: Vec<(f64, f64)>,
    upper: Vec<(f64, f64)>,
}

impl Shape<'_> {
    fn edge(points: &[(f64, f64)], x: f64) -> f64 {
        let after = points.partition_point(|p| p.0 < x);
        match (after.checked_sub(1).and_then(|i| points.get(i)), points.get(after)) {
            (Some(a), Some(b)) if b.0 > a.0 => a.1 + (b.1 - a.1) * (x - a.0) / (b.0 - a.0),
            (Some(p), _) | (None, Some(p)) => p.1,
            (None, None) => 0.0,
        }
    }

    fn height_at(&self, x: f64) -> f64 {
        Self::edge(&self.lower, x) - Self::edge(&self.upper, x)
    }

    fn polygon(&self) -> Vec<(f64, f64)> {
        self.upper.iter().copied().chain(self.lower.iter().rev().copied()).collect()
    }

    /// Where a box fits: its centre, with the most room around it, and near the band's middle.
    fn room_for(&self, (w, h): (f64, f64), frame: &Frame) -> Option<(f64, f64)> {
        let places = 200;
        let xs =
            (0..=places).map(|i| frame.left + (frame.right - frame.left) * f64::from(i) / f64::from(places));
        let weight: Vec<(f64, f64)> = xs.map(|x| (x, self.height_at(x).max(0.0))).collect();
        let total: f64 = weight.iter().map(|w| w.1).sum();
        let middle = weight.iter().map(|w| w.0 * w.1).sum::<f64>() / total.max(1e-9);
        let mut best: Option<(f64, (f64, f64))> = None;
        for (x, _) in weight {
            if x - w / 2.0 < frame.left + 4.0 || x + w / 2.0 > frame.right - 4.0 {
                continue;
            }
            let ends = [x - w / 2.0, x - w / 4.0, x, x + w / 4.0, x + w / 2.0];
            let low = ends.iter().map(|x| Self::edge(&self.lower, *x)).fold(f64::MAX, f64::min);
            let high = ends.iter().map(|x| Self::edge(&self.upper, *x)).fold(f64::MIN, f64::max);
            let spare = low - high - h;
            let worth = spare.min(60.0) - 0.15 * (x - middle).abs();
            if spare > 8.0 && best.is_none_or(|(most, _)| worth > most) {
                best = Some((worth, (x, (low + high) / 2.0)));
            }
        }
        best.map(|(_, centre)| centre)
    }
}

fn draw_in(context: &Context<'_>, light: &Light, frame: &Frame) -> Drawing {
    let x = Scale::new(0.0, light.total_ma.0, (frame.left, frame.right));
    // Places over the plot depend on where the bands lie, so these come first, on a plot at 0.
    let shapes = shapes(light, frame, x);
    let mut inside: Vec<(usize, (f64, f64), f64)> = Vec::new();
    let mut hung: Vec<(usize, f64, f64)> = Vec::new();
    let small = light.total_ma.0 * 0.004;
    for (index, shape) in shapes.iter().enumerate() {
        if shape.band.drawn_ma < small && shape.band.junction.is_none() {
            continue;
        }
        let place = shape.band.junction.and_then(|_| {
            [24.0, 15.0, 12.5].into_iter().find_map(|size| {
                let w =
                    Label::at(0.0, 0.0, &context.scale.number(shape.band.drawn_ma)).size(size).bold().width();
                let unit = Label::at(0.0, 0.0, context.scale.unit).size(11.5).width();
                let name = Label::at(0.0, 0.0, &short_name(shape.band, frame)).size(name_size(size)).width();
                shape.room_for((w.max(unit).max(name) + 6.0, size + 40.0), frame).map(|c| (c, size))
            })
        });
        match place {
            Some((centre, size)) => inside.push((index, centre, size)),
            None => hung.push((index, anchor(shape, frame, &hung), 0.0)),
        }
    }
    let (rows, places) = hang(context, &shapes, frame, &mut hung);
    let row_height = if frame.slim { 17.0 } else { 20.0 };
    let top = 8.0 + row_height * rows as f64 + 8.0;
    let mut drawing = Drawing::new(frame.width, top + frame.height + 78.0);
    let foot = top + frame.height;
    paint(&mut drawing, &shapes, top, if frame.slim { 2.0 } else { 1.0 });
    let stage = Stage { context, light, frame, x, top };
    let step = grid(&mut drawing, &stage);
    labels_inside(&mut drawing, &stage, &shapes, &inside);
    unit_cell(&mut drawing, &stage, &shapes, step);
    for ((index, at, _), (row, rightward)) in hung.iter().zip(places) {
        let shape = &shapes[*index];
        let y = 8.0 + row_height * row as f64;
        let middle = top + (Shape::edge(&shape.lower, *at) + Shape::edge(&shape.upper, *at)) / 2.0;
        drawing.line("lead", (*at, y - 1.0), (*at, middle));
        drawing.dot("mk", (*at, middle), 2.0);
        let words = hung_label(context, shape.band, frame);
        let label = words.moved(at + if rightward { GAP } else { -GAP }, y + 9.0);
        drawing.text(if rightward { label } else { label.end() });
    }
    wavelengths(&mut drawing, light, x, foot);
    if light.total_ma.1 > light.total_ma.0 * 1.002 {
        goes_on(&mut drawing, frame.right + 5.0, top, frame.height);
    }
    drawing
}

fn shapes<'a>(light: &'a Light, frame: &Frame, x: Scale) -> Vec<Shape<'a>> {
    let n = light.wavelength_nm.iter().take_while(|nm| **nm <= light.range_nm.1).count();
    let mut level = vec![0.0; n];
    let edge = |level: &[f64]| -> Vec<(f64, f64)> {
        let points: Vec<(f64, f64)> = level
            .iter()
            .zip(&light.counted_ma)
            .map(|(share, counted)| (x.of(*counted), frame.height * (1.0 - share.min(1.0))))
            .collect();
        thin(&by_pixel(&points), if frame.slim { 0.6 } else { 0.35 })
    };
    let mut lower = edge(&level);
    light
        .bands
        .iter()
        .map(|band| {
            for (sum, more) in level.iter_mut().zip(&band.share) {
                *sum += more;
            }
            let upper = edge(&level);
            let shape = Shape { band, lower: lower.clone(), upper: upper.clone() };
            lower = upper;
            shape
        })
        .collect()
}

/// Points of one pixel become their mean: fringes finer than that are not seen, and would make a
/// heavy file. Both ends stay.
fn by_pixel(points: &[(f64, f64)]) -> Vec<(f64, f64)> {
    let (Some(first), Some(last)) = (points.first(), points.last()) else { return Vec::new() };
    let mut out = vec![*first];
    for run in points.chunk_by(|a, b| a.0.floor() == b.0.floor()) {
        let n = run.len() as f64;
        out.push((run.iter().map(|p| p.0).sum::<f64>() / n, run.iter().map(|p| p.1).sum::<f64>() / n));
    }
    out.push(*last);
    out
}

/// Where a leader reaches a band: thick enough, and clear of the leaders so far.
fn anchor(shape: &Shape<'_>, frame: &Frame, others: &[(usize, f64, f64)]) -> f64 {
    let candidates: Vec<(f64, f64)> = (0..=120)
        .map(|i| frame.left + 3.0 + (frame.right - frame.left - 6.0) * f64::from(i) / 120.0)
        .map(|x| (x, shape.height_at(x)))
        .collect();
    let most = candidates.iter().map(|c| c.1).fold(0.0, f64::max);
    let clearance = |x: f64| others.iter().map(|o| (o.1 - x).abs()).fold(f64::MAX, f64::min);
    let width = (frame.right - frame.left) / 14.0;
    let thick: Vec<(f64, f64)> = candidates.into_iter().filter(|c| c.1 >= 0.7 * most).collect();
    let middle = thick.get(thick.len() / 2).map_or(frame.left + 3.0, |c| c.0);
    thick
        .iter()
        .max_by(|a, b| {
            // Thick, clear of other leaders, near the middle of where it is thick.
            let worth = |c: &(f64, f64)| {
                let off = (c.0 - middle).abs() / (frame.right - frame.left);
                c.1 / most.max(1e-9) + (clearance(c.0) / width).min(1.0) - 0.5 * off
            };
            worth(a).total_cmp(&worth(b))
        })
        .map_or(frame.left + 3.0, |c| c.0)
}

/// A name is no larger than its number.
fn name_size(size: f64) -> f64 {
    size.min(15.0)
}

fn short_name(band: &Band, frame: &Frame) -> String {
    fit(&band.short, 15.0, false, if frame.slim { 90.0 } else { 160.0 })
}

fn hung_label(context: &Context<'_>, band: &Band, frame: &Frame) -> Label {
    let (size, room) = if frame.slim { (11.5, 130.0) } else { (12.5, 230.0) };
    let words = if frame.slim { &band.short } else { &band.name };
    let words =
        band.junction.map_or_else(|| fit(words, size, false, room), |_| fit(&band.short, size, false, room));
    Label::at(0.0, 0.0, &format!("{words} ")).strong(&context.scale.number(band.drawn_ma)).size(size)
}

/// Rows over the plot; labels that find no place are left to the table, smallest first.
fn hang(
    context: &Context<'_>,
    shapes: &[Shape<'_>],
    frame: &Frame,
    hung: &mut Vec<(usize, f64, f64)>,
) -> (usize, Vec<(usize, bool)>) {
    hung.sort_by(|a, b| a.1.total_cmp(&b.1));
    loop {
        let items: Vec<Hung> = hung
            .iter()
            .map(|(index, x, _)| Hung {
                x: *x,
                width: hung_label(context, shapes[*index].band, frame).width(),
            })
            .collect();
        if let Some((places, rows)) = arrange(&items, frame.width) {
            return (rows, places.into_iter().map(|p| (p.row, p.rightward)).collect());
        }
        let least = (0..hung.len())
            .min_by(|&a, &b| shapes[hung[a].0].band.drawn_ma.total_cmp(&shapes[hung[b].0].band.drawn_ma))
            .unwrap_or(0);
        hung.remove(least);
    }
}

/// Hatches are so many times as wide as usual: on a small drawing fringes would cut them to pieces.
fn paint(drawing: &mut Drawing, shapes: &[Shape<'_>], top: f64, wider: f64) {
    for shape in shapes {
        let polygon: Vec<(f64, f64)> = shape.polygon().iter().map(|p| (p.0, p.1 + top)).collect();
        drawing.polygon(&shape.band.style.class, &polygon);
        if let Some((class, hatch)) = &shape.band.style.hatch {
            drawing.path(class, &strokes(hatch.wider(wider), &polygon));
        }
    }
}

/// Lines so that each cell is a round amount; returns the width of a cell, mA/cm2.
fn grid(drawing: &mut Drawing, stage: &Stage<'_>) -> f64 {
    let Stage { context, light, frame, x, top } = *stage;
    let foot = top + frame.height;
    let step = round_step(light.total_ma.0 / 11.0);
    let y = Scale::new(0.0, 100.0, (foot, top));
    let mut cells = [20.0, 40.0, 60.0, 80.0]
        .map(|share| ((frame.left, y.of(share)), (frame.right, y.of(share))))
        .to_vec();
    let mut at = step;
    while at < light.total_ma.0 {
        cells.push(((x.of(at), top), (x.of(at), foot)));
        at += step;
    }
    drawing.lines("grid", &cells);
    let ticks: Vec<(f64, String)> = (0..=5)
        .map(|i| {
            (
                f64::from(i) * 20.0,
                if i == 5 && !frame.slim { "100 %".into() } else { fixed(f64::from(i) * 20.0, 0) },
            )
        })
        .collect();
    axis_left(drawing, y, frame.left, &ticks);
    // The counting axis.
    let base = foot + 42.0;
    let mut axis = vec![((frame.left, base), (frame.right, base))];
    let minor = step / 5.0;
    let mut count = 0;
    while f64::from(count) * minor <= light.total_ma.0 * 1.0001 {
        let at = f64::from(count) * minor;
        let major = count % 5 == 0;
        axis.push(((x.of(at), base - if major { 6.0 } else { 3.0 }), (x.of(at), base)));
        if major {
            let words = trimmed(context.scale.of(at));
            drawing
                .text_where_free([Label::at(x.of(at), base + 15.0, &words).size(11.5).class("q").middle()]);
        }
        count += 1;
    }
    drawing.lines("axis", &axis);
    let words = format!("photon current counted from the blue end, {}", context.scale.unit);
    drawing.text(Label::at(frame.width - 2.0, base + 31.0, &words).size(11.5).class("q").end());
    step
}

fn labels_inside(
    drawing: &mut Drawing,
    stage: &Stage<'_>,
    shapes: &[Shape<'_>],
    inside: &[(usize, (f64, f64), f64)],
) {
    let Stage { context, frame, top, .. } = *stage;
    for (index, (x, y), size) in inside {
        let band = shapes[*index].band;
        let junction = band.junction.unwrap_or(0);
        let y = y + top;
        let on = |label: Label| label.junction("o", junction).middle();
        drawing
            .text(on(Label::at(*x, y - size / 2.0 - 2.0, &short_name(band, frame)).size(name_size(*size))));
        drawing.text(on(Label::at(*x, y + size / 2.0 + 1.0, &context.scale.number(band.drawn_ma))
            .size(*size)
            .bold()));
        drawing.text(on(Label::at(*x, y + size / 2.0 + 18.0, context.scale.unit).size(11.5)));
    }
}

/// One cell of the grid, outlined and named, in the lowest junction that has one free.
fn unit_cell(drawing: &mut Drawing, stage: &Stage<'_>, shapes: &[Shape<'_>], step: f64) {
    let Stage { context, frame, x, top, .. } = *stage;
    let amount = trimmed(context.scale.of(step) * 0.2);
    let cell_height = frame.height / 5.0;
    for shape in shapes.iter().rev() {
        let Some(junction) = shape.band.junction else { continue };
        let columns = ((x.to / step).floor() as i64 - 1).max(0);
        for column in (0..columns).rev() {
            let (left, right) = (x.of(column as f64 * step), x.of((column + 1) as f64 * step));
            for row in (0..5).rev() {
                let (upper, lower) = (cell_height * f64::from(row), cell_height * f64::from(row + 1));
                let full = [left, (left + right) / 2.0, right].iter().all(|x| {
                    Shape::edge(&shape.upper, *x) <= upper + 0.5
                        && Shape::edge(&shape.lower, *x) >= lower - 0.5
                });
                let cell =
                    LabelBox { words: String::new(), left, right, top: upper + top, bottom: lower + top };
                if !full || drawing.labels.iter().any(|label| label.meets(&cell, 2.0)) {
                    continue;
                }
                let middle = (left + right) / 2.0;
                let on = |y: f64, words: &str| {
                    Label::at(middle, top + y, words).size(11.5).junction("o", junction).middle()
                };
                let centre = (upper + lower) / 2.0;
                let lines = [
                    [
                        on(centre - 4.0, "this area is"),
                        on(centre + 12.0, &format!("{amount} {}", context.scale.unit)).bold(),
                    ],
                    [on(centre - 4.0, &format!("{amount} mA/")), on(centre + 11.0, "cm²")],
                ];
                let unit_is_long = context.scale.unit.starts_with('A');
                let fitting = lines
                    .into_iter()
                    .take(if unit_is_long { 1 } else { 2 })
                    .find(|lines| lines.iter().all(|line| line.width() <= right - left - 4.0));
                if let Some(lines) = fitting {
                    let n = crate::report::palette::style_number(junction);
                    drawing.rect(&format!("u{n}"), (left, top + upper), (right - left, lower - upper));
                    for line in lines {
                        drawing.text(line);
                    }
                    return;
                }
            }
        }
    }
}

/// The spectrum goes on.
fn goes_on(drawing: &mut Drawing, x: f64, top: f64, height: f64) {
    let step = height / 6.0;
    let points: Vec<(f64, f64)> =
        (0..=6).map(|i| (x + if i % 2 == 0 { 0.0 } else { 4.0 }, top + step * f64::from(i))).collect();
    drawing.polyline("thin", &points);
}
