//! Charts asked for, and the energy over weighted conditions.

use crate::report::context::Context;
use crate::report::figure::Figure;
use crate::report::figure::chart::map::{self, Grid};
use crate::report::figure::chart::{self, Axis, ChartLine, LINES};
use crate::report::figure::power::power_words;
use crate::report::number::{celsius, counted, fixed, percent, short, significant, trimmed, with_unit};
use crate::report::text::{Text, visible};
use crate::report::view::layers::{capital, joined};
use crate::report::view::verdict::unit_words;
use crate::report::view::{Column, Section, Table};
use crate::results::{ChartAxisResult, ChartResult, SeasonRowResult};

/// Rows or columns of a chart's table at most.
const ROWS: usize = 41;
const COLUMNS: usize = 7;

/// The section; empty where no chart is asked for.
pub fn charts(context: &Context<'_>) -> Section {
    let mut section = Section::new("charts", "Charts");
    let charts: Vec<&ChartResult> = context
        .results
        .charts
        .iter()
        .filter(|chart| {
            chart.values.iter().any(Option::is_some) && chart.axes.iter().all(|a| a.values.len() > 1)
        })
        .collect();
    let mut peaks = Vec::new();
    let mut texts: Vec<&str> = Vec::new();
    let mut number = 0;
    for chart in &charts {
        match chart.axes.as_slice() {
            [axis] if !texts.contains(&chart.text.as_str()) => {
                texts.push(&chart.text);
                let same: Vec<&ChartResult> =
                    charts.iter().copied().filter(|other| other.text == chart.text).collect();
                number += 1;
                let (figure, peak) = line(chart, axis, &same, number);
                section.beside.figures.push(figure);
                peaks.push(peak);
            }
            [outer, inner] => {
                let Some(grid) = grid(chart, outer, inner) else { continue };
                number += 1;
                let (figure, peak) = area(chart, &grid, number);
                section.beside.figures.push(figure);
                peaks.push(peak);
            }
            _ => {}
        }
    }
    if section.beside.is_empty() {
        return section;
    }
    let told: Vec<String> = peaks.into_iter().flatten().take(3).collect();
    section.lede = Some(if told.is_empty() {
        Text::of(format!("{} the file asks for.", capital(&counted(number, "chart"))))
    } else {
        Text::of(format!("{}.", capital(&joined(&told))))
    });
    section.notes.push(Text::of("Each point is a full evaluation with everything else kept."));
    section
}

/// What is drawn, with its unit: `efficiency, %`.
fn metric_words(chart: &ChartResult) -> String {
    let name = visible(&chart.metric);
    let name = if name.contains('.') { name } else { name.replace('_', " ") };
    match chart.unit.as_str() {
        "1" | "" => format!("{name}, %"),
        unit => format!("{name}, {}", unit_words(unit)),
    }
}

fn shown(chart: &ChartResult, value: f64) -> f64 {
    if chart.unit == "1" || chart.unit.is_empty() { value * 100.0 } else { value }
}

/// `29.1 %`
fn with_its_unit(chart: &ChartResult, value: f64) -> String {
    match chart.unit.as_str() {
        "1" | "" => with_unit(&trimmed(value), "%"),
        unit => with_unit(&significant(value, 4), &unit_words(unit)),
    }
}

/// `420 times`, `25 °C`
fn place_words(axis: &ChartAxisResult, value: f64) -> String {
    let unit = match axis.unit.as_str() {
        "degC" => "°C".to_string(),
        "deg" => "degrees".to_string(),
        other => unit_words(other),
    };
    with_unit(&short(value), &unit)
}

/// `, under noon.` where the statement does not say so itself.
fn under_words(chart: &ChartResult, condition: &str) -> String {
    if chart.text.contains(" under ") { ".".into() } else { format!(", under {condition}.") }
}

/// Points of one chart, ascending.
fn points(chart: &ChartResult, axis: &ChartAxisResult) -> Vec<(f64, f64)> {
    let both = axis.values.iter().zip(&chart.values);
    let mut points: Vec<(f64, f64)> =
        both.filter_map(|(x, value)| Some((*x, shown(chart, (*value)?)))).collect();
    points.sort_by(|a, b| a.0.total_cmp(&b.0));
    points
}

/// One quantity: a line a condition.
fn line(
    chart: &ChartResult,
    axis: &ChartAxisResult,
    same: &[&ChartResult],
    number: usize,
) -> (Figure, Option<String>) {
    let lines: Vec<ChartLine> = same
        .iter()
        .map(|chart| ChartLine { name: visible(&chart.condition), points: points(chart, axis) })
        .collect();
    let metric = metric_words(chart);
    let peak = |line: &ChartLine| {
        let (x, value) = line.peak()?;
        Some(format!("{} at {}", with_its_unit(chart, value), place_words(axis, x)))
    };
    let peaks: Vec<String> =
        lines.iter().filter_map(|line| Some(format!("{} under {}", peak(line)?, line.name))).collect();
    let title = format!("{} against {}", capital(&chart.metric.replace('_', " ")), visible(&axis.path));
    let desc = format!("{metric} against {}. Highest: {}.", Axis::words(axis), joined(&peaks));
    let mut figure = Figure::new("chart", &visible(&title), desc)
        .counted(number)
        .drawn(chart::lines(&lines, axis, &metric), None);
    figure.half = true;
    figure.caption = Text::code(chart.text.clone());
    if let [one] = lines.as_slice() {
        figure.caption = figure.caption.p(under_words(chart, &one.name));
    } else if lines.len() > LINES {
        let more = counted(lines.len() - LINES, "condition");
        figure.caption = figure.caption.p(format!("; {more} more in the table."));
    }
    let mut table = Table::new(Text::of(metric), &[]);
    table.columns.push(Column { head: Text::of(Axis::words(axis)), right: true });
    for line in &lines {
        table.columns.push(Column { head: Text::of(line.name.clone()), right: true });
    }
    let mut places: Vec<f64> = axis.values.clone();
    places.sort_by(f64::total_cmp);
    for x in places.iter().step_by(places.len().div_ceil(ROWS).max(1)) {
        let at = |line: &ChartLine| line.points.iter().find(|p| p.0 == *x).map(|p| significant(p.1, 4));
        let cells = lines.iter().map(|line| Text::of(at(line).unwrap_or_else(|| "–".into())));
        table.row(std::iter::once(Text::of(significant(*x, 4))).chain(cells).collect());
    }
    figure.data = table;
    let first = lines.first().and_then(|line| Some((peak(line)?, line.name.clone())));
    let sentence = first
        .map(|(peak, name)| format!("{} under {name} is highest, {peak}", chart.metric.replace('_', " ")));
    (figure, sentence)
}

/// Both axes ascending: the inner one across, the outer one up.
fn grid(chart: &ChartResult, outer: &ChartAxisResult, inner: &ChartAxisResult) -> Option<Grid> {
    if chart.values.len() != outer.values.len() * inner.values.len() {
        return None;
    }
    let order = |axis: &ChartAxisResult| {
        let mut order: Vec<usize> = (0..axis.values.len()).collect();
        order.sort_by(|&a, &b| axis.values[a].total_cmp(&axis.values[b]));
        order
    };
    let (up, across) = (order(outer), order(inner));
    let sorted = |axis: &ChartAxisResult, order: &[usize]| ChartAxisResult {
        values: order.iter().map(|&index| axis.values[index]).collect(),
        ..axis.clone()
    };
    let value = |row: usize, column: usize| {
        chart.values[row * inner.values.len() + column].map_or(f64::NAN, |value| shown(chart, value))
    };
    let values = up.iter().map(|&row| across.iter().map(|&column| value(row, column)).collect()).collect();
    Some(Grid { x: sorted(inner, &across), y: sorted(outer, &up), values })
}

/// Two quantities: a map.
fn area(chart: &ChartResult, grid: &Grid, number: usize) -> (Figure, Option<String>) {
    let metric = metric_words(chart);
    let title =
        format!("{} over {} and {}", capital(&chart.metric.replace('_', " ")), grid.y.path, grid.x.path);
    let peak = grid.peak().map(|(x, y, value)| {
        format!(
            "{} at {} and {}",
            with_its_unit(chart, value),
            place_words(&grid.y, y),
            place_words(&grid.x, x)
        )
    });
    let desc = format!(
        "Contours of {metric} over {} upwards and {} across, deeper in colour where it is higher. Highest: {}.",
        Axis::words(&grid.y),
        Axis::words(&grid.x),
        peak.clone().unwrap_or_default()
    );
    let mut figure =
        Figure::new("chart", &visible(&title), desc).counted(number).drawn(map::draw(grid, &metric), None);
    figure.half = true;
    figure.caption = Text::code(chart.text.clone())
        .p(under_words(chart, &visible(&chart.condition)))
        .p(" The deeper the colour, the more; the dot is the highest point.");
    figure.data = map_table(grid, &metric);
    let sentence = peak.map(|peak| {
        format!("{} under {} is highest, {peak}", chart.metric.replace('_', " "), visible(&chart.condition))
    });
    (figure, sentence)
}

fn map_table(grid: &Grid, metric: &str) -> Table {
    let mut table = Table::new(Text::of(metric), &[]);
    table.kind = "roomy";
    let head = format!("{} ↓, {} →", Axis::words(&grid.y), Axis::words(&grid.x));
    table.columns.push(Column { head: Text::of(head), right: true });
    // Evenly thinned, both ends kept.
    let pick = |n: usize, most: usize| -> Vec<usize> {
        let wanted = n.min(most);
        let mut picked: Vec<usize> =
            (0..wanted).map(|i| if wanted > 1 { i * (n - 1) / (wanted - 1) } else { 0 }).collect();
        picked.dedup();
        picked
    };
    let columns = pick(grid.x.values.len(), COLUMNS);
    for &column in &columns {
        table.columns.push(Column { head: Text::of(significant(grid.x.values[column], 3)), right: true });
    }
    for row in pick(grid.y.values.len(), 2 * COLUMNS) {
        let cells = columns.iter().map(|&column| {
            let value = grid.values[row][column];
            Text::of(if value.is_finite() { significant(value, 4) } else { "–".into() })
        });
        table.row(std::iter::once(Text::of(significant(grid.y.values[row], 3))).chain(cells).collect());
    }
    table
}

/// Rows of a season shown one by one.
const SEASON_ROWS: usize = 24;

/// Energy over weighted conditions; empty where none are given.
pub fn energy(context: &Context<'_>) -> Section {
    let mut section = Section::new("energy", "Energy over weighted conditions");
    let Some(season) = &context.results.season else { return section };
    section.lede = Some(Text::of(format!(
        "Over {} of {}: {} delivered of {} received, {}; that is {} of what its efficiency under {} would give.",
        with_unit(&fixed(season.hours, 0), "h"),
        visible(&season.file),
        with_unit(&significant(season.energy_kwh_per_m2, 4), "kWh/m²"),
        with_unit(&significant(season.incident_kwh_per_m2, 4), "kWh/m²"),
        percent(season.efficiency, 2),
        percent(season.harvest_ratio, 1),
        visible(&season.condition)
    )));
    let energy = |row: &SeasonRowResult| row.hours * row.power_w_per_m2 / 1000.0;
    let mut order: Vec<usize> = (0..season.rows.len()).collect();
    let all = order.len() <= SEASON_ROWS;
    if !all {
        order.sort_by(|&a, &b| energy(&season.rows[b]).total_cmp(&energy(&season.rows[a])).then(a.cmp(&b)));
        order.truncate(SEASON_ROWS);
        order.sort_unstable();
    }
    let caption = if all {
        format!("Each row of {}", visible(&season.file))
    } else {
        format!(
            "The {SEASON_ROWS} rows of {} that give most, of {} in all; the others are in the numbers file",
            visible(&season.file),
            fixed(season.rows.len() as f64, 0)
        )
    };
    let mut table = Table::new(
        Text::of(caption),
        &[
            ">row",
            ">hours",
            "light",
            ">temperature",
            ">times the light",
            ">received",
            ">delivered",
            ">efficiency",
            ">energy, kWh/m²",
        ],
    );
    table.kind = "roomy";
    for index in order {
        let row = &season.rows[index];
        let efficiency = if row.incident_w_per_m2 > 0.0 {
            percent(row.power_w_per_m2 / row.incident_w_per_m2, 2)
        } else {
            "–".into()
        };
        table.row(vec![
            Text::of((index + 1).to_string()),
            Text::of(significant(row.hours, 4)),
            Text::of(row.light.clone()),
            Text::of(celsius(row.temperature_k)),
            Text::of(short(row.concentration)),
            Text::of(power_words(row.incident_w_per_m2)),
            Text::of(power_words(row.power_w_per_m2)),
            Text::of(efficiency),
            Text::of(significant(energy(row), 4)),
        ]);
    }
    section.tables.push(table);
    section
}
