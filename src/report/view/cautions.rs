//! What can hurt the people who build and use the cell.
//!
//! The sheet names hazards that follow from the design and defers to those who decide: the site's
//! safety officer, safety data sheets, local codes, licensed practice.

use crate::report::context::{Context, Row};
use crate::report::number::{fixed, ranges, with_unit};
use crate::report::text::{Text, visible};
use crate::report::view::{Item, Section};

/// Above this a direct voltage counts as dangerous to touch in dry places: the usual bound of
/// extra-low voltage, 60 V ripple-free DC (IEC 61140; from memory). Local codes may set less.
const TOUCH_VOLTAGE: f64 = 60.0;

/// Heading and sentence of a caution class of the materials.
fn class_words(class: &str) -> Option<(&'static str, &'static str)> {
    Some(match class {
        "arsenic" => (
            "Arsenic compounds",
            "Dust and etch residues are toxic and carcinogenic; arsine, where it is the source, is lethal at parts per million. Growth, lapping, dicing and waste need the site’s gas and chemical safety plan.",
        ),
        "phosphorus" => (
            "Phosphorus compounds",
            "Phosphine and white phosphorus deposits in reactors and pumps are toxic and ignite in air; opening a reactor is work for trained people.",
        ),
        "hydride" => (
            "Hydride sources",
            "Arsine and phosphine are lethal at low concentration: gas detection, abatement and licensed gas handling.",
        ),
        "alkyl" | "pyrophoric" => (
            "Metal alkyls",
            "They ignite in air and react violently with water: sealed handling by trained people.",
        ),
        "lead" => (
            "Lead compounds",
            "Soluble lead is toxic and stays in the body: gloves, no dust, collected waste; rules on lead content may apply to the product.",
        ),
        "cadmium" => (
            "Cadmium compounds",
            "Toxic and carcinogenic by dust and fume: enclosed work and collected waste; rules on cadmium content may apply to the product.",
        ),
        "beryllium" => (
            "Beryllium",
            "Dust and fume cause chronic lung disease at very low amounts: enclosed work under the site’s beryllium programme.",
        ),
        "selenium" | "tellurium" => (
            "Selenium and tellurium compounds",
            "Toxic by inhalation; their hydrides are lethal at low concentration.",
        ),
        "thallium" => ("Thallium compounds", "Toxic through the skin."),
        "hydrofluoric" | "fluoride" => (
            "Fluorides and hydrofluoric acid",
            "Hydrofluoric acid burns through skin without early pain and poisons: only with calcium gluconate at hand and trained help near.",
        ),
        "etchant" => ("Etchants", "Strong acids, bases and peroxides: fume hood, face shield, never alone."),
        "flammable" => (
            "Flammable gases",
            "Hydrogen and carrier gases form explosive mixtures with air: leak detection and licensed gas handling.",
        ),
        _ => return None,
    })
}

/// The section; there is always the one about series strings.
pub fn cautions(context: &Context<'_>) -> Section {
    let mut section = Section::new("cautions", "Cautions");
    section.lede = Some(Text::of(
        "Read with the site’s safety officer. Safety data sheets, local codes and licensed practice decide; this list does not replace them.",
    ));
    let mut classes: Vec<(String, Vec<usize>)> = Vec::new();
    for row in context.layers() {
        let Some(material) = &row.layer.material else { continue };
        for class in &material.cautions {
            match classes.iter_mut().find(|(known, _)| known == class) {
                Some((_, layers)) => layers.push(row.number()),
                None => classes.push((class.clone(), vec![row.number()])),
            }
        }
    }
    for (class, layers) in classes {
        section.items.push(class_item(&class, &layers));
    }
    dopants(context, &mut section);
    concentration(context, &mut section);
    voltage(context, &mut section);
    section
}

fn class_item(class: &str, layers: &[usize]) -> Item {
    let where_ = if layers.len() == 1 { "layer" } else { "layers" };
    let place = format!(" ({where_} {})", ranges(layers, ", "));
    match class_words(class) {
        Some((head, body)) => Item { head: Text::of(format!("{head}{place}")), body: Text::of(body) },
        None => Item {
            head: Text::of(format!("{}{place}", visible(class))),
            body: Text::of("See the safety data sheet of the material."),
        },
    }
}

/// Dopants with hazards of their own, where the material does not name them already.
fn dopants(context: &Context<'_>, section: &mut Section) {
    let layers: Vec<usize> = context
        .layers()
        .filter(|row| row.result.species.as_deref() == Some("Be"))
        .map(|row| Row::number(&row))
        .collect();
    if !layers.is_empty() {
        section.items.push(class_item("beryllium", &layers));
    }
}

fn concentration(context: &Context<'_>, section: &mut Section) {
    let most =
        context.results.conditions.iter().max_by(|a, b| a.incident_w_per_m2.total_cmp(&b.incident_w_per_m2));
    let Some(condition) = most.filter(|c| c.concentration > 1.5 && c.incident_w_per_m2 > 2000.0) else {
        return;
    };
    section.items.push(Item {
        head: Text::of("Concentrated sunlight"),
        body: Text::of(format!(
            "Under {} the cell receives {}. The focus burns skin, blinds and ignites; stray beams move with the sun. Cover the optics during work, wear filters rated for it, keep the cooling interlocked.",
            visible(&condition.name),
            with_unit(&fixed(condition.incident_w_per_m2 / 1000.0, 1), "kW/m²")
        )),
    });
}

fn voltage(context: &Context<'_>, section: &mut Section) {
    let voc = |c: &crate::results::ConditionResult| {
        c.voc_v.unwrap_or_else(|| c.junctions.iter().map(|j| j.voc_v).fold(0.0, f64::max))
    };
    let greatest = context.results.conditions.iter().map(voc).fold(0.0, f64::max);
    if greatest <= 0.0 {
        return;
    }
    let cells = (TOUCH_VOLTAGE / greatest).floor() + 1.0;
    section.items.push(Item {
        head: Text::of("Cells in series"),
        body: Text::of(format!(
            "At {} a cell, {} in series exceed {} DC, commonly the bound of what may be touched. A string in light cannot be switched off; arcs of direct current do not go out by themselves. Wiring is work for licensed people under local codes.",
            with_unit(&fixed(greatest, 2), "V"),
            fixed(cells, 0),
            with_unit(&fixed(TOUCH_VOLTAGE, 0), "V")
        )),
    });
}
