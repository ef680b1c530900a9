//! Spectra and photon flux.
//!
//! Currents come from the photon flux, which is linear between the points of a table; irradiance
//! is linear between them too, each on its own, so that the totals are those that are published.

pub mod blackbody;
pub mod builtin;

pub use blackbody::{SUN_DILUTION, blackbody};
pub use builtin::{BUILTIN, builtin};

use crate::numerics::constants::{CHARGE, HC};
use crate::numerics::quadrature::{integral, integral_between, linear_at};

/// Where material data and the terrestrial tables start, m. The part of AM0 beyond it drives no
/// current, but efficiency is over the whole.
pub const DATA_START_M: f64 = 280e-9;

/// A spectrum as given: irradiance against wavelength, ascending.
#[derive(Clone, Debug, PartialEq)]
pub struct Spectrum {
    /// `AM1.5G`, or the user's name.
    pub name: String,
    /// Vacuum wavelength, m, strictly ascending.
    pub wavelength_m: Vec<f64>,
    /// Spectral irradiance, W/m2/m (per metre of wavelength), ≥ 0.
    pub irradiance: Vec<f64>,
    /// Whole irradiance that efficiency divides by, W/m2; may be more than the table's part that
    /// drives currents (AM0).
    pub total_w_per_m2: f64,
    /// Shorter wavelengths drive no current and are a line of their own in the ledger, m:
    /// [`DATA_START_M`] for tables, 0 where the light is a law.
    pub drives_from_m: f64,
    /// The source.
    pub cite: String,
}

impl Spectrum {
    /// A spectrum whose total is the integral of its table.
    pub fn from_table(
        name: impl Into<String>,
        wavelength_m: Vec<f64>,
        irradiance: Vec<f64>,
        cite: impl Into<String>,
    ) -> Self {
        let total_w_per_m2 = integral(&wavelength_m, &irradiance);
        let drives_from_m = DATA_START_M;
        Self { name: name.into(), wavelength_m, irradiance, total_w_per_m2, drives_from_m, cite: cite.into() }
    }

    /// First and last wavelength, m; `None` without points.
    pub fn range_m(&self) -> Option<(f64, f64)> {
        Some((*self.wavelength_m.first()?, *self.wavelength_m.last()?))
    }

    /// Spectral photon flux at each point of the table, photons/s/m2/m.
    pub fn photon_flux(&self) -> Vec<f64> {
        self.wavelength_m
            .iter()
            .zip(&self.irradiance)
            .map(|(wavelength, power)| power * wavelength / HC)
            .collect()
    }

    /// Spectral irradiance at any wavelength, W/m2/m: linear between points, 0 outside.
    pub fn irradiance_at(&self, wavelength_m: f64) -> f64 {
        linear_at(&self.wavelength_m, &self.irradiance, wavelength_m)
    }

    /// Irradiance between two wavelengths, W/m2, the cuts interpolated.
    pub fn irradiance_between(&self, from_m: f64, to_m: f64) -> f64 {
        integral_between(&self.wavelength_m, &self.irradiance, from_m, to_m)
    }

    /// Current of one charge per photon between two wavelengths, A/m2, the cuts interpolated.
    pub fn photon_current(&self, from_m: f64, to_m: f64) -> f64 {
        CHARGE * integral_between(&self.wavelength_m, &self.photon_flux(), from_m, to_m)
    }

    /// The same shape, brought to a whole irradiance of `total_w_per_m2` (≥ 0). A spectrum
    /// without light stays as it is.
    #[must_use]
    pub fn scaled_to(mut self, total_w_per_m2: f64) -> Self {
        if self.total_w_per_m2 > 0.0 {
            let factor = total_w_per_m2 / self.total_w_per_m2;
            for power in &mut self.irradiance {
                *power *= factor;
            }
            self.total_w_per_m2 = total_w_per_m2;
        }
        self
    }
}
