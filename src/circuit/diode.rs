//! One junction as a circuit element.

use crate::circuit::radiative::Radiative;

/// A junction under light: photocurrent less radiative recombination, two diodes and a shunt.
///
/// `J(V) = J_ph − R(V)/ere − J01 (e^{V/kT} − 1) − J02 (e^{V/2kT} − 1) − G V`, currents in A/m2,
/// positive when the junction delivers.
#[derive(Clone, Debug, PartialEq)]
pub struct Diode {
    /// J_ph, A/m2, ≥ 0.
    pub photocurrent: f64,
    /// kT/q, V.
    pub thermal_v: f64,
    /// Emission, and what it is multiplied by: 1/ere, or 0 where a fit holds it already.
    pub radiative: Option<(Radiative, f64)>,
    /// A/m2, slope kT/q.
    pub j01: f64,
    /// A/m2, slope 2kT/q.
    pub j02: f64,
    /// 1/(ohm m2), 0 without a shunt.
    pub shunt_conductance: f64,
}

impl Diode {
    /// Recombination and shunt current at `voltage`, and its slope: A/m2, A/m2/V.
    pub fn dark(&self, voltage: f64) -> (f64, f64) {
        let u = voltage / self.thermal_v;
        let mut current = self.shunt_conductance * voltage;
        let mut slope = self.shunt_conductance;
        if let Some((radiative, factor)) = &self.radiative {
            let (emitted, emitted_slope) = radiative.at(voltage);
            current += factor * emitted;
            slope += factor * emitted_slope;
        }
        if self.j01 > 0.0 {
            current += self.j01 * u.exp_m1();
            slope += self.j01 * u.exp() / self.thermal_v;
        }
        if self.j02 > 0.0 {
            current += self.j02 * (0.5 * u).exp_m1();
            slope += self.j02 * (0.5 * u).exp() / (2.0 * self.thermal_v);
        }
        (current, slope)
    }

    /// Current at `voltage`, A/m2.
    pub fn current(&self, voltage: f64) -> f64 {
        self.photocurrent - self.dark(voltage).0
    }

    /// The most it carries at any reverse voltage, A/m2: photocurrent plus saturation current;
    /// infinite with a shunt.
    pub fn ceiling(&self) -> f64 {
        if self.shunt_conductance > 0.0 {
            return f64::INFINITY;
        }
        let emission = self.radiative.as_ref().map_or(0.0, |(r, factor)| factor * r.dark_a_per_m2());
        self.photocurrent + emission + self.j01 + self.j02
    }

    /// The voltage at which it carries `current`, and `dV/dJ` (≤ 0) there.
    ///
    /// `−∞` at or beyond [`Diode::ceiling`]. The recombination current is convex in the voltage,
    /// so Newton steps that start to the right of the root stay there and converge; the start is
    /// the least of the voltages at which one term alone would do.
    pub fn voltage(&self, current: f64) -> (f64, f64) {
        let recombines = self.photocurrent - current;
        if recombines == 0.0 {
            // Also of a junction in the dark that does not even leak: it blocks all else.
            return (0.0, -1.0 / self.dark(0.0).1);
        }
        if current >= self.ceiling() {
            return (f64::NEG_INFINITY, f64::NEG_INFINITY);
        }
        let mut voltage = if recombines > 0.0 { self.upper_bound(recombines) } else { 0.0 };
        let mut slope = self.dark(voltage).1;
        for _ in 0..100 {
            let (value, value_slope) = self.dark(voltage);
            slope = value_slope;
            let step = (value - recombines) / value_slope;
            if !step.is_finite() {
                break;
            }
            voltage -= step;
            if step.abs() <= 1e-13 * self.thermal_v.max(voltage.abs()) {
                break;
            }
        }
        (voltage, -1.0 / slope)
    }

    fn upper_bound(&self, recombines: f64) -> f64 {
        let log = |dark: f64| if dark > 0.0 { (recombines / dark).ln_1p() } else { f64::INFINITY };
        let mut bound = f64::INFINITY;
        if let Some((radiative, factor)) = &self.radiative {
            // A hair below the pole of the exact statistics: everything recombines before it.
            let pole = radiative.ceiling_v() - 1e-9 * self.thermal_v;
            bound = radiative.voltage_of_first_term(recombines / factor).min(pole);
        }
        bound = bound.min(self.thermal_v * log(self.j01)).min(2.0 * self.thermal_v * log(self.j02));
        if self.shunt_conductance > 0.0 {
            bound = bound.min(recombines / self.shunt_conductance);
        }
        if bound.is_finite() { bound } else { 0.0 }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn plain(photocurrent: f64, j01: f64) -> Diode {
        Diode {
            photocurrent,
            thermal_v: 0.025_692_579,
            radiative: None,
            j01,
            j02: 0.0,
            shunt_conductance: 0.0,
        }
    }

    #[test]
    fn one_diode_has_its_closed_form() {
        let diode = plain(138.0, 1e-16);
        for current in [-50.0, 0.0, 100.0, 137.999_999] {
            let exact = diode.thermal_v * ((138.0 - current) / 1e-16_f64).ln_1p();
            assert!((diode.voltage(current).0 - exact).abs() < 1e-13);
        }
        assert_eq!(diode.voltage(138.1).0, f64::NEG_INFINITY);
    }

    #[test]
    fn two_diodes_and_a_shunt_are_solved_on_both_sides() {
        let diode = Diode { j02: 1e-7, shunt_conductance: 0.05, ..plain(138.0, 1e-16) };
        for current in [-1e4, 0.0, 50.0, 130.0, 137.9, 138.0, 139.0, 400.0] {
            let (voltage, slope) = diode.voltage(current);
            assert!((diode.current(voltage) - current).abs() < 1e-9 * current.abs().max(1.0), "{current}");
            assert!(slope < 0.0);
        }
        // Far in reverse only the shunt carries: V = (J_ph + J01 + J02 − J)/G.
        assert!((diode.voltage(400.0).0 - (138.0 - 400.0) / 0.05).abs() < 1e-5);
    }

    #[test]
    fn a_diode_without_anything_stays_at_zero() {
        assert_eq!(plain(0.0, 0.0).voltage(0.0).0, 0.0);
        assert_eq!(plain(0.0, 0.0).voltage(1e-9).0, f64::NEG_INFINITY);
        assert_eq!(plain(0.0, 0.0).voltage(-1.0).0, 0.0);
    }
}
