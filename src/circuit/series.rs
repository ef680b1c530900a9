//! Junctions in series, with the tunnel junctions between them and the light they send down.

use crate::circuit::diode::Diode;
use crate::circuit::tunnel::Tunnel;
use crate::numerics::roots::newton_bracketed;

/// How near a junction without shunt may come to the most it carries, relative, before its
/// voltage is found from the sum of the others instead of its own flat curve.
const SATURATED: f64 = 1e-12;

/// Steps of Newton's method on all voltages at once, behind the root in the current alone.
const POLISH: usize = 2;

/// Junctions that carry one current.
///
/// At a given current the junctions are solved one after the other, sunward first: each sends part
/// of its light to the next, whose photocurrent grows by it (Steiner, Geisz et al., Opt. Express
/// 21, A163 (2013)); nothing goes up. The current at a given voltage follows from that.
#[derive(Clone, Debug)]
pub struct Series<'a> {
    diodes: &'a [Diode],
    resistance_ohm_m2: f64,
    /// Lowest crest first: in this order they leave their tunnelling branch.
    tunnels: Vec<Tunnel>,
    /// Where each of them stood in what was given.
    order: Vec<usize>,
    /// The most each junction carries, A/m2, with the light of the junction above.
    ceilings: Vec<f64>,
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
    /// What each junction gets from the light of the one above, A/m2.
    pub coupled: Vec<f64>,
    /// Lost over each tunnel junction that has a peak, V.
    pub tunnels: Vec<f64>,
}

/// The junctions at one current.
struct Cascade {
    junctions: Vec<f64>,
    coupled: Vec<f64>,
    /// Sum of the junctions, V, and its slope against the current, V m2/A.
    sum: (f64, f64),
    /// What the last junction gets from those above, A/m2, and its slope against the current.
    gets: (f64, f64),
}

impl<'a> Series<'a> {
    /// `diodes` sunward first, at least one; `resistance_ohm_m2` holds fingers and everything else
    /// that is ohmic; `tunnels` are those with a peak.
    pub fn new(diodes: &'a [Diode], resistance_ohm_m2: f64, tunnels: &[Tunnel]) -> Self {
        let mut order: Vec<usize> = (0..tunnels.len()).collect();
        order.sort_by(|&a, &b| tunnels[a].crest().1.total_cmp(&tunnels[b].crest().1));
        let tunnels = order.iter().map(|&at| tunnels[at]).collect();
        let mut series = Self { diodes, resistance_ohm_m2, tunnels, order, ceilings: Vec::new() };
        for index in 0..diodes.len() {
            let ceiling = series.ceiling_of(index);
            series.ceilings.push(ceiling);
        }
        series
    }

    /// The same junctions as if every tunnel junction were the resistance it starts with.
    pub fn without_peaks(&self) -> Self {
        let ohmic: f64 = self.tunnels.iter().map(|tunnel| 1.0 / tunnel.current(0.0).1).sum();
        let resistance_ohm_m2 = self.resistance_ohm_m2 + ohmic;
        Self { resistance_ohm_m2, tunnels: Vec::new(), order: Vec::new(), ..self.clone() }
    }

    /// The most junction `index` carries, given those above: the current that its photocurrent, the
    /// light sent down at that very current, and its leakage make.
    fn ceiling_of(&self, index: usize) -> f64 {
        let own = self.diodes[index].ceiling();
        let above = &self.diodes[..index];
        let gets = |(at, diode): (usize, &Diode)| diode.factors().len() >= index - at;
        if own.is_infinite() || !above.iter().enumerate().any(gets) {
            return own;
        }
        let sent = |current: f64| cascade(&self.diodes[..=index], current).gets;
        // What is sent down falls with the current, so that it is at its most at open circuit.
        let most = own + sent(0.0).0;
        let high = most.min(self.ceiling() * (1.0 - SATURATED));
        if own + sent(high).0 >= high {
            return own + sent(high).0;
        }
        let off = |current: f64| {
            let (sent, slope) = sent(current);
            (own + sent - current, slope - 1.0)
        };
        newton_bracketed(off, own.min(high), high, 1e-15 * own.abs())
    }

    fn cascade(&self, current: f64) -> Cascade {
        cascade(self.diodes, current)
    }

    fn ceiling(&self) -> f64 {
        self.ceilings.iter().copied().fold(f64::INFINITY, f64::min)
    }

    /// How many tunnel junctions cannot tunnel `current`.
    fn passed(&self, current: f64) -> usize {
        self.tunnels.partition_point(|tunnel| tunnel.crest().1 < current)
    }

    /// Voltage lost at `current` over everything but the junctions, with the first `passed` tunnel
    /// junctions over their barrier, and its slope.
    fn lost(&self, current: f64, passed: usize) -> (f64, f64) {
        let ohmic = (current * self.resistance_ohm_m2, self.resistance_ohm_m2);
        self.tunnels.iter().enumerate().fold(ohmic, |sum, (index, tunnel)| {
            let own = if index < passed { tunnel.over_barrier(current) } else { tunnel.tunnelling(current) };
            (sum.0 + own.0, sum.1 + own.1)
        })
    }

    /// Voltage of each tunnel junction, in the order given.
    fn tunnel_voltages(&self, current: f64, passed: usize) -> Vec<f64> {
        let mut voltages = vec![0.0; self.tunnels.len()];
        for (index, (tunnel, &at)) in self.tunnels.iter().zip(&self.order).enumerate() {
            let own = if index < passed { tunnel.over_barrier(current) } else { tunnel.tunnelling(current) };
            voltages[at] = own.0;
        }
        voltages
    }

    /// Terminal voltage at `current` and `dV/dJ`; `−∞` where a junction cannot carry it.
    pub fn voltage(&self, current: f64) -> (f64, f64) {
        self.staged(current, self.passed(current))
    }

    pub(super) fn staged(&self, current: f64, passed: usize) -> (f64, f64) {
        let (sum, slope) = self.cascade(current).sum;
        let lost = self.lost(current, passed);
        (sum - lost.0, slope - lost.1)
    }

    /// The point at `current`; [`Series::voltage`] says which currents can be carried.
    pub fn at_current(&self, current: f64) -> Point {
        self.point(current, self.passed(current))
    }

    pub(super) fn point(&self, current: f64, passed: usize) -> Point {
        let Cascade { junctions, coupled, sum, .. } = self.cascade(current);
        let lost = self.lost(current, passed);
        let tunnels = self.tunnel_voltages(current, passed);
        Point { current, voltage: sum.0 - lost.0, junctions, coupled, tunnels }
    }

    /// The point at `voltage`, from reverse to beyond open circuit, as met on the way from open
    /// circuit down.
    ///
    /// A tunnel junction keeps to its tunnelling branch up to its crest. Below the voltage at which
    /// the stack reaches that, it goes over to the branch behind its trough, or, where that
    /// carries too much at once, falls between the two: the dip of the curve.
    ///
    /// Where the junction with the least ceiling is saturated, the current is that ceiling and
    /// its reverse voltage is what the others leave; junctions that saturate together share it
    /// evenly.
    pub fn at_voltage(&self, voltage: f64) -> Point {
        for (passed, tunnel) in self.tunnels.iter().enumerate() {
            let ((crest_v, crest), (trough_v, trough)) = (tunnel.crest(), tunnel.trough());
            if crest >= self.ceiling() || self.staged(crest, passed).0 <= voltage {
                return self.on_branch(voltage, passed);
            }
            if self.staged(trough, passed + 1).0 < voltage {
                return self.between(voltage, passed, (crest_v, trough_v));
            }
        }
        self.on_branch(voltage, self.tunnels.len())
    }

    /// The point at `voltage` with the first `passed` tunnel junctions over their barrier.
    fn on_branch(&self, voltage: f64, passed: usize) -> Point {
        let ceiling = self.ceiling();
        let most = self.tunnels.get(passed).map_or(f64::INFINITY, |tunnel| tunnel.crest().1);
        let high = ceiling - SATURATED * ceiling.abs();
        if ceiling.is_finite() && high <= most && self.staged(high, passed).0 >= voltage {
            return self.saturated(high, voltage, passed);
        }
        let low = self.bracket(voltage, -1.0, passed);
        let current = if ceiling.is_finite() && ceiling > 0.0 && high <= most {
            // Near its ceiling the voltage goes with the logarithm of what is missing: with
            // J = ceiling (1 − e^{−y}) it is nearly linear in y.
            let at = |y: f64| {
                let missing = ceiling * (-y).exp();
                let (value, slope) = self.staged(ceiling - missing, passed);
                (value - voltage, slope * missing)
            };
            let from = -(1.0 - low / ceiling).ln();
            ceiling * -(-newton_bracketed(at, from, -SATURATED.ln(), 1e-14)).exp_m1()
        } else {
            let high = if ceiling.is_finite() { high } else { self.bracket(voltage, 1.0, passed) };
            let at = |current: f64| {
                let (value, slope) = self.staged(current, passed);
                (value - voltage, slope)
            };
            newton_bracketed(at, low.min(most), high.min(most), 1e-15 * high.abs())
        };
        self.polished(self.point(current, passed), voltage, passed)
    }

    /// Newton's method on all junction voltages and the current at once: close to saturation the
    /// current alone fixes the voltage of a junction to a few digits only.
    fn polished(&self, mut point: Point, voltage: f64, passed: usize) -> Point {
        for _ in 0..POLISH {
            let lost = self.lost(point.current, passed);
            // Each dV_i = a_i + b_i dJ, from `J_ph + coupled − dark(V) = J`.
            let mut sum = (0.0, 0.0);
            let mut changes: Vec<(f64, f64)> = Vec::with_capacity(self.diodes.len());
            let mut sent: Vec<(f64, f64)> = Vec::with_capacity(self.diodes.len());
            for (index, (diode, &own)) in self.diodes.iter().zip(&point.junctions).enumerate() {
                let mut gets = (0.0, 0.0, 0.0);
                for (at, factor) in senders(self.diodes, index) {
                    gets.0 += factor * sent[at].0;
                    gets.1 += factor * sent[at].1 * changes[at].0;
                    gets.2 += factor * sent[at].1 * changes[at].1;
                }
                let (dark, slope) = diode.dark(own);
                let off = diode.photocurrent + gets.0 - dark - point.current;
                let change = ((off + gets.1) / slope, (gets.2 - 1.0) / slope);
                sum = (sum.0 + change.0, sum.1 + change.1);
                changes.push(change);
                sent.push(diode.shines(own));
            }
            let junctions: f64 = point.junctions.iter().sum();
            let step = -(junctions - lost.0 - voltage + sum.0) / (sum.1 - lost.1);
            let moved: Vec<f64> =
                point.junctions.iter().zip(&changes).map(|(own, (a, b))| own + a + b * step).collect();
            let far = moved.iter().zip(&point.junctions).any(|(new, old)| (new - old).abs() > 1e-3);
            if far || !step.is_finite() || moved.iter().any(|own| !own.is_finite()) {
                break;
            }
            point.current += step;
            point.junctions = moved;
        }
        for index in 0..self.diodes.len() {
            let gets = senders(self.diodes, index)
                .map(|(at, factor)| factor * self.diodes[at].shines(point.junctions[at]).0);
            point.coupled[index] = gets.sum();
        }
        point.tunnels = self.tunnel_voltages(point.current, passed);
        point.voltage = voltage;
        point
    }

    fn saturated(&self, current: f64, voltage: f64, passed: usize) -> Point {
        let mut point = self.point(current, passed);
        let ceiling = self.ceiling();
        let tied: Vec<bool> =
            self.ceilings.iter().map(|own| *own <= ceiling + 2.0 * SATURATED * ceiling.abs()).collect();
        let count = tied.iter().filter(|tied| **tied).count();
        let free: f64 =
            point.junctions.iter().zip(&tied).filter(|(_, tied)| !**tied).map(|(own, _)| own).sum();
        let left = voltage + self.lost(current, passed).0 - free;
        for (own, tied) in point.junctions.iter_mut().zip(tied) {
            if tied {
                *own = left / count as f64;
            }
        }
        point.voltage = voltage;
        point
    }

    /// The point at `voltage` on the falling part of tunnel junction `passed`, between its crest
    /// and its trough.
    fn between(&self, voltage: f64, passed: usize, (crest_v, trough_v): (f64, f64)) -> Point {
        let tunnel = &self.tunnels[passed];
        let rest = |current: f64| {
            let (sum, slope) = self.cascade(current).sum;
            let lost = self.lost(current, passed);
            let own = tunnel.tunnelling(current);
            (sum - lost.0 + own.0, slope - lost.1 + own.1)
        };
        let off = |own: f64| {
            let (current, slope) = tunnel.current(own);
            let (value, value_slope) = rest(current);
            (value - own - voltage, value_slope * slope - 1.0)
        };
        let own = newton_bracketed(off, crest_v, trough_v, 1e-15);
        let mut point = self.point(tunnel.current(own).0, passed);
        point.tunnels[self.order[passed]] = own;
        point.voltage = voltage;
        point
    }

    /// A current on the side of `direction` (+1 more, −1 less) at which the voltage has passed
    /// `voltage`.
    fn bracket(&self, voltage: f64, direction: f64, passed: usize) -> f64 {
        let scale = self.diodes.iter().map(|diode| diode.photocurrent).fold(1e-12, f64::max);
        let mut current = if direction > 0.0 { scale } else { 0.0 };
        let mut step = scale;
        for _ in 0..200 {
            if (self.staged(current, passed).0 - voltage) * direction <= 0.0 {
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

    /// The most current at which every tunnel junction still tunnels, A/m2.
    pub fn least_crest(&self) -> f64 {
        self.tunnels.first().map_or(f64::INFINITY, |tunnel| tunnel.crest().1)
    }

    /// Whether some tunnel junction cannot tunnel what flows at `short`, the short circuit.
    pub fn passes_a_peak(&self, short: &Point) -> bool {
        let first = self.least_crest();
        first < short.current || (first < self.ceiling() && self.staged(first, 0).0 > 0.0)
    }
}

/// The junctions above `index` whose light it absorbs, with the factor of each.
fn senders(diodes: &[Diode], index: usize) -> impl Iterator<Item = (usize, f64)> {
    let factor = move |(at, diode): (usize, &Diode)| Some((at, *diode.factors().get(index - at - 1)?));
    diodes[..index].iter().enumerate().filter_map(factor)
}

/// All of `diodes` at `current`, sunward first.
fn cascade(diodes: &[Diode], current: f64) -> Cascade {
    let mut junctions = Vec::with_capacity(diodes.len());
    let mut coupled = Vec::with_capacity(diodes.len());
    // Light of each junction and its slope against the current.
    let mut sent: Vec<(f64, f64)> = Vec::with_capacity(diodes.len());
    let (mut sum, mut gets) = ((0.0, 0.0), (0.0, 0.0));
    for (index, diode) in diodes.iter().enumerate() {
        gets = (0.0, 0.0);
        for (at, factor) in senders(diodes, index) {
            gets = (gets.0 + factor * sent[at].0, gets.1 + factor * sent[at].1);
        }
        let (voltage, slope) = diode.recombining(diode.photocurrent + gets.0 - current);
        let slope = slope * (gets.1 - 1.0);
        sum = (sum.0 + voltage, sum.1 + slope);
        junctions.push(voltage);
        coupled.push(gets.0);
        let (light, light_slope) = diode.shines(voltage);
        sent.push((light, light_slope * slope));
    }
    Cascade { junctions, coupled, sum, gets }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn diode(photocurrent: f64, open_circuit_v: f64) -> Diode {
        let thermal_v = 0.025_692_579;
        let j01 = photocurrent / (open_circuit_v / thermal_v).exp_m1();
        Diode { j01, ..Diode::lossless(photocurrent, thermal_v) }
    }

    #[test]
    fn the_limiting_junction_goes_into_reverse_at_short_circuit() {
        let diodes = [diode(138.0, 1.3), diode(170.0, 1.0)];
        let series = Series::new(&diodes, 0.0, &[]);
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
        let series = Series::new(&diodes, 0.0, &[]);
        let short = series.short_circuit();
        assert!(short.current > 138.0 && short.current < 170.0);
        assert!(short.junctions.iter().sum::<f64>().abs() < 1e-9);
        // Top in reverse through its shunt: J = 138 − 10 V_top + J01.
        assert!((short.current - 138.0 + 10.0 * short.junctions[0]).abs() < 1e-6);
    }

    #[test]
    fn equal_junctions_share_the_reverse_voltage() {
        let diodes = vec![diode(100.0, 1.0); 3];
        let series = Series::new(&diodes, 1e-4, &[]);
        let point = series.at_voltage(-3.0);
        assert!(point.junctions.iter().all(|v| (v - (-3.0 + 0.01) / 3.0).abs() < 1e-9));
        assert!((series.at_voltage(3.2).current) < 0.0);
    }

    #[test]
    fn maximum_power_is_a_maximum() {
        let diodes = [diode(138.0, 1.3), diode(141.0, 1.0)];
        let series = Series::new(&diodes, 2e-6, &[]);
        let best = series.maximum_power(&series.short_circuit());
        let power = best.current * best.voltage;
        for change in [0.99, 0.999, 1.0005] {
            let current = best.current * change;
            assert!(current * series.voltage(current).0 < power);
        }
    }

    #[test]
    fn in_the_dark_there_is_no_power() {
        let diodes = [diode(138.0, 1.3), Diode { photocurrent: 0.0, ..diode(1.0, 1.0) }];
        let series = Series::new(&diodes, 0.0, &[]);
        let short = series.short_circuit();
        let best = series.maximum_power(&short);
        assert!(best.current * best.voltage < 1e-9);
        assert!(best.junctions.iter().all(|v| v.is_finite()));
    }
}
