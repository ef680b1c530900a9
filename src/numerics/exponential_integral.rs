//! The exponential integral by which diffuse light fades.

/// Euler's constant.
const EULER: f64 = 0.577_215_664_901_532_9;

/// `2E₃(x) = 2 ∫₀¹ μ exp(−x/μ) dμ` for `x ≥ 0`, within 1e-14: the share of light from all
/// directions of a hemisphere (Lambertian) that gets straight through a layer of depth `x = αd`.
/// 1 at 0, 0 at infinity. Abramowitz and Stegun (1964), 5.1.11, 5.1.14 and 5.1.22.
pub fn diffuse_pass(x: f64) -> f64 {
    if x <= 0.0 || x.is_nan() {
        return 1.0;
    }
    if x > 700.0 {
        return 0.0;
    }
    if x <= 1.0 {
        // E₁ = −γ − ln x − Σ (−x)^k/(k k!); 2E₃ = (1 − x) exp(−x) + x² E₁.
        let (mut power, mut sum) = (1.0, 0.0);
        for k in 1..=20 {
            power *= -x / f64::from(k);
            sum += power / f64::from(k);
        }
        return (1.0 - x) * (-x).exp() + x * x * (-EULER - x.ln() - sum);
    }
    // E₃ = exp(−x) (1/(x + 3 −) 1·3/(x + 5 −) 2·4/(x + 7 −) …), from far out inwards.
    let terms = 120;
    let mut tail = 0.0;
    for k in (1..=terms).rev() {
        let k = f64::from(k);
        tail = k * (k + 2.0) / (x + 3.0 + 2.0 * k - tail);
    }
    2.0 * (-x).exp() / (x + 3.0 - tail)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn diffuse_light_fades_by_the_table() {
        // 2 scipy.special.expn(3, x), scipy 1.17.1.
        for (x, expected) in [
            (1e-06, 0.9999980000147384),
            (0.01, 0.9805531283693302),
            (0.3, 0.6000836531280287),
            (1.0, 0.2193839343955204),
            (2.5, 0.03259073875333767),
            (10.0, 7.097525106168764e-06),
            (60.0, 2.7818864615774387e-28),
        ] {
            assert!((diffuse_pass(x) / expected - 1.0).abs() < 1e-13, "{x}: {}", diffuse_pass(x));
        }
        assert_eq!((diffuse_pass(0.0), diffuse_pass(1e4)), (1.0, 0.0));
    }
}
