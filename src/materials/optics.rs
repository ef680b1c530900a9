//! Optical data: measured tables whose edge can move, and the two models without a chemistry.

use std::sync::Arc;

/// How a material answers to light.
#[derive(Clone, Debug, PartialEq)]
pub enum Optics {
    /// Nobody published data and nothing stands in for it.
    None,
    /// `n` and `k` against wavelength.
    Table(Arc<IndexTable>),
    /// Absorbs nothing below its gap and a stated share above it.
    Ideal(IdealEdge),
    /// A direct gap with a square-root law and an Urbach tail.
    Direct(DirectEdge),
}

/// Measured or modelled index against vacuum wavelength, ascending.
#[derive(Clone, Debug, PartialEq)]
pub struct IndexTable {
    /// m, strictly ascending.
    pub wavelength_m: Vec<f64>,
    /// Real part.
    pub n: Vec<f64>,
    /// Imaginary part, ≥ 0.
    pub k: Vec<f64>,
    /// The gap of the sample at the table's temperature, eV; `None` where no edge is to move.
    pub gap_ev: Option<f64>,
    /// Whether the edge that moves is the direct one (Γ) even where it is not the lowest.
    pub edge_is_direct: bool,
}

/// Above the gap `absorbs` of the light that reaches it, below nothing.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct IdealEdge {
    /// eV.
    pub gap_ev: f64,
    /// Share absorbed above the gap, 0..=1.
    pub absorbs: f64,
}

/// `α = a·√(E − E_g)` above, an Urbach tail below, joined with equal value and slope at
/// `E_g + E_U/2`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DirectEdge {
    /// eV.
    pub gap_ev: f64,
    /// `a`, 1/m/eV^0.5.
    pub coefficient_per_m: f64,
    /// `E_U`, eV.
    pub urbach_ev: f64,
    /// Refractive index, if one was given.
    pub index: Option<f64>,
}

impl Optics {
    /// Absorption coefficient, 1/m, with the edge moved up by `shift_ev`.
    pub fn absorption(&self, _wavelength_m: f64, _shift_ev: f64) -> f64 {
        0.0
    }

    /// `(n, k)` with the edge moved up by `shift_ev`; `None` without data.
    pub fn index(&self, _wavelength_m: f64, _shift_ev: f64) -> Option<(f64, f64)> {
        None
    }
}
