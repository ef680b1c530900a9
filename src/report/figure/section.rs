//! The cross-section, sunward side up, and the selvedge over the title.
//!
//! A layer's height is 21.5 + 12.5·log10(t / 10 nm) units, so that 15 nm and 350 µm stand on one
//! page and each still has room for its words.

use crate::design::{Duty, Extent};
use crate::report::context::{Context, Row, Style};
use crate::report::figure::hatch::{Hatch, rectangle, strokes};
use crate::report::figure::{Drawing, Label, SLIM, WIDE};
use crate::report::number::{doping, fixed, thickness, trimmed, with_unit};
use crate::report::width::fit;

mod brackets;
mod keys;

use brackets::brackets;
use keys::keys;

/// Where things stand in one of the two drawings.
struct Layout {
    width: f64,
    /// Left edge and width of the stack itself.
    stack: (f64, f64),
    /// Least height of a row.
    least: f64,
    /// All heights are multiplied by it.
    shrink: f64,
    slim: bool,
}

/// From here on hatches are wider.
const MANY: usize = 40;
/// Height of the head line.
const HEAD: f64 = 30.0;
/// Height of a row over the stack, for what stands under the fingers only.
const OVER: f64 = 24.0;

impl Layout {
    fn height(&self, nm: Option<f64>) -> f64 {
        let natural = match nm {
            // No thickness: a layer of a limit study, or metal.
            None => 64.0,
            Some(nm) => 21.5 + 12.5 * (nm.max(1.0) / 10.0).log10(),
        };
        (natural * self.shrink).max(self.least)
    }

    fn row_height(&self, row: &Row<'_>) -> f64 {
        match row.layer.duty {
            Duty::Metal => self.least,
            Duty::Air if row.result.thickness_nm.is_none() => self.least,
            _ => self.height(row.result.thickness_nm),
        }
    }
}

/// Both drawings.
pub fn draw(context: &Context<'_>) -> (Drawing, Drawing) {
    let wide = Layout { width: WIDE, stack: (140.0, 150.0), least: 20.0, shrink: 1.0, slim: false };
    let slim = Layout { width: SLIM, stack: (100.0, 84.0), least: 34.0, shrink: 1.0, slim: true };
    (draw_in(context, fitted(context, wide)), draw_in(context, slim))
}

/// A stack of many layers is pressed together until its words just stand clear of each other.
fn fitted(context: &Context<'_>, mut layout: Layout) -> Layout {
    let natural: f64 = lit(context).iter().map(|row| layout.row_height(row)).sum();
    const MOST: f64 = 900.0;
    if natural > MOST {
        layout.shrink = MOST / natural;
        layout.least = 16.5;
    }
    layout
}

fn lit<'a>(context: &Context<'a>) -> Vec<Row<'a>> {
    context.layers().filter(Row::is_lit).collect()
}

fn draw_in(context: &Context<'_>, layout: Layout) -> Drawing {
    let rows = lit(context);
    let under: Vec<Row<'_>> =
        context.layers().filter(|row| row.layer.extent == Extent::UnderFingers).collect();
    let posts = context.design.fingers.is_some() || !under.is_empty();
    let over = if posts { OVER * (under.len() as f64 + 1.0) + 6.0 } else { 0.0 };
    let top = HEAD + over;

    let mut edges = vec![top];
    for row in &rows {
        edges.push(edges[edges.len() - 1] + layout.row_height(row));
    }
    let foot = edges[edges.len() - 1];
    let mut drawing = Drawing::new(layout.width, 0.0);
    head(context, &mut drawing, &layout, over);
    for (index, row) in rows.iter().enumerate() {
        let (y, h) = (edges[index], edges[index + 1] - edges[index]);
        let mut style = row.style();
        // Very many layers would make a heavy file; what they are reads all the same.
        if let Some((_, hatch)) = style.hatch.as_mut().filter(|_| rows.len() > MANY) {
            *hatch = hatch.wider(2.0);
        }
        area(&mut drawing, &style, (layout.stack.0, y), (layout.stack.1, h));
        let left = layout.stack.0 + layout.stack.1 + 12.0;
        drawing.line("hair", (left, edges[index + 1]), (layout.width, edges[index + 1]));
        if row.layer.duty == Duty::Wafer && h > 46.0 {
            broken(&mut drawing, layout.stack, y + 0.42 * h);
        }
    }
    if posts {
        let coats = rows.iter().take_while(|row| row.layer.duty == Duty::Coat).count();
        fingers(context, &mut drawing, &layout, (top, edges[coats]), &under);
    }
    planes(&mut drawing, &layout, &rows, &edges);
    brackets(context, &mut drawing, &layout, &rows, &edges);
    for (index, row) in rows.iter().enumerate() {
        words(context, &mut drawing, &layout, row, (edges[index] + edges[index + 1]) / 2.0);
    }
    let end = keys(context, &mut drawing, &layout, &rows, foot + 14.0);
    // The words of a bracket may reach further down than its layers.
    drawing.height = drawing.labels.iter().map(|label| label.bottom + 4.0).fold(end, f64::max);
    drawing
}

/// Fills an area in a style.
pub fn area(drawing: &mut Drawing, style: &Style, at: (f64, f64), size: (f64, f64)) {
    drawing.rect(&style.class, at, size);
    if let Some((class, hatch)) = &style.hatch {
        drawing.path(class, &strokes(*hatch, &rectangle(at, size)));
    }
}

fn head(context: &Context<'_>, drawing: &mut Drawing, layout: &Layout, over: f64) {
    let small = |x: f64, words: &str| Label::at(x, 14.0, words).size(11.5).class("q");
    drawing.text(small(layout.stack.0, "sunward"));
    if layout.slim {
        drawing.text(small(218.0, "layer, material"));
        drawing.text(small(SLIM, "thickness").end());
    } else {
        drawing.text(small(324.0, "no.").end());
        drawing.text(small(334.0, "duty"));
        drawing.text(small(428.0, "material as resolved"));
        if context.layers().any(|row| row.result.thickness_nm.is_some()) || over > 0.0 {
            drawing.text(small(676.0, "thickness").end());
        }
        drawing.text(small(742.0, "gap").end());
        if context.layers().any(|row| row.result.doping_per_cm3.is_some()) {
            drawing.text(small(758.0, "doping /cm³"));
        }
    }
    let left = layout.stack.0 + layout.stack.1 + 12.0;
    drawing.line("axis", (left, 22.0), (layout.width, 22.0));
    if over > 0.0 {
        drawing.line("hair", (left, HEAD + over), (layout.width, HEAD + over));
    }
}

/// Metal posts, and beneath them what stands under the fingers only, down through the coats.
fn fingers(
    context: &Context<'_>,
    drawing: &mut Drawing,
    layout: &Layout,
    (top, below_coats): (f64, f64),
    under: &[Row<'_>],
) {
    let (x, w) = layout.stack;
    let post = w * 0.12;
    let lefts = [x + w * 0.10, x + w * 0.78];
    // Without coats what is under the fingers stands on the stack.
    let base = if below_coats > top + 8.0 { below_coats } else { top };
    let under_top = if base > top { top } else { top - 12.0 * under.len() as f64 };
    let each = if under.is_empty() { 0.0 } else { (base - under_top) / under.len() as f64 };
    for left in lefts {
        drawing.rect("fm", (left, 30.0), (post, if under.is_empty() { base } else { under_top } - 30.0));
        for (index, row) in under.iter().enumerate() {
            let y = under_top + each * index as f64;
            area(drawing, &row.style(), (left, y), (post, each));
        }
    }
    let y = HEAD + OVER - 9.0;
    let text_x = if layout.slim { 218.0 } else { 334.0 };
    drawing.text(Label::at(text_x, y, "fingers"));
    let share = with_unit(&trimmed(context.shading() * 100.0), "% of area");
    drawing.text(Label::at(if layout.slim { SLIM } else { 676.0 }, y, &share).end());
    for (index, row) in under.iter().enumerate() {
        let row_y = y + OVER * (index as f64 + 1.0);
        words_at(context, drawing, layout, row, row_y);
        let from = (lefts[1] + post, under_top + each * (index as f64 + 0.3).min(0.6));
        drawing.line("lead", from, (x + w + 10.0, row_y - 4.0));
    }
}

/// A wafer is cut short: two zigzags with nothing between.
fn broken(drawing: &mut Drawing, (x, w): (f64, f64), y: f64) {
    let teeth = 8;
    let zigzag = |shift: f64| -> Vec<(f64, f64)> {
        (0..=teeth)
            .map(|i| {
                (x + w * f64::from(i) / f64::from(teeth), y + shift + if i % 2 == 0 { 0.0 } else { 6.0 })
            })
            .collect()
    };
    let (upper, lower) = (zigzag(0.0), zigzag(6.0));
    let mut gap = upper.clone();
    gap.extend(lower.iter().rev());
    drawing.polygon("paper", &gap);
    drawing.polyline("thin", &upper);
    drawing.polyline("thin", &lower);
}

/// The heavy line where n meets p inside a junction.
fn planes(drawing: &mut Drawing, layout: &Layout, rows: &[Row<'_>], edges: &[f64]) {
    let (x, w) = layout.stack;
    for index in 1..rows.len() {
        let (above, below) = (&rows[index - 1], &rows[index]);
        let same = above.junction().is_some() && above.junction() == below.junction();
        let both = above.layer.doping.as_ref().zip(below.layer.doping.as_ref());
        if let Some((a, b)) = both.filter(|(a, b)| same && a.polarity != b.polarity) {
            let y = edges[index];
            drawing.line("pn", (x - 6.0, y), (x + w + 6.0, y));
            let mark = |y: f64, words: &str| Label::at(x + w + 3.0, y, words).size(11.5).class("q");
            drawing.text(mark(y - 4.0, polarity(a.polarity)));
            drawing.text(mark(y + 11.5, polarity(b.polarity)));
        }
    }
}

fn polarity(polarity: crate::design::Polarity) -> &'static str {
    match polarity {
        crate::design::Polarity::N => "n",
        crate::design::Polarity::P => "p",
    }
}

fn words(context: &Context<'_>, drawing: &mut Drawing, layout: &Layout, row: &Row<'_>, middle: f64) {
    words_at(context, drawing, layout, row, middle + if layout.slim { -3.5 } else { 4.5 });
}

/// The words of one layer on the baseline `y`.
fn words_at(context: &Context<'_>, drawing: &mut Drawing, layout: &Layout, row: &Row<'_>, y: f64) {
    let number = row.number().to_string();
    let duty = row.duty(context.design);
    let thick = row.result.thickness_nm.map(thickness).unwrap_or_default();
    if layout.slim {
        drawing.text(Label::at(212.0, y, &number).end().bold());
        drawing.text(Label::at(218.0, y, duty));
        drawing.text(Label::at(SLIM, y, &thick).end());
        if row.layer.extent == Extent::Everywhere {
            drawing.text(material(row.material(), (218.0, y + 15.0), SLIM - 218.0).class("q"));
        }
        return;
    }
    drawing.text(Label::at(324.0, y, &number).end().bold());
    drawing.text(Label::at(334.0, y, &fit(duty, 12.5, false, 90.0)));
    drawing.text(material(row.material(), (428.0, y), 184.0));
    drawing.text(Label::at(676.0, y, &thick).end());
    if let Some(gap) = row.result.gap_ev {
        drawing.text(Label::at(742.0, y, &with_unit(&fixed(gap, 2), "eV")).end());
    }
    if let Some(words) = doping_words(row) {
        drawing.text(Label::at(758.0, y, &fit(&words, 12.5, false, WIDE - 758.0)));
    }
}

fn material(label: &str, at: (f64, f64), room: f64) -> Label {
    let whole = Label::material(at.0, at.1, label);
    if whole.width() <= room { whole } else { Label::at(at.0, at.1, &fit(label, 12.5, false, room)) }
}

/// `n 2e18 Si`
pub fn doping_words(row: &Row<'_>) -> Option<String> {
    let density = row.result.doping_per_cm3?;
    let polarity = row.result.polarity.as_deref().unwrap_or("");
    let species = row.result.species.as_deref().unwrap_or("");
    Some(format!("{polarity} {} {species}", doping(density)).trim().to_string())
}

/// The band over the title: this stack's own layers side by side, as decoration.
pub fn selvedge(context: &Context<'_>, size: (f64, f64)) -> Drawing {
    let layout = Layout { width: size.0, stack: (0.0, size.0), least: 12.0, shrink: 1.0, slim: false };
    let rows: Vec<Row<'_>> = context.layers().filter(|row| row.layer.extent != Extent::Removed).collect();
    let natural: f64 = rows.iter().map(|row| layout.row_height(row)).sum();
    let mut drawing = Drawing::new(size.0, size.1);
    let mut x = 0.0;
    for row in rows {
        let w = layout.row_height(&row) / natural.max(1.0) * size.0;
        // Side by side a layer lies on its flank; its hatch keeps its own direction.
        let style = row.style();
        drawing.rect(&style.class, (x, 0.0), (w, size.1));
        if let Some((class, hatch)) = &style.hatch {
            let finer = match hatch {
                Hatch::Dashes(_) => Hatch::Dashes(7.0),
                other => *other,
            };
            drawing.path(class, &strokes(finer, &rectangle((x, 0.0), (w, size.1))));
        }
        x += w;
    }
    drawing
}
