//! `alloy` blocks: end members, bowing, ordering, and how the index is made.

use std::sync::Arc;

use crate::finding::Finding;
use crate::materials::alloy::transport::FamilyCarriers;
use crate::materials::alloy::{Bowing, Compound, Family, FamilyIndex, Ordering, Surface};
use crate::materials::elements::{Site, site};
use crate::materials::{Origin, OriginKind, formula};
use crate::resolve::materials::blocks::Reader;
use crate::resolve::materials::transport;
use crate::resolve::materials::values::{Arguments, Kind, properties, quantity};
use crate::resolve::materials::{Definition, misplaced};
use crate::resolve::names;
use crate::source::Spanned;
use crate::syntax::{Named, Property};

/// The words an `alloy` block knows.
const GROUPS: &[&str] = &[
    "about",
    "bowing",
    "caution",
    "cite",
    "index",
    "interpolation",
    "members",
    "ordering",
    "otherwise",
    "source",
    "ternaries",
];

/// End members, bowings and ordering of the ternaries of a family.
type Parts = (Vec<Arc<Compound>>, Vec<Bowing>, Option<Ordering>);

impl Reader<'_> {
    pub(super) fn family(&mut self, item: &Named) -> Option<Family> {
        let statements = properties(&item.block, self.scope);
        self.read_sources(&statements);
        let find = |word: &str| statements.iter().copied().find(|property| property.name.value == word);
        for property in &statements {
            let word = property.name.value.as_str();
            if !GROUPS.contains(&word) && !transport::GROUPS.contains(&word) {
                let otherwise = "an alloy takes `members` or `ternaries`, `bowing`, `ordering`, `index`";
                let known = GROUPS.iter().chain(transport::GROUPS).copied();
                self.scope.report(names::unknown("group of an alloy", &property.name, known, otherwise));
            }
        }
        let (members, mut bowings, ordering) = match (find("members"), find("ternaries")) {
            (Some(members), _) => (self.members(members)?, Vec::new(), None),
            (None, Some(ternaries)) => self.ternaries(ternaries)?,
            (None, None) => {
                self.scope.report(
                    Finding::error(
                        "material.incomplete",
                        format!("`{}` has no end members", item.name.value),
                    )
                    .at(item.name.span, "`members` or `ternaries` is due")
                    .help("write `members GaP, InP`, or `ternaries AlGaP, AlInP, GaInP`"),
                );
                return None;
            }
        };
        let (sites, members) = self.grid(item, members)?;
        if let Some(group) = find("bowing") {
            let pair: Vec<&Vec<String>> = sites.iter().filter(|site| site.len() == 2).collect();
            let with: Vec<&Vec<String>> = sites.iter().filter(|site| site.len() < 2).collect();
            if let ([pair], [with]) = (&pair[..], &with[..]) {
                let laws = self.bowing(group, pair);
                let pair = [pair[0].clone(), pair[1].clone()];
                let with = with.first().cloned().unwrap_or_default();
                bowings.push(Bowing { pair, with, laws });
            } else {
                self.scope.report(
                    Finding::error("material.statement", "`bowing` belongs to a ternary")
                        .at(group.name.span, "this family mixes more than two elements")
                        .help("define its ternaries and name them: `ternaries AlGaP, AlInP, GaInP`"),
                );
            }
        }
        let mut family = Family {
            name: item.name.value.clone(),
            about: find("about").map(|property| self.about(property)).unwrap_or_default(),
            sites,
            members,
            bowings,
            surface: Surface::Full,
            ordering,
            otherwise: Vec::new(),
            index: FamilyIndex::None,
            carriers: FamilyCarriers::default(),
            origins: Vec::new(),
            cautions: Vec::new(),
        };
        family.surface = self.surface(find("interpolation"), &family);
        if family.freedom() > 1 && !family.bowings.is_empty() {
            let (cite, kind) = (family.surface.cite().to_owned(), OriginKind::Model);
            self.origins.push(Origin { what: "bowing".to_owned(), kind, cite });
        }
        if let Some(group) = find("ordering") {
            family.ordering = self.ordering(group, &family);
        }
        // Ordering is known of ternaries with one element on the other sublattice.
        if family.sites.iter().all(|site| site.len() > 1) {
            family.ordering = None;
            self.origins.retain(|origin| origin.what != "ordering");
        }
        if let Some(property) = find("otherwise") {
            family.otherwise = self.otherwise(property, &family);
        }
        if let Some(group) = find("index") {
            family.index = self.family_index(group, &family);
        }
        self.family_carriers(&statements, &mut family);
        family.cautions = match find("caution") {
            Some(property) => self.words(property),
            None => cautions(&family),
        };
        family.origins = std::mem::take(&mut self.origins);
        Some(family)
    }

    /// `otherwise MA 0, Cs 0.2`: fractions taken where a phrase leaves them open.
    fn otherwise(&mut self, property: &Property, family: &Family) -> Vec<(String, f64)> {
        let mut arguments = Arguments::of(property);
        let mut taken = Vec::new();
        while let Some(element) = arguments.word() {
            if family.position(&element.value).is_none() {
                self.scope.report(misplaced::no_such_element(family, element));
                return Vec::new();
            }
            let Some(fraction) = quantity(&mut arguments, "otherwise", Kind::FRACTION, self.scope) else {
                return Vec::new();
            };
            taken.push((element.value.clone(), fraction));
        }
        arguments.end(self.scope);
        taken
    }

    /// `members GaP, InP`
    fn members(&mut self, property: &Property) -> Option<Vec<Arc<Compound>>> {
        let mut arguments = Arguments::of(property);
        let mut members = Vec::new();
        while let Some(name) = arguments.word() {
            members.push(self.member(name)?);
        }
        arguments.end(self.scope);
        Some(members)
    }

    pub(super) fn member(&mut self, name: &Spanned<String>) -> Option<Arc<Compound>> {
        match self.library.find(&name.value, self.scope) {
            Some(Definition::Compound(compound)) => Some(compound),
            Some(Definition::Family(_)) => {
                self.scope.report(
                    Finding::error("material.statement", format!("`{}` is itself a family", name.value))
                        .at(name.span, "an end member is one compound")
                        .help("name compounds such as `GaP`; families go after `ternaries`"),
                );
                None
            }
            None => {
                self.unknown_material(name, "material");
                None
            }
        }
    }

    fn unknown_material(&mut self, name: &Spanned<String>, what: &str) {
        // A user's item that is wrong was reported where it stands.
        if self.library.is_defined(&name.value) {
            return;
        }
        let known: Vec<String> = self.library.names().into_iter().map(str::to_owned).collect();
        let otherwise = format!("define it: `{what} {} {{ … }}`", name.value);
        self.scope.report(names::unknown(what, name, known.iter().map(String::as_str), &otherwise));
    }

    /// `ternaries AlGaP, AlInP, GaInP`: their end members, their bowings and their ordering.
    fn ternaries(&mut self, property: &Property) -> Option<Parts> {
        let mut arguments = Arguments::of(property);
        let (mut members, mut bowings): (Vec<Arc<Compound>>, Vec<Bowing>) = (Vec::new(), Vec::new());
        let mut ordering = None;
        while let Some(name) = arguments.word() {
            let Some(Definition::Family(ternary)) = self.library.find(&name.value, self.scope) else {
                self.unknown_material(name, "alloy");
                return None;
            };
            for member in ternary.members.iter().flatten() {
                if !members.iter().any(|known| known.material.name == member.material.name) {
                    members.push(member.clone());
                }
            }
            bowings.extend(ternary.bowings.iter().cloned());
            ordering = ordering.or_else(|| ternary.ordering.clone());
            let kept = |origin: &&Origin| origin.what == "bowing" || origin.what == "ordering";
            for origin in ternary.origins.iter().filter(kept) {
                if !self.origins.contains(origin) {
                    self.origins.push(origin.clone());
                }
            }
        }
        arguments.end(self.scope);
        Some((members, bowings, ordering))
    }

    /// Sorts end members into the grid of their sublattices, elements in the order of the name.
    #[expect(clippy::type_complexity, reason = "the two fields of a family, taken apart at once")]
    fn grid(
        &mut self,
        item: &Named,
        members: Vec<Arc<Compound>>,
    ) -> Option<([Vec<String>; 2], Vec<Vec<Arc<Compound>>>)> {
        let mut sites = [Vec::new(), Vec::new()];
        let of_members = members.iter().filter_map(|member| formula::elements(&member.material.name));
        let of_name = formula::elements(&item.name.value).unwrap_or_default();
        let of_members: Vec<String> = of_members.flatten().collect();
        let in_members = |element: &&String| of_members.contains(element);
        for element in of_name.iter().filter(in_members).chain(&of_members) {
            let place = match site(element) {
                Some(Site::Three) => 0,
                Some(Site::Five) => 1,
                Some(Site::Four) => 0,
                None => continue,
            };
            if !sites[place].contains(element) {
                sites[place].push(element.clone());
            }
        }
        // Lead in a perovskite, copper in a chalcopyrite: on no sublattice that mixes, and the same
        // in every member.
        let frame = |own: &[String]| own.iter().filter(|it| site(it).is_none()).cloned().collect::<Vec<_>>();
        let first = members.first().and_then(|member| formula::elements(&member.material.name));
        let first = frame(&first.unwrap_or_default());
        let find = |three: &String, five: &String| {
            members.iter().find(|member| {
                let own = formula::elements(&member.material.name).unwrap_or_default();
                let mixed = own.len() - frame(&own).len();
                mixed == 2 && frame(&own) == first && own.contains(three) && own.contains(five)
            })
        };
        let rows: Option<Vec<Vec<Arc<Compound>>>> = sites[0]
            .iter()
            .map(|three| sites[1].iter().map(|five| find(three, five).cloned()).collect())
            .collect();
        let freedom = sites[0].len() + sites[1].len();
        if let (Some(rows), 3..=5, false) = (rows, freedom, sites[1].is_empty()) {
            return Some((sites, rows));
        }
        // Elements of group IV share both sublattices: each member is one element.
        let is_four = sites[0].iter().all(|element| site(element) == Some(Site::Four));
        let element = |name: &String| members.iter().find(|member| member.material.name == *name).cloned();
        let rows: Option<Vec<_>> = sites[0].iter().map(|name| element(name).map(|it| vec![it])).collect();
        if let (Some(rows), true, 2) = (rows, is_four && sites[1].is_empty(), sites[0].len()) {
            return Some((sites, rows));
        }
        self.scope.report(
            Finding::error(
                "material.incomplete",
                format!("the end members of `{}` do not span a family", item.name.value),
            )
            .at(item.name.span, "two or four compounds, or three on one sublattice, are due")
            .help("name every corner, such as `members GaP, InP` for `GaInP`"),
        );
        None
    }
}

/// A family is as dangerous as its end members.
fn cautions(family: &Family) -> Vec<String> {
    let mut all: Vec<String> =
        family.members.iter().flatten().flat_map(|member| member.material.cautions.clone()).collect();
    all.sort_unstable();
    all.dedup();
    all
}
