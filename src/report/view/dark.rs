//! Current against voltage in the dark, and what each junction recombines.

use crate::numerics::constants::thermal_voltage;
use crate::report::context::{Context, under};
use crate::report::figure::Figure;
use crate::report::figure::dark::{DarkLine, draw, lines};
use crate::report::number::{current, fixed, superscript};
use crate::report::text::Text;
use crate::report::view::layers::joined;
use crate::report::view::{Beside, Column, Table};

/// The figure with the table that belongs to it; nothing where nothing was driven.
pub fn beside(context: &Context<'_>) -> Beside {
    let lines = lines(context);
    if lines.is_empty() {
        return Beside::default();
    }
    Beside { figures: vec![figure(context, &lines)], tables: vec![slopes(context, &lines)] }
}

/// The figure alone.
pub fn figure(context: &Context<'_>, lines: &[DarkLine]) -> Figure {
    let marks: Vec<String> = lines
        .iter()
        .filter_map(|line| {
            let v = line.voltage_at(line.light_ma?)?;
            Some(format!("{} {}\u{a0}V", line.name, fixed(v, 3)))
        })
        .collect();
    let mut figure = Figure::new(
        "dark",
        "Voltage and current in the dark",
        format!(
            "Forward current {} on a logarithmic scale against voltage, without light. Each carries what it makes in light at {}.",
            under(context.drawn),
            joined(&marks)
        ),
    )
    .drawn(draw(lines), None);
    figure.half = true;
    figure.caption = Text::of(format!(
        "In the dark, at the temperature {}. Dots: where each carries the current it makes in light.",
        under(context.drawn)
    ));
    figure.data = table(lines, if context.index > 0 { 2 } else { 1 });
    figure
}

/// Every `step`th decade.
fn table(lines: &[DarkLine], step: usize) -> Table {
    let mut table =
        Table::new(Text::of("Voltage at a forward current in the dark, V"), &[">current, mA/cm²"]);
    for line in lines {
        table.columns.push(Column { head: Text::of(line.name.clone()), right: true });
    }
    let first = lines.iter().filter_map(|l| l.points.first()).map(|p| p.1).fold(f64::MAX, f64::min);
    let last = lines.iter().filter_map(|l| l.points.last()).map(|p| p.1).fold(f64::MIN, f64::max);
    for decade in (first.round() as i32..=last.round() as i32).rev().step_by(step) {
        let volts = |line: &DarkLine| line.voltage_at(10f64.powi(decade)).map(|v| fixed(v, 3));
        let head = Text::of(format!("10{}", superscript(decade)));
        let cells = lines.iter().map(|line| Text::of(volts(line).unwrap_or_else(|| "–".into())));
        table.row(std::iter::once(head).chain(cells).collect());
    }
    table
}

/// How steep each curve is where the cell works, and a thousand times below.
fn slopes(context: &Context<'_>, lines: &[DarkLine]) -> Table {
    let thermal_v = thermal_voltage(context.drawn.temperature_k);
    let mut table = Table::new(
        Text::of(format!("Slope of the dark curves: n of exp(V/nkT), {}", under(context.drawn))),
        &["which", ">makes in light", ">n there", ">n at a thousandth of it", ">V in the dark"],
    );
    for line in lines {
        let Some(ma) = line.light_ma else { continue };
        let n = |ma: f64| line.slope_factor(ma, thermal_v).map_or_else(|| "–".into(), |n| fixed(n, 2));
        table.row(vec![
            Text::of(line.name.clone()),
            Text::of(current(ma)),
            Text::of(n(ma)),
            Text::of(n(ma / 1000.0)),
            Text::of(line.voltage_at(ma).map_or_else(|| "–".into(), |v| fixed(v, 3))),
        ]);
    }
    table
}
