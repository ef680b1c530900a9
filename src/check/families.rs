//! What a layer's own alloy family could be instead.

use crate::growth::ROOM_K;
use crate::materials::Material;
use crate::materials::alloy::solve::{Wanted, crossing, solve};
use crate::materials::alloy::{Composition, Family};

/// The composition of the family of `material` that has the lattice constant of `beneath` at
/// `temperature_k`, with the phrase that asks for it; with two free fractions, the one that keeps
/// the gap.
pub(super) fn matched(
    material: &Material,
    beneath: &Material,
    temperature_k: f64,
) -> Option<(String, String)> {
    let family = material.family.as_ref()?;
    let angstrom = beneath.lattice_constant(temperature_k)?;
    let lattice = Wanted::Lattice { angstrom, temperature_k };
    match family.freedom() {
        1 => {
            let composition = solve(family, &[lattice]).ok()?;
            Some((family.label(&composition), format!("{} matched", family.name)))
        }
        2 => {
            let gap = material.gap(ROOM_K)?.ev;
            let composition = solve(family, &[lattice, Wanted::Gap(gap)]).ok()?;
            let phrase = format!("{} matched of gap {gap:.2} eV", family.name);
            Some((family.label(&composition), phrase))
        }
        _ => None,
    }
}

/// The composition of a family with one free fraction, in whole per cent, next to the crossover
/// on its direct side.
pub(super) fn last_direct(family: &Family) -> Option<String> {
    let crossing = crossing(family)?;
    let free = family.sites.iter().position(|site| site.len() == 2)?;
    let at = |fraction: f64| -> Composition {
        let mut composition = family.corner();
        composition[free] = vec![fraction, 1.0 - fraction];
        composition
    };
    let per_cent = crossing * 100.0;
    [per_cent.floor() / 100.0, per_cent.ceil() / 100.0]
        .map(at)
        .iter()
        .find(|composition| family.bands(composition).gap(ROOM_K).is_some_and(|gap| gap.kind.is_direct()))
        .map(|composition| family.label(composition))
}
