//! Strain that adds up: layers that are each thin enough, and too many together.
//!
//! A misfit line at the bottom of a strained region is driven by the stress of everything above it
//! and held by the tension of the line it leaves behind. Written for strain times thickness the
//! force balance of Matthews and Blakeslee (J. Cryst. Growth 27, 118 (1974)) reads, for 60°
//! dislocations and any sequence of layers,
//! `|Σ f·h| = b (1 − ν/4)/(4π (1 + ν)) · (ln(H/b) + 1)`, `H` the whole thickness above the line;
//! for one layer it is their critical thickness. Layers between that fit add nothing but `H`.

use std::ops::RangeInclusive;

/// Strain times thickness that stays coherent in a region `height` thick, in the unit of `burgers`
/// and `height`; `poisson` is the (001) ratio. Never less than that of one Burgers vector.
pub fn coherent_strain_thickness(height: f64, poisson: f64, burgers: f64) -> f64 {
    let tension = burgers * (1.0 - 0.25 * poisson) / (4.0 * std::f64::consts::PI * (1.0 + poisson));
    tension * ((height / burgers).max(1.0).ln() + 1.0)
}

/// One layer of a region, in growth order.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Step {
    /// Relaxed mismatch to the lattice beneath; 0 where it counts as fitting.
    pub mismatch: f64,
    /// m.
    pub thickness_m: f64,
}

/// A region whose strain adds up.
#[derive(Clone, Debug, PartialEq)]
pub struct Region {
    /// Its layers, first and last strained by the sign that adds up.
    pub steps: RangeInclusive<usize>,
    /// Net Σ f·h, m; positive for layers that are too large.
    pub strain_thickness_m: f64,
    /// Σ h, m.
    pub height_m: f64,
}

/// The regions of `steps` with the largest net strain of either sign, in growth order. Strain of
/// the other sign in between is taken off; where it takes off everything, a new region begins.
pub fn regions(steps: &[Step]) -> Vec<Region> {
    let mut all: Vec<Region> = [1.0, -1.0].iter().flat_map(|sign| of_sign(steps, *sign)).collect();
    all.sort_by_key(|region| (*region.steps.start(), *region.steps.end()));
    all
}

fn of_sign(steps: &[Step], sign: f64) -> Vec<Region> {
    let mut found = Vec::new();
    let mut best: Option<Region> = None;
    let mut start: Option<usize> = None;
    let (mut sum, mut height) = (0.0, 0.0);
    for (index, step) in steps.iter().enumerate() {
        let adds = sign * step.mismatch * step.thickness_m;
        if start.is_none() {
            if adds <= 0.0 {
                continue;
            }
            start = Some(index);
        }
        sum += adds;
        height += step.thickness_m;
        if sum <= 0.0 {
            found.extend(best.take());
            (start, sum, height) = (None, 0.0, 0.0);
            continue;
        }
        if adds > 0.0
            && best.as_ref().is_none_or(|best| sum > best.strain_thickness_m.abs())
            && let Some(first) = start
        {
            best = Some(Region { steps: first..=index, strain_thickness_m: sign * sum, height_m: height });
        }
    }
    found.extend(best);
    found
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::growth::critical::{Cover, matthews_blakeslee};

    #[test]
    fn one_layer_is_the_critical_thickness_of_matthews_and_blakeslee() {
        // b 4.00 Å, ν 1/3, f 0.005: 219 Å (formula of the paper, worked out outside).
        let thickness = matthews_blakeslee(0.005, 1.0 / 3.0, 4.0, Cover::Free).expect("has a root");
        assert!((thickness - 219.0).abs() < 1.0);
        let allowed = coherent_strain_thickness(thickness, 1.0 / 3.0, 4.0);
        assert!((allowed / (0.005 * thickness) - 1.0).abs() < 1e-9, "{allowed}");
    }

    fn step(mismatch: f64, nm: f64) -> Step {
        Step { mismatch, thickness_m: nm * 1e-9 }
    }

    #[test]
    fn equal_signs_add_and_opposite_ones_cancel() {
        let wells: Vec<Step> = (0..40).map(|i| step(if i % 2 == 1 { 0.01 } else { 0.0 }, 10.0)).collect();
        let found = regions(&wells);
        assert_eq!(found.len(), 1);
        assert_eq!(found[0].steps, 1..=39);
        assert!((found[0].strain_thickness_m - 20.0 * 0.01 * 10e-9).abs() < 1e-18);
        assert!((found[0].height_m - 390e-9).abs() < 1e-15);

        let balanced: Vec<Step> =
            (0..40).map(|i| step(if i % 2 == 1 { 0.01 } else { -0.01 }, 10.0)).collect();
        let most = regions(&balanced).iter().map(|r| r.strain_thickness_m.abs()).fold(0.0, f64::max);
        assert!((most - 0.01 * 10e-9).abs() < 1e-18, "never more than one layer: {most}");
    }

    proptest::proptest! {
        /// No other run of layers has more net strain than the largest region found.
        #[test]
        fn nothing_larger_is_missed(signs in proptest::collection::vec(-3_i32..=3, 1..24)) {
            let steps: Vec<Step> = signs.iter().map(|s| step(f64::from(*s) * 1e-3, 5.0)).collect();
            let found = regions(&steps).iter().map(|r| r.strain_thickness_m.abs()).fold(0.0, f64::max);
            let mut most: f64 = 0.0;
            for first in 0..steps.len() {
                let mut sum = 0.0;
                for step in &steps[first..] {
                    sum += step.mismatch * step.thickness_m;
                    most = most.max(f64::abs(sum));
                }
            }
            proptest::prop_assert!((found - most).abs() < 1e-18, "{found} against {most}");
        }
    }
}
