//! One condition, from absorbed light to the figures on the sheet.

use crate::circuit::curve::points;
use crate::circuit::diode::Diode;
use crate::circuit::series::{Point, Series};
use crate::design::{Condition, Design};
use crate::evaluate::dark::dark_curve;
use crate::evaluate::junctions::{diodes, strings};
use crate::evaluate::ledger::{Operating, account};
use crate::evaluate::lit::Lit;
use crate::evaluate::spectral::spectral;
use crate::evaluate::transport::Carrying;
use crate::numerics::constants::HC_EV;
use crate::results::{ConditionResult, Curve, JunctionCurve, JunctionResult, LayerLight};

/// A/m2 to mA/cm2.
const MA_PER_CM2: f64 = 0.1;

/// One junction by itself.
struct Alone {
    short: Point,
    best: Point,
    curve: Curve,
    open_v: f64,
}

/// Every figure of `condition`.
pub(super) fn condition_result(design: &Design, condition: &Condition, lit: &Lit) -> ConditionResult {
    let shading = design.fingers.as_ref().map_or(0.0, |fingers| fingers.shading);
    let received = condition.concentration * condition.incidence_rad.cos();
    let open = received * (1.0 - shading);
    let diodes = diodes(design, condition, lit, open);

    let mut operating = Vec::new();
    let mut whole = None;
    let wirings = strings(design);
    for wiring in &wirings {
        let own: Vec<Diode> = wiring.junctions.iter().map(|&junction| diodes[junction].clone()).collect();
        let series = Series::new(&own, wiring.fingers_ohm_m2 + wiring.tunnels_ohm_m2, &[]);
        let short = series.short_circuit();
        let best = series.maximum_power(&short);
        if wirings.len() == 1 {
            whole = Some((
                series.open_circuit().voltage,
                short.clone(),
                best.clone(),
                points(&series, &short, &best),
            ));
        }
        operating.push(Operating {
            wiring: wiring.clone(),
            current: best.current,
            junction_v: best.junctions,
        });
    }
    let power_w_per_m2: f64 = operating
        .iter()
        .map(|string| {
            let resistance = string.wiring.fingers_ohm_m2 + string.wiring.tunnels_ohm_m2;
            let sum: f64 = string.junction_v.iter().sum();
            string.current * (sum - string.current * resistance)
        })
        .sum();
    let incident = condition.incident_w_per_m2();
    let figures = whole.as_ref();
    let alone: Vec<Alone> = diodes.iter().map(by_itself).collect();
    let photocurrents: Vec<f64> = diodes.iter().map(|diode| diode.photocurrent).collect();

    ConditionResult {
        name: condition.name.clone(),
        light: condition.light.name.clone(),
        incident_w_per_m2: incident,
        temperature_k: condition.temperature_k,
        concentration: condition.concentration,
        efficiency: ratio(power_w_per_m2, incident),
        power_w_per_m2,
        voc_v: figures.map(|(open_v, ..)| *open_v),
        jsc_ma_per_cm2: figures.map(|(_, short, ..)| MA_PER_CM2 * short.current),
        fill_factor: figures.map(|(open_v, short, ..)| ratio(power_w_per_m2, open_v * short.current)),
        vmp_v: figures.map(|(_, _, best, _)| best.voltage),
        jmp_ma_per_cm2: figures.map(|(_, _, best, _)| MA_PER_CM2 * best.current),
        limiting_junction: figures.and_then(|_| limiting(design, &photocurrents)),
        current_mismatch: mismatch(&photocurrents),
        reflected_ma_per_cm2: MA_PER_CM2 * open * reflected(lit),
        junctions: junction_results(design, lit, &operating, &alone, &photocurrents),
        layers: layer_light(design, lit, open),
        ledger_w_per_m2: account(design, condition, lit, &operating),
        spectral: spectral(design, condition, lit, received),
        dark_curve: dark_curve(design, &diodes, &wirings),
        curve: figures.map_or_else(Curve::default, |(.., points)| curve(design, points)),
        junction_curves: alone
            .into_iter()
            .zip(&design.junctions)
            .map(|(alone, junction)| JunctionCurve {
                name: junction.name.value.clone(),
                voltage_v: alone.curve.voltage_v,
                current_ma_per_cm2: alone.curve.current_ma_per_cm2,
            })
            .collect(),
    }
}

fn by_itself(diode: &Diode) -> Alone {
    let series = Series::new(std::slice::from_ref(diode), 0.0, &[]);
    let short = series.short_circuit();
    let best = series.maximum_power(&short);
    let points = points(&series, &short, &best);
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
    operating: &[Operating],
    alone: &[Alone],
    photocurrents: &[f64],
) -> Vec<JunctionResult> {
    let voltage_at_mpp = |junction: usize| {
        operating.iter().find_map(|string| {
            let at = string.wiring.junctions.iter().position(|&own| own == junction)?;
            string.junction_v.get(at).copied()
        })
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
                voltage_at_mpp_v: voltage_at_mpp(index).unwrap_or(own.best.voltage),
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
