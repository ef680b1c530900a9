//! Values of the command line: a number with its unit, a range of gaps.

use crate::units::{Dimension, parse};

/// Where something is shown.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum At {
    /// K.
    Temperature(f64),
    /// m.
    Wavelength(f64),
}

/// `650nm`, `350 K`, `77 degC`
pub(super) fn at(text: &str) -> Result<At, String> {
    let (value, dimension) = quantity(text, "`650nm` or `350K`")?;
    match dimension {
        Dimension::LENGTH if (1e-8..=1e-3).contains(&value) => Ok(At::Wavelength(value)),
        Dimension::LENGTH => Err("no wavelength of light: write one such as `650nm`".to_owned()),
        // Gaps and mobilities follow laws that were fitted from liquid helium to a hot cell.
        Dimension::TEMPERATURE if (1.0..=1500.0).contains(&value) => Ok(At::Temperature(value)),
        Dimension::TEMPERATURE => Err("outside 1 to 1500 K: write one such as `350K`".to_owned()),
        Dimension::NONE => {
            Err("lacks its unit: write `650nm` for a wavelength, `350K` for a temperature".to_owned())
        }
        _ => Err("neither a wavelength nor a temperature: write `650nm` or `350K`".to_owned()),
    }
}

/// `1e18/cm3`, in 1/m3.
pub(super) fn doping(text: &str) -> Result<f64, String> {
    let (value, dimension) = quantity(text, "`1e17/cm3`")?;
    match dimension {
        Dimension::PER_VOLUME if value > 0.0 && value < 1e29 => Ok(value),
        Dimension::PER_VOLUME => Err("no doping: write one such as `1e17/cm3`".to_owned()),
        Dimension::NONE => Err(format!("lacks its unit: write `{}/cm3`", text.trim())),
        _ => Err("no doping: write one such as `1e17/cm3`".to_owned()),
    }
}

/// `0.5%`
pub(super) fn share(text: &str) -> Result<f64, String> {
    let (value, dimension) = quantity(text, "`0.5%`")?;
    match dimension {
        _ if !text.contains('%') => Err(format!("lacks its unit: write `{}%`", text.trim())),
        Dimension::NONE if (0.0..=0.2).contains(&value) => Ok(value),
        _ => Err("outside 0 to 20 %: write a share such as `0.5%`".to_owned()),
    }
}

/// A number with its unit, in SI.
fn quantity(text: &str, sample: &str) -> Result<(f64, Dimension), String> {
    let text = text.trim();
    let number = |end: &usize| text.get(..*end).and_then(|part| part.parse::<f64>().ok());
    let longest = (1..=text.len()).rev().find(|end| number(end).is_some());
    let Some((end, value)) = longest.and_then(|end| Some((end, number(&end)?))) else {
        return Err(format!("no number: write {sample}"));
    };
    if !value.is_finite() {
        return Err(format!("no finite number: write {sample}"));
    }
    let unit = text.get(end..).unwrap_or_default().trim();
    if unit.is_empty() {
        return Ok((value, Dimension::NONE));
    }
    match parse(unit) {
        Ok(unit) => Ok((value * unit.factor + unit.offset, unit.dimension)),
        Err(unknown) => Err(match unknown.meant {
            Some(meant) => {
                format!("`{unit}` is no unit: write `{}{meant}`", text.get(..end).unwrap_or_default())
            }
            None => format!("`{unit}` is no unit: write {sample}"),
        }),
    }
}

/// `1.7..1.9`, in eV; what is wrong, and the way out.
pub(super) fn range(text: &str) -> Result<(f64, f64), (String, String)> {
    let wanted = || (format!("`{text}` is no range of gaps"), "write it in eV, as in `1.7..1.9`".to_owned());
    let (low, high) = text.trim().trim_end_matches("eV").split_once("..").ok_or_else(wanted)?;
    let number = |text: &str| text.trim().trim_end_matches("eV").trim().parse::<f64>().map_err(|_| wanted());
    let (low, high) = (number(low)?, number(high)?);
    if !(low.is_finite() && high.is_finite() && low >= 0.0) {
        return Err(wanted());
    }
    if low > high {
        return Err((
            format!("the range runs from {low} down to {high} eV"),
            format!("write the smaller gap first: `{high}..{low}`"),
        ));
    }
    if low > 20.0 {
        return Err((
            format!("{low} to {high} eV is no gap of a solid"),
            "write it in eV, as in `1.7..1.9`".to_owned(),
        ));
    }
    Ok((low, high))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn values_carry_their_unit() {
        assert_eq!(at("350K"), Ok(At::Temperature(350.0)));
        assert_eq!(at("25 degC"), Ok(At::Temperature(298.15)));
        let Ok(At::Wavelength(metres)) = at("1.5um") else { panic!("a wavelength") };
        assert!((metres - 1.5e-6).abs() < 1e-18);
        for bad in ["650", "650 lightyears", "0nm", "-5K", "3 eV", "nm", "", "NaN K", "1e400nm"] {
            assert!(at(bad).is_err(), "{bad}");
        }
        assert_eq!(doping("1e17 /cm3").map(|value| value / 1e23), Ok(1.0));
        assert!(doping("1e17").is_err_and(|why| why.contains("1e17/cm3")));
        assert!(doping("0/cm3").is_err() && doping("5nm").is_err());
        assert_eq!(share("0.5%"), Ok(0.005));
        assert!(share("0.5").is_err() && share("90%").is_err());
    }

    #[test]
    fn ranges_run_upwards() {
        assert_eq!(range("1.7..1.9"), Ok((1.7, 1.9)));
        assert_eq!(range("1.7 .. 1.9 eV"), Ok((1.7, 1.9)));
        assert_eq!(range("1.7 eV .. 1.9 eV"), Ok((1.7, 1.9)));
        for bad in ["1.7", "a..b", "-1..2", "1..inf", "", "700..800"] {
            assert!(range(bad).is_err(), "{bad}");
        }
        let (message, help) = range("1.9..1.7").expect_err("backwards");
        assert!(message.contains("from 1.9 down to 1.7") && help.contains("`1.7..1.9`"));
    }
}
