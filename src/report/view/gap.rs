//! Gap against mismatch to this wafer, with its words.

use crate::report::context::Context;
use crate::report::figure::Figure;
use crate::report::figure::gap::{Mark, draw, magnified, marks};
use crate::report::number::{counted, fixed, ranges, signed, thickness, with_unit};
use crate::report::text::Text;
use crate::report::view::layers::capital;
use crate::report::view::{Section, Table};
use crate::results::GapMap;

/// The section; empty without a wafer or with nothing grown on it that has a gap.
pub fn gap(context: &Context<'_>) -> Section {
    let mut section = Section::new("gap", "Gap against mismatch to this wafer");
    let Some(map) = &context.results.gap_map else { return section };
    let marks = marks(context, map);
    if map.layers.len() < 2 {
        return section;
    }
    section.lede = Some(lede(context, map, &marks));
    let (wide, slim) = draw(map, &marks);
    let mut figure = Figure::new(
        "gap",
        "Gap against mismatch to this wafer",
        format!(
            "Gap in eV against the mismatch to {} at 25 °C, which stands at zero. {} with their numbers, {} as curves: {}.",
            map.wafer,
            capital(&counted(marks.len(), "mark")),
            counted(map.families.len(), "family"),
            map.families.iter().map(|family| family.name.as_str()).collect::<Vec<_>>().join(", ")
        ),
    )
    .drawn(wide, Some(slim));
    figure.caption = Text::of("Zero is relaxed ").then(Text::material(&map.wafer)).p(format!(
        " at 25\u{a0}°C. Curves are broken where the gap is indirect; small open dots are the compounds where they end. Right, ±{}\u{a0}% magnified: a whisker spans the mismatch at which a layer of that thickness begins to relax.",
        fixed(magnified(&marks) * 100.0, 1)
    ));
    figure.data = table(map, &marks);
    section.figures.push(figure);
    if marks.iter().any(|mark| mark.numbers.len() > 1 && mark.critical.is_some()) {
        section
            .notes
            .push(Text::of("Where one mark stands for several layers, its whisker is that of the thickest."));
    }
    if marks.iter().any(|mark| mark.critical.is_some()) {
        section.notes.push(Text::of(
            "Critical thickness by balance of forces on a 60° dislocation (Matthews and Blakeslee), for a single layer at 25\u{a0}°C.",
        ));
    }
    section
}

fn percent(mismatch: f64) -> String {
    with_unit(&signed(mismatch * 100.0, 2), "%")
}

fn lede(context: &Context<'_>, map: &GapMap, marks: &[Mark]) -> Text {
    let furthest = marks.iter().max_by(|a, b| a.mismatch.abs().total_cmp(&b.mismatch.abs()));
    let most = furthest.map_or(0.0, |mark| mark.mismatch.abs());
    let mut text = if most < 0.005 {
        Text::of(format!(
            "Every layer lies within {}\u{a0}% of the wafer.",
            fixed((most * 1e4).ceil() / 100.0, 2)
        ))
    } else {
        match furthest {
            Some(mark) => {
                Text::of(format!("Furthest from the wafer lies layer {}, ", ranges(&mark.numbers, ", ")))
                    .then(Text::material(&mark.material))
                    .p(format!(", at {}.", percent(mark.mismatch)))
            }
            None => Text::new(),
        }
    };
    let nearest = map
        .layers
        .iter()
        .filter_map(|layer| Some((layer, layer.critical_mismatch?)))
        .filter(|(layer, _)| layer.mismatch.abs() > 1e-6)
        .max_by(|a, b| (a.0.mismatch.abs() / a.1).total_cmp(&(b.0.mismatch.abs() / b.1)));
    if let Some((layer, critical)) = nearest
        && let Some(row) = context.layers().find(|row| row.result.name == layer.name)
    {
        let thick = row.result.thickness_nm.map(thickness).unwrap_or_default();
        let beyond = layer.mismatch.abs() > critical;
        text = text.p(format!(
            " Layer {}, the {} of {}, is {}: {} where {thick} {} ±{}\u{a0}%.",
            row.number(),
            row.duty(context.design),
            row.material(),
            if beyond { "beyond its limit" } else { "closest to its limit" },
            percent(layer.mismatch),
            if beyond { "allows only" } else { "allows" },
            fixed(critical * 100.0, 2)
        ));
    }
    text
}

fn table(map: &GapMap, marks: &[Mark]) -> Table {
    let mut table = Table::new(
        Text::of("Layers by gap, at 25 °C, against ").then(Text::material(&map.wafer)),
        &["layers", "material", ">gap, eV", ">mismatch, %", ">begins to relax at, ± %"],
    );
    for mark in marks {
        table.row(vec![
            Text::of(ranges(&mark.numbers, ", ")),
            Text::material(&mark.material).p(if mark.alike { " and the like" } else { "" }),
            Text::of(fixed(mark.gap_ev, 3)),
            Text::of(signed(mark.mismatch * 100.0, 3)),
            Text::of(mark.critical.map(|critical| fixed(critical * 100.0, 3)).unwrap_or_else(|| "–".into())),
        ]);
    }
    table
}
