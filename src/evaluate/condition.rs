//! One condition, from absorbed light to the figures on the sheet.

use crate::circuit::curve::points;
use crate::circuit::diode::Diode;
use crate::circuit::series::{Point, Series};
use crate::design::{Condition, Design};
use crate::evaluate::dark::dark_curve;
use crate::evaluate::grid::grid;
use crate::evaluate::junctions::diodes;
use crate::evaluate::ledger::account;
use crate::evaluate::lit::Lit;
use crate::evaluate::spectral::spectral;
use crate::evaluate::transport::Carrying;
use crate::evaluate::tunnels::crossing;
use crate::evaluate::wiring::{Flow, Operating, inner_interconnects, operating, strings};
use crate::numerics::constants::HC_EV;
use crate::results::{ConditionResult, Curve, JunctionCurve, JunctionResult, LayerLight, TunnelResult};

/// A/m2 to mA/cm2.
const MA_PER_CM2: f64 = 0.1;

/// How much of a condition is worked out.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Detail {
    /// Figures alone: no curves, no spectra, no account.
    Figures,
    /// Everything.
    All,
}

/// One junction by itself.
struct Alone {
    short: Point,
    best: Point,
    curve: Curve,
    open_v: f64,
}

/// What multiplies the light that falls on the open front: concentration, obliquity, what fingers
/// leave.
pub(super) fn open_light(design: &Design, condition: &Condition) -> f64 {
    let shading = design.fingers.as_ref().map_or(0.0, |fingers| fingers.shading);
    condition.concentration * condition.incidence_rad.cos() * (1.0 - shading)
}

/// Greatest power of `condition`, W/m2, and nothing else.
pub(super) fn power_w_per_m2(design: &Design, condition: &Condition, lit: &Lit) -> f64 {
    let diodes = diodes(design, condition, lit, open_light(design, condition));
    let strings = strings(design, grid(design, condition).0);
    operating(strings, &diodes).0.iter().map(Operating::power).sum()
}

/// Current at each of `voltages`, A/m2: of a junction by itself, else of the stack; nothing for a
/// stack of several strings.
pub(super) fn predicted_current(
    design: &Design,
    (condition, lit): (&Condition, &Lit),
    junction: Option<usize>,
    voltages: &[f64],
) -> Vec<f64> {
    let diodes = diodes(design, condition, lit, open_light(design, condition));
    let along = |series: &Series| voltages.iter().map(|&at| series.at_voltage(at).current).collect();
    if let Some(junction) = junction {
        return along(&Series::new(std::slice::from_ref(&diodes[junction]), 0.0, &[]));
    }
    match strings(design, grid(design, condition).0).as_slice() {
        [one] => along(&one.series(&one.own(&diodes))),
        _ => Vec::new(),
    }
}

/// Every figure of `condition`.
pub(super) fn condition_result(
    design: &Design,
    condition: &Condition,
    lit: &Lit,
    detail: Detail,
) -> ConditionResult {
    let received = condition.concentration * condition.incidence_rad.cos();
    let open = open_light(design, condition);
    let diodes = diodes(design, condition, lit, open);
    let (fingers_ohm_m2, grid) = grid(design, condition);
    let wirings = strings(design, fingers_ohm_m2);
    let (operating, flows) = operating(wirings.clone(), &diodes);
    let power_w_per_m2: f64 = operating.iter().map(Operating::power).sum();
    let incident = condition.incident_w_per_m2();
    let whole = match operating.as_slice() {
        [one] => Some(one),
        _ => None,
    };
    let alone: Vec<Alone> = diodes.iter().map(|diode| by_itself(diode, detail)).collect();
    let photocurrents: Vec<f64> = diodes.iter().map(|diode| diode.photocurrent).collect();
    let figures = ConditionResult {
        name: condition.name.clone(),
        light: condition.light.name.clone(),
        incident_w_per_m2: incident,
        temperature_k: condition.temperature_k,
        concentration: condition.concentration,
        efficiency: ratio(power_w_per_m2, incident),
        power_w_per_m2,
        voc_v: whole.map(|it| it.open_v),
        jsc_ma_per_cm2: whole.map(|it| MA_PER_CM2 * it.short.current),
        fill_factor: whole.map(|it| ratio(power_w_per_m2, it.open_v * it.short.current)),
        vmp_v: whole.map(|it| it.best.voltage),
        jmp_ma_per_cm2: whole.map(|it| MA_PER_CM2 * it.best.current),
        limiting_junction: whole.and_then(|_| limiting(design, &photocurrents)),
        current_mismatch: mismatch(&photocurrents),
        remaining_factor: None,
        reflected_ma_per_cm2: MA_PER_CM2 * open * reflected(lit),
        junctions: junction_results(design, lit, (&operating, &flows), &alone, &photocurrents),
        curve_residual_v: operating.iter().map(Operating::residual_v).fold(0.0, f64::max),
        tunnels: tunnel_results(design, &operating),
        grid,
        ..ConditionResult::default()
    };
    if detail == Detail::Figures {
        return figures;
    }
    ConditionResult {
        layers: layer_light(design, lit, open),
        ledger_w_per_m2: account(design, condition, lit, (&operating, &flows)),
        spectral: spectral(design, condition, lit, received),
        dark_curve: dark_curve(design, &diodes, &wirings),
        curve: whole.map_or_else(Curve::default, |it| {
            let own = it.wiring.own(&diodes);
            curve(design, &points(&it.wiring.series(&own), &it.short, &it.best))
        }),
        junction_curves: alone
            .into_iter()
            .zip(&design.junctions)
            .map(|(alone, junction)| JunctionCurve {
                name: junction.name.value.clone(),
                voltage_v: alone.curve.voltage_v,
                current_ma_per_cm2: alone.curve.current_ma_per_cm2,
            })
            .collect(),
        ..figures
    }
}

fn by_itself(diode: &Diode, detail: Detail) -> Alone {
    let series = Series::new(std::slice::from_ref(diode), 0.0, &[]);
    let short = series.short_circuit();
    let best = series.maximum_power(&short);
    let points = if detail == Detail::All { points(&series, &short, &best) } else { Vec::new() };
    let curve = Curve {
        voltage_v: points.iter().map(|point| point.voltage).collect(),
        current_ma_per_cm2: points.iter().map(|point| MA_PER_CM2 * point.current).collect(),
        ..Curve::default()
    };
    Alone { open_v: series.open_circuit().voltage, short, best, curve }
}

fn junction_results(
    design: &Design,
    lit: &Lit,
    (operating, flows): (&[Operating], &[Flow]),
    alone: &[Alone],
    photocurrents: &[f64],
) -> Vec<JunctionResult> {
    let within = |junction: usize, of: fn(&Operating) -> &Point| {
        operating.iter().find_map(|string| {
            let at = string.wiring.junctions.iter().position(|&own| own == junction)?;
            of(string).junctions.get(at).copied()
        })
    };
    let coupled = |junction: usize| -> f64 {
        flows.iter().filter(|flow| flow.to == junction).map(|flow| flow.current).sum()
    };
    design
        .junctions
        .iter()
        .enumerate()
        .map(|(index, junction)| {
            let own = &alone[index];
            let power = own.best.current * own.best.voltage;
            let transport = match &lit.carrying[index] {
                Carrying::Followed(transport) => Some(transport),
                _ => None,
            };
            JunctionResult {
                name: junction.name.value.clone(),
                gap_ev: lit.gap_ev[index],
                photocurrent_ma_per_cm2: MA_PER_CM2 * photocurrents[index],
                jsc_ma_per_cm2: MA_PER_CM2 * own.short.current,
                voc_v: own.open_v,
                fill_factor: ratio(power, own.open_v * own.short.current),
                power_w_per_m2: power,
                voltage_at_mpp_v: within(index, |it| &it.best).unwrap_or(own.best.voltage),
                voltage_at_short_circuit_v: within(index, |it| &it.short).unwrap_or(0.0),
                coupled_ma_per_cm2: MA_PER_CM2 * coupled(index),
                dark_current_radiative_a_per_cm2: 1e-4 * lit.radiative_dark(index),
                dark_current_diffusion_a_per_cm2: transport.map(|it| 1e-4 * it.diffusion_a_per_m2),
                dark_current_depletion_a_per_cm2: transport.map(|it| 1e-4 * it.depletion_a_per_m2),
                depletion_width_nm: transport.map(|it| 1e9 * it.depletion.width_m()),
                collection_efficiency: transport
                    .map(|_| ratio(lit.photocurrent(index), lit.absorbed_current(index))),
            }
        })
        .collect()
}

/// What joins the junctions, at the operating point of the string that crosses it.
fn tunnel_results(design: &Design, operating: &[Operating]) -> Vec<TunnelResult> {
    let mut results: Vec<TunnelResult> = design
        .interconnects
        .iter()
        .map(|interconnect| TunnelResult {
            name: interconnect.name.value.clone(),
            peak_ma_per_cm2: interconnect.peak_a_per_m2.map(|peak| MA_PER_CM2 * peak),
            ..TunnelResult::default()
        })
        .collect();
    for string in operating {
        let mut voltages = string.wiring.tunnels.iter().zip(&string.best.tunnels);
        for index in inner_interconnects(design, &string.wiring.junctions) {
            let (ohmic, tunnel) = crossing(&design.interconnects[index]);
            let own = tunnel.and_then(|_| voltages.next());
            let result = &mut results[index];
            result.demanded_ma_per_cm2 = MA_PER_CM2 * string.demanded;
            result.voltage_at_mpp_v = ohmic * string.best.current + own.map_or(0.0, |(_, voltage)| *voltage);
            result.beyond_peak = own.is_some_and(|(tunnel, voltage)| *voltage > tunnel.crest().0);
        }
    }
    results
}

fn layer_light(design: &Design, lit: &Lit, open: f64) -> Vec<LayerLight> {
    let mut layers: Vec<LayerLight> = design
        .layers
        .iter()
        .map(|layer| LayerLight {
            name: layer.path.clone(),
            absorbed_ma_per_cm2: 0.0,
            collected_ma_per_cm2: 0.0,
        })
        .collect();
    for (row, (layer, junction)) in lit.rows.iter().enumerate() {
        let current = MA_PER_CM2 * open * lit.row_current[row];
        layers[*layer].absorbed_ma_per_cm2 += current;
        if junction.is_some() {
            layers[*layer].collected_ma_per_cm2 += MA_PER_CM2 * open * lit.row_collected[row];
        }
    }
    layers
}

/// Photon current reflected up to the longest edge, A/m2, at one times.
fn reflected(lit: &Lit) -> f64 {
    let lowest_gap = lit.gap_ev.iter().copied().fold(f64::INFINITY, f64::min);
    lit.reflected_current(HC_EV / lowest_gap)
}

fn curve(design: &Design, points: &[Point]) -> Curve {
    let junction_voltage_v = design
        .junctions
        .iter()
        .enumerate()
        .map(|(index, junction)| {
            (junction.name.value.clone(), points.iter().map(|point| point.junctions[index]).collect())
        })
        .collect();
    Curve {
        voltage_v: points.iter().map(|point| point.voltage).collect(),
        current_ma_per_cm2: points.iter().map(|point| MA_PER_CM2 * point.current).collect(),
        junction_voltage_v,
    }
}

fn limiting(design: &Design, photocurrents: &[f64]) -> Option<String> {
    if photocurrents.len() < 2 {
        return None;
    }
    let least = photocurrents.iter().enumerate().min_by(|a, b| a.1.total_cmp(b.1))?;
    Some(design.junctions[least.0].name.value.clone())
}

/// `(max − min)/min` of the photocurrents; `None` for one junction, or where one gets less than a
/// trillionth of the light of another and so is dark.
fn mismatch(photocurrents: &[f64]) -> Option<f64> {
    let least = photocurrents.iter().copied().fold(f64::INFINITY, f64::min);
    let most = photocurrents.iter().copied().fold(0.0, f64::max);
    (photocurrents.len() > 1 && least > 1e-12 * most).then(|| (most - least) / least)
}

/// Powers below this are dark, W/m2: what a tail absorbs by rounding has no fill factor.
const DARK_W_PER_M2: f64 = 1e-15;

/// `part / whole`, 0 where there is no whole: a cell in the dark has no fill factor to speak of.
fn ratio(part: f64, whole: f64) -> f64 {
    if whole > DARK_W_PER_M2 { part / whole } else { 0.0 }
}
