//! The light of a black body.

use std::f64::consts::PI;

use crate::light::Spectrum;
use crate::numerics::constants::{BOLTZMANN, HC, LIGHT_SPEED, STEFAN_BOLTZMANN};
use crate::numerics::quadrature::integral;

/// Share of the hemisphere the sun's disc fills, weighted by the cosine: (R_sun / 1 au)², with the
/// nominal solar radius 695 700 km (IAU 2015 resolution B3) and 1 au = 149 597 870.7 km.
pub const SUN_DILUTION: f64 = {
    let ratio = 6.957e8 / 1.495_978_707e11;
    ratio * ratio
};

/// Points of the table; on an even logarithmic grid the piecewise linear integral is right to
/// about 1e-6.
const POINTS: usize = 4096;

/// Light of a black body at `temperature_k` (> 0) that fills the share `dilution` of the
/// hemisphere: 1 is what leaves its surface, [`SUN_DILUTION`] what a sun of that temperature
/// sends to the earth.
///
/// Spectral exitance `2πhc²/λ⁵ / (exp(hc/λkT) − 1)` in W/m2/m (Planck). The total is `σT⁴ ·
/// dilution` (Stefan–Boltzmann), of which the table leaves out less than 1e-6 beyond its ends;
/// the table is normalised so that the two agree.
pub fn blackbody(temperature_k: f64, dilution: f64) -> Spectrum {
    let kt = BOLTZMANN * temperature_k;
    // hc/λkT from 45 down to 0.01.
    let (shortest, longest) = (HC / (45.0 * kt), HC / (0.01 * kt));
    let step = (longest / shortest).ln() / (POINTS - 1) as f64;
    let wavelength_m: Vec<f64> = (0..POINTS).map(|i| shortest * (step * i as f64).exp()).collect();
    let mut irradiance: Vec<f64> = wavelength_m
        .iter()
        .map(|&wavelength| {
            let x = HC / (wavelength * kt);
            dilution * 2.0 * PI * HC * LIGHT_SPEED / wavelength.powi(5) / x.exp_m1()
        })
        .collect();
    let total_w_per_m2 = STEFAN_BOLTZMANN * temperature_k.powi(4) * dilution;
    // Beyond the long end x³/(eˣ − 1) → x² (Rayleigh–Jeans): a share of 15/π⁴ · 0.01³/3. Beyond
    // the short end it is 1e-15.
    let inside = 1.0 - 15.0 / PI.powi(4) * 0.01_f64.powi(3) / 3.0;
    let table = integral(&wavelength_m, &irradiance);
    if table > 0.0 {
        let factor = inside * total_w_per_m2 / table;
        irradiance.iter_mut().for_each(|power| *power *= factor);
    }
    Spectrum {
        name: format!("black body {temperature_k} K"),
        wavelength_m,
        irradiance,
        total_w_per_m2,
        drives_from_m: 0.0,
        cite: "Planck's law".to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_table_holds_the_exact_total_and_the_share_of_half_power() {
        let spectrum = blackbody(5800.0, 1.0);
        // Stefan–Boltzmann constant as CODATA 2018 prints it.
        assert!((spectrum.total_w_per_m2 / (5.670_374_419e-8 * 5800.0_f64.powi(4)) - 1.0).abs() < 1e-6);
        let table = integral(&spectrum.wavelength_m, &spectrum.irradiance);
        assert!((table / spectrum.total_w_per_m2 - 1.0).abs() < 1e-6);
        // Half the power lies below λT = 4107 µm K (radiation tables).
        let half = spectrum.irradiance_between(0.0, 4.1073e-3 / 5800.0);
        assert!((half / spectrum.total_w_per_m2 - 0.5).abs() < 2e-4);
    }

    #[test]
    fn planck_at_the_peak() {
        // Peak of the exitance at 5000 K: 2πhc²/λ⁵/(e^4.965114 − 1) at λT = 2897.771955 µm K:
        // 1.2867e-11 T⁵ W/m3 (Wien's fourth law).
        let spectrum = blackbody(5000.0, 1.0);
        let peak = spectrum.irradiance.iter().copied().fold(0.0, f64::max);
        assert!((peak / (1.286_7e-5 * 5000.0_f64.powi(5)) - 1.0).abs() < 1e-3, "{peak}");
    }
}
