//! The layer table.

use crate::design::Polarity;
use crate::design::{Design, Extent, Layer, Place};
use crate::growth::{LayerGrowth, ROOM_K, lattice_states};
use crate::results::{LayerResult, OriginResult};

/// One row per layer of the design, same order.
pub(super) fn layer_results(design: &Design) -> Vec<LayerResult> {
    let states = lattice_states(design);
    design.layers.iter().zip(states).map(|(layer, state)| layer_result(design, layer, state)).collect()
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
