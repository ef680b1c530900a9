//! How the layers grow, and how thick a coat would be best.

use serde::Serialize;

/// One coat, the others as they are.
#[derive(Clone, Debug, Serialize)]
pub struct CoatResult {
    /// Path.
    pub layer: String,
    /// The condition that was looked at, the first.
    pub condition: String,
    /// As stated.
    pub thickness_nm: f64,
    /// At which the current that limits the stack is largest, near the stated one.
    pub best_thickness_nm: f64,
    /// By how much that current would grow, a plain fraction.
    pub gain: f64,
}

/// The layers as they grow. In-plane strain and stress are positive in tension.
#[derive(Clone, Debug, Serialize)]
pub struct GrowthResult {
    /// In growth order, those with a lattice, the wafer left out.
    pub steps: Vec<GrowthStep>,
    /// Force per length of all layers on the wafer at 25 °C.
    pub force_n_per_m: f64,
    /// How far the middle of 100 mm of wafer stands off its edge, positive where the grown side is
    /// hollow; `None` where the wafer's thickness or elastic constants are not known.
    pub bow_um_over_100_mm: Option<f64>,
    /// What a crack through the layers in tension sets free.
    pub crack_energy_j_per_m2: f64,
}

/// One layer as it grows.
#[derive(Clone, Debug, Serialize)]
pub struct GrowthStep {
    /// Path.
    pub layer: String,
    /// Everything grown when it is finished.
    pub grown_nm: f64,
    /// Where the mismatch is taken: the stated growth temperature, else 25 °C.
    pub temperature_k: f64,
    /// Relaxed mismatch to the lattice beneath at that temperature.
    pub mismatch_at_growth: f64,
    /// In-plane, at 25 °C, with what cooling adds.
    pub strain: f64,
    /// At 25 °C; `None` without elastic constants.
    pub stress_gpa: Option<f64>,
    /// Net mismatch times thickness since the last relaxed layer.
    pub strain_thickness_nm: f64,
    /// Matthews and Blakeslee; `None` where the layer fits, or where no thickness is safe.
    pub critical_thickness_nm: Option<f64>,
    /// People and Bean, the upper estimate.
    pub critical_thickness_upper_nm: Option<f64>,
}
