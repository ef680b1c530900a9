//! Spectra and photon flux.

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
    /// The source.
    pub cite: String,
}
