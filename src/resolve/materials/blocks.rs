//! `material` blocks: groups of numbers, each with its citation.

use std::collections::BTreeMap;
use std::sync::Arc;

use crate::finding::Finding;
use crate::materials::alloy::{Compound, zinc_blende_density};
use crate::materials::optics::Optics;
use crate::materials::{Material, MaterialClass, Origin, OriginKind, elements, formula};
use crate::resolve::materials::transport;
use crate::resolve::materials::values::{Arguments, Kind, properties, single};
use crate::resolve::materials::{Definition, ItemKind, Library};
use crate::resolve::names;
use crate::resolve::quantities::Scope;
use crate::source::SourceId;
use crate::syntax::{Named, Property};

/// The words a `material` block knows.
const GROUPS: &[&str] = &[
    "about",
    "affinity",
    "caution",
    "cite",
    "critical_points",
    "deformation",
    "density",
    "dispersion",
    "effective_mass",
    "elastic",
    "gap",
    "index",
    "kind",
    "lattice",
    "permittivity",
    "source",
];

/// Words that are often written beside their group instead of into it.
const HOMES: &[(&str, &[&str])] = &[
    ("lattice", &["expansion", "slope", "lattice_constant"]),
    ("gap", &["direct", "x", "l", "split_off"]),
    ("index", &["table", "constant", "sellmeier", "cauchy"]),
];

/// Where the tables of an item are.
#[derive(Clone, Copy)]
pub(super) enum Texts<'a> {
    /// Beside the library.
    BuiltIn,
    /// Read before, by the path as written.
    User(&'a BTreeMap<String, (SourceId, Arc<str>)>),
}

/// Reads one item.
pub(super) struct Reader<'a> {
    pub(super) library: &'a mut Library,
    pub(super) scope: &'a mut Scope,
    pub(super) texts: Texts<'a>,
    /// `source NAME "…"` of the item.
    pub(super) sources: BTreeMap<String, String>,
    /// `cite` of the item's own body, for groups that have none.
    pub(super) whole: Option<(OriginKind, String)>,
    pub(super) origins: Vec<Origin>,
}

impl<'a> Reader<'a> {
    pub(super) fn new(library: &'a mut Library, scope: &'a mut Scope, texts: Texts<'a>) -> Self {
        Self { library, scope, texts, sources: BTreeMap::new(), whole: None, origins: Vec::new() }
    }

    pub(super) fn item(mut self, kind: ItemKind, item: &Named) -> Option<Definition> {
        match kind {
            ItemKind::Material => Some(Definition::Compound(Arc::new(self.compound(item)))),
            ItemKind::Alloy => self.family(item).map(|family| Definition::Family(Arc::new(family))),
        }
    }

    fn compound(&mut self, item: &Named) -> Compound {
        let name = item.name.value.clone();
        let before = self.scope.finding_count();
        let statements = properties(&item.block, self.scope);
        self.read_sources(&statements);
        let mut material = Material::bare(&name, MaterialClass::Dielectric);
        let (mut about, mut class, mut critical_ev) = (String::new(), None, None);
        let mut index = None;
        for property in &statements {
            match property.name.value.as_str() {
                "source" | "cite" => {}
                "about" => about = self.about(property),
                "kind" => class = self.class(property),
                "caution" => material.cautions = self.words(property),
                "lattice" => material.lattice = self.lattice(property),
                "gap" => material.bands = self.bands(property, &mut material.constants),
                "elastic" => material.elastic = self.elastic(property),
                "density" => {
                    material.density_g_per_cm3 = single(property, Kind::DENSITY, self.scope);
                    self.origin(property, "density");
                }
                "affinity" => {
                    let value = single(property, Kind::ENERGY, self.scope);
                    material.constants.0.extend(value.map(|value| ("affinity", value)));
                    self.origin(property, "affinity");
                }
                group @ ("effective_mass" | "deformation" | "dispersion" | "permittivity") => {
                    self.constants(property, group, &mut material.constants);
                }
                word if transport::GROUPS.contains(&word) => self.carriers(property, &mut material.carriers),
                "critical_points" => critical_ev = self.critical_points(property),
                // Needs the gap, which may stand below it.
                "index" => index = Some(*property),
                other => self.unknown_word(property, other),
            }
        }
        material.constants.complete();
        if let Some(group) = index {
            material.optics = self.index(group, material.bands.as_ref());
        }
        material.class = class.unwrap_or(if material.bands.is_some() {
            MaterialClass::Semiconductor
        } else {
            MaterialClass::Dielectric
        });
        if material.density_g_per_cm3.is_none() {
            self.density_of_crystal(&mut material);
        }
        material.origins = std::mem::take(&mut self.origins);
        let has_edge = matches!(&material.optics, Optics::Table(table) if table.gap_ev.is_some());
        material.origins.extend(crate::materials::carriers::derived(&material, has_edge));
        if self.scope.finding_count() == before && index.is_none() {
            self.complete(item, &material);
        }
        Compound { about, material: Arc::new(material), critical_ev }
    }

    /// A material that says nothing can be neither drawn nor computed.
    fn complete(&mut self, item: &Named, material: &Material) {
        let silent = material.lattice.is_none() && material.bands.is_none();
        if silent && material.optics == Optics::None {
            self.scope.report(
                Finding::error(
                    "material.incomplete",
                    format!("`{}` has neither a lattice, nor a gap, nor an index", item.name.value),
                )
                .at(item.name.span, "nothing can be computed with it")
                .help("state at least an index, such as `index { constant 1.9; cite \"…\" }`"),
            );
        }
    }

    pub(super) fn about(&mut self, property: &Property) -> String {
        Arguments::of(property).text().map(|text| text.value.clone()).unwrap_or_default()
    }

    pub(super) fn words(&mut self, property: &Property) -> Vec<String> {
        let mut arguments = Arguments::of(property);
        let mut words = Vec::new();
        while let Some(word) = arguments.word() {
            words.push(word.value.clone());
        }
        arguments.end(self.scope);
        words
    }

    pub(super) fn unknown_word(&mut self, property: &Property, word: &str) {
        if let Some((group, ..)) = HOMES.iter().find(|(_, words)| words.contains(&word)) {
            self.scope.report(
                Finding::error("material.statement", format!("`{word}` belongs into `{group}`"))
                    .at(property.name.span, "stands alone here")
                    .help(format!("write it inside `{group} {{ … }}`")),
            );
            return;
        }
        let known = GROUPS.iter().chain(transport::GROUPS).copied();
        let otherwise = "delete it, or see `bandloom materials GaAs` for the groups a material has";
        self.scope.report(names::unknown("group of a material", &property.name, known, otherwise));
    }

    fn class(&mut self, property: &Property) -> Option<MaterialClass> {
        const CLASSES: &[(&str, MaterialClass)] = &[
            ("semiconductor", MaterialClass::Semiconductor),
            ("dielectric", MaterialClass::Dielectric),
            ("contact", MaterialClass::Contact),
            ("metal", MaterialClass::Metal),
        ];
        let word = Arguments::of(property).word()?;
        let found = CLASSES.iter().find(|(name, _)| *name == word.value).map(|(_, class)| *class);
        if found.is_none() {
            let known = CLASSES.iter().map(|(name, _)| *name);
            let otherwise = "write `semiconductor`, `dielectric`, `contact` or `metal`";
            self.scope.report(names::unknown("kind of material", word, known, otherwise));
        }
        found
    }

    /// The properties inside a group; a group without a block is a finding.
    pub(super) fn inside<'p>(&mut self, group: &'p Property) -> Vec<&'p Property> {
        match &group.block {
            Some(block) => properties(block, self.scope),
            None => {
                let name = &group.name.value;
                self.scope.report(
                    Finding::error("material.incomplete", format!("`{name}` has no block"))
                        .at(group.span, "its numbers and their citation are due")
                        .help(format!("write `{name} {{ … }}` with its numbers and a `cite`")),
                );
                Vec::new()
            }
        }
    }

    pub(super) fn unknown_in(&mut self, group: &str, property: &Property, known: &[&str]) {
        let list = known.iter().map(|word| format!("`{word}`")).collect::<Vec<_>>().join(", ");
        let known = known.iter().copied().chain(["cite"]);
        self.scope.report(names::unknown(
            &format!("number of `{group}`"),
            &property.name,
            known,
            &format!("`{group}` takes {list}"),
        ));
    }

    /// Crystals of known lattice and elements have a density without anybody measuring it.
    fn density_of_crystal(&mut self, material: &mut Material) {
        let (Some(lattice), Some(symbols)) = (material.lattice, formula::elements(&material.name)) else {
            return;
        };
        let weights: Option<f64> = symbols.iter().map(|symbol| elements::atomic_weight(symbol)).sum();
        // Zinc blende has a pair at each lattice point, diamond two atoms of the same kind.
        let unit = match (weights, symbols.len()) {
            (Some(weight), 1) => 2.0 * weight,
            (Some(weight), 2) => weight,
            _ => return,
        };
        material.density_g_per_cm3 = zinc_blende_density(unit, lattice.a300_angstrom);
        self.origins.push(Origin {
            what: "density".to_owned(),
            kind: OriginKind::Model,
            cite: "computed from the lattice constant at 300 K and standard atomic weights (IUPAC 2021)"
                .to_owned(),
        });
    }
}
