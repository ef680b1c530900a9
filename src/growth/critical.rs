//! Critical thickness: how thick a strained layer grows before dislocations pay off.

use crate::design::Design;
use crate::growth::{LayerGrowth, poisson_ratio};

/// What lies above a strained layer.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Cover {
    /// Nothing: one misfit line (K = 8).
    Free,
    /// Grown over: a pair of misfit lines, one at each face (K = 4).
    Buried,
}

impl Cover {
    fn factor(self) -> f64 {
        match self {
            Self::Free => 8.0,
            Self::Buried => 4.0,
        }
    }
}

/// Poisson ratio of a (001) film whose elastic constants nobody gave: that of most cubic
/// semiconductors lies between 0.27 (Si, Ge) and 0.36 (InP, InAs).
pub const USUAL_POISSON: f64 = 1.0 / 3.0;

/// How thick a layer may be on the lattice beneath it, m; `None` where no thickness is safe.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Critical {
    /// Matthews and Blakeslee, uncovered: every layer is while it grows.
    pub safe_m: Option<f64>,
    /// People and Bean.
    pub hopeless_m: Option<f64>,
    /// One step of the lattice, the Burgers vector a/√2 of the lattice beneath.
    pub step_m: f64,
    /// The (001) Poisson ratio it was worked out with.
    pub poisson: f64,
}

impl Critical {
    /// Of the layer at `index`; `None` where there is nothing to compare or nothing to relax.
    pub fn of(design: &Design, states: &[Option<LayerGrowth>], index: usize) -> Option<Self> {
        let state = states[index]?;
        let (material, temperature_k) = (design.layers[index].material.as_ref()?, state.growth_temperature_k);
        let ground = design.layers[state.beneath?].material.as_ref()?;
        let burgers = ground.lattice_constant(temperature_k)? / std::f64::consts::SQRT_2;
        let lattice = material.lattice_constant(temperature_k)?;
        let mismatch = state.mismatch_at_growth;
        if mismatch == 0.0 {
            return None;
        }
        let poisson = material.elastic.map_or(USUAL_POISSON, poisson_ratio);
        let metres = |angstrom: f64| angstrom * 1e-10;
        Some(Self {
            safe_m: matthews_blakeslee(mismatch, poisson, burgers, Cover::Free).map(metres),
            hopeless_m: people_bean(mismatch, poisson, burgers, lattice).map(metres),
            step_m: metres(burgers),
            poisson,
        })
    }
}

/// Critical thickness in the unit of `burgers` by force balance on a 60° dislocation:
/// the larger root of
/// `h = b (1 − ν cos²θ) / (K π |f| (1 + ν) cos λ) · (ln(h/b) + 1)`, `cos θ = cos λ = 1/2`.
///
/// `mismatch` is the relaxed mismatch (sign does not matter), `poisson` the (001) ratio, `burgers`
/// the Burgers vector a/√2. `None` where no root above `burgers` exists: the mismatch is 0, or so
/// large that no thickness is safe.
/// Matthews and Blakeslee, J. Cryst. Growth 27, 118 (1974).
pub fn matthews_blakeslee(mismatch: f64, poisson: f64, burgers: f64, cover: Cover) -> Option<f64> {
    let cos = 0.5;
    let scale = (1.0 - poisson * cos * cos)
        / (cover.factor() * std::f64::consts::PI * mismatch.abs() * (1.0 + poisson) * cos);
    // With x = h/b: x = scale (ln x + 1). The line touches the curve at scale = 1, x = 1.
    fixed_point(scale, 1.0).map(|ratio| ratio * burgers)
}

/// The relaxed mismatch, ≥ 0, at which a layer of `thickness` (in the unit of `burgers`) is just
/// critical: [`matthews_blakeslee`] solved for the mismatch, which it is linear in. `None` for a
/// layer no thicker than `burgers`, to which the balance of forces does not apply.
pub fn critical_mismatch(thickness: f64, poisson: f64, burgers: f64, cover: Cover) -> Option<f64> {
    let ratio = thickness / burgers;
    let cos = 0.5;
    let at_one =
        (1.0 - poisson * cos * cos) / (cover.factor() * std::f64::consts::PI * (1.0 + poisson) * cos);
    (ratio > 1.0 && ratio.is_finite()).then(|| at_one * (ratio.ln() + 1.0) / ratio)
}

/// Upper estimate by energy balance, in the unit of `burgers` and `lattice`: the larger root of
/// `h = (1 − ν)/(1 + ν) · b²/(16 π √2 a f²) · ln(h/b)`.
///
/// `lattice` is the layer's lattice constant a, `burgers` the slip distance a/√2. `None` as for
/// [`matthews_blakeslee`]. People and Bean, Appl. Phys. Lett. 47, 322 (1985), with the erratum
/// 49, 229 (1986).
pub fn people_bean(mismatch: f64, poisson: f64, burgers: f64, lattice: f64) -> Option<f64> {
    let scale = (1.0 - poisson) / (1.0 + poisson) * burgers
        / (16.0 * std::f64::consts::PI * std::f64::consts::SQRT_2 * lattice * mismatch * mismatch);
    fixed_point(scale, 0.0).map(|ratio| ratio * burgers)
}

/// The larger root x of `x = scale (ln x + offset)`, `None` without one.
///
/// `x − scale (ln x + offset)` is convex with its least value at `x = scale`; Newton from the far
/// side falls monotonically onto the larger root.
fn fixed_point(scale: f64, offset: f64) -> Option<f64> {
    if !scale.is_finite() || scale <= 0.0 || scale - scale * (scale.ln() + offset) > 0.0 {
        return None;
    }
    let mut x = 2.0 * scale * (scale.ln().max(0.0) + offset.max(0.0) + 1.0);
    for _ in 0..60 {
        let slope = 1.0 - scale / x;
        if slope <= 0.0 {
            return Some(x);
        }
        let next = x - (x - scale * (x.ln() + offset)) / slope;
        if !next.is_finite() || next <= 0.0 {
            return None;
        }
        if ((next - x) / x).abs() < 1e-13 {
            return Some(next);
        }
        x = next;
    }
    Some(x)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn force_balance_at_half_a_percent() {
        // b 4.00 Å, ν 1/3, f 0.005, formula of Matthews and Blakeslee (1974): 219 Å and 512 Å.
        let single = matthews_blakeslee(0.005, 1.0 / 3.0, 4.0, Cover::Free).expect("has a root");
        let buried = matthews_blakeslee(-0.005, 1.0 / 3.0, 4.0, Cover::Buried).expect("has a root");
        assert!((single - 219.0).abs() < 1.0, "{single}");
        assert!((buried - 512.0).abs() < 1.0, "{buried}");
    }

    #[test]
    fn energy_balance_of_silicon_germanium() {
        // The paper's own reduction for Ge_xSi_(1−x) on Si, h = (1.9e-2 Å/f²) ln(h/4 Å)
        // (erratum of 1986, from memory): prefactor within 25 %, so the thickness is too.
        let f = 0.01;
        let mut printed: f64 = 1000.0;
        for _ in 0..200 {
            printed = 1.9e-2 / (f * f) * (printed / 4.0).ln();
        }
        let ours = people_bean(f, 0.28, 3.84, 5.43).expect("has a root");
        assert!((ours / printed - 1.0).abs() < 0.25, "{ours} against {printed}");
    }

    #[test]
    fn energy_balance_lies_above_force_balance_at_small_mismatch() {
        for f in [0.001, 0.003, 0.006, 0.01] {
            let force = matthews_blakeslee(f, 0.31, 4.0, Cover::Free).expect("has a root");
            let energy = people_bean(f, 0.31, 4.0, 5.65).expect("has a root");
            assert!(energy > force, "f {f}: {energy} against {force}");
        }
    }

    #[test]
    fn no_root_for_none_and_for_hopeless_mismatch() {
        assert_eq!(matthews_blakeslee(0.0, 0.31, 4.0, Cover::Free), None);
        assert_eq!(matthews_blakeslee(0.3, 0.31, 4.0, Cover::Free), None);
        assert_eq!(people_bean(0.0, 0.31, 4.0, 5.65), None);
        assert_eq!(people_bean(0.3, 0.31, 4.0, 5.65), None);
    }

    #[test]
    fn roots_satisfy_their_equation() {
        for scale in [1.001, 1.5, 10.0, 1e3, 1e6] {
            let x = fixed_point(scale, 1.0).expect("has a root");
            assert!((x - scale * (x.ln() + 1.0)).abs() < 1e-9 * x, "scale {scale}");
            assert!(x >= scale * (1.0 - 1e-12), "the larger root");
        }
    }

    #[test]
    fn critical_mismatch_is_the_inverse() {
        for mismatch in [0.0005, 0.003, 0.01] {
            let thick = matthews_blakeslee(mismatch, 0.31, 4.0, Cover::Free).expect("has a root");
            let back = critical_mismatch(thick, 0.31, 4.0, Cover::Free).expect("thick enough");
            assert!((back / mismatch - 1.0).abs() < 1e-9, "{back} for {mismatch}");
        }
        assert_eq!(critical_mismatch(3.0, 0.31, 4.0, Cover::Free), None);
    }
}
