//! The library as a list, for people who look for a material.

use std::sync::Arc;

use crate::finding::{Finding, Outcome};
use crate::materials::alloy::Family;
use crate::materials::alloy::solve::gap_reach;
use crate::materials::carriers::Carriers;
use crate::materials::{MaterialClass, ROOM_TEMPERATURE_K, SharedMaterial};
use crate::resolve::materials::phrases::{Phrase, Reference, materials_of};
use crate::resolve::materials::{Definition, Library};
use crate::resolve::quantities::Scope;
use crate::source::{Source, Span};
use crate::syntax::{Item, MaterialPhrase, Statement};

/// What makes a phrase a file.
const BEFORE: &str = "part it { layer ";
const AFTER: &str = " }";

/// What people look for a material by, in the order of the list.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, serde::Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Group {
    /// Elements and compounds.
    Semiconductor,
    /// Alloys whose composition has to be said.
    Family,
    /// Lead and tin halides, compounds and alloys.
    Perovskite,
    /// Transparent conductors and contact layers.
    Contact,
    /// Coats, glasses, adhesives, air.
    Dielectric,
    /// Metals.
    Metal,
}

impl Group {
    /// As a heading.
    pub fn heading(self) -> &'static str {
        match self {
            Self::Semiconductor => "semiconductors",
            Self::Family => "families of alloys",
            Self::Perovskite => "halide perovskites",
            Self::Contact => "contact layers and transparent conductors",
            Self::Dielectric => "coats, glass, adhesives",
            Self::Metal => "metals",
        }
    }

    fn of(about: &str, class: MaterialClass, is_family: bool) -> Self {
        let halide = ["iodide", "bromide", "chloride", "halide"].iter().any(|word| about.contains(word));
        match class {
            MaterialClass::Contact => Self::Contact,
            MaterialClass::Metal => Self::Metal,
            MaterialClass::Dielectric => Self::Dielectric,
            _ if halide && (about.contains("lead") || about.contains("tin ")) => Self::Perovskite,
            _ if is_family => Self::Family,
            MaterialClass::Semiconductor | MaterialClass::GapModel => Self::Semiconductor,
        }
    }
}

/// One line of the list.
#[derive(Clone, Debug, PartialEq)]
pub struct Entry {
    /// The name to write in a stack.
    pub name: String,
    /// Where it stands in the list.
    pub group: Group,
    /// What it is.
    pub about: String,
    /// Whether its composition has to be said.
    pub is_family: bool,
    /// Smallest and largest gap at 300 K, eV; equal for a compound, `None` without bands.
    pub gap_ev: Option<(f64, f64)>,
    /// Whether it has an index.
    pub has_index: bool,
    /// Whether mobilities of both carriers are known; of a family, at all of its end members or at
    /// compositions between them.
    pub has_transport: bool,
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
                group: Group::of(&compound.about, compound.material.class, false),
                about: compound.about.clone(),
                is_family: false,
                has_transport: moves(&compound.material.carriers),
                gap_ev: gap.map(|ev| (ev, ev)),
                has_index: compound.material.optics != crate::materials::optics::Optics::None,
            }
        }
        Definition::Family(family) => Entry {
            name: name.to_owned(),
            group: Group::of(&family.about, MaterialClass::Semiconductor, true),
            about: family.about.clone(),
            is_family: true,
            has_transport: moves(&family.carriers_at(&family.middle())),
            gap_ev: gap_reach(family, None).map(|reach| (reach.low.0.ev, reach.high.0.ev)),
            has_index: family.index != crate::materials::alloy::FamilyIndex::None,
        },
    }
}

fn moves(carriers: &Carriers) -> bool {
    carriers.mobility.electron.is_some() && carriers.mobility.hole.is_some()
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
