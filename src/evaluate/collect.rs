//! What of the light absorbed in a junction's layers its contacts get.

use crate::carriers::collection::Stretch;
use crate::evaluate::lit::Lit;
use crate::evaluate::transport::{Carrying, Lack};
use crate::numerics::quadrature::{linear_along, linear_at};

/// Shares absorbed below this are not followed: nothing of a current would show.
const FAINT: f64 = 1e-12;

/// Distance of the points at which collection is worked out, as a share of the wavelength: a fringe
/// of 5 µm of gallium arsenide has five of them.
const NEAREST: f64 = 0.005;

/// Shares absorbed above this tell how well a junction collects.
const TELLING: f64 = 1e-9;

/// Collected shares of the light on the open front.
#[derive(Clone, Debug, Default)]
pub(super) struct Collected {
    /// By wavelength, in each row of [`Lit::rows`]; `None` where it is all that is absorbed.
    pub(super) rows: Vec<Option<Vec<f64>>>,
    /// Of what a junction absorbs, by wavelength; `None` where it is all.
    pub(super) efficiency: Vec<Option<Vec<f64>>>,
}

/// Integrates collection probability times absorption over the depth of every layer that is
/// followed: `EQE(λ) = Σ ∫ g(z, λ) φ(z) dz`, in closed form. A junction whose optics know no depth
/// becomes [`Carrying::Lacking`].
///
/// What is collected of the absorbed changes little from point to point, fringes included, and is
/// linear between wavelengths [`NEAREST`] apart; what is absorbed keeps its own grid.
pub(super) fn collected(lit: &mut Lit) -> Collected {
    let mut rows: Vec<Option<Vec<f64>>> = vec![None; lit.rows.len()];
    let junctions = lit.gap_ev.len();
    let is_followed = |junction: usize| matches!(lit.carrying[junction], Carrying::Followed(_));
    let own: Vec<usize> = (0..junctions)
        .filter(|&junction| is_followed(junction))
        .flat_map(|junction| lit.own_rows(junction))
        .collect();
    let kept = samples(lit, &own);
    let places: Vec<f64> = kept.iter().map(|&at| lit.wavelength_m[at]).collect();
    let profiles = if own.is_empty() { Vec::new() } else { lit.optics.profiles(&own, &places) };
    let mut depthless = Vec::new();
    for (&row, profiles) in own.iter().zip(&profiles) {
        let (layer, Some(junction)) = lit.rows[row] else { continue };
        let Carrying::Followed(transport) = &lit.carrying[junction] else { continue };
        let Some(profiles) = profiles else {
            depthless.push((junction, layer));
            continue;
        };
        let stretches =
            transport.collection.iter().find(|(index, _)| *index == layer).map_or(&[][..], |(_, all)| all);
        let absorbed = &lit.shares.absorbed[row];
        let mut last = None;
        let ratios: Vec<Option<f64>> = kept
            .iter()
            .zip(profiles)
            .map(|(&at, profile)| {
                if absorbed[at] > FAINT {
                    let part = |stretch: &Stretch| {
                        stretch.collected(|rate, from, to| profile.weighted(rate, from, to))
                    };
                    let sum: f64 = stretches.iter().map(part).sum();
                    last = Some((sum / absorbed[at]).clamp(0.0, 1.0));
                }
                last
            })
            .collect();
        // Before the first that tells as there.
        let first = ratios.iter().flatten().next().copied().unwrap_or(1.0);
        let ratios: Vec<f64> = ratios.into_iter().map(|ratio| ratio.unwrap_or(first)).collect();
        let along = linear_along(&places, &ratios, &lit.wavelength_m);
        let end = ratios.last().copied().unwrap_or(1.0);
        let beyond = places.last().copied().unwrap_or(f64::INFINITY);
        let share = lit.wavelength_m.iter().zip(along).zip(absorbed);
        rows[row] = Some(
            share.map(|((&at, ratio), absorbed)| absorbed * if at > beyond { end } else { ratio }).collect(),
        );
    }
    for (junction, layer) in depthless {
        lit.carrying[junction] = Carrying::Lacking(Lack::Depth(layer));
        for row in lit.own_rows(junction).collect::<Vec<usize>>() {
            rows[row] = None;
        }
    }
    let efficiency = (0..junctions)
        .map(|junction| {
            let own: Vec<usize> = lit.own_rows(junction).collect();
            own.iter().any(|&row| rows[row].is_some()).then(|| efficiency(lit, &own, &rows))
        })
        .collect();
    Collected { rows, efficiency }
}

/// Points of the grid at which collection is worked out: the first, then no nearer than
/// [`NEAREST`], up to the last where one of `rows` absorbs anything.
fn samples(lit: &Lit, rows: &[usize]) -> Vec<usize> {
    let points = &lit.wavelength_m;
    let absorbs = |at: &usize| rows.iter().any(|&row| lit.shares.absorbed[row][*at] > FAINT);
    let end = (0..points.len()).rev().find(absorbs).unwrap_or(0);
    let mut kept: Vec<usize> = Vec::new();
    for at in 0..=end.min(points.len().saturating_sub(1)) {
        if kept.last().is_none_or(|&last| points[at] - points[last] >= NEAREST * points[at] || at == end) {
            kept.push(at);
        }
    }
    kept
}

/// Collected over absorbed, by wavelength; where too little is absorbed to tell, as at the nearest
/// shorter wavelength that tells.
fn efficiency(lit: &Lit, own: &[usize], rows: &[Option<Vec<f64>>]) -> Vec<f64> {
    let ratio = |at: usize| {
        let absorbed: f64 = own.iter().map(|&row| lit.shares.absorbed[row][at]).sum();
        let part = |&row: &usize| rows[row].as_ref().map_or(lit.shares.absorbed[row][at], |row| row[at]);
        let collected: f64 = own.iter().map(part).sum();
        (absorbed > TELLING).then(|| (collected / absorbed).clamp(0.0, 1.0))
    };
    let points = lit.wavelength_m.len();
    let mut last = (0..points).find_map(ratio).unwrap_or(1.0);
    (0..points)
        .map(|at| {
            last = ratio(at).unwrap_or(last);
            last
        })
        .collect()
}

impl Collected {
    /// How much of what `junction` absorbs is collected, at vacuum wavelengths in m; held beyond
    /// both ends.
    pub(super) fn efficiency_at(&self, junction: usize, grid_m: &[f64], wavelength_m: &[f64]) -> Vec<f64> {
        let Some(efficiency) = &self.efficiency[junction] else { return vec![1.0; wavelength_m.len()] };
        let (Some(&first), Some(&last)) = (grid_m.first(), grid_m.last()) else {
            return vec![1.0; wavelength_m.len()];
        };
        wavelength_m.iter().map(|at| linear_at(grid_m, efficiency, at.clamp(first, last))).collect()
    }
}
