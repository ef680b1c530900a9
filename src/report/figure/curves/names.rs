//! Names and values on the curves: where no curve runs, if there is such a place.

use super::Line;
use crate::report::context::Context;
use crate::report::figure::plot::{Scale, meets};
use crate::report::figure::power::power_words;
use crate::report::figure::{Drawing, Label, LabelBox};
use crate::report::number::{fixed, with_unit};
use crate::report::width::fit;

/// With more curves than this, names stand in a column beside the curves.
const CROWD: usize = 4;

/// Whether one of the curves runs through a box.
fn crossed(lines: &[Line], bounds: &LabelBox, (x, y): (Scale, Scale)) -> bool {
    // The box in volts and mA/cm2, so that no curve has to be moved into units first.
    let (v, j) = (
        (x.back(bounds.left - 1.0), x.back(bounds.right + 1.0)),
        (y.back(bounds.bottom), y.back(bounds.top)),
    );
    lines.iter().any(|line| meets(&line.points, (v.0, j.0), (v.1, j.1)))
}

/// Puts the first label that is free of other labels and of curves; else the first that is free
/// of other labels.
fn put(drawing: &mut Drawing, lines: &[Line], scales: (Scale, Scale), labels: Vec<Label>) {
    let (clear, crossed): (Vec<Label>, Vec<Label>) =
        labels.into_iter().partition(|label| !crossed(lines, &label.bounds(), scales));
    drawing.text_where_free(clear.into_iter().chain(crossed));
}

/// Names, currents and voltages on the magnified strip.
pub(super) fn strip_labels(
    drawing: &mut Drawing,
    context: &Context<'_>,
    lines: &[Line],
    (x, y): (Scale, Scale),
) {
    let volts = |v: f64| with_unit(&fixed(v, 2), "V");
    let inside = |j: f64| (y.from..=y.to).contains(&j);
    let crowded = lines.len() > CROWD;
    for line in lines {
        if let Some((v, j)) = line.at_power.filter(|p| inside(p.1)) {
            if crowded && line.junction.is_some() {
                // Their voltages stand in the table.
                continue;
            }
            let (px, py) = (x.of(v), y.of(j));
            let words = volts(v);
            let label = |dx: f64, dy: f64| {
                let label = line.coloured(Label::at(px + dx, py + dy, &words).halo());
                let label = if line.junction.is_none() { label.bold() } else { label };
                if dx < 0.0 { label.end() } else { label }
            };
            let places = [(7.0, 14.0), (-7.0, 14.0), (7.0, -6.0), (-7.0, -6.0), (7.0, 28.0), (-7.0, 28.0)];
            put(drawing, lines, (x, y), places.map(|(dx, dy)| label(dx, dy)).into());
        }
    }
    let limiting = context.limiting();
    for line in lines {
        let Some((v, j)) = line.at_short.filter(|p| inside(p.1)) else { continue };
        let (px, py) = (x.of(v), y.of(j));
        match line.junction {
            None => {
                let label = |x: f64, y: f64| {
                    Label::at(x, y, "J").lowered("sc").and(" ").strong(&context.scale.number(j)).halo()
                };
                put(
                    drawing,
                    lines,
                    (x, y),
                    vec![
                        label(px + 7.0, py + 15.0),
                        label(px + 7.0, py - 7.0),
                        label(px - 7.0, py - 7.0).end(),
                        label(px - 7.0, py + 15.0).end(),
                    ],
                );
            }
            Some(index) if v < 0.0 => {
                let long = format!("{} driven to {}", fit(&line.name, 12.5, true, 120.0), volts(v));
                let short = format!("driven to {}", volts(v));
                let label = |x: f64, y: f64, words: &str| {
                    let label = Label::at(x, y, words).bold().halo();
                    if limiting == Some(index) { label.class("bad") } else { label.junction("i", index) }
                };
                let places = [(px + 2.0, py + 18.0), (px + 2.0, py + 34.0), (px + 2.0, py - 10.0)];
                let labels =
                    [&long, &short].into_iter().flat_map(|words| places.map(|(x, y)| label(x, y, words)));
                put(drawing, lines, (x, y), labels.collect());
            }
            Some(_) => {}
        }
    }
    // Names at the flat part of each curve.
    for line in lines.iter().filter(|line| line.junction.is_some() && !crowded) {
        let words = format!("{} ", fit(&line.name, 12.5, true, 120.0));
        let value = line
            .junction
            .and_then(|index| context.drawn.junctions.get(index))
            .map(|j| context.scale.number(j.photocurrent_ma_per_cm2))
            .unwrap_or_default();
        let places = [0.10, 0.3, 0.45, 0.02].into_iter().flat_map(|share| {
            let v = x.from.max(0.0) + share * line.voc;
            let j = line.current_at(v).unwrap_or(0.0);
            let (px, py) = (x.of(v), y.of(j));
            [(px, py - 6.0), (px, py + 15.0)].map(|(px, py)| (px, py, inside(j)))
        });
        let labels = places
            .filter(|place| place.2)
            .map(|(px, py, _)| line.coloured(Label::at(px, py, &words).and(&value).bold().halo()));
        put(drawing, lines, (x, y), labels.collect());
    }
}

/// The junctions' names right of their curves, left of the stack's, each with a leader from its
/// own curve; whether there was room.
fn named_in_a_column(drawing: &mut Drawing, lines: &[Line], (x, y): (Scale, Scale)) -> bool {
    let junctions: Vec<&Line> = lines.iter().filter(|line| line.junction.is_some()).collect();
    let rightmost = junctions.iter().map(|line| x.of(line.voc)).fold(0.0, f64::max);
    let stack = lines.iter().find(|line| line.junction.is_none()).and_then(|line| line.at_power);
    let end = stack.map_or(x.at.1, |p| x.of(p.0)) - 8.0;
    let left = rightmost + if drawing.width > 500.0 { 26.0 } else { 16.0 };
    let room = end - left;
    if room < 60.0 {
        return false;
    }
    let taken = stack.map(|p| y.of(p.1));
    let mut rows: Vec<f64> = Vec::new();
    let mut row = y.at.1 + 12.0;
    while row < y.at.0 - 6.0 {
        if taken.is_none_or(|line| (row - line - 4.0).abs() > 13.0) {
            rows.push(row);
        }
        row += 17.0;
    }
    // A leader leaves its curve below the flat part: those with the most current stand highest.
    let top_of = |line: &Line| line.points.iter().map(|p| y.of(p.1)).fold(y.at.0, f64::min);
    let mut order = junctions;
    order.sort_by(|a, b| top_of(a).total_cmp(&top_of(b)));
    let mut places = Vec::new();
    for line in order {
        let Some(at) = rows.iter().position(|row| row - 4.0 > top_of(line) + 8.0) else { return false };
        places.push((line, rows.remove(at)));
    }
    for (line, base) in places {
        let j = y.back(base - 4.0);
        let at = line.points.iter().rev().find(|p| p.1 >= j).map_or(line.voc, |p| p.0);
        let voltage = with_unit(&fixed(line.voc, 2), "V");
        let value = Label::at(0.0, 0.0, &voltage).width() + 8.0;
        // Where both do not fit, the name stays; the voltage stands in the table.
        let whole = Label::at(0.0, 0.0, "").strong(&line.name).width() + value <= room;
        let voltage = if whole { voltage } else { String::new() };
        let name = format!("{} ", fit(&line.name, 12.5, true, if whole { 170.0 } else { room }));
        drawing.line("lead", (x.of(at), base - 4.0), (left - 4.0, base - 4.0));
        drawing.dot(&line.mark(), (x.of(at), base - 4.0), 2.4);
        drawing.text(line.coloured(Label::at(left, base, "").strong(&name).and(&voltage)).halo());
    }
    true
}

/// Names and voltages on the whole plot.
pub(super) fn plot_labels(
    drawing: &mut Drawing,
    context: &Context<'_>,
    lines: &[Line],
    (x, y): (Scale, Scale),
    has_strip: bool,
) {
    let foot = y.at.0;
    // The stack first: its place counts most. Then from the highest voltage down.
    let mut order: Vec<&Line> = lines.iter().collect();
    order.sort_by(|a, b| b.junction.is_none().cmp(&a.junction.is_none()).then(b.voc.total_cmp(&a.voc)));
    let column = lines.len() > CROWD && named_in_a_column(drawing, lines, (x, y));
    for line in order {
        if column && line.junction.is_some() {
            continue;
        }
        let name = fit(&line.name, 12.5, true, 130.0);
        let voltage = with_unit(&fixed(line.voc, 2), "V");
        let places = (0..5).flat_map(|row| {
            let base = foot - 24.0 - 34.0 * f64::from(row);
            let j = y.back(base);
            // The curve falls: the voltage at this height.
            let at = line.points.iter().rev().find(|p| p.1 >= j).map_or(line.voc, |p| p.0);
            [(x.of(at) - 8.0, base, true), (x.of(at) + 9.0, base, false)]
        });
        let candidates: Vec<[Label; 2]> = places
            .filter(|(_, base, _)| base - 14.0 >= y.at.1)
            .map(|(px, base, ends)| {
                let make = |dy: f64, words: &str| {
                    let label = Label::at(px, base + dy, words).halo();
                    line.coloured(if ends { label.end() } else { label })
                };
                [make(0.0, &name).bold(), make(15.0, &voltage)]
            })
            .collect();
        let free = |pair: &&[Label; 2]| {
            pair.iter().map(Label::bounds).all(|b| {
                b.left >= x.at.0 + 2.0
                    && b.right <= drawing.width
                    && !drawing.labels.iter().any(|other| other.meets(&b, 6.0))
            })
        };
        let clear = |pair: &&[Label; 2]| !pair.iter().any(|l| crossed(lines, &l.bounds(), (x, y)));
        let chosen =
            candidates.iter().filter(free).find(clear).or_else(|| candidates.iter().find(free)).cloned();
        for label in chosen.into_iter().flatten() {
            drawing.text(label);
        }
        if let Some((v, j)) = line.at_power.filter(|_| !has_strip || line.junction.is_none()) {
            let (px, py) = (x.of(v), y.of(j));
            let power = if line.junction.is_none() || lines.len() == 1 {
                power_words(context.drawn.power_w_per_m2)
            } else {
                let index = line.junction.unwrap_or(0);
                power_words(context.drawn.junctions[index].power_w_per_m2)
            };
            let label = |dx: f64, dy: f64| line.coloured(Label::at(px + dx, py + dy, &power).halo()).end();
            put(
                drawing,
                lines,
                (x, y),
                vec![label(-7.0, 17.0), label(-7.0, 33.0), label(-7.0, -8.0), label(-7.0, 49.0)],
            );
        }
    }
}
