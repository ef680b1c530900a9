//! Carriers: what electrons and holes do in a material, at equilibrium and in motion.
//!
//! [`Carriers`] holds the laws a material states; the methods of [`Material`] evaluate them. All
//! SI. `None` means that nothing is known: nothing is made up here. A number of the library that
//! is no measurement (a lifetime, for one) carries [`OriginKind::Estimate`](crate::materials::OriginKind) in the
//! material's origins.

use crate::materials::Material;
use crate::numerics::constants::thermal_voltage;

mod densities;
pub mod laws;
mod mix;
mod origins;
mod radiative;

pub use laws::{Damage, GapNarrowing, Lifetime, MobilityLaw, Particle};
pub use origins::derived;

/// An electron or a hole. Where a doping is meant, its majority carrier: electrons for n.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Carrier {
    /// In the conduction band; the majority in n-type material.
    Electron,
    /// In the valence band; the majority in p-type material.
    Hole,
}

impl Carrier {
    /// Both, in the order they are shown.
    pub const BOTH: [Self; 2] = [Self::Electron, Self::Hole];

    /// The minority carrier of the material whose majority carrier this is.
    pub fn other(self) -> Self {
        match self {
            Self::Electron => Self::Hole,
            Self::Hole => Self::Electron,
        }
    }

    /// For tables and the language: `electron`, `hole`.
    pub fn word(self) -> &'static str {
        match self {
            Self::Electron => "electron",
            Self::Hole => "hole",
        }
    }
}

/// One thing known for electrons, for holes, for both or for none.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PerCarrier<T> {
    /// Of electrons, or of n-type material.
    pub electron: Option<T>,
    /// Of holes, or of p-type material.
    pub hole: Option<T>,
}

impl<T> Default for PerCarrier<T> {
    fn default() -> Self {
        Self { electron: None, hole: None }
    }
}

impl<T> PerCarrier<T> {
    /// What is known of one of them.
    pub fn get(&self, carrier: Carrier) -> Option<&T> {
        match carrier {
            Carrier::Electron => self.electron.as_ref(),
            Carrier::Hole => self.hole.as_ref(),
        }
    }

    /// States it of one of them.
    pub fn set(&mut self, carrier: Carrier, value: Option<T>) {
        match carrier {
            Carrier::Electron => self.electron = value,
            Carrier::Hole => self.hole = value,
        }
    }

    /// Whether nothing is known.
    pub fn is_empty(&self) -> bool {
        self.electron.is_none() && self.hole.is_none()
    }
}

/// The laws a material states for its carriers. Every one is optional.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Carriers {
    /// Drift mobility against doping and temperature. Minority carriers take the same law.
    pub mobility: PerCarrier<MobilityLaw>,
    /// Non-radiative (Shockley–Read–Hall) lifetime as a minority carrier.
    pub lifetime: PerCarrier<Lifetime>,
    /// Radiative coefficient `B` at 300 K, m3/s, where it is stated rather than computed from the
    /// absorption.
    pub radiative_m3_per_s: Option<f64>,
    /// Auger coefficients, m6/s: of two electrons and a hole, and of two holes and an electron.
    pub auger_m6_per_s: PerCarrier<f64>,
    /// Intrinsic density at 300 K, 1/m3, where it is measured better than the masses give it.
    pub intrinsic_per_m3: Option<f64>,
    /// Highest active doping in practice, 1/m3: n under `electron`, p under `hole`.
    pub doping_limit_per_m3: PerCarrier<f64>,
    /// What irradiation does to the diffusion length.
    pub damage: Option<Damage>,
    /// What doping takes off the gap: n under `electron`, p under `hole`.
    pub gap_narrowing: PerCarrier<GapNarrowing>,
}

/// The vacuum level above the zero of the valence-band offsets of Vurgaftman, Meyer, Ram-Mohan,
/// J. Appl. Phys. 89, 5815 (2001), eV: set by gallium arsenide, whose affinity is 4.07 eV
/// (S. M. Sze, K. K. Ng, Physics of Semiconductor Devices, 3rd ed., Wiley (2007)), valence band
/// −0.80 eV and gap 1.4225 eV at 300 K. The other III–V compounds and all their alloys follow from
/// their own offsets, so that band offsets between them are the recommended ones; affinities
/// measured one by one differ from this by up to 0.15 eV.
pub const VACUUM_LEVEL_EV: f64 = 4.07 - 0.80 + 1.4225;

impl Material {
    /// Drift mobility in m2/V/s at a total ionised doping in 1/m3 (donors and acceptors together)
    /// and a temperature in K; the same law for minority and majority carriers.
    ///
    /// Caughey and Thomas, Proc. IEEE 55, 2192 (1967), in the form of [`MobilityLaw`].
    pub fn mobility_m2_per_vs(
        &self,
        carrier: Carrier,
        doping_per_m3: f64,
        temperature_k: f64,
    ) -> Option<f64> {
        self.carriers.mobility.get(carrier).map(|law| law.at(doping_per_m3, temperature_k))
    }

    /// Diffusivity in m2/s by Einstein's relation without degeneracy, `D = μ kT/q`.
    pub fn diffusivity_m2_per_s(
        &self,
        carrier: Carrier,
        doping_per_m3: f64,
        temperature_k: f64,
    ) -> Option<f64> {
        let mobility = self.mobility_m2_per_vs(carrier, doping_per_m3, temperature_k)?;
        Some(mobility * thermal_voltage(temperature_k))
    }

    /// Auger coefficient in m6/s of the process with two of `carrier`: the rate is
    /// `C n² p` for electrons and `C p² n` for holes. Its weak temperature dependence is left out.
    pub fn auger_m6_per_s(&self, carrier: Carrier) -> Option<f64> {
        self.carriers.auger_m6_per_s.get(carrier).copied()
    }

    /// Non-radiative lifetime in s of a minority carrier at a doping in 1/m3. Independent of
    /// temperature: `_temperature_k` is there for laws that will know better.
    pub fn non_radiative_lifetime_s(
        &self,
        minority: Carrier,
        doping_per_m3: f64,
        _temperature_k: f64,
    ) -> Option<f64> {
        self.carriers.lifetime.get(minority).map(|law| law.at(doping_per_m3))
    }

    /// Electron affinity in eV: vacuum level above the conduction-band edge.
    ///
    /// The stated one, at 300 K; for III–V compounds and alloys without one from the
    /// valence-band offsets, see [`VACUUM_LEVEL_EV`]. What temperature does to the gap moves the
    /// conduction band, as the tables of valence-band offsets take it.
    pub fn affinity_ev(&self, temperature_k: f64) -> Option<f64> {
        if let Some(stated) = self.constants.get("affinity") {
            let gap = |temperature_k: f64| self.gap(temperature_k).map(|gap| gap.ev);
            let (room, now) = (gap(crate::materials::ROOM_TEMPERATURE_K), gap(temperature_k));
            return Some(stated + room.zip(now).map_or(0.0, |(room, now)| room - now));
        }
        let offset = self.constants.get("valence_offset")?;
        Some(VACUUM_LEVEL_EV - offset - self.gap(temperature_k)?.ev)
    }

    /// Static permittivity over that of vacuum.
    pub fn static_permittivity(&self) -> Option<f64> {
        self.constants.get("permittivity.static")
    }

    /// Highest doping, 1/m3, that practice gets electrically active with that majority carrier.
    pub fn doping_limit_per_m3(&self, majority: Carrier) -> Option<f64> {
        self.carriers.doping_limit_per_m3.get(majority).copied()
    }

    /// The damage constants of the material with the particle and energy they belong to.
    pub fn damage(&self) -> Option<Damage> {
        self.carriers.damage
    }

    /// How much a doping in 1/m3 of that majority carrier narrows the gap, eV ≥ 0.
    ///
    /// Independent of temperature, as its authors give it; `_temperature_k` is there for laws
    /// that will know better.
    pub fn gap_narrowing_ev(
        &self,
        majority: Carrier,
        doping_per_m3: f64,
        _temperature_k: f64,
    ) -> Option<f64> {
        self.carriers.gap_narrowing.get(majority).map(|law| law.at(doping_per_m3))
    }
}

#[cfg(test)]
mod tests;
