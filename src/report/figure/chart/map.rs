//! A figure of merit over two quantities: bands of one colour from light to dark, with a contour
//! and its value between them.

use std::fmt::Write as _;

use super::{Axis, HEIGHT, LEFT, TOP, WIDTH};
use crate::report::figure::plot::{Scale, axis_below, axis_left, round_step};
use crate::report::figure::{Drawing, Label, unit};
use crate::report::number::{fixed, trimmed};
use crate::report::width::fit;
use crate::results::ChartAxisResult;

type Point = (f64, f64);

/// Values on a grid; both axes ascend.
#[derive(Clone, Debug)]
pub struct Grid {
    /// Across.
    pub x: ChartAxisResult,
    /// Up.
    pub y: ChartAxisResult,
    /// By `y`, then by `x`; NaN where there is no value.
    pub values: Vec<Vec<f64>>,
}

impl Grid {
    /// Lowest and highest value.
    pub fn range(&self) -> Option<(f64, f64)> {
        let all = self.values.iter().flatten().filter(|v| v.is_finite());
        let range = all.fold((f64::MAX, f64::MIN), |e, v| (e.0.min(*v), e.1.max(*v)));
        (range.0 <= range.1).then_some(range)
    }

    /// Where it is highest: across, up, value.
    pub fn peak(&self) -> Option<(f64, f64, f64)> {
        let mut best: Option<(f64, f64, f64)> = None;
        for (row, y) in self.values.iter().zip(&self.y.values) {
            for (value, x) in row.iter().zip(&self.x.values) {
                if value.is_finite() && best.is_none_or(|(_, _, most)| *value > most) {
                    best = Some((*x, *y, *value));
                }
            }
        }
        best
    }

    /// Round levels, and the decimals they need: at most seven.
    pub fn levels(&self) -> (Vec<f64>, usize) {
        let Some((low, high)) = self.range() else { return (Vec::new(), 0) };
        if high - low <= 1e-9 * high.abs() {
            return (Vec::new(), 0);
        }
        let step = round_step((high - low) / 7.0);
        let (ticks, decimals) = Scale::new(low, high, (0.0, 1.0)).ticks(7);
        (ticks.into_iter().filter(|level| *level > low + 0.02 * step && *level < high).collect(), decimals)
    }
}

/// The drawing; `metric` names what the levels are.
pub fn draw(grid: &Grid, metric: &str) -> Drawing {
    let foot = TOP + HEIGHT;
    let mut drawing = Drawing::new(WIDTH, foot + 42.0);
    let right = WIDTH - 14.0;
    let (x, y) = (Axis::new(&grid.x, (LEFT, right)), Axis::new(&grid.y, (foot, TOP)));
    let (levels, decimals) = grid.levels();
    drawing.text(Label::at(0.0, TOP - 14.0, &fit(metric, 11.5, false, WIDTH)).size(11.5).bold());
    drawing.rect("z0", (LEFT, TOP), (right - LEFT, HEIGHT));
    let mut contours = Vec::new();
    for (index, level) in levels.iter().enumerate() {
        let (area, contour) = above(grid, (x, y), *level);
        drawing.path(&format!("z{}", index + 1), &area);
        contours.push(contour);
    }
    for contour in &contours {
        drawing.lines("thin", contour);
    }
    let (scale, ticks) = x.ticks(6);
    axis_below(&mut drawing, scale, foot, &ticks);
    let (scale, ticks) = y.ticks(5);
    axis_left(&mut drawing, scale, LEFT, &ticks);
    let words = fit(&Axis::words(&grid.x), 11.5, false, WIDTH / 2.0 - 10.0);
    drawing.text(Label::at(right, foot + 36.0, &words).size(11.5).class("q").end());
    let words = format!("↑ {}", fit(&Axis::words(&grid.y), 11.5, false, WIDTH / 2.0 - 24.0));
    drawing.text(Label::at(0.0, foot + 36.0, &words).size(11.5).class("q"));
    if let Some((px, py, value)) = grid.peak() {
        let at = (x.of(px), y.of(py));
        drawing.dot("mk", at, 3.4);
        let words = trimmed(value);
        let label = |dx: f64, dy: f64| Label::at(at.0 + dx, at.1 + dy, &words).bold().halo();
        let places = [label(8.0, -6.0), label(8.0, 16.0), label(-8.0, -6.0).end(), label(-8.0, 16.0).end()];
        drawing.text_where_free(places.into_iter().filter(inside));
    }
    for (level, contour) in levels.iter().zip(&contours) {
        // Along the contour from its middle outwards: the first place with room.
        let n = contour.len();
        let order = (0..n).map(|i| if i % 2 == 0 { n / 2 + i / 2 } else { n / 2 - i.div_ceil(2) });
        let labels = order.filter_map(|i| contour.get(i)).map(|(a, b)| {
            let at = ((a.0 + b.0) / 2.0, (a.1 + b.1) / 2.0 + 4.0);
            Label::at(at.0, at.1, &fixed(*level, decimals)).size(11.5).middle().halo()
        });
        drawing.text_where_free(labels.filter(inside));
    }
    drawing
}

fn inside(label: &Label) -> bool {
    let b = label.bounds();
    b.left > LEFT + 3.0 && b.right < WIDTH - 16.0 && b.top > TOP + 1.0 && b.bottom < TOP + HEIGHT - 1.0
}

/// The area at or above a level as one path, cells that are wholly above joined along each row,
/// and its contour; linear between grid points along the edges of each cell.
fn above(grid: &Grid, (x, y): (Axis, Axis), level: f64) -> (String, Vec<(Point, Point)>) {
    let xs: Vec<f64> = grid.x.values.iter().map(|v| x.of(*v)).collect();
    let ys: Vec<f64> = grid.y.values.iter().map(|v| y.of(*v)).collect();
    let (mut area, mut contour) = (String::new(), Vec::new());
    for row in 1..ys.len() {
        let mut whole_from: Option<usize> = None;
        for column in 1..xs.len() {
            let corners = [(row - 1, column - 1), (row - 1, column), (row, column), (row, column - 1)];
            let values = corners.map(|(r, c)| grid.values[r][c]);
            let sound = values.iter().all(|v| v.is_finite());
            if sound && values.iter().all(|v| *v >= level) {
                whole_from.get_or_insert(column - 1);
                continue;
            }
            if let Some(from) = whole_from.take() {
                rectangle(&mut area, (xs[from], xs[column - 1]), (ys[row - 1], ys[row]));
            }
            if !sound || values.iter().all(|v| *v < level) {
                continue;
            }
            let places = corners.map(|(r, c)| (xs[c], ys[r]));
            let (outline, crossings) = part(places, values, level);
            polygon(&mut area, &outline);
            contour.extend(crossings.chunks_exact(2).map(|pair| (pair[0], pair[1])));
        }
        if let Some(from) = whole_from {
            rectangle(&mut area, (xs[from], xs[xs.len() - 1]), (ys[row - 1], ys[row]));
        }
    }
    (area, contour)
}

/// The part of a cell above a level, and where the level crosses the cell's edges.
fn part(places: [Point; 4], values: [f64; 4], level: f64) -> (Vec<Point>, Vec<Point>) {
    let (mut outline, mut crossings) = (Vec::new(), Vec::new());
    for i in 0..4 {
        let j = (i + 1) % 4;
        if values[i] >= level {
            outline.push(places[i]);
        }
        if (values[i] >= level) != (values[j] >= level) {
            let share = (level - values[i]) / (values[j] - values[i]);
            let (a, b) = (places[i], places[j]);
            let crossing = (a.0 + share * (b.0 - a.0), a.1 + share * (b.1 - a.1));
            outline.push(crossing);
            crossings.push(crossing);
        }
    }
    (outline, crossings)
}

fn rectangle(area: &mut String, (from, to): (f64, f64), (low, high): (f64, f64)) {
    let _ = write!(area, "M{} {}H{}V{}H{}Z", unit(from), unit(low), unit(to), unit(high), unit(from));
}

fn polygon(area: &mut String, outline: &[Point]) {
    for (index, (x, y)) in outline.iter().enumerate() {
        let _ = write!(area, "{}{} {}", if index == 0 { "M" } else { "L" }, unit(*x), unit(*y));
    }
    area.push('Z');
}

#[cfg(test)]
mod tests {
    use super::*;

    fn axis(path: &str, values: &[f64]) -> ChartAxisResult {
        ChartAxisResult { path: path.into(), unit: "1".into(), values: values.to_vec() }
    }

    /// `f = x + y`: the contour of 1 is the straight line between (1, 0) and (0, 1).
    #[test]
    fn a_plane_has_a_straight_contour() {
        let grid = Grid {
            x: axis("a", &[0.0, 0.5, 1.0]),
            y: axis("b", &[0.0, 0.5, 1.0]),
            values: vec![vec![0.0, 0.5, 1.0], vec![0.5, 1.0, 1.5], vec![1.0, 1.5, 2.0]],
        };
        let (x, y) = (Axis::new(&grid.x, (0.0, 100.0)), Axis::new(&grid.y, (100.0, 0.0)));
        let (area, contour) = above(&grid, (x, y), 0.75);
        assert!(!area.is_empty());
        for (a, b) in contour {
            for (px, py) in [a, b] {
                assert!((px - (py - 25.0)).abs() < 1e-9, "({px}, {py}) is off the line");
            }
        }
        assert_eq!(grid.peak(), Some((1.0, 1.0, 2.0)));
        let (levels, _) = grid.levels();
        assert!(levels.len() <= 8 && levels.iter().all(|l| (0.0..2.0).contains(l)), "{levels:?}");
    }

    #[test]
    fn cells_without_a_value_stay_empty() {
        let grid = Grid {
            x: axis("a", &[0.0, 1.0]),
            y: axis("b", &[0.0, 1.0]),
            values: vec![vec![f64::NAN, 1.0], vec![2.0, 3.0]],
        };
        let (x, y) = (Axis::new(&grid.x, (0.0, 100.0)), Axis::new(&grid.y, (100.0, 0.0)));
        let (area, contour) = above(&grid, (x, y), 1.5);
        assert!(area.is_empty() && contour.is_empty());
    }
}
