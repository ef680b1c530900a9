//! Light that recombination makes, absorbed again before it gets out.

use crate::numerics::constants::thermal_voltage;
use crate::numerics::quadrature::GAUSS4;

/// Share of the light a layer emits inside that it absorbs again itself.
///
/// The layer emits evenly, with the spectrum `α n² E² exp(−E/kT)` of van Roosbroeck and Shockley
/// (Phys. Rev. 94, 1558 (1954)); what goes down leaves for good, what goes up comes back from the
/// front by total reflection, so that the layer is half of one twice as thick:
/// `1 − ∫₀¹ μ (1 − exp(−2αd/μ)) dμ / (2αd)` at each energy (Asbeck, J. Appl. Phys. 48, 820 (1977)).
/// The few per cent inside the escape cone of the front are left out.
///
/// `absorption(E)` gives `α` in 1/m and `n` at a photon energy in eV, asked for from 0.2 eV below
/// `gap_ev` to 0.4 eV above it. 0 where nothing is absorbed.
pub fn absorbed_again(
    gap_ev: f64,
    thickness_m: f64,
    temperature_k: f64,
    absorption: impl Fn(f64) -> (f64, f64),
) -> f64 {
    let kt = thermal_voltage(temperature_k);
    let (first, last) = ((gap_ev - 0.2).max(0.5 * gap_ev), gap_ev + 0.4_f64.max(12.0 * kt));
    const STEPS: usize = 60;
    let step = (last - first) / STEPS as f64;
    let (mut emitted, mut absorbed) = (0.0, 0.0);
    for i in 0..=STEPS {
        let energy = first + step * i as f64;
        let (alpha, index) = absorption(energy);
        let spectrum = alpha * (index * energy).powi(2) * ((gap_ev - energy) / kt).exp();
        if spectrum.is_finite() && spectrum > 0.0 {
            emitted += spectrum;
            absorbed += spectrum * kept(2.0 * alpha * thickness_m);
        }
    }
    if emitted > 0.0 { (absorbed / emitted).clamp(0.0, 1.0) } else { 0.0 }
}

/// `1 − ∫₀¹ μ (1 − exp(−x/μ)) dμ / x`: share kept of light that a slab of the optical thickness `x`
/// emits evenly in all directions, per pair of faces.
fn kept(x: f64) -> f64 {
    if x <= 0.0 {
        return 0.0;
    }
    // Eight panels, narrow towards grazing light.
    const EDGES: [f64; 9] = [0.0, 0.003, 0.01, 0.03, 0.08, 0.2, 0.4, 0.7, 1.0];
    let mut out = 0.0;
    for pair in EDGES.windows(2) {
        let half = 0.5 * (pair[1] - pair[0]);
        for (node, weight) in GAUSS4 {
            let mu = 0.5 * (pair[0] + pair[1]) + half * node;
            out -= half * weight * mu * (-x / mu).exp_m1();
        }
    }
    (1.0 - out / x).clamp(0.0, 1.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_share_kept_has_its_closed_form() {
        // 1 − (1/2 − E₃(x))/x with E₃ of Abramowitz and Stegun, table 5.4:
        // E₃(1) = 0.1096920, E₃(0.1) = 0.4162915, E₃(10) = 3.548e-6.
        for (x, e3) in [(1.0, 0.109_691_967), (0.1, 0.416_291_458), (10.0, 3.548_763e-6)] {
            let expected = 1.0 - (0.5 - e3) / x;
            assert!((kept(x) - expected).abs() < 1e-5, "{x}: {} {expected}", kept(x));
        }
        assert_eq!(kept(0.0), 0.0);
    }

    #[test]
    fn thick_layers_keep_most_of_their_light() {
        let edge =
            |energy: f64| (if energy > 1.42 { 1e6 } else { 1e6 * ((energy - 1.42) / 7e-3).exp() }, 3.6);
        let thin = absorbed_again(1.42, 1e-7, 300.0, edge);
        let thick = absorbed_again(1.42, 1e-4, 300.0, edge);
        assert!(thin > 0.1 && thin < 0.5, "{thin}");
        assert!(thick > 0.9 && thick < 1.0, "{thick}");
        assert_eq!(absorbed_again(1.42, 1e-6, 300.0, |_| (0.0, 3.6)), 0.0);
    }
}
