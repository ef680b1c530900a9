//! What a slot takes: its dimension, the values that make sense in it, and the unit people use.

use crate::units::{Dimension, parse};

/// What a quantity is for. Decides what is out of range, what is unlikely, and which unit a bare
/// number most probably lacks.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Role {
    /// Any finite value.
    Any,
    /// Greater than zero.
    Positive,
    /// Zero or more.
    NotNegative,
    /// A difference: `degC` counts as K.
    Difference,
    /// Thickness of an epitaxial layer that is thin by its duty.
    ThinLayer,
    /// Thickness of a layer that may be thin or the body of a wafer.
    ThickLayer,
    /// Thickness of a coat.
    Coat,
    /// Thickness of a wafer, a cover or a handle.
    Wafer,
    /// Doping, density of carriers.
    Doping,
    /// Energy gap.
    Gap,
    /// Temperature of the cell.
    CellTemperature,
    /// Temperature at which a layer is grown.
    GrowthTemperature,
    /// A share written with `%`, from 0 to 100 %.
    Share,
    /// A share written with `%` that may not be zero.
    PositiveShare,
    /// A share written with `%` that may exceed 100 %.
    Ratio,
    /// A fraction of a sublattice, a plain number from 0 to 1.
    Fraction,
    /// A share of the light lost at the front: something has to be left.
    Loss,
    /// A multiple of the light.
    Concentration,
    /// A count of at least one.
    Count,
    /// An angle of incidence, from 0 to less than 90 degrees.
    Incidence,
    /// How fast a layer grows.
    GrowthRate,
    /// Temperature of a thermal source.
    SourceTemperature,
    /// Power per area of a light.
    Irradiance,
    /// A resistance in series with the whole area.
    SeriesResistance,
}

/// Lowest and highest value a role allows, SI, and whether the ends belong to it.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Bounds {
    pub(crate) low: f64,
    pub(crate) low_included: bool,
    pub(crate) high: f64,
    pub(crate) high_included: bool,
}

const fn bounds(low: f64, low_included: bool, high: f64, high_included: bool) -> Bounds {
    Bounds { low, low_included, high, high_included }
}

impl Role {
    /// What is possible at all.
    pub(crate) fn bounds(self) -> Option<Bounds> {
        Some(match self {
            Self::Any | Self::Difference => return None,
            Self::NotNegative | Self::Ratio | Self::SeriesResistance => {
                bounds(0.0, true, f64::INFINITY, false)
            }
            Self::Share | Self::Fraction => bounds(0.0, true, 1.0, true),
            Self::Loss => bounds(0.0, true, 1.0, false),
            Self::PositiveShare => bounds(0.0, false, 1.0, true),
            Self::Count => bounds(1.0, true, 10_000.0, true),
            Self::Incidence => bounds(0.0, true, std::f64::consts::FRAC_PI_2, false),
            _ => bounds(0.0, false, f64::INFINITY, false),
        })
    }

    /// What is met in practice, SI; outside it the unit was probably mistaken.
    pub(crate) fn likely(self) -> Option<(f64, f64)> {
        Some(match self {
            Self::ThinLayer => (1e-10, 2e-5),
            Self::ThickLayer => (1e-10, 2e-3),
            Self::Coat => (1e-10, 2e-5),
            Self::Wafer => (1e-6, 3e-2),
            // From high-purity wafers, 1e13 /cm3, to the solid itself, 1e22 /cm3.
            Self::Doping => (1e19, 1e28),
            Self::Gap => (0.05 * 1.602_176_634e-19, 15.0 * 1.602_176_634e-19),
            Self::CellTemperature => (60.0, 520.0),
            Self::GrowthTemperature => (290.0, 1800.0),
            Self::SourceTemperature => (500.0, 60_000.0),
            Self::GrowthRate => (1e-13, 1e-6),
            Self::Concentration => (1e-4, 10_000.0),
            Self::Irradiance => (1e-2, 1e7),
            // From nothing to 100 ohm cm2, which a milliampere drops a tenth of a volt over.
            Self::SeriesResistance => (0.0, 1e-2),
            _ => return None,
        })
    }

    /// Units a bare or mistaken number may have been meant in, the most usual first.
    pub(crate) fn units(self, dimension: Dimension) -> &'static [&'static str] {
        match self {
            Self::ThinLayer | Self::ThickLayer | Self::Coat => &["nm", "um", "Å", "mm"],
            Self::Wafer => &["um", "mm", "nm"],
            Self::Doping => &["/cm3", "/m3"],
            Self::Gap => &["eV", "meV"],
            Self::CellTemperature | Self::GrowthTemperature => &["degC", "K"],
            Self::SourceTemperature => &["K"],
            Self::GrowthRate => &["um/h", "nm/s", "nm/h"],
            Self::Share | Self::PositiveShare | Self::Loss | Self::Ratio => &["%"],
            Self::Concentration => &["times"],
            Self::Irradiance => &["W/m2", "kW/m2"],
            Self::Incidence => &["deg"],
            Self::SeriesResistance => &["ohm cm2", "mohm cm2"],
            Self::Difference if dimension == Dimension::TEMPERATURE => &["K"],
            // Dark currents and tunnel peaks are told per A, photocurrents per mA.
            Self::Positive | Self::NotNegative if dimension == Dimension::CURRENT_DENSITY => {
                &["A/cm2", "mA/cm2"]
            }
            _ => usual(dimension),
        }
    }

    /// Whether the number must say that it is a share or a multiple although it has no dimension.
    pub(crate) fn needs_word(self) -> bool {
        matches!(self, Self::Share | Self::PositiveShare | Self::Loss | Self::Ratio | Self::Concentration)
    }

    /// The unit in which `value` alone makes sense here, the most usual first.
    pub(crate) fn unit_for(self, value: f64, dimension: Dimension) -> Option<&'static str> {
        let units = self.units(dimension);
        // A fraction of a micrometre is written as `0.7 um`, hardly ever as `0.7 nm`; the body of
        // a layer is never a few nanometres.
        let units = match self {
            Self::ThickLayer | Self::Coat if value < 10.0 && value.fract() != 0.0 => &["um", "nm"][..],
            Self::ThinLayer if value < 1.0 => &["um", "nm"][..],
            _ => units,
        };
        units.iter().copied().find(|unit| self.plausible(value, unit)).or_else(|| units.first().copied())
    }

    /// Whether `value` in `unit` is both possible and met in practice. A number near 0 is no
    /// temperature anybody meant on the Celsius scale, unless it is 0 itself.
    pub(crate) fn plausible(self, value: f64, unit: &str) -> bool {
        let Ok(unit) = parse(unit) else { return false };
        if unit.offset != 0.0 && value != 0.0 && value.abs() < 1.0 {
            return false;
        }
        let si = value * unit.factor + unit.offset;
        self.possible(si) && self.likely().is_none_or(|(low, high)| (low..=high).contains(&si))
    }

    /// Whether `si` is possible at all.
    pub(crate) fn possible(self, si: f64) -> bool {
        self.bounds().is_none_or(|b| {
            (if b.low_included { si >= b.low } else { si > b.low })
                && (if b.high_included { si <= b.high } else { si < b.high })
        })
    }
}

/// The usual unit of a dimension as a list of one.
fn usual(dimension: Dimension) -> &'static [&'static str] {
    match dimension {
        Dimension::LENGTH => &["nm", "um"],
        Dimension::TEMPERATURE => &["degC", "K"],
        Dimension::CURRENT_DENSITY => &["mA/cm2", "A/cm2"],
        Dimension::RESISTANCE_AREA => &["ohm cm2", "mohm cm2"],
        Dimension::IRRADIANCE => &["W/m2", "kW/m2"],
        _ => crate::units::format::usual_list(dimension),
    }
}
