//! Band edges through the stack, with their words.

use crate::report::context::{Context, Row};
use crate::report::figure::Figure;
use crate::report::figure::bands::{BLOCKS_EV, Meaning, WEAK_EV, draw};
use crate::report::number::{counted, fixed, signed, with_unit};
use crate::report::text::Text;
use crate::report::view::layers::capital;
use crate::report::view::{Section, Table};
use crate::results::{BandDiagram, BandStep};

/// The section; empty where fewer than two layers have edges.
pub fn bands(context: &Context<'_>) -> Section {
    let mut section = Section::new("bands", "Band edges through the stack");
    let Some(bands) = context.results.bands.as_ref().filter(|bands| bands.layers.len() > 1) else {
        return section;
    };
    section.lede = Some(lede(context, bands));
    let (wide, slim) = draw(context, bands);
    let at_rest = bands.model == "equilibrium";
    let mut figure = Figure::new(
        "bands",
        "Band edges through the stack",
        format!(
            "Conduction and valence edge in eV {} from the sunward side to the rear, {}. {}.",
            if at_rest { "over the Fermi level" } else { "against the vacuum level" },
            counted(bands.layers.len(), "layer"),
            bands
                .steps
                .iter()
                .filter(|step| step.keeps_in)
                .map(|step| words(context, step))
                .collect::<Vec<_>>()
                .join("; ")
        ),
    )
    .drawn(wide, Some(slim));
    let mut caption = String::from(if at_rest {
        "In the dark, without bias, at 25\u{a0}°C."
    } else {
        "Flat edges against the vacuum level at 25\u{a0}°C: a layer lacks densities of states or a permittivity, so how doping bends them is not worked out."
    });
    caption.push_str(" Layer numbers above. Widths grow with the logarithm of the thickness, and depth is drawn out near both faces of a layer. Tinted: where light becomes current. Heavy lines are steps that keep carriers in");
    let bad = bands.steps.iter().any(|step| matches!(Meaning::of(step), Meaning::Weak | Meaning::Blocks));
    caption.push_str(if bad {
        "; red ones should and do not, or stand in the way of carriers that are to leave."
    } else {
        "."
    });
    figure.caption = Text::of(caption);
    figure.data = edges(context, bands);
    section.figures.push(figure);
    if !bands.steps.is_empty() {
        section.tables.push(steps(context, bands));
    }
    section.notes.push(Text::of(format!(
        "A step below {}, four times the thermal energy, keeps nobody in; one below {} lets more than 10\u{a0}A/cm² leave by thermionic emission. Layers thin enough to tunnel through count as steps all the same.",
        with_unit(&fixed(WEAK_EV * 1000.0, 0), "meV"),
        with_unit(&fixed(BLOCKS_EV * 1000.0, 0), "meV")
    )));
    if at_rest {
        section.notes.push(Text::of("Abrupt interfaces without charge or dipole, full ionisation; narrow spikes that carriers tunnel through count as steps."));
    }
    section
}

fn row<'a>(context: &Context<'a>, name: &str) -> Option<Row<'a>> {
    context.layers().find(|row| row.result.name == name)
}

/// `base 6`
fn layer(context: &Context<'_>, name: &str) -> String {
    row(context, name)
        .map_or_else(String::new, |row| format!("{} {}", row.duty(context.design), row.number()))
}

/// `electrons meet 220 meV from base 6 to BSF 7`
fn words(context: &Context<'_>, step: &BandStep) -> String {
    format!(
        "{} meet {} from {} to {}",
        step.carrier,
        with_unit(&fixed(step.barrier_ev * 1000.0, 0), "meV"),
        layer(context, &step.from),
        layer(context, &step.to)
    )
}

fn lede(context: &Context<'_>, bands: &BandDiagram) -> Text {
    let of = |meaning: Meaning| -> Vec<&BandStep> {
        bands.steps.iter().filter(|step| Meaning::of(step) == meaning).collect()
    };
    let (holds, weak, blocks) = (of(Meaning::Holds), of(Meaning::Weak), of(Meaning::Blocks));
    let mut text = if holds.is_empty() && weak.is_empty() {
        Text::of("No layer that collects has a neighbour of another kind.")
    } else if let Some(worst) = weak.iter().min_by(|a, b| a.barrier_ev.total_cmp(&b.barrier_ev)) {
        let all = holds.len() + weak.len();
        Text::of(format!(
            "{} of {} that should keep carriers in {} hardly there: {}.",
            capital(&crate::report::number::count(weak.len())),
            counted(all, "step"),
            if weak.len() == 1 { "is" } else { "are" },
            words(context, worst)
        ))
    } else {
        let least = holds.iter().min_by(|a, b| a.barrier_ev.total_cmp(&b.barrier_ev));
        let least =
            least.map(|step| format!(" The smallest step: {}.", words(context, step))).unwrap_or_default();
        Text::of(format!("Every face keeps in the carriers it should.{least}"))
    };
    if let Some(worst) = blocks.iter().max_by(|a, b| a.barrier_ev.total_cmp(&b.barrier_ev)) {
        let verb = if blocks.len() == 1 { "stands" } else { "stand" };
        text = text.p(format!(
            " {} {verb} in the way of carriers that are to leave; the highest: {}.",
            capital(&counted(blocks.len(), "step")),
            words(context, worst)
        ));
    }
    text
}

fn steps(context: &Context<'_>, bands: &BandDiagram) -> Table {
    let mut table = Table::new(
        Text::of("Steps where current is collected; positive is uphill"),
        &["from", "to", "carriers", ">step, meV", "what it does"],
    );
    table.kind = if bands.steps.len() > 16 { "fold" } else { "" };
    for step in &bands.steps {
        let meaning = Meaning::of(step);
        let does = match meaning {
            Meaning::Holds => Text::of("keeps them in"),
            Meaning::Weak => Text::new().fail("should keep them in"),
            Meaning::Blocks => Text::new().fail("stands in their way"),
            Meaning::Open => Text::of("lets them leave"),
        };
        table.row(vec![
            Text::of(layer(context, &step.from)),
            Text::of(layer(context, &step.to)),
            Text::of(step.carrier.clone()),
            Text::of(fixed(step.barrier_ev * 1000.0, 0)),
            does,
        ]);
    }
    table
}

fn edges(context: &Context<'_>, bands: &BandDiagram) -> Table {
    let mut table = Table::new(
        Text::of("Edges at both faces of each layer, eV"),
        &["layer", "material", ">conduction, sunward", ">rear", ">valence, sunward", ">rear"],
    );
    for layer in &bands.layers {
        let Some(row) = row(context, &layer.name) else { continue };
        let number = |value: Option<&f64>| Text::of(value.map(|ev| signed(*ev, 3)).unwrap_or_default());
        table.row(vec![
            Text::of(format!("{} {}", row.duty(context.design), row.number())),
            Text::material(row.material()),
            number(layer.conduction_ev.first()),
            number(layer.conduction_ev.last()),
            number(layer.valence_ev.first()),
            number(layer.valence_ev.last()),
        ]);
    }
    table
}
