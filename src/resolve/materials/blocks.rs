//! `material` blocks: groups of numbers, each with its citation.

use std::collections::BTreeMap;
use std::sync::Arc;

use crate::finding::Finding;
use crate::materials::alloy::{Compound, zinc_blende_density};
use crate::materials::constants::{ConstantUnit, Constants, NAMES};
use crate::materials::optics::Optics;
use crate::materials::{
    Bands, Elastic, GapLaw, Lattice, Material, MaterialClass, Origin, OriginKind, Valley, Varshni, elements,
    formula,
};
use crate::resolve::materials::values::{Arguments, Kind, properties, quantity, single};
use crate::resolve::materials::{Definition, ItemKind, Library};
use crate::resolve::names;
use crate::resolve::quantities::Scope;
use crate::source::{SourceId, Spanned};
use crate::syntax::{Named, Property, Statement};

/// The words a `material` block knows.
const GROUPS: &[&str] = &[
    "about",
    "affinity",
    "caution",
    "cite",
    "critical_points",
    "deformation",
    "density",
    "effective_mass",
    "elastic",
    "gap",
    "index",
    "kind",
    "lattice",
    "permittivity",
    "source",
];

/// Words of the language whose numbers nothing uses yet.
const PENDING: &[&str] = &["mobility", "lifetime", "radiative", "doping_limit", "damage", "expansion"];

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
    sources: BTreeMap<String, String>,
    /// `cite` of the item's own body, for groups that have none.
    whole: Option<(OriginKind, String)>,
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
                group @ ("effective_mass" | "deformation" | "permittivity") => {
                    self.constants(property, group, &mut material.constants);
                }
                "critical_points" => critical_ev = self.critical_points(property),
                // Needs the gap, which may stand below it.
                "index" => index = Some(*property),
                other => self.unknown_word(property, other),
            }
        }
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
        if self.scope.finding_count() == before {
            self.complete(item, &material);
        }
        Compound { about, material: Arc::new(material), critical_ev }
    }

    /// A material that says nothing can be neither drawn nor computed.
    fn complete(&mut self, item: &Named, material: &Material) {
        let silent = material.lattice.is_none() && material.bands.is_none();
        if silent && material.optics == Optics::None {
            self.scope.report(
                Finding::warning(
                    "material.incomplete",
                    format!("`{}` has neither a lattice, nor a gap, nor an index", item.name.value),
                )
                .at(item.name.span, "nothing can be computed with it")
                .help("state at least an index, such as `index { constant 1.9; cite \"…\" }`"),
            );
        }
    }

    /// `source NAME "…"` and the `cite` of the body.
    pub(super) fn read_sources(&mut self, statements: &[&Property]) {
        for property in statements.iter().filter(|property| property.name.value == "source") {
            let mut arguments = Arguments::of(property);
            if let (Some(name), Some(text)) = (arguments.word(), arguments.text()) {
                self.sources.insert(name.value.clone(), text.value.clone());
                arguments.end(self.scope);
            } else {
                self.scope.report(
                    Finding::error("material.statement", "`source` needs a name and a text")
                        .at(property.span, "a name for the source, then its citation")
                        .help("write `source smith \"J. Smith, J. Appl. Phys. 1, 2 (2003)\"`"),
                );
            }
        }
        let whole = statements.iter().find(|property| property.name.value == "cite");
        self.whole = whole.and_then(|property| self.citation(property));
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
        if PENDING.contains(&word) {
            self.scope.report(
                Finding::advice("feature.pending", format!("`{word}` of a material is not evaluated yet"))
                    .at(property.name.span, "read and left out")
                    .help(format!("state `{word}` in the layers that need it")),
            );
            return;
        }
        let known = GROUPS.iter().chain(PENDING).copied();
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

    fn lattice(&mut self, group: &Property) -> Option<Lattice> {
        let (mut constant, mut slope, mut expansion) = (None, None, None);
        for property in self.inside(group) {
            match property.name.value.as_str() {
                "constant" => constant = single(property, Kind::ANGSTROM, self.scope),
                "slope" => slope = single(property, Kind::ANGSTROM_PER_KELVIN, self.scope),
                "expansion" => expansion = single(property, Kind::PER_KELVIN, self.scope),
                "cite" => {}
                _ => self.unknown_in("lattice", property, &["constant", "slope", "expansion"]),
            }
        }
        self.origin(group, "lattice");
        let constant = constant?;
        let slope = slope.or(expansion.map(|share| share * constant)).unwrap_or(0.0);
        Some(Lattice { a300_angstrom: constant, slope_angstrom_per_k: slope })
    }

    fn bands(&mut self, group: &Property, constants: &mut Constants) -> Option<Bands> {
        let mut bands = Bands::default();
        for property in self.inside(group) {
            match property.name.value.as_str() {
                "direct" => bands.gamma = self.gap_law(property).map(Valley::of),
                "x" => bands.x = self.gap_law(property).map(Valley::of),
                "l" => bands.l = self.gap_law(property).map(Valley::of),
                "cite" => {}
                word => match constant("gap", word) {
                    Some((name, _)) => {
                        let value = single(property, Kind::ENERGY, self.scope);
                        constants.0.extend(value.map(|value| (name, value)));
                    }
                    None => {
                        let known = ["direct", "x", "l", "split_off", "valence_offset"];
                        self.unknown_in("gap", property, &known);
                    }
                },
            }
        }
        self.origin(group, "gap");
        let known = bands.gamma.is_some() || bands.x.is_some() || bands.l.is_some();
        known.then_some(bands)
    }

    /// `1.519 eV`, then `varshni 0.5405 meV/K 204 K` or `phonon 0.1081 eV 164 K`, if the law is
    /// known.
    fn gap_law(&mut self, property: &Property) -> Option<GapLaw> {
        let mut arguments = Arguments::of(property);
        let slot = property.name.value.as_str();
        let at_zero_ev = quantity(&mut arguments, slot, Kind::GAP, self.scope)?;
        let law = if arguments.keyword("varshni") {
            let alpha_ev_per_k = quantity(&mut arguments, "varshni", Kind::ENERGY_PER_KELVIN, self.scope)?;
            let beta_k = quantity(&mut arguments, "varshni", Kind::KELVIN, self.scope)?;
            GapLaw::Varshni(Varshni { at_zero_ev, alpha_ev_per_k, beta_k })
        } else if arguments.keyword("phonon") {
            let amplitude_ev = quantity(&mut arguments, "phonon", Kind::ENERGY, self.scope)?;
            let theta_k = quantity(&mut arguments, "phonon", Kind::KELVIN, self.scope)?;
            GapLaw::Phonon { at_zero_ev, amplitude_ev, theta_k }
        } else {
            GapLaw::constant(at_zero_ev)
        };
        arguments.end(self.scope);
        Some(law)
    }

    fn elastic(&mut self, group: &Property) -> Option<Elastic> {
        let mut values = [None; 3];
        let words = ["c11", "c12", "c44"];
        for property in self.inside(group) {
            match words.iter().position(|word| *word == property.name.value) {
                Some(at) => values[at] = single(property, Kind::GIGAPASCAL, self.scope),
                None if property.name.value == "cite" => {}
                None => self.unknown_in("elastic", property, &words),
            }
        }
        self.origin(group, "elastic");
        if let [Some(c11_gpa), Some(c12_gpa), Some(c44_gpa)] = values {
            return Some(Elastic { c11_gpa, c12_gpa, c44_gpa });
        }
        if group.block.is_some() {
            self.scope.report(
                Finding::error("material.incomplete", "`elastic` needs `c11`, `c12` and `c44`")
                    .at(group.name.span, "not all three can be read")
                    .help("state all three, such as `c11 122.1 GPa; c12 56.6 GPa; c44 60.0 GPa`"),
            );
        }
        None
    }

    fn constants(&mut self, group: &Property, name: &str, constants: &mut Constants) {
        for property in self.inside(group) {
            let word = property.name.value.as_str();
            match constant(name, word) {
                Some((key, unit)) => {
                    let kind = if unit == ConstantUnit::Energy { Kind::ENERGY } else { Kind::PLAIN };
                    let value = single(property, kind, self.scope);
                    constants.0.extend(value.map(|value| (key, value)));
                }
                None if word == "cite" => {}
                None => {
                    let known: Vec<&str> = NAMES
                        .iter()
                        .filter(|(_, group, ..)| *group == name)
                        .map(|(_, _, word, _)| *word)
                        .collect();
                    self.unknown_in(name, property, &known);
                }
            }
        }
        self.origin(group, name);
    }

    pub(super) fn critical_points(&mut self, group: &Property) -> Option<(f64, f64)> {
        let (mut e1, mut e2) = (None, None);
        for property in self.inside(group) {
            match property.name.value.as_str() {
                "e1" => e1 = single(property, Kind::GAP, self.scope),
                "e2" => e2 = single(property, Kind::GAP, self.scope),
                "cite" => {}
                _ => self.unknown_in("critical_points", property, &["e1", "e2"]),
            }
        }
        self.origin(group, "critical points");
        Some((e1?, e2?))
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

    /// Records where a group comes from; a group without a citation is a finding.
    pub(super) fn origin(&mut self, group: &Property, what: &str) {
        let inner = group.block.iter().flat_map(|block| &block.statements);
        let cites: Vec<&Property> = inner
            .filter_map(|statement| match statement {
                Statement::Property(property) if property.name.value == "cite" => Some(property),
                _ => None,
            })
            .collect();
        let before = self.origins.len();
        for property in &cites {
            if let Some((kind, cite)) = self.citation(property) {
                self.origins.push(Origin { what: what.to_owned(), kind, cite });
            }
        }
        if self.origins.len() > before {
            return;
        }
        if let Some((kind, cite)) = self.whole.clone() {
            self.origins.push(Origin { what: what.to_owned(), kind, cite });
            return;
        }
        if cites.is_empty() {
            let name = &group.name.value;
            self.scope.report(
                Finding::error(
                    "material.no-citation",
                    format!("`{name}` does not say where its numbers come from"),
                )
                .at(group.name.span, "no `cite` in this group")
                .help(format!("add `cite \"…\"` to `{name}`, for example `cite measured \"own run 17\"`")),
            );
        }
    }

    /// `cite [measured | published | …] [source …] ["…"]`
    fn citation(&mut self, property: &Property) -> Option<(OriginKind, String)> {
        let mut arguments = Arguments::of(property);
        let (mut kind, mut parts) = (OriginKind::Stated, Vec::new());
        let mut first = true;
        loop {
            if let Some(text) = arguments.text() {
                parts.push(text.value.clone());
            } else if let Some(word) = arguments.word() {
                match (origin_kind(&word.value), self.sources.get(&word.value)) {
                    (Some(known), _) if first => kind = known,
                    (_, Some(text)) => parts.push(text.clone()),
                    _ => {
                        self.unknown_source(word);
                        return None;
                    }
                }
            } else {
                break;
            }
            first = false;
        }
        arguments.end(self.scope);
        if parts.is_empty() {
            self.scope.report(
                Finding::error("material.no-citation", "`cite` names no source")
                    .at(property.span, "a text is due")
                    .help("write `cite \"…\"` with the paper, the handbook or the run the numbers come from"),
            );
            return None;
        }
        Some((kind, parts.join("; ")))
    }

    fn unknown_source(&mut self, word: &Spanned<String>) {
        let kinds = ["measured", "published", "joined", "model", "estimate", "memory", "stated"];
        let known = self.sources.keys().map(String::as_str).chain(kinds);
        let otherwise = format!("write it as a text, or define it: `source {} \"…\"`", word.value);
        self.scope.report(names::unknown("source", word, known, &otherwise));
    }
}

fn origin_kind(word: &str) -> Option<OriginKind> {
    Some(match word {
        "measured" => OriginKind::Measured,
        "published" => OriginKind::Published,
        "joined" => OriginKind::Joined,
        "model" => OriginKind::Model,
        "estimate" => OriginKind::Estimate,
        "memory" => OriginKind::Memory,
        "stated" => OriginKind::Stated,
        _ => return None,
    })
}

/// The name a constant is kept under and its unit.
pub(super) fn constant(group: &str, word: &str) -> Option<(&'static str, ConstantUnit)> {
    NAMES
        .iter()
        .find(|(_, own_group, own_word, _)| *own_group == group && *own_word == word)
        .map(|(name, _, _, unit)| (*name, *unit))
}
