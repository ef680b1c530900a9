//! The wavelength grid on which currents are integrated.

use crate::light::Spectrum;
use crate::numerics::constants::CHARGE;
use crate::numerics::quadrature::{linear_along, product_integral};
use crate::optics::model::{LightModel, Shares};

/// How far apart the two sides of a jump stand, relative: far below what any current could show,
/// far above rounding.
const SIDE: f64 = 1e-13;

/// Largest relative error of a current by the estimate below: half of the 0.01 % that a twofold
/// refinement may move it.
const CURRENT_TOLERANCE: f64 = 5e-5;

/// How much smaller than allowed a curvature seen from the neighbours has to be for an interval
/// to be left alone without asking for its middle.
const TRUST: f64 = 3.0;

/// Table points nearer to their neighbour than this are left out, m: the subdivision puts back
/// what they would have shown.
const NEAREST_M: f64 = 2e-11;

/// Subdivisions of one interval of the union at most, as a power of two.
const DEEPEST: usize = 10;

/// What the grid has to resolve.
#[derive(Clone, Debug, Default)]
pub struct Features {
    /// First and last wavelength, m.
    pub range_m: (f64, f64),
    /// Wavelengths at which absorption jumps: both sides become points.
    pub jumps_m: Vec<f64>,
    /// Wavelengths at which a slope may change.
    pub knots_m: Vec<f64>,
}

/// Ascending wavelengths, m, and the shares there: the union of the spectrum's points and the
/// knots, both sides of every jump, and the ends of the range; then intervals halved until halving
/// all of them once more would move the current of no junction by more than 0.01 %.
///
/// Photon flux and share are taken as linear between points, so that an interval of width `h` with
/// the flux `Φ` and the share off its chord by `δ` in the middle is wrong by `⅔ q Φ h δ`
/// (Simpson's rule less the trapezoid). The middle is asked for where the slopes around an
/// interval leave room for that.
pub fn spectral_grid(
    light: &Spectrum,
    features: &Features,
    optics: &LightModel,
    junctions: usize,
) -> (Vec<f64>, Shares) {
    let points = union(light, features);
    let flux: Vec<f64> = light.photon_flux().iter().map(|flux| CHARGE * flux).collect();
    let shares = optics.shares(&points);
    let sums = optics.by_junction(&shares, junctions);
    let flux_here = linear_along(&light.wavelength_m, &flux, &points);
    let allowed: Vec<f64> = sums
        .iter()
        .map(|sum| CURRENT_TOLERANCE * product_integral(&points, sum, &flux_here) / points.len() as f64)
        .collect();

    let mut open = doubtful(&points, &sums, &flux_here, &allowed);
    let mut added = Batch::default();
    for _ in 0..DEEPEST {
        if open.is_empty() {
            break;
        }
        let middles: Vec<f64> = open.iter().map(|interval| 0.5 * (interval.left + interval.right)).collect();
        let shares = optics.shares(&middles);
        let sums = optics.by_junction(&shares, junctions);
        let flux_here = linear_along(&light.wavelength_m, &flux, &middles);
        let mut next = Vec::new();
        for (i, interval) in open.iter().enumerate() {
            let middle = middles[i];
            let weight = 2.0 / 3.0 * flux_here[i] * (interval.right - interval.left);
            let values: Vec<f64> = sums.iter().map(|sum| sum[i]).collect();
            let too_coarse =
                values.iter().zip(&interval.ends).zip(&allowed).any(|((value, ends), allowed)| {
                    weight * (value - 0.5 * (ends.0 + ends.1)).abs() > *allowed
                });
            if too_coarse && middle > interval.left && middle < interval.right {
                added.push(middle, &shares, i);
                let (left, right) = interval.halves(middle, &values);
                next.extend([left, right]);
            }
        }
        open = next;
    }
    added.merge_into(points, shares)
}

/// An interval that may be too coarse, with the shares of each junction at both ends.
struct Interval {
    left: f64,
    right: f64,
    ends: Vec<(f64, f64)>,
}

impl Interval {
    fn halves(&self, middle: f64, values: &[f64]) -> (Self, Self) {
        let lower = self.ends.iter().zip(values).map(|(ends, value)| (ends.0, *value)).collect();
        let upper = self.ends.iter().zip(values).map(|(ends, value)| (*value, ends.1)).collect();
        (
            Self { left: self.left, right: middle, ends: lower },
            Self { left: middle, right: self.right, ends: upper },
        )
    }
}

/// Intervals whose neighbours' slopes leave room for an error beyond what is allowed: with the
/// curvature from the change of slope, `δ = f'' h²/8`.
fn doubtful(points: &[f64], sums: &[Vec<f64>], flux: &[f64], allowed: &[f64]) -> Vec<Interval> {
    let intervals = points.len().saturating_sub(1);
    let width = |i: usize| points[i + 1] - points[i];
    let mut wanted = vec![false; intervals];
    for (sum, allowed) in sums.iter().zip(allowed) {
        let slope = |i: usize| (sum[i + 1] - sum[i]) / width(i);
        for i in 0..intervals {
            let h = width(i);
            let bend = |other: usize| (slope(i) - slope(other)).abs() / (h + width(other));
            let before = if i > 0 { bend(i - 1) } else { 0.0 };
            let after = if i + 1 < intervals { bend(i + 1) } else { 0.0 };
            let off = 0.25 * h * h * before.max(after);
            wanted[i] |= TRUST * 2.0 / 3.0 * flux[i].max(flux[i + 1]) * h * off > *allowed;
        }
    }
    let interval = |i: usize| Interval {
        left: points[i],
        right: points[i + 1],
        ends: sums.iter().map(|sum| (sum[i], sum[i + 1])).collect(),
    };
    (0..intervals).filter(|&i| wanted[i]).map(interval).collect()
}

/// Points put in between, with their shares.
#[derive(Default)]
struct Batch {
    points: Vec<f64>,
    shares: Shares,
}

impl Batch {
    fn push(&mut self, point: f64, shares: &Shares, at: usize) {
        self.points.push(point);
        self.shares.absorbed.resize(shares.absorbed.len(), Vec::new());
        for (own, row) in self.shares.absorbed.iter_mut().zip(&shares.absorbed) {
            own.push(row[at]);
        }
        self.shares.passing.push(shares.passing[at]);
        self.shares.reflected.push(shares.reflected[at]);
    }

    /// Both together in ascending order.
    fn merge_into(self, points: Vec<f64>, shares: Shares) -> (Vec<f64>, Shares) {
        if self.points.is_empty() {
            return (points, shares);
        }
        let first = points.len();
        let all: Vec<f64> = points.into_iter().chain(self.points).collect();
        let mut order: Vec<usize> = (0..all.len()).collect();
        order.sort_by(|&a, &b| all[a].total_cmp(&all[b]));
        let pick = |base: &[f64], added: &[f64]| -> Vec<f64> {
            order.iter().map(|&at| if at < first { base[at] } else { added[at - first] }).collect()
        };
        let absorbed = shares
            .absorbed
            .iter()
            .zip(&self.shares.absorbed)
            .map(|(base, added)| pick(base, added))
            .collect();
        let passing = pick(&shares.passing, &self.shares.passing);
        let reflected = pick(&shares.reflected, &self.shares.reflected);
        (order.iter().map(|&at| all[at]).collect(), Shares { reflected, absorbed, passing })
    }
}

fn union(light: &Spectrum, features: &Features) -> Vec<f64> {
    let (first, last) = features.range_m;
    let inside = |wavelength: &f64| *wavelength > first && *wavelength < last;
    let mut fixed: Vec<f64> = features
        .jumps_m
        .iter()
        .flat_map(|&edge| [edge * (1.0 - SIDE), edge * (1.0 + SIDE)])
        .chain(light.wavelength_m.iter().copied())
        .filter(inside)
        .chain([first, last])
        .collect();
    fixed.sort_by(f64::total_cmp);
    fixed.dedup();
    let mut knots: Vec<f64> = features.knots_m.iter().copied().filter(inside).collect();
    knots.sort_by(f64::total_cmp);

    let mut points = Vec::with_capacity(fixed.len() + knots.len());
    let mut knots = knots.into_iter().peekable();
    for point in fixed {
        while let Some(knot) = knots.next_if(|knot| *knot < point) {
            let clear_below = points.last().is_none_or(|below| knot - below > NEAREST_M);
            if clear_below && point - knot > NEAREST_M {
                points.push(knot);
            }
        }
        points.push(point);
    }
    points
}
