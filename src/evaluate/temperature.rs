//! What a warmer cell does, by evaluating one above and one below.

use crate::design::Condition;
use crate::results::{ConditionResult, JunctionResult, JunctionTemperature, TemperatureCoefficients};

/// How far above and below, K: far enough that the grid of wavelengths, good to 0.01 % of a
/// current, is a hundredth of the change, near enough that a curvature of 1e-6 /K2 shows nothing.
const STEP_K: f64 = 10.0;

/// The condition [`STEP_K`] below and above; `None` for a cell so cold that nothing lies below.
pub(super) fn around(condition: &Condition) -> Option<[Condition; 2]> {
    let at = |temperature_k: f64| Condition { temperature_k, ..condition.clone() };
    (condition.temperature_k > 2.0 * STEP_K)
        .then(|| [at(condition.temperature_k - STEP_K), at(condition.temperature_k + STEP_K)])
}

/// Central differences of the figures `below` and `above`, relative ones over those `here`; `None`
/// where a difference is no number.
pub(super) fn coefficients(
    here: &ConditionResult,
    below: &ConditionResult,
    above: &ConditionResult,
) -> Option<TemperatureCoefficients> {
    let per_k = |above: f64, below: f64| (above - below) / (2.0 * STEP_K);
    let of = |figure: fn(&ConditionResult) -> Option<f64>| Some(per_k(figure(above)?, figure(below)?));
    let relative = |change: Option<f64>, figure: Option<f64>| match (change, figure) {
        (Some(change), Some(figure)) if figure > 0.0 => Some(change / figure),
        _ => None,
    };
    let voc = of(|it| it.voc_v);
    let jsc = of(|it| it.jsc_ma_per_cm2);
    let efficiency = of(|it| Some(it.efficiency))?;
    let junctions = here.junctions.iter().enumerate().filter_map(|(index, junction)| {
        let (below, above) = (below.junctions.get(index)?, above.junctions.get(index)?);
        let of = |figure: fn(&JunctionResult) -> f64| per_k(figure(above), figure(below));
        Some(JunctionTemperature {
            name: junction.name.clone(),
            gap_mev_per_k: 1e3 * of(|it| it.gap_ev),
            voc_mv_per_k: 1e3 * of(|it| it.voc_v),
            photocurrent_ma_per_cm2_per_k: of(|it| it.photocurrent_ma_per_cm2),
        })
    });
    let coefficients = TemperatureCoefficients {
        step_k: STEP_K,
        voc_mv_per_k: voc.map(|change| 1e3 * change),
        voc_relative_per_k: relative(voc, here.voc_v),
        jsc_ma_per_cm2_per_k: jsc,
        jsc_relative_per_k: relative(jsc, here.jsc_ma_per_cm2),
        fill_factor_per_k: of(|it| it.fill_factor),
        efficiency_per_k: efficiency,
        efficiency_relative_per_k: relative(Some(efficiency), Some(here.efficiency))?,
        junctions: junctions.collect(),
    };
    let whole = [voc, jsc, Some(efficiency)].into_iter().flatten().all(f64::is_finite);
    let parts = coefficients.junctions.iter().all(|it| {
        [it.gap_mev_per_k, it.voc_mv_per_k, it.photocurrent_ma_per_cm2_per_k].iter().all(|it| it.is_finite())
    });
    (whole && parts).then_some(coefficients)
}
