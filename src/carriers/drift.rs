//! Undoped absorbers between contacts: carriers drift in an even field.

use crate::carriers::collection::{Decay, Stretch};

/// An undoped absorber in an even field.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Drift {
    /// m, > 0.
    pub thickness_m: f64,
    /// How far an electron drifts before it is lost, `μ_n τ_n F`, m.
    pub electron_m: f64,
    /// The same of a hole.
    pub hole_m: f64,
    /// Whether electrons leave at the face towards the sun.
    pub electrons_sunward: bool,
}

impl Drift {
    /// Collection probability over the absorber, which begins at the depth `from_m` of its layer.
    ///
    /// Of a pair born at `z` the carrier on its way to the face towards the sun, with the drift
    /// length `a`, induces `(a/d)(1 − exp(−z/a))`, the other with `b`
    /// `(b/d)(1 − exp(−(d − z)/b))`: Hecht, Z. Phys. 77, 235 (1932). 1 where both lengths are long.
    pub fn stretch(&self, from_m: f64) -> Stretch {
        let (sunward, rearward) = if self.electrons_sunward {
            (self.electron_m, self.hole_m)
        } else {
            (self.hole_m, self.electron_m)
        };
        // Beyond a million thicknesses the two terms are large numbers of one difference, which is 1
        // to a millionth.
        let held = |length: f64| length.clamp(1e-9 * self.thickness_m, 1e6 * self.thickness_m);
        let (a, b) = (held(sunward), held(rearward));
        let d = self.thickness_m;
        Stretch {
            from_m,
            to_m: from_m + d,
            even: (a + b) / d,
            falling: Decay { amplitude: -a / d, length_m: a },
            rising: Decay { amplitude: -b / d, length_m: b },
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::carriers::collection::fading;

    #[test]
    fn long_drift_lengths_collect_everything() {
        let drift = Drift { thickness_m: 5e-7, electron_m: 1e-2, hole_m: 1e-3, electrons_sunward: true };
        for z in [0.0, 1e-7, 5e-7] {
            assert!((drift.stretch(0.0).at(z) - 1.0).abs() < 1e-3);
        }
        let collected = drift.stretch(0.0).collected(fading(1.0, 1e7));
        assert!((collected - (1.0 - (-5f64).exp())).abs() < 1e-3);
        let endless = Drift { electron_m: f64::INFINITY, hole_m: f64::INFINITY, ..drift };
        assert!((endless.stretch(0.0).at(2e-7) - 1.0).abs() < 2e-6);
    }

    #[test]
    fn one_carrier_alone_has_its_textbook_curve() {
        // Light at the front: holes leave at once, electrons cross, (l/d)(1 − exp(−d/l)).
        let drift = Drift { thickness_m: 1e-6, electron_m: 4e-7, hole_m: 1e-12, electrons_sunward: false };
        let expected = 0.4 * (1.0 - (-2.5f64).exp());
        assert!((drift.stretch(0.0).at(0.0) - expected).abs() < 1e-5);
        // Born at the far face electrons are out at once and holes are lost.
        assert!(drift.stretch(0.0).at(1e-6).abs() < 1e-5);
    }
}
