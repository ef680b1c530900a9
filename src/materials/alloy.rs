//! Alloy families: end members, bowing, ordering, and the material at one composition.
//!
//! A family mixes elements on one or both sublattices of zinc blende. Lattice and elastic
//! constants follow Vegard's rule; gaps and the constants that bow follow
//! `P = Σ w·P_member − bowing`, at each temperature, so that the laws of the end members stay
//! laws.

use std::sync::Arc;

use crate::materials::constants::Constants;
use crate::materials::elements::atomic_weight;
use crate::materials::optics::Optics;
use crate::materials::{
    Bands, Elastic, GapKind, GapLaw, Lattice, Material, MaterialClass, Origin, OriginKind,
    ROOM_TEMPERATURE_K, SharedMaterial, Valley, trim,
};

pub mod blend;
pub mod bowing;
mod label;
mod ordering;
pub mod solve;
pub mod trace;
pub mod transparent;
pub mod transport;

pub use bowing::{Bowing, BowingLaw, LATTICE, Surface};
pub use ordering::Ordering;

/// Avogadro constant, 1/mol (exact, SI 2019).
const AVOGADRO: f64 = 6.022_140_76e23;

/// A compound with a fixed composition and what only alloys of it need.
#[derive(Clone, Debug, PartialEq)]
pub struct Compound {
    /// One line for lists.
    pub about: String,
    /// Everything of the material itself.
    pub material: SharedMaterial,
    /// Photon energies of the critical points E1 and E2 at 300 K, eV.
    pub critical_ev: Option<(f64, f64)>,
}

/// The law of one valley of a compound.
fn law(material: &Material, kind: GapKind) -> Option<GapLaw> {
    let bands = material.bands.as_ref()?;
    let valley = match kind {
        GapKind::Direct => &bands.gamma,
        GapKind::IndirectX => &bands.x,
        GapKind::IndirectL => &bands.l,
    };
    valley.as_ref()?.members.first().map(|(_, law)| *law)
}

/// Fractions of the elements of the group III and the group V sublattice, each summing to 1.
pub type Composition = [Vec<f64>; 2];

/// Fractions of the second sublattice; all of it where both are shared.
fn partners(fractions: &[f64]) -> &[f64] {
    if fractions.is_empty() { &[1.0] } else { fractions }
}

/// How a family answers to light.
#[derive(Clone, Debug, PartialEq)]
pub enum FamilyIndex {
    /// No data, no model.
    None,
    /// Tables at some compositions, interpolated along critical-point energies.
    Blend(blend::Blend),
    /// One table of another material, moved and scaled.
    Shifted(blend::Shifted),
}

/// A family between end members.
#[derive(Clone, Debug, PartialEq)]
pub struct Family {
    /// `AlGaInP`
    pub name: String,
    /// One line for lists.
    pub about: String,
    /// Elements of the group III and the group V sublattice, in the order of the label; silicon and
    /// germanium share both, and stand on the first with none on the second.
    pub sites: [Vec<String>; 2],
    /// End members, `[group III][group V]`.
    pub members: Vec<Vec<Arc<Compound>>>,
    /// Bowing of every ternary around it.
    pub bowings: Vec<Bowing>,
    /// How they are put together.
    pub surface: Surface,
    /// Ordering, where the family shows it.
    pub ordering: Option<Ordering>,
    /// Fractions taken where a phrase leaves them open, the first one first.
    pub otherwise: Vec<(String, f64)>,
    /// Index and absorption.
    pub index: FamilyIndex,
    /// What its carriers do, as far as its end members do not say it.
    pub carriers: transport::FamilyCarriers,
    /// Where its own numbers come from.
    pub origins: Vec<Origin>,
    /// Caution classes.
    pub cautions: Vec<String>,
}

impl Family {
    /// How many fractions have to be said before the composition is known.
    pub fn freedom(&self) -> usize {
        self.sites.iter().map(|site| site.len().saturating_sub(1)).sum()
    }

    /// Sublattice and place of an element.
    pub fn position(&self, element: &str) -> Option<(usize, usize)> {
        self.sites.iter().enumerate().find_map(|(site, elements)| {
            elements.iter().position(|known| known == element).map(|at| (site, at))
        })
    }

    /// Weight and end member, in a fixed order; the weights sum to 1.
    fn weighted(&self, composition: &Composition) -> Vec<(f64, &Material)> {
        let mut all = Vec::new();
        for (row, three) in self.members.iter().zip(&composition[0]) {
            for (member, five) in row.iter().zip(partners(&composition[1])) {
                all.push((three * five, &*member.material));
            }
        }
        all
    }

    /// Relaxed lattice constant in Å at `temperature_k`: Vegard's rule, less the bowing of
    /// families that have one.
    ///
    /// `None` where an end member has no lattice.
    pub fn lattice_constant(&self, composition: &Composition, temperature_k: f64) -> Option<f64> {
        self.lattice(composition).map(|lattice| lattice.at(temperature_k))
    }

    fn lattice(&self, composition: &Composition) -> Option<Lattice> {
        let mut sum = Lattice { a300_angstrom: 0.0, slope_angstrom_per_k: 0.0 };
        for (weight, member) in self.weighted(composition) {
            let own = member.lattice?;
            sum.a300_angstrom += weight * own.a300_angstrom;
            sum.slope_angstrom_per_k += weight * own.slope_angstrom_per_k;
        }
        sum.a300_angstrom -= self.bowing(composition, LATTICE);
        Some(sum)
    }

    /// The valleys at a composition with the default ordering.
    pub fn bands(&self, composition: &Composition) -> Bands {
        let mut bands = self.random_bands(composition);
        if let (Some(gamma), shift) = (&mut bands.gamma, self.ordering_shift(composition)) {
            gamma.offset_ev += shift;
        }
        bands
    }

    fn random_bands(&self, composition: &Composition) -> Bands {
        let valley = |kind: GapKind, quantity: &str| -> Option<Valley> {
            let mut members = Vec::new();
            for (weight, member) in self.weighted(composition) {
                members.push((weight, law(member, kind)?));
            }
            Some(Valley { members, offset_ev: -self.bowing(composition, quantity) })
        };
        Bands {
            gamma: valley(GapKind::Direct, "direct"),
            x: valley(GapKind::IndirectX, "x"),
            l: valley(GapKind::IndirectL, "l"),
        }
    }

    /// The direct gap of the random alloy at 300 K, eV.
    pub fn random_gap_ev(&self, composition: &Composition) -> Option<f64> {
        self.random_bands(composition).gamma.map(|gamma| gamma.at(ROOM_TEMPERATURE_K))
    }

    /// The composition of the first end member.
    pub fn corner(&self) -> Composition {
        let first = |site: &Vec<String>| {
            let mut fractions = vec![0.0; site.len()];
            if let Some(slot) = fractions.first_mut() {
                *slot = 1.0;
            }
            fractions
        };
        [first(&self.sites[0]), first(&self.sites[1])]
    }

    /// The material at `composition`. `ordered_to_ev` sets the direct gap at 300 K instead of the
    /// default ordering.
    pub fn at(&self, composition: &Composition, ordered_to_ev: Option<f64>) -> Material {
        let mut material = self.without_optics(composition, ordered_to_ev);
        if let Some(bands) = &material.bands {
            material.optics = self.optics(composition, bands);
        }
        material
    }

    /// Index and absorption at `composition` with the bands in force there.
    pub fn optics(&self, composition: &Composition, bands: &Bands) -> Optics {
        match &self.index {
            FamilyIndex::None => Optics::None,
            FamilyIndex::Blend(blend) => blend.at(self, composition, bands),
            FamilyIndex::Shifted(shifted) => shifted.at(self, composition, bands),
        }
    }

    /// As [`Family::at`], without the work of making a table.
    pub fn without_optics(&self, composition: &Composition, ordered_to_ev: Option<f64>) -> Material {
        let mut material = Material::bare(&self.name, MaterialClass::Semiconductor);
        material.label = self.label(composition);
        let sites = self.sites.iter().zip(composition);
        material.composition = sites
            .flat_map(|(elements, fractions)| elements.iter().cloned().zip(fractions.iter().copied()))
            .collect();
        material.lattice = self.lattice(composition);
        let mut bands = self.bands(composition);
        if let (Some(gamma), Some(ordered)) = (&mut bands.gamma, ordered_to_ev) {
            gamma.offset_ev += ordered - gamma.at(ROOM_TEMPERATURE_K);
        }
        material.elastic = self.elastic(composition);
        material.constants = self.constants(composition);
        material.density_g_per_cm3 = self.density(composition);
        material.bands = Some(bands);
        material.carriers = self.carriers_at(composition);
        material.origins = self.origins_at(composition, ordered_to_ev);
        let has_edge = self.index != FamilyIndex::None;
        material.origins.extend(crate::materials::carriers::derived(&material, has_edge));
        material.cautions = self.cautions.clone();
        material
    }

    fn elastic(&self, composition: &Composition) -> Option<Elastic> {
        let mut sum = Elastic { c11_gpa: 0.0, c12_gpa: 0.0, c44_gpa: 0.0 };
        for (weight, member) in self.weighted(composition) {
            let own = member.elastic?;
            sum.c11_gpa += weight * own.c11_gpa;
            sum.c12_gpa += weight * own.c12_gpa;
            sum.c44_gpa += weight * own.c44_gpa;
        }
        Some(sum)
    }

    /// Constants that every end member has.
    fn constants(&self, composition: &Composition) -> Constants {
        let weighted = self.weighted(composition);
        let mut constants = Constants::default();
        let Some((_, first)) = weighted.first() else { return constants };
        for name in first.constants.0.keys().copied() {
            let sum: Option<f64> = weighted
                .iter()
                .map(|(weight, member)| member.constants.get(name).map(|value| weight * value))
                .sum();
            if let Some(sum) = sum {
                constants.0.insert(name, sum - self.bowing(composition, name));
            }
        }
        constants
    }

    /// Four formula units in the cubic cell: `4 M / (N_A a³)`, g/cm3.
    fn density(&self, composition: &Composition) -> Option<f64> {
        let mut mass = 0.0;
        for (elements, fractions) in self.sites.iter().zip(composition) {
            for (element, fraction) in elements.iter().zip(fractions) {
                mass += fraction * atomic_weight(element)?;
            }
        }
        // A diamond crystal has the elements of its one list on both sublattices.
        let times = if self.sites[1].is_empty() { 2.0 } else { 1.0 };
        zinc_blende_density(times * mass, self.lattice(composition)?.a300_angstrom)
    }

    fn origins_at(&self, composition: &Composition, ordered_to_ev: Option<f64>) -> Vec<Origin> {
        let mut origins: Vec<Origin> = Vec::new();
        let mut add = |origin: Origin| {
            if !origins.contains(&origin) {
                origins.push(origin);
            }
        };
        let of_family = |what: &str| self.origins.iter().any(|origin| origin.what == what);
        for (weight, member) in self.weighted(composition) {
            // What is worked out of the alloy itself, or stated of all of it, is no member's.
            const OWN: [&str; 5] =
                ["index", "critical points", "densities of states", "radiative", "affinity"];
            let of_bands = |origin: &&Origin| {
                let what = origin.what.as_str();
                !OWN.contains(&what) && (what == "mobility" || !of_family(what))
            };
            for origin in member.origins.iter().filter(of_bands).filter(|_| weight > 0.0) {
                add(origin.clone());
            }
        }
        for origin in &self.origins {
            let ordered = self.ordering_share(composition) > 0.0;
            if origin.what == "ordering" && (ordered_to_ev.is_some() || !ordered) {
                continue;
            }
            add(origin.clone());
        }
        self.carrier_origins(composition).into_iter().for_each(&mut add);
        if let Some(ordered) = ordered_to_ev {
            let random = self.random_gap_ev(composition).unwrap_or(ordered);
            add(Origin {
                what: "ordering".to_owned(),
                kind: OriginKind::Stated,
                cite: format!(
                    "gap stated as {} eV at 300 K by ordering; the random alloy has {random:.3} eV",
                    trim(ordered)
                ),
            });
        }
        origins
    }
}

/// Density in g/cm3 of a cubic cell of edge `a_angstrom` with four formula units of `mass` g/mol;
/// a diamond crystal counts two atoms as a unit.
pub fn zinc_blende_density(mass: f64, a_angstrom: f64) -> Option<f64> {
    let volume_cm3 = (a_angstrom * 1e-8).powi(3);
    Some(4.0 * mass / AVOGADRO / volume_cm3).filter(|density| density.is_finite())
}
