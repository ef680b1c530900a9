//! Index of an alloy from tables of its relatives.
//!
//! A table is carried to another composition by mapping photon energy piecewise linearly through
//! the critical points E0, E1, E2, and dielectric functions (never n and k) are averaged there:
//! Snyder, Woollam, Alterovitz and Johs, J. Appl. Phys. 68, 5925 (1990).
//!
//! Below the direct gap a direct relative keeps its own tail, moved rigidly, for 0.15 eV or half its
//! gap; further down, and at once for an indirect one, whose table there shows its own X gap, an
//! Urbach tail follows. Where the X gap of the target lies
//! below its direct gap, a square law starts from it. Below both, nothing is absorbed.

use std::sync::Arc;

use crate::materials::alloy::transparent::Transparent;
use crate::materials::alloy::{Composition, Family};
use crate::materials::optics::{EV_M, IndexTable, Optics};
use crate::materials::{Bands, ROOM_TEMPERATURE_K};

/// How the absorption below the direct gap is written.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Tail {
    /// Urbach energy, eV.
    pub urbach_ev: f64,
    /// `C` in `α = C (E − E_X)²` for the indirect gap, 1/m/eV².
    pub indirect_per_m_ev2: f64,
    /// A law for the edge in the middle of a family, where both ends say too little.
    pub form: Option<EdgeForm>,
}

/// `α = a (1 + (E − E0)/E′)` above the gap (the form of O. D. Miller, E. Yablonovitch and S. R. Kurtz,
/// IEEE J. Photovolt. 2, 303 (2012)), in full halfway between the ends of a family, not at all at an end.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EdgeForm {
    /// `a`, 1/m.
    pub per_m: f64,
    /// `E′`, eV.
    pub over_ev: f64,
    /// Where the tables take over again, eV; the law fades over the last `FADING_EV`.
    pub to_ev: f64,
    /// Share of the law here.
    pub weight: f64,
}

/// See [`EdgeForm::to_ev`], eV.
const FADING_EV: f64 = 0.2;

impl EdgeForm {
    /// The factor on an absorption of `per_m` at `energy`, both above the gap `e0`.
    fn factor(&self, energy: f64, e0: f64, per_m: f64) -> f64 {
        let fading = ((self.to_ev - energy) / FADING_EV).clamp(0.0, 1.0);
        let law = self.per_m * (1.0 + (energy - e0) / self.over_ev);
        if per_m > 0.0 { 1.0 + self.weight * fading * (law / per_m - 1.0) } else { 1.0 }
    }
}

/// A table of one composition and its critical points.
#[derive(Clone, Debug, PartialEq)]
pub struct Sample {
    /// The composition the table belongs to.
    pub composition: Composition,
    /// n and k at 300 K.
    pub table: Arc<IndexTable>,
    /// Direct gap E0 of the sample, eV; the family's own at that composition where not stated.
    pub e0_ev: Option<f64>,
    /// E1 and E2, eV.
    pub critical_ev: (f64, f64),
    /// The published law of its index below the gap; end members have it.
    pub transparent: Option<Transparent>,
}

/// Tables at some compositions.
#[derive(Clone, Debug, PartialEq)]
pub struct Blend {
    /// In a family with one free fraction sorted by it; else one for each end member in the
    /// order of [`Family::members`].
    pub samples: Vec<Sample>,
    /// Absorption below the direct gap.
    pub tail: Tail,
}

/// One parent table moved along with aluminium, as for `(Al,Ga)InP`.
#[derive(Clone, Debug, PartialEq)]
pub struct Shifted {
    /// The parent's table.
    pub table: Arc<IndexTable>,
    /// E0, E1 and E2 of the parent, eV.
    pub parent_ev: [f64; 3],
    /// `x` is the fraction of the first element in the sum of both.
    pub along: [String; 2],
    /// E1 and E2 move by `a x + b x²`, eV.
    pub moves_ev: [(f64, f64); 2],
    /// `ε − 1` is scaled by `1 + a x + b x²`.
    pub scale: (f64, f64),
    /// The compound that takes over as the fraction of an element grows.
    pub end: Option<Box<End>>,
    /// Absorption below the direct gap.
    pub tail: Tail,
}

/// A compound at the end of a family of which a parent table is moved.
#[derive(Clone, Debug, PartialEq)]
pub struct End {
    /// All of its sublattice in the compound.
    pub element: String,
    /// The fraction from which on the compound takes over, linearly.
    pub from: f64,
    /// Its table.
    pub sample: Sample,
}

/// One source of the dielectric function at the target.
struct Source<'a> {
    weight: f64,
    table: &'a IndexTable,
    /// E0, E1, E2, eV.
    points: [f64; 3],
    /// Whether its lowest gap is E0, so that its table is a clean tail below.
    is_direct: bool,
    /// Factor on `ε − 1`.
    scale: f64,
    /// Its index below the gap by a published law.
    transparent: Option<Transparent>,
}

impl Blend {
    /// The optics of `family` at `composition` with the bands in force there.
    pub fn at(&self, family: &Family, composition: &Composition, bands: &Bands) -> Optics {
        let Some(e0) = edge(bands) else { return Optics::None };
        let mut sources = Vec::new();
        for (weight, sample) in self.weighted(family, composition) {
            let own = sample.e0_ev.or_else(|| edge(&family.bands(&sample.composition)));
            let Some(own) = own else { return Optics::None };
            let points = [own, sample.critical_ev.0, sample.critical_ev.1];
            let is_direct = indirect_gap(&family.bands(&sample.composition)).is_none();
            let transparent = sample.transparent;
            sources.push(Source { weight, table: &sample.table, points, is_direct, scale: 1.0, transparent });
        }
        let mean = |at: usize| sources.iter().map(|source| source.weight * source.points[at]).sum::<f64>();
        let target = [e0, mean(1), mean(2)];
        let is_direct = bands.gamma.is_some();
        let mut tail = self.tail;
        if let Some(form) = &mut tail.form {
            let site = usize::from(family.sites[0].len() == 1);
            form.weight = 4.0 * composition[site].iter().product::<f64>();
        }
        table(&sources, target, (indirect_gap(bands), is_direct), tail)
    }

    /// The samples that speak for a composition, with weights that sum to 1: its neighbours along
    /// the one free fraction, or every end member by Vegard's weights.
    fn weighted<'a>(&'a self, family: &Family, composition: &Composition) -> Vec<(f64, &'a Sample)> {
        if family.freedom() != 1 {
            let mut weights =
                composition[0].iter().flat_map(|three| composition[1].iter().map(move |five| three * five));
            let all = self.samples.iter().map(|sample| (weights.next().unwrap_or(0.0), sample));
            return all.filter(|(weight, _)| *weight > 0.0).collect();
        }
        let site = usize::from(family.sites[0].len() == 1);
        let along = |composition: &Composition| composition[site].first().copied().unwrap_or(0.0);
        let x = along(composition);
        let above = self.samples.partition_point(|sample| along(&sample.composition) <= x);
        let (Some(left), Some(right)) =
            (above.checked_sub(1).and_then(|at| self.samples.get(at)), self.samples.get(above))
        else {
            // At or beyond the last sample on one side: that sample alone.
            let end = if above == 0 { self.samples.first() } else { self.samples.last() };
            return end.map(|sample| (1.0, sample)).into_iter().collect();
        };
        let (low, high) = (along(&left.composition), along(&right.composition));
        let share = (x - low) / (high - low);
        if share <= 0.0 { vec![(1.0, left)] } else { vec![(1.0 - share, left), (share, right)] }
    }
}

impl Shifted {
    /// The optics of `family` at `composition` with the bands in force there.
    pub fn at(&self, family: &Family, composition: &Composition, bands: &Bands) -> Optics {
        let Some(e0) = direct_gap(bands) else { return Optics::None };
        let fraction =
            |element: &str| family.position(element).map_or(0.0, |(site, at)| composition[site][at]);
        let [first, second] = [fraction(&self.along[0]), fraction(&self.along[1])];
        let x = if first + second > 0.0 { first / (first + second) } else { 0.0 };
        let polynomial = |(a, b): (f64, f64)| a * x + b * x * x;
        let [_, e1, e2] = self.parent_ev;
        let mut target = [e0, e1 + polynomial(self.moves_ev[0]), e2 + polynomial(self.moves_ev[1])];
        let parent = |weight: f64| Source {
            weight,
            table: &self.table,
            points: self.parent_ev,
            is_direct: true,
            scale: 1.0 + polynomial(self.scale),
            transparent: None,
        };
        let mut sources = vec![parent(1.0)];
        if let Some(end) = &self.end {
            let End { element, from, sample } = end.as_ref();
            let share = ((fraction(element) - from) / (1.0 - from)).clamp(0.0, 1.0);
            let (e1, e2) = sample.critical_ev;
            let Some(own) = sample.e0_ev else { return Optics::None };
            if share > 0.0 {
                target[1] += share * (e1 - target[1]);
                target[2] += share * (e2 - target[2]);
                let points = [own, e1, e2];
                let end = Source {
                    weight: share,
                    table: &sample.table,
                    points,
                    is_direct: true,
                    scale: 1.0,
                    transparent: None,
                };
                sources = vec![parent(1.0 - share), end];
            }
        }
        table(&sources, target, (indirect_gap(bands), true), self.tail)
    }
}

/// Where the table starts to absorb: the direct gap, or the lowest one where no direct gap is
/// known, as in SiGe.
fn edge(bands: &Bands) -> Option<f64> {
    direct_gap(bands).or_else(|| bands.gap(ROOM_TEMPERATURE_K).map(|gap| gap.ev))
}

fn direct_gap(bands: &Bands) -> Option<f64> {
    bands.gamma.as_ref().map(|gamma| gamma.at(ROOM_TEMPERATURE_K))
}

/// The X gap where it lies below the direct one.
fn indirect_gap(bands: &Bands) -> Option<f64> {
    let x = bands.x.as_ref()?.at(ROOM_TEMPERATURE_K);
    (x < direct_gap(bands)?).then_some(x)
}

/// Knots of the energy map of one material. Just below the gap the map is rigid, so that an
/// Urbach tail keeps its slope.
fn knots([e0, e1, e2]: [f64; 3], rigid: f64) -> [f64; 6] {
    [0.0, e0 - rigid, e0, e1, e2, e2 + 1.5]
}

/// Maps an energy of the target to the energy of a source.
fn mapped(energy: f64, target: &[f64; 6], source: &[f64; 6]) -> f64 {
    let at = target.partition_point(|&knot| knot <= energy).clamp(1, 5);
    let share = (energy - target[at - 1]) / (target[at] - target[at - 1]);
    source[at - 1] + share * (source[at] - source[at - 1])
}

/// The published law of the index below the gap of a mix of end members, which lie too far apart there for
/// a mean of their dielectric functions.
struct Below {
    target: Transparent,
    /// eV.
    e0: f64,
}

impl Below {
    fn of(sources: &[Source<'_>], e0: f64) -> Option<Self> {
        let laws: Option<Vec<(f64, Transparent)>> =
            sources.iter().map(|source| Some((source.weight, source.transparent?))).collect();
        Some(Self { target: Transparent::mixed(laws?.into_iter()), e0 })
    }

    /// What the law adds to `n` at an energy: nothing at the gap, all of it from a fifth below. The law is
    /// bent by what it misses of each end member at the same share of its gap, so that it meets their data.
    fn correction(&self, energy: f64, n: f64, sources: &[Source<'_>]) -> f64 {
        if energy >= self.e0 {
            return 0.0;
        }
        let bend = |source: &Source<'_>| {
            let own_e0 = source.points[0];
            let last = source.table.wavelength_m.last().map_or(0.0, |wavelength| EV_M / wavelength);
            let own = (energy / self.e0 * own_e0).max(last).min(own_e0);
            let measured = source.table.at(EV_M / own, 0.0).0;
            Some(source.weight * measured / source.transparent?.n(own, own_e0)?)
        };
        let bent: Option<f64> = sources.iter().map(bend).sum();
        let law = bent.zip(self.target.n(energy, self.e0)).map(|(bent, law)| bent * law);
        let share = ((self.e0 - energy) / (0.2 * self.e0)).clamp(0.0, 1.0);
        law.map_or(0.0, |law| share * (law - n))
    }
}

/// Evaluates the mix on the common grid. `x_gap` is the X gap where it lies below E0, and the flag
/// says whether E0 is the direct gap.
fn table(
    sources: &[Source<'_>],
    target: [f64; 3],
    (x_gap, edge_is_direct): (Option<f64>, bool),
    tail: Tail,
) -> Optics {
    let gaps = sources.iter().map(|source| source.points[0]).chain([target[0]]);
    let rigid = 0.15_f64.min(gaps.fold(f64::INFINITY, f64::min) / 2.0);
    let own = knots(target, rigid);
    let maps: Vec<[f64; 6]> = sources.iter().map(|source| knots(source.points, rigid)).collect();
    let increasing = |knots: &[f64; 6]| knots.windows(2).all(|pair| pair[0] < pair[1]);
    if sources.is_empty() || !maps.iter().chain([&own]).all(increasing) {
        return Optics::None;
    }
    let e0 = target[0];
    let law = Below::of(sources, e0);
    let index_at = |energy: f64| -> (f64, f64) {
        let (mut real, mut imaginary) = (0.0, 0.0);
        for (source, map) in sources.iter().zip(&maps) {
            let (n, mut k) = source.table.at(EV_M / mapped(energy, &own, map).max(1e-3), 0.0);
            // Where the map is no longer rigid it would stretch the tail of a relative with a small gap.
            let from = if source.is_direct { rigid } else { 0.0 };
            if energy < e0 - from {
                k = source.table.at(EV_M / (source.points[0] - from), 0.0).1
                    * ((energy - (e0 - from)) / tail.urbach_ev).exp();
            }
            real += source.weight * (1.0 + source.scale * (n * n - k * k - 1.0));
            imaginary += source.weight * source.scale * 2.0 * n * k;
        }
        let modulus = real.hypot(imaginary);
        let mut n = ((modulus + real) / 2.0).max(0.0).sqrt();
        if let Some(law) = &law {
            n += law.correction(energy, n, sources);
        }
        // ε2/2n rather than a difference of nearly equal numbers, which would leave noise in k.
        (n, if n > 0.0 { imaginary / (2.0 * n) } else { 0.0 })
    };
    let per_k = |energy: f64| 4.0 * std::f64::consts::PI * energy / EV_M;
    let raised = |energy: f64, k: f64| match &tail.form {
        Some(form) => k * form.factor(energy, e0, k * per_k(energy)),
        None => k,
    };
    let k_at_gap = index_at(e0).1;
    let at_gap = raised(e0, k_at_gap) * per_k(e0);
    let tail_factor = if k_at_gap > 0.0 { raised(e0, k_at_gap) / k_at_gap } else { 1.0 };
    // The indirect law holds up to E0 and takes at most four fifths of the absorption there, so
    // that what is left of the direct tail meets the table without a step.
    let law = |energy: f64| x_gap.map_or(0.0, |x| tail.indirect_per_m_ev2 * (energy - x).max(0.0).powi(2));
    let share = if law(e0) > 0.0 { (0.8 * at_gap / law(e0)).min(1.0) } else { 0.0 };
    let direct_share = if at_gap > 0.0 { 1.0 - share * law(e0) / at_gap } else { 1.0 };
    let (mut wavelength_m, mut ns, mut ks) = (Vec::new(), Vec::new(), Vec::new());
    for wavelength in grid(e0, x_gap, tail.urbach_ev) {
        let energy = EV_M / wavelength;
        let (n, k) = index_at(energy);
        let k = if energy >= e0 {
            raised(energy, k)
        } else {
            let alpha = direct_share * tail_factor * k * per_k(energy) + share * law(energy);
            // Under 0.1 /m (1e-3 /cm) a metre absorbs a tenth: nothing, in a thin film.
            if alpha < 0.1 { 0.0 } else { alpha / per_k(energy) }
        };
        wavelength_m.push(wavelength);
        ns.push(n);
        ks.push(k);
    }
    Optics::Table(Arc::new(IndexTable { wavelength_m, n: ns, k: ks, gap_ev: Some(e0), edge_is_direct }))
}

/// Wavelengths of a blended table, m: round numbers that many materials share, and points close
/// together around the edge.
fn grid(e0: f64, x_gap: Option<f64>, urbach_ev: f64) -> Vec<f64> {
    let rounds = (0..=84)
        .map(|step| 280.0 + 5.0 * f64::from(step))
        .chain((0..=30).map(|step| 710.0 + 10.0 * f64::from(step)))
        .chain((0..=49).map(|step| 1020.0 + 20.0 * f64::from(step)));
    let above = [0.1, 0.07, 0.05, 0.03, 0.02, 0.01, 0.005, 0.0].map(|step| e0 + step);
    let below = [1.0, 2.0, 3.0, 5.0, 7.0, 10.0, 14.0, 20.0].map(|step| e0 - step * urbach_ev);
    let onset = x_gap.map(|x| [0.0, 0.02, 0.05, 0.1].map(|step| x + step));
    let energies = above.into_iter().chain(below).chain(onset.into_iter().flatten());
    let mut all: Vec<f64> = rounds.map(|nm| nm * 1e-9).collect();
    // Of narrow gaps too, so that the end of the table, which is held beyond, is dark.
    all.extend(energies.filter(|&energy| energy > 0.02).map(|energy| EV_M / energy));
    all.retain(|&wavelength| wavelength >= 279e-9);
    all.sort_by(f64::total_cmp);
    // Points closer than 0.01 nm are one point.
    all.dedup_by(|a, b| (*a - *b).abs() < 1e-11);
    all
}
