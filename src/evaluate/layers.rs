//! The layer table.

use crate::design::Polarity;
use crate::design::{Condition, Design, Extent, Layer, Place};
use crate::evaluate::lit::Lit;
use crate::evaluate::transport::{Carrying, LayerCarriers, carrying};
use crate::growth::{LayerGrowth, ROOM_K, lattice_states};
use crate::results::{LayerResult, LayerTransport, OriginResult};

/// One row per layer of the design, same order.
pub(super) fn layer_results(design: &Design, lit: &Lit) -> Vec<LayerResult> {
    let states = lattice_states(design);
    let transport = transport(design, lit);
    design
        .layers
        .iter()
        .zip(states)
        .zip(transport)
        .map(|((layer, state), transport)| LayerResult { transport, ..layer_result(design, layer, state) })
        .collect()
}

/// Minority carriers at room temperature and the beginning of life, one entry per layer.
fn transport(design: &Design, lit: &Lit) -> Vec<Option<LayerTransport>> {
    let mut rows = vec![None; design.layers.len()];
    let Some(condition) = design.conditions.first() else { return rows };
    let room = Condition { temperature_k: ROOM_K, fluence: None, ..condition.clone() };
    let is_room = (condition.temperature_k - ROOM_K).abs() < 1e-9 && condition.fluence.is_none();
    let known = if is_room { &lit.carrying } else { &carrying(design, &room) };
    for carrying in known {
        let Carrying::Followed(transport) = carrying else { continue };
        for own in &transport.layers {
            rows[own.layer] = Some(layer_transport(own));
        }
    }
    rows
}

fn layer_transport(own: &LayerCarriers) -> LayerTransport {
    let words = [own.mobility_from, own.lifetime_from, own.length_from].map(|from| from.word());
    LayerTransport {
        minority_carrier: own.minority.word().to_owned(),
        mobility_cm2_per_vs: 1e4 * own.mobility_m2_per_vs,
        lifetime_ns: 1e9 * own.lifetime_s,
        non_radiative_lifetime_ns: 1e9 * own.non_radiative_s,
        diffusion_length_um: 1e6 * own.length_m,
        origin: format!(
            "mobility {}, non-radiative lifetime {}, diffusion length {}",
            words[0], words[1], words[2]
        ),
    }
}

fn layer_result(design: &Design, layer: &Layer, state: Option<LayerGrowth>) -> LayerResult {
    let material = layer.material.as_ref();
    let gap = material.and_then(|material| material.gap(ROOM_K));
    let junction = match layer.place {
        Place::Junction(index) => design.junctions.get(index).map(|junction| junction.name.value.clone()),
        _ => None,
    };
    let thickness_path = format!("{}.thickness", layer.path);
    LayerResult {
        name: layer.path.clone(),
        duty: layer.duty.word().to_owned(),
        junction,
        material: material.map_or_else(|| "unresolved".to_owned(), |material| material.label.clone()),
        composition: material.map(|m| m.composition.iter().cloned().collect()).unwrap_or_default(),
        thickness_nm: layer.thickness_m.map(|thickness| thickness * 1e9),
        tolerance: design.tolerances.iter().find(|t| t.path == thickness_path).map(|t| t.text.clone()),
        gap_ev: gap.map(|gap| gap.ev),
        gap_kind: gap.map(|gap| gap.kind.word().to_owned()),
        lattice_constant_angstrom: material.and_then(|material| material.lattice_constant(ROOM_K)),
        mismatch: state.map(|state| state.mismatch),
        strain: state.map(|state| state.strain),
        polarity: layer.doping.as_ref().map(|doping| polarity(doping.polarity).to_owned()),
        doping_per_cm3: layer.doping.as_ref().map(|doping| doping.density_per_m3 * 1e-6),
        species: layer.doping.as_ref().and_then(|doping| doping.species.clone()),
        extent: match layer.extent {
            Extent::Everywhere => "everywhere",
            Extent::UnderFingers => "under fingers",
            Extent::Removed => "removed",
        }
        .to_owned(),
        transport: None,
        origins: material
            .map(|material| {
                let origin = |origin: &crate::materials::Origin| OriginResult {
                    what: origin.what.clone(),
                    kind: origin.kind.word().to_owned(),
                    cite: origin.cite.clone(),
                };
                material.origins.iter().map(origin).collect()
            })
            .unwrap_or_default(),
    }
}

fn polarity(polarity: Polarity) -> &'static str {
    match polarity {
        Polarity::N => "n",
        Polarity::P => "p",
    }
}
