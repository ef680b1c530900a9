//! Where the light goes, with its words.

use crate::report::context::{Context, under};
use crate::report::figure::light::{Light, draw};
use crate::report::figure::{Figure, eqe, plot};
use crate::report::number::{fixed, trimmed, with_unit};
use crate::report::text::{Text, visible};
use crate::report::view::carriers;
use crate::report::view::further::{folds, same_light, words};
use crate::report::view::layers::{capital, joined};
use crate::report::view::{Beside, Section, Table};

/// The section; empty where there is no spectral data.
pub fn light(context: &Context<'_>) -> Section {
    let mut section = Section::new("light", "Where the light goes");
    let Some(light) = Light::of(context) else { return section };
    let scale = context.scale;
    let nm = |value: f64| with_unit(&fixed(value, 0).replace('\u{202f}', ""), "nm");
    let made: f64 = light.bands.iter().filter(|band| band.junction.is_some()).map(|band| band.drawn_ma).sum();
    let mut lost: Vec<_> =
        light.bands.iter().filter(|band| band.junction.is_none() && band.drawn_ma > 0.0).collect();
    lost.sort_by(|a, b| b.drawn_ma.total_cmp(&a.drawn_ma));
    let losses: Vec<String> =
        lost.iter().take(3).map(|band| format!("{} ({})", band.name, scale.number(band.drawn_ma))).collect();
    let mut lede = Text::of(format!(
        "Of the {} of sunlight up to {}, {} become current.",
        scale.text(light.sums_ma.0),
        nm(light.range_nm.1),
        scale.number(made)
    ));
    if !losses.is_empty() {
        let begin = if losses.len() == 1 { "The loss" } else { "The largest losses" };
        lede = lede.p(format!(" {begin}: {}.", joined(&losses)));
    }
    section.lede = Some(lede);

    section.figures.push(destinations(context, &light));
    section.figures.extend(efficiency(context));
    section.tables.extend(carriers::losses(context));
    section.more = folds(context, &same_light, &|context| {
        let figures = Light::of(context).map(|light| destinations(context, &light)).into_iter();
        let figures = figures.chain(efficiency(context)).map(|figure| figure.folded(context.index));
        Beside { figures: figures.collect(), tables: Vec::new() }
    });
    section.notes = vec![
        Text::new()
            .b("Solid")
            .p(" is current, ")
            .b("hatched")
            .p(" is lost, in the hatch of the layer that took it. Blank passes through."),
        Text::of("Count cells, or read the numbers: both give the same answer."),
    ];
    section.notes.extend(words(context, &same_light));
    section
}

/// Every photon by what became of it.
fn destinations(context: &Context<'_>, light: &Light) -> Figure {
    let scale = context.scale;
    let nm = |value: f64| with_unit(&fixed(value, 0).replace('\u{202f}', ""), "nm");
    let (wide, slim) = draw(context, light);
    let parts: Vec<String> =
        light.bands.iter().map(|band| format!("{} {}", band.name, scale.number(band.drawn_ma))).collect();
    let mut figure = Figure::new(
        "light",
        "Where the light goes",
        format!(
            "Every photon between {} and {}, {} in all, divided into what becomes current and what is lost. The axis is stretched so that equal widths are equal photon current and every area reads in {}: {}.",
            nm(light.range_nm.0),
            nm(light.range_nm.1),
            scale.text(light.sums_ma.0),
            scale.unit,
            parts.join(", ")
        ),
    )
    .drawn(wide, Some(slim));
    let cell = scale.of(plot::round_step(light.total_ma.0 / 11.0) * 0.2);
    let cell = with_unit(&trimmed(cell), scale.unit);
    let mut caption = format!(
        "{}. Height is the share of the photons, width is photon current, so area is {} and each cell of the grid is {cell}.",
        capital(&under(context.drawn)),
        scale.unit
    );
    if light.total_ma.1 > light.total_ma.0 * 1.002 {
        caption.push_str(&format!(
            " Beyond {} lie {} that make no current.",
            nm(light.range_nm.1),
            scale.text(light.sums_ma.1 - light.sums_ma.0)
        ));
    }
    figure.caption = Text::of(caption);
    figure.data = table(context, light);
    figure
}

fn table(context: &Context<'_>, light: &Light) -> Table {
    let nm = |value: f64| fixed(value, 0).replace('\u{202f}', "");
    let drawn = format!(">{} to {} nm, as drawn", nm(light.range_nm.0), nm(light.range_nm.1));
    let whole = format!(">{} to {} nm", nm(light.range_nm.0), nm(light.range_nm.2));
    let mut table = Table::new(
        Text::of(format!("Photon current, {}", context.scale.unit)),
        &["part of the light", &drawn, &whole],
    );
    let cells = |name: &str, drawn: f64, whole: f64| {
        vec![Text::of(name), Text::of(context.scale.number(drawn)), Text::of(context.scale.number(whole))]
    };
    for band in &light.bands {
        table.row(cells(&band.name, band.drawn_ma, band.whole_ma));
    }
    table.row(cells("all", light.sums_ma.0, light.sums_ma.1));
    table
}

fn efficiency(context: &Context<'_>) -> Option<Figure> {
    let range = eqe::range(context)?;
    let (wide, slim) = eqe::draw(context, range);
    let internal = eqe::follows_carriers(context);
    let names: Vec<String> = context.drawn.junctions.iter().map(|j| visible(&j.name)).collect();
    let mut figure = Figure::new(
        "eqe",
        "Quantum efficiency",
        format!(
            "External quantum efficiency of {} against wavelength from {} to {} nm, with the share of the light that is not reflected{}.",
            joined(&names),
            fixed(range.0, 0),
            fixed(range.1, 0),
            if internal { ", what each absorbs, and the internal quantum efficiency" } else { "" }
        ),
    )
    .drawn(wide, Some(slim));
    let mut caption =
        format!("Electrons per photon that reaches the cell between the fingers, {}.", under(context.drawn));
    if internal {
        caption.push_str(" Heavy lines: collected; tinted: absorbed in the junction; thin lines: collected of what is absorbed, the internal efficiency.");
    }
    figure.caption = Text::of(caption);
    let spectral = &context.drawn.spectral;
    let mut heads = vec![">wavelength, nm".to_string()];
    heads.extend(names.iter().map(|name| format!(">{name}, %")));
    if internal {
        heads.extend(names.iter().map(|name| format!(">{name}, internal, %")));
    }
    heads.push(">reflected, %".into());
    let heads: Vec<&str> = heads.iter().map(String::as_str).collect();
    let mut table = Table::new(Text::of("Quantum efficiency and reflectance"), &heads);
    let step = if range.1 - range.0 > 900.0 { 50.0 } else { 25.0 };
    // Beside the first, a further condition changes little: every other line is enough.
    let step = if context.index > 0 { 2.0 * step } else { step };
    let mut nm = (range.0 / step).ceil() * step;
    while nm <= range.1 {
        let at = |values: &[f64]| {
            plot::interpolate(&spectral.wavelength_nm, values, nm)
                .map(|v| fixed(v * 100.0, 1))
                .unwrap_or_default()
        };
        let mut cells = vec![Text::of(fixed(nm, 0).replace('\u{202f}', ""))];
        for junction in &context.drawn.junctions {
            cells.push(Text::of(spectral.eqe.get(&junction.name).map(|eqe| at(eqe)).unwrap_or_default()));
        }
        for junction in context.drawn.junctions.iter().filter(|_| internal) {
            let shown = eqe::internal(context, &junction.name);
            let value = shown.and_then(|points| {
                let (x, y): (Vec<f64>, Vec<f64>) = points.into_iter().unzip();
                let inside = x.first()? <= &nm && &nm <= x.last()?;
                inside.then(|| plot::interpolate(&x, &y, nm)).flatten()
            });
            cells.push(Text::of(value.map(|v| fixed(v * 100.0, 1)).unwrap_or_else(|| "–".into())));
        }
        cells.push(Text::of(at(&spectral.reflectance)));
        table.row(cells);
        nm += step;
    }
    figure.data = table;
    Some(figure)
}
