//! Nothing that is not a number leaves.

use crate::design::Design;
use crate::finding::Finding;
use crate::results::{ConditionResult, Results};

/// By how much terminal voltage and its parts may disagree at a solved point, V: a millionth of
/// what a junction gives.
const RESIDUAL_V: f64 = 1e-6;

/// A finding for the first figure that is not finite, or negative where it cannot be. Only inputs beyond all measure lead there
/// (a concentration of 1e300), so the condition is blamed.
pub(super) fn first_not_finite(design: &Design, results: &Results) -> Option<Finding> {
    results.conditions.iter().zip(&design.conditions).find_map(|(result, condition)| {
        // A junction in light delivers current and power; less than nothing is left of differences
        // of emission and absorption that have lost every digit, as in a cell of 3000 K.
        let lost = |figure: &str, value: f64| ["power", "jsc"].contains(&figure) && value < -1e-9;
        // The solvers stop after a fixed number of steps whatever they have reached.
        let unsolved = (result.curve_residual_v > RESIDUAL_V).then_some(("current-voltage curve", 0.0));
        let (figure, _) = figures(result)
            .find(|(figure, value)| !value.is_finite() || lost(figure, *value))
            .or(unsolved)?;
        let message = format!("`{figure}` under `{}` is beyond what can be computed", condition.name);
        Some(
            Finding::error("value.range", message)
                .at(condition.span, format!("{:e} times the light at {} K", condition.concentration, condition.temperature_k))
                .help("bring concentration, temperature and fitted currents to what a cell can meet, such as `concentration 500 times`"),
        )
    })
}

fn figures(result: &ConditionResult) -> impl Iterator<Item = (&'static str, f64)> {
    let plain = [
        ("incident power", Some(result.incident_w_per_m2)),
        ("efficiency", Some(result.efficiency)),
        ("power", Some(result.power_w_per_m2)),
        ("voc", result.voc_v),
        ("jsc", result.jsc_ma_per_cm2),
        ("fill_factor", result.fill_factor),
        ("vmp", result.vmp_v),
        ("jmp", result.jmp_ma_per_cm2),
        ("current_mismatch", result.current_mismatch),
        ("reflected_current", Some(result.reflected_ma_per_cm2)),
        ("remaining_factor", result.remaining_factor),
    ];
    let junctions = result.junctions.iter().flat_map(|junction| {
        [
            ("gap", junction.gap_ev),
            ("photocurrent", junction.photocurrent_ma_per_cm2),
            ("jsc", junction.jsc_ma_per_cm2),
            ("voc", junction.voc_v),
            ("fill_factor", junction.fill_factor),
            ("power", junction.power_w_per_m2),
            ("voltage at the maximum power point", junction.voltage_at_mpp_v),
            ("dark current", junction.dark_current_radiative_a_per_cm2),
            ("voltage at short circuit", junction.voltage_at_short_circuit_v),
            ("coupled current", junction.coupled_ma_per_cm2),
            ("dark current", junction.dark_current_diffusion_a_per_cm2.unwrap_or(0.0)),
            ("dark current", junction.dark_current_depletion_a_per_cm2.unwrap_or(0.0)),
            ("depletion width", junction.depletion_width_nm.unwrap_or(0.0)),
            ("collection efficiency", junction.collection_efficiency.unwrap_or(0.0)),
        ]
    });
    let layers = result
        .layers
        .iter()
        .flat_map(|layer| [layer.absorbed_ma_per_cm2, layer.collected_ma_per_cm2])
        .map(|value| ("absorbed current", value));
    let tunnels = result.tunnels.iter().flat_map(|tunnel| {
        [("tunnel current", tunnel.demanded_ma_per_cm2), ("tunnel voltage", tunnel.voltage_at_mpp_v)]
    });
    let grid = result.grid.iter().map(|grid| ("series resistance", grid.series_resistance_ohm_cm2));
    let ledger = result.ledger_w_per_m2.iter().map(|line| ("ledger", line.value));
    let spectral = [&result.spectral.wavelength_nm, &result.spectral.photon_current_ma_per_cm2_per_nm]
        .into_iter()
        .chain(result.spectral.eqe.values())
        .chain(result.spectral.iqe.values())
        .chain(result.spectral.absorptance.values())
        .chain([&result.spectral.reflectance])
        .flatten()
        .map(|value| ("spectral response", *value));
    let curves = [&result.curve.voltage_v, &result.curve.current_ma_per_cm2]
        .into_iter()
        .chain(result.curve.junction_voltage_v.values())
        .chain(result.dark_curve.junction_voltage_v.values())
        .chain([&result.dark_curve.voltage_v, &result.dark_curve.current_ma_per_cm2])
        .chain(result.junction_curves.iter().flat_map(|curve| [&curve.voltage_v, &curve.current_ma_per_cm2]))
        .flatten()
        .map(|value| ("current-voltage curve", *value));
    plain
        .into_iter()
        .filter_map(|(name, value)| Some((name, value?)))
        .chain(junctions)
        .chain(tunnels)
        .chain(grid)
        .chain(layers)
        .chain(ledger)
        .chain(spectral)
        .chain(curves)
}
