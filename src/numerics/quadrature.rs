//! Integrals of piecewise linear functions, exact, and Gauss–Legendre for smooth ones.

/// `∫ f dx` for `f` linear between the points; 0 for fewer than two points.
pub fn integral(x: &[f64], f: &[f64]) -> f64 {
    x.windows(2).zip(f.windows(2)).map(|(x, f)| 0.5 * (x[1] - x[0]) * (f[0] + f[1])).sum()
}

/// `∫ f g dx` for `f` and `g` both linear between the points; exact for that product.
pub fn product_integral(x: &[f64], f: &[f64], g: &[f64]) -> f64 {
    let mut sum = 0.0;
    for i in 1..x.len().min(f.len()).min(g.len()) {
        let (f0, f1, g0, g1) = (f[i - 1], f[i], g[i - 1], g[i]);
        sum += (x[i] - x[i - 1]) * (f0 * (2.0 * g0 + g1) + f1 * (g0 + 2.0 * g1));
    }
    sum / 6.0
}

/// `f(x)` for `f` linear between ascending points, 0 outside them.
pub fn linear_at(x: &[f64], f: &[f64], at: f64) -> f64 {
    let above = x.partition_point(|&point| point <= at);
    match above {
        0 => 0.0,
        n if n == x.len() => match (x.last(), f.last()) {
            (Some(&end), Some(&value)) if at <= end => value,
            _ => 0.0,
        },
        n => f[n - 1] + (f[n] - f[n - 1]) * (at - x[n - 1]) / (x[n] - x[n - 1]),
    }
}

/// [`linear_at`] at many ascending places.
pub fn linear_along(x: &[f64], f: &[f64], places: &[f64]) -> Vec<f64> {
    let mut above = 0;
    places
        .iter()
        .map(|&at| {
            while above < x.len() && x[above] <= at {
                above += 1;
            }
            if above == 0 || above == x.len() {
                return linear_at(x, f, at);
            }
            let n = above;
            f[n - 1] + (f[n] - f[n - 1]) * (at - x[n - 1]) / (x[n] - x[n - 1])
        })
        .collect()
}

/// `∫ f dx` from `from` to `to` for `f` linear between ascending points and 0 outside them: the
/// ends are interpolated, never rounded to a point. 0 where `to <= from`.
pub fn integral_between(x: &[f64], f: &[f64], from: f64, to: f64) -> f64 {
    let mut sum = 0.0;
    let first = x.partition_point(|&point| point <= from).max(1);
    for i in first..x.len().min(f.len()) {
        let (x0, x1) = (x[i - 1].max(from), x[i].min(to));
        if x[i - 1] >= to {
            break;
        }
        if x1 > x0 {
            let slope = (f[i] - f[i - 1]) / (x[i] - x[i - 1]);
            let middle = f[i - 1] + slope * (0.5 * (x0 + x1) - x[i - 1]);
            sum += middle * (x1 - x0);
        }
    }
    sum
}

/// Nodes and weights of the four-point Gauss–Legendre rule on −1..1
/// (Abramowitz and Stegun, table 25.4): exact for polynomials of degree 7.
pub const GAUSS4: [(f64, f64); 4] = [
    (-0.861_136_311_594_052_6, 0.347_854_845_137_453_9),
    (-0.339_981_043_584_856_3, 0.652_145_154_862_546_1),
    (0.339_981_043_584_856_3, 0.652_145_154_862_546_1),
    (0.861_136_311_594_052_6, 0.347_854_845_137_453_9),
];

/// Nodes and weights of the eight-point rule, same source: exact for polynomials of degree 15.
pub const GAUSS8: [(f64, f64); 8] = [
    (-0.960_289_856_497_536_2, 0.101_228_536_290_376_26),
    (-0.796_666_477_413_626_7, 0.222_381_034_453_374_47),
    (-0.525_532_409_916_329, 0.313_706_645_877_887_3),
    (-0.183_434_642_495_649_8, 0.362_683_783_378_362),
    (0.183_434_642_495_649_8, 0.362_683_783_378_362),
    (0.525_532_409_916_329, 0.313_706_645_877_887_3),
    (0.796_666_477_413_626_7, 0.222_381_034_453_374_47),
    (0.960_289_856_497_536_2, 0.101_228_536_290_376_26),
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_product_of_two_lines_is_exact() {
        // ∫0..3 (1 + 2x)(5 − x) dx = 5·3 + 9·9/2 − 2·27/3 = 37.5, on an uneven grid.
        let x = [0.0, 0.4, 1.1, 3.0];
        let f = x.map(|x| 1.0 + 2.0 * x);
        let g = x.map(|x| 5.0 - x);
        assert!((product_integral(&x, &f, &g) - 37.5).abs() < 1e-12);
    }

    #[test]
    fn cuts_are_interpolated() {
        let x = [0.0, 1.0, 3.0];
        let f = [0.0, 1.0, 0.0];
        // Triangle: up to 2 it holds 0.5 + (1 + 0.5)/2.
        assert!((integral_between(&x, &f, 0.0, 2.0) - 1.25).abs() < 1e-15);
        assert!((integral_between(&x, &f, 0.5, 0.75) - 0.156_25).abs() < 1e-15);
        assert!((integral_between(&x, &f, -5.0, 50.0) - 1.5).abs() < 1e-15);
        assert_eq!(integral_between(&x, &f, 2.0, 1.0), 0.0);
        assert_eq!(integral_between(&x, &f, 4.0, 9.0), 0.0);
    }

    #[test]
    fn linear_interpolation_ends_at_zero() {
        let x = [1.0, 2.0];
        let f = [3.0, 5.0];
        assert_eq!(linear_at(&x, &f, 1.5), 4.0);
        assert_eq!(linear_at(&x, &f, 2.0), 5.0);
        assert_eq!(linear_at(&x, &f, 2.1), 0.0);
        assert_eq!(linear_at(&x, &f, 0.9), 0.0);
        assert_eq!(linear_along(&x, &f, &[0.9, 1.0, 1.5, 2.0, 2.1]), [0.0, 3.0, 4.0, 5.0, 0.0]);
    }

    #[test]
    fn four_points_integrate_degree_seven() {
        let value: f64 = GAUSS4.iter().map(|(x, w)| w * (x.powi(6) + x.powi(7))).sum();
        assert!((value - 2.0 / 7.0).abs() < 1e-14);
    }
}
