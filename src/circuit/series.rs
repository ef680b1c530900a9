//! Junctions in series.

use crate::circuit::diode::Diode;
use crate::numerics::roots::newton_bracketed;

/// How near a junction without shunt may come to the most it carries, relative, before its
/// voltage is found from the sum of the others instead of its own flat curve.
const SATURATED: f64 = 1e-12;

/// Junctions that carry one current, with their resistances lumped.
#[derive(Clone, Copy, Debug)]
pub struct Series<'a> {
    /// Sunward first, at least one.
    pub diodes: &'a [Diode],
    /// Fingers and tunnels together, ohm m2.
    pub resistance_ohm_m2: f64,
}

/// A point of the curve.
#[derive(Clone, Debug, PartialEq)]
pub struct Point {
    /// A/m2.
    pub current: f64,
    /// At the terminals, V.
    pub voltage: f64,
    /// Of each junction, V; negative where the others drive it backwards.
    pub junctions: Vec<f64>,
}

impl Series<'_> {
    /// Terminal voltage at `current` and `dV/dJ`; `−∞` where a junction cannot carry it.
    pub fn voltage(&self, current: f64) -> (f64, f64) {
        let mut sum = -current * self.resistance_ohm_m2;
        let mut slope = -self.resistance_ohm_m2;
        for diode in self.diodes {
            let (voltage, own_slope) = diode.voltage(current);
            sum += voltage;
            slope += own_slope;
        }
        (sum, slope)
    }

    /// The point at `current`; [`Series::voltage`] says which currents can be carried.
    pub fn at_current(&self, current: f64) -> Point {
        let junctions: Vec<f64> = self.diodes.iter().map(|diode| diode.voltage(current).0).collect();
        let voltage = junctions.iter().sum::<f64>() - current * self.resistance_ohm_m2;
        Point { current, voltage, junctions }
    }

    /// The point at `voltage`, from reverse to beyond open circuit.
    ///
    /// Where the junction with the least ceiling is saturated, the current is that ceiling and
    /// its reverse voltage is what the others leave; junctions that saturate together share it
    /// evenly.
    pub fn at_voltage(&self, voltage: f64) -> Point {
        let ceiling = self.diodes.iter().map(Diode::ceiling).fold(f64::INFINITY, f64::min);
        let high = if ceiling.is_finite() {
            let high = ceiling - SATURATED * ceiling.abs();
            if self.voltage(high).0 >= voltage {
                return self.saturated(high, ceiling, voltage);
            }
            high
        } else {
            self.bracket(voltage, 1.0)
        };
        self.at_current(self.current_between(voltage, self.bracket(voltage, -1.0), high))
    }

    /// The current at `voltage`, known to lie between `low` and `high`. Solved in the voltage of
    /// the junction that carries least: near saturation the current hardly moves with it, but the
    /// terminal voltage always moves at least as much as that junction's.
    fn current_between(&self, voltage: f64, low: f64, high: f64) -> f64 {
        let carries = |diode: &Diode| (diode.ceiling(), diode.photocurrent);
        let least = self.diodes.iter().enumerate().min_by(|a, b| {
            let (a, b) = (carries(a.1), carries(b.1));
            a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1))
        });
        let Some((least, own)) = least else { return 0.0 };
        let rest = |current: f64| {
            let others = self.diodes.iter().enumerate().filter(|(index, _)| *index != least);
            others.fold((-current * self.resistance_ohm_m2, -self.resistance_ohm_m2), |sum, (_, diode)| {
                let (voltage, slope) = diode.voltage(current);
                (sum.0 + voltage, sum.1 + slope)
            })
        };
        let own_voltage = newton_bracketed(
            |own_voltage| {
                let (dark, slope) = own.dark(own_voltage);
                let (others, others_slope) = rest(own.photocurrent - dark);
                (own_voltage + others - voltage, 1.0 - others_slope * slope)
            },
            own.voltage(high).0,
            own.voltage(low).0,
            1e-13,
        );
        own.current(own_voltage)
    }

    fn saturated(&self, current: f64, ceiling: f64, voltage: f64) -> Point {
        let tied = |diode: &Diode| diode.ceiling() <= ceiling + 2.0 * SATURATED * ceiling.abs();
        let mut junctions: Vec<f64> = self
            .diodes
            .iter()
            .map(|diode| if tied(diode) { 0.0 } else { diode.voltage(current).0 })
            .collect();
        let count = self.diodes.iter().filter(|diode| tied(diode)).count();
        let left = voltage + current * self.resistance_ohm_m2 - junctions.iter().sum::<f64>();
        for (own, diode) in junctions.iter_mut().zip(self.diodes) {
            if tied(diode) {
                *own = left / count as f64;
            }
        }
        Point { current, voltage, junctions }
    }

    /// A current on the side of `direction` (+1 more, −1 less) at which the voltage has passed
    /// `voltage`.
    fn bracket(&self, voltage: f64, direction: f64) -> f64 {
        let scale = self.diodes.iter().map(|diode| diode.photocurrent).fold(1e-12, f64::max);
        let mut current = if direction > 0.0 { scale } else { 0.0 };
        let mut step = scale;
        for _ in 0..200 {
            if (self.voltage(current).0 - voltage) * direction <= 0.0 {
                break;
            }
            current += direction * step;
            step *= 2.0;
        }
        current
    }

    /// Open circuit.
    pub fn open_circuit(&self) -> Point {
        self.at_current(0.0)
    }

    /// Short circuit.
    pub fn short_circuit(&self) -> Point {
        self.at_voltage(0.0)
    }

    /// The maximum power point: where `V + J dV/dJ = 0` between open and short circuit.
    ///
    /// A shunted junction can make two maxima; the curve is scanned first and the root is taken
    /// around the best of the scan. Without power the point is open circuit at zero current.
    pub fn maximum_power(&self, short_circuit_current: f64) -> Point {
        if short_circuit_current <= 0.0 {
            return self.at_current(0.0);
        }
        // Distance from short circuit as a share of it: even in the logarithm near it, where
        // the knee lies, then even.
        const SCAN: usize = 48;
        let share = |i: usize| {
            let t = i as f64 / SCAN as f64;
            if t < 0.5 { 10f64.powf(-6.0 + 10.0 * t) } else { 0.1 + 0.9 * (2.0 * t - 1.0) }
        };
        let current = |i: usize| short_circuit_current * (1.0 - share(i));
        let power = |i: usize| current(i) * self.voltage(current(i)).0;
        let mut best = (SCAN, 0.0);
        for i in 0..=SCAN {
            let power = power(i);
            if power > best.1 {
                best = (i, power);
            }
        }
        let left = current((best.0 + 1).min(SCAN));
        let right = if best.0 == 0 { short_circuit_current } else { current(best.0 - 1) };
        let gain = |current: f64| {
            let (voltage, slope) = self.voltage(current);
            (voltage + current * slope, 2.0 * slope)
        };
        self.at_current(newton_bracketed(gain, left, right, 1e-13 * short_circuit_current))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn diode(photocurrent: f64, open_circuit_v: f64) -> Diode {
        let thermal_v = 0.025_692_579;
        let j01 = photocurrent / (open_circuit_v / thermal_v).exp_m1();
        Diode { photocurrent, thermal_v, radiative: None, j01, j02: 0.0, shunt_conductance: 0.0 }
    }

    #[test]
    fn the_limiting_junction_goes_into_reverse_at_short_circuit() {
        let diodes = [diode(138.0, 1.3), diode(170.0, 1.0)];
        let series = Series { diodes: &diodes, resistance_ohm_m2: 0.0 };
        assert!((series.open_circuit().voltage - 2.3).abs() < 1e-12);
        let short = series.short_circuit();
        assert!((short.current / 138.0 - 1.0).abs() < 1e-9);
        // The bottom still delivers 138 of 170: V = kT ln((170 − 138)/J01 + 1); the top takes it.
        let bottom = 0.025_692_579 * (32.0 / diodes[1].j01).ln_1p();
        assert!((short.junctions[1] - bottom).abs() < 1e-9);
        assert!((short.junctions[0] + bottom).abs() < 1e-9);
    }

    #[test]
    fn a_shunt_lifts_the_short_circuit_current_above_the_least() {
        let mut diodes = [diode(138.0, 1.3), diode(170.0, 1.0)];
        diodes[0].shunt_conductance = 10.0;
        let series = Series { diodes: &diodes, resistance_ohm_m2: 0.0 };
        let short = series.short_circuit();
        assert!(short.current > 138.0 && short.current < 170.0);
        assert!(short.junctions.iter().sum::<f64>().abs() < 1e-9);
        // Top in reverse through its shunt: J = 138 − 10 V_top + J01.
        assert!((short.current - 138.0 + 10.0 * short.junctions[0]).abs() < 1e-6);
    }

    #[test]
    fn equal_junctions_share_the_reverse_voltage() {
        let diodes = vec![diode(100.0, 1.0); 3];
        let series = Series { diodes: &diodes, resistance_ohm_m2: 1e-4 };
        let point = series.at_voltage(-3.0);
        assert!(point.junctions.iter().all(|v| (v - (-3.0 + 0.01) / 3.0).abs() < 1e-9));
        assert!((series.at_voltage(3.2).current) < 0.0);
    }

    #[test]
    fn maximum_power_is_a_maximum() {
        let diodes = [diode(138.0, 1.3), diode(141.0, 1.0)];
        let series = Series { diodes: &diodes, resistance_ohm_m2: 2e-6 };
        let best = series.maximum_power(series.short_circuit().current);
        let power = best.current * best.voltage;
        for change in [0.99, 0.999, 1.0005] {
            let current = best.current * change;
            assert!(current * series.voltage(current).0 < power);
        }
    }

    #[test]
    fn in_the_dark_there_is_no_power() {
        let diodes = [diode(138.0, 1.3), Diode { photocurrent: 0.0, ..diode(1.0, 1.0) }];
        let series = Series { diodes: &diodes, resistance_ohm_m2: 0.0 };
        let short = series.short_circuit();
        let best = series.maximum_power(short.current);
        assert!(best.current * best.voltage < 1e-9);
        assert!(best.junctions.iter().all(|v| v.is_finite()));
    }
}
