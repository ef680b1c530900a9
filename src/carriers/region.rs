//! A quasi-neutral region: what its slabs and faces do to minority carriers.

use crate::carriers::collection::{Decay, Stretch};
use crate::numerics::constants::CHARGE;

/// Diffusion lengths are held below this, m: far beyond any device, so that `S L/D` stays a
/// number where nothing recombines.
const LONGEST_M: f64 = 0.1;

/// One uniformly doped slab, or the neutral part of one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Slab {
    /// m, ≥ 0.
    pub thickness_m: f64,
    /// `D = μ kT/q` of the minority carriers, m2/s, > 0.
    pub diffusion_m2_per_s: f64,
    /// `L = √(D τ)`, m, > 0.
    pub length_m: f64,
    /// Logarithm of the equilibrium minority density `n_i²/N` in 1/m3. A logarithm, so that a cold
    /// region keeps the ratio of two densities that are both too small for a number.
    pub ln_minority: f64,
    /// Recombination velocity at the face away from the junction, m/s, ≥ 0.
    pub far_velocity_m_per_s: f64,
}

/// The minority carriers of a region: collection probability, and dark current.
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Region {
    /// For each slab, as given: `φ(w) = near·exp(−w/L) + far·exp(−(d − w)/L)`, `w` from the face
    /// towards the junction.
    pub pieces: Vec<Piece>,
    /// Velocity at which the junction's edge loses minority carriers into the region, m/s.
    pub velocity_m_per_s: f64,
    /// `J01`, A/m2.
    pub dark_a_per_m2: f64,
}

/// `φ` in one slab.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Piece {
    /// Amplitude at the face towards the junction.
    pub near: f64,
    /// Amplitude at the other face.
    pub far: f64,
    /// `L`, m.
    pub length_m: f64,
    /// `d`, m.
    pub thickness_m: f64,
}

impl Region {
    /// Solves a region of `slabs` in order from the junction outwards.
    ///
    /// The splitting of the quasi-Fermi levels passes from slab to slab, and the flux with it, less
    /// what the face between them recombines; with one slab these are the closed forms of Hovel
    /// (Semiconductors and Semimetals 11 (1975), chapter 2). From the far end inwards, with
    /// `y = S L/D` and `t = tanh(d/L)`, a slab turns the velocity `S` behind it into
    /// `(D/L)(y + t)/(1 + y t)` before it. Only falling exponentials enter: a wafer of a hundred
    /// diffusion lengths is as good as one of one. `J01 = q n_i²/N × velocity`.
    pub fn solve(slabs: &[Slab]) -> Self {
        let mut behind = vec![0.0; slabs.len()];
        let mut velocity = 0.0;
        for (index, slab) in slabs.iter().enumerate().rev() {
            // Carriers lost further out, counted in densities of this slab.
            let ratio = slabs.get(index + 1).map_or(0.0, |next| (next.ln_minority - slab.ln_minority).exp());
            let further = if velocity == 0.0 { 0.0 } else { velocity * ratio };
            let length = slab.held_length();
            let own = slab.diffusion_m2_per_s / length;
            let y = ((slab.far_velocity_m_per_s + further) / own).min(1e300);
            let t = (slab.thickness_m / length).tanh();
            behind[index] = y;
            velocity = own * (y + t) / (1.0 + y * t);
        }
        let mut here = 1.0;
        let mut pieces = Vec::with_capacity(slabs.len());
        for (slab, y) in slabs.iter().zip(behind) {
            let length = slab.held_length();
            let fade = (-slab.thickness_m / length).exp();
            let whole = (1.0 + y) + (1.0 - y) * fade * fade;
            let (near, far) = (here * (1.0 + y) / whole, here * (1.0 - y) * fade / whole);
            pieces.push(Piece { near, far, length_m: length, thickness_m: slab.thickness_m });
            here = (near * fade + far).max(0.0);
        }
        let density = slabs.first().map_or(0.0, |slab| slab.ln_minority.exp());
        Self { pieces, velocity_m_per_s: velocity, dark_a_per_m2: CHARGE * density * velocity }
    }
}

impl Slab {
    fn held_length(&self) -> f64 {
        self.length_m.min(LONGEST_M)
    }
}

impl Piece {
    /// `φ` at `w_m` from the face towards the junction.
    pub fn at(&self, w_m: f64) -> f64 {
        self.near * (-w_m / self.length_m).exp()
            + self.far * (-(self.thickness_m - w_m) / self.length_m).exp()
    }

    /// Over a layer's depth from `from_m` on, the junction on the side away from the sun.
    pub fn above_junction(&self, from_m: f64) -> Stretch {
        self.stretch(from_m, self.far, self.near)
    }

    /// Over a layer's depth from `from_m` on, the junction on the side towards the sun.
    pub fn below_junction(&self, from_m: f64) -> Stretch {
        self.stretch(from_m, self.near, self.far)
    }

    fn stretch(&self, from_m: f64, at_from: f64, at_to: f64) -> Stretch {
        Stretch {
            from_m,
            to_m: from_m + self.thickness_m,
            even: 0.0,
            falling: Decay { amplitude: at_from, length_m: self.length_m },
            rising: Decay { amplitude: at_to, length_m: self.length_m },
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn slab(thickness_m: f64, length_m: f64, diffusion_m2_per_s: f64, velocity: f64) -> Slab {
        Slab { thickness_m, diffusion_m2_per_s, length_m, ln_minority: 10.0, far_velocity_m_per_s: velocity }
    }

    fn close(value: f64, expected: f64, relative: f64) {
        assert!((value / expected - 1.0).abs() < relative, "{value} instead of {expected}");
    }

    #[test]
    fn one_slab_has_the_textbook_solution() {
        // φ(w) = [cosh(u/L) + (SL/D) sinh(u/L)]/[cosh(d/L) + (SL/D) sinh(d/L)], u = d − w, and
        // J01 = q n0 (D/L)(SL/D + tanh(d/L))/(1 + (SL/D) tanh(d/L)) (Hovel 1975; Sze and Ng 2007).
        let (d, l, diffusion, s) = (3e-6, 2e-6, 5e-4, 1e2);
        let region = Region::solve(&[slab(d, l, diffusion, s)]);
        let y = s * l / diffusion;
        for w in [0.0, 0.4e-6, 1.7e-6, 3e-6] {
            let form = |u: f64| (u / l).cosh() + y * (u / l).sinh();
            close(region.pieces[0].at(w), form(d - w) / form(d), 1e-13);
        }
        let t = (d / l).tanh();
        let dark = CHARGE * 10f64.exp() * diffusion / l * (y + t) / (1.0 + y * t);
        close(region.dark_a_per_m2, dark, 1e-13);
    }

    #[test]
    fn a_slab_cut_in_two_is_the_slab() {
        let whole = Region::solve(&[slab(3e-6, 2e-6, 5e-4, 30.0)]);
        let halves = Region::solve(&[slab(1e-6, 2e-6, 5e-4, 0.0), slab(2e-6, 2e-6, 5e-4, 30.0)]);
        close(halves.dark_a_per_m2, whole.dark_a_per_m2, 1e-13);
        close(halves.pieces[0].at(0.5e-6), whole.pieces[0].at(0.5e-6), 1e-13);
        close(halves.pieces[1].at(0.5e-6), whole.pieces[0].at(1.5e-6), 1e-13);
    }

    #[test]
    fn the_limits_are_those_of_the_textbook() {
        // Thick: D/L, whatever the far face does; φ = exp(−w/L).
        let thick = Region::solve(&[slab(500e-6, 0.1e-6, 1e-3, 1e5)]);
        close(thick.velocity_m_per_s, 1e-3 / 0.1e-6, 1e-14);
        close(thick.pieces[0].at(1e-6), (-10f64).exp(), 1e-12);
        // Perfect passivation of a thin slab: all is collected, and what recombines is d/τ.
        let passive = Region::solve(&[slab(1e-7, 1e-4, 1e-3, 0.0)]);
        close(passive.pieces[0].at(1e-7), 1.0, 1e-6);
        close(passive.velocity_m_per_s, 1e-7 * 1e-3 / 1e-8, 1e-6);
        // A dead surface: a straight line down to 0, D/d.
        let dead = Region::solve(&[slab(1e-7, 1e-2, 1e-3, 1e300)]);
        close(dead.pieces[0].at(0.25e-7), 0.75, 1e-6);
        close(dead.velocity_m_per_s, 1e-3 / 1e-7, 1e-6);
        assert!(dead.pieces[0].at(1e-7).abs() < 1e-10);
        // Without any recombination nothing is lost.
        let ideal = Region::solve(&[slab(1e-6, f64::INFINITY, 1e-3, 0.0)]);
        close(ideal.pieces[0].at(1e-6), 1.0, 1e-9);
        // Nothing at all.
        let none = Region::solve(&[slab(0.0, 1e-6, 1e-3, 7.0)]);
        close(none.velocity_m_per_s, 7.0, 1e-14);
    }

    #[test]
    fn a_barrier_behind_keeps_carriers_in() {
        // A slab of ten kT wider gap behind holds e⁻¹⁰ of the density: its dead outer face reaches
        // through as (D/d) e⁻¹⁰.
        let outer = Slab { ln_minority: 0.0, ..slab(5e-8, 1e-3, 1e-3, 1e300) };
        let region = Region::solve(&[slab(1e-9, 1e-3, 1e-3, 0.0), outer]);
        close(region.velocity_m_per_s, 1e-3 / 5e-8 * (-10f64).exp(), 1e-5);
        // A cold one, whose densities are below any number, still has its probabilities.
        let cold = |ln| Slab { ln_minority: ln, ..slab(1e-6, 1e-6, 1e-3, 0.0) };
        let region = Region::solve(&[cold(-5000.0), cold(-5000.0)]);
        assert_eq!(region.dark_a_per_m2, 0.0);
        close(region.pieces[0].at(0.0), 1.0, 1e-14);
        close(region.pieces[1].at(1e-6), 1.0 / 2f64.cosh(), 1e-12);
    }
}
