//! How an `alloy` block says what lies between its end members: `bowing`, `interpolation`, `ordering`.

use std::collections::BTreeMap;

use crate::finding::Finding;
use crate::materials::alloy::{BowingLaw, Family, LATTICE, Ordering, Surface};
use crate::resolve::materials::blocks::Reader;
use crate::resolve::materials::values::{Arguments, Kind, quantity};
use crate::resolve::names;
use crate::syntax::Property;
use crate::units::ELEMENTARY_CHARGE;

impl Reader<'_> {
    /// `interpolation moon` or `interpolation glisson`, by the first author of the rule. Unstated:
    /// every bowing in full where one sublattice is mixed, the mean where both are.
    pub(super) fn surface(&mut self, stated: Option<&Property>, family: &Family) -> Surface {
        let usual = match family.sites.iter().all(|site| site.len() > 1) {
            true => Surface::Mean,
            false => Surface::Full,
        };
        let Some(property) = stated else { return usual };
        let mut arguments = Arguments::of(property);
        let Some(word) = arguments.word() else { return usual };
        let surface = match word.value.as_str() {
            "moon" => Surface::Full,
            "glisson" => Surface::Mean,
            _ => {
                let otherwise = "write `interpolation moon` or `interpolation glisson`";
                self.scope.report(names::unknown(
                    "interpolation",
                    word,
                    ["moon", "glisson"].into_iter(),
                    otherwise,
                ));
                usual
            }
        };
        arguments.end(self.scope);
        surface
    }

    /// `bowing { direct 0.65 eV; x 0.20 eV; l 1.03 eV; electron 0.051; cite "…" }`, a value that
    /// depends on composition as `direct -0.127 eV per Al 1.310 eV`.
    pub(super) fn bowing(&mut self, group: &Property, pair: &[String]) -> BTreeMap<&'static str, BowingLaw> {
        let mut laws = BTreeMap::new();
        for property in self.inside(group) {
            let word = property.name.value.as_str();
            let (name, kind) = match word {
                "direct" => ("direct", Kind::ENERGY),
                "x" => ("x", Kind::ENERGY),
                "l" => ("l", Kind::ENERGY),
                "split_off" => ("split_off", Kind::ENERGY),
                "electron" => ("mass.electron", Kind::PLAIN),
                "lattice" => (LATTICE, Kind::ANGSTROM),
                "cite" => continue,
                _ => {
                    let known = ["direct", "x", "l", "split_off", "electron", "lattice"];
                    self.unknown_in("bowing", property, &known);
                    continue;
                }
            };
            if let Some(law) = self.bowing_law(property, kind, pair) {
                laws.insert(name, law);
            }
        }
        self.origin(group, "bowing");
        laws
    }

    fn bowing_law(&mut self, property: &Property, kind: Kind, pair: &[String]) -> Option<BowingLaw> {
        let mut arguments = Arguments::of(property);
        let constant = quantity(&mut arguments, &property.name.value, kind, self.scope)?;
        let mut law = BowingLaw { constant, slope: 0.0 };
        if arguments.keyword("per") {
            let element = arguments.word();
            let slope = quantity(&mut arguments, "per", kind, self.scope)?;
            match element.and_then(|element| pair.iter().position(|known| *known == element.value)) {
                Some(0) => law.slope = slope,
                // C = a + b (1 − x)
                Some(_) => law = BowingLaw { constant: constant + slope, slope: -slope },
                None => {
                    let (first, second) = (&pair[0], &pair[1]);
                    self.scope.report(
                        Finding::error("material.statement", "`per` names no element of this alloy")
                            .at(property.span, format!("`{first}` or `{second}` is due after `per`"))
                            .help(format!("write `per {first}` and the value for each unit of its fraction")),
                    );
                    return None;
                }
            }
        }
        arguments.end(self.scope);
        Some(law)
    }

    /// `ordering { gap 1.88 eV at Ga 0.5163; span 1.80 .. 1.93 eV; cite "…" }`
    pub(super) fn ordering(&mut self, group: &Property, family: &Family) -> Option<Ordering> {
        let (mut reference, mut span_ev) = (None, None);
        for property in self.inside(group) {
            let mut arguments = Arguments::of(property);
            match property.name.value.as_str() {
                "gap" => {
                    let gap_ev = quantity(&mut arguments, "gap", Kind::GAP, self.scope)?;
                    arguments.keyword("at");
                    let element =
                        arguments.word().filter(|element| family.position(&element.value).is_some());
                    let fraction = quantity(&mut arguments, "at", Kind::FRACTION, self.scope)?;
                    reference = element.map(|element| (gap_ev, element.value.clone(), fraction));
                    arguments.end(self.scope);
                }
                "span" => {
                    let value = arguments.value()?;
                    let slot = self.scope.slot(&value, Kind::GAP.expected("span"));
                    let ev = |si: f64| si / ELEMENTARY_CHARGE;
                    span_ev = slot.value.zip(slot.up_to).map(|(low, high)| (ev(low), ev(high)));
                }
                "cite" => {}
                _ => self.unknown_in("ordering", property, &["gap", "span"]),
            }
        }
        self.origin(group, "ordering");
        let mixed = family.sites.iter().find(|site| site.len() == 2).filter(|_| family.freedom() == 1);
        if let (Some((gap_ev, element, fraction)), Some(span_ev), Some(mixed)) = (reference, span_ev, mixed)
            && let Some(other) = mixed.iter().find(|other| **other != element)
        {
            return Some(Ordering { pair: [element, other.clone()], fraction, gap_ev, span_ev });
        }
        self.scope.report(
            Finding::error(
                "material.incomplete",
                "`ordering` needs a reference gap and its span, in a ternary",
            )
            .at(group.name.span, "not both can be read")
            .help("write `gap 1.88 eV at Ga 0.5163; span 1.80 .. 1.93 eV`"),
        );
        None
    }
}
