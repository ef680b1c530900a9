//! What a quantity measures, as exponents of base quantities, and how people call it.

use std::ops::{Div, Mul};

/// Exponents of length, mass, time, current, temperature and angle, in halves, so that
/// `/cm/eV^0.5` has a place. Angle is kept apart so that `deg` is not a plain number.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Dimension([i8; 6]);

/// Symbols of the coherent SI units, in the order of the exponents.
const BASE: [&str; 6] = ["m", "kg", "s", "A", "K", "rad"];

impl Dimension {
    /// A plain number, a share, a count.
    pub const NONE: Self = Self([0; 6]);
    /// m
    pub const LENGTH: Self = Self::whole([1, 0, 0, 0, 0, 0]);
    /// kg
    pub const MASS: Self = Self::whole([0, 1, 0, 0, 0, 0]);
    /// s
    pub const TIME: Self = Self::whole([0, 0, 1, 0, 0, 0]);
    /// A
    pub const CURRENT: Self = Self::whole([0, 0, 0, 1, 0, 0]);
    /// K
    pub const TEMPERATURE: Self = Self::whole([0, 0, 0, 0, 1, 0]);
    /// rad
    pub const ANGLE: Self = Self::whole([0, 0, 0, 0, 0, 1]);
    /// m2
    pub const AREA: Self = Self::whole([2, 0, 0, 0, 0, 0]);
    /// m3
    pub const VOLUME: Self = Self::whole([3, 0, 0, 0, 0, 0]);
    /// J
    pub const ENERGY: Self = Self::whole([2, 1, -2, 0, 0, 0]);
    /// W
    pub const POWER: Self = Self::whole([2, 1, -3, 0, 0, 0]);
    /// V
    pub const VOLTAGE: Self = Self::whole([2, 1, -3, -1, 0, 0]);
    /// ohm, also ohm per square
    pub const RESISTANCE: Self = Self::whole([2, 1, -3, -2, 0, 0]);
    /// ohm m2
    pub const RESISTANCE_AREA: Self = Self::whole([4, 1, -3, -2, 0, 0]);
    /// ohm m
    pub const RESISTIVITY: Self = Self::whole([3, 1, -3, -2, 0, 0]);
    /// A/m2
    pub const CURRENT_DENSITY: Self = Self::whole([-2, 0, 0, 1, 0, 0]);
    /// W/m2
    pub const IRRADIANCE: Self = Self::whole([0, 1, -3, 0, 0, 0]);
    /// W/m2/m
    pub const SPECTRAL_IRRADIANCE: Self = Self::whole([-1, 1, -3, 0, 0, 0]);
    /// 1/m3
    pub const PER_VOLUME: Self = Self::whole([-3, 0, 0, 0, 0, 0]);
    /// 1/m2
    pub const PER_AREA: Self = Self::whole([-2, 0, 0, 0, 0, 0]);
    /// 1/m
    pub const PER_LENGTH: Self = Self::whole([-1, 0, 0, 0, 0, 0]);
    /// 1/K
    pub const PER_TEMPERATURE: Self = Self::whole([0, 0, 0, 0, -1, 0]);
    /// m/s
    pub const VELOCITY: Self = Self::whole([1, 0, -1, 0, 0, 0]);
    /// m2/V/s
    pub const MOBILITY: Self = Self::whole([0, -1, 2, 1, 0, 0]);
    /// m2/s
    pub const DIFFUSIVITY: Self = Self::whole([2, 0, -1, 0, 0, 0]);
    /// m3/s
    pub const VOLUME_RATE: Self = Self::whole([3, 0, -1, 0, 0, 0]);
    /// m6/s
    pub const VOLUME_SQUARED_RATE: Self = Self::whole([6, 0, -1, 0, 0, 0]);
    /// Pa
    pub const PRESSURE: Self = Self::whole([-1, 1, -2, 0, 0, 0]);
    /// kg/m3
    pub const DENSITY: Self = Self::whole([-3, 1, 0, 0, 0, 0]);
    /// kg/m2
    pub const AREAL_MASS: Self = Self::whole([-2, 1, 0, 0, 0, 0]);
    /// J/m2
    pub const ENERGY_PER_AREA: Self = Self::whole([0, 1, -2, 0, 0, 0]);
    /// W/kg
    pub const SPECIFIC_POWER: Self = Self::whole([2, 0, -3, 0, 0, 0]);
    /// J/K
    pub const ENERGY_PER_TEMPERATURE: Self = Self::whole([2, 1, -2, 0, -1, 0]);
    /// V/K
    pub const VOLTAGE_PER_TEMPERATURE: Self = Self::whole([2, 1, -3, -1, -1, 0]);
    /// m/K
    pub const LENGTH_PER_TEMPERATURE: Self = Self::whole([1, 0, 0, 0, -1, 0]);
    /// 1/m/J^0.5: the coefficient of a square-root absorption edge.
    pub const EDGE_COEFFICIENT: Self = Self([-4, -1, 2, 0, 0, 0]);

    const fn whole(exponents: [i8; 6]) -> Self {
        let [a, b, c, d, e, f] = exponents;
        Self([2 * a, 2 * b, 2 * c, 2 * d, 2 * e, 2 * f])
    }

    /// Whether it is a plain number.
    pub fn is_none(self) -> bool {
        self == Self::NONE
    }

    /// Raised to `exponent`; `None` where an exponent would not be a half-integer or too large.
    pub fn power(self, exponent: f64) -> Option<Self> {
        let mut raised = [0; 6];
        for (slot, own) in raised.iter_mut().zip(self.0) {
            let value = f64::from(own) * exponent;
            if value.fract() != 0.0 || value.abs() > 120.0 {
                return None;
            }
            *slot = value as i8;
        }
        Some(Self(raised))
    }

    /// One over it.
    pub fn inverse(self) -> Self {
        Self(self.0.map(|exponent| -exponent))
    }

    /// What people call it, with its article: `a length`, `a resistance times an area`; by its
    /// SI unit where it has no name.
    pub fn name(self) -> String {
        NAMES
            .iter()
            .find(|(dimension, _)| *dimension == self)
            .map_or_else(|| format!("a quantity in {}", self.si_unit()), |(_, name)| (*name).to_owned())
    }

    /// The coherent SI unit, `kg m2/s3`; `1` for a plain number.
    pub fn si_unit(self) -> String {
        let factor = |symbol: &str, halves: i8| match halves {
            2 => symbol.to_owned(),
            _ if halves % 2 == 0 => format!("{symbol}{}", halves / 2),
            _ => format!("{symbol}^{}", f64::from(halves) / 2.0),
        };
        let named = BASE.iter().zip(self.0);
        let above: Vec<String> =
            named.clone().filter(|(_, e)| *e > 0).map(|(symbol, e)| factor(symbol, e)).collect();
        let below: String =
            named.filter(|(_, e)| *e < 0).map(|(symbol, e)| format!("/{}", factor(symbol, -e))).collect();
        match (above.is_empty(), below.is_empty()) {
            (true, true) => "1".to_owned(),
            (true, false) => below,
            _ => above.join(" ") + &below,
        }
    }
}

impl Mul for Dimension {
    type Output = Self;

    fn mul(self, other: Self) -> Self {
        let mut sum = self.0;
        for (slot, more) in sum.iter_mut().zip(other.0) {
            *slot = slot.saturating_add(more);
        }
        Self(sum)
    }
}

impl Div for Dimension {
    type Output = Self;

    fn div(self, other: Self) -> Self {
        let mut difference = self.0;
        for (slot, less) in difference.iter_mut().zip(other.0) {
            *slot = slot.saturating_sub(less);
        }
        Self(difference)
    }
}

const NAMES: &[(Dimension, &str)] = &[
    (Dimension::NONE, "a plain number"),
    (Dimension::LENGTH, "a length"),
    (Dimension::MASS, "a mass"),
    (Dimension::TIME, "a time"),
    (Dimension::CURRENT, "a current"),
    (Dimension::TEMPERATURE, "a temperature"),
    (Dimension::ANGLE, "an angle"),
    (Dimension::AREA, "an area"),
    (Dimension::VOLUME, "a volume"),
    (Dimension::ENERGY, "an energy"),
    (Dimension::POWER, "a power"),
    (Dimension::VOLTAGE, "a voltage"),
    (Dimension::RESISTANCE, "a resistance"),
    (Dimension::RESISTANCE_AREA, "a resistance times an area"),
    (Dimension::RESISTIVITY, "a resistivity"),
    (Dimension::CURRENT_DENSITY, "a current per area"),
    (Dimension::IRRADIANCE, "a power per area"),
    (Dimension::SPECTRAL_IRRADIANCE, "a power per area and wavelength"),
    (Dimension::PER_VOLUME, "a density per volume"),
    (Dimension::PER_AREA, "a number per area"),
    (Dimension::PER_LENGTH, "a number per length"),
    (Dimension::PER_TEMPERATURE, "a share per temperature"),
    (Dimension::VELOCITY, "a velocity"),
    (Dimension::MOBILITY, "an area per voltage and time"),
    (Dimension::DIFFUSIVITY, "an area per time"),
    (Dimension::VOLUME_RATE, "a volume per time"),
    (Dimension::VOLUME_SQUARED_RATE, "a squared volume per time"),
    (Dimension::PRESSURE, "a pressure"),
    (Dimension::DENSITY, "a mass per volume"),
    (Dimension::AREAL_MASS, "a mass per area"),
    (Dimension::ENERGY_PER_AREA, "an energy per area"),
    (Dimension::SPECIFIC_POWER, "a power per mass"),
    (Dimension::ENERGY_PER_TEMPERATURE, "an energy per temperature"),
    (Dimension::VOLTAGE_PER_TEMPERATURE, "a voltage per temperature"),
    (Dimension::LENGTH_PER_TEMPERATURE, "a length per temperature"),
    (Dimension::EDGE_COEFFICIENT, "a number per length and root of energy"),
];
