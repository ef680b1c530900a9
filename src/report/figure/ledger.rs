//! The ledger: a ruled account of the light's power, with a bar in each row from one zero.

use crate::report::context::{Context, Style};
use crate::report::figure::hatch::{Hatch, rectangle, strokes};
use crate::report::figure::plot::Scale;
use crate::report::figure::{Drawing, Label, SLIM, WIDE};
use crate::report::number::{MINUS, fixed};
use crate::report::palette::style_number;
use crate::report::text::visible;
use crate::report::view::account::{Account, Entry, Kind};
use crate::report::width::fit;

/// Hundredths of a W/m2 as text, from integers, so that the column adds up.
pub fn hundredths(value: i64) -> String {
    let whole = fixed((value.unsigned_abs() / 100) as f64, 0);
    let sign = if value < 0 { MINUS.to_string() } else { String::new() };
    format!("{sign}{whole}.{:02}", value.unsigned_abs() % 100)
}

/// Both drawings.
pub fn draw(context: &Context<'_>, account: &Account) -> (Drawing, Drawing) {
    (wide(context, account), slim(context, account))
}

const ROW: f64 = 20.5;

fn style(entry: &Entry) -> Style {
    match (entry.kind, entry.junction) {
        (Kind::Fingers, _) => Style { class: "fm".into(), hatch: None, key: None },
        (Kind::Reflected, _) => Style::hatched(Hatch::Zigzag(5.0), ""),
        (Kind::Passing, _) => Style { class: "lay".into(), hatch: None, key: None },
        (Kind::Delivered, _) => Style { class: "fd".into(), hatch: None, key: None },
        (Kind::Layer, _) => {
            entry.style.clone().unwrap_or_else(|| Style::hatched(Hatch::Lines(-45.0, 5.0), ""))
        }
        (_, Some(junction)) => {
            let angle = if junction % 2 == 0 { -45.0 } else { 45.0 };
            Style {
                class: "lay".into(),
                hatch: Some((format!("hj{}", style_number(junction)), Hatch::Lines(angle, 4.0))),
                key: None,
            }
        }
        _ => Style::hatched(Hatch::Lines(-45.0, 3.0), ""),
    }
}

fn bar(drawing: &mut Drawing, entry: &Entry, x: Scale, top: f64, height: f64) {
    let value = entry.value as f64 / 100.0;
    let (from, to) = (x.of(0.0f64.min(value)), x.of(0.0f64.max(value)));
    let w = (to - from).max(0.6);
    let style = style(entry);
    drawing.rect(&style.class, (from, top), (w, height));
    if let Some((class, hatch)) = style.hatch.filter(|_| w > 2.0) {
        drawing.path(&class, &strokes(hatch, &rectangle((from, top), (w, height))));
    }
}

/// Upright ticks, each with the place of its upper end and its height.
fn ticks_at(drawing: &mut Drawing, ticks: &[(f64, f64, f64)]) {
    let upright: Vec<_> =
        ticks.iter().map(|(x, top, height)| ((*x, top - 2.0), (*x, top + height + 2.0))).collect();
    drawing.lines("tickhalo", &upright);
    drawing.lines("tick", &upright);
}

/// The scale of the bars: the largest entry of either condition that is drawn.
fn scale(account: &Account, at: (f64, f64)) -> Scale {
    let most = account
        .entries
        .iter()
        .flat_map(|entry| [Some(entry.value), entry.second])
        .flatten()
        .max()
        .unwrap_or(100) as f64
        / 100.0;
    let least = account.entries.iter().map(|entry| entry.value).min().unwrap_or(0).min(0) as f64 / 100.0;
    let least = if least < -0.02 * most { least } else { 0.0 };
    Scale::new(least, most * 1.04, at)
}

/// A new group begins with a little air and a hairline.
fn opens_group(account: &Account, index: usize) -> bool {
    index > 0 && account.entries[index].kind.group() != account.entries[index - 1].kind.group()
}

fn wide(context: &Context<'_>, account: &Account) -> Drawing {
    let mut drawing = Drawing::new(WIDE, 0.0);
    let second = account.second.as_ref();
    let value_width = Label::at(0.0, 0.0, &hundredths(account.total)).bold().width().max(62.0);
    let value = 268.0 + value_width;
    let left = value + 14.0 + value_width;
    let bars = (left + 22.0, WIDE - if second.is_some() { value_width + 24.0 } else { 16.0 });
    let x = scale(account, bars);
    let name = |words: &str, room: f64| fit(&visible(words), 12.5, true, room);

    drawing.text(Label::at(2.0, 14.0, "W/m²").size(11.5).class("q"));
    drawing.text(Label::at(value, 14.0, &name(&context.drawn.name, value_width + 30.0)).bold().end());
    drawing.text(Label::at(left, 14.0, "left").size(11.5).class("q").end());
    if let Some(second) = second {
        drawing.text(Label::at(WIDE, 14.0, &name(&second.name, 130.0)).bold().end());
        let at = bars.0;
        drawing.rect("lay", (at, 5.0), (16.0, 9.0));
        let first_name = fit(&visible(&context.drawn.name), 11.5, false, 100.0);
        let label = Label::at(at + 21.0, 14.0, &first_name).size(11.5).class("q");
        let next = at + 21.0 + label.width() + 14.0;
        drawing.text(label);
        ticks_at(&mut drawing, &[(next, 5.0, 9.0)]);
        let second_name = fit(&visible(&second.name), 11.5, false, 100.0);
        drawing.text_where_free([Label::at(next + 7.0, 14.0, &second_name).size(11.5).class("q")]);
    }
    drawing.line("rule", (0.0, 22.0), (WIDE, 22.0));
    let mut y = 22.0 + ROW;
    let row_line = |drawing: &mut Drawing,
                    words: &str,
                    first: &str,
                    remains: &str,
                    other: Option<&str>,
                    strong: bool,
                    y: f64| {
        let weight = |label: Label| if strong { label.bold() } else { label };
        drawing.text(weight(Label::at(2.0, y - 6.0, &fit(words, 12.5, strong, value - value_width - 12.0))));
        drawing.text(weight(Label::at(value, y - 6.0, first).end()));
        drawing.text(Label::at(left, y - 6.0, remains).class("q").end());
        if let Some(other) = other {
            drawing.text(weight(Label::at(WIDE, y - 6.0, other).end()));
        }
    };
    let total = hundredths(account.total);
    let second_total = second.map(|second| hundredths(second.total));
    row_line(&mut drawing, "light on the cell", &total, &total, second_total.as_deref(), true, y);
    drawing.line("hair", (0.0, y), (WIDE, y));
    let first_row = y;
    let mark = drawing.mark();
    let mut remains = account.total;
    let (ticks, decimals) = x.ticks(5);
    let mut grid_lines = String::new();
    let mut rows = Vec::new();
    let mut marks = Vec::new();
    for (index, entry) in account.entries.iter().enumerate() {
        let delivered = entry.kind == Kind::Delivered;
        if delivered {
            y += 4.0;
            rows.push((y, "rule"));
        } else if opens_group(account, index) {
            y += 3.0;
            rows.push((y, "hair"));
            y += 3.0;
        }
        y += ROW;
        remains -= entry.value;
        let left_text = if delivered { String::new() } else { hundredths(remains) };
        let other = entry.second.map(hundredths);
        row_line(
            &mut drawing,
            &entry.words,
            &hundredths(entry.value),
            &left_text,
            other.as_deref(),
            delivered,
            y,
        );
        bar(&mut drawing, entry, x, y - 16.0, 11.0);
        if let Some(other) = entry.second {
            marks.push((x.of(other as f64 / 100.0), y - 16.0, 11.0));
        }
    }
    ticks_at(&mut drawing, &marks);
    for (at, class) in rows {
        drawing.line(class, (0.0, at), (WIDE, at));
    }
    y += 4.0;
    drawing.line("rule", (0.0, y), (WIDE, y));
    for value in &ticks {
        let at = x.of(*value);
        grid_lines.push_str(&format!("M{} {}V{}", super::unit(at), super::unit(first_row), super::unit(y)));
        let words = if Some(value) == ticks.last() {
            format!("{} W/m²", fixed(*value, decimals))
        } else {
            fixed(*value, decimals)
        };
        drawing.text_where_free([Label::at(at, y + 15.0, &words).size(11.5).class("q").middle()]);
    }
    drawing.path_under(mark, "hair", &grid_lines);
    y += ROW;
    row_line(
        &mut drawing,
        "sum of the lines",
        &total,
        &hundredths(remains),
        second_total.as_deref(),
        false,
        y,
    );
    // The double rule only under the sum.
    drawing.line("rule", (0.0, y), (value, y));
    drawing.line("rule", (0.0, y + 3.0), (value, y + 3.0));
    drawing.height = y + 8.0;
    drawing
}

fn slim(context: &Context<'_>, account: &Account) -> Drawing {
    let mut drawing = Drawing::new(SLIM, 0.0);
    let value_width = Label::at(0.0, 0.0, &hundredths(account.total)).bold().width().max(62.0);
    let value = SLIM;
    let x = scale(account, (2.0, SLIM));
    drawing.text(Label::at(2.0, 14.0, &fit(&visible(&context.drawn.name), 12.5, true, 240.0)).bold());
    drawing.text(Label::at(value, 14.0, "W/m²").size(11.5).class("q").end());
    drawing.line("rule", (0.0, 22.0), (SLIM, 22.0));
    let mut y = 22.0;
    let line = |drawing: &mut Drawing, words: &str, number: &str, strong: bool, y: f64| {
        let weight = |label: Label| if strong { label.bold() } else { label };
        drawing.text(weight(Label::at(2.0, y, &fit(words, 12.5, strong, SLIM - value_width - 14.0))));
        drawing.text(weight(Label::at(value, y, number).end()));
    };
    line(&mut drawing, "light on the cell", &hundredths(account.total), true, y + 16.0);
    y += 22.0;
    let mut marks = Vec::new();
    for (index, entry) in account.entries.iter().enumerate() {
        let delivered = entry.kind == Kind::Delivered;
        if delivered || opens_group(account, index) || index == 0 {
            drawing.line(if delivered { "rule" } else { "hair" }, (0.0, y + 3.0), (SLIM, y + 3.0));
            y += 4.0;
        }
        line(&mut drawing, &entry.words, &hundredths(entry.value), delivered, y + 16.0);
        bar(&mut drawing, entry, x, y + 21.0, 8.0);
        if let Some(other) = entry.second {
            marks.push((x.of(other as f64 / 100.0), y + 21.0, 8.0));
        }
        y += 35.0;
    }
    ticks_at(&mut drawing, &marks);
    drawing.line("rule", (0.0, y + 2.0), (SLIM, y + 2.0));
    line(&mut drawing, "sum of the lines", &hundredths(account.total), false, y + 18.0);
    drawing.line("rule", (0.0, y + 24.0), (SLIM, y + 24.0));
    drawing.line("rule", (0.0, y + 27.0), (SLIM, y + 27.0));
    drawing.height = y + 32.0;
    drawing
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::number::NARROW;

    #[test]
    fn hundredths_are_written_out() {
        assert_eq!(hundredths(100_037), format!("1{NARROW}000.37"));
        assert_eq!(hundredths(-5), "−0.05");
    }
}
