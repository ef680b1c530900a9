//! The minority carriers of one layer, from what it states and what its material knows.

use std::sync::Arc;

use crate::carriers::depletion::Doped;
use crate::carriers::recycling::absorbed_again;
use crate::carriers::statistics::ln_degeneracy;
use crate::design::{Condition, Design, Layer, Place, Polarity};
use crate::evaluate::transport::Lack;
use crate::materials::carriers::Carrier;
use crate::materials::{Material, SharedMaterial};
use crate::numerics::constants::{HC_EV, thermal_voltage};

/// Where a number comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(in crate::evaluate) enum Known {
    /// The layer's block.
    Stated,
    /// The material.
    Material,
    /// The numbers beside it.
    Derived,
}

impl Known {
    /// For tables and JSON.
    pub(in crate::evaluate) fn word(self) -> &'static str {
        match self {
            Self::Stated => "stated",
            Self::Material => "material",
            Self::Derived => "derived",
        }
    }
}

/// Minority carriers of a layer at one temperature and fluence, SI.
#[derive(Clone, Debug, PartialEq)]
pub(in crate::evaluate) struct LayerCarriers {
    pub(in crate::evaluate) layer: usize,
    pub(in crate::evaluate) minority: Carrier,
    pub(in crate::evaluate) thickness_m: f64,
    /// 0 in an undoped layer.
    pub(in crate::evaluate) doping_per_m3: f64,
    pub(in crate::evaluate) mobility_m2_per_vs: f64,
    pub(in crate::evaluate) mobility_from: Known,
    pub(in crate::evaluate) diffusion_m2_per_s: f64,
    /// All recombination.
    pub(in crate::evaluate) lifetime_s: f64,
    /// All but the radiative.
    pub(in crate::evaluate) non_radiative_s: f64,
    pub(in crate::evaluate) lifetime_from: Known,
    /// For collection.
    pub(in crate::evaluate) length_m: f64,
    pub(in crate::evaluate) length_from: Known,
    /// For the dark current: without radiative recombination.
    pub(in crate::evaluate) dark_length_m: f64,
    /// Logarithm of the intrinsic density in 1/m3, without narrowing.
    pub(in crate::evaluate) ln_intrinsic: f64,
    /// Logarithm of the equilibrium minority density in 1/m3.
    pub(in crate::evaluate) ln_minority: f64,
    /// Effective densities of states of conduction and valence band.
    pub(in crate::evaluate) states_per_m3: [f64; 2],
    pub(in crate::evaluate) permittivity: f64,
    /// Whether damage by the condition's particles is in the lengths; `None` without fluence.
    pub(in crate::evaluate) damaged: Option<bool>,
}

impl LayerCarriers {
    pub(super) fn doped(&self) -> Doped {
        Doped {
            thickness_m: self.thickness_m,
            doping_per_m3: self.doping_per_m3,
            permittivity: self.permittivity,
        }
    }
}

/// The minority carrier of a layer of that sign.
pub(in crate::evaluate) fn minority_of(polarity: Polarity) -> Carrier {
    match polarity {
        Polarity::N => Carrier::Hole,
        Polarity::P => Carrier::Electron,
    }
}

/// A condition with what is worth working out once for all layers of a material.
pub(super) struct Under<'a> {
    pub(super) condition: &'a Condition,
    /// Radiative coefficient of each layer, 0 where none is known or asked for.
    radiative_m3_per_s: Vec<f64>,
}

impl<'a> Under<'a> {
    pub(super) fn new(design: &Design, condition: &'a Condition) -> Self {
        let mut known: Vec<(&SharedMaterial, f64)> = Vec::new();
        let of = |layer: &'_ Layer, material: &'_ SharedMaterial| -> Option<f64> {
            let Place::Junction(junction) = layer.place else { return None };
            if !layer.collects() || !design.follows_carriers(junction) {
                return None;
            }
            material.radiative_coefficient_m3_per_s(condition.temperature_k)
        };
        let mut radiative_m3_per_s = Vec::with_capacity(design.layers.len());
        for layer in &design.layers {
            let Some(material) = &layer.material else {
                radiative_m3_per_s.push(0.0);
                continue;
            };
            let before = known.iter().find(|(other, _)| Arc::ptr_eq(other, material) || other == &material);
            let value = before.map(|(_, value)| *value).unwrap_or_else(|| of(layer, material).unwrap_or(0.0));
            if value > 0.0 && before.is_none() {
                known.push((material, value));
            }
            radiative_m3_per_s.push(value);
        }
        Self { condition, radiative_m3_per_s }
    }
}

/// What the bands of a layer say at the condition's temperature.
struct States {
    ln_intrinsic: f64,
    states_per_m3: [f64; 2],
    permittivity: f64,
}

fn states(material: &Material, layer: usize, temperature_k: f64) -> Result<States, Lack> {
    let lack = Lack::Intrinsic(layer);
    let conduction = material.conduction_density_per_m3(temperature_k).filter(|it| *it > 0.0).ok_or(lack)?;
    let valence = material.valence_density_per_m3(temperature_k).filter(|it| *it > 0.0).ok_or(lack)?;
    let gap_ev = material.gap(temperature_k).ok_or(lack)?.ev;
    let intrinsic = material.intrinsic_density_per_m3(temperature_k).ok_or(lack)?;
    // In the cold the density is below any number, not so its logarithm.
    let ln_intrinsic = if intrinsic > 1e-200 {
        intrinsic.ln()
    } else {
        0.5 * (conduction.ln() + valence.ln()) - gap_ev / (2.0 * thermal_voltage(temperature_k))
    };
    let permittivity =
        material.static_permittivity().filter(|it| *it > 0.0).ok_or(Lack::Permittivity(layer))?;
    Ok(States { ln_intrinsic, states_per_m3: [conduction, valence], permittivity })
}

fn parts(design: &Design, index: usize) -> Result<(&Layer, &Material, f64), Lack> {
    let layer = &design.layers[index];
    let material = layer.material.as_deref().ok_or(Lack::Model(index))?;
    Ok((layer, material, layer.thickness_m.ok_or(Lack::Depth(index))?))
}

/// Mobility in m2/V/s and where it comes from.
fn mobility(
    (layer, index): (&Layer, usize),
    material: &Material,
    (carrier, doping_per_m3): (Carrier, f64),
    temperature_k: f64,
) -> Result<(f64, Known), Lack> {
    let stated = layer.transport.mobility.map(|mobility| (mobility, Known::Stated));
    let known = || {
        let mobility = material.mobility_m2_per_vs(carrier, doping_per_m3, temperature_k)?;
        Some((mobility, Known::Material))
    };
    stated.or_else(known).filter(|(mobility, _)| *mobility > 0.0).ok_or(Lack::Mobility(index, carrier))
}

/// The minority carriers of the doped layer `index`.
///
/// Non-radiative recombination is the stated lifetime, or centres and Auger of the material
/// (`1/τ = 1/τ_SRH + C N²`); the radiative rate `B N` joins it for the diffusion length, less the
/// share that is absorbed again where photon recycling is on. A stated diffusion length is the
/// whole of it and serves the dark current as well. A fluence adds `K_L Φ` to `1/L²`.
pub(super) fn layer_carriers(
    design: &Design,
    (index, minority): (usize, Carrier),
    under: &Under<'_>,
) -> Result<LayerCarriers, Lack> {
    let condition = under.condition;
    let (layer, material, thickness_m) = parts(design, index)?;
    let doping_per_m3 = layer.doping.as_ref().ok_or(Lack::Doping(index))?.density_per_m3;
    let temperature_k = condition.temperature_k;
    let thermal_v = thermal_voltage(temperature_k);
    let bands = states(material, index, temperature_k)?;
    let (mobility_m2_per_vs, mobility_from) =
        mobility((layer, index), material, (minority, doping_per_m3), temperature_k)?;
    let diffusion_m2_per_s = mobility_m2_per_vs * thermal_v;

    let length_of = |rate: f64| (diffusion_m2_per_s / rate).sqrt();
    let (rate, non_radiative, lifetime_from, length_from) = match layer.transport.diffusion_length_m {
        Some(length) => {
            let rate = diffusion_m2_per_s / (length * length);
            (rate, rate, Known::Derived, Known::Stated)
        }
        None => {
            let (non_radiative, from) =
                non_radiative(layer, material, (minority, doping_per_m3), temperature_k)
                    .ok_or(Lack::Lifetime(index, minority))?;
            let again = absorbed_share(design, material, thickness_m, temperature_k);
            let coefficient = under.radiative_m3_per_s[index];
            (non_radiative + coefficient * doping_per_m3 * (1.0 - again), non_radiative, from, Known::Derived)
        }
    };
    // 1/L² = rate/D, and so each rate rises by D K_L Φ.
    let damage = condition.fluence.as_ref().map(|fluence| {
        let damage = material.damage().filter(|damage| fluence.is_of(damage));
        let constant = damage.and_then(|damage| damage.constant.get(minority).copied());
        constant.map(|constant| diffusion_m2_per_s * constant * fluence.per_m2)
    });
    let added = damage.flatten().unwrap_or(0.0);
    let (rate, non_radiative) = (rate + added, non_radiative + added);

    let majority = minority.other();
    let narrowed = if design.switches.gap_narrowing == Some(true) {
        let band = bands.states_per_m3[if majority == Carrier::Electron { 0 } else { 1 }];
        let narrowing = material.gap_narrowing_ev(majority, doping_per_m3, temperature_k).unwrap_or(0.0);
        narrowing / thermal_v + ln_degeneracy(doping_per_m3 / band)
    } else {
        0.0
    };
    Ok(LayerCarriers {
        layer: index,
        minority,
        thickness_m,
        doping_per_m3,
        mobility_m2_per_vs,
        mobility_from,
        diffusion_m2_per_s,
        lifetime_s: rate.recip(),
        non_radiative_s: non_radiative.recip(),
        lifetime_from,
        length_m: length_of(rate),
        length_from,
        dark_length_m: length_of(non_radiative),
        ln_intrinsic: bands.ln_intrinsic,
        ln_minority: 2.0 * bands.ln_intrinsic - doping_per_m3.ln() + narrowed,
        states_per_m3: bands.states_per_m3,
        permittivity: bands.permittivity,
        damaged: condition.fluence.as_ref().map(|_| damage.flatten().is_some()),
    })
}

/// Rate in 1/s at which a minority carrier recombines without light.
fn non_radiative(
    layer: &Layer,
    material: &Material,
    (minority, doping_per_m3): (Carrier, f64),
    temperature_k: f64,
) -> Option<(f64, Known)> {
    if let Some(lifetime) = layer.transport.lifetime_s.filter(|lifetime| *lifetime > 0.0) {
        return Some((lifetime.recip(), Known::Stated));
    }
    let centres = material.non_radiative_lifetime_s(minority, doping_per_m3, temperature_k)?;
    let auger = material.auger_m6_per_s(minority.other()).unwrap_or(0.0) * doping_per_m3.powi(2);
    Some((centres.recip() + auger, Known::Material))
}

/// Share of its own light a layer absorbs again, where photon recycling is on; else 0.
fn absorbed_share(design: &Design, material: &Material, thickness_m: f64, temperature_k: f64) -> f64 {
    if design.switches.photon_recycling != Some(true) {
        return 0.0;
    }
    let Some(gap) = material.gap(temperature_k) else { return 0.0 };
    let shift_ev = material.edge_shift_ev(temperature_k);
    absorbed_again(gap.ev, thickness_m, temperature_k, |energy_ev| {
        let wavelength = HC_EV / energy_ev;
        let (n, k) = material.optics.index(wavelength, shift_ev).unwrap_or((1.0, 0.0));
        (4.0 * std::f64::consts::PI * k / wavelength, n)
    })
}

/// An undoped layer between the sides or contacts of a junction, SI.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Undoped {
    pub(super) thickness_m: f64,
    /// Of electrons and of holes.
    pub(super) mobilities: [(f64, Known); 2],
    /// Non-radiative, of electrons and of holes.
    pub(super) lifetimes_s: [f64; 2],
    pub(super) lifetime_from: Known,
    pub(super) ln_intrinsic: f64,
    pub(super) states_per_m3: [f64; 2],
    pub(super) permittivity: f64,
    damaged: Option<bool>,
    thermal_v: f64,
}

impl Undoped {
    pub(super) fn doped(&self) -> Doped {
        Doped { thickness_m: self.thickness_m, doping_per_m3: 0.0, permittivity: self.permittivity }
    }

    /// `μ τ F`, m.
    pub(super) fn drift_m(&self, carrier: Carrier, field_v_per_m: f64) -> f64 {
        let at = if carrier == Carrier::Electron { 0 } else { 1 };
        self.mobilities[at].0 * self.lifetimes_s[at] * field_v_per_m
    }

    /// For the table: its slower carrier.
    pub(super) fn carriers(&self, layer: usize) -> LayerCarriers {
        let product = |at: usize| self.mobilities[at].0 * self.lifetimes_s[at];
        let (minority, at) =
            if product(0) < product(1) { (Carrier::Electron, 0) } else { (Carrier::Hole, 1) };
        let diffusion_m2_per_s = self.mobilities[at].0 * self.thermal_v;
        let length_m = (diffusion_m2_per_s * self.lifetimes_s[at]).sqrt();
        LayerCarriers {
            layer,
            minority,
            thickness_m: self.thickness_m,
            doping_per_m3: 0.0,
            mobility_m2_per_vs: self.mobilities[at].0,
            mobility_from: self.mobilities[at].1,
            diffusion_m2_per_s,
            lifetime_s: self.lifetimes_s[at],
            non_radiative_s: self.lifetimes_s[at],
            lifetime_from: self.lifetime_from,
            length_m,
            length_from: Known::Derived,
            dark_length_m: length_m,
            ln_intrinsic: self.ln_intrinsic,
            ln_minority: self.ln_intrinsic,
            states_per_m3: self.states_per_m3,
            permittivity: self.permittivity,
            damaged: self.damaged,
        }
    }
}

/// Both carriers of the undoped layer `index`. A stated mobility or lifetime holds for both; a
/// stated diffusion length gives the lifetime of each by its mobility.
pub(super) fn undoped(design: &Design, index: usize, condition: &Condition) -> Result<Undoped, Lack> {
    let (layer, material, thickness_m) = parts(design, index)?;
    let temperature_k = condition.temperature_k;
    let thermal_v = thermal_voltage(temperature_k);
    let bands = states(material, index, temperature_k)?;
    let of = |carrier: Carrier| -> Result<((f64, Known), f64, Known), Lack> {
        let own = mobility((layer, index), material, (carrier, 0.0), temperature_k)?;
        if let Some(length) = layer.transport.diffusion_length_m {
            return Ok((own, length * length / (own.0 * thermal_v), Known::Derived));
        }
        let (rate, from) = non_radiative(layer, material, (carrier, 0.0), temperature_k)
            .ok_or(Lack::Lifetime(index, carrier))?;
        Ok((own, rate.recip(), from))
    };
    let (electron, hole) = (of(Carrier::Electron)?, of(Carrier::Hole)?);
    Ok(Undoped {
        thickness_m,
        mobilities: [electron.0, hole.0],
        lifetimes_s: [electron.1, hole.1],
        lifetime_from: electron.2,
        ln_intrinsic: bands.ln_intrinsic,
        states_per_m3: bands.states_per_m3,
        permittivity: bands.permittivity,
        damaged: condition.fluence.as_ref().map(|_| false),
        thermal_v,
    })
}
