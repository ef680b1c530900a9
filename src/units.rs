//! Quantities: dimensions, units as the trade writes them, and both directions of conversion.
//!
//! Units are compared by [`Dimension`], never by name: `0.7 um`, `700 nm` and `7000 Å` are the
//! same value. Everything inside the program is SI; the trade's units live at the edges.

pub mod dimension;
pub mod format;
pub mod table;
pub mod text;

pub use dimension::Dimension;
pub use format::{in_unit, number, trade, value_in};
pub use text::{Unit, UnknownUnit, parse};

/// Elementary charge, C (exact, SI 2019). One electronvolt is this many joules.
pub const ELEMENTARY_CHARGE: f64 = 1.602_176_634e-19;

/// Planck constant times speed of light, J m (exact, SI 2019).
pub const PLANCK_TIMES_LIGHT: f64 = 6.626_070_15e-34 * 299_792_458.0;

/// A value in SI units with its dimension.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Quantity {
    /// In the coherent SI unit of `dimension`; angles in rad, shares as plain numbers.
    pub si: f64,
    /// What it measures.
    pub dimension: Dimension,
}

impl Quantity {
    /// `value` of `unit`, an absolute temperature where the unit has an offset (`degC`).
    pub fn of(value: f64, unit: &Unit) -> Self {
        Self { si: value * unit.factor + unit.offset, dimension: unit.dimension }
    }

    /// `value` of `unit` as a difference: `5 degC` is 5 K.
    pub fn difference(value: f64, unit: &Unit) -> Self {
        Self { si: value * unit.factor, dimension: unit.dimension }
    }
}

/// Photon energy in eV at a vacuum wavelength in nm, and the other way round: `E·λ = h·c`.
pub fn electronvolt_nanometre(value: f64) -> f64 {
    PLANCK_TIMES_LIGHT / ELEMENTARY_CHARGE * 1e9 / value
}
