//! Gaps of layers that keep the lattice beneath them: the design gets the material as strained.

use std::collections::HashMap;
use std::sync::Arc;

use crate::design::Design;
use crate::growth::{LayerGrowth, lattice_states};
use crate::materials::strain::{Biaxial, Shift, shift};
use crate::materials::{Material, Origin, OriginKind, SharedMaterial};
use crate::resolve::Resolver;

/// A shift worth a word on the sheet, eV.
const TOLD_EV: f64 = 1e-3;

/// Strain below this moves no gap by a µeV: rounding in a matched composition.
const LEAST_STRAIN: f64 = 1e-9;

/// Strained materials by the unstrained one's address and the bits of the strain. The unstrained
/// one is kept beside it, so that its address is not given to another.
pub(super) type Cache = HashMap<(usize, u64), (SharedMaterial, SharedMaterial)>;

/// Replaces the material of every strained layer by one whose gaps stand where strain puts them.
pub(super) fn strain(resolver: &mut Resolver<'_, '_>, design: &mut Design) {
    let states = lattice_states(design);
    let (mut told, mut unknown) = (Vec::new(), Vec::new());
    for (layer, state) in design.layers.iter_mut().zip(states) {
        let (Some(material), Some(state)) = (&layer.material, state) else { continue };
        let Some(biaxial) = biaxial(&state).filter(|_| material.bands.is_some()) else { continue };
        let Some(found) = shift(material, biaxial) else {
            // As a shift of 10 eV a unit of strain, which is usual, would be told.
            if biaxial.in_plane.abs() * 10.0 > TOLD_EV {
                unknown.push(layer.path.clone());
            }
            continue;
        };
        if found.direct_ev.abs() > TOLD_EV {
            told.push((layer.path.clone(), gap_change_ev(material, &found)));
        }
        let key = (Arc::as_ptr(material) as usize, biaxial.in_plane.to_bits());
        let entry = resolver.strained.entry(key);
        let make = || (material.clone(), Arc::new(strained(material, biaxial, &found)));
        let moved = entry.or_insert_with(make).1.clone();
        layer.material = Some(moved);
    }
    design.assumptions.extend(sentence(&told));
    if !unknown.is_empty() {
        let names = list(unknown.iter().map(|path| format!("`{path}`")).collect());
        let verb = if unknown.len() == 1 { "is" } else { "are" };
        design.assumptions.push(format!(
            "{names} {verb} strained, but without deformation potentials the gap stays that of the relaxed crystal"
        ));
    }
}

fn biaxial(state: &LayerGrowth) -> Option<Biaxial> {
    let perpendicular = state.perpendicular_strain?;
    (state.strain.abs() > LEAST_STRAIN).then_some(Biaxial { in_plane: state.strain, perpendicular })
}

/// What the lowest gap gains, eV.
fn gap_change_ev(material: &Material, shift: &Shift) -> f64 {
    let room = crate::growth::ROOM_K;
    let gap = |material: &Material| material.gap(room).map_or(0.0, |gap| gap.ev);
    gap(&material.with_gaps_moved(shift)) - gap(material)
}

fn strained(material: &Material, biaxial: Biaxial, found: &Shift) -> Material {
    let mut moved = material.with_gaps_moved(found);
    if found.direct_ev.abs() > TOLD_EV {
        let holes = if found.is_light_on_top() { "light" } else { "heavy" };
        moved.origins.push(Origin {
            what: "strain".to_owned(),
            kind: OriginKind::Model,
            cite: format!(
                "in-plane strain of {:+.3} % moves the direct gap by {:+.0} meV, {holes} holes on top: C. G. Van de Walle, Phys. Rev. B 39, 1871 (1989), with the deformation potentials of the gap's source; X and L move with the valence band only",
                biaxial.in_plane * 100.0,
                found.direct_ev * 1e3
            ),
        });
    }
    moved
}

fn sentence(told: &[(String, f64)]) -> Option<String> {
    if told.is_empty() {
        return None;
    }
    const MOST: usize = 4;
    let mut names: Vec<String> =
        told.iter().take(MOST).map(|(path, ev)| format!("`{path}` {:+.0} meV", ev * 1e3)).collect();
    if told.len() > MOST {
        names.push(format!("{} more", told.len() - MOST));
    }
    let noun = if told.len() == 1 { "the gap of a strained layer" } else { "gaps of strained layers" };
    Some(format!(
        "{noun} as strained: {}; a gap asked for in a phrase is that of the unstrained composition",
        list(names)
    ))
}

/// `a, b and c`
fn list(mut names: Vec<String>) -> String {
    match names.pop() {
        Some(last) if !names.is_empty() => format!("{} and {last}", names.join(", ")),
        last => last.unwrap_or_default(),
    }
}
