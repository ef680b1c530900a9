//! The keys beneath the stack.

use super::{Layout, area};
use crate::design::Extent;
use crate::report::context::{Context, Row, Style};
use crate::report::figure::{Drawing, Label};
use crate::report::width::fit;

/// What a height means, and what the hatches are; returns where the drawing ends.
pub(super) fn keys(
    context: &Context<'_>,
    drawing: &mut Drawing,
    layout: &Layout,
    rows: &[Row<'_>],
    top: f64,
) -> f64 {
    let measured = rows.iter().any(|row| row.result.thickness_nm.is_some());
    let mut bottom = top - 6.0;
    let small = |x: f64, y: f64, words: &str| Label::at(x, y, words).size(11.5).class("q");
    let left = if layout.slim { 2.0 } else { layout.stack.0 };
    if measured {
        drawing.text(small(left, top + 12.0, "height of a layer by its thickness"));
        let tallest = layout.height(Some(10_000.0));
        let ground = top + 24.0 + tallest;
        let mut x = left;
        for (nm, words) in [(10.0, "10 nm"), (100.0, "100 nm"), (1000.0, "1 µm"), (10_000.0, "10 µm")] {
            let h = layout.height(Some(nm));
            drawing.rect("lay", (x, ground - h), (11.0, h));
            drawing.text(small(x + 15.0, ground, words));
            x += if nm == 100.0 { 72.0 } else { 64.0 };
        }
        bottom = ground + 6.0;
    }
    let mut seen: Vec<(&'static str, Style)> = Vec::new();
    let shown =
        rows.iter().copied().chain(context.layers().filter(|row| row.layer.extent == Extent::UnderFingers));
    for row in shown {
        let style = row.style();
        if let Some(key) = style.key
            && !seen.iter().any(|(other, _)| *other == key)
        {
            seen.push((key, style));
        }
    }
    if !seen.is_empty() {
        let (x, y) = match (layout.slim, measured) {
            (true, true) => (2.0, bottom + 10.0),
            (true, false) => (2.0, top),
            (false, true) => (428.0, top),
            (false, false) => (layout.stack.0, top),
        };
        drawing.text(small(x, y + 12.0, "solid makes current, hatched serves it"));
        let (across, step) = if layout.slim { (3, 132.0) } else { (3, 136.0) };
        for (index, (key, style)) in seen.iter().enumerate() {
            let (cx, cy) = (x + step * (index % across) as f64, y + 24.0 + 25.0 * (index / across) as f64);
            area(drawing, style, (cx, cy), (26.0, 16.0));
            drawing.text(small(cx + 32.0, cy + 12.5, &fit(key, 11.5, false, step - 38.0)));
        }
        bottom = bottom.max(y + 24.0 + 25.0 * seen.len().div_ceil(across) as f64);
    }
    bottom + 4.0
}
