//! The maximum power point of a string.

use crate::circuit::series::{Point, Series};
use crate::numerics::roots::newton_bracketed;

impl Series<'_> {
    /// The maximum power point: where `V + J dV/dJ = 0` between open and short circuit.
    ///
    /// A shunted junction can make two maxima; the curve is scanned first and the root is taken
    /// around the best of the scan. Where a tunnel junction passes its peak, the part of the curve
    /// below that is scanned too. Without power the point is open circuit at zero current.
    pub fn maximum_power(&self, short: &Point) -> Point {
        if short.current <= 0.0 {
            return self.at_current(0.0);
        }
        if !self.passes_a_peak(short) {
            return self.best_up_to(short.current);
        }
        let tunnelling = self.best_up_to(self.least_crest());
        let dip_v = self.staged(self.least_crest(), 0).0;
        let beyond = self.best_below(dip_v);
        if beyond.voltage * beyond.current > tunnelling.voltage * tunnelling.current {
            beyond
        } else {
            tunnelling
        }
    }

    fn best_up_to(&self, most: f64) -> Point {
        // Distance from the most as a share of it: even in the logarithm near it, where the knee
        // lies, then even.
        const SCAN: usize = 48;
        let share = |i: usize| {
            let t = i as f64 / SCAN as f64;
            if t < 0.5 { 10f64.powf(-6.0 + 10.0 * t) } else { 0.1 + 0.9 * (2.0 * t - 1.0) }
        };
        let current = |i: usize| most * (1.0 - share(i));
        let power = |current: f64| current * self.staged(current, 0).0;
        let mut best = (SCAN, 0.0);
        for i in 0..=SCAN {
            let power = power(current(i));
            if power > best.1 {
                best = (i, power);
            }
        }
        let left = current((best.0 + 1).min(SCAN));
        let right = if best.0 == 0 { most } else { current(best.0 - 1) };
        let gain = |current: f64| {
            let (voltage, slope) = self.staged(current, 0);
            (voltage + current * slope, 2.0 * slope)
        };
        self.point(newton_bracketed(gain, left, right, 1e-13 * most), 0)
    }

    /// The best point at a voltage from 0 to just below `dip_v`: a scan, then golden sections.
    fn best_below(&self, dip_v: f64) -> Point {
        const SCAN: usize = 100;
        const GOLDEN: f64 = 0.618_033_988_749_894_8;
        let step = dip_v / SCAN as f64;
        let at = |voltage: f64| self.at_voltage(voltage.min(dip_v * (1.0 - 1e-9)));
        let power = |point: &Point| point.current * point.voltage;
        let mut best = (0, at(0.0));
        for i in 1..=SCAN {
            let next = at(step * i as f64);
            if power(&next) > power(&best.1) {
                best = (i, next);
            }
        }
        let (mut low, mut high) =
            (step * (best.0 as f64 - 1.0).max(0.0), (step * (best.0 as f64 + 1.0)).min(dip_v));
        let mut best = best.1;
        while high - low > 1e-9 {
            let (a, b) = (high - GOLDEN * (high - low), low + GOLDEN * (high - low));
            let (left, right) = (at(a), at(b));
            let (left_power, right_power) = (power(&left), power(&right));
            if left_power > right_power {
                high = b;
            } else {
                low = a;
            }
            let better = if left_power > right_power { left } else { right };
            if power(&better) > power(&best) {
                best = better;
            }
        }
        best
    }
}
