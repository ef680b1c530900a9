//! Headline figures, current against voltage, conditions side by side.

use crate::report::context::{Context, under};
use crate::report::figure::curves::{draw, short_circuit_voltages};
use crate::report::figure::power::{self, power_words, shared_scale};
use crate::report::figure::{Figure, SLIM, WIDE};
use crate::report::number::{current, fixed, percent, with_unit};
use crate::report::text::{Text, visible};
use crate::report::view::dark;
use crate::report::view::further::{folds, words};
use crate::report::view::layers::{capital, joined};
use crate::report::view::{Beside, Column, Section, Table, condition_words};
use crate::results::{ConditionResult, JunctionResult};

pub(super) fn volts(value: f64) -> String {
    with_unit(&fixed(value, 3), "V")
}

/// One head a condition after the first column.
pub(super) fn by_condition(context: &Context<'_>, caption: &str) -> Table {
    let mut table = Table::new(Text::of(caption), &["figure"]);
    for condition in &context.results.conditions {
        table.columns.push(Column { head: Text::of(condition.name.clone()), right: true });
    }
    table
}

/// A row with one cell a condition; left out where no condition has the figure.
pub(super) fn row(
    table: &mut Table,
    context: &Context<'_>,
    name: Text,
    of: &dyn Fn(&ConditionResult) -> Option<String>,
) {
    let cells: Vec<Option<String>> = context.results.conditions.iter().map(of).collect();
    if cells.iter().any(Option::is_some) {
        let cells = cells.into_iter().map(|cell| Text::of(cell.unwrap_or_else(|| "–".into())));
        table.row(std::iter::once(name).chain(cells).collect());
    }
}

/// The first thing anybody asks.
pub fn headline(context: &Context<'_>) -> Section {
    let mut section = Section::new("figures", "Headline figures");
    let conditions = &context.results.conditions;
    let each: Vec<String> =
        conditions.iter().take(4).map(|c| format!("{} {}", percent(c.efficiency, 2), under(c))).collect();
    let more = conditions.len().saturating_sub(4);
    let mut words = format!("Efficiency is {}", joined(&each));
    if more > 0 {
        words.push_str(&format!("; {} more in the table", crate::report::number::counted(more, "condition")));
    }
    section.lede = Some(Text::of(format!("{words}.")));

    let drawn = conditions.iter().take(power::MOST);
    let desc: Vec<String> = drawn
        .map(|c| {
            format!("{} {} ({})", visible(&c.name), percent(c.efficiency, 2), power_words(c.power_w_per_m2))
        })
        .collect();
    let mut figure = Figure::new(
        "power",
        "Greatest power by condition",
        format!(
            "One panel a condition. The solid area spans the operating voltage and current, so it is the power delivered: {}.",
            desc.join("; ")
        ),
    );
    // One or two panels stand beside the table, more stand over it.
    figure.half = conditions.len() <= 2;
    let mut figure = if figure.half {
        figure.drawn(power::draw(context, conditions.len(), 408.0), None)
    } else {
        figure.drawn(power::draw(context, 4, WIDE), Some(power::draw(context, 2, SLIM)))
    };
    figure.caption = if context.separate() {
        Text::of("Solid area is power delivered, one rectangle a junction, each at its own greatest power.")
    } else {
        Text::of("Solid area is power delivered; the dotted box is ")
            .symbol("V", "oc")
            .p(" times ")
            .symbol("J", "sc")
            .p(".")
    };
    if !shared_scale(conditions) {
        figure.caption = figure.caption.p(" Each panel has its own scale of current.");
    }
    figure.data = corners(context);
    section.figures.push(figure);
    section.tables.push(headline_table(context));
    section.notes.extend(conditions.iter().map(|condition| {
        Text::new().b(condition.name.clone()).p(format!(" {}.", condition_words(context, condition)))
    }));
    section.notes.push(Text::of(format!(
        "Efficiency is power over all the light the cell receives; {} that is {}.",
        under(context.drawn),
        with_unit(&fixed(context.drawn.incident_w_per_m2, 2), "W/m²")
    )));
    section
}

fn corners(context: &Context<'_>) -> Table {
    let mut table = Table::new(
        Text::of("Corners of the areas"),
        &["condition", ">V at greatest power, V", ">J at greatest power", ">power"],
    );
    for condition in &context.results.conditions {
        match condition.vmp_v.zip(condition.jmp_ma_per_cm2) {
            Some((v, j)) => table.row(vec![
                Text::of(condition.name.clone()),
                Text::of(fixed(v, 3)),
                Text::of(current(j)),
                Text::of(power_words(condition.power_w_per_m2)),
            ]),
            None => {
                for junction in &condition.junctions {
                    let v = junction.voltage_at_mpp_v;
                    let j = if v > 0.0 { junction.power_w_per_m2 / v / 10.0 } else { 0.0 };
                    table.row(vec![
                        Text::of(condition.name.clone()).p(", ").p(junction.name.clone()),
                        Text::of(fixed(v, 3)),
                        Text::of(current(j)),
                        Text::of(power_words(junction.power_w_per_m2)),
                    ]);
                }
            }
        }
    }
    table
}

fn headline_table(context: &Context<'_>) -> Table {
    let mut table = by_condition(context, "At the greatest power unless said otherwise");
    table.kind = "big";
    let mut add =
        |name: Text, of: &dyn Fn(&ConditionResult) -> Option<String>| row(&mut table, context, name, of);
    add(Text::of("efficiency"), &|c| Some(percent(c.efficiency, 2)));
    add(Text::of("power"), &|c| Some(power_words(c.power_w_per_m2)));
    add(Text::new().symbol("V", "oc"), &|c| c.voc_v.map(volts));
    add(Text::new().symbol("J", "sc"), &|c| c.jsc_ma_per_cm2.map(current));
    add(Text::of("fill factor"), &|c| c.fill_factor.map(|ff| percent(ff, 2)));
    add(Text::of("voltage"), &|c| c.vmp_v.map(volts));
    add(Text::of("current"), &|c| c.jmp_ma_per_cm2.map(current));
    add(Text::of("limited by"), &|c| c.limiting_junction.as_deref().map(visible));
    add(Text::of("current mismatch"), &|c| c.current_mismatch.map(|m| percent(m, 1)));
    table
}

/// Curves, and how the voltages add up.
pub fn curves(context: &Context<'_>) -> Section {
    let mut section = Section::new("curves", "Voltage and current");
    let first = context.drawn;
    if first.junction_curves.is_empty() && first.curve.voltage_v.is_empty() {
        return section;
    }
    let short = short_circuit_voltages(context);
    let series = !context.separate() && first.junctions.len() > 1;
    section.lede = Some(curves_lede(context, &short, series));
    section.figures.push(lit(context, &short, series));
    section.beside = dark::beside(context);
    section.more = folds(context, &|_, _| false, &|context| {
        let short = short_circuit_voltages(context);
        let in_the_dark = dark::beside(context).figures.into_iter();
        let figures = std::iter::once(lit(context, &short, series)).chain(in_the_dark);
        let figures = figures.map(|figure| figure.folded(context.index)).collect();
        Beside { figures, tables: Vec::new() }
    });
    section.notes.push(Text::of("Current is positive when the cell delivers power."));
    if series && short.iter().flatten().any(|v| *v < -0.05) {
        section.notes.push(Text::of("With the terminals joined, the junctions with more current drive the limiting one backwards; in a string the same happens in shade."));
    }
    section.notes.extend(words(context, &|_, _| false));
    section
}

/// Under light.
fn lit(context: &Context<'_>, short: &[Option<f64>], series: bool) -> Figure {
    let first = context.drawn;
    let (wide, slim) = draw(context);
    let marks: Vec<String> = first
        .junctions
        .iter()
        .map(|j| format!("{} at {}", visible(&j.name), with_unit(&fixed(j.voltage_at_mpp_v, 2), "V")))
        .collect();
    let whole =
        first.vmp_v.map(|v| format!(", the stack at {}", with_unit(&fixed(v, 2), "V"))).unwrap_or_default();
    let mut figure = Figure::new(
        "curves",
        "Voltage and current",
        format!(
            "Current against voltage {}, each junction by itself{}. At the greatest power: {}{whole}.",
            under(first),
            if series { " and the stack" } else { "" },
            joined(&marks)
        ),
    )
    .drawn(wide, Some(slim));
    let mut caption = format!("{}.", capital(&under(first)));
    if series {
        caption.push_str(" Dots are operating points: at the greatest power, and with the terminals joined. Dotted lines join points of equal current; along each, the junctions’ voltages add up to the stack’s and what the resistances take.");
    } else {
        caption.push_str(" Dots are the points of greatest power.");
    }
    figure.caption = Text::of(caption);
    figure.data = operating(context, short, series);
    figure
}

fn curves_lede(context: &Context<'_>, short: &[Option<f64>], series: bool) -> Text {
    let first = context.drawn;
    let at = |j: &JunctionResult| {
        format!("{} at {}", visible(&j.name), with_unit(&fixed(j.voltage_at_mpp_v, 2), "V"))
    };
    let marks: Vec<String> = first.junctions.iter().map(at).collect();
    if !series {
        return match first.vmp_v.zip(first.jmp_ma_per_cm2) {
            Some((v, j)) => Text::of(format!("The greatest power lies at {} and {}.", volts(v), current(j))),
            None => {
                Text::of(format!("Each junction gives its greatest power by itself: {}.", joined(&marks)))
            }
        };
    }
    let jmp = first.jmp_ma_per_cm2.map(|j| context.scale.text(j)).unwrap_or_default();
    let all = if first.junctions.len() == 2 { "both junctions carry" } else { "all junctions carry" };
    let mut text = Text::of(format!("At the greatest power {all} {jmp}, {}.", joined(&marks)));
    let driven = short
        .iter()
        .enumerate()
        .filter_map(|(index, v)| v.map(|v| (index, v)))
        .filter(|(_, v)| *v < -0.05)
        .min_by(|a, b| a.1.total_cmp(&b.1));
    if let (Some((index, v)), Some(jsc)) = (driven, first.jsc_ma_per_cm2) {
        let junction = &first.junctions[index];
        text = text
            .p(" At short circuit ")
            .b(junction.name.clone())
            .p(format!(" is driven to {}; the stack’s ", with_unit(&fixed(v, 2), "V")));
        text = text.symbol("J", "sc").p(format!(
            " is {}, its own photocurrent {}.",
            context.scale.number(jsc),
            context.scale.number(junction.photocurrent_ma_per_cm2)
        ));
    }
    text
}

fn operating(context: &Context<'_>, short: &[Option<f64>], series: bool) -> Table {
    let first = context.drawn;
    let mut table = Table::new(
        Text::of(capital(&under(first))),
        &[
            "",
            ">open circuit, V",
            ">short circuit",
            ">fill factor, %",
            ">V at greatest power, V",
            ">V with the stack shorted, V",
        ],
    );
    table.columns[0].head = Text::of("which");
    for (junction, short) in first.junctions.iter().zip(short) {
        table.row(vec![
            Text::of(junction.name.clone()),
            Text::of(fixed(junction.voc_v, 3)),
            Text::of(current(junction.jsc_ma_per_cm2)),
            Text::of(fixed(junction.fill_factor * 100.0, 2)),
            Text::of(fixed(junction.voltage_at_mpp_v, 3)),
            Text::of(short.filter(|_| series).map(|v| fixed(v, 3)).unwrap_or_else(|| "–".into())),
        ]);
    }
    if series {
        let number = |value: Option<f64>, decimals: usize| {
            Text::of(value.map(|v| fixed(v, decimals)).unwrap_or_default())
        };
        table.row(vec![
            Text::of("stack"),
            number(first.voc_v, 3),
            Text::of(first.jsc_ma_per_cm2.map(current).unwrap_or_default()),
            number(first.fill_factor.map(|ff| ff * 100.0), 2),
            number(first.vmp_v, 3),
            Text::of(fixed(0.0, 3)),
        ]);
    }
    table
}
