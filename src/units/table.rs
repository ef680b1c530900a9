//! The units the language knows, their prefixes, and how each is mistaken.

use crate::units::{Dimension, ELEMENTARY_CHARGE};

/// One unit symbol.
#[derive(Clone, Copy, Debug)]
pub struct Symbol {
    /// As written.
    pub text: &'static str,
    /// SI units in one.
    pub factor: f64,
    /// What it measures.
    pub dimension: Dimension,
    /// Prefixes it takes, as letters.
    pub prefixes: &'static str,
}

const fn symbol(text: &'static str, factor: f64, dimension: Dimension, prefixes: &'static str) -> Symbol {
    Symbol { text, factor, dimension, prefixes }
}

/// 0 °C in K.
pub const ZERO_CELSIUS: f64 = 273.15;

/// Every symbol without a prefix. `degC` stands for a difference here; its offset is applied
/// where it stands alone.
pub const SYMBOLS: &[Symbol] = &[
    symbol("m", 1.0, Dimension::LENGTH, "pnumck"),
    symbol("Å", 1e-10, Dimension::LENGTH, ""),
    symbol("angstrom", 1e-10, Dimension::LENGTH, ""),
    // Exact by IAU 2012 resolution B2.
    symbol("au", 149_597_870_700.0, Dimension::LENGTH, ""),
    symbol("g", 1e-3, Dimension::MASS, "numk"),
    symbol("s", 1.0, Dimension::TIME, "fpnum"),
    symbol("min", 60.0, Dimension::TIME, ""),
    symbol("h", 3600.0, Dimension::TIME, ""),
    symbol("A", 1.0, Dimension::CURRENT, "fpnumk"),
    symbol("K", 1.0, Dimension::TEMPERATURE, "m"),
    symbol("degC", 1.0, Dimension::TEMPERATURE, ""),
    symbol("eV", ELEMENTARY_CHARGE, Dimension::ENERGY, "mkM"),
    symbol("J", 1.0, Dimension::ENERGY, "mkM"),
    symbol("V", 1.0, Dimension::VOLTAGE, "umk"),
    symbol("W", 1.0, Dimension::POWER, "numkM"),
    symbol("Wh", 3600.0, Dimension::ENERGY, "mkM"),
    symbol("ohm", 1.0, Dimension::RESISTANCE, "umkM"),
    symbol("Pa", 1.0, Dimension::PRESSURE, "hkMG"),
    symbol("deg", std::f64::consts::PI / 180.0, Dimension::ANGLE, ""),
    symbol("rad", 1.0, Dimension::ANGLE, "m"),
    symbol("%", 0.01, Dimension::NONE, ""),
    symbol("points", 0.01, Dimension::NONE, ""),
    symbol("times", 1.0, Dimension::NONE, ""),
    symbol("sq", 1.0, Dimension::NONE, ""),
    symbol("photons", 1.0, Dimension::NONE, ""),
];

/// Prefix letters and what they multiply by.
pub const PREFIXES: &[(char, f64)] = &[
    ('f', 1e-15),
    ('p', 1e-12),
    ('n', 1e-9),
    ('u', 1e-6),
    ('m', 1e-3),
    ('c', 1e-2),
    ('h', 1e2),
    ('k', 1e3),
    ('M', 1e6),
    ('G', 1e9),
];

/// Spellings people use for a unit the language writes otherwise.
pub const MISTAKEN: &[(&str, &str)] = &[
    ("C", "degC"),
    ("celsius", "degC"),
    ("degrees", "deg"),
    ("degree", "deg"),
    ("kelvin", "K"),
    ("Ohm", "ohm"),
    ("ohms", "ohm"),
    ("micron", "um"),
    ("microns", "um"),
    ("nanometre", "nm"),
    ("nanometer", "nm"),
    ("sec", "s"),
    ("hr", "h"),
    ("hours", "h"),
    ("percent", "%"),
    ("pct", "%"),
    ("pp", "points"),
    ("suns", "times"),
    ("sun", "times"),
    ("x", "times"),
    ("volt", "V"),
    ("volts", "V"),
    ("AU", "au"),
    ("square", "sq"),
    ("ma", "mA"),
    ("mw", "mW"),
];

/// The factor and dimension of one symbol with its prefix, `None` where it is no unit.
pub fn look_up(text: &str) -> Option<(f64, Dimension)> {
    if let Some(symbol) = SYMBOLS.iter().find(|symbol| symbol.text == text) {
        return Some((symbol.factor, symbol.dimension));
    }
    let mut letters = text.chars();
    let prefix = letters.next()?;
    let rest = letters.as_str();
    let (_, multiple) = PREFIXES.iter().find(|(letter, _)| *letter == prefix)?;
    let symbol = SYMBOLS.iter().find(|symbol| symbol.text == rest && symbol.prefixes.contains(prefix))?;
    // `1e-9` is the nearest double to its value; a product of the two may be one step away, which
    // is why 700 nm and 7000 Å are compared with a tolerance and never by their bits.
    Some((symbol.factor * multiple, symbol.dimension))
}

/// The unit that was most likely meant by one that is none.
pub fn near(text: &str) -> Option<String> {
    if let Some((_, meant)) = MISTAKEN.iter().find(|(wrong, _)| *wrong == text) {
        return Some((*meant).to_owned());
    }
    let all = || {
        SYMBOLS.iter().flat_map(|symbol| {
            std::iter::once(symbol.text.to_owned())
                .chain(symbol.prefixes.chars().map(|prefix| format!("{prefix}{}", symbol.text)))
        })
    };
    // A wrong case first: `Nm`, `ev`, `MA` have one sensible reading only where a single unit
    // differs from them by case alone.
    let lower = text.to_lowercase();
    let mut by_case = all().filter(|known| known.to_lowercase() == lower);
    if let (Some(only), None) = (by_case.next(), by_case.next()) {
        return Some(only);
    }
    if text.chars().count() < 3 {
        return None;
    }
    all().find(|known| known.chars().count() > 2 && text.strip_suffix('s') == Some(known.as_str()))
}
