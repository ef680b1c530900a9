//! Band edges through the stack: sunward side left, each layer as wide as the cross-section has it
//! high, its faces drawn apart so that the bending near them shows.

use crate::report::context::{Context, Row};
use crate::report::figure::plot::{Scale, axis_left, meets, thin};
use crate::report::figure::{Drawing, Label, SLIM, WIDE};
use crate::report::number::{fixed, signed, with_unit};
use crate::report::palette::style_number;
use crate::report::text::visible;
use crate::report::width::{fit, width};
use crate::results::{BandDiagram, BandLayer, BandStep};

type Point = (f64, f64);

/// From here on a step keeps carriers in: four kT/q at room temperature.
pub const WEAK_EV: f64 = 0.1;
/// From here on a step stands in the way: over less, thermionic emission carries more than
/// 10 A/cm2 at 25 °C, `A* T² exp(−φ/kT)` with A* = 60 A/(cm2 K2), half of the free electron's.
pub const BLOCKS_EV: f64 = 0.34;

/// Depth from a face over which the drawing is about linear, nm.
const LINEAR_NM: f64 = 12.0;

/// One layer in the drawing.
struct Slab<'a> {
    row: Row<'a>,
    bands: &'a BandLayer,
    /// Left edge, width.
    at: (f64, f64),
}

impl Slab<'_> {
    fn thickness(&self) -> f64 {
        self.bands.depth_nm.last().copied().unwrap_or(0.0)
    }

    /// Where a depth lies: stretched near both faces.
    fn x(&self, depth: f64) -> f64 {
        let thick = self.thickness();
        let stretched = |depth: f64| (depth / LINEAR_NM).asinh();
        let half = stretched(thick / 2.0).max(1e-12);
        let share = if depth <= thick / 2.0 {
            0.5 * stretched(depth) / half
        } else {
            1.0 - 0.5 * stretched(thick - depth) / half
        };
        self.at.0 + self.at.1 * share
    }

    fn edge(&self, values: &[f64], y: Scale) -> Vec<Point> {
        self.bands.depth_nm.iter().zip(values).map(|(depth, ev)| (self.x(*depth), y.of(*ev))).collect()
    }
}

/// Both drawings.
pub fn draw(context: &Context<'_>, bands: &BandDiagram) -> (Drawing, Drawing) {
    (draw_in(context, bands, (WIDE, 44.0, 300.0)), draw_in(context, bands, (SLIM, 34.0, 250.0)))
}

fn draw_in(context: &Context<'_>, bands: &BandDiagram, (width, left, height): (f64, f64, f64)) -> Drawing {
    let slim = width < 500.0;
    let slabs = slabs(context, bands, (left, width - 2.0));
    let top = if slim { 30.0 } else { 44.0 };
    let foot = top + height;
    let mut drawing = Drawing::new(width, foot + 40.0);
    let all = bands.layers.iter().flat_map(|layer| layer.conduction_ev.iter().chain(&layer.valence_ev));
    let (low, high) = all.fold((f64::MAX, f64::MIN), |e, ev| (e.0.min(*ev), e.1.max(*ev)));
    // Room above and beneath for what the steps are called.
    let room = 0.14 * (high - low).max(0.5);
    let y = Scale::new(low - room, high + room, (foot, top));
    let (ticks, decimals) = y.ticks(6);
    let words = |v: f64| if v == 0.0 { "0".to_string() } else { signed(v, decimals) };
    let ticks: Vec<(f64, String)> = ticks.into_iter().map(|v| (v, words(v))).collect();
    drawing.text(Label::at(left - 7.0, top - 6.0, "eV").size(11.5).class("q").end());
    for slab in &slabs {
        area(&mut drawing, slab, y);
    }
    let faces: Vec<_> = slabs.iter().map(|slab| ((slab.at.0, top), (slab.at.0, foot))).skip(1).collect();
    drawing.lines("hair", &faces);
    axis_left(&mut drawing, y, left, &ticks);
    if bands.model == "equilibrium" {
        drawing.line("level", (left, y.of(0.0)), (width - 2.0, y.of(0.0)));
    }
    heads(context, &mut drawing, &slabs, top);
    edges(&mut drawing, &slabs, y);
    let drawn: Vec<Vec<Point>> = slabs
        .iter()
        .flat_map(|slab| [&slab.bands.conduction_ev, &slab.bands.valence_ev].map(|ev| slab.edge(ev, y)))
        .collect();
    for step in &bands.steps {
        mark(&mut drawing, &slabs, step, (y, &drawn));
    }
    ends(&mut drawing, bands, &slabs, y);
    feet(context, &mut drawing, &slabs, foot);
    drawing
}

/// Each layer by what the cross-section makes of its thickness; a gap between runs that do not
/// touch.
fn slabs<'a>(context: &Context<'a>, bands: &'a BandDiagram, (left, right): (f64, f64)) -> Vec<Slab<'a>> {
    let rows: Vec<Row<'a>> = context.layers().filter(Row::is_lit).collect();
    let mut out: Vec<Slab<'a>> = Vec::new();
    let mut x = 0.0;
    let mut before: Option<usize> = None;
    for (place, row) in rows.iter().enumerate() {
        let Some(layer) = bands.layers.iter().find(|layer| layer.name == row.result.name) else { continue };
        if before.is_some_and(|before| before + 1 != place) {
            x += 14.0;
        }
        before = Some(place);
        let thick = layer.depth_nm.last().copied().unwrap_or(0.0);
        let wide = 21.5 + 12.5 * (thick.max(1.0) / 10.0).log10();
        out.push(Slab { row: *row, bands: layer, at: (x, wide) });
        x += wide;
    }
    let scale = (right - left) / x.max(1.0);
    for slab in &mut out {
        slab.at = (left + slab.at.0 * scale, slab.at.1 * scale);
    }
    out
}

/// Between the edges: in the colour of the junction where light becomes current.
fn area(drawing: &mut Drawing, slab: &Slab<'_>, y: Scale) {
    let class = match slab.row.junction().filter(|_| slab.row.makes_current()) {
        Some(junction) => format!("t{}", style_number(junction)),
        None => "wash".into(),
    };
    let mut outline = thin(&slab.edge(&slab.bands.conduction_ev, y), 0.15);
    outline.extend(thin(&slab.edge(&slab.bands.valence_ev, y), 0.15).into_iter().rev());
    drawing.polygon(&class, &outline);
}

/// Both edges, through every face without a break.
fn edges(drawing: &mut Drawing, slabs: &[Slab<'_>], y: Scale) {
    for of in [|b: &BandLayer| b.conduction_ev.clone(), |b: &BandLayer| b.valence_ev.clone()] {
        let mut line: Vec<Point> = Vec::new();
        for slab in slabs {
            if line.last().is_some_and(|last| slab.at.0 - last.0 > 1.0) {
                drawing.polyline("edge", &line);
                line.clear();
            }
            line.extend(thin(&slab.edge(&of(slab.bands), y), 0.15));
        }
        drawing.polyline("edge", &line);
    }
}

/// Number of each layer, and its duty where there is room.
fn heads(context: &Context<'_>, drawing: &mut Drawing, slabs: &[Slab<'_>], top: f64) {
    for slab in slabs {
        let middle = slab.at.0 + slab.at.1 / 2.0;
        let number = slab.row.number().to_string();
        drawing.text_where_free([Label::at(middle, top - 6.0, &number).size(11.5).bold().middle()]);
        let duty = slab.row.duty(context.design);
        if width(duty, 11.5, false) <= slab.at.1 + 8.0 && top > 40.0 {
            drawing.text_where_free([Label::at(middle, top - 22.0, duty).size(11.5).class("q").middle()]);
        }
    }
}

/// What a step is to the device.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Meaning {
    /// It keeps carriers where they are collected.
    Holds,
    /// It should, and hardly does.
    Weak,
    /// It stands in the way of those that are to leave.
    Blocks,
    /// Those that are to leave pass.
    Open,
}

impl Meaning {
    /// Of a step.
    pub fn of(step: &BandStep) -> Self {
        match step.keeps_in {
            true if step.barrier_ev >= WEAK_EV => Self::Holds,
            true => Self::Weak,
            false if step.barrier_ev >= BLOCKS_EV => Self::Blocks,
            false => Self::Open,
        }
    }
}

/// A step that holds, or fails to, or blocks: a heavy line at its face, and what meets how much.
/// The words stand clear of the edges, if there is such a place.
fn mark(drawing: &mut Drawing, slabs: &[Slab<'_>], step: &BandStep, (y, edges): (Scale, &[Vec<Point>])) {
    let meaning = Meaning::of(step);
    let of = |name: &str| slabs.iter().find(|slab| slab.bands.name == name);
    let (Some(from), Some(to)) = (of(&step.from), of(&step.to)) else { return };
    if meaning == Meaning::Open {
        return;
    }
    let outward_right = to.at.0 > from.at.0;
    let face = if outward_right { to.at.0 } else { from.at.0 };
    let electrons = step.carrier == "electrons";
    let values = |slab: &Slab<'_>| {
        if electrons { slab.bands.conduction_ev.clone() } else { slab.bands.valence_ev.clone() }
    };
    let inner = values(from);
    let outer = values(to);
    let pick =
        |values: &[f64], last: bool| if last { values.last().copied() } else { values.first().copied() };
    let ends = pick(&inner, outward_right).zip(pick(&outer, !outward_right));
    let Some((inner, outer)) = ends else { return };
    let class = if meaning == Meaning::Holds { "holds" } else { "blocks" };
    if (y.of(inner) - y.of(outer)).abs() > 1.0 {
        drawing.line(class, (face, y.of(inner)), (face, y.of(outer)));
    }
    let amount = with_unit(&fixed(step.barrier_ev * 1000.0, 0), "meV");
    let long = format!("{} {amount}", step.carrier);
    let short = fixed(step.barrier_ev * 1000.0, 0);
    let out = y.of(if electrons { inner.max(outer) } else { inner.min(outer) });
    let label = |words: &str, dx: f64, row: f64| {
        let dy = if electrons { -8.0 - 14.0 * row } else { 17.0 + 14.0 * row };
        let label = Label::at(face + dx, out + dy, words).size(11.5).bold().halo();
        if meaning == Meaning::Holds { label } else { label.class("bad") }
    };
    let rows = [0.0, 0.5, 1.0, 1.5, 2.0, 3.0];
    let places = [&long, &short].into_iter().flat_map(|words| {
        rows.into_iter().flat_map(move |row| {
            [label(words, 0.0, row).middle(), label(words, -4.0, row).end(), label(words, 4.0, row)]
        })
    });
    let left = slabs.first().map_or(0.0, |slab| slab.at.0);
    let inside = |label: &Label| {
        let b = label.bounds();
        b.top > y.at.1 - 4.0 && b.bottom < y.at.0 + 4.0 && b.left > left + 2.0
    };
    let clear = |label: &Label| {
        let b = label.bounds();
        !edges.iter().any(|edge| meets(edge, (b.left - 1.0, b.top), (b.right + 1.0, b.bottom)))
    };
    let (free, crossed): (Vec<Label>, Vec<Label>) = places.filter(inside).partition(clear);
    if !drawing.text_where_free(free) {
        drawing.text_where_free(crossed);
    }
}

/// What the lines are, at the right end.
fn ends(drawing: &mut Drawing, bands: &BandDiagram, slabs: &[Slab<'_>], y: Scale) {
    let Some(last) = slabs.last() else { return };
    let right = drawing.width - 2.0;
    let at = |values: &[f64]| values.last().copied().map(|ev| y.of(ev));
    let (Some(conduction), Some(valence)) = (at(&last.bands.conduction_ev), at(&last.bands.valence_ev))
    else {
        return;
    };
    let small = |y: f64, words: &str| Label::at(right - 4.0, y, words).size(11.5).class("q").end().halo();
    drawing.text_where_free([-7.0, 17.0, -22.0].map(|dy| small(conduction + dy, "conduction edge")));
    drawing.text_where_free([17.0, 32.0, -7.0].map(|dy| small(valence + dy, "valence edge")));
    if bands.model == "equilibrium" {
        drawing.text_where_free([-6.0, 15.0, -20.0].map(|dy| small(y.of(0.0) + dy, "Fermi level")));
    }
}

/// A line beneath each junction with its name, thinner ones beneath what stands between.
fn feet(context: &Context<'_>, drawing: &mut Drawing, slabs: &[Slab<'_>], foot: f64) {
    let y = foot + 14.0;
    let mut at = 0;
    while at < slabs.len() {
        let place = slabs[at].row.layer.place;
        let end = slabs[at..].iter().take_while(|slab| slab.row.layer.place == place).count() + at;
        let (from, to) = (slabs[at].at.0 + 2.0, slabs[end - 1].at.0 + slabs[end - 1].at.1 - 2.0);
        let junction = slabs[at].row.junction();
        match junction.and_then(|index| context.drawn.junctions.get(index).map(|j| (index, j))) {
            Some((index, junction)) => {
                drawing.line(&format!("br{}", style_number(index)), (from, y), (to, y));
                let gap =
                    format!("{}, {}", visible(&junction.name), with_unit(&fixed(junction.gap_ev, 2), "eV"));
                let words = if width(&gap, 12.5, true) <= to - from { gap } else { visible(&junction.name) };
                let words = fit(&words, 12.5, true, (to - from + 10.0).max(0.0));
                let label =
                    Label::at((from + to) / 2.0, y + 17.0, &words).bold().junction("i", index).middle();
                drawing.text_where_free([label]);
            }
            None => drawing.line("axis", (from, y), (to, y)),
        }
        at = end;
    }
}
