//! Radiative recombination from absorption.

use crate::materials::optics::{EV_M, Optics};
use crate::materials::{Material, ROOM_TEMPERATURE_K};
use crate::numerics::constants::{CHARGE, LIGHT_SPEED, PLANCK, thermal_voltage};

/// Energies of the integral.
const STEPS: usize = 250;
/// How far below the lowest gap its absorption counts, eV: further down the tails of the tables
/// are cut off.
const BELOW_EV: f64 = 0.3;
/// How far above, in kT: `exp(−17)` is left out.
const ABOVE_KT: f64 = 17.0;

impl Material {
    /// Radiative coefficient `B` in m3/s: the rate is `B (np − n_i²)`, all photons counted,
    /// before any of them is absorbed again.
    ///
    /// The stated one, which falls as `T^(−3/2)` like that of a direct gap between parabolic
    /// bands; else by van Roosbroeck and Shockley, Phys. Rev. 94, 1558 (1954), from the material's
    /// own absorption, index and intrinsic density:
    /// `B n_i² = 8π/(h³c²) ∫ n² α E² / (exp(E/kT) − 1) dE`.
    ///
    /// Meant for 150 to 500 K: the tail below the gap keeps its shape while it moves, and a cold
    /// one is steeper. `None` without a table that has an edge, or without an intrinsic density.
    pub fn radiative_coefficient_m3_per_s(&self, temperature_k: f64) -> Option<f64> {
        if temperature_k <= 0.0 {
            return None;
        }
        if let Some(stated) = self.carriers.radiative_m3_per_s {
            return Some(stated * (temperature_k / ROOM_TEMPERATURE_K).powf(-1.5));
        }
        let has_edge = match &self.optics {
            Optics::Table(table) => table.gap_ev.is_some(),
            Optics::Direct(edge) => edge.index.is_some(),
            Optics::None | Optics::Ideal(_) => false,
        };
        let gap_ev = self.gap(temperature_k).filter(|_| has_edge)?.ev;
        let intrinsic = self.intrinsic_density_per_m3(temperature_k)?;
        let kt_ev = thermal_voltage(temperature_k);
        let shift_ev = self.edge_shift_ev(temperature_k);
        let (low, high) = ((gap_ev - BELOW_EV).max(0.2 * gap_ev), gap_ev + ABOVE_KT * kt_ev);
        let step = (high - low) / STEPS as f64;
        let mut sum = 0.0;
        for at in 0..=STEPS {
            let energy = low + step * at as f64;
            let wavelength = EV_M / energy;
            let (n, k) = self.optics.index(wavelength, shift_ev)?;
            let alpha = 4.0 * std::f64::consts::PI * k / wavelength;
            let end = if at == 0 || at == STEPS { 0.5 } else { 1.0 };
            // Counted from the gap, so that neither factor over- or underflows in the cold.
            let thermal = ((gap_ev - energy) / kt_ev).exp() / (1.0 - (-energy / kt_ev).exp());
            sum += end * n * n * alpha * energy * energy * thermal;
        }
        // eV³ to J³.
        let rate =
            8.0 * std::f64::consts::PI * sum * step * (CHARGE / PLANCK).powi(3) / (LIGHT_SPEED * LIGHT_SPEED);
        let states = intrinsic * intrinsic * (gap_ev / kt_ev).exp();
        Some(rate / states).filter(|coefficient| coefficient.is_finite() && *coefficient > 0.0)
    }
}
