//! What becomes of minority carriers, layer by layer, and where light is lost to current.

use crate::report::context::{Context, Row, under};
use crate::report::number::{CurrentScale, percent, significant, with_unit};
use crate::report::text::{Text, visible};
use crate::report::view::further::DRAWN;
use crate::report::view::layers::{capital, joined};
use crate::report::view::{Column, Section, Table};
use crate::results::ConditionResult;

/// The section; empty where no layer's carriers are followed.
pub fn carriers(context: &Context<'_>) -> Section {
    let mut section = Section::new("carriers", "Carriers, layer by layer");
    let rows: Vec<Row<'_>> = context.layers().filter(|row| row.result.transport.is_some()).collect();
    if rows.is_empty() {
        return section;
    }
    section.lede = Some(lede(context));
    let mut origins: Vec<&str> =
        rows.iter().filter_map(|row| Some(row.result.transport.as_ref()?.origin.as_str())).collect();
    origins.dedup();
    let alike = origins.len() == 1;
    let mut table = Table::new(
        Text::of("Minority carriers at 25 °C at the beginning of life; collected ").p(under(context.drawn)),
        &[
            ">no.",
            "layer",
            "material",
            "minority",
            ">mobility, cm²/Vs",
            ">lifetime, ns",
            ">without radiation, ns",
            ">diffusion length, µm",
            ">of the thickness",
            ">collected",
        ],
    );
    table.kind = "roomy";
    if !alike {
        table.columns.push(Column { head: Text::of("from"), right: false });
    }
    for row in &rows {
        let Some(transport) = &row.result.transport else { continue };
        let number = |value: f64| Text::of(significant(value, 3));
        let thick_um = row.result.thickness_nm.filter(|nm| *nm > 0.0).map(|nm| nm / 1000.0);
        let ratio = thick_um.map(|um| times(transport.diffusion_length_um / um));
        let collected = row
            .light
            .filter(|light| light.absorbed_ma_per_cm2 > 1e-6)
            .map(|light| percent(light.collected_ma_per_cm2 / light.absorbed_ma_per_cm2, 1));
        let mut cells = vec![
            Text::of(row.number().to_string()),
            Text::of(row.duty(context.design)),
            Text::material(row.material()),
            Text::of(format!("{}s", transport.minority_carrier)),
            number(transport.mobility_cm2_per_vs),
            number(transport.lifetime_ns),
            number(transport.non_radiative_lifetime_ns),
            number(transport.diffusion_length_um),
            Text::of(ratio.unwrap_or_default()),
            Text::of(collected.unwrap_or_default()),
        ];
        if !alike {
            cells.push(Text::of(transport.origin.clone()));
        }
        table.row(cells);
    }
    section.tables.push(table);
    section.notes.push(Text::of(
        "Diffusion length over thickness says whether a carrier born at the far side arrives: above one most do.",
    ));
    let from = match origins.first() {
        Some(origin) if alike => Text::of("Everywhere: ").p(*origin),
        _ => Text::new()
            .b("From")
            .p(": stated in the file, by the material’s law, or derived from the numbers beside it"),
    };
    section.notes.push(from.p(". An estimate of the library is named so among the origins of its material."));
    section
}

fn times(ratio: f64) -> String {
    with_unit(&significant(ratio, 2), "times")
}

fn lede(context: &Context<'_>) -> Text {
    let shares: Vec<String> = context
        .drawn
        .junctions
        .iter()
        .filter_map(|j| Some(format!("{} {}", visible(&j.name), percent(j.collection_efficiency?, 1))))
        .collect();
    if shares.is_empty() {
        return Text::of("The carriers of these layers are followed.");
    }
    Text::of(format!(
        "{} each junction collects of what it absorbs: {}.",
        capital(&under(context.drawn)),
        joined(&shares)
    ))
}

/// Where light makes no current: what is reflected, and what each layer keeps, by condition.
pub fn losses(context: &Context<'_>) -> Option<Table> {
    let conditions: Vec<&ConditionResult> = context.results.conditions.iter().take(DRAWN).collect();
    let lost = |condition: &ConditionResult, index: usize| {
        condition.layers.get(index).map(|l| (l.absorbed_ma_per_cm2 - l.collected_ma_per_cm2).max(0.0))
    };
    let rows: Vec<Row<'_>> = context
        .layers()
        .filter(|row| {
            conditions.iter().any(|c| c.layers.get(row.index).is_some_and(|l| l.absorbed_ma_per_cm2 > 5e-5))
        })
        .collect();
    if rows.is_empty() {
        return None;
    }
    let unit = context.scale.unit;
    let heads = [
        ">no.".into(),
        "layer".into(),
        "material".into(),
        format!(">absorbed, {unit}"),
        format!(">collected, {unit}"),
    ];
    let heads: Vec<&str> = heads.iter().map(String::as_str).collect();
    let mut table = Table::new(
        Text::of("Light by layer, as photon current; lost is what it absorbs and gives to no contact"),
        &heads,
    );
    // As long as the stack: told on demand where that is very long.
    table.kind = if rows.len() > 24 { "fold" } else { "roomy" };
    // Under concentrated light another unit suits.
    let scales: Vec<CurrentScale> = (0..conditions.len()).map(|index| context.under(index).scale).collect();
    for (condition, scale) in conditions.iter().zip(&scales) {
        let name = if conditions.len() == 1 { String::new() } else { format!(" {}", under(condition)) };
        table.columns.push(Column { head: Text::of(format!("lost{name}, {}", scale.unit)), right: true });
    }
    let number = |ma: f64| Text::of(if ma > 0.0 { context.scale.number(ma) } else { "–".into() });
    for row in &rows {
        let light = context.drawn.layers.get(row.index);
        let duty = row.duty(context.design);
        let of = row.junction().and_then(|index| context.drawn.junctions.get(index));
        let layer =
            of.map_or_else(|| duty.to_string(), |junction| format!("{duty} of {}", visible(&junction.name)));
        let mut cells = vec![
            Text::of(row.number().to_string()),
            Text::of(layer),
            Text::material(row.material()),
            light.map(|l| number(l.absorbed_ma_per_cm2)).unwrap_or_default(),
            light.map(|l| number(l.collected_ma_per_cm2)).unwrap_or_default(),
        ];
        let of = |(condition, scale): (&&ConditionResult, &CurrentScale)| {
            Text::of(lost(condition, row.index).map(|ma| scale.number(ma)).unwrap_or_default())
        };
        cells.extend(conditions.iter().zip(&scales).map(of));
        table.row(cells);
    }
    let sum = |of: &dyn Fn(usize) -> f64| -> f64 { rows.iter().map(|row| of(row.index)).sum() };
    let first = |of: fn(&crate::results::LayerLight) -> f64| {
        number(sum(&|index| context.drawn.layers.get(index).map_or(0.0, of)))
    };
    let mut cells = vec![
        Text::new(),
        Text::of("all layers"),
        Text::new(),
        first(|l| l.absorbed_ma_per_cm2),
        first(|l| l.collected_ma_per_cm2),
    ];
    let all = |condition: &ConditionResult| sum(&|index| lost(condition, index).unwrap_or(0.0));
    cells.extend(conditions.iter().zip(&scales).map(|(c, scale)| Text::of(scale.number(all(c)))));
    table.row(cells);
    let mut cells = vec![
        Text::new(),
        Text::of("reflected, where a junction absorbs"),
        Text::new(),
        Text::new(),
        Text::new(),
    ];
    cells.extend(
        conditions.iter().zip(&scales).map(|(c, scale)| Text::of(scale.number(c.reflected_ma_per_cm2))),
    );
    table.row(cells);
    Some(table)
}
