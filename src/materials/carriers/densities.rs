//! Effective densities of states and the intrinsic density, from the masses and the gaps.

use crate::materials::{GapKind, Material, ROOM_TEMPERATURE_K};
use crate::numerics::constants::{BOLTZMANN, PLANCK, thermal_voltage};

/// Electron mass, kg (CODATA 2018).
const ELECTRON_MASS: f64 = 9.109_383_701_5e-31;

/// Directions in which the warped valence bands are averaged, a side of an octant.
const DIRECTIONS: usize = 12;

/// `2 (2π m kT/h²)^(3/2)` with `m` in electron masses, 1/m3: 2.509e19 /cm3 for one at 300 K.
fn density(mass: f64, temperature_k: f64) -> f64 {
    let inner = 2.0 * std::f64::consts::PI * mass * ELECTRON_MASS * BOLTZMANN * temperature_k;
    2.0 * (inner / (PLANCK * PLANCK)).powf(1.5)
}

impl Material {
    /// Effective density of states of the conduction band, 1/m3, counted from its lowest edge at
    /// `temperature_k` (K): every valley whose mass is known, by its Boltzmann weight. Parabolic
    /// bands.
    pub fn conduction_density_per_m3(&self, temperature_k: f64) -> Option<f64> {
        let bands = self.bands.as_ref().filter(|_| temperature_k > 0.0)?;
        let lowest = bands.gap(temperature_k)?;
        let valleys =
            [(&bands.gamma, GapKind::Direct), (&bands.x, GapKind::IndirectX), (&bands.l, GapKind::IndirectL)];
        let mut sum = None;
        for (valley, kind) in valleys {
            let Some(valley) = valley else { continue };
            let is_lowest = kind == lowest.kind;
            let Some(mass) = self.valley_mass(kind, is_lowest) else {
                if is_lowest {
                    return None;
                }
                continue;
            };
            let above_ev = valley.at(temperature_k) - lowest.ev;
            let weight = (-above_ev / thermal_voltage(temperature_k)).exp();
            sum = Some(sum.unwrap_or(0.0) + weight * density(mass, temperature_k));
        }
        sum
    }

    /// Density-of-states mass of a valley with all its equivalents, in electron masses.
    fn valley_mass(&self, kind: GapKind, is_lowest: bool) -> Option<f64> {
        let get = |name: &str| self.constants.get(name).filter(|mass| *mass > 0.0);
        let stated = get("mass.electron_density").filter(|_| is_lowest);
        stated.or_else(|| match kind {
            GapKind::Direct => get("mass.electron"),
            GapKind::IndirectX => get("mass.x_density"),
            GapKind::IndirectL => get("mass.l_density"),
        })
    }

    /// Effective density of states of the valence band, 1/m3, at `temperature_k` (K): heavy and
    /// light holes; the split-off band, some kT below, is left out.
    ///
    /// By the stated density-of-states mass; else by the stated masses of both; else by the
    /// Luttinger parameters, whose warped bands
    /// `E = (γ1 ∓ √(4γ2² + 12 (γ3² − γ2²) s)) ħ²k²/2m`, `s = (x²y² + y²z² + z²x²)` of the direction, are
    /// averaged over all directions (Dresselhaus, Kip and Kittel, Phys. Rev. 98, 368 (1955)).
    pub fn valence_density_per_m3(&self, temperature_k: f64) -> Option<f64> {
        if temperature_k <= 0.0 {
            return None;
        }
        let get = |name: &str| self.constants.get(name).filter(|mass| *mass > 0.0);
        let of_two = |heavy: f64, light: f64| heavy.powf(1.5) + light.powf(1.5);
        let mass = get("mass.hole_density").map(|mass| mass.powf(1.5)).or_else(|| {
            let stated = || Some(of_two(get("mass.heavy_hole")?, get("mass.light_hole")?));
            stated().or_else(|| self.warped_masses())
        })?;
        Some(mass * density(1.0, temperature_k))
    }

    /// `m_heavy^1.5 + m_light^1.5` averaged over directions; `None` without sound parameters.
    fn warped_masses(&self) -> Option<f64> {
        let luttinger = |name: &str| self.constants.get(name);
        let g1 = luttinger("mass.luttinger1")?;
        let g2 = luttinger("mass.luttinger2")?;
        let g3 = luttinger("mass.luttinger3")?;
        // Heavy holes have a positive mass along every axis only then.
        if g1 <= 2.0 * g2.max(g3) || g2 < 0.0 || g3 < 0.0 {
            return None;
        }
        let (mut sum, steps) = (0.0, DIRECTIONS as f64);
        for polar in 0..DIRECTIONS {
            let z = (polar as f64 + 0.5) / steps;
            for turn in 0..DIRECTIONS {
                let azimuth = (turn as f64 + 0.5) / steps * std::f64::consts::FRAC_PI_2;
                let across = 1.0 - z * z;
                let (x2, y2) = (across * azimuth.cos().powi(2), across * azimuth.sin().powi(2));
                let s = x2 * y2 + (x2 + y2) * z * z;
                let root = (4.0 * g2 * g2 + 12.0 * (g3 * g3 - g2 * g2) * s).max(0.0).sqrt();
                sum += (g1 - root).powf(-1.5) + (g1 + root).powf(-1.5);
            }
        }
        Some(sum / (steps * steps)).filter(|mass| mass.is_finite())
    }

    /// Intrinsic density, 1/m3, at `temperature_k` (K): `√(N_C N_V) exp(−E_g/2kT)`, Boltzmann
    /// statistics; where the material states its value at 300 K, in proportion to that.
    pub fn intrinsic_density_per_m3(&self, temperature_k: f64) -> Option<f64> {
        let at = |temperature_k: f64| {
            let states = self.conduction_density_per_m3(temperature_k)?
                * self.valence_density_per_m3(temperature_k)?;
            let gap_ev = self.gap(temperature_k)?.ev;
            Some(states.sqrt() * (-gap_ev / (2.0 * thermal_voltage(temperature_k))).exp())
        };
        let now = at(temperature_k)?;
        let Some(stated) = self.carriers.intrinsic_per_m3 else { return Some(now) };
        Some(now * stated / at(ROOM_TEMPERATURE_K)?)
    }
}
