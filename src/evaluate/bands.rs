//! Band edges through the stack, in the dark and without bias, at 25 °C.

use crate::carriers::equilibrium::{RestLayer, at_rest};
use crate::design::{Design, Duty, Layer, Polarity};
use crate::growth::ROOM_K;
use crate::numerics::constants::thermal_voltage;
use crate::results::{BandDiagram, BandLayer, BandStep};

/// `None` where no layer has both a gap and an affinity.
///
/// The Poisson equation is solved where every semiconductor layer has densities of states and a
/// permittivity; else the edges are flat, with the vacuum level in common.
pub fn band_diagram(design: &Design) -> Option<BandDiagram> {
    let runs = runs(design);
    let thermal_v = thermal_voltage(ROOM_K);
    let solved: Option<Vec<BandLayer>> = runs
        .iter()
        .map(|run| {
            let rest: Vec<RestLayer> =
                run.iter().map(|(_, layer)| at_rest_of(layer)).collect::<Option<_>>()?;
            let profiles = at_rest(&rest, thermal_v)?;
            let layers = run.iter().zip(&rest).zip(profiles);
            Some(
                layers
                    .map(|((at, rest), profile)| band_layer(at.1, rest.gap_ev, &profile))
                    .collect::<Vec<_>>(),
            )
        })
        .collect::<Option<Vec<_>>>()
        .map(|runs| runs.into_iter().flatten().collect());
    let (model, layers) = match solved {
        Some(layers) => ("equilibrium", layers),
        None => ("flat_band", runs.iter().flatten().filter_map(|(_, layer)| flat(layer)).collect()),
    };
    let steps = runs
        .iter()
        .flat_map(|run| (1..run.len()).map(move |at| (run, at)))
        .flat_map(|(run, at)| steps(&layers, run, at))
        .collect();
    (!layers.is_empty()).then(|| BandDiagram {
        model: model.to_owned(),
        temperature_k: ROOM_K,
        layers,
        steps,
    })
}

/// Runs of neighbouring layers that have a gap and an affinity, with their index.
fn runs(design: &Design) -> Vec<Vec<(usize, &Layer)>> {
    let mut runs: Vec<Vec<(usize, &Layer)>> = vec![Vec::new()];
    for (index, layer) in design.lit_layers() {
        if flat(layer).is_some() {
            if let Some(run) = runs.last_mut() {
                run.push((index, layer));
            }
        } else if runs.last().is_some_and(|run| !run.is_empty()) {
            runs.push(Vec::new());
        }
    }
    runs.retain(|run| !run.is_empty());
    runs
}

/// What conducts: no coat, glass or metal, whatever gap its material has.
fn conducts(layer: &Layer) -> bool {
    !matches!(
        layer.duty,
        Duty::Coat | Duty::Cover | Duty::Adhesive | Duty::Air | Duty::Metal | Duty::Mirror | Duty::Handle
    )
}

fn at_rest_of(layer: &Layer) -> Option<RestLayer> {
    let material = layer.material.as_ref()?;
    let sign = |polarity: Polarity| if polarity == Polarity::N { 1.0 } else { -1.0 };
    Some(RestLayer {
        thickness_m: layer.thickness_m?,
        affinity_ev: material.affinity_ev(ROOM_K)?,
        gap_ev: material.gap(ROOM_K)?.ev,
        conduction_per_m3: material.conduction_density_per_m3(ROOM_K)?,
        valence_per_m3: material.valence_density_per_m3(ROOM_K)?,
        net_doping_per_m3: layer.doping.as_ref().map_or(0.0, |d| sign(d.polarity) * d.density_per_m3),
        permittivity: material.static_permittivity()?,
    })
}

/// Edges against a vacuum level at zero.
fn flat(layer: &Layer) -> Option<BandLayer> {
    let material = layer.material.as_ref().filter(|_| conducts(layer))?;
    let (affinity, gap) = (material.affinity_ev(ROOM_K)?, material.gap(ROOM_K)?.ev);
    let thickness_m = layer.thickness_m?;
    Some(band_layer(layer, gap, &[(0.0, -affinity), (thickness_m, -affinity)]))
}

/// Ten nanovolts: what Newton's method leaves is less.
fn rounded(ev: f64) -> f64 {
    (ev * 1e5).round() / 1e5
}

/// Points that lie less than half a millielectronvolt from the one before are left out.
fn band_layer(layer: &Layer, gap_ev: f64, profile: &[(f64, f64)]) -> BandLayer {
    let mut kept: Vec<(f64, f64)> = Vec::new();
    for (at, point) in profile.iter().enumerate() {
        let last = at + 1 == profile.len();
        // The end of a flat stretch belongs to the bend that follows.
        let next_moves = profile.get(at + 1).is_some_and(|next| (next.1 - point.1).abs() >= 5e-4);
        if last || next_moves || kept.last().is_none_or(|before| (point.1 - before.1).abs() >= 5e-4) {
            kept.push(*point);
        }
    }
    let profile = kept;
    BandLayer {
        name: layer.path.clone(),
        depth_nm: profile.iter().map(|(depth, _)| depth * 1e9).collect(),
        conduction_ev: profile.iter().map(|(_, edge)| rounded(*edge)).collect(),
        valence_ev: profile.iter().map(|(_, edge)| rounded(*edge - gap_ev)).collect(),
    }
}

/// What a collecting layer meets at a neighbour that does not collect: the layers `at − 1` and `at`
/// of a run.
fn steps(layers: &[BandLayer], run: &[(usize, &Layer)], at: usize) -> Vec<BandStep> {
    let of = |layer: &Layer| layers.iter().find(|known| known.name == layer.path);
    let (above, below) = (run[at - 1].1, run[at].1);
    let (inner, outer) = match (above.collects(), below.collects()) {
        (true, false) => (above, below),
        (false, true) => (below, above),
        _ => return Vec::new(),
    };
    let sign = |layer: &Layer| match layer.duty {
        Duty::ElectronContact => Some(Polarity::N),
        Duty::HoleContact => Some(Polarity::P),
        _ => layer.doping.as_ref().map(|doping| doping.polarity),
    };
    // An undoped layer passes on what the next one outwards carries off.
    let outwards: Vec<&Layer> = match std::ptr::eq(inner, above) {
        true => run[at..].iter().map(|(_, layer)| *layer).collect(),
        false => run[..at].iter().rev().map(|(_, layer)| *layer).collect(),
    };
    let carried = outwards.into_iter().take_while(|layer| !layer.collects()).find_map(sign);
    let outer_polarity = carried.or_else(|| sign(inner));
    let (Some(inner_bands), Some(outer_bands), Some(outer_polarity)) = (of(inner), of(outer), outer_polarity)
    else {
        return Vec::new();
    };
    // The values at the face they share.
    let at_face = |bands: &BandLayer, is_above: bool| {
        let pick = |edge: &[f64]| if is_above { edge.last().copied() } else { edge.first().copied() };
        pick(&bands.conduction_ev).zip(pick(&bands.valence_ev))
    };
    let inner_is_above = std::ptr::eq(inner, above);
    let edges = at_face(inner_bands, inner_is_above).zip(at_face(outer_bands, !inner_is_above));
    let Some(((inner_c, inner_v), (outer_c, outer_v))) = edges else { return Vec::new() };
    let step = |carrier: &str, barrier_ev: f64, keeps_in: bool| BandStep {
        from: inner.path.clone(),
        to: outer.path.clone(),
        carrier: carrier.to_owned(),
        barrier_ev: rounded(barrier_ev),
        keeps_in,
    };
    vec![
        step("electrons", outer_c - inner_c, outer_polarity == Polarity::P),
        step("holes", inner_v - outer_v, outer_polarity == Polarity::N),
    ]
}
