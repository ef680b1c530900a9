//! Blocks of wavelengths, and the elementary functions that work on them.
//!
//! Everything here is additions, multiplications and choices of bits in a fixed order: the
//! compiler puts as many lanes into one instruction as the machine has, and every machine gets
//! the same bits. Libraries of the platform differ in the last digit, fused operations too.

/// Wavelengths in one block: two registers of the widest machine, eight of the narrowest.
pub const LANES: usize = 16;

/// One value for each wavelength of a block.
pub(super) type Lane = [f64; LANES];

/// Real and imaginary part for each wavelength of a block.
#[derive(Clone, Copy, Debug)]
pub(super) struct Pair<'a> {
    pub(super) re: &'a Lane,
    pub(super) im: &'a Lane,
}

/// Adding this leaves the nearest whole number in the lowest bits: `1.5 · 2⁵²`.
const TO_WHOLE: f64 = 6_755_399_441_055_744.0;

/// Largest angle reduced without loss, rad: beyond 2²⁰ quarter turns the parts of π/2 below would
/// no longer multiply exactly. A film of 500 µm stays under 10⁵.
pub(super) const LARGEST_ANGLE: f64 = 1.6e6;

// π/2 in three parts, the first two of 33 bits, so that their product with a whole number below
// 2²⁰ is exact (Cody and Waite, Software Manual for the Elementary Functions, 1980).
const QUARTER_A: f64 = f64::from_bits(0x3FF9_21FB_5440_0000);
const QUARTER_B: f64 = f64::from_bits(0x3DD0_B461_1A60_0000);
const QUARTER_C: f64 = f64::from_bits(0x3BA3_198A_2E03_7073);

// ln 2 in two parts, the first of 32 bits.
const LN2_A: f64 = f64::from_bits(0x3FE6_2E42_FEE0_0000);
const LN2_B: f64 = f64::from_bits(0x3DEA_39EF_3579_3C76);

/// `1/n!`, by which the series below stay within 2e-16 on |x| ≤ π/4 and ≤ ln 2 / 2.
const fn inverse_factorial(n: u32) -> f64 {
    let (mut product, mut i) = (1.0, 2);
    while i <= n {
        product *= i as f64;
        i += 1;
    }
    1.0 / product
}

const SINE: [f64; 7] = [
    -inverse_factorial(3),
    inverse_factorial(5),
    -inverse_factorial(7),
    inverse_factorial(9),
    -inverse_factorial(11),
    inverse_factorial(13),
    -inverse_factorial(15),
];
const COSINE: [f64; 7] = [
    inverse_factorial(4),
    -inverse_factorial(6),
    inverse_factorial(8),
    -inverse_factorial(10),
    inverse_factorial(12),
    -inverse_factorial(14),
    inverse_factorial(16),
];
const EXPONENTIAL: [f64; 12] = [
    inverse_factorial(2),
    inverse_factorial(3),
    inverse_factorial(4),
    inverse_factorial(5),
    inverse_factorial(6),
    inverse_factorial(7),
    inverse_factorial(8),
    inverse_factorial(9),
    inverse_factorial(10),
    inverse_factorial(11),
    inverse_factorial(12),
    inverse_factorial(13),
];

/// `Σ c_i x^i`, by Horner's rule.
#[inline(always)]
fn series<const N: usize>(coefficients: &[f64; N], x: f64) -> f64 {
    let mut sum = coefficients[N - 1];
    let mut i = N - 1;
    while i > 0 {
        i -= 1;
        sum = sum * x + coefficients[i];
    }
    sum
}

/// `(sin x, cos x)` for `0 ≤ x ≤` [`LARGEST_ANGLE`], within 3e-16; larger angles are held there.
#[inline(always)]
pub(super) fn sin_cos(x: f64) -> (f64, f64) {
    let x = if x < LARGEST_ANGLE { x } else { LARGEST_ANGLE };
    let shifted = x * std::f64::consts::FRAC_2_PI + TO_WHOLE;
    let quarters = shifted - TO_WHOLE;
    let r = ((x - quarters * QUARTER_A) - quarters * QUARTER_B) - quarters * QUARTER_C;
    let square = r * r;
    let sine = r + r * square * series(&SINE, square);
    let cosine = (1.0 - 0.5 * square) + square * square * series(&COSINE, square);
    // Odd quarters swap the two; the second half turns the sine, the middle half the cosine.
    let quarter = shifted.to_bits();
    let swap = 0u64.wrapping_sub(quarter & 1);
    let (s, c) = (sine.to_bits(), cosine.to_bits());
    let sine = ((s & !swap) | (c & swap)) ^ ((quarter & 2) << 62);
    let cosine = ((c & !swap) | (s & swap)) ^ ((quarter.wrapping_add(1) & 2) << 62);
    (f64::from_bits(sine), f64::from_bits(cosine))
}

/// `exp(−x)` for `x ≥ 0`, within 4e-16 of itself; held at `exp(−700)` beyond, so that nothing
/// becomes subnormal.
#[inline(always)]
pub(super) fn decay(x: f64) -> f64 {
    let x = if x < 700.0 { x } else { 700.0 };
    let shifted = x * std::f64::consts::LOG2_E + TO_WHOLE;
    let halvings = shifted - TO_WHOLE;
    let r = (halvings * LN2_A - x) + halvings * LN2_B;
    let sum = 1.0 + (r + r * r * series(&EXPONENTIAL, r));
    // Each halving takes one off the exponent.
    f64::from_bits(sum.to_bits().wrapping_sub(shifted.to_bits() << 52))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn elementary_functions_agree_with_the_platform() {
        for i in 0..200_000u32 {
            let x = f64::from(i) * 0.0137;
            let (sine, cosine) = sin_cos(x);
            assert!((sine - x.sin()).abs() < 4e-16 && (cosine - x.cos()).abs() < 4e-16, "{x}");
            let y = f64::from(i) * 0.0034;
            assert!((decay(y) / (-y).exp() - 1.0).abs() < 6e-16, "{y}: {} {}", decay(y), (-y).exp());
        }
        assert!((sin_cos(1.234_567e6).0 - 1.234_567e6_f64.sin()).abs() < 4e-16);
        assert_eq!((decay(0.0), decay(f64::INFINITY)), (1.0, decay(700.0)));
        assert_eq!(sin_cos(0.0), (0.0, 1.0));
    }
}
