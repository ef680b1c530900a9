//! What of the light absorbed in a junction's layers its contacts get.

use crate::evaluate::lit::Lit;
use crate::evaluate::transport::{Carrying, Lack};
use crate::numerics::quadrature::linear_at;

/// Shares absorbed below this are not followed: nothing of a current would show.
const FAINT: f64 = 1e-12;

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
pub(super) fn collected(lit: &mut Lit) -> Collected {
    let mut rows: Vec<Option<Vec<f64>>> = vec![None; lit.rows.len()];
    let junctions = lit.gap_ev.len();
    for junction in 0..junctions {
        let Carrying::Followed(transport) = &lit.carrying[junction] else { continue };
        let own: Vec<usize> = lit.own_rows(junction).collect();
        // Beyond what the junction absorbs there is nothing to follow.
        let end = (0..lit.wavelength_m.len())
            .rev()
            .find(|&at| own.iter().any(|&row| lit.shares.absorbed[row][at] > FAINT))
            .map_or(0, |at| at + 1)
            .max(1);
        let profiles = lit.optics.profiles(&own, &lit.wavelength_m[..end]);
        let mut followed = Vec::with_capacity(own.len());
        for (&row, profiles) in own.iter().zip(profiles) {
            let layer = lit.rows[row].0;
            let Some(profiles) = profiles else {
                followed.clear();
                break;
            };
            let stretches = transport.collection.iter().find(|(index, _)| *index == layer);
            let absorbed = &lit.shares.absorbed[row];
            let mut share = vec![0.0; absorbed.len()];
            for ((share, profile), &absorbed) in share.iter_mut().zip(&profiles).zip(absorbed) {
                if absorbed <= FAINT {
                    continue;
                }
                let sum: f64 = stretches.map_or(0.0, |(_, stretches)| {
                    stretches
                        .iter()
                        .map(|stretch| stretch.collected(|rate, from, to| profile.weighted(rate, from, to)))
                        .sum()
                });
                *share = sum.clamp(0.0, absorbed);
            }
            followed.push((row, share));
        }
        if followed.is_empty() {
            let layer = own.first().map_or(0, |&row| lit.rows[row].0);
            lit.carrying[junction] = Carrying::Lacking(Lack::Depth(layer));
            continue;
        }
        for (row, share) in followed {
            rows[row] = Some(share);
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
