//! Refractive index below the direct gap: S. Adachi, J. Appl. Phys. 61, 4869 (1987).

use crate::materials::constants::Constants;

/// `n² = A [f(E/E0) + ½ (E0/(E0 + Δ))^1.5 f(E/(E0 + Δ))] + B` with
/// `f(x) = (2 − √(1 + x) − √(1 − x))/x²`, for photon energies up to E0; A and B are linear in
/// composition.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Transparent {
    /// A.
    pub a: f64,
    /// B.
    pub b: f64,
    /// Δ, eV.
    pub split_off_ev: f64,
}

impl Transparent {
    /// The law of a material whose constants state it.
    pub fn of(constants: &Constants) -> Option<Self> {
        let get = |name: &str| constants.get(name);
        Some(Self { a: get("dispersion.a")?, b: get("dispersion.b")?, split_off_ev: get("split_off")? })
    }

    /// The weighted sum of some laws.
    pub fn mixed(parts: impl Iterator<Item = (f64, Self)>) -> Self {
        parts.fold(Self { a: 0.0, b: 0.0, split_off_ev: 0.0 }, |sum, (weight, law)| Self {
            a: sum.a + weight * law.a,
            b: sum.b + weight * law.b,
            split_off_ev: sum.split_off_ev + weight * law.split_off_ev,
        })
    }

    /// n at `energy_ev`, at most `e0_ev`. `None` where the law gives no index.
    pub fn n(self, energy_ev: f64, e0_ev: f64) -> Option<f64> {
        let upper = e0_ev + self.split_off_ev.max(0.0);
        let (own, split) = (energy_ev / e0_ev, energy_ev / upper);
        let squared = self.a * (shape(own) + 0.5 * (e0_ev / upper).powf(1.5) * shape(split)) + self.b;
        Some(squared.sqrt()).filter(|n| n.is_finite() && *n > 0.0)
    }
}

/// `f` of the law; its limit 1/4 at 0.
fn shape(x: f64) -> f64 {
    if x < 1e-3 {
        return 0.25;
    }
    let x = x.min(1.0);
    (2.0 - (1.0 + x).sqrt() - (1.0 - x).sqrt()) / (x * x)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn indium_phosphide_as_published() {
        // n 3.167 at 1.55 µm, 3.205 at 1.30 µm: G. D. Pettit, W. J. Turner, J. Appl. Phys. 36, 2081 (1965);
        // the law meets them within 0.01.
        let law = Transparent { a: 8.40, b: 6.60, split_off_ev: 0.11 };
        assert!((law.n(0.8, 1.35).expect("an index") - 3.167).abs() < 0.012);
        assert!((law.n(0.954, 1.35).expect("an index") - 3.205).abs() < 0.012);
    }
}
