//! The compositions of a family along the one way that is left open.

use crate::materials::alloy::solve::{STEPS, Wanted, between, fixed, line, matched_path, samples};
use crate::materials::alloy::{Composition, Family};

/// Compositions along the one way that is left open, end to end: of a family with two free
/// fractions those matched to a lattice constant in Å at a temperature in K; of one with a single
/// free fraction all of them; of others those that [`Family::otherwise`] leaves. `None` where
/// more than one way is open.
pub fn trace(family: &Family, lattice: Option<(f64, f64)>) -> Option<Vec<Composition>> {
    if let (2, Some(lattice)) = (family.freedom(), lattice) {
        let path = samples(&matched_path(family, lattice));
        return Some(path.into_iter().map(|(_, composition)| composition).collect());
    }
    let unsaid = family.otherwise.iter().take(family.freedom().saturating_sub(1));
    let wanted: Vec<Wanted> =
        unsaid.map(|(element, fraction)| Wanted::Fraction(element.clone(), *fraction)).collect();
    let (from, to) = line(family, &fixed(family, &wanted).ok()?)?;
    Some((0..=STEPS).map(|step| between(&from, &to, step as f64 / STEPS as f64)).collect())
}
