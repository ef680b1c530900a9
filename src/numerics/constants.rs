//! Defining constants of the SI since 2019 (CODATA 2018: exact) and what follows from them.

/// Planck constant, J s.
pub const PLANCK: f64 = 6.626_070_15e-34;
/// Speed of light in vacuum, m/s.
pub const LIGHT_SPEED: f64 = 299_792_458.0;
/// Elementary charge, C.
pub const CHARGE: f64 = 1.602_176_634e-19;
/// Boltzmann constant, J/K.
pub const BOLTZMANN: f64 = 1.380_649e-23;
/// `h c`, J m.
pub const HC: f64 = PLANCK * LIGHT_SPEED;
/// `h c / q`, eV m: wavelength times photon energy.
pub const HC_EV: f64 = HC / CHARGE;
/// Stefan–Boltzmann constant `2 π⁵ k⁴ / (15 h³ c²)`, W/m2/K4.
pub const STEFAN_BOLTZMANN: f64 = {
    let pi = std::f64::consts::PI;
    let k2 = BOLTZMANN * BOLTZMANN;
    2.0 * pi * pi * pi * pi * pi * k2 * k2 / (15.0 * PLANCK * PLANCK * PLANCK * LIGHT_SPEED * LIGHT_SPEED)
};

/// `kT/q`, V.
pub fn thermal_voltage(temperature_k: f64) -> f64 {
    BOLTZMANN * temperature_k / CHARGE
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn derived_constants_have_their_published_digits() {
        // CODATA 2018: sigma = 5.670374419e-8 W/m2/K4; hc = 1239.841984 eV nm.
        assert!((STEFAN_BOLTZMANN / 5.670_374_419e-8 - 1.0).abs() < 1e-9);
        assert!((HC_EV * 1e9 - 1_239.841_984).abs() < 1e-6);
    }
}
