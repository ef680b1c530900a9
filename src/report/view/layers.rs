//! The cross-section with its words, and the table of layers.

use crate::design::{Duty, Extent, Growth, InterconnectKind, Place};
use crate::report::context::{Context, Row, under};
use crate::report::figure::Figure;
use crate::report::figure::section::{doping_words, draw};
use crate::report::number::{celsius, counted, fixed, signed, thickness};
use crate::report::text::{Text, visible};
use crate::report::view::sources::Sources;
use crate::report::view::{Section, Table};

/// The section of the cross-section.
pub fn stack(context: &Context<'_>) -> Section {
    let mut out = Section::new("stack", "The stack, sunward side up");
    let junctions = &context.drawn.junctions;
    let wafer = context.layers().find(|row| row.layer.duty == Duty::Wafer);
    let mut lede = Text::of(capital(&counted(junctions.len(), "junction")));
    lede = match &wafer {
        Some(wafer) => {
            let growth = if context.design.growth == Growth::Inverted { "inverted" } else { "upright" };
            lede.p(" on ").then(Text::material(wafer.material())).p(format!(", grown {growth}. "))
        }
        None => lede.p(", a study of limits without a wafer. "),
    };
    lede = match context.limiting() {
        Some(limiting) if junctions.len() > 1 => {
            let others: Vec<String> = junctions
                .iter()
                .enumerate()
                .filter(|(index, _)| *index != limiting)
                .map(|(_, j)| {
                    format!("{} in {}", context.scale.number(j.photocurrent_ma_per_cm2), visible(&j.name))
                })
                .collect();
            lede.b(junctions[limiting].name.clone()).p(format!(
                " limits the current: {}, against {}.",
                context.scale.text(junctions[limiting].photocurrent_ma_per_cm2),
                joined(&others)
            ))
        }
        _ => {
            let each: Vec<String> = junctions
                .iter()
                .enumerate()
                .map(|(index, j)| {
                    let verb = if index == 0 { " makes" } else { "" };
                    let current = context.scale.text(j.photocurrent_ma_per_cm2);
                    format!("{}{verb} {current}", visible(&j.name))
                })
                .collect();
            lede.p(format!("Junction {}.", joined(&each)))
        }
    };
    out.lede = Some(lede);
    let (wide, slim) = draw(context);
    let lit = context.layers().filter(Row::is_lit).count();
    let mut figure = Figure::new(
        "stack",
        "Cross-section, sunward side up",
        format!(
            "{} from the sunward side down. Layer heights grow with the logarithm of thickness. {}",
            capital(&counted(lit, "layer")),
            junctions
                .iter()
                .map(|j| format!(
                    "Junction {} makes {}.",
                    visible(&j.name),
                    context.scale.text(j.photocurrent_ma_per_cm2)
                ))
                .collect::<Vec<_>>()
                .join(" ")
        ),
    )
    .drawn(wide, Some(slim));
    figure.caption = caption(context);
    figure.data = table(context, None);
    out.figures.push(figure);
    out.notes.push(Text::of("The layer numbers are used on the whole sheet: marks, tables, cautions."));
    let removed: Vec<Row<'_>> = context.layers().filter(|row| row.layer.extent == Extent::Removed).collect();
    if !removed.is_empty() {
        let names: Vec<String> =
            removed.iter().map(|row| format!("{} ({})", row.number(), row.duty(context.design))).collect();
        let (noun, verb) = if removed.len() == 1 { ("Layer", "is") } else { ("Layers", "are") };
        let names = joined(&names);
        out.notes.push(Text::of(format!("{noun} {names} {verb} grown and not there in the finished cell.")));
    }
    for free in context.design.free_values.iter().take(6) {
        if free.value.is_some() {
            out.notes.push(
                Text::code(free.path.clone())
                    .p(" stands at a value of its free range ")
                    .c(free.text.clone())
                    .p("."),
            );
        }
    }
    out
}

fn caption(context: &Context<'_>) -> Text {
    let rows: Vec<Row<'_>> = context.layers().filter(Row::is_lit).collect();
    let mut words = String::from("Solid layers make current, hatched ones serve them.");
    if rows.iter().any(|row| row.result.thickness_nm.is_some()) {
        words.push_str(" A layer’s height grows with the logarithm of its thickness");
        let cut = rows.iter().any(|row| row.layer.duty == Duty::Wafer);
        words.push_str(if cut { "; the wafer is cut short." } else { "." });
    } else {
        words.push_str(" No thickness is stated; heights mean nothing.");
    }
    let planes = rows.windows(2).any(|pair| {
        pair[0].junction().is_some()
            && pair[0].junction() == pair[1].junction()
            && pair[0].result.polarity.is_some()
            && pair[1].result.polarity.is_some()
            && pair[0].result.polarity != pair[1].result.polarity
    });
    if planes {
        words.push_str(" The heavy line is the p–n plane.");
    }
    words.push_str(&format!(" Currents {}.", under(context.drawn)));
    let warm = context.drawn.temperature_k;
    if (warm - 298.15).abs() > 0.5 && rows.iter().any(|row| row.result.gap_ev.is_some()) {
        words
            .push_str(&format!(" Gaps in the rows at 25\u{a0}°C, beside the brackets at {}.", celsius(warm)));
    }
    Text::of(words)
}

/// `a, b and c`
pub(crate) fn joined(parts: &[String]) -> String {
    match parts {
        [] => String::new(),
        [one] => one.clone(),
        [front @ .., last] => format!("{} and {last}", front.join(", ")),
    }
}

pub(crate) fn capital(words: &str) -> String {
    let mut chars = words.chars();
    chars.next().map(|first| first.to_uppercase().chain(chars).collect()).unwrap_or_default()
}

/// The section of the table.
pub fn layers(context: &Context<'_>, sources: &mut Sources) -> Section {
    let mut out = Section::new("layers", "Layer by layer");
    out.tables.push(table(context, Some(sources)));
    let origins = origins(context, sources);
    if origins.groups.iter().any(|group| !group.rows.is_empty()) {
        out.tables.push(origins);
    }
    out.notes.push(Text::new().b("Sources").p(" are numbers of the list at the end; which number of a material comes from where, and how it came to be, stands in the second table."));
    if context.layers().any(|row| row.result.mismatch.is_some()) {
        out.notes.push(Text::new().b("Mismatch").p(" compares the relaxed layer with the lattice beneath it, at 25 °C: positive where the layer is larger."));
    }
    let metals: Vec<String> = context
        .layers()
        .filter(|row| row.layer.duty == Duty::Metal && row.result.origins.is_empty())
        .map(|row| visible(row.material()))
        .collect();
    if !metals.is_empty() {
        out.notes.push(Text::of(format!("{} carries no data here.", capital(&joined(&metals)))));
    }
    out
}

fn table(context: &Context<'_>, mut sources: Option<&mut Sources>) -> Table {
    let strained = context.layers().any(|row| row.result.strain.is_some_and(|s| s.abs() >= 5e-6));
    let lattice = context.layers().any(|row| row.result.lattice_constant_angstrom.is_some());
    let doped = context.layers().any(|row| row.result.doping_per_cm3.is_some());
    let measured = context.layers().any(|row| row.result.thickness_nm.is_some());
    let mut heads = vec![">no.", "layer", "material"];
    if measured {
        heads.push(">thickness");
    }
    heads.push(">gap, eV");
    if lattice {
        heads.extend([">lattice, Å", ">mismatch, %"]);
    }
    if lattice && strained {
        heads.push(">strain, %");
    }
    if doped {
        heads.push("doping, /cm³");
    }
    let makes = format!(">makes, {}", context.scale.unit);
    heads.push(&makes);
    if sources.is_some() {
        heads.push("sources");
    }
    let mut table = Table::new(Text::of("As resolved, at 25 °C; currents ").p(under(context.drawn)), &heads);
    table.kind = "layers roomy";
    let mut place = None;
    for row in context.layers() {
        if place != Some(row.layer.place) {
            place = Some(row.layer.place);
            table.group(group_words(context, row.layer.place));
        }
        let number = |value: Option<f64>, decimals: usize| {
            Text::of(value.map(|v| fixed(v, decimals)).unwrap_or_default())
        };
        let mut cells = vec![
            Text::of(row.number().to_string()),
            layer_cell(context, &row),
            Text::material(row.material()),
        ];
        if measured {
            cells.push(Text::of(thickness_words(&row)));
        }
        cells.push(match (row.result.gap_ev, row.result.gap_kind.as_deref()) {
            (Some(gap), Some(kind)) if kind.starts_with("indirect") => Text::of(format!(
                "{} {}",
                kind.replace("indirect ", "").replace(['(', ')'], ""),
                fixed(gap, 2)
            )),
            (gap, _) => number(gap, 2),
        });
        if lattice {
            cells.push(number(row.result.lattice_constant_angstrom, 4));
            cells.push(Text::of(row.result.mismatch.map(|m| signed(m * 100.0, 2)).unwrap_or_default()));
        }
        if lattice && strained {
            cells.push(Text::of(row.result.strain.map(|s| signed(s * 100.0, 2)).unwrap_or_default()));
        }
        if doped {
            cells.push(Text::of(doping_words(&row).unwrap_or_default().replace(' ', "\u{a0}")));
        }
        let current = row.collected();
        cells.push(Text::of(if current > 0.0 { context.scale.number(current) } else { String::new() }));
        if let Some(sources) = sources.as_deref_mut() {
            cells.push(Text::of(sources.of_layer(&row)));
        }
        table.row(cells);
    }
    table
}

fn layer_cell(context: &Context<'_>, row: &Row<'_>) -> Text {
    let text = Text::of(row.duty(context.design));
    match row.layer.extent {
        Extent::Everywhere => text,
        Extent::UnderFingers => text.p(", under fingers"),
        Extent::Removed => text.p(", removed"),
    }
}

fn thickness_words(row: &Row<'_>) -> String {
    match (row.result.thickness_nm, &row.result.tolerance) {
        (Some(nm), Some(tolerance)) => format!("{} {}", thickness(nm), tolerance.replace(' ', "\u{a0}")),
        (Some(nm), None) => thickness(nm),
        (None, _) => "–".into(),
    }
}

fn group_words(context: &Context<'_>, place: Place) -> Text {
    match place {
        Place::Front => Text::of("sunward"),
        Place::Junction(index) => {
            let Some(junction) = context.drawn.junctions.get(index) else { return Text::of("junction") };
            let mut words = format!(
                "junction {}: {}",
                visible(&junction.name),
                context.scale.text(junction.photocurrent_ma_per_cm2)
            );
            if context.limiting() == Some(index) {
                words.push_str(", limits");
            }
            Text::of(words)
        }
        Place::Interconnect(index) => match context.design.interconnects.get(index) {
            Some(interconnect) => {
                let name = visible(&interconnect.name.value);
                let kind = match interconnect.kind {
                    InterconnectKind::Tunnel => "tunnel",
                    InterconnectKind::Recombination => "recombination",
                };
                Text::of(if name.starts_with(kind) { name } else { format!("{kind} {name}") })
            }
            None => Text::of("tunnel"),
        },
        Place::Between => Text::of("between junctions"),
        Place::Rear => Text::of("beneath"),
    }
}

/// Each number of each material: how it came to be, and its source.
fn origins(context: &Context<'_>, sources: &mut Sources) -> Table {
    let mut table = Table::new(
        Text::of("Where the numbers of each material come from"),
        &["material", "number", "how it came to be", "source"],
    );
    table.kind = "fold";
    let mut shown: Vec<&str> = Vec::new();
    for row in context.layers() {
        if shown.contains(&row.material()) {
            continue;
        }
        shown.push(row.material());
        // Numbers of one source that came to be in one way share a line.
        let mut lines: Vec<(&str, &str, Vec<String>)> = Vec::new();
        for origin in &row.result.origins {
            let what = origin.what.replace('_', " ");
            match lines.iter_mut().find(|(kind, cite, _)| *kind == origin.kind && *cite == origin.cite) {
                Some((_, _, whats)) if whats.contains(&what) => {}
                Some((_, _, whats)) => whats.push(what),
                None => lines.push((&origin.kind, &origin.cite, vec![what])),
            }
        }
        for (index, (kind, cite, whats)) in lines.into_iter().enumerate() {
            let number = if cite.is_empty() { String::new() } else { sources.number(cite, "").to_string() };
            let name = if index == 0 { Text::material(row.material()) } else { Text::new() };
            table.row(vec![name, Text::of(whats.join(", ")), Text::of(kind), Text::of(number)]);
        }
    }
    table
}
