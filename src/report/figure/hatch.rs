//! Hatches: one path of strokes a shape, cut to it here.
//!
//! SVG's own `pattern` prints as a coarse bitmap in some programs, and clip paths multiply ids;
//! strokes that end where the shape ends need neither.

use std::fmt::Write as _;

use crate::report::figure::unit;

type Point = (f64, f64);

/// Strokes of one hatch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Hatch {
    /// Parallel lines: angle of the lines in degrees from the horizontal, distance.
    Lines(f64, f64),
    /// Two families of lines.
    Cross(f64),
    /// Dots in staggered rows: distance.
    Dots(f64),
    /// Plus marks in staggered rows: distance.
    Plus(f64),
    /// Zigzag rows: distance.
    Zigzag(f64),
    /// Broken diagonal lines: distance.
    Dashes(f64),
}

impl Hatch {
    /// The same with its strokes so many times as far apart.
    #[must_use]
    pub fn wider(self, times: f64) -> Self {
        match self {
            Self::Lines(angle, distance) => Self::Lines(angle, distance * times),
            Self::Cross(distance) => Self::Cross(distance * times),
            Self::Dots(distance) => Self::Dots(distance * times),
            Self::Plus(distance) => Self::Plus(distance * times),
            Self::Zigzag(distance) => Self::Zigzag(distance * times),
            Self::Dashes(distance) => Self::Dashes(distance * times),
        }
    }
}

/// The strokes of `hatch` inside the polygon `shape`, as path data; empty where nothing fits.
pub fn strokes(hatch: Hatch, shape: &[Point]) -> String {
    if shape.len() < 3 {
        return String::new();
    }
    let segments = match hatch {
        Hatch::Lines(angle, distance) => lines(shape, angle, distance),
        Hatch::Cross(distance) => {
            let mut both = lines(shape, 45.0, distance);
            both.extend(lines(shape, -45.0, distance));
            both
        }
        Hatch::Dots(distance) => {
            return grid(shape, distance, 1.2)
                .into_iter()
                .map(|(x, y)| format!("M{} {}h0", unit(x), unit(y)))
                .collect::<Vec<_>>()
                .join("");
        }
        Hatch::Plus(distance) => {
            let arm = distance / 4.0;
            grid(shape, distance, 0.0)
                .into_iter()
                .flat_map(|(x, y)| [((x - arm, y), (x + arm, y)), ((x, y - arm), (x, y + arm))])
                .flat_map(|segment| clip(segment, shape))
                .collect()
        }
        Hatch::Zigzag(distance) => zigzag(shape, distance),
        Hatch::Dashes(distance) => dashes(shape, distance),
    };
    path(&segments)
}

/// A rectangle as a polygon.
pub fn rectangle(at: Point, size: Point) -> [Point; 4] {
    [at, (at.0 + size.0, at.1), (at.0 + size.0, at.1 + size.1), (at.0, at.1 + size.1)]
}

/// Segments as path data.
pub fn path(segments: &[(Point, Point)]) -> String {
    let mut out = String::new();
    for (index, (a, b)) in segments.iter().enumerate() {
        if index > 0 && index % 8 == 0 {
            out.push('\n');
        }
        let _ = if (a.1 - b.1).abs() < 0.05 {
            write!(out, "M{} {}H{}", unit(a.0), unit(a.1), unit(b.0))
        } else if (a.0 - b.0).abs() < 0.05 {
            write!(out, "M{} {}V{}", unit(a.0), unit(a.1), unit(b.1))
        } else {
            write!(out, "M{} {}L{} {}", unit(a.0), unit(a.1), unit(b.0), unit(b.1))
        };
    }
    out
}

fn bounds(shape: &[Point]) -> (Point, Point) {
    shape.iter().fold(((f64::MAX, f64::MAX), (f64::MIN, f64::MIN)), |(low, high), p| {
        ((low.0.min(p.0), low.1.min(p.1)), (high.0.max(p.0), high.1.max(p.1)))
    })
}

/// Lines lie on a grid of the whole drawing, so that neighbouring shapes of one hatch join.
fn lines(shape: &[Point], angle: f64, distance: f64) -> Vec<(Point, Point)> {
    let (low, high) = bounds(shape);
    // Horizontal and vertical lines are centred so that a thin layer never shows one on its edge.
    let (sin, cos) = angle.to_radians().sin_cos();
    let normal = (-sin, cos);
    let along = (cos, sin);
    let corners = rectangle(low, (high.0 - low.0, high.1 - low.1));
    let reach = |d: Point| corners.map(|c| c.0 * d.0 + c.1 * d.1);
    let (from, to) = extremes(&reach(normal));
    let (start, end) = extremes(&reach(along));
    let first = if angle == 0.0 || angle == 90.0 {
        let room = to - from;
        let spare = room - (room / distance).floor() * distance;
        from + if spare < 1.0 { distance / 2.0 } else { spare / 2.0 }
    } else {
        (from / distance).ceil() * distance
    };
    let mut out = Vec::new();
    let mut step = 0;
    loop {
        let offset = first + f64::from(step) * distance;
        if offset >= to {
            break;
        }
        let a = (normal.0 * offset + along.0 * (start - 1.0), normal.1 * offset + along.1 * (start - 1.0));
        let b = (normal.0 * offset + along.0 * (end + 1.0), normal.1 * offset + along.1 * (end + 1.0));
        out.extend(clip((a, b), shape));
        step += 1;
    }
    out
}

fn extremes(values: &[f64]) -> (f64, f64) {
    values.iter().fold((f64::MAX, f64::MIN), |(low, high), v| (low.min(*v), high.max(*v)))
}

/// The parts of a segment inside a polygon (even–odd), shorter than half a unit left out.
fn clip((a, b): (Point, Point), shape: &[Point]) -> Vec<(Point, Point)> {
    let (dx, dy) = (b.0 - a.0, b.1 - a.1);
    let length = dx.hypot(dy);
    let mut cuts = vec![0.0, 1.0];
    let (low, high) = ((a.0.min(b.0), a.1.min(b.1)), (a.0.max(b.0), a.1.max(b.1)));
    for (index, p) in shape.iter().enumerate() {
        let q = shape[(index + 1) % shape.len()];
        if p.0.max(q.0) < low.0 || p.0.min(q.0) > high.0 || p.1.max(q.1) < low.1 || p.1.min(q.1) > high.1 {
            continue;
        }
        let (ex, ey) = (q.0 - p.0, q.1 - p.1);
        let cross = dx * ey - dy * ex;
        if cross.abs() < 1e-12 {
            continue;
        }
        let (fx, fy) = (p.0 - a.0, p.1 - a.1);
        let t = (fx * ey - fy * ex) / cross;
        let u = (fx * dy - fy * dx) / cross;
        if t > 0.0 && t < 1.0 && (0.0..1.0).contains(&u) {
            cuts.push(t);
        }
    }
    cuts.sort_by(f64::total_cmp);
    cuts.windows(2)
        .filter(|pair| (pair[1] - pair[0]) * length >= 0.5)
        .filter(|pair| {
            let middle = (pair[0] + pair[1]) / 2.0;
            inside((a.0 + dx * middle, a.1 + dy * middle), shape)
        })
        .map(|pair| ((a.0 + dx * pair[0], a.1 + dy * pair[0]), (a.0 + dx * pair[1], a.1 + dy * pair[1])))
        .collect()
}

/// Even–odd.
fn inside(p: Point, shape: &[Point]) -> bool {
    let mut odd = false;
    for (index, a) in shape.iter().enumerate() {
        let b = shape[(index + 1) % shape.len()];
        if (a.1 > p.1) != (b.1 > p.1) && p.0 < (b.0 - a.0) * (p.1 - a.1) / (b.1 - a.1) + a.0 {
            odd = !odd;
        }
    }
    odd
}

/// Where a horizontal line runs inside the shape, from left to right.
fn runs(shape: &[Point], y: f64) -> Vec<(f64, f64)> {
    let mut cuts: Vec<f64> = Vec::new();
    for (index, a) in shape.iter().enumerate() {
        let b = shape[(index + 1) % shape.len()];
        if (a.1 > y) != (b.1 > y) {
            cuts.push((b.0 - a.0) * (y - a.1) / (b.1 - a.1) + a.0);
        }
    }
    cuts.sort_by(f64::total_cmp);
    cuts.chunks_exact(2).map(|pair| (pair[0], pair[1])).collect()
}

fn within(runs: &[(f64, f64)], from: f64, to: f64) -> bool {
    runs.iter().any(|run| run.0 <= from && to <= run.1)
}

/// Staggered grid points that lie at least `margin` inside the shape.
fn grid(shape: &[Point], distance: f64, margin: f64) -> Vec<Point> {
    let (low, high) = bounds(shape);
    let row_height = distance / 2.0;
    let first_row = (low.1 / row_height).ceil() as i64;
    let last_row = (high.1 / row_height).floor() as i64;
    let mut out = Vec::new();
    for row in first_row..=last_row {
        let y = row as f64 * row_height;
        let lines = [runs(shape, y - margin), runs(shape, y), runs(shape, y + margin)];
        let shift = if row.rem_euclid(2) == 0 { 0.0 } else { distance / 2.0 };
        let first = ((low.0 - shift) / distance).ceil() as i64;
        let last = ((high.0 - shift) / distance).floor() as i64;
        for column in first..=last {
            let x = column as f64 * distance + shift;
            let wide = within(&lines[1], x - margin, x + margin);
            if wide && within(&lines[0], x, x) && within(&lines[2], x, x) {
                out.push((x, y));
            }
        }
    }
    out
}

/// Segments of one row between two heights, cut to the shape. Those that meet the shape at none of
/// three heights are passed over without a closer look.
fn row_of(
    shape: &[Point],
    (top, bottom): (f64, f64),
    segments: impl Iterator<Item = (Point, Point)>,
) -> Vec<(Point, Point)> {
    let levels = [0.1, 0.5, 0.9].map(|share| runs(shape, top + (bottom - top) * share));
    segments
        .filter(|(a, b)| {
            let (from, to) = (a.0.min(b.0), a.0.max(b.0));
            levels.iter().flatten().any(|run| run.0 < to && from < run.1)
        })
        .flat_map(|segment| clip(segment, shape))
        .collect()
}

fn zigzag(shape: &[Point], distance: f64) -> Vec<(Point, Point)> {
    let (low, high) = bounds(shape);
    let mut out = Vec::new();
    let mut y = (low.1 / distance).floor() * distance;
    let first = (low.0 / distance).floor() as i64;
    let last = (high.0 / distance).ceil() as i64;
    while y < high.1 {
        let foot = y + distance * 0.55;
        let teeth = (first..last).map(|column| {
            let (left, right) = (column as f64 * distance, (column + 1) as f64 * distance);
            if column.rem_euclid(2) == 0 { ((left, y), (right, foot)) } else { ((left, foot), (right, y)) }
        });
        out.extend(row_of(shape, (y, foot), teeth));
        y += distance;
    }
    out
}

fn dashes(shape: &[Point], distance: f64) -> Vec<(Point, Point)> {
    let (low, high) = bounds(shape);
    let dash = distance * 0.72;
    let mut out = Vec::new();
    let first_row = (low.1 / distance).floor() as i64 - 1;
    let last_row = (high.1 / distance).ceil() as i64;
    let first = (low.0 / (2.0 * distance)).floor() as i64 - 1;
    let last = (high.0 / (2.0 * distance)).ceil() as i64;
    for row in first_row..=last_row {
        let shift = if row.rem_euclid(2) == 0 { 0.0 } else { distance };
        let y = (row + 1) as f64 * distance;
        let strokes = (first..last).map(|column| {
            let x = column as f64 * 2.0 * distance + shift;
            ((x, y), (x + dash, y - dash))
        });
        out.extend(row_of(shape, (y - dash, y), strokes));
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Pulls every coordinate pair out of path data.
    fn points(data: &str) -> Vec<Point> {
        let mut out = Vec::new();
        let mut last = (0.0, 0.0);
        let spaced = data.replace('\n', "");
        let mut rest = spaced.as_str();
        while let Some(command) = rest.chars().next() {
            let end = rest[1..].find(|c: char| c.is_ascii_alphabetic()).map_or(rest.len(), |at| at + 1);
            let numbers: Vec<f64> = rest[1..end].split(' ').filter_map(|n| n.parse().ok()).collect();
            match command {
                'M' | 'L' => last = (numbers[0], numbers[1]),
                'H' => last.0 = numbers[0],
                'V' => last.1 = numbers[0],
                _ => {}
            }
            out.push(last);
            rest = &rest[end..];
        }
        out
    }

    #[test]
    fn no_stroke_leaves_its_shape() {
        let shape = rectangle((10.0, 20.0), (80.0, 17.0));
        for hatch in [
            Hatch::Lines(0.0, 4.0),
            Hatch::Lines(90.0, 4.0),
            Hatch::Lines(-45.0, 5.0),
            Hatch::Cross(6.0),
            Hatch::Dots(8.0),
            Hatch::Plus(8.0),
            Hatch::Zigzag(5.0),
            Hatch::Dashes(7.0),
        ] {
            let data = strokes(hatch, &shape);
            assert!(!data.is_empty(), "{hatch:?}");
            for (x, y) in points(&data) {
                assert!((9.9..=90.1).contains(&x) && (19.9..=37.1).contains(&y), "{hatch:?}: {x} {y}");
            }
        }
    }

    #[test]
    fn a_triangle_cuts_lines_at_its_sides() {
        let data = strokes(Hatch::Lines(0.0, 10.0), &[(0.0, 0.0), (100.0, 0.0), (0.0, 100.0)]);
        for pair in points(&data).chunks(2) {
            assert!((pair[1].0 + pair[1].1 - 100.0).abs() < 0.2 || pair[1].0.abs() < 0.2, "{pair:?}");
        }
    }
}
