//! Gap against mismatch: this wafer's lattice at zero in the middle, the layers as numbered marks,
//! families as curves, broken where the gap is indirect.
//!
//! The whole range stands left, the middle magnified right, over one axis of gaps. A whisker spans
//! the mismatch that a layer of this thickness can bear.

use crate::report::context::{Context, Row};
use crate::report::figure::plot::{Scale, axis_below, axis_left, cut, meets, thin};
use crate::report::figure::staircase::spread;
use crate::report::figure::{Drawing, Label, SLIM, WIDE};
use crate::report::number::{fixed, ranges, signed};
use crate::report::palette::style_number;
use crate::report::text::visible;
use crate::report::width::fit;
use crate::results::GapMap;

type Point = (f64, f64);

/// Layers of one place on the map.
#[derive(Clone, Debug)]
pub struct Mark {
    /// Numbers on the sheet, ascending.
    pub numbers: Vec<usize>,
    /// As resolved.
    pub material: String,
    /// Against the wafer.
    pub mismatch: f64,
    /// eV.
    pub gap_ev: f64,
    /// The least of its layers, the thickest one's.
    pub critical: Option<f64>,
    /// The junction whose current one of them makes.
    pub junction: Option<usize>,
    /// Whether layers of materials much like this one are among them.
    pub alike: bool,
}

/// Layers with one place, widest gap first.
pub fn marks(context: &Context<'_>, map: &GapMap) -> Vec<Mark> {
    let rows: Vec<Row<'_>> = context.layers().collect();
    let mut out: Vec<Mark> = Vec::new();
    for layer in &map.layers {
        let Some(row) = rows.iter().find(|row| row.result.name == layer.name) else { continue };
        let junction = row.junction().filter(|_| row.makes_current());
        let known = out.iter_mut().find(|mark| {
            mark.material == row.material()
                && (mark.mismatch - layer.mismatch).abs() < 1e-6
                && (mark.gap_ev - layer.gap_ev).abs() < 1e-4
        });
        match known {
            Some(mark) => {
                mark.numbers.push(row.number());
                mark.critical = match (mark.critical, layer.critical_mismatch) {
                    (Some(a), Some(b)) => Some(a.min(b)),
                    (a, b) => a.or(b),
                };
                mark.junction = mark.junction.or(junction);
            }
            None => out.push(Mark {
                numbers: vec![row.number()],
                material: row.material().to_string(),
                mismatch: layer.mismatch,
                gap_ev: layer.gap_ev,
                critical: layer.critical_mismatch,
                junction,
                alike: false,
            }),
        }
    }
    out.sort_by(|a, b| b.gap_ev.total_cmp(&a.gap_ev));
    if out.len() > LABELLED { merged(out) } else { out }
}

/// Marks that the eye cannot tell apart become one, of the first material; both widest gap first.
fn merged(marks: Vec<Mark>) -> Vec<Mark> {
    let mut out: Vec<Mark> = Vec::new();
    for mark in marks {
        let near = |other: &Mark| {
            (other.gap_ev - mark.gap_ev).abs() < 0.03 && (other.mismatch - mark.mismatch).abs() < 1e-4
        };
        match out.iter_mut().find(|other| near(other)) {
            Some(other) => {
                other.numbers.extend(&mark.numbers);
                other.numbers.sort_unstable();
                other.alike |= other.material != mark.material;
                other.critical = match (other.critical, mark.critical) {
                    (Some(a), Some(b)) => Some(a.min(b)),
                    (a, b) => a.or(b),
                };
                other.junction = other.junction.or(mark.junction);
            }
            None => out.push(mark),
        }
    }
    out
}

/// Both drawings.
pub fn draw(map: &GapMap, marks: &[Mark]) -> (Drawing, Drawing) {
    (draw_in(map, marks, false), draw_in(map, marks, true))
}

/// Half of what the magnified panel spans: round, wide enough for what lies near the middle.
pub fn magnified(marks: &[Mark]) -> f64 {
    let near = marks.iter().map(|mark| mark.mismatch.abs()).filter(|m| *m <= 0.008).fold(0.0, f64::max);
    [0.001, 0.002, 0.005].into_iter().find(|half| near <= 0.9 * half).unwrap_or(0.01)
}

/// Marks with a label of their own at most.
const LABELLED: usize = 16;
const LINE: f64 = 17.0;

fn draw_in(map: &GapMap, marks: &[Mark], slim: bool) -> Drawing {
    let width = if slim { SLIM } else { WIDE };
    let labelled: Vec<&Mark> = labelled(marks);
    let two_lines = labelled.len() <= 10;
    let needed = labelled.len() as f64 * LINE * if two_lines { 2.0 } else { 1.0 } + 10.0;
    let height = if slim { 240.0 } else { needed.max(300.0) };
    let top = 30.0;
    let left = if slim { 34.0 } else { 40.0 };
    let (gap_low, gap_high) = gap_range(map, marks);
    let whole_y = Scale::new(gap_low, gap_high, (top + height, top));
    let whole_x = whole_range(map, marks, (left + 8.0, if slim { SLIM - 14.0 } else { 420.0 }));
    let mut drawing = Drawing::new(width, 0.0);
    let head = |x: f64, y: f64, strong: &str, words: &str| {
        Label::at(x, y, "").strong(strong).and(&format!("  {words}"))
    };
    drawing.text(Label::at(left - 7.0, top - 12.0, "eV").size(11.5).class("q").end());
    drawing.text(head(left, top - 12.0, "families", "whole range"));
    let half = magnified(marks);
    let middle = (whole_x.of(-half), whole_x.of(half));
    drawing.rect("wash", (middle.0, top), ((middle.1 - middle.0).max(4.0), height));
    gaps_axis(&mut drawing, whole_y, left);
    panel(&mut drawing, map, marks, (whole_x, whole_y));
    percent_axis(&mut drawing, whole_x, top + height, if slim { 5 } else { 9 });
    names(&mut drawing, map, (whole_x, whole_y));

    let second_top = if slim { top + height + 62.0 } else { top };
    let second_height = if slim { needed.max(220.0) } else { height };
    let at = if slim { (left + 8.0, left + 110.0) } else { (466.0, 586.0) };
    let x = Scale::new(-half, half, at);
    let y = Scale::new(gap_low, gap_high, (second_top + second_height, second_top));
    drawing.rect("wash", (x.at.0, second_top), (x.at.1 - x.at.0, second_height));
    drawing.text(head(x.at.0, second_top - 12.0, "this wafer", "the middle, magnified"));
    if slim {
        gaps_axis(&mut drawing, y, left);
    }
    whiskers(&mut drawing, marks, (x, y));
    panel(&mut drawing, map, marks, (x, y));
    percent_axis(&mut drawing, x, second_top + second_height, 2);
    labels(&mut drawing, &labelled, (x, y), two_lines);
    drawing.height = second_top + second_height + 26.0;
    drawing
}

/// What makes current first; the rest as far as there is room, widest gap first.
fn labelled(marks: &[Mark]) -> Vec<&Mark> {
    let mut order: Vec<&Mark> = marks.iter().collect();
    order.sort_by_key(|mark| mark.junction.is_none());
    order.truncate(LABELLED);
    order.sort_by(|a, b| b.gap_ev.total_cmp(&a.gap_ev));
    order
}

fn gaps_axis(drawing: &mut Drawing, y: Scale, left: f64) {
    let (ticks, decimals) = y.ticks(7);
    let ticks: Vec<(f64, String)> = ticks.into_iter().map(|v| (v, fixed(v, decimals.max(1)))).collect();
    axis_left(drawing, y, left, &ticks);
}

fn percent_axis(drawing: &mut Drawing, x: Scale, foot: f64, wanted: usize) {
    let in_percent = Scale::new(x.from * 100.0, x.to * 100.0, x.at);
    let (ticks, decimals) = in_percent.ticks(wanted);
    let last = ticks.last().copied();
    let words = |v: f64| if v == 0.0 { "0".to_string() } else { signed(v, decimals) };
    let words = |v: f64| if Some(v) == last { format!("{}\u{a0}%", words(v)) } else { words(v) };
    let ticks: Vec<(f64, String)> = ticks.iter().map(|v| (*v, words(*v))).collect();
    axis_below(drawing, in_percent, foot, &ticks);
}

fn gap_range(map: &GapMap, marks: &[Mark]) -> (f64, f64) {
    let near = map.compounds.iter().filter(|end| end.mismatch.abs() < 0.05).map(|end| end.gap_ev);
    let all = marks.iter().map(|mark| mark.gap_ev).chain(near.filter(|gap| *gap > 0.3));
    let (low, high) = all.fold((f64::MAX, f64::MIN), |e, gap| (e.0.min(gap), e.1.max(gap)));
    let room = ((high - low) * 0.06).max(0.08);
    (((low - room) * 10.0).floor() / 10.0, ((high + room) * 10.0).ceil() / 10.0)
}

fn whole_range(map: &GapMap, marks: &[Mark], at: (f64, f64)) -> Scale {
    let near = map.compounds.iter().map(|end| end.mismatch).filter(|m| m.abs() < 0.05);
    let all = marks.iter().map(|mark| mark.mismatch).chain(near).chain([-0.005, 0.005]);
    let (low, high) = all.fold((f64::MAX, f64::MIN), |e, m| (e.0.min(m), e.1.max(m)));
    let room = (high - low) * 0.06;
    Scale::new(low - room, high + room, at)
}

/// Zero, families, marks.
fn panel(drawing: &mut Drawing, map: &GapMap, marks: &[Mark], (x, y): (Scale, Scale)) {
    let frame = ((x.at.0, y.at.1), (x.at.1, y.at.0));
    drawing.line("zero", (x.of(0.0), y.at.0), (x.of(0.0), y.at.1));
    for family in &map.families {
        for (points, direct) in runs(family, (x, y)) {
            for run in cut(&points, frame.0, frame.1) {
                drawing.polyline(if direct { "fam" } else { "famx" }, &thin(&run, 0.1));
            }
        }
    }
    let inside =
        |mismatch: f64, gap: f64| (x.from..=x.to).contains(&mismatch) && (y.from..=y.to).contains(&gap);
    for end in map.compounds.iter().filter(|end| inside(end.mismatch, end.gap_ev)) {
        drawing.dot("lay", (x.of(end.mismatch), y.of(end.gap_ev)), 2.6);
    }
    for mark in marks.iter().filter(|mark| inside(mark.mismatch, mark.gap_ev)) {
        drawing.dot(&class(mark), (x.of(mark.mismatch), y.of(mark.gap_ev)), 3.6);
    }
}

fn class(mark: &Mark) -> String {
    mark.junction.map_or_else(|| "mk".into(), |index| format!("mk{}", style_number(index)))
}

/// The stretches of a family over which its gap stays direct or indirect, in units.
fn runs(family: &crate::results::FamilyCurve, (x, y): (Scale, Scale)) -> Vec<(Vec<Point>, bool)> {
    let mut out: Vec<(Vec<Point>, bool)> = Vec::new();
    let points = family.mismatch.iter().zip(&family.gap_ev).zip(&family.direct);
    for ((mismatch, gap), direct) in points {
        let point = (x.of(*mismatch), y.of(*gap));
        match out.last_mut() {
            Some((run, same)) if same == direct => run.push(point),
            Some((run, _)) => {
                // The point of the crossing belongs to both.
                let joint = run.last().copied().into_iter().chain([point]).collect();
                out.push((joint, *direct));
            }
            None => out.push((vec![point], *direct)),
        }
    }
    out
}

/// Families and the compounds where they end, in the panel of the whole range.
fn names(drawing: &mut Drawing, map: &GapMap, (x, y): (Scale, Scale)) {
    let inside = |p: &Point| x.at.0 - 1.0 <= p.0 && p.0 <= x.at.1 + 1.0 && y.at.1 <= p.1 && p.1 <= y.at.0;
    let curves: Vec<Vec<Point>> =
        map.families.iter().map(|f| runs(f, (x, y)).into_iter().flat_map(|(run, _)| run).collect()).collect();
    let clear = |label: &Label| {
        let b = label.bounds();
        b.left > x.at.0
            && b.right < x.at.1 + 12.0
            && b.top > y.at.1 - 8.0
            && b.bottom < y.at.0
            && !curves.iter().any(|curve| meets(curve, (b.left - 1.0, b.top), (b.right + 1.0, b.bottom)))
    };
    for end in &map.compounds {
        let at = (x.of(end.mismatch), y.of(end.gap_ev));
        if !inside(&at) {
            continue;
        }
        let words = visible(&end.name);
        let label = |dx: f64, dy: f64| Label::at(at.0 + dx, at.1 + dy, &words).size(11.5).halo();
        let places = [
            label(0.0, -8.0).middle(),
            label(0.0, 17.0).middle(),
            label(7.0, 4.0),
            label(-7.0, 4.0).end(),
            label(6.0, 15.0),
            label(-6.0, 15.0).end(),
            label(6.0, -8.0),
            label(-6.0, -8.0).end(),
        ];
        let (free, crossed): (Vec<Label>, Vec<Label>) = places.into_iter().partition(clear);
        if !drawing.text_where_free(free) {
            drawing.text_where_free(crossed);
        }
    }
    for (family, curve) in map.families.iter().zip(&curves) {
        let shown: Vec<Point> = curve.iter().copied().filter(inside).collect();
        let words = visible(&family.name);
        let places = [0.5, 0.4, 0.6, 0.3, 0.7, 0.2, 0.8]
            .into_iter()
            .filter_map(|share| shown.get(((shown.len().max(1) - 1) as f64 * share) as usize).copied());
        let labels = places.flat_map(|p| {
            let label = |dx: f64, dy: f64| Label::at(p.0 + dx, p.1 + dy, &words).size(11.5).class("q");
            [label(8.0, -4.0), label(-8.0, 12.0).end(), label(8.0, 12.0), label(-8.0, -4.0).end()]
        });
        drawing.text_where_free(labels.filter(clear));
    }
}

/// The mismatch a layer of that thickness can bear, either way from zero, where the panel holds it.
fn whiskers(drawing: &mut Drawing, marks: &[Mark], (x, y): (Scale, Scale)) {
    let mut segments = Vec::new();
    for mark in marks.iter().filter(|mark| x.from <= mark.mismatch && mark.mismatch <= x.to) {
        // Beyond the panel there is nothing to compare it with.
        let Some(critical) = mark.critical.filter(|critical| *critical < x.to) else { continue };
        let at = y.of(mark.gap_ev);
        let (from, to) = (x.of(-critical), x.of(critical));
        segments.push(((from, at), (to, at)));
        segments.extend([from, to].map(|end| ((end, at - 4.0), (end, at + 4.0))));
    }
    drawing.lines("thin", &segments);
}

/// Numbers, gap and mismatch of each mark, with a leader from it where it lies in the panel.
fn labels(drawing: &mut Drawing, marks: &[&Mark], (x, y): (Scale, Scale), two_lines: bool) {
    let height = LINE * if two_lines { 2.0 } else { 1.0 };
    let wanted: Vec<(f64, f64)> = marks.iter().map(|mark| (y.of(mark.gap_ev), height)).collect();
    let mut centres = spread(&wanted, y.at.1 - 6.0);
    // What stands too low moves up with all that it meets.
    let mut floor = y.at.0 + 8.0;
    for centre in centres.iter_mut().rev() {
        *centre = centre.min(floor - height / 2.0);
        floor = *centre - height / 2.0;
    }
    let left = x.at.1 + 16.0;
    let room = drawing.width - left;
    for (mark, centre) in marks.iter().zip(centres) {
        let at = (x.of(mark.mismatch.clamp(x.from, x.to)), y.of(mark.gap_ev));
        let first = centre - height / 2.0 + 12.5;
        let elbow = (x.at.1 + 4.0, at.1);
        drawing.polyline("lead", &[(at.0 + 5.0, at.1), elbow, (left - 4.0, first - 4.0)]);
        let numbers = ranges(&mark.numbers, " ");
        let coloured = |label: Label| mark.junction.map_or(label.clone(), |index| label.junction("i", index));
        let values = format!("{} eV, {}\u{a0}%", fixed(mark.gap_ev, 2), signed(mark.mismatch * 100.0, 2));
        let values_width = Label::at(0.0, 0.0, &values).size(11.5).width();
        let numbers = fit(&numbers, 12.5, true, room - values_width - 8.0);
        let head = coloured(Label::at(left, first, &numbers).bold());
        let next = left + head.width() + 8.0;
        drawing.text(head);
        drawing.text(Label::at(next, first, &values).size(11.5).class("q"));
        if two_lines {
            let whole = Label::material(left, first + 15.0, &mark.material);
            let whole = if mark.alike { whole.and(" and the like") } else { whole };
            let fits = whole.width() <= room;
            let cut_short = Label::at(left, first + 15.0, &fit(&mark.material, 12.5, false, room));
            drawing.text(if fits { whole } else { cut_short });
        }
    }
}
