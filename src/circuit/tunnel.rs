//! A tunnel junction as a circuit element.

use crate::numerics::roots::newton_bracketed;

/// An Esaki diode that carries the stack's current forward: a small voltage up to its crest, less
/// current in its trough, and beyond that the current over the barrier.
///
/// `J(V) = J_p (V/V_p) e^{1 − V/V_p} + J_v (e^{c (V − V_v)} − e^{−c V_v})`: tunnelling and excess
/// current in the closed form of Sze and Ng, Physics of Semiconductor Devices (2007), chapter 8
/// (Esaki, Phys. Rev. 109, 603 (1958); Chynoweth, Feldmann and Logan, Phys. Rev. 121, 684 (1961)).
/// Currents in A/m2 and voltages in V, both ≥ 0 where the stack delivers.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Tunnel {
    peak: f64,
    peak_v: f64,
    valley: f64,
    valley_v: f64,
    /// Voltage and current where tunnelling is at its most.
    crest: (f64, f64),
    /// Voltage and current where the current is at its least beyond that.
    trough: (f64, f64),
}

/// `c`, 1/V: `(4/3ħ) √(m ε/N)` for GaAs doped 1e19 /cm3 on both sides, m = 0.06 m₀, ε = 12.9 ε₀.
const EXCESS_PER_V: f64 = 10.0;

/// Voltage of the valley, V, unless the peak lies so far out that it has to be further: between the
/// 0.4 V of germanium and the 0.6 V of gallium arsenide (Sze and Ng).
const VALLEY_V: f64 = 0.5;

/// The valley lies at least this many peak voltages out: there tunnelling is below 4 % of its peak.
const VALLEY_PEAKS: f64 = 6.0;

/// Highest voltage of a peak, V; a resistance that would put it further is in part an ohmic one.
pub const HIGHEST_PEAK_V: f64 = 0.25;

impl Tunnel {
    /// A junction with the most it tunnels, the voltage of that, and the least it carries beyond
    /// (A/m2, V, A/m2; all > 0, `valley < peak`).
    pub fn new(peak: f64, peak_v: f64, valley: f64) -> Self {
        let valley_v = VALLEY_V.max(VALLEY_PEAKS * peak_v);
        let mut tunnel = Self { peak, peak_v, valley, valley_v, crest: (0.0, 0.0), trough: (0.0, 0.0) };
        let turning = |low: f64, high: f64| {
            let at = newton_bracketed(|v| (tunnel.current(v).1, tunnel.curvature(v)), low, high, 1e-15);
            (at, tunnel.current(at).0)
        };
        let crest = turning(0.5 * peak_v, 2.0 * peak_v);
        let trough = turning(2.0 * peak_v, 2.0 * valley_v);
        (tunnel.crest, tunnel.trough) = (crest, trough);
        tunnel
    }

    /// Current and its slope at `voltage`, A/m2 and A/m2/V.
    pub fn current(&self, voltage: f64) -> (f64, f64) {
        let x = voltage / self.peak_v;
        let tunnelling = self.peak * (1.0 - x).exp();
        let excess = self.valley * (EXCESS_PER_V * (voltage - self.valley_v)).exp();
        let at_zero = self.valley * (-EXCESS_PER_V * self.valley_v).exp();
        (tunnelling * x + excess - at_zero, tunnelling * (1.0 - x) / self.peak_v + EXCESS_PER_V * excess)
    }

    fn curvature(&self, voltage: f64) -> f64 {
        let x = voltage / self.peak_v;
        let excess = self.valley * (EXCESS_PER_V * (voltage - self.valley_v)).exp();
        self.peak * (1.0 - x).exp() * (x - 2.0) / self.peak_v.powi(2) + EXCESS_PER_V.powi(2) * excess
    }

    /// Voltage and current where tunnelling is at its most.
    pub fn crest(&self) -> (f64, f64) {
        self.crest
    }

    /// Voltage and current where the current is at its least beyond the crest.
    pub fn trough(&self) -> (f64, f64) {
        self.trough
    }

    /// Voltage up to the crest at `current`, and `dV/dJ`; the crest itself beyond it.
    pub fn tunnelling(&self, current: f64) -> (f64, f64) {
        let (crest_v, crest) = self.crest;
        if current >= crest {
            return (crest_v, 0.0);
        }
        // Backwards the tunnelling term grows without bound: a few peak voltages carry anything.
        let mut low = if current >= 0.0 { 0.0 } else { -self.peak_v };
        while self.current(low).0 > current {
            low *= 2.0;
        }
        self.root(current, low, crest_v)
    }

    /// Voltage beyond the trough at `current`, and `dV/dJ`; the trough itself below it.
    pub fn over_barrier(&self, current: f64) -> (f64, f64) {
        let (trough_v, trough) = self.trough;
        if current <= trough {
            return (trough_v, 0.0);
        }
        // Where the excess term alone carries it.
        let high = self.valley_v + (1.0 + current / self.valley).ln() / EXCESS_PER_V;
        self.root(current, trough_v, high.max(trough_v))
    }

    fn root(&self, current: f64, low: f64, high: f64) -> (f64, f64) {
        let off = |voltage: f64| {
            let (value, slope) = self.current(voltage);
            (value - current, slope)
        };
        let voltage = newton_bracketed(off, low, high, 1e-16);
        (voltage, 1.0 / self.current(voltage).1)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn its_slope_at_zero_is_its_resistance() {
        // J' (0) = e J_p/V_p: 20 A/cm2 with V_p = e·R·J_p for 1 mohm cm2.
        let (peak, ohm_m2) = (2e5, 1e-7);
        let tunnel = Tunnel::new(peak, std::f64::consts::E * ohm_m2 * peak, peak / 10.0);
        let small = 1e-4 * peak;
        assert!((tunnel.tunnelling(small).0 / (small * ohm_m2) - 1.0).abs() < 2e-3);
        let (crest_v, crest) = tunnel.crest();
        assert!((crest / peak - 1.0).abs() < 5e-3 && (crest_v / 0.0544 - 1.0).abs() < 0.01);
        let (trough_v, trough) = tunnel.trough();
        assert!(trough < 0.15 * peak && trough_v > 0.3, "{trough} at {trough_v}");
    }

    #[test]
    fn both_branches_invert_the_curve() {
        let tunnel = Tunnel::new(5e4, 0.1, 5e3);
        for current in [-1e6, -10.0, 0.0, 1e3, 4.9e4] {
            let (voltage, slope) = tunnel.tunnelling(current);
            assert!((tunnel.current(voltage).0 - current).abs() < 1e-9 * current.abs().max(1.0));
            assert!(slope > 0.0);
        }
        for current in [9e3, 5e4, 7e4, 1e7] {
            let (voltage, _) = tunnel.over_barrier(current);
            assert!((tunnel.current(voltage).0 - current).abs() < 1e-9 * current);
        }
    }
}
