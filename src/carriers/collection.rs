//! How much of the light absorbed in a layer becomes current.

/// Falling exponentials are followed over this many lengths: `exp(−60)` is below the rounding of
/// the whole by ten orders, and `exp(60)` is a number.
const LENGTHS: f64 = 60.0;

/// `amplitude·exp(−distance/length)`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Decay {
    /// At the face it falls from.
    pub amplitude: f64,
    /// m, > 0.
    pub length_m: f64,
}

impl Decay {
    /// Nothing.
    pub const NONE: Self = Self { amplitude: 0.0, length_m: 1.0 };
}

/// Collection probability over a stretch of a layer, depth `z` from the layer's sunward face:
/// `even + falling from `from` on + rising up to `to``.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Stretch {
    /// m.
    pub from_m: f64,
    /// m, ≥ `from_m`.
    pub to_m: f64,
    /// The same everywhere.
    pub even: f64,
    /// `exp(−(z − from)/L)`.
    pub falling: Decay,
    /// `exp(−(to − z)/L)`.
    pub rising: Decay,
}

impl Stretch {
    /// Every carrier is collected, as in a depletion region.
    pub fn complete(from_m: f64, to_m: f64) -> Self {
        Self { from_m, to_m, even: 1.0, falling: Decay::NONE, rising: Decay::NONE }
    }

    /// The probability at the depth `z_m`, which lies inside.
    pub fn at(&self, z_m: f64) -> f64 {
        self.even
            + self.falling.amplitude * (-(z_m - self.from_m) / self.falling.length_m).exp()
            + self.rising.amplitude * (-(self.to_m - z_m) / self.rising.length_m).exp()
    }

    /// `∫ g φ dz` over the stretch: what is collected of the light absorbed here.
    ///
    /// `weighted(rate, from, to)` is `∫ g(z) exp(rate·(z − from)) dz` of the absorption per depth
    /// `g`, with `rate·(to − from)` within ±60.
    pub fn collected(&self, weighted: impl Fn(f64, f64, f64) -> f64) -> f64 {
        let (from, to) = (self.from_m, self.to_m);
        if to <= from {
            return 0.0;
        }
        let mut sum = 0.0;
        if self.even != 0.0 {
            sum += self.even * weighted(0.0, from, to);
        }
        let Decay { amplitude, length_m } = self.falling;
        if amplitude != 0.0 {
            let end = to.min(from + LENGTHS * length_m);
            sum += amplitude * weighted(-length_m.recip(), from, end);
        }
        let Decay { amplitude, length_m } = self.rising;
        if amplitude != 0.0 {
            let start = from.max(to - LENGTHS * length_m);
            let fade = (-(to - start) / length_m).exp();
            sum += amplitude * fade * weighted(length_m.recip(), start, to);
        }
        sum
    }
}

/// Light that fades as `entering·α·exp(−αz)`: `∫ g exp(rate (z − from)) dz` of it, for
/// [`Stretch::collected`]. Finite where `α = rate`, which is a removable singularity.
pub fn fading(entering: f64, alpha_per_m: f64) -> impl Fn(f64, f64, f64) -> f64 {
    move |rate, from, to| {
        let width = to - from;
        let exponent = (rate - alpha_per_m) * width;
        let integral = if exponent.abs() < 1e-9 {
            width * (1.0 + 0.5 * exponent)
        } else {
            exponent.exp_m1() / exponent * width
        };
        entering * alpha_per_m * (-alpha_per_m * from).exp() * integral
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::carriers::region::{Region, Slab};

    /// cm, cm2/s, cm/s to SI.
    fn slab(thickness_cm: f64, length_cm: f64, diffusion_cm2_per_s: f64, velocity_cm_per_s: f64) -> Slab {
        Slab {
            thickness_m: 1e-2 * thickness_cm,
            diffusion_m2_per_s: 1e-4 * diffusion_cm2_per_s,
            length_m: 1e-2 * length_cm,
            ln_minority: 0.0,
            far_velocity_m_per_s: 1e-2 * velocity_cm_per_s,
        }
    }

    fn base_alone(slab: Slab, alpha_per_m: f64) -> f64 {
        Region::solve(&[slab]).pieces[0].below_junction(0.0).collected(fading(1.0, alpha_per_m))
    }

    #[test]
    fn the_three_regions_of_hovel() {
        // Values: closed forms of Hovel, Semiconductors and Semimetals 11 (1975), and finite
        // differences: emitter 0.1 µm, L 0.5 µm, D 5 cm2/s, S 1e4 cm/s; depletion 0.1 µm; base
        // 3 µm, L 10 µm, D 100 cm2/s, S 1e3 cm/s; α = 1e4 /cm.
        let emitter = Region::solve(&[slab(1e-5, 5e-5, 5.0, 1e4)]).pieces[0].above_junction(0.0);
        let depletion = Stretch::complete(1e-7, 2e-7);
        let base = Region::solve(&[slab(3e-4, 1e-3, 100.0, 1e3)]).pieces[0].below_junction(2e-7);
        for (part, expected) in [(emitter, 0.092_983), (depletion, 0.086_107), (base, 0.762_920)] {
            let collected = part.collected(fading(1.0, 1e6));
            assert!((collected - expected).abs() < 1e-6, "{collected} instead of {expected}");
        }
    }

    #[test]
    fn a_thick_base_collects_the_share_of_its_length() {
        // αL/(1 + αL) = 5/6 for α = 1e4 /cm, L = 5 µm (closed form), in a base of 20 and of 2000
        // diffusion lengths alike.
        for thickness_cm in [1e-2, 1.0] {
            let collected = base_alone(slab(thickness_cm, 5e-4, 100.0, 1e7), 1e6);
            assert!((collected - 5.0 / 6.0).abs() < 1e-9, "{collected}");
        }
        // αL = 1: the closed form divides by zero, the integral is 1/2.
        let collected = base_alone(slab(1.0, 1e-4, 100.0, 1e7), 1e6);
        assert!((collected - 0.5).abs() < 1e-12, "{collected}");
    }

    #[test]
    fn the_singularity_at_one_is_removable() {
        // φ = cosh(u/L)/cosh(d/L), S = 0, d = L = 1/α: ∫ αe^{−αz} cosh((d − z)/L) dz/cosh 1
        // = [e/2 + (e⁻¹/4)(1 − e⁻²)·e^{…}] worked out: (1/2)(e·(1 − e⁻²)/2 + e⁻¹)/cosh 1.
        let one: f64 = 1.0;
        let expected = 0.5 * (one.exp() * (1.0 - (-2.0f64).exp()) / 2.0 + (-one).exp()) / one.cosh();
        for off in [0.0, 1e-14, -1e-12, 1e-9, 1e-7] {
            let collected = base_alone(slab(1e-4, 1e-4, 10.0, 0.0), 1e6 * (1.0 + off));
            assert!((collected - expected).abs() < 1e-7, "{off}: {collected} instead of {expected}");
        }
        let exact = base_alone(slab(1e-4, 1e-4, 10.0, 0.0), 1e6);
        assert!((exact - expected).abs() < 1e-14, "{exact} instead of {expected}");
    }

    #[test]
    fn nothing_is_collected_twice() {
        // Any slab, any absorption: between 0 and what is absorbed.
        for length in [1e-9, 1e-7, 1e-5, 1e-3, 10.0] {
            for velocity in [0.0, 1.0, 1e4, 1e12] {
                for alpha in [1.0, 1e3, 1e6, 1e9] {
                    let slab = Slab { length_m: length, ..slab(0.03, 1.0, 3.0, velocity) };
                    let collected = base_alone(slab, alpha);
                    let absorbed = -(-alpha * 3e-4).exp_m1();
                    assert!(
                        collected >= 0.0 && collected <= absorbed * (1.0 + 1e-12),
                        "{collected} {absorbed}"
                    );
                }
            }
        }
    }
}
