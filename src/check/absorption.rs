//! What a change of thickness does to what a layer absorbs, by the law of Beer and Lambert: the
//! estimates behind the help of several rules.

/// One wavelength: optical depth of the layer that changes and of those that absorb for the same
/// purpose, share of the incident light they use now, incident photon current.
pub(super) struct Point {
    pub(super) main: f64,
    pub(super) others: f64,
    pub(super) eqe: f64,
    pub(super) flux: f64,
}

/// By what the main optical depth must be multiplied for the current to change by `ratio`.
///
/// Estimate: of the light that reaches the layers, 1 − exp(−Σ α d) is absorbed, one pass. Only ratios
/// count, so shading, collection and what happens above drop out. `None` beyond a factor of 30.
pub(super) fn scale_for(wavelengths: &[f64], points: &[Point], ratio: f64) -> Option<f64> {
    let made = |scale: f64| {
        integral(wavelengths, |i| {
            let Point { main, others, eqe, flux } = points[i];
            let before = -(-main - others).exp_m1();
            let after = -(-scale * main - others).exp_m1();
            flux * if before > 1e-9 { (eqe * after / before).min(1.0) } else { eqe }
        })
    };
    let wanted = ratio * made(1.0);
    let (mut low, mut high) = (1.0 / 30.0, 30.0);
    if !(made(low) < wanted && wanted < made(high)) {
        return None;
    }
    for _ in 0..40 {
        let middle = f64::sqrt(low * high);
        if made(middle) < wanted { low = middle } else { high = middle }
    }
    Some(f64::sqrt(low * high))
}

/// Trapezoid rule over `x` of the values `y(i)`.
pub(super) fn integral(x: &[f64], y: impl Fn(usize) -> f64) -> f64 {
    x.windows(2).enumerate().map(|(i, pair)| 0.5 * (y(i) + y(i + 1)) * (pair[1] - pair[0])).sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn thickness_by_the_law_of_beer_and_lambert() {
        // One wavelength band, depth 2: absorbs 1 − e^−2. For ratio r the depth is
        // −ln(1 − r(1 − e^−2)).
        let point = || Point { main: 2.0, others: 0.0, eqe: 0.5, flux: 1.0 };
        let wavelengths = [500.0, 501.0];
        for ratio in [0.5, 0.9, 1.1] {
            let scale = scale_for(&wavelengths, &[point(), point()], ratio).expect("reachable");
            let exact = -(1.0 - ratio * (1.0 - f64::exp(-2.0))).ln() / 2.0;
            assert!((scale - exact).abs() < 1e-8, "{scale} against {exact}");
        }
        assert!(scale_for(&wavelengths, &[point(), point()], 1.3).is_none(), "more than all of it");
    }
}
