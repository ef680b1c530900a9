//! From what a tunnel junction states to a circuit element.

use std::f64::consts::E;

use crate::circuit::tunnel::{HIGHEST_PEAK_V, Tunnel};
use crate::design::Interconnect;

/// Voltage of the peak where no resistance tells it, V: within the 0.05 to 0.15 V of gallium
/// arsenide (Sze and Ng, Physics of Semiconductor Devices (2007), chapter 8).
const PEAK_V: f64 = 0.1;

/// Peak over valley where no valley is stated: about that of gallium arsenide, 12, and germanium, 8
/// (Sze and Ng).
pub(super) const PEAK_OVER_VALLEY: f64 = 10.0;

/// The ohmic part of an interconnect, ohm m2, and the part with a peak, if one is stated.
///
/// The stated resistance is the slope at no current, `V_p/(e J_p)` for the closed form, which fixes
/// the voltage of the peak; what would put that beyond [`HIGHEST_PEAK_V`] is taken to be ohmic.
pub(super) fn crossing(interconnect: &Interconnect) -> (f64, Option<Tunnel>) {
    let resistance = interconnect.resistance_ohm_m2;
    let Some(peak) = interconnect.peak_a_per_m2 else { return (resistance.unwrap_or(0.0), None) };
    let peak_v = resistance.map_or(PEAK_V, |ohm| (E * ohm * peak).clamp(1e-4, HIGHEST_PEAK_V));
    let ohmic = resistance.map_or(0.0, |ohm| (ohm - peak_v / (E * peak)).max(0.0));
    let valley = interconnect.valley_a_per_m2.unwrap_or(peak / PEAK_OVER_VALLEY);
    (ohmic, Some(Tunnel::new(peak, peak_v, valley)))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::design::InterconnectKind;
    use crate::source::{Span, Spanned};

    #[test]
    fn what_the_peak_cannot_hold_of_the_resistance_is_ohmic() {
        let of = |resistance_ohm_m2, peak_a_per_m2| Interconnect {
            name: Spanned::new("lower".to_owned(), Span::default()),
            kind: InterconnectKind::Tunnel,
            layers: 0..0,
            below_junctions: 1,
            resistance_ohm_m2,
            peak_a_per_m2,
            valley_a_per_m2: None,
            span: Span::default(),
        };
        assert_eq!(crossing(&of(Some(1e-7), None)), (1e-7, None));
        // 20 A/cm2 and 1 mohm cm2: V_p = e·1e-7·2e5 = 54 mV, nothing left over.
        let (ohmic, tunnel) = crossing(&of(Some(1e-7), Some(2e5)));
        assert!(ohmic < 1e-20);
        let slope = tunnel.expect("a peak").current(0.0).1;
        assert!((slope * 1e-7 - 1.0).abs() < 1e-3);
        // 500 A/cm2 and 1 mohm cm2 would peak at 1.36 V: 0.25 V is 0.18 mohm cm2 of it.
        let (ohmic, _) = crossing(&of(Some(1e-7), Some(5e6)));
        assert!((ohmic - (1e-7 - 0.25 / (E * 5e6))).abs() < 1e-12);
    }
}
