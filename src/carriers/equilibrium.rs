//! Band edges at rest: the Poisson equation of a run of layers in the dark, without bias.
//!
//! With the Fermi level at zero and the vacuum level `w` in eV, `E_C = w − χ`, `E_V = E_C − E_g`,
//! and `d/dz (ε dw/dz) = q (p − n + N)`, `n = N_C F(−E_C/kT)`, `p = N_V F(E_V/kT)`, `N` the ionised
//! donors less acceptors. Finite volumes, Newton's method; the vacuum level is continuous across
//! interfaces, which carry no charge; both ends are neutral.

use crate::carriers::depletion::VACUUM_PERMITTIVITY;
use crate::numerics::constants::CHARGE;

/// A layer at rest.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RestLayer {
    /// m.
    pub thickness_m: f64,
    /// eV.
    pub affinity_ev: f64,
    /// eV.
    pub gap_ev: f64,
    /// Effective density of states of the conduction band, 1/m3.
    pub conduction_per_m3: f64,
    /// Of the valence band, 1/m3.
    pub valence_per_m3: f64,
    /// Ionised donors less acceptors, 1/m3.
    pub net_doping_per_m3: f64,
    /// Static permittivity over that of vacuum.
    pub permittivity: f64,
}

/// Depth from the layer's sunward face, m, and the conduction edge over the Fermi level, eV: both
/// faces and the middle of every cell between.
pub type Profile = Vec<(f64, f64)>;

/// The narrowest cell, m: half of the screening length of the heaviest doping met.
const FINEST_M: f64 = 0.2e-9;
/// Each cell is that much wider than the one before it, away from a face.
const GROWTH: f64 = 1.3;
/// Newton steps at most; some twenty are usual.
const STEPS: usize = 200;
/// A step moves no potential by more than this many kT/q.
const LARGEST_STEP: f64 = 8.0;

impl RestLayer {
    /// n, p and the slope of `p − n` by the vacuum level, all in 1/m3 (per eV).
    fn carriers(&self, vacuum_ev: f64, thermal_ev: f64) -> (f64, f64, f64) {
        let conduction = vacuum_ev - self.affinity_ev;
        let (n, n_slope) = half(-conduction / thermal_ev);
        let (p, p_slope) = half((conduction - self.gap_ev) / thermal_ev);
        let slope = (self.valence_per_m3 * p_slope + self.conduction_per_m3 * n_slope) / thermal_ev;
        (self.conduction_per_m3 * n, self.valence_per_m3 * p, slope)
    }

    /// The vacuum level at which the layer is neutral by itself, eV.
    pub fn neutral_ev(&self, thermal_ev: f64) -> f64 {
        // p − n + N rises with the vacuum level: halve the interval around its root.
        let (mut low, mut high) = (self.affinity_ev - 3.0, self.affinity_ev + self.gap_ev + 3.0);
        for _ in 0..80 {
            let middle = 0.5 * (low + high);
            let (n, p, _) = self.carriers(middle, thermal_ev);
            if p - n + self.net_doping_per_m3 > 0.0 { high = middle } else { low = middle }
        }
        0.5 * (low + high)
    }

    /// Widths of the cells, finest at both faces.
    fn cells(&self) -> Vec<f64> {
        let mut front = Vec::new();
        let (mut width, mut reached) = (FINEST_M, 0.0);
        while reached + width < 0.5 * self.thickness_m {
            front.push(width);
            reached += width;
            width *= GROWTH;
        }
        let rest = self.thickness_m - 2.0 * reached;
        let back = front.iter().rev().copied().collect::<Vec<_>>();
        front.into_iter().chain([rest]).chain(back).collect()
    }
}

/// The conduction edge through each layer, sunward first; `None` where Newton's method does not
/// come to an end, which no sound input brings about.
pub fn at_rest(layers: &[RestLayer], thermal_ev: f64) -> Option<Vec<Profile>> {
    let cells: Vec<(usize, f64)> = layers
        .iter()
        .enumerate()
        .flat_map(|(index, layer)| layer.cells().into_iter().map(move |width| (index, width)))
        .collect();
    // Half a cell's resistance to the field: distance over permittivity.
    let half_way =
        |&(index, width): &(usize, f64)| 0.5 * width / (VACUUM_PERMITTIVITY * layers[index].permittivity);
    let between: Vec<f64> =
        cells.windows(2).map(|pair| 1.0 / (half_way(&pair[0]) + half_way(&pair[1]))).collect();
    let neutral: Vec<f64> = layers.iter().map(|layer| layer.neutral_ev(thermal_ev)).collect();
    let mut vacuum: Vec<f64> = cells.iter().map(|(index, _)| neutral[*index]).collect();
    let last = vacuum.len().checked_sub(1)?;
    let mut converged = false;
    for _ in 0..STEPS {
        let (mut below, mut on, mut above, mut rest) =
            (vec![0.0; last + 1], vec![1.0; last + 1], vec![0.0; last + 1], vec![0.0; last + 1]);
        for i in 1..last {
            let (index, width) = cells[i];
            let layer = &layers[index];
            let (n, p, slope) = layer.carriers(vacuum[i], thermal_ev);
            let (left, right) = (between[i - 1], between[i]);
            let flux = right * (vacuum[i + 1] - vacuum[i]) - left * (vacuum[i] - vacuum[i - 1]);
            below[i] = left;
            above[i] = right;
            on[i] = -left - right - CHARGE * width * slope;
            rest[i] = CHARGE * width * (p - n + layer.net_doping_per_m3) - flux;
        }
        let step = tridiagonal(&below, &mut on, &above, rest);
        let most = LARGEST_STEP * thermal_ev;
        let mut largest: f64 = 0.0;
        for (value, step) in vacuum.iter_mut().zip(&step) {
            *value += step.clamp(-most, most);
            largest = largest.max(step.abs());
        }
        if !largest.is_finite() {
            return None;
        }
        if largest < 1e-7 * thermal_ev {
            converged = true;
            break;
        }
    }
    converged.then(|| profiles(layers, &cells, &vacuum, &half_way))
}

fn profiles(
    layers: &[RestLayer],
    cells: &[(usize, f64)],
    vacuum: &[f64],
    half_way: &impl Fn(&(usize, f64)) -> f64,
) -> Vec<Profile> {
    // At a face the field is the same on both sides: the nearer, stiffer cell counts more.
    let face = |i: usize| {
        let (a, b) = (half_way(&cells[i]), half_way(&cells[i + 1]));
        (vacuum[i] * b + vacuum[i + 1] * a) / (a + b)
    };
    let mut out: Vec<Profile> = vec![Vec::new(); layers.len()];
    let mut depth = 0.0;
    for (i, (index, width)) in cells.iter().enumerate() {
        let affinity = layers[*index].affinity_ev;
        let profile = &mut out[*index];
        if profile.is_empty() {
            depth = 0.0;
            let sunward = if i == 0 { vacuum[0] } else { face(i - 1) };
            profile.push((0.0, sunward - affinity));
        }
        profile.push((depth + 0.5 * width, vacuum[i] - affinity));
        depth += width;
        if cells.get(i + 1).is_none_or(|(next, _)| next != index) {
            let rear = if i + 1 == cells.len() { vacuum[i] } else { face(i) };
            profile.push((layers[*index].thickness_m, rear - affinity));
        }
    }
    out
}

/// Solves a tridiagonal system by elimination without pivoting: the matrix is diagonally dominant.
fn tridiagonal(below: &[f64], on: &mut [f64], above: &[f64], mut rest: Vec<f64>) -> Vec<f64> {
    let n = on.len();
    for i in 1..n {
        let factor = below[i] / on[i - 1];
        on[i] -= factor * above[i - 1];
        rest[i] -= factor * rest[i - 1];
    }
    rest[n - 1] /= on[n - 1];
    for i in (0..n - 1).rev() {
        rest[i] = (rest[i] - above[i] * rest[i + 1]) / on[i];
    }
    rest
}

/// The Fermi–Dirac integral of order 1/2, normalised to `e^η` far below zero, and its slope:
/// within 0.4 % (Bednarczyk and Bednarczyk, Phys. Lett. A 64, 409 (1978)).
fn half(eta: f64) -> (f64, f64) {
    // Beyond these either nothing or everything depends on it.
    let eta = eta.clamp(-600.0, 1e4);
    if eta < -8.0 {
        let boltzmann = eta.exp();
        return (boltzmann, boltzmann);
    }
    let bell = (-0.17 * (eta + 1.0) * (eta + 1.0)).exp();
    let v = eta.powi(4) + 50.0 + 33.6 * eta * (1.0 - 0.68 * bell);
    let v_slope =
        4.0 * eta.powi(3) + 33.6 * (1.0 - 0.68 * bell) + 33.6 * eta * 0.68 * 0.34 * (eta + 1.0) * bell;
    let root = 0.75 * std::f64::consts::PI.sqrt() * v.powf(-0.375);
    let sum = (-eta).exp() + root;
    let sum_slope = -(-eta).exp() - 0.375 * root * v_slope / v;
    (1.0 / sum, -sum_slope / (sum * sum))
}

#[cfg(test)]
mod tests {
    use super::*;

    const THERMAL_EV: f64 = 0.025_692_579;

    /// Gallium arsenide in round numbers.
    fn layer(thickness_m: f64, net_doping_per_m3: f64) -> RestLayer {
        RestLayer {
            thickness_m,
            affinity_ev: 4.07,
            gap_ev: 1.42,
            conduction_per_m3: 4.3e23,
            valence_per_m3: 9.0e24,
            net_doping_per_m3,
            permittivity: 12.9,
        }
    }

    /// `2/√π ∫ √x/(1 + e^(x − η)) dx` by scipy.integrate.quad, scipy 1.17.1.
    #[test]
    fn the_integral_is_within_its_stated_error() {
        for (eta, exact) in [(-4.0, 0.018_198), (0.0, 0.765_147), (1.0, 1.575_64), (4.0, 6.511_57)] {
            assert!((half(eta).0 / exact - 1.0).abs() < 0.004, "{} at {eta}", half(eta).0);
            let slope = (half(eta + 1e-5).0 - half(eta - 1e-5).0) / 2e-5;
            assert!((half(eta).1 / slope - 1.0).abs() < 1e-6, "slope at {eta}");
        }
    }

    /// A step junction of doping N on both sides, Boltzmann statistics: the potential is odd about
    /// the plane, and a first integral of the equation gives the field there,
    /// `E² = (2 q N kT/q /ε)(u − 1 + e^−u)` with `u` half the built-in voltage in kT/q.
    #[test]
    fn a_step_junction_has_its_built_in_voltage_and_its_field() {
        let doping = 1e22;
        let layers = [layer(2e-6, doping), layer(2e-6, -doping)];
        // Equal densities of states, so that both sides mirror each other.
        let layers = layers.map(|l| RestLayer { conduction_per_m3: 2e24, valence_per_m3: 2e24, ..l });
        let profiles = at_rest(&layers, THERMAL_EV).expect("converges");
        let first = profiles[0][0].1;
        let last = profiles[1].last().expect("points").1;
        let intrinsic = 2e24 * (-1.42 / (2.0 * THERMAL_EV)).exp();
        let built_in = 2.0 * THERMAL_EV * (doping / intrinsic).ln();
        // At this doping the integral differs from e^η by 0.2 %, so its logarithm by 0.002 kT.
        assert!((last - first - built_in).abs() < 0.01 * THERMAL_EV, "{} for {built_in}", last - first);
        let u = built_in / (2.0 * THERMAL_EV);
        let epsilon = 12.9 * VACUUM_PERMITTIVITY;
        let exact = (2.0 * CHARGE * doping * THERMAL_EV / epsilon * (u - 1.0 + (-u).exp())).sqrt();
        let near = &profiles[1][..2];
        let field = (near[1].1 - near[0].1) / (near[1].0 - near[0].0);
        assert!((field / exact - 1.0).abs() < 0.01, "{field} V/m for {exact}");
    }

    /// Two affinities: the vacuum level is continuous, so the conduction edge steps by their
    /// difference and the valence edge by that and the difference of the gaps.
    #[test]
    fn edges_step_by_the_difference_of_affinities() {
        let wide = RestLayer { affinity_ev: 3.8, gap_ev: 1.9, ..layer(100e-9, -1e24) };
        let profiles = at_rest(&[layer(500e-9, -1e23), wide], THERMAL_EV).expect("converges");
        let (above, below) = (profiles[0].last().expect("points").1, profiles[1][0].1);
        assert!((below - above - 0.27).abs() < 1e-9, "{}", below - above);
    }

    /// A tunnel junction, an undoped layer, a wafer of half a millimetre and a nanometre: all come
    /// to an end.
    #[test]
    fn harsh_runs_converge() {
        let run = [
            layer(1e-9, 1e24),
            layer(100e-9, 2e24),
            layer(3e-6, -1e23),
            layer(15e-9, -8e25),
            RestLayer { gap_ev: 1.9, affinity_ev: 4.0, ..layer(15e-9, 2e25) },
            layer(50e-9, 0.0),
            layer(500e-6, -1e24),
        ];
        let profiles = at_rest(&run, THERMAL_EV).expect("converges");
        assert!(profiles.iter().flatten().all(|(z, edge)| z.is_finite() && edge.is_finite()));
        for (profile, layer) in profiles.iter().zip(&run) {
            assert!(profile.windows(2).all(|pair| pair[0].0 < pair[1].0));
            assert!((profile.last().expect("points").0 - layer.thickness_m).abs() < 1e-15);
        }
    }
}
