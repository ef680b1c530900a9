//! One junction as a circuit element.

use crate::circuit::radiative::Radiative;
use crate::numerics::roots::newton_bracketed;

/// A junction under light: photocurrent less radiative recombination, two diodes, a shunt and its
/// breakdown.
///
/// `J(V) = J_ph − R(V)·factor − J01 (e^{V/kT} − 1) − J02 (e^{V/2kT} − 1) − G V − B(V)`, currents in
/// A/m2, positive when the junction delivers.
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
    /// Where it breaks down in reverse, if it does.
    pub breakdown: Option<Breakdown>,
    /// What the junctions below absorb of its light, if coupling counts.
    pub sends_down: Option<SentDown>,
}

/// Light of a junction that makes current in those below.
#[derive(Clone, Debug, PartialEq)]
pub struct SentDown {
    /// Its radiative recombination.
    pub emission: Radiative,
    /// What each junction below gets of it as current, the next one first.
    pub factors: Vec<f64>,
}

/// Avalanche multiplication of the leakage, by Bishop, Solar Cells 25, 73 (1988):
/// `B(V) = a G V (1 + V/V_b)^−m` in reverse (`V < 0`), with the voltage V_b > 0 at which it is
/// without bound. Forward it goes on as its tangent `a G V`, from which Bishop's own term differs by
/// less than a shunt of that size matters.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Breakdown {
    /// V_b, V, > 0.
    pub voltage_v: f64,
    /// `a G`, 1/(ohm m2), > 0.
    pub conductance: f64,
}

/// `m` of Bishop's term, his value for crystalline cells.
const STEEPNESS: f64 = 3.4;

impl Breakdown {
    /// Current and slope at `voltage`, A/m2 and A/m2/V; for `voltage > −V_b`.
    fn at(&self, voltage: f64) -> (f64, f64) {
        if voltage >= 0.0 {
            return (self.conductance * voltage, self.conductance);
        }
        let left = (1.0 + voltage / self.voltage_v).max(f64::EPSILON);
        let multiplied = self.conductance * left.powf(-STEEPNESS);
        let slope = multiplied * (1.0 - STEEPNESS * voltage / (self.voltage_v * left));
        (multiplied * voltage, slope)
    }
}

impl Diode {
    /// A junction in light that loses nothing yet.
    pub fn lossless(photocurrent: f64, thermal_v: f64) -> Self {
        Self {
            photocurrent,
            thermal_v,
            radiative: None,
            j01: 0.0,
            j02: 0.0,
            shunt_conductance: 0.0,
            breakdown: None,
            sends_down: None,
        }
    }

    /// Recombination, shunt and breakdown current at `voltage`, and its slope: A/m2, A/m2/V.
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
        if let Some(breakdown) = &self.breakdown {
            let (leaks, leaks_slope) = breakdown.at(voltage);
            current += leaks;
            slope += leaks_slope;
        }
        (current, slope)
    }

    /// Current at `voltage`, A/m2.
    pub fn current(&self, voltage: f64) -> f64 {
        self.photocurrent - self.dark(voltage).0
    }

    /// Radiative recombination at `voltage` that [`SentDown::factors`] multiply, and its slope:
    /// A/m2, A/m2/V; zero where nothing is sent down.
    pub fn shines(&self, voltage: f64) -> (f64, f64) {
        let Some(SentDown { emission, .. }) = &self.sends_down else { return (0.0, 0.0) };
        // A hair below the pole of the exact statistics, which a fitted junction could pass.
        emission.at(voltage.min(emission.ceiling_v() - 1e-9 * self.thermal_v))
    }

    /// [`SentDown::factors`], empty where nothing is sent down.
    pub fn factors(&self) -> &[f64] {
        self.sends_down.as_ref().map_or(&[], |sent| &sent.factors)
    }

    /// What leaks in deep reverse, A/m2: the saturation currents; infinite with a shunt or a
    /// breakdown voltage.
    pub fn saturation(&self) -> f64 {
        if self.shunt_conductance > 0.0 || self.breakdown.is_some() {
            return f64::INFINITY;
        }
        let emission = self.radiative.as_ref().map_or(0.0, |(r, factor)| factor * r.dark_a_per_m2());
        emission + self.j01 + self.j02
    }

    /// The most it carries at any reverse voltage, A/m2: photocurrent plus saturation current.
    pub fn ceiling(&self) -> f64 {
        self.photocurrent + self.saturation()
    }

    /// The voltage at which it carries `current`, and `dV/dJ` (≤ 0) there; `−∞` at or beyond
    /// [`Diode::ceiling`].
    pub fn voltage(&self, current: f64) -> (f64, f64) {
        let (voltage, slope) = self.recombining(self.photocurrent - current);
        (voltage, -slope)
    }

    /// The voltage at which `recombines` (A/m2, negative in reverse) is lost, and its slope ≥ 0.
    ///
    /// Forward the loss is convex in the voltage, so Newton steps that start to the right of the
    /// root stay there and converge; the start is the least of the voltages at which one term
    /// alone would do. In reverse it is convex as well, unless the junction breaks down, where the
    /// root lies between the breakdown voltage and zero.
    pub fn recombining(&self, recombines: f64) -> (f64, f64) {
        if recombines == 0.0 {
            // Also of a junction in the dark that does not even leak: it blocks all else.
            return (0.0, 1.0 / self.dark(0.0).1);
        }
        if -recombines >= self.saturation() {
            return (f64::NEG_INFINITY, f64::INFINITY);
        }
        if let (Some(breakdown), true) = (&self.breakdown, recombines < 0.0) {
            let low = -breakdown.voltage_v * (1.0 - 2.0 * f64::EPSILON);
            let off = |voltage: f64| {
                let (value, slope) = self.dark(voltage);
                (value - recombines, slope)
            };
            let voltage = newton_bracketed(off, low, 0.0, 1e-15);
            return (voltage, 1.0 / self.dark(voltage).1);
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
        (voltage, 1.0 / slope)
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
        let leaks = self.shunt_conductance + self.breakdown.map_or(0.0, |it| it.conductance);
        if leaks > 0.0 {
            bound = bound.min(recombines / leaks);
        }
        if bound.is_finite() { bound } else { 0.0 }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn plain(photocurrent: f64, j01: f64) -> Diode {
        Diode { j01, ..Diode::lossless(photocurrent, 0.025_692_579) }
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
    fn breakdown_is_soft_and_bounds_the_reverse_voltage() {
        // Bishop's term alone: J_ph − J = a G V (1 + V/V_b)^−m.
        let breakdown = Some(Breakdown { voltage_v: 6.0, conductance: 1e-3 });
        let diode = Diode { breakdown, ..plain(138.0, 1e-16) };
        for current in [138.0001, 139.0, 150.0, 1e4, 1e9] {
            let (voltage, slope) = diode.voltage(current);
            assert!(voltage > -6.0 && voltage < 0.0 && slope < 0.0, "{current}: {voltage}");
            let term = 1e-3 * voltage * (1.0 + voltage / 6.0_f64).powf(-3.4);
            assert!((138.0 - term - current).abs() < 1e-9 * current, "{current}: {term}");
        }
    }

    #[test]
    fn a_diode_without_anything_stays_at_zero() {
        assert_eq!(plain(0.0, 0.0).voltage(0.0).0, 0.0);
        assert_eq!(plain(0.0, 0.0).voltage(1e-9).0, f64::NEG_INFINITY);
        assert_eq!(plain(0.0, 0.0).voltage(-1.0).0, 0.0);
    }
}
