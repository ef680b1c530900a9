//! Axes, ticks and curves.

use crate::report::figure::{Drawing, Label};

type Point = (f64, f64);

/// A linear scale from values to units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Scale {
    /// Value at `at.0`.
    pub from: f64,
    /// Value at `at.1`.
    pub to: f64,
    /// Units.
    pub at: (f64, f64),
}

impl Scale {
    /// Values `from..to` over units `at`.
    pub fn new(from: f64, to: f64, at: (f64, f64)) -> Self {
        let to = if to == from { from + 1.0 } else { to };
        Self { from, to, at }
    }

    /// Units of a value.
    pub fn of(self, value: f64) -> f64 {
        self.at.0 + (value - self.from) / (self.to - self.from) * (self.at.1 - self.at.0)
    }

    /// Value of units.
    pub fn back(self, unit: f64) -> f64 {
        self.from + (unit - self.at.0) / (self.at.1 - self.at.0) * (self.to - self.from)
    }

    /// Round values inside the scale, about `wanted` of them, with the decimals they need.
    pub fn ticks(self, wanted: usize) -> (Vec<f64>, usize) {
        let (low, high) = (self.from.min(self.to), self.from.max(self.to));
        let step = round_step((high - low) / wanted.max(1) as f64);
        let first = (low / step - 1e-9).ceil() as i64;
        let last = (high / step + 1e-9).floor() as i64;
        let decimals = (-step.log10() - 1e-9).ceil().max(0.0) as usize;
        ((first..=last).map(|i| i as f64 * step).collect(), decimals)
    }
}

/// 1, 2 or 5 times a power of ten, at least `rough`.
pub fn round_step(rough: f64) -> f64 {
    if !(rough > 0.0 && rough.is_finite()) {
        return 1.0;
    }
    let power = 10f64.powf(rough.log10().floor());
    [1.0, 2.0, 5.0].into_iter().map(|m| m * power).find(|step| *step >= rough * 0.999).unwrap_or(10.0 * power)
}

/// A curve without the points that a straight line replaces to within `tolerance` units
/// (Douglas and Peucker, Cartographica 10, 112 (1973)).
pub fn thin(points: &[Point], tolerance: f64) -> Vec<Point> {
    if points.len() < 3 {
        return points.to_vec();
    }
    let mut keep = vec![false; points.len()];
    keep[0] = true;
    keep[points.len() - 1] = true;
    let mut open = vec![(0, points.len() - 1)];
    while let Some((from, to)) = open.pop() {
        let (a, b) = (points[from], points[to]);
        let (dx, dy) = (b.0 - a.0, b.1 - a.1);
        let length = dx.hypot(dy);
        // Twice the area over the base; where the ends coincide, the distance from them.
        let offset = |p: Point| {
            if length < 1e-12 {
                (p.0 - a.0).hypot(p.1 - a.1)
            } else {
                ((p.0 - a.0) * dy - (p.1 - a.1) * dx).abs() / length
            }
        };
        let mut far = (from, tolerance);
        for (index, point) in points.iter().enumerate().take(to).skip(from + 1) {
            let off = offset(*point);
            if off > far.1 {
                far = (index, off);
            }
        }
        if far.0 > from {
            keep[far.0] = true;
            open.push((from, far.0));
            open.push((far.0, to));
        }
    }
    points.iter().zip(keep).filter(|(_, kept)| *kept).map(|(point, _)| *point).collect()
}

/// The runs of a curve inside the box `low..high`, cut at its edges.
pub fn cut(points: &[Point], low: Point, high: Point) -> Vec<Vec<Point>> {
    let mut runs: Vec<Vec<Point>> = Vec::new();
    let mut open = false;
    for pair in points.windows(2) {
        match cut_segment(pair[0], pair[1], low, high) {
            Some((a, b)) => {
                match runs.last_mut() {
                    Some(run) if open && run.last() == Some(&a) => run.push(b),
                    _ => runs.push(vec![a, b]),
                }
                open = b == pair[1];
            }
            None => open = false,
        }
    }
    runs
}

/// Whether a curve has a part inside the box `low..high`.
pub fn meets(points: &[Point], low: Point, high: Point) -> bool {
    points.windows(2).any(|pair| {
        let (a, b) = (pair[0], pair[1]);
        // Most segments lie wholly on one side.
        let beside =
            a.0.max(b.0) < low.0 || a.0.min(b.0) > high.0 || a.1.max(b.1) < low.1 || a.1.min(b.1) > high.1;
        !beside && cut_segment(a, b, low, high).is_some()
    })
}

/// Liang and Barsky, ACM Trans. Graph. 3, 1 (1984).
fn cut_segment(a: Point, b: Point, low: Point, high: Point) -> Option<(Point, Point)> {
    let (dx, dy) = (b.0 - a.0, b.1 - a.1);
    let (mut t0, mut t1) = (0.0_f64, 1.0_f64);
    for (p, q) in [(-dx, a.0 - low.0), (dx, high.0 - a.0), (-dy, a.1 - low.1), (dy, high.1 - a.1)] {
        if p == 0.0 {
            if q < 0.0 {
                return None;
            }
        } else if p < 0.0 {
            t0 = t0.max(q / p);
        } else {
            t1 = t1.min(q / p);
        }
    }
    if t0 > t1 {
        return None;
    }
    let at = |t: f64| (a.0 + dx * t, a.1 + dy * t);
    Some((if t0 == 0.0 { a } else { at(t0) }, if t1 == 1.0 { b } else { at(t1) }))
}

/// The value at `x` of a table with ascending `xs`, linear between, held outside.
pub fn interpolate(xs: &[f64], ys: &[f64], x: f64) -> Option<f64> {
    let n = xs.len().min(ys.len());
    if n == 0 {
        return None;
    }
    let after = xs[..n].partition_point(|v| *v < x);
    if after == 0 {
        return Some(ys[0]);
    }
    if after >= n {
        return Some(ys[n - 1]);
    }
    let (x0, x1) = (xs[after - 1], xs[after]);
    let share = if x1 > x0 { (x - x0) / (x1 - x0) } else { 0.0 };
    Some(ys[after - 1] + share * (ys[after] - ys[after - 1]))
}

/// An axis beneath a plot: spans its ticks, ticks outward, labels under them.
pub fn axis_below(drawing: &mut Drawing, scale: Scale, y: f64, ticks: &[(f64, String)]) {
    let xs: Vec<f64> = ticks.iter().map(|(value, _)| scale.of(*value)).collect();
    let outward = xs.iter().map(|x| ((*x, y), (*x, y + 4.0)));
    let segments: Vec<_> = std::iter::once(((scale.at.0, y), (scale.at.1, y))).chain(outward).collect();
    drawing.lines("axis", &segments);
    for (x, (_, words)) in xs.iter().zip(ticks) {
        let half = crate::report::width::width(words, 11.5, false) / 2.0;
        let middle = x.clamp(half, (drawing.width - half).max(half));
        drawing.text_where_free([Label::at(middle, y + 17.0, words).size(11.5).class("q").middle()]);
    }
}

/// An axis left of a plot: ticks outward, labels left of them.
pub fn axis_left(drawing: &mut Drawing, scale: Scale, x: f64, ticks: &[(f64, String)]) {
    let outward = ticks.iter().map(|(value, _)| ((x - 4.0, scale.of(*value)), (x, scale.of(*value))));
    let segments: Vec<_> = std::iter::once(((x, scale.at.0), (x, scale.at.1))).chain(outward).collect();
    drawing.lines("axis", &segments);
    for (value, words) in ticks {
        let y = scale.of(*value);
        drawing.text_where_free([Label::at(x - 7.0, y + 4.0, words).size(11.5).class("q").end()]);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round_and_inside() {
        let (ticks, decimals) = Scale::new(13.2, 14.4, (100.0, 0.0)).ticks(4);
        assert_eq!(decimals, 1);
        assert!(ticks.len() >= 2 && ticks.iter().all(|t| (13.19..=14.41).contains(t)), "{ticks:?}");
        assert_eq!(round_step(0.3), 0.5);
        assert_eq!(round_step(7.0), 10.0);
    }

    #[test]
    fn thinning_keeps_the_corner_and_drops_the_straight() {
        let line: Vec<Point> =
            (0..=10).map(|i| (f64::from(i), if i <= 5 { 0.0 } else { f64::from(i - 5) })).collect();
        assert_eq!(thin(&line, 0.01), [(0.0, 0.0), (5.0, 0.0), (10.0, 5.0)]);
    }

    #[test]
    fn a_curve_is_cut_at_the_frame() {
        let runs =
            cut(&[(-10.0, 5.0), (5.0, 5.0), (5.0, 20.0), (8.0, 20.0), (8.0, 0.0)], (0.0, 0.0), (10.0, 10.0));
        assert_eq!(runs, vec![vec![(0.0, 5.0), (5.0, 5.0), (5.0, 10.0)], vec![(8.0, 10.0), (8.0, 0.0)]]);
    }

    #[test]
    fn between_points_a_table_is_linear() {
        assert_eq!(interpolate(&[0.0, 2.0], &[1.0, 3.0], 1.0), Some(2.0));
        assert_eq!(interpolate(&[0.0, 2.0], &[1.0, 3.0], 9.0), Some(3.0));
        assert_eq!(interpolate(&[], &[], 9.0), None);
    }
}
