//! Text in columns, and the JSON document.

use serde::Serialize;
use serde_json::Value;

use crate::materials::{Origin, OriginKind};

/// Version of the documents of `bandloom materials --format json`.
const SCHEMA_VERSION: u32 = 1;

/// A heading, rows of two columns, and the sources, broken at `width`.
pub(super) fn written(label: &str, rows: &[(String, String)], origins: &[Origin], width: usize) -> String {
    let mut text = format!("{label}\n");
    let first = rows.iter().map(|(what, _)| what.chars().count()).max().unwrap_or(0) + 2;
    for (what, value) in rows {
        text.push_str(&hanging(&format!("  {what:<first$}"), value, 2 + first, width));
    }
    let cited = cited(origins);
    if !cited.is_empty() {
        text.push_str("  sources\n");
    }
    for (cite, what) in cited {
        text.push_str(&hanging("    ", &format!("{}: {cite}", what.join(", ").replace('_', " ")), 6, width));
    }
    text
}

/// What comes from one publication stands in one entry.
fn cited(origins: &[Origin]) -> Vec<(String, Vec<&str>)> {
    let mut cited: Vec<(String, Vec<&str>)> = Vec::new();
    for origin in origins {
        let kind = match origin.kind {
            OriginKind::Published => String::new(),
            kind => format!(" [{}]", kind.word()),
        };
        let cite = format!("{}{kind}", origin.cite);
        match cited.iter_mut().find(|(known, _)| *known == cite) {
            Some((_, what)) if what.contains(&origin.what.as_str()) => {}
            Some((_, what)) => what.push(&origin.what),
            None => cited.push((cite, vec![&origin.what])),
        }
    }
    cited
}

/// `text` after `start`, further lines indented by `indent`, broken at ordinary spaces.
pub(super) fn hanging(start: &str, text: &str, indent: usize, width: usize) -> String {
    let mut out = start.to_owned();
    let mut used = start.chars().count();
    let mut first = true;
    for word in text.split(' ').filter(|word| !word.is_empty()) {
        let length = word.chars().count();
        if !first && used + 1 + length > width {
            out.push('\n');
            out.push_str(&" ".repeat(indent));
            used = indent;
            first = true;
        }
        if !first {
            out.push(' ');
            used += 1;
        }
        out.push_str(word);
        used += length;
        first = false;
    }
    // Only to the reader's eye the same; a copied number keeps its unit.
    let mut out = out.trim_end().replace('\u{a0}', " ");
    out.push('\n');
    out
}

/// A value as JSON; numbers that are not finite have no place there and become `null`.
pub(super) fn value(of: &impl Serialize) -> Value {
    serde_json::to_value(of).unwrap_or_default()
}

/// The document with its version first.
pub(super) fn document(body: Value) -> String {
    let mut whole = serde_json::json!({
        "schema_version": SCHEMA_VERSION,
        "tool": concat!("bandloom ", env!("CARGO_PKG_VERSION")),
    });
    if let (Some(whole), Value::Object(body)) = (whole.as_object_mut(), body) {
        whole.extend(body);
    }
    format!("{whole:#}\n")
}

/// Five significant digits at most, as people write them: `4504`, `0.0123`, `9.73e18`.
pub(super) fn short(value: f64, digits: usize) -> String {
    if value == 0.0 {
        return "0".to_owned();
    }
    let magnitude = value.abs().log10().floor() as i32;
    let trimmed = |text: String| {
        if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_owned() } else { text }
    };
    if (-3..5).contains(&magnitude) {
        let decimals = usize::try_from(digits as i32 - 1 - magnitude).unwrap_or(0);
        return trimmed(format!("{value:.decimals$}"));
    }
    let text = format!("{value:.*e}", digits.saturating_sub(1));
    match text.split_once('e') {
        Some((mantissa, exponent)) => format!("{}e{exponent}", trimmed(mantissa.to_owned())),
        None => text,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_short() {
        assert_eq!(short(4503.6, 3), "4504");
        assert_eq!(short(0.012_34, 3), "0.0123");
        assert_eq!(short(9.729e18, 3), "9.73e18");
        assert_eq!(short(6e-8, 3), "6e-8");
        assert_eq!(short(12.90, 3), "12.9");
        assert_eq!(short(100.0, 3), "100");
    }

    #[test]
    fn lines_break_at_spaces_and_hang() {
        assert_eq!(hanging("  a  ", "one two three", 5, 12), "  a  one two\n     three\n");
        assert_eq!(hanging("  a  ", "1\u{a0}K and", 5, 9), "  a  1 K\n     and\n");
    }
}
