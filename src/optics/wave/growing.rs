//! What the fields of a run do when one of its films grows.
//!
//! The pass up leaves the fields `U` of the light; a pass down adds those of a second solution
//! `V` that has no wave coming from the front. A change of thickness in film `j` changes the
//! fields above it by `α U + β V`, the same `α` and `β` at every interface above, and scales those
//! below by `−α` once the incident wave is put back to 1. So the derivative of the flux at every
//! interface by every thickness is one product each. The same is done by prefixes and suffixes of
//! a product of matrices; here nothing can overflow.

use crate::optics::wave::films::{Fields, Medium, Run, is_scaled};
use crate::optics::wave::lanes::{LANES, Lane};

/// What one run, lit from one side, does when a film grows.
#[derive(Clone, Debug, Default)]
pub(super) struct Growing {
    /// `d|r|²/dd` of each film.
    pub(super) reflected: Vec<Lane>,
    /// Relative change of every flux below the film.
    pub(super) below: Vec<Lane>,
    /// The change of the flux at interface `i` on top of film `j` or above is `Re(B_j Z_i)`.
    b: Vec<[Lane; 2]>,
    z: Vec<[Lane; 2]>,
}

impl Growing {
    /// Change of the flux at the first interface when `film` grows.
    pub(super) fn entering(&self, film: usize, l: usize) -> f64 {
        let (b, z) = (&self.b[film], &self.z[0]);
        b[0][l] * z[0][l] - b[1][l] * z[1][l]
    }

    /// Change of what the film `of` absorbs when `film` grows.
    pub(super) fn absorbed(&self, fields: &Fields, of: usize, film: usize) -> Lane {
        let ([b_re, b_im], below) = (&self.b[film], &self.below[film]);
        let ([top_re, top_im], [rear_re, rear_im]) = (&self.z[of], &self.z[of + 1]);
        let (top, rear) = (&fields.flux[of], &fields.flux[of + 1]);
        std::array::from_fn(|l| {
            if of > film {
                below[l] * (top[l] - rear[l])
            } else if of == film {
                b_re[l] * top_re[l] - b_im[l] * top_im[l] - below[l] * rear[l]
            } else {
                b_re[l] * (top_re[l] - rear_re[l]) - b_im[l] * (top_im[l] - rear_im[l])
            }
        })
    }

    /// Change of `Σ weight_i A_i` over the films of the run by each of them.
    pub(super) fn contract(&self, fields: &Fields, weights: &[f64], out: &mut Vec<Lane>) {
        out.resize(weights.len(), [0.0; LANES]);
        contract_block(self, fields, weights, out);
    }
}

/// `A_i = S_i − S_{i+1}`: flux `i` counts `w_i − w_{i−1}`. Above and at the film the weighted `Z` add
/// up from the front, below it the weighted fluxes from the rear.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2",
    "x86_64+avx2"
))]
fn contract_block(growing: &Growing, fields: &Fields, weights: &[f64], out: &mut [Lane]) {
    let films = weights.len();
    let counts = |i: usize| {
        let own = if i < films { weights[i] } else { 0.0 };
        if i > 0 { own - weights[i - 1] } else { own }
    };
    let mut flux = [0.0; LANES];
    for j in (0..films).rev() {
        let (count, below, row) = (counts(j + 1), &fields.flux[j + 1], &growing.below[j]);
        let sum = &mut out[j];
        for l in 0..LANES {
            flux[l] += count * below[l];
            sum[l] = row[l] * flux[l];
        }
    }
    let (mut re, mut im) = ([0.0; LANES], [0.0; LANES]);
    for j in 0..films {
        let (count, [z_re, z_im], [b_re, b_im]) = (counts(j), &growing.z[j], &growing.b[j]);
        let sum = &mut out[j];
        for l in 0..LANES {
            re[l] += count * z_re[l];
            im[l] += count * z_im[l];
            sum[l] += b_re[l] * re[l] - b_im[l] * im[l];
        }
    }
}

type Complex = (f64, f64);

#[inline(always)]
fn times(a: Complex, b: Complex) -> Complex {
    (a.0 * b.0 - a.1 * b.1, a.0 * b.1 + a.1 * b.0)
}

#[inline(always)]
fn over(a: Complex, b: Complex) -> Complex {
    let inverse = 1.0 / (b.0 * b.0 + b.1 * b.1);
    ((a.0 * b.0 + a.1 * b.1) * inverse, (a.1 * b.0 - a.0 * b.1) * inverse)
}

/// The second solution down a run, and with it the effect of every film.
pub(super) fn grow(run: Run<'_>, fields: &Fields, growing: &mut Growing) {
    let films = run.films.len();
    growing.reflected.resize(films, [0.0; LANES]);
    growing.below.resize(films, [0.0; LANES]);
    growing.b.resize(films, [[0.0; LANES]; 2]);
    growing.z.resize(films + 1, [[0.0; LANES]; 2]);
    grow_block(run, fields, growing);
}

/// `W(U, V) = −a₀` (with `a₀ = H + Y₀E` on top) is the same at every interface; the derivative of a
/// film's fields by its thickness is `−ik₀q (H/Y, YE)`. With `Q_j` the product of
/// `(2Yc)² exp(2iδ)` over the films above `j`, whose size is that of the weights:
/// `α_j = ik₀q (H_U H_V/Y − Y E_U E_V)/a₀`, `C_j = −ik₀ (q/Y) (H² − Y²E²) Q_j/a₀`,
/// `dr/dd = 2Y₀ C_j/a₀`, `B_j = C_j · 4|Y₀|²/(Re Y₀ |a₀|²)`,
/// `Z_i = (E_V H_U* + E_U* H_V) Q_i*/|Q_i|`.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2",
    "x86_64+avx2"
))]
fn grow_block(run: Run<'_>, fields: &Fields, growing: &mut Growing) {
    let films = run.films.len();
    let top = on_top(run, fields);
    let mut v = Second {
        e: [[1.0; LANES], [0.0; LANES]],
        h: [run.front.y.re.map(|y| -y), run.front.y.im.map(|y| -y)],
        phase: [[1.0; LANES], [0.0; LANES]],
    };
    for j in 0..=films {
        v.meets(fields, j, &mut growing.z[j]);
        if j == films {
            break;
        }
        let medium = &run.films[j].medium;
        if std::ptr::eq(medium.y.re, medium.q.re) {
            v.effect::<true>((run.k0, medium), (fields, j), &top, growing);
        } else {
            v.effect::<false>((run.k0, medium), (fields, j), &top, growing);
        }
        v.descend(medium, fields, j);
        if is_scaled(films, j) {
            let scale = fields.scale(films, j);
            for row in v.e.iter_mut().chain(&mut v.h) {
                for l in 0..LANES {
                    row[l] *= scale[l];
                }
            }
        }
    }
}

/// `1/a₀`, and `2 r* · 2Y₀/a₀` over `4|Y₀|²/(Re Y₀ |a₀|²)`.
struct Top {
    inverse: [Lane; 2],
    turn: [Lane; 2],
}

#[inline(always)]
fn on_top(run: Run<'_>, fields: &Fields) -> Top {
    let mut top = Top { inverse: [[0.0; LANES]; 2], turn: [[0.0; LANES]; 2] };
    let front = &fields.weight[0];
    for l in 0..LANES {
        let y0 = (run.front.y.re[l], run.front.y.im[l]);
        let h = (fields.h_re[0][l], fields.h_im[0][l]);
        let ye = times(y0, (fields.e_re[0][l], fields.e_im[0][l]));
        let (a, b) = ((h.0 + ye.0, h.1 + ye.1), (h.0 - ye.0, h.1 - ye.1));
        let inverse = over((1.0, 0.0), a);
        // r = −b/a.
        let r = times((-b.0, -b.1), inverse);
        let unweighted = 4.0 / front[l];
        let turn = times((unweighted * r.0, -unweighted * r.1), times(y0, inverse));
        for (own, value) in [(&mut top.inverse, inverse), (&mut top.turn, turn)] {
            (own[0][l], own[1][l]) = value;
        }
    }
    top
}

/// The second solution on its way down, and `Q/|Q|`.
struct Second {
    e: [Lane; 2],
    h: [Lane; 2],
    phase: [Lane; 2],
}

impl Second {
    #[inline(always)]
    fn meets(&self, fields: &Fields, at: usize, [z_re, z_im]: &mut [Lane; 2]) {
        let (ue_r, ue_i) = (&fields.e_re[at], &fields.e_im[at]);
        let (uh_r, uh_i) = (&fields.h_re[at], &fields.h_im[at]);
        for l in 0..LANES {
            let (ue, uh) = ((ue_r[l], -ue_i[l]), (uh_r[l], -uh_i[l]));
            let first = times((self.e[0][l], self.e[1][l]), uh);
            let second = times(ue, (self.h[0][l], self.h[1][l]));
            let sum = (first.0 + second.0, first.1 + second.1);
            (z_re[l], z_im[l]) = times(sum, (self.phase[0][l], -self.phase[1][l]));
        }
    }

    /// What film `at` does when it grows; `PLAIN` where `q = Y`.
    #[inline(always)]
    fn effect<const PLAIN: bool>(
        &self,
        (k0, medium): (&Lane, &Medium<'_>),
        (fields, at): (&Fields, usize),
        top: &Top,
        growing: &mut Growing,
    ) {
        let (reflected, below) = (&mut growing.reflected[at], &mut growing.below[at]);
        let [b_re, b_im] = &mut growing.b[at];
        let (ue_r, ue_i) = (&fields.e_re[at], &fields.e_im[at]);
        let (uh_r, uh_i) = (&fields.h_re[at], &fields.h_im[at]);
        let weight = &fields.weight[at];
        for l in 0..LANES {
            let y = (medium.y.re[l], medium.y.im[l]);
            let (ue, uh) = ((ue_r[l], ue_i[l]), (uh_r[l], uh_i[l]));
            let ye = times(y, ue);
            let (down, up) = ((uh.0 + ye.0, uh.1 + ye.1), (uh.0 - ye.0, uh.1 - ye.1));
            let mut over_a0 = (top.inverse[0][l], top.inverse[1][l]);
            if !PLAIN {
                over_a0 = times(over_a0, over((medium.q.re[l], medium.q.im[l]), y));
            }
            // −2 Re α, with i z = (−z.1, z.0).
            let yve = times(y, (self.e[0][l], self.e[1][l]));
            let (hh, ee) = (times(uh, (self.h[0][l], self.h[1][l])), times(ye, yve));
            let alpha = times((hh.0 - ee.0, hh.1 - ee.1), over_a0);
            below[l] = 2.0 * k0[l] * alpha.1;
            let c = times(times(times(down, up), over_a0), (self.phase[0][l], self.phase[1][l]));
            let size = weight[l] * k0[l];
            let b = (size * c.1, -size * c.0);
            (b_re[l], b_im[l]) = b;
            reflected[l] = b.0 * top.turn[0][l] - b.1 * top.turn[1][l];
        }
    }

    /// One film down.
    #[inline(always)]
    fn descend(&mut self, medium: &Medium<'_>, fields: &Fields, at: usize) {
        let (turn_re, turn_im, size) = (&fields.turn_re[at], &fields.turn_im[at], &fields.size[at]);
        let [er, ei] = &mut self.e;
        let [hr, hi] = &mut self.h;
        let [phase_re, phase_im] = &mut self.phase;
        for l in 0..LANES {
            let (y, p) = ((medium.y.re[l], medium.y.im[l]), (turn_re[l], turn_im[l]));
            let yve = times(y, (er[l], ei[l]));
            let a = times(p, (hr[l] + yve.0, hi[l] + yve.1));
            let b = (hr[l] - yve.0, hi[l] - yve.1);
            (er[l], ei[l]) = (a.0 - b.0, a.1 - b.1);
            (hr[l], hi[l]) = times(y, (a.0 + b.0, a.1 + b.1));
            let square = times(y, y);
            let unit = 1.0 / (size[l] * (y.0 * y.0 + y.1 * y.1));
            let turned = times((unit * square.0, unit * square.1), p);
            (phase_re[l], phase_im[l]) = times(turned, (phase_re[l], phase_im[l]));
        }
    }
}
