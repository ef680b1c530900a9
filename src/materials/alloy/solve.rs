//! Which composition of a family meets what was asked for, and what a family can reach.

use crate::materials::alloy::{Composition, Family};
use crate::materials::{Gap, GapKind, ROOM_TEMPERATURE_K};

/// One thing a composition has to meet.
#[derive(Clone, Debug, PartialEq)]
pub enum Wanted {
    /// Relaxed lattice constant, Å, at a temperature, K.
    Lattice {
        /// Å.
        angstrom: f64,
        /// K.
        temperature_k: f64,
    },
    /// Lowest gap, eV, at 300 K.
    Gap(f64),
    /// Fraction of one element of its sublattice.
    Fraction(String, f64),
}

/// Why no composition was found.
#[derive(Clone, Debug, PartialEq)]
pub enum Unsolved {
    /// So many fractions are still open.
    Open(usize),
    /// More was asked for than the family has free fractions.
    Over,
    /// The gap lies outside what can be reached under the other wishes.
    Gap(Box<GapReach>),
    /// The lattice constant lies outside what can be reached: lowest and highest, Å.
    Lattice(f64, f64),
    /// Fractions of one sublattice that cannot hold together.
    Fractions,
    /// An end member lacks what is asked for.
    NoData,
}

/// What gaps can be reached, and where.
#[derive(Clone, Debug, PartialEq)]
pub struct GapReach {
    /// Smallest gap and its composition.
    pub low: (Gap, Composition),
    /// Largest gap and its composition.
    pub high: (Gap, Composition),
}

/// A path through the composition space, from 0 to 1. `None` where the wishes that define the
/// path cannot be met.
pub(super) struct Path<'a> {
    at: Box<dyn Fn(f64) -> Option<Composition> + 'a>,
}

/// Points in which a path is looked at; between two of them a gap is taken as monotonic.
pub(super) const STEPS: usize = 120;

/// The composition that meets every wish.
///
/// # Errors
/// [`Unsolved`] says what stands in the way, with the range that can be reached.
pub fn solve(family: &Family, wanted: &[Wanted]) -> Result<Composition, Unsolved> {
    let freedom = family.freedom();
    if wanted.len() > freedom {
        return Err(Unsolved::Over);
    }
    if wanted.len() < freedom {
        return Err(Unsolved::Open(freedom - wanted.len()));
    }
    let fixed = fixed(family, wanted)?;
    let lattice = wanted.iter().find_map(|wish| match wish {
        Wanted::Lattice { angstrom, temperature_k } => Some((*angstrom, *temperature_k)),
        _ => None,
    });
    let gap = wanted.iter().find_map(|wish| match wish {
        Wanted::Gap(ev) => Some(*ev),
        _ => None,
    });
    match (lattice, gap) {
        (None, None) => complete(family, &fixed),
        (Some(lattice), None) => {
            let line = line(family, &fixed).ok_or(Unsolved::Fractions)?;
            on_lattice(family, &line, lattice)
        }
        (None, Some(gap)) => {
            let (from, to) = line(family, &fixed).ok_or(Unsolved::Fractions)?;
            let path = Path { at: Box::new(move |t| Some(between(&from, &to, t))) };
            on_gap(family, &path, gap)
        }
        (Some(lattice), Some(gap)) => on_gap(family, &matched_path(family, lattice), gap),
    }
}

/// The gaps a family reaches at 300 K: at any composition, or only where it has the lattice
/// constant given in Å at a temperature in K.
pub fn gap_reach(family: &Family, lattice: Option<(f64, f64)>) -> Option<GapReach> {
    match (lattice, family.freedom()) {
        (Some(lattice), 1) => {
            let line = line(family, &[])?;
            let composition = on_lattice(family, &line, lattice).ok()?;
            reach([composition].into_iter(), family)
        }
        (Some(lattice), 2) => {
            let path = matched_path(family, lattice);
            reach(samples(&path).into_iter().map(|(_, composition)| composition), family)
        }
        (None, 1) => {
            let (from, to) = line(family, &[])?;
            reach((0..=STEPS).map(|step| between(&from, &to, step as f64 / STEPS as f64)), family)
        }
        (None, 2) => reach(plane(family).into_iter(), family),
        // Three free fractions: between every two members, where bowing shows most.
        (None, _) => reach(edges(family).into_iter(), family),
        _ => None,
    }
}

/// Smallest and largest lattice constant in Å of a family at a temperature in K. Vegard's rule
/// is linear along every edge, so the ends are end members.
pub fn lattice_reach(family: &Family, temperature_k: f64) -> Option<(f64, f64)> {
    let constants: Option<Vec<f64>> = family
        .members
        .iter()
        .flatten()
        .map(|member| member.material.lattice_constant(temperature_k))
        .collect();
    let constants = constants?;
    let low = constants.iter().copied().fold(f64::INFINITY, f64::min);
    let high = constants.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    (low <= high).then_some((low, high))
}

/// The fraction of the first element at which the lowest gap of a family with one free fraction
/// changes between direct and indirect at 300 K, if it does.
pub fn crossing(family: &Family) -> Option<f64> {
    let (from, to) = line(family, &[])?;
    let direct = |t: f64| {
        let gap = family.bands(&between(&from, &to, t)).gap(ROOM_TEMPERATURE_K);
        gap.map(|gap| gap.kind == GapKind::Direct)
    };
    let step = |at: usize| at as f64 / STEPS as f64;
    let change = (0..STEPS).find(|&at| direct(step(at)) != direct(step(at + 1)))?;
    let (mut low, mut high) = (step(change), step(change + 1));
    let below = direct(low);
    for _ in 0..50 {
        let middle = (low + high) / 2.0;
        if direct(middle) == below { low = middle } else { high = middle }
    }
    let site = usize::from(family.sites[0].len() == 1);
    between(&from, &to, (low + high) / 2.0)[site].first().copied()
}

/// A fraction that was asked for: sublattice, place, value.
pub(super) type Fixed = (usize, usize, f64);

pub(super) fn fixed(family: &Family, wanted: &[Wanted]) -> Result<Vec<Fixed>, Unsolved> {
    let mut fixed = Vec::new();
    for wish in wanted {
        let Wanted::Fraction(element, value) = wish else { continue };
        let (site, at) = family.position(element).ok_or(Unsolved::Fractions)?;
        fixed.push((site, at, *value));
    }
    Ok(fixed)
}

/// Fills in the fractions that follow from those stated.
fn complete(family: &Family, fixed: &[Fixed]) -> Result<Composition, Unsolved> {
    let mut composition = [Vec::new(), Vec::new()];
    for (site, elements) in family.sites.iter().enumerate() {
        let own: Vec<&Fixed> = fixed.iter().filter(|(on, ..)| *on == site).collect();
        let open = (0..elements.len()).filter(|at| !own.iter().any(|(_, place, _)| place == at));
        let open: Vec<usize> = open.collect();
        let left = 1.0 - own.iter().map(|(.., value)| value).sum::<f64>();
        if open.len() > 1 || !(-1e-9..=1.0 + 1e-9).contains(&left) {
            return Err(Unsolved::Fractions);
        }
        let mut fractions = vec![left.clamp(0.0, 1.0); elements.len()];
        for (_, place, value) in own {
            fractions[*place] = *value;
        }
        composition[site] = fractions;
    }
    Ok(composition)
}

/// The straight line of compositions that is left once all but one fraction are fixed: its two
/// ends. `None` where more or fewer are open.
pub(super) fn line(family: &Family, fixed: &[Fixed]) -> Option<(Composition, Composition)> {
    let mut ends = [family.corner(), family.corner()];
    let mut moving = 0;
    for (site, elements) in family.sites.iter().enumerate() {
        let own: Vec<&Fixed> = fixed.iter().filter(|(on, ..)| *on == site).collect();
        let left = 1.0 - own.iter().map(|(.., value)| value).sum::<f64>();
        let open: Vec<usize> =
            (0..elements.len()).filter(|at| !own.iter().any(|(_, place, _)| place == at)).collect();
        if left < -1e-9 || open.len() > 2 {
            return None;
        }
        for (end, composition) in ends.iter_mut().enumerate() {
            composition[site] = vec![0.0; elements.len()];
            for (_, place, value) in &own {
                composition[site][*place] = *value;
            }
            // From the first open element at nothing to the first open element at all of it.
            match open[..] {
                [only] => composition[site][only] = left.max(0.0),
                [first, second] => {
                    composition[site][if end == 0 { second } else { first }] = left.max(0.0);
                }
                _ => {}
            }
        }
        moving += usize::from(open.len() == 2);
    }
    let [from, to] = ends;
    (moving == 1).then_some((from, to))
}

pub(super) fn between(from: &Composition, to: &Composition, t: f64) -> Composition {
    let mix = |a: &Vec<f64>, b: &Vec<f64>| a.iter().zip(b).map(|(a, b)| a + t * (b - a)).collect();
    [mix(&from[0], &to[0]), mix(&from[1], &to[1])]
}

/// The point of a line with the lattice constant wanted. One sublattice varies along a line, so
/// Vegard's rule is linear on it; where the lattice bows, the root is bracketed by the ends.
fn on_lattice(
    family: &Family,
    (from, to): &(Composition, Composition),
    (angstrom, temperature_k): (f64, f64),
) -> Result<Composition, Unsolved> {
    let at = |composition: &Composition| {
        family.lattice_constant(composition, temperature_k).ok_or(Unsolved::NoData)
    };
    let (start, end) = (at(from)?, at(to)?);
    let t = (angstrom - start) / (end - start);
    // One part in 1e9 of the way is far below what any growth can set.
    if !(-1e-9..=1.0 + 1e-9).contains(&t) {
        return Err(Unsolved::Lattice(start.min(end), start.max(end)));
    }
    let linear = between(from, to, t.clamp(0.0, 1.0));
    if (at(&linear)? - angstrom).abs() < 1e-9 {
        return Ok(linear);
    }
    let (mut low, mut high) = (0.0, 1.0);
    for _ in 0..60 {
        let middle = (low + high) / 2.0;
        let composition = between(from, to, middle);
        let below = at(&composition)? < angstrom;
        if below == (start < end) { low = middle } else { high = middle }
    }
    Ok(between(from, to, (low + high) / 2.0))
}

/// The matched compositions of a family with two free fractions, by the fraction of its first
/// element.
pub(super) fn matched_path(family: &Family, lattice: (f64, f64)) -> Path<'_> {
    Path {
        at: Box::new(move |t| {
            let line = line(family, &[(0, 0, t)])?;
            on_lattice(family, &line, lattice).ok()
        }),
    }
}

pub(super) fn samples(path: &Path<'_>) -> Vec<(f64, Composition)> {
    let steps = (0..=STEPS).map(|step| step as f64 / STEPS as f64);
    let mut found: Vec<(f64, Composition)> =
        steps.filter_map(|t| (path.at)(t).map(|composition| (t, composition))).collect();
    // Where the path begins or ends between two steps, go to the very end.
    for (inside, outside) in [(0, -1.0), (found.len().saturating_sub(1), 1.0)] {
        let Some((t, _)) = found.get(inside) else { continue };
        let (mut good, mut bad) = (*t, (t + outside / STEPS as f64).clamp(0.0, 1.0));
        for _ in 0..40 {
            let middle = (good + bad) / 2.0;
            if (path.at)(middle).is_some() { good = middle } else { bad = middle }
        }
        if let Some(composition) = (path.at)(good) {
            found.push((good, composition));
        }
    }
    found.sort_by(|a, b| a.0.total_cmp(&b.0));
    found
}

/// The point of a path with the gap wanted; a direct one is preferred to an indirect one, the
/// earlier to the later.
fn on_gap(family: &Family, path: &Path<'_>, wanted: f64) -> Result<Composition, Unsolved> {
    let gap_at = |composition: &Composition| family.bands(composition).gap(ROOM_TEMPERATURE_K);
    let mut points = Vec::new();
    for (t, composition) in samples(path) {
        points.push((t, gap_at(&composition).ok_or(Unsolved::NoData)?, composition));
    }
    let reach =
        spanned(points.iter().map(|(_, gap, composition)| (*gap, composition))).ok_or(Unsolved::NoData)?;
    let mut best: Option<(bool, Composition)> = None;
    for pair in points.windows(2) {
        let [(start, a, from), (end, b, to)] = pair else { continue };
        if (a.ev - wanted) * (b.ev - wanted) > 0.0 {
            continue;
        }
        let (mut low, mut high) = (*start, *end);
        let nearer = (a.ev - wanted).abs() <= (b.ev - wanted).abs();
        let mut composition = if nearer { from.clone() } else { to.clone() };
        for _ in 0..60 {
            let middle = (low + high) / 2.0;
            let Some(point) = (path.at)(middle) else { break };
            let Some(gap) = gap_at(&point) else { break };
            if (gap.ev - wanted) * (a.ev - wanted) > 0.0 {
                low = middle
            } else {
                high = middle
            }
            composition = point;
        }
        let direct = gap_at(&composition).is_some_and(|gap| gap.kind == GapKind::Direct);
        if best.as_ref().is_none_or(|(known, _)| direct && !known) {
            best = Some((direct, composition));
        }
    }
    if let Some((_, composition)) = best {
        return Ok(composition);
    }
    // A gap asked for at the very end of the range, to the digits it was printed with.
    for (gap, composition) in [&reach.low, &reach.high] {
        if (gap.ev - wanted).abs() < 5e-4 {
            return Ok(composition.clone());
        }
    }
    Err(Unsolved::Gap(Box::new(reach)))
}

fn reach(compositions: impl Iterator<Item = Composition>, family: &Family) -> Option<GapReach> {
    let mut points = Vec::new();
    for composition in compositions {
        points.push((family.bands(&composition).gap(ROOM_TEMPERATURE_K)?, composition));
    }
    spanned(points.iter().map(|(gap, composition)| (*gap, composition)))
}

/// A gap and where it lies.
type Point<'a> = (Gap, &'a Composition);

/// Smallest and largest of some gaps, the first of equals.
fn spanned<'a>(points: impl Iterator<Item = Point<'a>>) -> Option<GapReach> {
    let mut reach: Option<(Point<'a>, Point<'a>)> = None;
    for point in points {
        reach = Some(match reach {
            None => (point, point),
            Some((low, high)) => (
                if point.0.ev < low.0.ev { point } else { low },
                if point.0.ev > high.0.ev { point } else { high },
            ),
        });
    }
    let ((low, low_at), (high, high_at)) = reach?;
    Some(GapReach { low: (low, low_at.clone()), high: (high, high_at.clone()) })
}

/// The compositions of a family with two free fractions, on a grid.
fn plane(family: &Family) -> Vec<Composition> {
    let steps = 60;
    let fraction = |step: usize| step as f64 / steps as f64;
    let mut all = Vec::new();
    for first in 0..=steps {
        let Some((from, to)) = line(family, &[(0, 0, fraction(first))]) else { continue };
        all.extend((0..=steps).map(|second| between(&from, &to, fraction(second))));
    }
    all
}

/// The straight lines between every two end members.
fn edges(family: &Family) -> Vec<Composition> {
    let corner = |row: usize, column: usize| {
        let mut corner = [vec![0.0; family.sites[0].len()], vec![0.0; family.sites[1].len()]];
        corner[0][row] = 1.0;
        if let Some(slot) = corner[1].get_mut(column) {
            *slot = 1.0;
        }
        corner
    };
    let rows = 0..family.sites[0].len();
    // Group IV has no second list.
    let columns = family.sites[1].len().max(1);
    let corners: Vec<Composition> = rows
        .flat_map(|row| (0..columns).map(move |column| (row, column)))
        .map(|(row, column)| corner(row, column))
        .collect();
    let steps = 20;
    let mut all = Vec::new();
    for (at, from) in corners.iter().enumerate() {
        for to in &corners[at + 1..] {
            all.extend((0..=steps).map(|step| between(from, to, step as f64 / steps as f64)));
        }
    }
    all
}
