//! Blocks of wavelengths, and the elementary functions that work on them.
//!
//! Everything here is additions, multiplications and choices of bits in a fixed order: the
//! compiler puts as many lanes into one instruction as the machine has, and every machine gets
//! the same bits. Libraries of the platform differ in the last digit, fused operations too.

/// Wavelengths in one block: four registers of the widest machine, sixteen of the narrowest.
pub const LANES: usize = 32;

/// Places of a block an elementary function works on at once, a quarter of a block apart: one
/// register each, so that a machine has four chains of operations to fill its pipes with.
pub(super) const ABREAST: usize = 4;

/// How far apart they stand.
pub(super) const APART: usize = LANES / ABREAST;

/// One value for each of those places.
pub(super) type Four = [f64; ABREAST];

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

// π/2 in two parts, the first of 33 bits, so that its product with a whole number below 2²⁰ is
// exact (Cody and Waite, Software Manual for the Elementary Functions, 1980).
const QUARTER_A: f64 = f64::from_bits(0x3FF9_21FB_5440_0000);
const QUARTER_B: f64 = f64::from_bits(0x3DD0_B461_1A62_6331);

// Polynomials of least largest error behind the leading terms, 2e-18, 8e-17 and 3e-16 off on
// |x| ≤ π/4 and ≤ ln 2 / 2: Remez's exchange, by tests/reference/elementary.py (mpmath 1.3.0).
const SINE: [f64; 6] = [
    -0.166_666_666_666_666,
    0.008_333_333_333_316_465,
    -0.000_198_412_698_259_222_8,
    2.755_731_254_090_306e-6,
    -2.505_059_965_550_33e-8,
    1.588_855_299_275_093_8e-10,
];
const COSINE: [f64; 5] = [
    0.041_666_666_666_602_195,
    -0.001_388_888_887_826_607_8,
    2.480_158_096_797_309_3e-5,
    -2.755_556_644_768_805e-7,
    2.064_769_320_405_91e-9,
];
const EXPONENTIAL: [f64; 9] = [
    0.500_000_000_000_001_6,
    0.166_666_666_666_102_86,
    0.041_666_666_666_480_33,
    0.008_333_333_371_437_558,
    0.001_388_888_895_774_750_4,
    0.000_198_411_844_798_019_85,
    2.480_147_809_300_823e-5,
    2.763_530_273_627_719e-6,
    2.763_561_735_796_839_5e-7,
];

/// `a·b + c`: two roundings, the same on every machine, or one where `FUSED`.
#[inline(always)]
pub(super) fn product_sum<const FUSED: bool>(a: f64, b: f64, c: f64) -> f64 {
    if FUSED { a.mul_add(b, c) } else { a * b + c }
}

#[inline(always)]
pub(super) fn each(of: impl Fn(usize) -> f64) -> Four {
    // Not `from_fn`: of that the compiler makes no vectors.
    let mut four = [0.0; ABREAST];
    for p in 0..ABREAST {
        four[p] = of(p);
    }
    four
}

/// `Σ c_i x^i`, by Horner's rule.
#[inline(always)]
fn series<const FUSED: bool, const N: usize>(coefficients: &[f64; N], x: &Four) -> Four {
    let mut sum = [coefficients[N - 1]; ABREAST];
    let mut i = N - 1;
    while i > 0 {
        i -= 1;
        sum = each(|p| product_sum::<FUSED>(sum[p], x[p], coefficients[i]));
    }
    sum
}

/// `(sin x, cos x)` for `0 ≤ x ≤` [`LARGEST_ANGLE`], within 4e-16; larger angles are held there.
#[inline(always)]
pub(super) fn sin_cos<const FUSED: bool>(x: Four) -> (Four, Four) {
    let x = each(|p| if x[p] < LARGEST_ANGLE { x[p] } else { LARGEST_ANGLE });
    let shifted = each(|p| product_sum::<FUSED>(x[p], std::f64::consts::FRAC_2_PI, TO_WHOLE));
    let quarters = each(|p| shifted[p] - TO_WHOLE);
    let r = each(|p| product_sum::<FUSED>(-quarters[p], QUARTER_A, x[p]));
    let r = each(|p| product_sum::<FUSED>(-quarters[p], QUARTER_B, r[p]));
    let square = each(|p| r[p] * r[p]);
    let series_s = series::<FUSED, 6>(&SINE, &square);
    let series_c = series::<FUSED, 5>(&COSINE, &square);
    let sine = each(|p| product_sum::<FUSED>(r[p] * square[p], series_s[p], r[p]));
    let lead = each(|p| product_sum::<FUSED>(-0.5, square[p], 1.0));
    let cosine = each(|p| product_sum::<FUSED>(square[p] * square[p], series_c[p], lead[p]));
    let (mut sines, mut cosines) = ([0.0; ABREAST], [0.0; ABREAST]);
    for p in 0..ABREAST {
        // Odd quarters swap the two; the second half turns the sine, the middle half the cosine.
        let quarter = shifted[p].to_bits();
        let (s, c) = (sine[p].to_bits(), cosine[p].to_bits());
        let swapped = (s ^ c) & 0u64.wrapping_sub(quarter & 1);
        sines[p] = f64::from_bits((s ^ swapped) ^ ((quarter & 2) << 62));
        cosines[p] = f64::from_bits((c ^ swapped) ^ ((quarter.wrapping_add(1) & 2) << 62));
    }
    (sines, cosines)
}

/// `exp(−x)` for `x ≥ 0`, within `(1 + x)·6e-16` of itself and 6e-16 of 1; held at `exp(−700)`
/// beyond, so that nothing becomes subnormal.
#[inline(always)]
pub(super) fn decay<const FUSED: bool>(x: Four) -> Four {
    let x = each(|p| if x[p] < 700.0 { x[p] } else { 700.0 });
    let shifted = each(|p| product_sum::<FUSED>(x[p], std::f64::consts::LOG2_E, TO_WHOLE));
    let r = each(|p| product_sum::<FUSED>(shifted[p] - TO_WHOLE, std::f64::consts::LN_2, -x[p]));
    let rest = series::<FUSED, 9>(&EXPONENTIAL, &r);
    let sum = each(|p| 1.0 + product_sum::<FUSED>(r[p] * r[p], rest[p], r[p]));
    // Each halving takes one off the exponent.
    each(|p| f64::from_bits(sum[p].to_bits().wrapping_sub(shifted[p].to_bits() << 52)))
}

/// [`decay`] of a whole block.
#[inline(always)]
pub(super) fn decay_all<const FUSED: bool>(x: impl Fn(usize) -> f64, out: &mut Lane) {
    for l in 0..APART {
        let four = decay::<FUSED>(each(|p| x(l + p * APART)));
        for p in 0..ABREAST {
            out[l + p * APART] = four[p];
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn elementary_functions_agree_with_the_platform() {
        let one = |x: f64| {
            let (sine, cosine) = sin_cos::<false>([x; ABREAST]);
            assert!(sine == [sine[0]; ABREAST] && cosine == [cosine[0]; ABREAST]);
            (sine[0], cosine[0])
        };
        let fades = |x: f64| decay::<false>([x; ABREAST])[0];
        for i in 0..200_000u32 {
            let x = f64::from(i) * 0.0137;
            let (sine, cosine) = one(x);
            assert!((sine - x.sin()).abs() < 4e-16 && (cosine - x.cos()).abs() < 4e-16, "{x}");
            let y = f64::from(i) * 0.0034;
            let within = 6e-16 * (1.0 + y);
            assert!((fades(y) / (-y).exp() - 1.0).abs() < within, "{y}: {} {}", fades(y), (-y).exp());
            assert!((fades(y) - (-y).exp()).abs() < 6e-16, "{y}");
            let fused = sin_cos::<true>([x; ABREAST]);
            assert!((fused.0[0] - sine).abs() < 4e-16 && (fused.1[0] - cosine).abs() < 4e-16, "{x}");
        }
        assert!((one(1.234_567e6).0 - 1.234_567e6_f64.sin()).abs() < 4e-16);
        assert_eq!((fades(0.0), fades(f64::INFINITY)), (1.0, fades(700.0)));
        assert_eq!(one(0.0), (0.0, 1.0));
    }
}
