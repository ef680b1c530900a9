//! Measurements beside the prediction.

use crate::design::{Condition, Design, Measured, MeasuredKind};
use crate::evaluate::condition::{open_light, predicted_current};
use crate::evaluate::lit::Lit;
use crate::light::{Spectrum, builtin};
use crate::numerics::constants::CHARGE;
use crate::numerics::quadrature::{linear_along, linear_at, product_integral};
use crate::results::MeasuredResult;

/// A/m2 to mA/cm2.
const MA_PER_CM2: f64 = 0.1;

/// One measurement against `lit`, the light of its condition.
pub(super) fn measured(design: &Design, it: &Measured, lit: &Lit) -> Option<MeasuredResult> {
    let condition = design.conditions.get(it.condition)?;
    let result = MeasuredResult {
        kind: match it.kind {
            MeasuredKind::Eqe => "eqe".to_owned(),
            MeasuredKind::Jv => "jv".to_owned(),
        },
        file: it.file.clone(),
        junction: it.junction.map(|index| design.junctions[index].name.value.clone()),
        condition: condition.name.clone(),
        ..MeasuredResult::default()
    };
    match it.kind {
        MeasuredKind::Eqe => Some(eqe(design, it, (condition, lit), result)),
        MeasuredKind::Jv => Some(jv(design, it, (condition, lit), result)),
    }
}

fn eqe(
    design: &Design,
    it: &Measured,
    (condition, lit): (&Condition, &Lit),
    result: MeasuredResult,
) -> MeasuredResult {
    let Some(junction) = it.junction else { return result };
    let model = lit.collected_share(junction);
    let predicted = linear_along(&lit.wavelength_m, &model, &it.at);
    // Current of what is measured, and of the model between the same ends.
    let open = open_light(design, condition);
    let current = |at: &[f64], share: &[f64]| MA_PER_CM2 * open * drives(&condition.light, (at, share));
    let own = between(&lit.wavelength_m, &model, &it.at);
    let reference = match &it.reference {
        Some((at, values)) => (at.as_slice(), values.as_slice()),
        None => (lit.wavelength_m.as_slice(), model.as_slice()),
    };
    let standard = builtin("AM1.5G");
    let factor = standard.and_then(|standard| {
        spectral_mismatch((&condition.light, &standard), reference, (&it.at, &it.values))
    });
    let (bias, rms) = residual(&it.at, &it.values, &predicted);
    MeasuredResult {
        at: it.at.iter().map(|wavelength| wavelength * 1e9).collect(),
        measured: it.values.clone(),
        predicted,
        rms,
        bias,
        measured_jsc_ma_per_cm2: Some(current(&it.at, &it.values)),
        predicted_jsc_ma_per_cm2: Some(current(&own.0, &own.1)),
        spectral_mismatch_factor: factor,
        ..result
    }
}

/// Spectral mismatch factor of IEC 60904-7: with the light of the test `E`, the reference light `E₀`
/// and the responses of reference device `S_r` and device under test `S`,
/// `∫E₀ S_r · ∫E S / (∫E S_r · ∫E₀ S)`; a measured current is divided by it. Quantum efficiencies
/// stand for responses, photon fluxes for irradiances. `None` where one of them sees no light.
fn spectral_mismatch(
    (light, standard): (&Spectrum, &Spectrum),
    reference: (&[f64], &[f64]),
    device: (&[f64], &[f64]),
) -> Option<f64> {
    let (light_r, light_d) = (drives(light, reference), drives(light, device));
    let (standard_r, standard_d) = (drives(standard, reference), drives(standard, device));
    let all = [light_r, light_d, standard_r, standard_d].iter().all(|current| *current > 0.0);
    all.then(|| standard_r * light_d / (light_r * standard_d))
}

/// The part of a share between the ends of `range`, the cuts interpolated.
fn between(at: &[f64], share: &[f64], range: &[f64]) -> (Vec<f64>, Vec<f64>) {
    let (Some(&first), Some(&last)) = (range.first(), range.last()) else { return Default::default() };
    let inside = at.iter().copied().filter(|at| (first..last).contains(at) && *at > first);
    let kept: Vec<f64> = std::iter::once(first).chain(inside).chain([last]).collect();
    let values = linear_along(at, share, &kept);
    (kept, values)
}

/// Current of a quantum efficiency under a light at one times, A/m2: both linear between the points
/// of either.
fn drives(light: &Spectrum, (at, share): (&[f64], &[f64])) -> f64 {
    let (Some(&first), Some(&last)) = (at.first(), at.last()) else { return 0.0 };
    let inside = light.wavelength_m.iter().filter(|wavelength| (first..=last).contains(*wavelength));
    let mut grid: Vec<f64> = inside.chain(at).copied().collect();
    grid.sort_by(f64::total_cmp);
    grid.dedup();
    let flux = linear_along(&light.wavelength_m, &light.photon_flux(), &grid);
    CHARGE * product_integral(&grid, &flux, &linear_along(at, share, &grid))
}

fn jv(
    design: &Design,
    it: &Measured,
    (condition, lit): (&Condition, &Lit),
    result: MeasuredResult,
) -> MeasuredResult {
    let currents = predicted_current(design, (condition, lit), it.junction, &it.at);
    let predicted: Vec<f64> = currents.iter().map(|current| MA_PER_CM2 * current).collect();
    let measured: Vec<f64> = it.values.iter().map(|current| MA_PER_CM2 * current).collect();
    let (bias, rms) = residual(&it.at, &measured, &predicted);
    let spans = |voltage: f64| it.at.first() <= Some(&voltage) && it.at.last() >= Some(&voltage);
    let open_v =
        it.at.windows(2).zip(measured.windows(2)).find_map(|(v, j)| {
            (j[0] >= 0.0 && j[1] < 0.0).then(|| v[0] + (v[1] - v[0]) * j[0] / (j[0] - j[1]))
        });
    let power = it.at.iter().zip(&measured).map(|(v, j)| 10.0 * v * j).reduce(f64::max);
    let short = predicted_current(design, (condition, lit), it.junction, &[0.0]);
    MeasuredResult {
        at: it.at.clone(),
        measured_jsc_ma_per_cm2: spans(0.0).then(|| linear_at(&it.at, &measured, 0.0)),
        predicted_jsc_ma_per_cm2: short.first().map(|current| MA_PER_CM2 * current),
        measured_voc_v: open_v,
        measured_power_w_per_m2: power,
        measured,
        predicted,
        rms,
        bias,
        ..result
    }
}

/// Mean and root mean square of measured less predicted, over the range measured.
fn residual(at: &[f64], measured: &[f64], predicted: &[f64]) -> (f64, f64) {
    let off: Vec<f64> = measured.iter().zip(predicted).map(|(a, b)| a - b).collect();
    let ones = vec![1.0; at.len()];
    let width = product_integral(at, &ones, &ones);
    if width <= 0.0 {
        return (0.0, 0.0);
    }
    (product_integral(at, &off, &ones) / width, (product_integral(at, &off, &off) / width).sqrt())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_mismatch_factor_of_two_lines() {
        // IEC 60904-7 on light of two narrow lines, one seen by each device: the reference device
        // sees the first line, the device under test the second. Under the test light both lines are
        // equal, under the standard the second has half the photons: the device under test is
        // favoured twice.
        let lines = |first: f64, second: f64| {
            let at = vec![499e-9, 500e-9, 501e-9, 799e-9, 800e-9, 801e-9];
            let power = vec![0.0, first / 500.0, 0.0, 0.0, second / 800.0, 0.0];
            Spectrum::from_table("lines", at, power, "invented")
        };
        let blue = ([450e-9, 550e-9], [1.0, 1.0]);
        let red = ([750e-9, 850e-9], [1.0, 1.0]);
        let factor =
            spectral_mismatch((&lines(1.0, 1.0), &lines(1.0, 0.5)), (&blue.0, &blue.1), (&red.0, &red.1));
        assert!((factor.expect("light") - 2.0).abs() < 1e-9);
        // The same response has a factor of one under any light.
        let own =
            spectral_mismatch((&lines(3.0, 1.0), &lines(1.0, 0.5)), (&blue.0, &blue.1), (&blue.0, &blue.1));
        assert!((own.expect("light") - 1.0).abs() < 1e-12);
    }

    #[test]
    fn residuals_are_means_over_the_range() {
        // Off by 1 over the first half and by 3 over the second: mean 2, rms √5 (with a steep step).
        let at = [0.0, 1.0, 1.0 + 1e-9, 2.0];
        let (bias, rms) = residual(&at, &[1.0, 1.0, 3.0, 3.0], &[0.0; 4]);
        assert!((bias - 2.0).abs() < 1e-6 && (rms - 5f64.sqrt()).abs() < 1e-6);
    }
}
