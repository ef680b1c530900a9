//! Spectral results, thinned for figures without losing a photon.

use std::collections::BTreeMap;

use crate::design::{Condition, Design};
use crate::evaluate::lit::Lit;
use crate::numerics::constants::{CHARGE, HC_EV};
use crate::numerics::quadrature::integral_between;
use crate::results::Spectral;

/// Nearest distance of two points kept, as a share of the wavelength: 2.5 nm at 500 nm.
const NEAREST: f64 = 0.005;

/// Two points nearer than this are the two sides of a jump, relative.
const JUMP: f64 = 1e-12;

/// Share absorbed from which a junction's internal efficiency is told.
const TELLING: f64 = 1e-6;

/// Shares are given to this many steps per unit.
const STEPS: f64 = 1e7;

/// Spectral results under `condition`. `received` multiplies the light: concentration and
/// obliquity. The photon current at a point is its mean over the half intervals around it, so
/// that the trapezoidal sum over the points is the whole current.
pub(super) fn spectral(design: &Design, condition: &Condition, lit: &Lit, received: f64) -> Spectral {
    let kept = kept(lit);
    let wavelength_m: Vec<f64> = kept.iter().map(|&at| lit.wavelength_m[at]).collect();
    let pick = |share: &[f64]| -> Vec<f64> { kept.iter().map(|&at| rounded(share[at])).collect() };

    let flux = condition.light.photon_flux();
    let photon_current_ma_per_cm2_per_nm = (0..kept.len())
        .map(|i| {
            let from = if i == 0 { wavelength_m[0] } else { 0.5 * (wavelength_m[i - 1] + wavelength_m[i]) };
            let to = if i + 1 == kept.len() {
                wavelength_m[i]
            } else {
                0.5 * (wavelength_m[i] + wavelength_m[i + 1])
            };
            let photons = integral_between(&condition.light.wavelength_m, &flux, from, to);
            // A/m2 per m to mA/cm2 per nm.
            if to > from { received * CHARGE * photons / (to - from) * 1e-10 } else { 0.0 }
        })
        .collect();

    let mut absorptance: BTreeMap<String, Vec<f64>> = BTreeMap::new();
    for ((layer, _), share) in lit.rows.iter().zip(&lit.shares.absorbed) {
        if share.iter().any(|share| *share > 0.0) {
            absorptance.insert(design.layers[*layer].path.clone(), pick(share));
        }
    }
    let eqe = design
        .junctions
        .iter()
        .enumerate()
        .map(|(index, junction)| (junction.name.value.clone(), pick(&lit.collected_share(index))))
        .collect();
    let iqe = design
        .junctions
        .iter()
        .enumerate()
        .map(|(index, junction)| {
            let absorbed = lit.absorbed_share(index);
            let of = |(collected, absorbed): (f64, f64)| {
                if absorbed >= TELLING { (collected / absorbed).min(1.0) } else { 0.0 }
            };
            let shares = lit.collected_share(index).into_iter().zip(absorbed);
            (junction.name.value.clone(), pick(&shares.map(of).collect::<Vec<f64>>()))
        })
        .collect();
    Spectral {
        wavelength_nm: wavelength_m.iter().map(|wavelength| rounded(wavelength * 1e9)).collect(),
        photon_current_ma_per_cm2_per_nm,
        reflectance: pick(&lit.shares.reflected),
        eqe,
        iqe,
        absorptance,
    }
}

/// Indices of the points kept: both ends, both sides of every jump, and between them points no
/// nearer than [`NEAREST`]; nothing much beyond the longest edge, where nothing happens.
fn kept(lit: &Lit) -> Vec<usize> {
    let points = &lit.wavelength_m;
    let lowest_gap = lit.gap_ev.iter().copied().fold(f64::INFINITY, f64::min);
    let longest = (2.0 * HC_EV / lowest_gap).max(4000e-9);
    let end = points.partition_point(|&point| point <= longest);
    let is_jump = |i: usize| {
        let near = |a: usize, b: usize| points[b] - points[a] < JUMP * points[b];
        (i > 0 && near(i - 1, i)) || (i + 1 < points.len() && near(i, i + 1))
    };
    let mut kept: Vec<usize> = Vec::new();
    for i in 0..end {
        let far = kept.last().is_none_or(|&last| points[i] - points[last] >= NEAREST * points[i]);
        if far || i + 1 == end || is_jump(i) {
            kept.push(i);
        }
    }
    kept
}

fn rounded(value: f64) -> f64 {
    (value * STEPS).round() / STEPS
}
