//! SI values back in the units people expect to read.

use crate::units::table::ZERO_CELSIUS;
use crate::units::{Dimension, parse};

/// At most four significant digits, no trailing zeros; powers of ten outside 0.001..100 000.
pub fn number(value: f64) -> String {
    if value == 0.0 {
        return "0".to_owned();
    }
    if !value.is_finite() {
        return value.to_string();
    }
    // Round once in the scientific form, so that 9.9996 and 10 read alike.
    let scientific = format!("{value:.3e}");
    let (mantissa, exponent) = scientific.split_once('e').unwrap_or((&scientific, "0"));
    let exponent: i32 = exponent.parse().unwrap_or(0);
    if (-3..5).contains(&exponent) {
        let decimals = usize::try_from(3 - exponent).unwrap_or(0);
        let rounded: f64 = scientific.parse().unwrap_or(value);
        return trimmed(&format!("{rounded:.decimals$}"));
    }
    format!("{}e{exponent}", trimmed(mantissa))
}

fn trimmed(text: &str) -> String {
    if text.contains('.') {
        return text.trim_end_matches('0').trim_end_matches('.').to_owned();
    }
    text.to_owned()
}

/// `si` as a number of `unit`; as it is where that is no unit.
pub fn value_in(si: f64, unit: &str) -> f64 {
    match parse(unit) {
        Ok(read) => (si - read.offset) / read.factor,
        Err(_) => si,
    }
}

/// `si` in `unit`, `612 nm`. The unit is written as given.
pub fn in_unit(si: f64, unit: &str) -> String {
    let value = value_in(si, unit);
    if unit.is_empty() { number(value) } else { format!("{} {unit}", number(value)) }
}

/// `si` in the unit the trade uses for such a value: nm below a micrometre, `/cm3` for
/// densities, eV for energies, `degC` for temperatures.
pub fn trade(si: f64, dimension: Dimension) -> String {
    let size = si.abs();
    let unit = match dimension {
        Dimension::LENGTH if size >= 1e9 => "au",
        Dimension::LENGTH if size >= 1e-2 => "m",
        Dimension::LENGTH if size >= 1e-3 => "mm",
        Dimension::LENGTH if size >= 1e-6 => "um",
        Dimension::LENGTH => "nm",
        Dimension::TEMPERATURE if si >= ZERO_CELSIUS - 100.0 => "degC",
        Dimension::RESISTANCE_AREA if size < 1e-4 => "mohm cm2",
        Dimension::VOLTAGE if size < 0.1 => "mV",
        Dimension::IRRADIANCE if size >= 1e4 => "kW/m2",
        Dimension::CURRENT_DENSITY if size >= 1e3 => "A/cm2",
        Dimension::TIME if size < 1e-6 => "ns",
        Dimension::TIME if size < 1e-3 => "us",
        _ => usual(dimension).unwrap_or(""),
    };
    if unit.is_empty() && !dimension.is_none() {
        return format!("{} {}", number(si), dimension.si_unit());
    }
    in_unit(si, unit)
}

/// The unit people write for a dimension, where there is one.
pub fn usual(dimension: Dimension) -> Option<&'static str> {
    usual_list(dimension).first().copied()
}

/// The same as a list of at most one.
pub fn usual_list(dimension: Dimension) -> &'static [&'static str] {
    USUAL.iter().find(|(known, _)| *known == dimension).map_or(&[], |(_, unit)| unit)
}

const USUAL: &[(Dimension, [&str; 1])] = &[
    (Dimension::LENGTH, ["nm"]),
    (Dimension::MASS, ["mg"]),
    (Dimension::TIME, ["s"]),
    (Dimension::CURRENT, ["mA"]),
    (Dimension::TEMPERATURE, ["K"]),
    (Dimension::ANGLE, ["deg"]),
    (Dimension::AREA, ["cm2"]),
    (Dimension::ENERGY, ["eV"]),
    (Dimension::POWER, ["W"]),
    (Dimension::VOLTAGE, ["V"]),
    (Dimension::RESISTANCE, ["ohm"]),
    (Dimension::RESISTANCE_AREA, ["ohm cm2"]),
    (Dimension::RESISTIVITY, ["ohm cm"]),
    (Dimension::CURRENT_DENSITY, ["mA/cm2"]),
    (Dimension::IRRADIANCE, ["W/m2"]),
    (Dimension::SPECTRAL_IRRADIANCE, ["W/m2/nm"]),
    (Dimension::PER_VOLUME, ["/cm3"]),
    (Dimension::PER_AREA, ["/cm2"]),
    (Dimension::PER_LENGTH, ["/cm"]),
    (Dimension::PER_TEMPERATURE, ["/K"]),
    (Dimension::VELOCITY, ["cm/s"]),
    (Dimension::MOBILITY, ["cm2/V/s"]),
    (Dimension::DIFFUSIVITY, ["cm2/s"]),
    (Dimension::VOLUME_RATE, ["cm3/s"]),
    (Dimension::VOLUME_SQUARED_RATE, ["cm6/s"]),
    (Dimension::PRESSURE, ["GPa"]),
    (Dimension::DENSITY, ["g/cm3"]),
    (Dimension::AREAL_MASS, ["mg/cm2"]),
    (Dimension::SPECIFIC_POWER, ["W/kg"]),
    (Dimension::ENERGY_PER_TEMPERATURE, ["meV/K"]),
    (Dimension::VOLTAGE_PER_TEMPERATURE, ["mV/K"]),
    (Dimension::LENGTH_PER_TEMPERATURE, ["Å/K"]),
    (Dimension::EDGE_COEFFICIENT, ["/cm/eV^0.5"]),
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn values_read_as_the_trade_writes_them() {
        for (si, dimension, text) in [
            (612e-9, Dimension::LENGTH, "612 nm"),
            (3.5e-6, Dimension::LENGTH, "3.5 um"),
            (700e-6, Dimension::LENGTH, "700 um"),
            (1e23, Dimension::PER_VOLUME, "1e17 /cm3"),
            (298.15, Dimension::TEMPERATURE, "25 degC"),
            (77.0, Dimension::TEMPERATURE, "77 K"),
            (2e-6, Dimension::RESISTANCE_AREA, "20 mohm cm2"),
            (142.0, Dimension::CURRENT_DENSITY, "14.2 mA/cm2"),
            (5e5, Dimension::IRRADIANCE, "500 kW/m2"),
            (0.03, Dimension::NONE, "0.03"),
        ] {
            assert_eq!(trade(si, dimension), text);
        }
    }

    #[test]
    fn digits_are_rounded_once() {
        assert_eq!(number(9.99996), "10");
        assert_eq!(number(0.000_123_45), "1.234e-4");
        assert_eq!(number(-1234.56), "-1235");
        assert_eq!(number(1e5), "1e5");
    }

    proptest::proptest! {
        #![proptest_config(proptest::test_runner::Config { cases: 256, failure_persistence: None, ..Default::default() })]

        /// What is shown reads back as the same value to the four digits shown.
        #[test]
        fn shown_values_read_back(mantissa in 1.0..10.0_f64, exponent in -30_i32..30, at in 0..USUAL.len()) {
            let (dimension, [unit]) = USUAL[at];
            let si = mantissa * 10_f64.powi(exponent);
            for text in [trade(si, dimension), in_unit(si, unit)] {
                let (digits, unit) = text.split_once(' ').expect("a number and a unit");
                let read = crate::units::Quantity::of(
                    digits.parse().expect("a number"),
                    &parse(unit).expect("a unit"),
                );
                proptest::prop_assert_eq!(read.dimension, dimension);
                // A reading in degC keeps four digits of the reading, not of its distance from 0 K.
                let shown = if unit == "degC" { (si - ZERO_CELSIUS).abs().max(1.0) } else { si };
                proptest::prop_assert!((read.si - si).abs() <= 5.1e-4 * shown + 1e-12 * si, "{text}: {} against {si}", read.si);
            }
        }
    }
}
