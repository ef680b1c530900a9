//! How far currents could be evened out, and by which thickness or gap.

use crate::check::Context;
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
    // Only the ratio counts: shading and collection come out of the figure itself.
    let made = |scale: f64| {
        integral(wavelengths, |i| {
            let (main, others) = depths[i];
            let before = -(-main - others).exp_m1();
            let after = -(-scale * main - others).exp_m1();
            let changed = if before > 1e-9 { (eqe[i] * after / before).min(1.0) } else { eqe[i] };
            changed * condition.spectral.photon_current_ma_per_cm2_per_nm[i]
        })
    };
    let wanted = target / result.photocurrent_ma_per_cm2 * made(1.0);
    let (mut low, mut high) = (1.0 / 30.0, 30.0);
    if !(made(low) < wanted && wanted < made(high)) {
        return None;
    }
    for _ in 0..40 {
        let middle = f64::sqrt(low * high);
        if made(middle) < wanted { low = middle } else { high = middle }
    }
    Some(now * f64::sqrt(low * high))
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

/// Trapezoid rule over `x` of the values `y(i)`.
fn integral(x: &[f64], y: impl Fn(usize) -> f64) -> f64 {
    x.windows(2).enumerate().map(|(i, pair)| 0.5 * (y(i) + y(i + 1)) * (pair[1] - pair[0])).sum()
}
