//! Which materials have a gap and fit a wafer.

use std::sync::Arc;

use crate::materials::alloy::trace::trace;
use crate::materials::alloy::{Composition, Family};
use crate::materials::{Gap, Material, SharedMaterial};
use crate::resolve::materials::{Definition, Library};
use crate::resolve::quantities::Scope;

/// What is looked for.
#[derive(Clone, Copy, Debug)]
pub struct Wish<'a> {
    /// Lowest and highest gap, eV, at `temperature_k`.
    pub gap_ev: (f64, f64),
    /// What to fit, if anything.
    pub wafer: Option<&'a Material>,
    /// How far the relaxed lattice constant may be off, as a share.
    pub mismatch: f64,
    /// K.
    pub temperature_k: f64,
}

/// Which end of what a family covers.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum End {
    /// The smallest gap of it inside the range.
    From,
    /// The largest.
    To,
}

/// A material that was found.
#[derive(Clone, Debug)]
pub struct Fit {
    /// The material, with its optics.
    pub material: SharedMaterial,
    /// At the temperature asked for.
    pub gap: Gap,
    /// Against the wafer at that temperature; `None` without a wafer.
    pub mismatch: Option<f64>,
    /// Set where a family fits over a range of compositions.
    pub end: Option<End>,
}

/// What came of it.
#[derive(Clone, Debug, Default)]
pub struct Search {
    /// By gap, then mismatch. Of a family that fits over a range of compositions both ends, one
    /// after the other.
    pub fits: Vec<Fit>,
    /// Where nothing fits: what comes nearest in gap among all that fit the wafer, and in
    /// mismatch among all that have the gap.
    pub nearest: Vec<Fit>,
    /// Families with more open fractions than the wish closes.
    pub left_out: Vec<String>,
}

/// A composition that was looked at.
#[derive(Clone)]
struct Point {
    composition: Composition,
    gap: Gap,
    mismatch: Option<f64>,
}

impl Wish<'_> {
    /// How far a gap lies outside the range, eV.
    fn beside(&self, gap_ev: f64) -> f64 {
        (self.gap_ev.0 - gap_ev).max(gap_ev - self.gap_ev.1).max(0.0)
    }

    /// The digits of a range and of a tolerance are those they were written with.
    fn has_gap(&self, gap_ev: f64) -> bool {
        self.beside(gap_ev) <= 1e-6
    }

    /// Without a wafer everything fits; a material without a lattice fits none.
    fn fits(&self, mismatch: Option<f64>) -> bool {
        self.wafer.is_none() || mismatch.is_some_and(|mismatch| mismatch.abs() <= self.mismatch + 1e-9)
    }

    /// Relaxed mismatch of a lattice constant in Å.
    fn mismatch_of(&self, angstrom: Option<f64>) -> Option<f64> {
        Some(angstrom? / self.wafer?.lattice_constant(self.temperature_k)? - 1.0)
    }

    fn point(&self, family: &Family, composition: Composition) -> Option<Point> {
        let gap = family.bands(&composition).gap(self.temperature_k)?;
        let mismatch = self.mismatch_of(family.lattice_constant(&composition, self.temperature_k));
        Some(Point { composition, gap, mismatch })
    }
}

/// Searches the built-in library.
pub fn search(wish: &Wish<'_>) -> Search {
    let mut library = Library::new();
    let mut scope = Scope::new();
    let names: Vec<String> = library.names().into_iter().map(str::to_owned).collect();
    let mut found = Search::default();
    let mut groups: Vec<Vec<Fit>> = Vec::new();
    let mut near: Vec<Fit> = Vec::new();
    for name in names {
        match library.find(&name, &mut scope) {
            Some(Definition::Compound(compound)) => {
                let material = compound.material.clone();
                let Some(gap) = material.gap(wish.temperature_k) else { continue };
                let mismatch = wish.mismatch_of(material.lattice_constant(wish.temperature_k));
                let fit = Fit { material, gap, mismatch, end: None };
                if wish.has_gap(gap.ev) && wish.fits(mismatch) {
                    groups.push(vec![fit]);
                } else if mismatch.is_some() || wish.wafer.is_none() {
                    near.push(fit);
                }
            }
            Some(Definition::Family(family)) => {
                let Some(points) = points(&family, wish) else {
                    found.left_out.push(name);
                    continue;
                };
                let mut made = |point: &Point, end: Option<End>| Fit {
                    material: Arc::new(library.alloy(&family, &point.composition, None)),
                    gap: point.gap,
                    mismatch: point.mismatch,
                    end,
                };
                match chosen(&family, &points, wish)[..] {
                    [] => near.extend(best(&points, wish).into_iter().map(|point| made(point, None))),
                    // That is a compound, which is found by itself.
                    [only] if is_corner(&only.composition) => {}
                    [only] => groups.push(vec![made(only, None)]),
                    [first, .., last] => {
                        groups.push(vec![made(first, Some(End::From)), made(last, Some(End::To))]);
                    }
                }
            }
            None => {}
        }
    }
    groups.sort_by(|a, b| match (a.first(), b.first()) {
        (Some(a), Some(b)) => by_gap(a, b),
        _ => std::cmp::Ordering::Equal,
    });
    found.fits = groups.into_iter().flatten().collect();
    if found.fits.is_empty() {
        found.nearest = nearest(&near, wish);
    }
    found
}

/// Whether a composition is an end member.
fn is_corner(composition: &Composition) -> bool {
    composition.iter().flatten().all(|fraction| *fraction < 1e-9 || *fraction > 1.0 - 1e-9)
}

fn by_gap(a: &Fit, b: &Fit) -> std::cmp::Ordering {
    let off = |fit: &Fit| fit.mismatch.unwrap_or(0.0).abs();
    a.gap.ev.total_cmp(&b.gap.ev).then(off(a).total_cmp(&off(b)))
}

/// The compositions of a family along the one way the wish leaves open, with points of their own
/// wherever the gap or the mismatch enters or leaves what is wished. `None` where more than one
/// way is open.
fn points(family: &Family, wish: &Wish<'_>) -> Option<Vec<Point>> {
    let lattice = wish.wafer.and_then(|wafer| wafer.lattice_constant(wish.temperature_k));
    let traced = trace(family, lattice.map(|angstrom| (angstrom, wish.temperature_k)))?;
    let points: Vec<Point> =
        traced.into_iter().filter_map(|composition| wish.point(family, composition)).collect();
    let mut all: Vec<Point> = Vec::new();
    for pair in points.windows(2) {
        let [a, b] = pair else { continue };
        all.push(a.clone());
        let mut inside: Vec<(f64, Point)> = Vec::new();
        let gap = |point: &Point| point.gap.ev;
        let off = |point: &Point| point.mismatch.unwrap_or(0.0);
        for wanted in [wish.gap_ev.0, wish.gap_ev.1] {
            inside.extend(crossing(family, wish, (a, b), |point| gap(point) - wanted));
        }
        for wanted in [-wish.mismatch, 0.0, wish.mismatch] {
            inside.extend(crossing(family, wish, (a, b), |point| off(point) - wanted));
        }
        inside.sort_by(|a, b| a.0.total_cmp(&b.0));
        all.extend(inside.into_iter().map(|(_, point)| point));
    }
    all.extend(points.last().cloned());
    Some(all)
}

/// Where `value` passes through 0 between two neighbours: how far along, and the point.
fn crossing(
    family: &Family,
    wish: &Wish<'_>,
    (a, b): (&Point, &Point),
    value: impl Fn(&Point) -> f64,
) -> Option<(f64, Point)> {
    let (start, end) = (value(a), value(b));
    if start * end >= 0.0 {
        return None;
    }
    let (mut low, mut high, mut found) = (0.0, 1.0, None);
    for _ in 0..50 {
        let middle = (low + high) / 2.0;
        let point = wish.point(family, between(&a.composition, &b.composition, middle))?;
        if value(&point) * start > 0.0 {
            low = middle
        } else {
            high = middle
        }
        found = Some((middle, point));
    }
    found
}

fn between(from: &Composition, to: &Composition, share: f64) -> Composition {
    let mix = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| a + share * (b - a)).collect();
    [mix(&from[0], &to[0]), mix(&from[1], &to[1])]
}

/// What to show of a family: of a ternary the composition that fits a wafer best, otherwise the
/// ends of the range that has the gap.
fn chosen<'p>(family: &Family, points: &'p [Point], wish: &Wish<'_>) -> Vec<&'p Point> {
    let good = || points.iter().filter(|point| wish.has_gap(point.gap.ev) && wish.fits(point.mismatch));
    if wish.wafer.is_some() && family.freedom() == 1 {
        let off = |point: &&Point| point.mismatch.unwrap_or(f64::INFINITY).abs();
        return good().min_by(|a, b| off(a).total_cmp(&off(b))).into_iter().collect();
    }
    let low = good().min_by(|a, b| a.gap.ev.total_cmp(&b.gap.ev));
    let high = good().max_by(|a, b| a.gap.ev.total_cmp(&b.gap.ev));
    match (low, high) {
        (Some(low), Some(high)) if high.gap.ev - low.gap.ev > 1e-3 => vec![low, high],
        (low, _) => low.into_iter().collect(),
    }
}

/// The nearest in gap of those that fit, and the nearest in mismatch of those that have the gap.
fn best<'p>(points: &'p [Point], wish: &Wish<'_>) -> Vec<&'p Point> {
    let off = |point: &&Point| point.mismatch.unwrap_or(0.0).abs();
    let fitting = points.iter().filter(|point| wish.fits(point.mismatch));
    let with_gap = points.iter().filter(|point| wish.has_gap(point.gap.ev));
    let in_gap = fitting.min_by(|a, b| wish.beside(a.gap.ev).total_cmp(&wish.beside(b.gap.ev)));
    let in_mismatch = with_gap.min_by(|a, b| off(a).total_cmp(&off(b)));
    in_gap.into_iter().chain(in_mismatch).collect()
}

fn nearest(near: &[Fit], wish: &Wish<'_>) -> Vec<Fit> {
    let off = |fit: &&Fit| fit.mismatch.unwrap_or(0.0).abs();
    let in_gap = near
        .iter()
        .filter(|fit| wish.fits(fit.mismatch))
        .min_by(|a, b| wish.beside(a.gap.ev).total_cmp(&wish.beside(b.gap.ev)));
    let in_mismatch =
        near.iter().filter(|fit| wish.has_gap(fit.gap.ev)).min_by(|a, b| off(a).total_cmp(&off(b)));
    in_gap.into_iter().chain(in_mismatch).cloned().collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::resolve::materials::look_up;

    fn wafer(name: &str) -> SharedMaterial {
        look_up(name, None).0.value.expect("a wafer")
    }

    fn on(name: &str, gap_ev: (f64, f64), mismatch: f64, temperature_k: f64) -> Search {
        let wafer = wafer(name);
        search(&Wish { gap_ev, wafer: Some(&wafer), mismatch, temperature_k })
    }

    #[test]
    fn what_fits_gallium_arsenide() {
        let found = on("GaAs", (1.7, 1.95), 1e-3, 300.0);
        let labels: Vec<&str> = found.fits.iter().map(|fit| fit.material.label.as_str()).collect();
        // Vegard's rule with the constants of Vurgaftman et al. (2001), gap of the ordered alloy.
        assert!(labels.contains(&"Ga0.516In0.484P"), "{labels:?}");
        assert!(labels.iter().any(|label| label.starts_with("Al0.")), "{labels:?}");
        assert!(!labels.iter().any(|label| label.starts_with("GaAs")), "{labels:?}");
        let starts: Vec<f64> =
            found.fits.iter().filter(|fit| fit.end != Some(End::To)).map(|fit| fit.gap.ev).collect();
        assert!(starts.windows(2).all(|pair| pair[0] <= pair[1]), "{starts:?}");
        for fit in &found.fits {
            assert!((1.7 - 1e-6..=1.95 + 1e-6).contains(&fit.gap.ev), "{}", fit.material.label);
            assert!(fit.mismatch.expect("a lattice").abs() <= 1.0001e-3, "{}", fit.material.label);
        }
        // A quaternary shows both ends of what it reaches inside the range.
        let quaternary: Vec<f64> =
            found.fits.iter().filter(|fit| fit.material.name == "AlGaInP").map(|fit| fit.gap.ev).collect();
        assert_eq!(quaternary.len(), 2);
        assert!((quaternary[1] - 1.95).abs() < 1e-4);
    }

    #[test]
    fn a_wider_tolerance_finds_more_and_temperature_moves_the_gap() {
        let labels = |found: Search| -> Vec<String> {
            found.fits.into_iter().map(|fit| fit.material.label.clone()).collect()
        };
        assert!(labels(on("Si", (2.2, 2.3), 5e-3, 300.0)).contains(&"GaP".to_owned()));
        assert!(!labels(on("Si", (2.2, 2.3), 1e-3, 300.0)).contains(&"GaP".to_owned()));
        // Varshni's law with the constants of Vurgaftman et al.: GaAs 1.42 eV at 300 K, 1.51 at 77 K.
        assert!(labels(on("GaAs", (1.42, 1.43), 1e-3, 300.0)).contains(&"GaAs".to_owned()));
        assert!(labels(on("GaAs", (1.50, 1.515), 1e-3, 77.0)).contains(&"GaAs".to_owned()));
    }

    #[test]
    fn without_a_wafer_ternaries_show_their_ends_and_quaternaries_are_named() {
        let found = search(&Wish { gap_ev: (1.0, 1.1), wafer: None, mismatch: 1e-3, temperature_k: 300.0 });
        assert!(found.left_out.contains(&"InGaAsP".to_owned()), "{:?}", found.left_out);
        let ternary: Vec<f64> =
            found.fits.iter().filter(|fit| fit.material.name == "GaInAs").map(|fit| fit.gap.ev).collect();
        assert_eq!(ternary.len(), 2);
        assert!((ternary[0] - 1.0).abs() < 1e-6 && (ternary[1] - 1.1).abs() < 1e-6, "{ternary:?}");
    }

    #[test]
    fn an_end_member_is_found_once() {
        let found = on("InP", (1.3, 1.38), 1e-3, 300.0);
        let single = |fit: &&Fit| fit.end.is_none() && fit.material.label == "InP";
        assert_eq!(found.fits.iter().filter(single).count(), 1);
    }

    #[test]
    fn nothing_found_names_the_nearest() {
        let found = on("GaAs", (3.5, 3.6), 1e-3, 300.0);
        assert!(found.fits.is_empty());
        let nearest = found.nearest.first().expect("something fits");
        assert!(nearest.mismatch.expect("a lattice").abs() <= 1.0001e-3 && nearest.gap.ev > 2.0);
    }
}
