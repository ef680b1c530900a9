//! `material` and `alloy` items, and the material phrases of layers, to worked-out materials.
//!
//! The built-in library goes through the same door as a user's file. Every definition is read the
//! first time it is asked for, and not before.

use std::collections::BTreeMap;
use std::sync::Arc;

use crate::materials::alloy::{Composition, Compound, Family};
use crate::materials::optics::Optics;
use crate::materials::{Material, ROOM_TEMPERATURE_K, formula, library};
use crate::parse::parse;
use crate::resolve::files::Files;
use crate::resolve::materials::blocks::{Reader, Texts};
use crate::resolve::quantities::Scope;
use crate::source::{Source, SourceId};
use crate::syntax::{Argument, Item, Named, Statement};

mod alloys;
mod blocks;
mod citations;
mod formulas;
mod groups;
mod index;
mod listing;
mod misplaced;
mod mixing;
mod models;
mod own_tables;
mod phrases;
mod samples;
mod search;
mod transport;
mod unsolved;
mod values;

pub use listing::{Entry, Group, entries, family, look_up};
pub use models::MODEL_PROPERTIES;
pub use phrases::{FreePart, Phrase, Reference, Resolved, materials_of};
pub use search::{End, Fit, Search, Wish, search};

/// What a name stands for.
#[derive(Clone, Debug)]
pub enum Definition {
    /// One composition.
    Compound(Arc<Compound>),
    /// A family between end members.
    Family(Arc<Family>),
}

/// Which keyword opened an item.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum ItemKind {
    Material,
    Alloy,
}

/// A user's item and the files it names.
#[derive(Clone, Debug)]
struct UserItem {
    kind: ItemKind,
    item: Named,
    texts: BTreeMap<String, (SourceId, Arc<str>)>,
    /// Whether a file it names could not be had, which was reported.
    lacks_file: bool,
}

/// Every material and family in sight: the user's items before the built-in ones.
#[derive(Debug, Default)]
pub struct Library {
    user: BTreeMap<String, UserItem>,
    /// By whether it is built in, and name; `None` while it is being read, or where it could not be.
    read: BTreeMap<(bool, String), Option<Definition>>,
    /// How many built-in files are being read: those see each other only, so that a user's own
    /// `GaAs` leaves the built-in `AlGaAs` as it is.
    depth: usize,
    /// Tables of alloys made so far: layers of one composition share one table.
    tables: BTreeMap<(String, Vec<u64>), Optics>,
}

impl Library {
    /// The built-in library alone.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a user's `material` item. It is read when it is first asked for, or by
    /// [`Library::finish`]; items may use each other in any order.
    pub fn add_material(&mut self, scope: &mut Scope, files: &mut Files<'_>, item: &Named) {
        self.add(ItemKind::Material, scope, files, item);
    }

    /// Adds a user's `alloy` item, as [`Library::add_material`].
    pub fn add_alloy(&mut self, scope: &mut Scope, files: &mut Files<'_>, item: &Named) {
        self.add(ItemKind::Alloy, scope, files, item);
    }

    /// Reads every user's item that nothing has asked for, so that its mistakes are reported too.
    pub fn finish(&mut self, scope: &mut Scope) {
        let names: Vec<String> = self.user.keys().cloned().collect();
        for name in names {
            self.named(&name, scope);
        }
    }

    fn add(&mut self, kind: ItemKind, scope: &mut Scope, files: &mut Files<'_>, item: &Named) {
        let mut texts = BTreeMap::new();
        let before = scope.error_count();
        read_tables(&item.block.statements, scope, files, &mut texts);
        let lacks_file = scope.error_count() > before;
        let own = UserItem { kind, item: item.clone(), texts, lacks_file };
        self.user.entry(item.name.value.clone()).or_insert(own);
    }

    /// What `name` stands for. A family may be written with its elements in another order
    /// (`InGaAs` for `GaInAs`).
    pub fn find(&mut self, name: &str, scope: &mut Scope) -> Option<Definition> {
        if let Some(found) = self.named(name, scope) {
            return Some(found);
        }
        if name.contains(|c: char| c.is_ascii_digit()) {
            return None;
        }
        self.of_elements(&formula::elements(name)?, scope)
    }

    /// The smallest family that mixes these elements with others, and has the same unmixed ones:
    /// `perovskite` for Cs, FA, Pb, I. Families that mix all they are made of have to be named.
    fn of_more_elements(&mut self, elements: &[String], scope: &mut Scope) -> Option<Arc<Family>> {
        let holds = |all: &[String]| elements.iter().all(|element| all.contains(element));
        let mut found: Vec<(usize, String)> = self
            .names()
            .into_iter()
            .filter_map(|name| Some((library::family_elements(name)?, name)))
            .filter(|(all, _)| holds(all))
            .map(|(all, name)| (all.len(), name.to_owned()))
            .collect();
        found.sort();
        found.into_iter().find_map(|(_, name)| match self.named(&name, scope)? {
            Definition::Family(family) => {
                let frame = family.frame();
                let whole = !frame.is_empty() && frame.iter().all(|element| elements.contains(element));
                let filled = family.sites.iter().all(|site| site.iter().any(|it| elements.contains(it)));
                (whole && filled).then_some(family)
            }
            Definition::Compound(_) => None,
        })
    }

    /// Whether a name is defined, be it rightly or wrongly.
    fn is_defined(&self, name: &str) -> bool {
        self.user.contains_key(name) || library::FILES.iter().any(|(known, _)| *known == name)
    }

    /// The family or compound of exactly these elements, in any order.
    fn of_elements(&mut self, elements: &[String], scope: &mut Scope) -> Option<Definition> {
        let sorted = |mut elements: Vec<String>| {
            elements.sort_unstable();
            elements
        };
        let wanted = sorted(elements.to_vec());
        let same = |name: &&str| library::family_elements(name).is_some_and(|own| sorted(own) == wanted);
        let found = self.names().into_iter().find(same)?.to_owned();
        self.named(&found, scope)
    }

    fn named(&mut self, name: &str, scope: &mut Scope) -> Option<Definition> {
        let user = self.user.get(name).filter(|_| self.depth == 0).cloned();
        let built_in = library::FILES.iter().find(|(known, _)| *known == name);
        if user.is_none() && built_in.is_none() {
            return None;
        }
        let key = (user.is_none(), name.to_owned());
        if let Some(known) = self.read.get(&key) {
            return known.clone();
        }
        // An item that names itself, directly or in a circle, finds nothing here.
        self.read.insert(key.clone(), None);
        let definition = match (user, built_in) {
            (Some(own), _) => {
                let before = scope.error_count();
                let read = Reader::new(self, scope, Texts::User(&own.texts)).item(own.kind, &own.item);
                // What is wrong was reported; layers made of it say nothing more.
                read.filter(|_| scope.error_count() == before && !own.lacks_file)
            }
            (None, Some((name, text))) => {
                self.depth += 1;
                let definition = self.read_built_in(name, text, &mut Scope::new());
                self.depth -= 1;
                definition
            }
            (None, None) => None,
        };
        self.read.insert(key, definition.clone());
        definition
    }

    /// Reads one file of the library; what it has to say goes to `scope`. The tests keep that
    /// empty, so its spans, which no [`crate::source::Sources`] knows, are never shown.
    fn read_built_in(&mut self, name: &str, text: &str, scope: &mut Scope) -> Option<Definition> {
        let source = Source::new(SourceId(u32::MAX), format!("{name}.stack"), text);
        let parsed = parse(&source);
        for finding in parsed.findings.0 {
            scope.report(finding);
        }
        let items = parsed.value?.items;
        let (kind, item) = items.iter().find_map(|item| match item {
            Item::Material(item) => Some((ItemKind::Material, item)),
            Item::Alloy(item) => Some((ItemKind::Alloy, item)),
            _ => None,
        })?;
        Reader::new(self, scope, Texts::BuiltIn).item(kind, item)
    }

    /// The material of a family at a composition, see [`Family::at`].
    fn alloy(&mut self, family: &Family, composition: &Composition, ordered_to_ev: Option<f64>) -> Material {
        let mut material = family.without_optics(composition, ordered_to_ev);
        let Some(bands) = &material.bands else { return material };
        let edge = bands.gamma.as_ref().map(|gamma| gamma.at(ROOM_TEMPERATURE_K));
        let bits = composition.iter().flatten().copied().chain(edge).map(f64::to_bits).collect();
        let made = self.tables.entry((family.name.clone(), bits));
        material.optics = made.or_insert_with(|| family.optics(composition, bands)).clone();
        material
    }

    /// Every name, the user's first, then the library's in its own order.
    pub fn names(&self) -> Vec<&str> {
        let user = self.user.keys().map(String::as_str);
        user.chain(library::FILES.iter().map(|(name, _)| *name)).collect()
    }
}

/// Reads every index table an item names.
fn read_tables(
    statements: &[Statement],
    scope: &mut Scope,
    files: &mut Files<'_>,
    texts: &mut BTreeMap<String, (SourceId, Arc<str>)>,
) {
    for statement in statements {
        let Statement::Property(property) = statement else { continue };
        if ["table", "sample", "parent"].contains(&property.name.value.as_str()) {
            for argument in &property.arguments {
                let Argument::Text(path) = argument else { continue };
                if let Some(id) = files.read(scope, path.span.source, path, "index table") {
                    texts.insert(path.value.clone(), (id, files.sources.get(id).text.clone()));
                }
            }
        }
        if let Some(block) = &property.block {
            read_tables(&block.statements, scope, files, texts);
        }
    }
}

#[cfg(test)]
mod tests;
