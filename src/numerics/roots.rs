//! Roots of one variable, always inside their bracket.

/// Root of a function that changes sign between `low` and `high`, by Newton steps that fall back
/// to halving whenever they would leave the bracket or gain too little.
///
/// `value_and_slope` returns `f(x)` and `f'(x)`. Stops when the bracket or the step is below
/// `tolerance` or below the rounding of `x`. Without a sign change the end with the smaller
/// magnitude is returned.
///
/// Safeguarding after Dekker and Brent; see Press et al., Numerical Recipes, section 9.4.
pub fn newton_bracketed(
    mut value_and_slope: impl FnMut(f64) -> (f64, f64),
    low: f64,
    high: f64,
    tolerance: f64,
) -> f64 {
    let (f_low, _) = value_and_slope(low);
    if f_low == 0.0 {
        return low;
    }
    let (f_high, _) = value_and_slope(high);
    if f_high == 0.0 {
        return high;
    }
    if (f_low > 0.0) == (f_high > 0.0) {
        return if f_low.abs() < f_high.abs() { low } else { high };
    }
    // `below` keeps f < 0, `above` keeps f > 0, whichever of them lies to the left.
    let (mut below, mut above) = if f_low < 0.0 { (low, high) } else { (high, low) };
    let mut x = 0.5 * (low + high);
    let mut last_step = (high - low).abs();
    for _ in 0..200 {
        let (f, slope) = value_and_slope(x);
        if f == 0.0 {
            return x;
        }
        if f < 0.0 {
            below = x;
        } else {
            above = x;
        }
        let newton = x - f / slope;
        let (left, right) = (below.min(above), below.max(above));
        let gains = newton > left && newton < right && (newton - x).abs() < 0.5 * last_step;
        let next = if gains { newton } else { 0.5 * (left + right) };
        last_step = (next - x).abs();
        x = next;
        let floor = tolerance.max(2.0 * f64::EPSILON * x.abs());
        if last_step <= floor || right - left <= floor {
            break;
        }
    }
    x
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn finds_the_root_of_a_steep_exponential() {
        // exp(40 x) − 1e9 − x: the exponential decides, x = ln(1e9 + x)/40.
        let root =
            newton_bracketed(|x| ((40.0 * x).exp() - 1e9 - x, 40.0 * (40.0 * x).exp() - 1.0), 0.0, 10.0, 0.0);
        assert!((root - (1e9_f64 + root).ln() / 40.0).abs() < 1e-14);
    }

    #[test]
    fn stays_inside_where_newton_would_run_away() {
        // arctan is the standard case: from 3 plain Newton diverges.
        let root =
            newton_bracketed(|x: f64| ((x - 0.1).atan(), 1.0 / (1.0 + (x - 0.1).powi(2))), -20.0, 50.0, 0.0);
        assert!((root - 0.1).abs() < 1e-12);
    }

    #[test]
    fn returns_the_better_end_without_a_sign_change() {
        assert_eq!(newton_bracketed(|x| (x + 5.0, 1.0), 0.0, 1.0, 0.0), 0.0);
        assert_eq!(newton_bracketed(|x| (x, 1.0), 0.0, 1.0, 0.0), 0.0);
    }
}
