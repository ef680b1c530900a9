//! Gap against mismatch to a wafer, as a file of its own.

use std::sync::Arc;

use crate::evaluate::gap_map::of_families;
use crate::materials::Material;
use crate::materials::alloy::Family;
use crate::report::figure::Figure;
use crate::report::figure::gap::{Mark, draw};
use crate::resolve::materials::{Fit, entries};

/// The drawing of what was found, with its families as curves; of the wafer's usual families where
/// none was named. `None` where nothing has a lattice.
pub(super) fn svg(
    mut families: Vec<Arc<Family>>,
    fits: &[Fit],
    wafer: &Material,
    temperature_k: f64,
) -> Option<String> {
    families.retain(|family| family.lattice_constant(&family.corner(), temperature_k).is_some());
    if families.is_empty() && fits.is_empty() {
        // What comes within 1 % of the wafer somewhere.
        let lattice = wafer.lattice_constant(temperature_k)?;
        let near = |family: &Arc<Family>| {
            crate::materials::alloy::solve::lattice_reach(family, temperature_k)
                .is_some_and(|(low, high)| low < lattice * 1.01 && high > lattice * 0.99)
        };
        let named = entries().into_iter().filter(|entry| entry.is_family);
        families =
            named.filter_map(|entry| crate::resolve::materials::family(&entry.name)).filter(near).collect();
    }
    // A ternary's own curve, with its ordering, before that of a quaternary around it.
    families.sort_by_key(|family| family.freedom());
    let mut known: Vec<String> = Vec::new();
    families.retain(|family| {
        let is_new = !known.contains(&family.name);
        known.push(family.name.clone());
        is_new
    });
    let map = of_families(&families, wafer, temperature_k)?;
    let marks = marks(fits);
    if map.families.is_empty() && marks.is_empty() {
        return None;
    }
    let (wide, _) = draw(&map, &marks);
    let names: Vec<&str> = map.families.iter().map(|family| family.name.as_str()).collect();
    let found = if marks.is_empty() { String::new() } else { format!(" {} found.", marks.len()) };
    let figure = Figure::new(
        "gap",
        &format!("Gap against mismatch to {}", wafer.label),
        format!(
            "Gap in eV against the relaxed mismatch to {} at {temperature_k} K, which stands at zero. Curves, broken where the gap is indirect: {}.{found}",
            wafer.label,
            names.join(", ")
        ),
    )
    .drawn(wide, None);
    Some(figure.standalone())
}

/// What was found, numbered as in the table, widest gap first.
fn marks(fits: &[Fit]) -> Vec<Mark> {
    let numbered = fits.iter().zip(1..);
    let mut marks: Vec<Mark> = numbered
        .filter_map(|(fit, number)| {
            Some(Mark {
                numbers: vec![number],
                material: fit.material.label.clone(),
                mismatch: fit.mismatch?,
                gap_ev: fit.gap.ev,
                critical: None,
                junction: None,
                alike: false,
            })
        })
        .collect();
    marks.sort_by(|a, b| b.gap_ev.total_cmp(&a.gap_ev));
    marks
}
