//! The library as a list, for people who look for a material.

use std::sync::Arc;

use crate::finding::{Finding, Outcome};
use crate::materials::alloy::solve::{Wanted, gap_reach, solve};
use crate::materials::alloy::{Composition, Family};
use crate::materials::{Material, ROOM_TEMPERATURE_K, SharedMaterial};
use crate::resolve::materials::phrases::{Phrase, Reference, materials_of};
use crate::resolve::materials::{Definition, Library};
use crate::resolve::quantities::Scope;
use crate::source::{Source, Span};
use crate::syntax::{Item, MaterialPhrase, Statement};

/// What makes a phrase a file.
const BEFORE: &str = "part it { layer ";
const AFTER: &str = " }";

/// One line of the list.
#[derive(Clone, Debug, PartialEq)]
pub struct Entry {
    /// The name to write in a stack.
    pub name: String,
    /// What it is.
    pub about: String,
    /// Whether its composition has to be said.
    pub is_family: bool,
    /// Smallest and largest gap at 300 K, eV; equal for a compound, `None` without bands.
    pub gap_ev: Option<(f64, f64)>,
    /// Whether it has an index.
    pub has_index: bool,
}

/// Every built-in material, in the library's own order.
pub fn entries() -> Vec<Entry> {
    let mut library = Library::new();
    let mut scope = Scope::new();
    let names: Vec<String> = library.names().into_iter().map(str::to_owned).collect();
    names.iter().filter_map(|name| library.find(name, &mut scope).map(|found| entry(name, &found))).collect()
}

fn entry(name: &str, found: &Definition) -> Entry {
    match found {
        Definition::Compound(compound) => {
            let gap = compound.material.gap(ROOM_TEMPERATURE_K).map(|gap| gap.ev);
            Entry {
                name: name.to_owned(),
                about: compound.about.clone(),
                is_family: false,
                gap_ev: gap.map(|ev| (ev, ev)),
                has_index: compound.material.optics != crate::materials::optics::Optics::None,
            }
        }
        Definition::Family(family) => Entry {
            name: name.to_owned(),
            about: family.about.clone(),
            is_family: true,
            gap_ev: gap_reach(family, None).map(|reach| (reach.low.0.ev, reach.high.0.ev)),
            has_index: family.index != crate::materials::alloy::FamilyIndex::None,
        },
    }
}

/// The material of a phrase as it would stand in a layer (`GaAs`, `Ga0.51In0.49P`,
/// `GaInP matched`, `AlGaInP matched of gap 2.1 eV`) on a substrate given the same way.
///
/// Findings point into the sources given back: the phrase first, then the substrate.
pub fn look_up(phrase: &str, substrate: Option<&str>) -> (Outcome<SharedMaterial>, [Source; 2]) {
    let wrap = |at: u32, text: &str| {
        Source::new(crate::source::SourceId(at), "material", &format!("{BEFORE}{text}{AFTER}"))
    };
    let sources = [wrap(0, phrase), wrap(1, substrate.unwrap_or("GaAs"))];
    let mut library = Library::new();
    let mut scope = Scope::new();
    let ground = substrate.and_then(|_| read(&mut library, &mut scope, &sources[1], None));
    let beneath = ground.map(|(material, span)| Reference { path: "substrate".to_owned(), material, span });
    let wrong_ground = substrate.is_some() && beneath.is_none();
    let found =
        if wrong_ground { None } else { read(&mut library, &mut scope, &sources[0], beneath.as_ref()) };
    let outcome = Outcome { value: found.map(|(material, _)| material), findings: scope.take_findings() };
    (outcome, sources)
}

fn read(
    library: &mut Library,
    scope: &mut Scope,
    source: &Source,
    beneath: Option<&Reference>,
) -> Option<(SharedMaterial, Span)> {
    let parsed = crate::parse::parse(source);
    for finding in parsed.findings.0 {
        scope.report(finding);
    }
    let Some(phrase) = phrase_of(&parsed.value?.items) else {
        let text = source.slice(source.span());
        let text = text.trim_start_matches(BEFORE).trim_end_matches(AFTER);
        scope.report(
            Finding::error("name.unknown", format!("`{text}` is no material"))
                .at(source.span(), "neither a name nor a formula")
                .help("write a name or a formula, such as `GaAs` or `Ga0.51In0.49P`"),
        );
        return None;
    };
    let named = std::collections::BTreeMap::new();
    let request = Phrase {
        phrase: &phrase,
        absorbs: None,
        block: None,
        beneath,
        beneath_unknown: false,
        named: &named,
        temperature_k: ROOM_TEMPERATURE_K,
        steps: 1,
    };
    let resolved = materials_of(library, scope, &request)?;
    resolved.materials.first().map(|material| (material.clone(), phrase.span))
}

fn phrase_of(items: &[Item]) -> Option<MaterialPhrase> {
    items.iter().find_map(|item| match item {
        Item::Part(part) => part.block.statements.iter().find_map(|statement| match statement {
            Statement::Layer(layer) => layer.material.clone(),
            _ => None,
        }),
        _ => None,
    })
}

/// The built-in family of a name without a composition, its elements in any order.
pub fn family(name: &str) -> Option<Arc<Family>> {
    match Library::new().find(name.trim(), &mut Scope::new()) {
        Some(Definition::Family(family)) => Some(family),
        _ => None,
    }
}

/// Materials with a gap at 300 K within `tolerance_ev` of `gap_ev`: compounds, and of each family
/// the composition that comes nearest to it. With a substrate only what fits its lattice: matched
/// exactly where the family can, else within 0.1 %, which the trade calls matched.
pub fn with_gap(gap_ev: f64, tolerance_ev: f64, substrate: Option<&Material>) -> Vec<Material> {
    let mut library = Library::new();
    let mut scope = Scope::new();
    let names: Vec<String> = library.names().into_iter().map(str::to_owned).collect();
    let lattice = substrate.and_then(|material| material.lattice_constant(ROOM_TEMPERATURE_K));
    let suits = |material: &Material| {
        let gap = material.gap(ROOM_TEMPERATURE_K);
        let own = material.lattice_constant(ROOM_TEMPERATURE_K);
        gap.is_some_and(|gap| (gap.ev - gap_ev).abs() <= tolerance_ev)
            && lattice.is_none_or(|a| own.is_some_and(|own| (own / a - 1.0).abs() <= 1e-3))
    };
    let mut found = Vec::new();
    for name in names {
        match library.find(&name, &mut scope) {
            Some(Definition::Compound(compound)) => {
                found.extend(Some((*compound.material).clone()).filter(|material| suits(material)));
            }
            Some(Definition::Family(family)) => {
                let candidates = nearest(&family, gap_ev, lattice);
                let mut materials = candidates.into_iter().map(|composition| family.at(&composition, None));
                found.extend(materials.find(|material| suits(material)));
            }
            None => {}
        }
    }
    found
}

/// Compositions of a family worth a look for a gap on a lattice, the best first.
fn nearest(family: &Family, gap_ev: f64, lattice: Option<f64>) -> Vec<Composition> {
    let matched = lattice.map(|angstrom| Wanted::Lattice { angstrom, temperature_k: ROOM_TEMPERATURE_K });
    let within = lattice.map(|angstrom| (angstrom, ROOM_TEMPERATURE_K)).filter(|_| family.freedom() > 1);
    let Some(reach) = gap_reach(family, within) else { return Vec::new() };
    let gap = Wanted::Gap(gap_ev.clamp(reach.low.0.ev, reach.high.0.ev));
    let wishes = match (family.freedom(), matched) {
        (1, Some(matched)) => vec![vec![matched], vec![gap]],
        (1, None) => vec![vec![gap]],
        (_, Some(matched)) => vec![vec![matched, gap]],
        // Two open fractions and one wish: nothing to choose by.
        (_, None) => Vec::new(),
    };
    wishes.iter().filter_map(|wishes| solve(family, wishes).ok()).collect()
}
