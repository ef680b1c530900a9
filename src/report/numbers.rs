//! The numbers file and the curves, for other programs.

use serde::Serialize;
use serde_json::{Map, Number, Value};

use crate::report::number::round_significant;
use crate::report::{FindingRow, ReportError};
use crate::results::{ConditionResult, Results};

/// Digits that are written: more than any model holds, few enough that the last bits of a sum
/// do not show as a change.
const DIGITS: i32 = 10;

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
    let value = serde_json::to_value(File { results, findings }).map_err(|error| ReportError {
        template: None,
        line: None,
        message: error.to_string(),
    })?;
    let mut out = String::new();
    write(&value, 0, &mut out);
    out.push('\n');
    Ok(out)
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

/// The only place where a float becomes text in the numbers file.
fn number(value: &Number) -> String {
    match value.as_f64() {
        Some(float) if !(value.is_i64() || value.is_u64()) => {
            let rounded = round_significant(float, DIGITS);
            Number::from_f64(if rounded == 0.0 { 0.0 } else { rounded })
                .unwrap_or_else(|| Number::from(0))
                .to_string()
        }
        _ => value.to_string(),
    }
}

fn write(value: &Value, depth: usize, out: &mut String) {
    match value {
        Value::Number(n) => out.push_str(&number(n)),
        Value::Array(items) if items.iter().all(|item| !item.is_object() && !item.is_array()) => {
            out.push('[');
            for (index, item) in items.iter().enumerate() {
                if index > 0 {
                    out.push_str(", ");
                }
                write(item, depth, out);
            }
            out.push(']');
        }
        Value::Array(items) => {
            out.push('[');
            for (index, item) in items.iter().enumerate() {
                out.push_str(if index > 0 { ",\n" } else { "\n" });
                indent(depth + 1, out);
                write(item, depth + 1, out);
            }
            out.push('\n');
            indent(depth, out);
            out.push(']');
        }
        Value::Object(map) if map.is_empty() => out.push_str("{}"),
        Value::Object(map) => object(map, depth, out),
        other => out.push_str(&other.to_string()),
    }
}

fn object(map: &Map<String, Value>, depth: usize, out: &mut String) {
    out.push('{');
    for (index, (key, value)) in map.iter().enumerate() {
        out.push_str(if index > 0 { ",\n" } else { "\n" });
        indent(depth + 1, out);
        out.push_str(&Value::String(key.clone()).to_string());
        out.push_str(": ");
        write(value, depth + 1, out);
    }
    out.push('\n');
    indent(depth, out);
    out.push('}');
}

fn indent(depth: usize, out: &mut String) {
    out.extend(std::iter::repeat_n("  ", depth));
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
                let row = [field(&condition.name), field(name), plain(*v), plain(*j)];
                out.push_str(&row.join(","));
                out.push('\n');
            }
        }
    }
    out
}

fn plain(value: f64) -> String {
    let rounded = round_significant(value, DIGITS);
    if rounded == 0.0 { "0".into() } else { format!("{rounded}") }
}

fn field(name: &str) -> String {
    let name = if name.starts_with(['=', '+', '-', '@']) { format!("'{name}") } else { name.to_string() };
    if name.contains([',', '"', '\n', '\r']) { format!("\"{}\"", name.replace('"', "\"\"")) } else { name }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn floats_keep_ten_digits_and_integers_stay_integers() {
        let mut out = String::new();
        write(
            &serde_json::json!({"a": 0.1 + 0.2, "b": 1, "c": [1.0, -0.0, 1.23456789012345e-20]}),
            0,
            &mut out,
        );
        assert_eq!(out, "{\n  \"a\": 0.3,\n  \"b\": 1,\n  \"c\": [1.0, 0.0, 1.23456789e-20]\n}");
    }

    #[test]
    fn a_name_with_a_comma_or_a_formula_stays_one_field() {
        assert_eq!(field("a,\"b"), "\"a,\"\"b\"");
        assert_eq!(field("=1+1"), "'=1+1");
    }
}
