//! Numbers as findings print them: in trade units, rounded, so that they can be pasted back.

use crate::design::ZERO_CELSIUS_K;

/// `digits` significant digits, plain decimals, no trailing zeros after the point.
pub(super) fn significant(value: f64, digits: usize) -> String {
    if value == 0.0 || !value.is_finite() {
        return format!("{value}");
    }
    let magnitude = value.abs().log10().floor() as i32;
    let decimals = (digits as i32 - 1 - magnitude).max(0) as usize;
    let unit = 10f64.powi((magnitude + 1 - digits as i32).max(0));
    let text = format!("{:.decimals$}", (value / unit).round_if(unit > 1.0) * unit);
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_string() } else { text }
}

trait RoundIf {
    fn round_if(self, condition: bool) -> Self;
}

impl RoundIf for f64 {
    fn round_if(self, condition: bool) -> Self {
        if condition { self.round() } else { self }
    }
}

/// `0.62 %` of a plain fraction.
pub(super) fn percent(fraction: f64) -> String {
    format!("{} %", significant(fraction * 100.0, 2))
}

/// `612 nm`, `3.5 um`.
pub(super) fn length(metres: f64) -> String {
    if metres.abs() < 1e-6 {
        format!("{} nm", significant(metres * 1e9, 3))
    } else {
        format!("{} um", significant(metres * 1e6, 3))
    }
}

/// `1.42 eV`
pub(super) fn ev(ev: f64) -> String {
    format!("{ev:.2} eV")
}

/// `650 degC`
pub(super) fn celsius(kelvin: f64) -> String {
    format!("{} degC", significant(kelvin - ZERO_CELSIUS_K, 3))
}

/// `0.42 mA/cm2`, `12.3 A/cm2`
pub(super) fn current(ma_per_cm2: f64) -> String {
    if ma_per_cm2.abs() < 1000.0 {
        format!("{} mA/cm2", significant(ma_per_cm2, 3))
    } else {
        format!("{} A/cm2", significant(ma_per_cm2 / 1000.0, 3))
    }
}

/// [`current`] in the unit of another, to be compared with: `0.98 A/cm2` beside `1.02 A/cm2`.
pub(super) fn current_beside(ma_per_cm2: f64, other: f64) -> String {
    if other.abs() < 1000.0 || ma_per_cm2.abs() < 10.0 {
        return current(ma_per_cm2);
    }
    format!("{} A/cm2", significant(ma_per_cm2 / 1000.0, 3))
}

/// `1 layer`, `2 layers`
pub(super) fn count(number: usize, noun: &str) -> String {
    format!("{number} {noun}{}", if number == 1 { "" } else { "s" })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rounds_to_significant_digits() {
        assert_eq!(significant(0.6249, 2), "0.62");
        assert_eq!(significant(13.78, 3), "13.8");
        assert_eq!(significant(486.3, 2), "490");
        assert_eq!(significant(1.0, 3), "1");
        assert_eq!(significant(-0.004_56, 2), "-0.0046");
        assert_eq!(length(3.5e-6), "3.5 um");
        assert_eq!(length(6.12e-7), "612 nm");
        assert_eq!(current(14200.0), "14.2 A/cm2");
    }
}
