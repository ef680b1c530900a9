//! How far currents could be evened out, and by which thickness or gap.

use crate::check::Context;
use crate::check::absorption::{Point, integral, scale_for};
use crate::numerics::constants::{CHARGE, HC};
use crate::results::ConditionResult;

/// Light that could be moved to the limiting junction.
pub(super) struct Shift {
    /// Index of the junction that has too much.
    pub(super) from: usize,
    /// Index of the limiting junction.
    pub(super) to: usize,
    /// How far the giving junction is above the limiting one, as a share of the latter; for light
    /// that goes up, no more than twice what can be moved.
    pub(super) excess: f64,
    /// Current of both afterwards, mA/cm2.
    pub(super) balanced: f64,
    /// Current of the upper of the two afterwards, mA/cm2.
    pub(super) upper_target: f64,
}

impl Shift {
    /// Mismatch of all photocurrents once the light is moved, (max − min)/min.
    pub(super) fn mismatch_after(&self, condition: &ConditionResult) -> f64 {
        let mut currents: Vec<f64> =
            condition.junctions.iter().map(|junction| junction.photocurrent_ma_per_cm2).collect();
        if self.from < self.to {
            currents[self.from..=self.to].fill(self.balanced);
        } else {
            currents[self.from] -= self.balanced - currents[self.to];
            currents[self.to] = self.balanced;
        }
        let least = currents.iter().copied().fold(f64::INFINITY, f64::min);
        currents.iter().copied().fold(0.0, f64::max) / least - 1.0
    }
}

/// The shift that would help the limiting junction most; `None` where nothing can be moved.
pub(super) fn shift(condition: &ConditionResult) -> Option<Shift> {
    let limiting = condition.limiting_junction.as_ref()?;
    let to = condition.junctions.iter().position(|junction| junction.name == *limiting)?;
    let currents: Vec<f64> = condition.junctions.iter().map(|it| it.photocurrent_ma_per_cm2).collect();
    let low = currents[to];
    if low <= 0.0 || low.is_nan() {
        return None;
    }
    let down = (0..to).map(|from| {
        // Those in between pass on what they gain: the mean of all from here on is what each gets.
        let balanced = currents[from..=to].iter().sum::<f64>() / (to - from + 1) as f64;
        Shift { from, to, excess: currents[from] / low - 1.0, balanced, upper_target: balanced }
    });
    let up = (to + 1..currents.len()).map(|from| {
        let moved = (0.5 * (currents[from] - low)).min(within_reach(condition, to, from)).max(0.0);
        Shift { from, to, excess: 2.0 * moved / low, balanced: low + moved, upper_target: low + moved }
    });
    down.chain(up).reduce(|best, next| if next.excess > best.excess { next } else { best })
}

/// Current of `below` from photons that `above` could absorb itself, mA/cm2.
fn within_reach(condition: &ConditionResult, above: usize, below: usize) -> f64 {
    let edge_nm = HC / (condition.junctions[above].gap_ev * CHARGE) * 1e9;
    let spectral = &condition.spectral;
    let Some(eqe) = spectral.eqe.get(&condition.junctions[below].name) else { return 0.0 };
    integral(&spectral.wavelength_nm, |i| {
        let reached = spectral.wavelength_nm[i] <= edge_nm;
        if reached { eqe[i] * spectral.photon_current_ma_per_cm2_per_nm[i] } else { 0.0 }
    })
}

/// Thickness in m of the main absorber of junction `index` at which it makes `target` mA/cm2.
///
/// Estimate: what a junction absorbs of the light that reaches it is taken as 1 − exp(−Σ α d) over
/// its absorbers, one pass; the light that reaches it is what its quantum efficiency says.
/// `None` where no thickness within a factor of 30 does it.
pub(super) fn thickness_for(
    context: &Context,
    condition: &ConditionResult,
    index: usize,
    target: f64,
) -> Option<f64> {
    let facts = context.junctions.get(index)?;
    let (main, layer) = facts.main_absorber()?;
    let now = layer.thickness_m?;
    let result = condition.junctions.get(index)?;
    let eqe = condition.spectral.eqe.get(&result.name)?;
    let wavelengths = &condition.spectral.wavelength_nm;
    let depth = |wanted: bool, nm: f64| -> f64 {
        facts
            .absorbers()
            .filter(|(at, _)| (*at == main) == wanted)
            .filter_map(|(_, it)| {
                let absorption = it.material.as_ref()?.absorption(nm * 1e-9, condition.temperature_k);
                Some(absorption * it.thickness_m?)
            })
            .sum()
    };
    let depths: Vec<(f64, f64)> =
        wavelengths.iter().map(|nm| (depth(true, *nm), depth(false, *nm))).collect();
    let flux = &condition.spectral.photon_current_ma_per_cm2_per_nm;
    let points: Vec<Point> = depths
        .iter()
        .zip(eqe)
        .zip(flux)
        .map(|(((main, others), eqe), flux)| Point { main: *main, others: *others, eqe: *eqe, flux: *flux })
        .collect();
    scale_for(wavelengths, &points, target / result.photocurrent_ma_per_cm2).map(|scale| scale * now)
}

/// Gap in eV at which `junction` keeps `target` mA/cm2 of what it makes now.
pub(super) fn gap_for(condition: &ConditionResult, junction: &str, target: f64) -> Option<f64> {
    let spectral = &condition.spectral;
    let eqe = spectral.eqe.get(junction)?;
    let result = condition.junctions.iter().find(|it| it.name == junction)?;
    let share = |i: usize| eqe[i] * spectral.photon_current_ma_per_cm2_per_nm[i];
    let whole = integral(&spectral.wavelength_nm, share);
    let wanted = target / result.photocurrent_ma_per_cm2 * whole;
    let mut sum = 0.0;
    for (i, pair) in spectral.wavelength_nm.windows(2).enumerate() {
        let part = 0.5 * (share(i) + share(i + 1)) * (pair[1] - pair[0]);
        if part > 0.0 && sum + part >= wanted {
            let wavelength = pair[0] + (pair[1] - pair[0]) * (wanted - sum) / part;
            return Some(HC / (wavelength * 1e-9) / CHARGE);
        }
        sum += part;
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::results::{JunctionResult, Spectral};

    /// A condition of which only currents, gaps and quantum efficiencies count.
    fn condition(
        junctions: &[(&str, f64, f64)],
        limiting: &str,
        eqe: &[(&str, f64, f64)],
    ) -> ConditionResult {
        let wavelength_nm: Vec<f64> = (0..=600).map(|i| 300.0 + f64::from(i)).collect();
        let steps = |from: f64, to: f64| -> Vec<f64> {
            wavelength_nm.iter().map(|nm| if (from..=to).contains(nm) { 1.0 } else { 0.0 }).collect()
        };
        let eqe = eqe.iter().map(|(name, from, to)| ((*name).to_string(), steps(*from, *to))).collect();
        ConditionResult {
            name: "noon".into(),
            temperature_k: 298.15,
            limiting_junction: Some(limiting.into()),
            junctions: junctions
                .iter()
                .map(|(name, gap_ev, current)| JunctionResult {
                    name: (*name).into(),
                    gap_ev: *gap_ev,
                    photocurrent_ma_per_cm2: *current,
                    ..JunctionResult::default()
                })
                .collect(),
            spectral: Spectral {
                photon_current_ma_per_cm2_per_nm: vec![0.04; wavelength_nm.len()],
                wavelength_nm,
                eqe,
                ..Spectral::default()
            },
            ..ConditionResult::default()
        }
    }

    #[test]
    fn a_thick_top_cell_over_gallium_arsenide() {
        // 1.85 eV optically thick over GaAs, AM1.5G: 18.27 and 13.78 mA/cm2; thinning the top
        // lifts the current by 16 to 17 % (interpolated table, complete collection).
        let condition = condition(&[("top", 1.85, 18.27), ("bottom", 1.42, 13.78)], "bottom", &[]);
        let shift = shift(&condition).expect("can be moved");
        assert_eq!((shift.from, shift.to), (0, 1));
        let gain = shift.balanced / 13.78 - 1.0;
        assert!((0.16..0.17).contains(&gain), "{gain}");
    }

    #[test]
    fn surplus_of_a_germanium_junction_stays_where_it_is() {
        let junctions = [("top", 1.88, 16.0), ("middle", 1.42, 15.5), ("bottom", 0.66, 26.0)];
        let eqe = [("top", 300.0, 660.0), ("middle", 660.0, 870.0), ("bottom", 875.0, 900.0)];
        let shift = shift(&condition(&junctions, "middle", &eqe)).expect("top can give a little");
        assert_eq!((shift.from, shift.to), (0, 1));
        assert!((shift.excess - 0.5 / 15.5).abs() < 1e-12);
    }

    #[test]
    fn a_thin_top_cell_takes_back_only_what_passes_through_it() {
        // Below 660 nm the bottom makes 0.04·20 = 0.8 mA/cm2, up to the half-step of the grid.
        let junctions = [("top", 1.88, 12.0), ("bottom", 1.42, 18.0)];
        let eqe = [("top", 300.0, 640.0), ("bottom", 640.0, 870.0)];
        let shift = shift(&condition(&junctions, "top", &eqe)).expect("some passes");
        assert_eq!((shift.from, shift.to), (1, 0));
        assert!((shift.balanced - 12.8).abs() < 0.05, "{}", shift.balanced);
    }

    #[test]
    fn half_a_flat_spectrum_lies_above_its_middle() {
        // Flat in wavelength from 300 to 700 nm: half lies below 500 nm, hc/500 nm = 2.47968 eV.
        let condition = condition(&[("top", 1.7, 16.0)], "top", &[("top", 300.0, 700.0)]);
        let gap = gap_for(&condition, "top", 8.0).expect("inside");
        assert!((gap - 2.479_68).abs() < 5e-3, "{gap}");
    }
}
