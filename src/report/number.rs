//! Numbers as people read them: real minus, narrow space between thousands, a space that does
//! not break before the unit. Every number on a sheet passes through here.

/// Narrow no-break space, between thousands.
pub const NARROW: char = '\u{202f}';
/// No-break space, before a unit.
pub const NO_BREAK: char = '\u{a0}';
/// The real minus sign.
pub const MINUS: char = '\u{2212}';

/// `value` with `digits` significant digits; 0, NaN and infinities as they are.
pub fn round_significant(value: f64, digits: i32) -> f64 {
    if value == 0.0 || !value.is_finite() {
        return value;
    }
    // By way of decimal text, which is exact; scaling by a power of ten is not.
    format!("{value:.*e}", (digits - 1).max(0) as usize).parse().unwrap_or(value)
}

/// Fixed decimals. What rounds to zero has no sign; what is not finite is a dash.
pub fn fixed(value: f64, decimals: usize) -> String {
    if !value.is_finite() {
        return "–".into();
    }
    let text = format!("{:.*}", decimals, value.abs());
    let negative = value < 0.0 && text.bytes().any(|byte| (b'1'..=b'9').contains(&byte));
    let (whole, rest) = text.split_once('.').map_or((text.as_str(), None), |(w, r)| (w, Some(r)));
    let mut out = String::new();
    if negative {
        out.push(MINUS);
    }
    out.push_str(&thousands(whole));
    if let Some(rest) = rest {
        out.push('.');
        out.push_str(rest);
    }
    out
}

fn thousands(digits: &str) -> String {
    let mut out = String::new();
    for (index, digit) in digits.chars().enumerate() {
        // Four digits stay together only where no column of thousands stands beside them: never.
        if index > 0 && (digits.len() - index).is_multiple_of(3) {
            out.push(NARROW);
        }
        out.push(digit);
    }
    out
}

/// [`fixed`] with `+` before what is positive.
pub fn signed(value: f64, decimals: usize) -> String {
    let text = fixed(value, decimals);
    if value > 0.0 && text.bytes().any(|byte| (b'1'..=b'9').contains(&byte)) {
        format!("+{text}")
    } else {
        text
    }
}

/// Significant digits without an exponent while that reads well, else `1.2×10⁻²⁰`.
pub fn significant(value: f64, digits: usize) -> String {
    if value == 0.0 || !value.is_finite() {
        return fixed(value, 0);
    }
    let rounded = round_significant(value, digits as i32);
    let exponent = exponent(rounded);
    if (-3..6).contains(&exponent) {
        let decimals = (digits as i32 - 1 - exponent).max(0) as usize;
        return fixed(rounded, decimals);
    }
    let mantissa = rounded / 10f64.powi(exponent);
    format!("{}×10{}", fixed(mantissa, digits.saturating_sub(1)), superscript(exponent))
}

/// Three significant digits, without zeros at the end.
pub fn short(value: f64) -> String {
    let text = significant(value, 3);
    if text.contains('.') && !text.contains('×') {
        return text.trim_end_matches('0').trim_end_matches('.').to_string();
    }
    text
}

fn exponent(value: f64) -> i32 {
    format!("{value:e}").split_once('e').and_then(|(_, e)| e.parse().ok()).unwrap_or(0)
}

/// An integer in raised digits.
pub fn superscript(value: i32) -> String {
    value
        .to_string()
        .chars()
        .map(|c| match c {
            '-' => '⁻',
            '1' => '¹',
            '2' => '²',
            '3' => '³',
            _ => char::from_u32(0x2070 + c.to_digit(10).unwrap_or(0)).unwrap_or(c),
        })
        .collect()
}

/// At most two decimals, none where they are zero.
pub fn trimmed(value: f64) -> String {
    let text = fixed(value, 2);
    text.trim_end_matches('0').trim_end_matches('.').to_string()
}

/// A number and its unit, kept on one line.
pub fn with_unit(number: &str, unit: &str) -> String {
    if unit.is_empty() { number.to_string() } else { format!("{number}{NO_BREAK}{unit}") }
}

/// A fraction as percent: `0.29654` → `29.65 %`.
pub fn percent(fraction: f64, decimals: usize) -> String {
    with_unit(&fixed(fraction * 100.0, decimals), "%")
}

/// Decimals for a figure so that about four digits show: 2 below 100, 1 below 1000, else 0.
pub fn decimals(largest: f64) -> usize {
    match largest.abs() {
        x if x < 99.995 => 2,
        x if x < 9999.95 => 1,
        _ => 0,
    }
}

/// Current densities of one table or figure share a scale: mA/cm², or A/cm² where the light is
/// concentrated.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CurrentScale {
    divisor: f64,
    /// `mA/cm²` or `A/cm²`.
    pub unit: &'static str,
}

impl CurrentScale {
    /// The scale for values up to `largest_ma`, mA/cm2.
    pub fn for_largest(largest_ma: f64) -> Self {
        if largest_ma >= 1000.0 {
            Self { divisor: 1000.0, unit: "A/cm²" }
        } else {
            Self { divisor: 1.0, unit: "mA/cm²" }
        }
    }

    /// mA/cm2 in this scale's unit.
    pub fn of(self, ma: f64) -> f64 {
        ma / self.divisor
    }

    /// Two decimals: 10 µA/cm2 or 10 mA/cm2.
    pub fn number(self, ma: f64) -> String {
        fixed(self.of(ma), 2)
    }

    /// Number and unit.
    pub fn text(self, ma: f64) -> String {
        with_unit(&self.number(ma), self.unit)
    }
}

/// One current density with the unit that suits it.
pub fn current(ma: f64) -> String {
    CurrentScale::for_largest(ma.abs()).text(ma)
}

/// A thickness in the unit that suits it: nm below 1 µm, µm below 1 mm, else mm.
pub fn thickness(nm: f64) -> String {
    let (value, unit) = match nm {
        x if x < 999.5 => (nm, "nm"),
        x if x < 999_500.0 => (nm / 1e3, "µm"),
        _ => (nm / 1e6, "mm"),
    };
    let text = significant(value, 4);
    let trimmed = if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { &text };
    with_unit(trimmed, unit)
}

/// A doping density per cm3 as the file writes it: `2e18`.
pub fn doping(per_cm3: f64) -> String {
    let rounded = round_significant(per_cm3, 3);
    format!("{rounded:e}")
}

/// A temperature in °C, with decimals only where there are some.
pub fn celsius(kelvin: f64) -> String {
    let value = kelvin - 273.15;
    with_unit(&trimmed(value), "°C")
}

/// `one`, `two`, … `twelve`, then digits.
pub fn count(n: usize) -> String {
    const WORDS: [&str; 13] = [
        "no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven",
        "twelve",
    ];
    WORDS.get(n).map_or_else(|| n.to_string(), |word| (*word).to_string())
}

/// `1 layer`, `2 layers`, with the number in words up to twelve.
pub fn counted(n: usize, noun: &str) -> String {
    let noun = if n == 1 {
        noun.to_string()
    } else if let Some(stem) = noun.strip_suffix('y').filter(|stem| !stem.ends_with(['a', 'e', 'o'])) {
        format!("{stem}ies")
    } else {
        format!("{noun}s")
    };
    format!("{} {noun}", count(n))
}

/// `1, 4–7` from ascending numbers; `between` separates the runs.
pub fn ranges(numbers: &[usize], between: &str) -> String {
    let mut runs: Vec<(usize, usize)> = Vec::new();
    for &n in numbers {
        match runs.last_mut() {
            Some((_, last)) if *last + 1 == n => *last = n,
            Some((_, last)) if *last == n => {}
            _ => runs.push((n, n)),
        }
    }
    let words = runs.into_iter().map(|(from, to)| match to - from {
        0 => from.to_string(),
        1 => format!("{from}{between}{to}"),
        _ => format!("{from}–{to}"),
    });
    words.collect::<Vec<_>>().join(between)
}

/// Rounds parts to `decimals` so that the rounded parts add up to the rounded whole: the largest
/// remainders take what is left over. Returns integers in units of the last decimal.
pub fn round_to_sum(parts: &[f64], decimals: i32) -> Vec<i64> {
    let scale = 10f64.powi(decimals);
    let scaled: Vec<f64> = parts.iter().map(|part| part * scale).collect();
    let whole = scaled.iter().sum::<f64>().round() as i64;
    let mut rounded: Vec<i64> = scaled.iter().map(|part| part.floor() as i64).collect();
    let missing = whole - rounded.iter().sum::<i64>();
    let mut order: Vec<usize> = (0..parts.len()).collect();
    order.sort_by(|&a, &b| {
        let rest = |i: usize| scaled[i] - scaled[i].floor();
        rest(b).total_cmp(&rest(a)).then(a.cmp(&b))
    });
    for &index in order.iter().take(usize::try_from(missing).unwrap_or(0)) {
        rounded[index] += 1;
    }
    rounded
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn minus_is_real_and_zero_has_no_sign() {
        assert_eq!(fixed(-1234.5, 1), "−1\u{202f}234.5");
        assert_eq!(fixed(-0.001, 2), "0.00");
        assert_eq!(signed(0.001, 2), "0.00");
        assert_eq!(signed(0.4, 1), "+0.4");
        assert_eq!(fixed(f64::NAN, 2), "–");
    }

    #[test]
    fn significant_digits_change_to_powers_of_ten_far_from_one() {
        assert_eq!(significant(1.2345e-20, 3), "1.23×10⁻²⁰");
        assert_eq!(significant(0.00123, 2), "0.0012");
        assert_eq!(significant(999.96, 4), "1\u{202f}000");
    }

    #[test]
    fn short_numbers_have_no_zeros_to_spare() {
        assert_eq!(short(2.0), "2");
        assert_eq!(short(5.2), "5.2");
        assert_eq!(short(500.0), "500");
    }

    #[test]
    fn thicknesses_take_their_unit() {
        assert_eq!(thickness(20.0), "20\u{a0}nm");
        assert_eq!(thickness(3500.0), "3.5\u{a0}µm");
        assert_eq!(thickness(350_000.0), "350\u{a0}µm");
        assert_eq!(thickness(62.126), "62.13\u{a0}nm");
    }

    #[test]
    fn rounded_parts_add_up() {
        let parts = [0.335, 0.335, 0.33, 99.0];
        assert_eq!(round_to_sum(&parts, 2).iter().sum::<i64>(), 10_000);
        let with_negative = [10.004, -0.004, 0.0];
        assert_eq!(round_to_sum(&with_negative, 2).iter().sum::<i64>(), 1000);
    }

    #[test]
    fn runs_of_numbers_are_short() {
        assert_eq!(ranges(&[1, 2, 5, 6, 7, 9], ", "), "1, 2, 5–7, 9");
        assert_eq!(ranges(&[], ", "), "");
    }

    #[test]
    fn doping_reads_as_in_the_file() {
        assert_eq!(doping(2e18), "2e18");
        assert_eq!(doping(1.5e17), "1.5e17");
    }
}
