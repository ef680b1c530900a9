//! The wavelength grid on which currents are integrated.

use crate::light::Spectrum;
use crate::numerics::constants::CHARGE;
use crate::numerics::quadrature::linear_at;

/// How far apart the two sides of a jump stand, relative: far below what any current could show,
/// far above rounding.
const SIDE: f64 = 1e-13;

/// Largest relative error of a current by the estimate below: a fifth of the 0.01 % that a
/// twofold refinement may move it.
const CURRENT_TOLERANCE: f64 = 2e-5;

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

/// Ascending wavelengths, m: the union of the spectrum's points and the knots, both sides of
/// every jump, and the ends of the range; then every interval halved until halving all of them
/// once more would move no current by more than 0.01 %.
///
/// `shares` returns the share of light each current takes, `[current][wavelength]`. Photon flux
/// and share are taken as linear between points, so that an interval of width `h` with the flux
/// `Φ` and the share off its chord by `δ` in the middle is wrong by `⅔ q Φ h δ` (Simpson's rule
/// less the trapezoid).
pub fn spectral_grid(
    light: &Spectrum,
    features: &Features,
    shares: impl Fn(&[f64]) -> Vec<Vec<f64>>,
) -> Vec<f64> {
    let mut points = union(light, features);
    let flux = light.photon_flux();
    let flux_at = |wavelength: f64| CHARGE * linear_at(&light.wavelength_m, &flux, wavelength);

    let values = shares(&points);
    let currents: Vec<f64> = values.iter().map(|row| current(&points, row, flux_at)).collect();
    let allowed: Vec<f64> = {
        let each = CURRENT_TOLERANCE / points.len().max(1) as f64;
        currents.iter().map(|current| current * each).collect()
    };

    // Intervals still open: left, right, and the shares at both, flattened.
    let rows = values.len();
    let mut open: Vec<(f64, f64)> = points.windows(2).map(|pair| (pair[0], pair[1])).collect();
    let mut ends: Vec<f64> = Vec::with_capacity(2 * rows * open.len());
    for i in 0..open.len() {
        ends.extend(values.iter().flat_map(|row| [row[i], row[i + 1]]));
    }
    for _ in 0..DEEPEST {
        let middles: Vec<f64> = open.iter().map(|(left, right)| 0.5 * (left + right)).collect();
        let middle_values = shares(&middles);
        let (mut next, mut next_ends) = (Vec::new(), Vec::new());
        for (i, &(left, right)) in open.iter().enumerate() {
            let middle = middles[i];
            let own = &ends[2 * rows * i..2 * rows * (i + 1)];
            let weight = 2.0 / 3.0 * flux_at(middle) * (right - left);
            let too_coarse = (0..rows).any(|row| {
                let off = middle_values[row][i] - 0.5 * (own[2 * row] + own[2 * row + 1]);
                weight * off.abs() > allowed[row]
            });
            if too_coarse && middle > left && middle < right {
                points.push(middle);
                next.push((left, middle));
                next.push((middle, right));
                next_ends.extend((0..rows).flat_map(|row| [own[2 * row], middle_values[row][i]]));
                next_ends.extend((0..rows).flat_map(|row| [middle_values[row][i], own[2 * row + 1]]));
            }
        }
        if next.is_empty() {
            break;
        }
        (open, ends) = (next, next_ends);
    }
    points.sort_by(f64::total_cmp);
    points
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

fn current(points: &[f64], share: &[f64], flux_at: impl Fn(f64) -> f64) -> f64 {
    let product: Vec<f64> = points.iter().zip(share).map(|(&point, share)| share * flux_at(point)).collect();
    crate::numerics::quadrature::integral(points, &product)
}
