//! Unit texts as written: `/cm3`, `cm-3`, `cm^-3`, `mohm cm2`, `A/cm2`, `/cm/eV^0.5`.

use crate::units::Dimension;
use crate::units::table::{ZERO_CELSIUS, look_up, near};

/// A unit, worked out.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Unit {
    /// SI units in one.
    pub factor: f64,
    /// Added after multiplying, for an absolute temperature in `degC` alone; 0 elsewhere.
    pub offset: f64,
    /// What it measures.
    pub dimension: Dimension,
}

impl Unit {
    /// The unit of a bare number.
    pub const ONE: Self = Self { factor: 1.0, offset: 0.0, dimension: Dimension::NONE };
}

/// A unit text that cannot be read.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct UnknownUnit {
    /// The part that is no unit.
    pub part: String,
    /// The whole text with that part mended, where a near unit is known.
    pub meant: Option<String>,
}

/// Reads a unit text. `degC` alone is an absolute temperature with an offset; in a compound it
/// is a difference.
///
/// # Errors
/// Names the part that is no unit and, where one is near, the text that was meant.
pub fn parse(text: &str) -> Result<Unit, UnknownUnit> {
    let plain = normalise(text);
    let mut unit = Unit::ONE;
    let mut rest = plain.trim();
    let mut factors = 0;
    while !rest.is_empty() {
        let over = rest.starts_with('/');
        rest = rest.trim_start_matches(['/', ' ']);
        let (symbol, exponent, after) =
            factor(rest).ok_or_else(|| UnknownUnit { part: text.trim().to_owned(), meant: None })?;
        let (factor, dimension) = if symbol == "1" {
            (1.0, Dimension::NONE)
        } else {
            look_up(symbol).ok_or_else(|| UnknownUnit {
                part: symbol.to_owned(),
                meant: near(symbol).map(|meant| plain.replacen(symbol, &meant, 1)),
            })?
        };
        let exponent = if over { -exponent } else { exponent };
        unit.factor *=
            if exponent.fract() == 0.0 { factor.powi(exponent as i32) } else { factor.powf(exponent) };
        unit.dimension = unit.dimension
            * dimension
                .power(exponent)
                .ok_or_else(|| UnknownUnit { part: format!("{symbol}^{exponent}"), meant: None })?;
        factors += 1;
        if factors == 1 && symbol == "degC" && after.is_empty() && !over && exponent == 1.0 {
            unit.offset = ZERO_CELSIUS;
        }
        rest = after;
    }
    Ok(unit)
}

/// One symbol, its exponent, and the text after it.
fn factor(text: &str) -> Option<(&str, f64, &str)> {
    if let Some(after) = text.strip_prefix('1').filter(|after| after.starts_with(['/', ' '])) {
        return Some(("1", 1.0, after.trim_start_matches(' ')));
    }
    let end = text.find(|c: char| !(c.is_alphabetic() || c == '%' || c == '_')).unwrap_or(text.len());
    let (symbol, mut rest) = text.split_at(end);
    if symbol.is_empty() {
        return None;
    }
    let marked = rest.starts_with('^');
    rest = rest.strip_prefix('^').unwrap_or(rest);
    let digits_from = usize::from(rest.starts_with('-'));
    let digits = rest[digits_from..].find(|c: char| !(c.is_ascii_digit() || c == '.'));
    let digits_end = digits.map_or(rest.len(), |at| at + digits_from);
    let exponent = &rest[..digits_end];
    let exponent = match exponent {
        "" if !marked => 1.0,
        _ => exponent.parse().ok().filter(|value: &f64| value.abs() <= 12.0)?,
    };
    Some((symbol, exponent, rest[digits_end..].trim_start_matches(' ')))
}

/// One spelling for the signs that look alike: both micro signs, both ångström signs, raised
/// digits, the multiplication dot, the degree sign.
fn normalise(text: &str) -> String {
    let mut plain = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '\u{b5}' | '\u{3bc}' => plain.push('u'),
            '\u{212b}' | '\u{c5}' => plain.push('Å'),
            '\u{2126}' | '\u{3a9}' => plain.push_str("ohm"),
            '²' => plain.push('2'),
            '³' => plain.push('3'),
            '¹' => plain.push('1'),
            '⁶' => plain.push('6'),
            '⁻' | '−' => plain.push('-'),
            '\u{b0}' => plain.push_str("deg"),
            '·' | '⋅' | '*' | '\u{a0}' | '\t' => plain.push(' '),
            // Å composed of a letter and a ring above: the letter is already there.
            '\u{30a}' if plain.ends_with('A') => {
                plain.pop();
                plain.push('Å');
            }
            _ => plain.push(c),
        }
    }
    plain
}

#[cfg(test)]
mod tests {
    use super::*;

    fn close(a: f64, b: f64) -> bool {
        (a - b).abs() <= 1e-12 * a.abs().max(b.abs())
    }

    #[test]
    fn spellings_of_one_unit_agree() {
        // Hand values: 1 /cm3 = 1e6 /m3, 1 mohm cm2 = 1e-7 ohm m2, 1 cm2/V/s = 1e-4 m2/V/s.
        for (text, si, dimension) in [
            ("/cm3", 1e6, Dimension::PER_VOLUME),
            ("cm-3", 1e6, Dimension::PER_VOLUME),
            ("cm^-3", 1e6, Dimension::PER_VOLUME),
            ("cm⁻³", 1e6, Dimension::PER_VOLUME),
            ("1/cm3", 1e6, Dimension::PER_VOLUME),
            ("µm", 1e-6, Dimension::LENGTH),
            ("μm", 1e-6, Dimension::LENGTH),
            ("um", 1e-6, Dimension::LENGTH),
            ("Å", 1e-10, Dimension::LENGTH),
            ("A\u{30a}", 1e-10, Dimension::LENGTH),
            ("\u{212b}", 1e-10, Dimension::LENGTH),
            ("mohm cm2", 1e-7, Dimension::RESISTANCE_AREA),
            ("mohm·cm²", 1e-7, Dimension::RESISTANCE_AREA),
            ("mΩ cm2", 1e-7, Dimension::RESISTANCE_AREA),
            ("mA/cm2", 10.0, Dimension::CURRENT_DENSITY),
            ("cm2/V/s", 1e-4, Dimension::MOBILITY),
            ("cm6/s", 1e-12, Dimension::VOLUME_SQUARED_RATE),
            ("um/h", 1e-6 / 3600.0, Dimension::VELOCITY),
            ("mV/K", 1e-3, Dimension::VOLTAGE_PER_TEMPERATURE),
            ("mV/degC", 1e-3, Dimension::VOLTAGE_PER_TEMPERATURE),
            ("mg/cm2", 1e-2, Dimension::AREAL_MASS),
            ("ohm/sq", 1.0, Dimension::RESISTANCE),
            ("GPa", 1e9, Dimension::PRESSURE),
            ("%", 0.01, Dimension::NONE),
            ("kW/m2", 1e3, Dimension::IRRADIANCE),
            ("W/m2/nm", 1e9, Dimension::SPECTRAL_IRRADIANCE),
            ("W m-2 nm-1", 1e9, Dimension::SPECTRAL_IRRADIANCE),
            ("min", 60.0, Dimension::TIME),
        ] {
            let unit = parse(text).unwrap_or_else(|e| panic!("{text}: {e:?}"));
            assert!(close(unit.factor, si), "{text}: {} against {si}", unit.factor);
            assert_eq!(unit.dimension, dimension, "{text}");
            assert!(unit.offset == 0.0, "{text}");
        }
    }

    #[test]
    fn half_exponents_have_a_place() {
        let unit = parse("/cm/eV^0.5").expect("a unit");
        assert_eq!(unit.dimension, Dimension::EDGE_COEFFICIENT);
        // (100 /m)² / (1.602176634e-19 J)
        assert!(close(unit.factor * unit.factor, 1e4 / 1.602_176_634e-19));
    }

    #[test]
    fn celsius_alone_is_absolute() {
        assert!(close(parse("degC").expect("a unit").offset, 273.15));
        assert!(close(parse("°C").expect("a unit").offset, 273.15));
    }

    #[test]
    fn unknown_units_name_the_near_one() {
        let meant = |text: &str| parse(text).expect_err("no unit").meant;
        assert_eq!(meant("Nm").as_deref(), Some("nm"));
        assert_eq!(meant("C").as_deref(), Some("degC"));
        assert_eq!(meant("mohms cm2").as_deref(), Some("mohm cm2"));
        assert_eq!(meant("suns").as_deref(), Some("times"));
        assert_eq!(meant("ev").as_deref(), Some("eV"));
        assert_eq!(meant("furlong"), None);
    }

    #[test]
    fn every_symbol_reads_with_every_prefix_and_exponent() {
        use crate::units::table::{PREFIXES, SYMBOLS};
        for symbol in SYMBOLS {
            let plain = std::iter::once((String::new(), 1.0));
            let prefixed = PREFIXES
                .iter()
                .filter(|(letter, _)| symbol.prefixes.contains(*letter))
                .map(|(letter, multiple)| (letter.to_string(), *multiple));
            for (prefix, multiple) in plain.chain(prefixed) {
                let one = multiple * symbol.factor;
                for (text, exponent) in [("", 1), ("2", 2), ("^-3", -3), ("-1", -1)] {
                    if symbol.text == "%" && !text.is_empty() {
                        continue;
                    }
                    let written = format!("{prefix}{}{text}", symbol.text);
                    let unit = parse(&written).unwrap_or_else(|e| panic!("{written}: {e:?}"));
                    assert!(close(unit.factor, one.powi(exponent)), "{written}");
                    let over = parse(&format!("W/{written}")).expect("a unit");
                    assert!(close(over.factor * unit.factor, 1.0), "W/{written}");
                    assert_eq!(over.dimension * unit.dimension, Dimension::POWER, "W/{written}");
                }
            }
        }
    }
}
