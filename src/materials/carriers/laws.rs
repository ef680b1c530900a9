//! The laws themselves: mobility, lifetime, gap narrowing, damage.

use crate::materials::carriers::{Carrier, PerCarrier};

/// Low-field mobility against doping and temperature,
///
/// `μ(N, T) = μ_least + (μ_most (300/T)^a − μ_least) / (1 + (N / (N_half (T/300)^b))^λ)`:
/// Caughey and Thomas, Proc. IEEE 55, 2192 (1967), with the temperature exponents of Sotoodeh,
/// Khalid and Rezazadeh, J. Appl. Phys. 87, 2890 (2000). Meant for 77 to 500 K.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MobilityLaw {
    /// `μ_most`: without doping at 300 K, m2/V/s.
    pub most_m2_per_vs: f64,
    /// `μ_least`: at the highest doping, m2/V/s.
    pub least_m2_per_vs: f64,
    /// `N_half`: the doping that halves the way from one to the other at 300 K, 1/m3.
    pub half_per_m3: f64,
    /// `λ`: how steeply.
    pub steepness: f64,
    /// `a`: how the undoped mobility falls with temperature.
    pub cooling: f64,
    /// `b`: how `N_half` rises with temperature.
    pub half_cooling: f64,
}

impl MobilityLaw {
    /// m2/V/s, above 0 at any doping ≥ 0 in 1/m3 and temperature > 0 in K.
    pub fn at(self, doping_per_m3: f64, temperature_k: f64) -> f64 {
        let warm = temperature_k / 300.0;
        let most = self.most_m2_per_vs * warm.powf(-self.cooling);
        // Far above room temperature lattice scattering alone may give less than `least`.
        let least = self.least_m2_per_vs.min(most);
        let half = self.half_per_m3 * warm.powf(self.half_cooling);
        least + (most - least) / (1.0 + (doping_per_m3.max(0.0) / half).powf(self.steepness))
    }

    /// The law between others: means weighted by shares that sum to 1, of the logarithms of the
    /// mobilities and of the doping, of the exponents as they are. `None` for none.
    pub fn between(laws: &[(f64, Self)]) -> Option<Self> {
        let mean = |of: fn(&Self) -> f64| laws.iter().map(|(share, law)| share * of(law)).sum::<f64>();
        let log_mean =
            |of: fn(&Self) -> f64| laws.iter().map(|(share, law)| share * of(law).ln()).sum::<f64>().exp();
        if laws.is_empty() {
            return None;
        }
        Some(Self {
            most_m2_per_vs: log_mean(|law| law.most_m2_per_vs),
            least_m2_per_vs: log_mean(|law| law.least_m2_per_vs),
            half_per_m3: log_mean(|law| law.half_per_m3),
            steepness: mean(|law| law.steepness),
            cooling: mean(|law| law.cooling),
            half_cooling: mean(|law| law.half_cooling),
        })
    }
}

/// Non-radiative lifetime of a minority carrier, `τ(N) = τ_most / (1 + (N/N_half)^λ)`, the form of
/// Fossum, Solid-State Electron. 19, 269 (1976), where `λ` is 1.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lifetime {
    /// Without doping, s.
    pub most_s: f64,
    /// The doping that halves it, 1/m3; infinite where doping does nothing to it.
    pub half_per_m3: f64,
    /// `λ`.
    pub steepness: f64,
}

impl Lifetime {
    /// s, above 0.
    pub fn at(self, doping_per_m3: f64) -> f64 {
        self.most_s / (1.0 + (doping_per_m3.max(0.0) / self.half_per_m3).powf(self.steepness))
    }
}

/// What doping takes off the gap,
/// `ΔE = a (N/N₁)^(1/3) + b (N/N₁)^(1/4) + c (N/N₁)^(1/2)` with `N₁` = 1e18 /cm3: exchange of the
/// majority carriers, correlation of the minority carriers, and impurities, in the form of Jain
/// and Roulston, Solid-State Electron. 34, 453 (1991).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GapNarrowing {
    /// `a`, eV.
    pub cube_root_ev: f64,
    /// `b`, eV.
    pub fourth_root_ev: f64,
    /// `c`, eV.
    pub square_root_ev: f64,
}

impl GapNarrowing {
    /// `N₁`, 1/m3.
    pub const REFERENCE_PER_M3: f64 = 1e24;

    /// eV ≥ 0 at a doping in 1/m3.
    pub fn at(self, doping_per_m3: f64) -> f64 {
        let share = doping_per_m3.max(0.0) / Self::REFERENCE_PER_M3;
        self.cube_root_ev * share.cbrt()
            + self.fourth_root_ev * share.sqrt().sqrt()
            + self.square_root_ev * share.sqrt()
    }
}

/// A particle that damages.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Particle {
    /// Electrons.
    Electrons,
    /// Protons.
    Protons,
}

impl Particle {
    /// As the language writes it.
    pub fn word(self) -> &'static str {
        match self {
            Self::Electrons => "electrons",
            Self::Protons => "protons",
        }
    }
}

/// What irradiation does to a diffusion length: `1/L² = 1/L₀² + K_L Φ` with the fluence `Φ` in
/// 1/m2 and `K_L` a plain number; it holds for one particle at one energy.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Damage {
    /// Which particle.
    pub particle: Particle,
    /// Its kinetic energy, J.
    pub energy_j: f64,
    /// `K_L` of minority electrons and of minority holes.
    pub constant: PerCarrier<f64>,
}

impl Damage {
    /// Diffusion length in m of a minority carrier after a fluence in 1/m2 of this particle;
    /// `None` without a constant for that carrier.
    pub fn diffusion_length_m(&self, minority: Carrier, before_m: f64, fluence_per_m2: f64) -> Option<f64> {
        let constant = self.constant.get(minority)?;
        Some(before_m / (1.0 + before_m * before_m * constant * fluence_per_m2).sqrt())
    }
}
