//! Groups of a `material` block: lattice, gap, elastic constants, masses, critical points.

use crate::finding::Finding;
use crate::materials::constants::{ConstantUnit, Constants, NAMES};
use crate::materials::{Bands, Elastic, GapLaw, Lattice, Valley, Varshni};
use crate::resolve::materials::blocks::Reader;
use crate::resolve::materials::values::{Arguments, Kind, quantity, single};
use crate::syntax::Property;

impl Reader<'_> {
    pub(super) fn lattice(&mut self, group: &Property) -> Option<Lattice> {
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

    pub(super) fn bands(&mut self, group: &Property, constants: &mut Constants) -> Option<Bands> {
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

    pub(super) fn elastic(&mut self, group: &Property) -> Option<Elastic> {
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

    pub(super) fn constants(&mut self, group: &Property, name: &str, constants: &mut Constants) {
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
        let (e1, e2) = (e1?, e2?);
        if e1 < e2 {
            return Some((e1, e2));
        }
        self.scope.report(
            Finding::error("material.statement", "the critical point `e2` lies above `e1`")
                .at(group.span, "out of order")
                .help("write the lower one as `e1`"),
        );
        None
    }
}

/// The name a constant is kept under and its unit.
pub(super) fn constant(group: &str, word: &str) -> Option<(&'static str, ConstantUnit)> {
    NAMES
        .iter()
        .find(|(_, own_group, own_word, _)| *own_group == group && *own_word == word)
        .map(|(name, _, _, unit)| (*name, *unit))
}
