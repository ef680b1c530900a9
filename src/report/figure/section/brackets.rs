//! The brackets left of the stack, with what each junction makes.

use super::{HEAD, Layout};
use crate::report::context::{Context, Row};
use crate::report::figure::staircase::spread;
use crate::report::figure::{Drawing, Label, unit};
use crate::report::number::{fixed, with_unit};
use crate::report::palette::style_number;
use crate::report::text::visible;
use crate::report::width::fit;

/// A bracket a junction, with its current, its gap, and whether it limits.
pub(super) fn brackets(
    context: &Context<'_>,
    drawing: &mut Drawing,
    layout: &Layout,
    rows: &[Row<'_>],
    edges: &[f64],
) {
    let x = layout.stack.0;
    let line = 15.5;
    let mut blocks = Vec::new();
    for (index, junction) in context.drawn.junctions.iter().enumerate() {
        let of_it: Vec<usize> = (0..rows.len()).filter(|&i| rows[i].junction() == Some(index)).collect();
        let (Some(first), Some(last)) = (of_it.first(), of_it.last()) else { continue };
        let (from, to) = (edges[*first] + 1.0, edges[*last + 1] - 1.0);
        let n = style_number(index);
        drawing.path(
            &format!("br{n}"),
            &format!("M{},{}H{}V{}H{}", unit(x - 7.0), unit(from), unit(x - 12.0), unit(to), unit(x - 7.0)),
        );
        let limits = context.limiting() == Some(index);
        let lines = 3.0 + f64::from(u8::from(limits)) + f64::from(u8::from(layout.slim));
        blocks.push((index, junction, (from + to) / 2.0, lines * line, limits));
    }
    let centres = spread(&blocks.iter().map(|b| (b.2, b.3 + 6.0)).collect::<Vec<_>>(), HEAD);
    let right = x - 20.0;
    for ((index, junction, wanted, height, limits), centre) in blocks.into_iter().zip(centres) {
        if (centre - wanted).abs() > 4.0 {
            drawing.line("lead", (right + 3.0, centre - height / 2.0 + 8.0), (x - 12.0, wanted));
        }
        let mut y = centre - height / 2.0 + 11.0;
        let mut put = |label: &dyn Fn(f64) -> Label| {
            drawing.text(label(y).end());
            y += line;
        };
        let name = fit(&visible(&junction.name), 15.0, true, right - 2.0);
        put(&|y| Label::at(right, y, &name).size(15.0).bold().junction("i", index));
        let current = junction.photocurrent_ma_per_cm2;
        if layout.slim {
            put(&|y| Label::at(right, y, &context.scale.number(current)));
            put(&|y| Label::at(right, y, context.scale.unit).size(11.5).class("q"));
        } else {
            put(&|y| Label::at(right, y, &context.scale.text(current)));
        }
        put(&|y| Label::at(right, y, &with_unit(&fixed(junction.gap_ev, 2), "eV")).class("q"));
        if limits {
            put(&|y| Label::at(right - 12.0, y, "limits").bold().class("bad"));
            let tip = y - line - 4.0;
            drawing.path("fbad", &format!("M{},{}l-9,-4.5v9z", unit(right), unit(tip)));
        }
    }
}
