//! Quantum efficiency of each junction against wavelength: what it collects, what it absorbs, the
//! ratio of both, and what is not reflected.

use crate::report::context::Context;
use crate::report::figure::plot::{Scale, axis_below, axis_left, cut, interpolate, thin};
use crate::report::figure::{Drawing, Label, SLIM, WIDE};
use crate::report::number::fixed;
use crate::report::palette::style_number;
use crate::report::text::visible;
use crate::report::width::fit;

/// First and last wavelength drawn, nm: the junctions' range with a little room.
pub fn range(context: &Context<'_>) -> Option<(f64, f64)> {
    let spectral = &context.drawn.spectral;
    let live = |i: &usize| spectral.eqe.values().any(|eqe| eqe.get(*i).is_some_and(|q| *q > 0.025));
    let indices: Vec<usize> = (0..spectral.wavelength_nm.len()).filter(live).collect();
    let first = spectral.wavelength_nm.get(*indices.first()?)?;
    let last = spectral.wavelength_nm.get(*indices.last()?)?;
    let room = (last - first) * 0.03;
    Some((((first - room) / 10.0).floor() * 10.0, ((last + room) / 10.0).ceil() * 10.0))
}

/// Whether a junction's carriers are followed, so that absorbed and collected differ.
pub fn follows_carriers(context: &Context<'_>) -> bool {
    context.drawn.junctions.iter().any(|junction| junction.collection_efficiency.is_some())
}

/// Below this share absorbed the internal efficiency is a ratio of two small numbers.
const ABSORBS: f64 = 0.02;

/// Wavelength in nm and internal quantum efficiency, where the junction absorbs enough to speak of.
pub fn internal(context: &Context<'_>, junction: &str) -> Option<Vec<(f64, f64)>> {
    let spectral = &context.drawn.spectral;
    let (eqe, iqe) = (spectral.eqe.get(junction)?, spectral.iqe.get(junction)?);
    let points = spectral.wavelength_nm.iter().zip(eqe).zip(iqe);
    let shown = points.filter(|((_, eqe), iqe)| **iqe > 0.0 && **eqe / **iqe > ABSORBS);
    Some(shown.map(|((nm, _), iqe)| (*nm, *iqe)).collect())
}

/// Share absorbed in the layers a junction collects from.
fn absorbed(context: &Context<'_>, junction: usize) -> Vec<f64> {
    let spectral = &context.drawn.spectral;
    let mut sum = vec![0.0; spectral.wavelength_nm.len()];
    for row in context.layers().filter(|row| row.junction() == Some(junction) && row.makes_current()) {
        for (sum, share) in
            sum.iter_mut().zip(spectral.absorptance.get(&row.result.name).into_iter().flatten())
        {
            *sum += share;
        }
    }
    sum
}

/// Both drawings.
pub fn draw(context: &Context<'_>, range: (f64, f64)) -> (Drawing, Drawing) {
    (draw_in(context, range, (WIDE, 44.0, 210.0)), draw_in(context, range, (SLIM, 34.0, 170.0)))
}

fn draw_in(context: &Context<'_>, range: (f64, f64), (width, left, height): (f64, f64, f64)) -> Drawing {
    let spectral = &context.drawn.spectral;
    let top = 26.0;
    let foot = top + height;
    let mut drawing = Drawing::new(width, foot + 42.0);
    let x = Scale::new(range.0, range.1, (left, width - 12.0));
    let y = Scale::new(0.0, 100.0, (foot, top));
    let curve = |values: &[f64], of: &dyn Fn(f64) -> f64| -> Vec<(f64, f64)> {
        spectral.wavelength_nm.iter().zip(values).map(|(nm, v)| (x.of(*nm), y.of(100.0 * of(*v)))).collect()
    };
    let frame = ((x.at.0, top), (x.at.1, foot));
    let followed = follows_carriers(context);
    for index in (0..context.drawn.junctions.len()).filter(|_| followed) {
        for run in cut(&curve(&absorbed(context, index), &|a| a), frame.0, frame.1) {
            let mut area = thin(&run, 0.2);
            if let (Some(first), Some(last)) = (area.first().copied(), area.last().copied()) {
                area.extend([(last.0, foot), (first.0, foot)]);
            }
            drawing.polygon(&format!("t{}", style_number(index)), &area);
        }
    }
    for (index, junction) in context.drawn.junctions.iter().enumerate().filter(|_| followed) {
        let points: Vec<(f64, f64)> = internal(context, &junction.name)
            .unwrap_or_default()
            .into_iter()
            .map(|(nm, iqe)| (x.of(nm), y.of(100.0 * iqe)))
            .collect();
        for run in cut(&points, frame.0, frame.1) {
            drawing.polyline(&format!("q{}", style_number(index)), &thin(&run, 0.15));
        }
    }
    for run in cut(&curve(&spectral.reflectance, &|r| 1.0 - r), frame.0, frame.1) {
        drawing.polyline("cq", &thin(&run, 0.12));
    }
    for (index, junction) in context.drawn.junctions.iter().enumerate() {
        let Some(eqe) = spectral.eqe.get(&junction.name) else { continue };
        for run in cut(&curve(eqe, &|q| q), frame.0, frame.1) {
            drawing.polyline(&format!("c{}", style_number(index)), &thin(&run, 0.12));
        }
    }
    let ticks: Vec<(f64, String)> = (0..=5)
        .map(|i| (f64::from(i) * 20.0, if i == 5 { "100 %".into() } else { fixed(f64::from(i) * 20.0, 0) }))
        .map(|(v, words)| (v, if left < 40.0 { words.replace(" %", "") } else { words }))
        .collect();
    axis_left(&mut drawing, y, left, &ticks);
    let (values, _) = x.ticks(if width > 500.0 { 12 } else { 6 });
    let ticks: Vec<(f64, String)> =
        values.iter().map(|v| (*v, fixed(*v, 0).replace('\u{202f}', ""))).collect();
    axis_below(&mut drawing, x, foot, &ticks);
    drawing.text(Label::at(width - 12.0, foot + 36.0, "wavelength, nm").size(11.5).class("q").end());
    labels(context, &mut drawing, (x, y), (top, foot));
    drawing
}

/// Each name under its own curve where it is the highest, what is not reflected above.
fn labels(context: &Context<'_>, drawing: &mut Drawing, (x, y): (Scale, Scale), (top, foot): (f64, f64)) {
    let spectral = &context.drawn.spectral;
    let mut unnamed = Vec::new();
    drawing.text(Label::at(x.at.1, top - 11.0, "grey dashes: not reflected").size(11.5).class("q").end());
    for (index, junction) in context.drawn.junctions.iter().enumerate() {
        let Some(eqe) = spectral.eqe.get(&junction.name) else { continue };
        // The centre of the range where it takes more than half of its own greatest share.
        let most = eqe.iter().copied().fold(0.0, f64::max);
        let live: Vec<f64> = spectral
            .wavelength_nm
            .iter()
            .zip(eqe)
            .filter(|(nm, q)| **q >= 0.5 * most && **nm >= x.from && **nm <= x.to)
            .map(|(nm, _)| *nm)
            .collect();
        let (Some(from), Some(to)) = (live.first(), live.last()) else { continue };
        let centre = x.of((from + to) / 2.0);
        let height = interpolate(&spectral.wavelength_nm, eqe, (from + to) / 2.0).unwrap_or(most);
        let name = fit(&visible(&junction.name), 15.0, true, 150.0);
        let label =
            |at: f64| Label::at(centre, at, &name).size(15.0).bold().junction("i", index).middle().halo();
        let half = label(0.0).width() / 2.0;
        if 2.0 * half + 8.0 <= x.of(*to) - x.of(*from) {
            // Where the curve stands high there is room under it, between its own flanks.
            let below = y.of(50.0 * height);
            let rows = [0.0, 22.0, -22.0, 44.0, -44.0].map(|dy| below + dy);
            drawing.text_where_free(rows.into_iter().filter(|at| *at < foot - 4.0).map(label));
        } else {
            // Too narrow: over the frame, with a leader down into the band.
            let at = |dx: f64| {
                Label::at(centre + dx, top - 11.0, &name).size(12.5).bold().junction("i", index).middle()
            };
            if drawing.text_where_free([0.0, 12.0, -12.0, 26.0, -26.0, 44.0, -44.0].map(at)) {
                drawing.line("lead", (centre, top - 6.0), (centre, y.of(100.0 * height) + 10.0));
            } else {
                unnamed.push(index);
            }
        }
    }
    key(context, drawing, &unnamed, x.at.0);
}

/// A key for the curves that no name could be put to.
fn key(context: &Context<'_>, drawing: &mut Drawing, junctions: &[usize], left: f64) {
    let (mut at, mut row) = (left, drawing.height + 12.0);
    for index in junctions {
        let name = fit(&visible(&context.drawn.junctions[*index].name), 12.5, true, 150.0);
        let label = Label::at(at + 32.0, row, &name).bold().junction("i", *index);
        if at > left && label.bounds().right > drawing.width {
            at = left;
            row += 18.0;
        }
        drawing.line(&format!("c{}", style_number(*index)), (at, row - 4.0), (at + 26.0, row - 4.0));
        let label = Label::at(at + 32.0, row, &name).bold().junction("i", *index);
        at = label.bounds().right + 16.0;
        drawing.text(label);
        drawing.height = row + 6.0;
    }
}
