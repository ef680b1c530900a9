//! Radiative recombination of a junction by detailed balance with its own absorptance.

use std::f64::consts::PI;

use crate::numerics::constants::{CHARGE, LIGHT_SPEED, PLANCK, thermal_voltage};
use crate::numerics::quadrature::GAUSS4;

/// Terms of the Bose–Einstein series that are integrated; the rest is summed in closed form.
const TERMS: usize = 32;

/// How far above the edge emission is integrated, in kT: exp(−45) is below rounding.
const ABOVE_EDGE_KT: f64 = 45.0;

/// How the voltage enters the emission.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Statistics {
    /// Exact: the voltage is the chemical potential of the light, `1/(exp((E − qV)/kT) − 1)`,
    /// above the gap; a tail below it takes the diode form (its states would be inverted).
    BoseEinstein,
    /// `exp(qV/kT)` times the emission in the dark.
    Diode,
}

/// What a junction emits against its voltage.
///
/// `J(V) = q·2π/(h³c²) ∫ A(E) E² [1/(exp((E − qV)/kT) − 1) − 1/(exp(E/kT) − 1)] dE`, through the
/// front hemisphere with index 1 (Shockley and Queisser, J. Appl. Phys. 32, 510 (1961); Würfel,
/// J. Phys. C 15, 3967 (1982); Rau, Phys. Rev. B 76, 085303 (2007)), with the occupation written
/// as its series in `y = exp((qV − E_g)/kT)`.
#[derive(Clone, Debug, PartialEq)]
pub struct Radiative {
    thermal_v: f64,
    edge_v: f64,
    /// Coefficients of `y`, `y²`, …, A/m2, less what `closure` holds from the second on.
    terms: Vec<f64>,
    /// Weight of `−ln(1 − y)`, A/m2: every term beyond the last behaves as its harmonic.
    closure: f64,
}

impl Radiative {
    /// Integrates the emission of a junction with the lowest gap `gap_ev` at `temperature_k`.
    ///
    /// `absorptance(energies in eV)` is the share of the light entering at the front that the
    /// junction absorbs. `breaks_ev` are energies where it jumps. Nothing is counted below
    /// `lowest_ev`, where its edge or its data end.
    pub fn new(
        gap_ev: f64,
        temperature_k: f64,
        statistics: Statistics,
        (breaks_ev, lowest_ev): (&[f64], f64),
        absorptance: impl Fn(&[f64]) -> Vec<f64>,
    ) -> Self {
        let thermal_v = thermal_voltage(temperature_k);
        let (energy, weight) = nodes(gap_ev, thermal_v, breaks_ev, lowest_ev);
        let share = absorptance(&energy);
        let prefactor = 2.0 * PI * CHARGE.powi(4) / (PLANCK.powi(3) * LIGHT_SPEED.powi(2));
        let orders = if statistics == Statistics::BoseEinstein { TERMS } else { 1 };
        let mut terms = vec![0.0; orders];
        for ((energy, weight), share) in energy.iter().zip(&weight).zip(&share) {
            let decay = ((gap_ev - energy) / thermal_v).exp();
            let mut term = prefactor * share * energy * energy * weight * decay;
            if *energy < gap_ev {
                terms[0] += term;
                continue;
            }
            for sum in &mut terms {
                *sum += term;
                term *= decay;
            }
        }
        let mut closure = 0.0;
        if orders > 1 {
            closure = orders as f64 * terms[orders - 1];
            for (index, term) in terms.iter_mut().enumerate().skip(1) {
                *term -= closure / (index + 1) as f64;
            }
        }
        Self { thermal_v, edge_v: gap_ev, terms, closure }
    }

    /// Prefactor `J₀` of the diode form, A/m2: the emission in the dark.
    pub fn dark_a_per_m2(&self) -> f64 {
        self.terms.first().map_or(0.0, |first| first * (-self.edge_v / self.thermal_v).exp())
    }

    /// The voltage at which the first term of the series alone is `current` (> 0), V.
    pub fn voltage_of_first_term(&self, current: f64) -> f64 {
        let dark = self.dark_a_per_m2();
        if dark > 0.0 {
            return self.thermal_v * (current / dark).ln_1p();
        }
        match self.terms.first() {
            Some(first) if *first > 0.0 => self.edge_v + self.thermal_v * (current / first).ln(),
            _ => f64::INFINITY,
        }
    }

    /// The voltage it can approach but not reach; infinite in the diode form.
    pub fn ceiling_v(&self) -> f64 {
        if self.closure > 0.0 { self.edge_v } else { f64::INFINITY }
    }

    /// `J(V)` and `dJ/dV`, A/m2 and A/m2/V, for `V` below [`Radiative::ceiling_v`].
    pub fn at(&self, voltage: f64) -> (f64, f64) {
        let u = voltage / self.thermal_v;
        let dark = self.dark_a_per_m2();
        // Written from the edge, so that a cold junction, dark to the last digit, still has one.
        let y = ((voltage - self.edge_v) / self.thermal_v).exp();
        let first = self.terms.first().map_or(0.0, |first| first * y);
        let mut current = if u < 1.0 { dark * u.exp_m1() } else { first - dark };
        let mut slope = first;
        if self.closure > 0.0 {
            // Terms beyond this power are below rounding of the first.
            let needed = ((-40.0 / y.ln()).ceil() as usize).clamp(1, self.terms.len());
            let (mut sum, mut weighted) = (0.0, 0.0);
            for (index, term) in self.terms[..needed].iter().enumerate().skip(1).rev() {
                sum = sum * y + term;
                weighted = weighted * y + term * (index + 1) as f64;
            }
            current += sum * y * y + self.closure * (-(-y).ln_1p() - y);
            slope += weighted * y * y + self.closure * (y / (1.0 - y) - y);
        }
        (current, slope / self.thermal_v)
    }
}

/// Panels of [`dark_currents`] around the gap, in kT.
const PANELS: [f64; 12] = [-16.0, -8.0, -4.0, -2.0, -1.0, 0.0, 0.5, 1.5, 3.0, 6.0, 12.0, 30.0];

/// Dark currents of several absorptances at once, A/m2: `q·2π/(h³c²) ∫ A E² exp(−E/kT) dE`.
///
/// `gap_ev` and the lowest energy that counts come first. `shares(energies in eV)` are as many rows
/// as currents wanted, each asked once at 44 energies: enough for the ratio of what goes down to
/// what goes out of the front, where [`Radiative::new`] resolves fringes and tails.
pub fn dark_currents(
    (gap_ev, lowest_ev): (f64, f64),
    temperature_k: f64,
    shares: impl Fn(&[f64]) -> Vec<Vec<f64>>,
) -> Vec<f64> {
    let thermal_v = thermal_voltage(temperature_k);
    let (mut energy, mut weight) = (Vec::new(), Vec::new());
    for pair in PANELS.windows(2) {
        let [from, to] = [pair[0], pair[1]].map(|kt| (gap_ev + kt * thermal_v).max(lowest_ev));
        let (middle, half) = (0.5 * (from + to), 0.5 * (to - from));
        if half <= 1e-12 * middle {
            continue;
        }
        for (node, node_weight) in GAUSS4 {
            let at = middle + half * node;
            energy.push(at);
            weight.push(half * node_weight * at * at * (-at / thermal_v).exp());
        }
    }
    let prefactor = 2.0 * PI * CHARGE.powi(4) / (PLANCK.powi(3) * LIGHT_SPEED.powi(2));
    let sum = |row: &Vec<f64>| prefactor * row.iter().zip(&weight).map(|(a, b)| a * b).sum::<f64>();
    shares(&energy).iter().map(sum).collect()
}

/// Gauss–Legendre energies and weights from below the gap to far above it, fine near the gap and
/// split at every break.
fn nodes(gap_ev: f64, thermal_v: f64, breaks_ev: &[f64], lowest_ev: f64) -> (Vec<f64>, Vec<f64>) {
    let first = lowest_ev.clamp(0.0, gap_ev);
    let last = gap_ev + ABOVE_EDGE_KT * thermal_v;
    let mut cuts = vec![first, last];
    let mut add = |from: f64, to: f64, step: f64| {
        let count = ((to - from) / step).round() as usize;
        cuts.extend((0..=count).map(|i| gap_ev + thermal_v * (from + step * i as f64)));
    };
    let lowest = (first - gap_ev) / thermal_v;
    // In the cold a tail is many kT deep: no more than 200 panels.
    add(lowest.min(-16.0), -16.0, ((-16.0 - lowest) / 200.0).max(1.0));
    add(lowest.clamp(-16.0, -4.0), -4.0, 0.25);
    add(-4.0, 4.0, 0.125);
    add(4.0, 16.0, 0.5);
    add(16.0, ABOVE_EDGE_KT, 1.5);
    cuts.extend_from_slice(breaks_ev);
    cuts.push(gap_ev);
    cuts.retain(|cut| *cut >= first && *cut <= last);
    cuts.sort_by(f64::total_cmp);
    let mut energy = Vec::with_capacity(4 * cuts.len());
    let mut weight = Vec::with_capacity(4 * cuts.len());
    for pair in cuts.windows(2) {
        let (middle, half) = (0.5 * (pair[0] + pair[1]), 0.5 * (pair[1] - pair[0]));
        if half <= 1e-12 * middle {
            continue;
        }
        for (node, node_weight) in GAUSS4 {
            energy.push(middle + half * node);
            weight.push(half * node_weight);
        }
    }
    (energy, weight)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn step(gap_ev: f64, temperature_k: f64, statistics: Statistics) -> Radiative {
        let above = |energy: &[f64]| energy.iter().map(|&e| if e > gap_ev { 1.0 } else { 0.0 }).collect();
        Radiative::new(gap_ev, temperature_k, statistics, (&[gap_ev], 0.0), above)
    }

    #[test]
    fn a_step_has_its_closed_form_in_the_dark() {
        // ∫_g^∞ x² e^{−x} dx = e^{−g}(g² + 2g + 2), in units of kT: Boltzmann part of the emission.
        let (gap, t) = (1.34, 298.15);
        let kt = thermal_voltage(t);
        let g = gap / kt;
        let prefactor = 2.0 * PI * CHARGE.powi(4) / (PLANCK.powi(3) * LIGHT_SPEED.powi(2));
        let exact = prefactor * kt.powi(3) * (-g).exp() * (g * g + 2.0 * g + 2.0);
        let dark = step(gap, t, Statistics::Diode).dark_a_per_m2();
        assert!((dark / exact - 1.0).abs() < 1e-7, "{dark} {exact}");
    }

    #[test]
    fn exact_statistics_match_a_direct_sum_close_to_the_gap() {
        // 1/(e^{x} − 1) integrated term by term: Σ e^{−m x}((mg)² + 2mg + 2)/m³ in units of kT,
        // summed to convergence, less the dark emission.
        let (gap, t) = (1.1, 300.0);
        let kt = thermal_voltage(t);
        let g = gap / kt;
        let prefactor = 2.0 * PI * CHARGE.powi(4) / (PLANCK.powi(3) * LIGHT_SPEED.powi(2)) * kt.powi(3);
        let exact = |voltage: f64| -> f64 {
            (1..200_000)
                .map(|m| {
                    let m = f64::from(m);
                    (-m * (gap - voltage) / kt).exp() * (g * g / m + 2.0 * g / (m * m) + 2.0 / m.powi(3))
                })
                .sum::<f64>()
                * prefactor
        };
        let emission = step(gap, t, Statistics::BoseEinstein);
        for short_of_gap_v in [0.4, 0.1, 0.03, 0.01, 0.002] {
            let voltage = gap - short_of_gap_v;
            let (current, slope) = emission.at(voltage);
            let expected = exact(voltage) - exact(0.0);
            assert!((current / expected - 1.0).abs() < 3e-6, "{short_of_gap_v}: {current} {expected}");
            let h = 1e-6;
            let difference = (emission.at(voltage + h).0 - emission.at(voltage - h).0) / (2.0 * h);
            assert!((slope / difference - 1.0).abs() < 1e-5, "{short_of_gap_v}");
        }
        assert_eq!(emission.at(0.0).0, 0.0);
    }
}
