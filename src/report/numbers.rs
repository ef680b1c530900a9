//! The numbers file and the curves, for other programs.

use std::io::{self, Write};

use serde::Serialize;
use serde_json::ser::Formatter;

use crate::report::{FindingRow, ReportError};
use crate::results::{ConditionResult, Results};

/// Digits that are written: more than any model holds, few enough that the last bits of a sum
/// do not show as a change.
const DIGITS: u32 = 10;

/// The numbers file: [`Results`] and `findings`, keys in the order of the structs, floats with
/// ten significant digits, arrays of numbers on one line each.
///
/// # Errors
/// Where a number is not finite, which would read as `null`.
pub fn json(results: &Results, findings: &[FindingRow]) -> Result<String, ReportError> {
    #[derive(Serialize)]
    struct File<'a> {
        #[serde(flatten)]
        results: &'a Results,
        findings: &'a [FindingRow],
    }
    finite(results)?;
    let mut bytes = Vec::new();
    let mut serializer = serde_json::Serializer::with_formatter(&mut bytes, Layout::default());
    let fault = |message: String| ReportError { template: None, line: None, message };
    File { results, findings }.serialize(&mut serializer).map_err(|error| fault(error.to_string()))?;
    bytes.push(b'\n');
    String::from_utf8(bytes).map_err(|error| fault(error.to_string()))
}

/// `serde_json` turns what is not finite into `null`; this says so instead.
fn finite(results: &Results) -> Result<(), ReportError> {
    let fault = |condition: &ConditionResult, what: &str| ReportError {
        template: None,
        line: None,
        message: format!("`{what}` under `{}` is not a finite number", condition.name),
    };
    for condition in &results.conditions {
        let single = [
            ("efficiency", Some(condition.efficiency)),
            ("power_w_per_m2", Some(condition.power_w_per_m2)),
            ("voc_v", condition.voc_v),
            ("jsc_ma_per_cm2", condition.jsc_ma_per_cm2),
            ("fill_factor", condition.fill_factor),
            ("vmp_v", condition.vmp_v),
            ("jmp_ma_per_cm2", condition.jmp_ma_per_cm2),
            ("current_mismatch", condition.current_mismatch),
            ("reflected_ma_per_cm2", Some(condition.reflected_ma_per_cm2)),
        ];
        for (what, value) in single {
            if value.is_some_and(|value| !value.is_finite()) {
                return Err(fault(condition, what));
            }
        }
        let junction = condition.junctions.iter().flat_map(|j| {
            [
                j.gap_ev,
                j.photocurrent_ma_per_cm2,
                j.jsc_ma_per_cm2,
                j.voc_v,
                j.fill_factor,
                j.power_w_per_m2,
                j.voltage_at_mpp_v,
                j.dark_current_radiative_a_per_cm2,
            ]
        });
        if junction.into_iter().any(|value| !value.is_finite()) {
            return Err(fault(condition, "junctions"));
        }
        if condition.ledger_w_per_m2.iter().any(|line| !line.value.is_finite()) {
            return Err(fault(condition, "ledger_w_per_m2"));
        }
        let spectral = &condition.spectral;
        let series =
            [&spectral.wavelength_nm, &spectral.reflectance, &spectral.photon_current_ma_per_cm2_per_nm]
                .into_iter()
                .chain(spectral.eqe.values())
                .chain(spectral.absorptance.values());
        if series.flatten().any(|value| !value.is_finite()) {
            return Err(fault(condition, "spectral"));
        }
        let curve = &condition.curve;
        let curves = [&curve.voltage_v, &curve.current_ma_per_cm2]
            .into_iter()
            .chain(curve.junction_voltage_v.values())
            .chain(condition.junction_curves.iter().flat_map(|j| [&j.voltage_v, &j.current_ma_per_cm2]));
        if curves.flatten().any(|value| !value.is_finite()) {
            return Err(fault(condition, "curve"));
        }
    }
    Ok(())
}

/// One key a line; arrays stay on the line of their key, so that a curve is one line of a diff.
#[derive(Default)]
struct Layout {
    depth: usize,
    has_value: bool,
}

impl Layout {
    fn new_line<W: ?Sized + Write>(&self, out: &mut W) -> io::Result<()> {
        out.write_all(b"\n")?;
        (0..self.depth).try_for_each(|_| out.write_all(b"  "))
    }
}

impl Formatter for Layout {
    fn begin_array_value<W: ?Sized + Write>(&mut self, out: &mut W, first: bool) -> io::Result<()> {
        if first { Ok(()) } else { out.write_all(b", ") }
    }

    fn begin_object<W: ?Sized + Write>(&mut self, out: &mut W) -> io::Result<()> {
        self.depth += 1;
        self.has_value = false;
        out.write_all(b"{")
    }

    fn begin_object_key<W: ?Sized + Write>(&mut self, out: &mut W, first: bool) -> io::Result<()> {
        if !first {
            out.write_all(b",")?;
        }
        self.new_line(out)
    }

    fn begin_object_value<W: ?Sized + Write>(&mut self, out: &mut W) -> io::Result<()> {
        out.write_all(b": ")
    }

    fn end_object_value<W: ?Sized + Write>(&mut self, _out: &mut W) -> io::Result<()> {
        self.has_value = true;
        Ok(())
    }

    fn end_object<W: ?Sized + Write>(&mut self, out: &mut W) -> io::Result<()> {
        self.depth -= 1;
        if self.has_value {
            self.new_line(out)?;
        }
        out.write_all(b"}")
    }

    fn write_f64<W: ?Sized + Write>(&mut self, out: &mut W, value: f64) -> io::Result<()> {
        out.write_all(float(value).as_bytes())
    }
}

/// The only place where a float becomes text in the files for programs: ten significant digits,
/// no trailing zeros, a fraction or an exponent so that it reads as a float again.
fn float(value: f64) -> String {
    let (digits, exponent) = decimal(value.abs());
    if digits == 0 {
        return "0.0".into();
    }
    let sign = if value < 0.0 { "-" } else { "" };
    let digits = digits.to_string();
    let digits = digits.trim_end_matches('0');
    match exponent {
        0..=14 => {
            let whole = exponent as usize + 1;
            if digits.len() <= whole {
                format!("{sign}{digits}{}.0", "0".repeat(whole - digits.len()))
            } else {
                format!("{sign}{}.{}", &digits[..whole], &digits[whole..])
            }
        }
        -4..=-1 => format!("{sign}0.{}{digits}", "0".repeat((-exponent) as usize - 1)),
        _ if digits.len() == 1 => format!("{sign}{digits}.0e{exponent}"),
        _ => format!("{sign}{}.{}e{exponent}", &digits[..1], &digits[1..]),
    }
}

/// `value` ≥ 0 as an integer of ten digits and the power of ten of its first; 0 where it is 0.
/// Numbers far from one pass through powers of ten that are off by some 1e-16: the last of ten
/// digits stands.
fn decimal(value: f64) -> (u64, i32) {
    if value <= 0.0 || !value.is_finite() {
        return (0, 0);
    }
    let most = 10u64.pow(DIGITS);
    let scaled = |exponent: i32| {
        let shift = DIGITS as i32 - 1 - exponent;
        // In two steps, so that neither power leaves the range of a float.
        let half = shift / 2;
        (value * 10f64.powi(half) * 10f64.powi(shift - half)).round() as u64
    };
    let mut exponent = value.log10().floor() as i32;
    let mut digits = scaled(exponent);
    if digits >= most {
        exponent += 1;
        digits = scaled(exponent);
    } else if digits < most / 10 {
        exponent -= 1;
        digits = scaled(exponent);
    }
    (digits, exponent)
}

/// Every curve, one point a row: condition, which curve (`stack` or a junction by itself),
/// voltage, current. Units stand in the header. Names are quoted by the rules of RFC 4180; one
/// that would read as a formula in a spreadsheet is prefixed with an apostrophe.
pub fn csv(results: &Results) -> String {
    let mut out = String::from("condition,curve,voltage_v,current_ma_per_cm2\n");
    for condition in &results.conditions {
        let stack =
            std::iter::once(("stack", &condition.curve.voltage_v, &condition.curve.current_ma_per_cm2));
        let junctions =
            condition.junction_curves.iter().map(|j| (j.name.as_str(), &j.voltage_v, &j.current_ma_per_cm2));
        for (name, voltages, currents) in stack.chain(junctions) {
            for (v, j) in voltages.iter().zip(currents) {
                let row = [field(&condition.name), field(name), float(*v), float(*j)];
                out.push_str(&row.join(","));
                out.push('\n');
            }
        }
    }
    out
}

/// Every point of every chart, one a row; the second axis is empty for a curve. `None` without
/// charts.
pub fn charts_csv(results: &Results) -> Option<String> {
    if results.charts.is_empty() {
        return None;
    }
    let mut out = String::from("chart,condition,x,x_value,x_unit,y,y_value,y_unit,metric,value,unit\n");
    for (index, chart) in results.charts.iter().enumerate() {
        let inner = chart.axes.get(1).map_or(1, |axis| axis.values.len()).max(1);
        for (at, value) in chart.values.iter().enumerate() {
            let axis = |axis: usize, place: usize| match chart.axes.get(axis) {
                Some(axis) => [
                    field(&axis.path),
                    axis.values.get(place).map_or(String::new(), |value| float(*value)),
                    field(&axis.unit),
                ],
                None => [const { String::new() }; 3],
            };
            let row: Vec<String> = [(index + 1).to_string(), field(&chart.condition)]
                .into_iter()
                .chain(axis(0, at / inner))
                .chain(axis(1, at % inner))
                .chain([field(&chart.metric), value.map_or(String::new(), float), field(&chart.unit)])
                .collect();
            out.push_str(&row.join(","));
            out.push('\n');
        }
    }
    Some(out)
}

/// The rows of the season with the power of each; `None` without one.
pub fn season_csv(results: &Results) -> Option<String> {
    let season = results.season.as_ref()?;
    let mut out = String::from("hours,light,temperature_k,concentration,incident_w_per_m2,power_w_per_m2\n");
    for row in &season.rows {
        let cells = [
            float(row.hours),
            field(&row.light),
            float(row.temperature_k),
            float(row.concentration),
            float(row.incident_w_per_m2),
            float(row.power_w_per_m2),
        ];
        out.push_str(&cells.join(","));
        out.push('\n');
    }
    Some(out)
}

fn field(name: &str) -> String {
    let name = if name.starts_with(['=', '+', '-', '@']) { format!("'{name}") } else { name.to_string() };
    if name.contains([',', '"', '\n', '\r']) { format!("\"{}\"", name.replace('"', "\"\"")) } else { name }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn floats_keep_ten_digits_and_read_as_floats() {
        for (value, text) in [
            (0.1 + 0.2, "0.3"),
            (1.0, "1.0"),
            (-0.0, "0.0"),
            (1366.09, "1366.09"),
            (450_070.0, "450070.0"),
            (0.00012, "0.00012"),
            (1.23456789012345e-20, "1.23456789e-20"),
            (-2e18, "-2.0e18"),
            (9.999_999_999_96, "10.0"),
            (0.1, "0.1"),
            (1e-300, "1.0e-300"),
            (123_456_789_012.0, "123456789000.0"),
        ] {
            assert_eq!(float(value), text);
        }
    }

    #[test]
    fn ten_digits_are_never_further_off_than_half_of_the_last() {
        let mut value = 1.0e-30;
        while value < 1e30 {
            let back: f64 = float(value).parse().expect("a number");
            assert!((back / value - 1.0).abs() <= 0.5e-9, "{value}");
            value *= 7.3;
        }
    }

    #[test]
    fn a_name_with_a_comma_or_a_formula_stays_one_field() {
        assert_eq!(field("a,\"b"), "\"a,\"\"b\"");
        assert_eq!(field("=1+1"), "'=1+1");
    }
}
