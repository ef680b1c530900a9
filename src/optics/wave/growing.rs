//! What the fields of a run do when one of its films grows.
//!
//! The pass up leaves the fields `U` of the light; a pass down adds those of a second solution
//! `V` that has no wave coming from the front. A change of thickness in film `j` changes the
//! fields above it by `α U + β V`, the same `α` and `β` at every interface above, and scales those
//! below by `−α` once the incident wave is put back to 1. So the derivative of the flux at every
//! interface by every thickness is one product each. The same is done by prefixes and suffixes of
//! a product of matrices; here nothing can overflow.

use crate::optics::wave::films::{Fields, Run};
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
/// `(2Yc)² exp(2iδ)` over the films above `j`:
/// `α_j = ik₀q (H_U H_V/Y − Y E_U E_V)/a₀`, `C_j = −ik₀ (q/Y) (H² − Y²E²) Q_j/a₀`,
/// `dr/dd = 2Y₀ C_j/a₀`, `B_j = C_j · 4|Y₀|²/(Re Y₀ |a₀|²)`,
/// `Z_i = (E_V H_U* + E_U* H_V) Q_i*/|Q_i|`.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2",
    "x86_64+avx2"
))]
fn grow_block(run: Run<'_>, fields: &Fields, growing: &mut Growing) {
    let films = run.films.len();
    let (y0r, y0i) = (run.front.y.re, run.front.y.im);
    let (mut er, mut ei) = ([1.0; LANES], [0.0; LANES]);
    let (mut hr, mut hi) = ([0.0; LANES], [0.0; LANES]);
    let (mut pr, mut pi): (Lane, Lane) = ([1.0; LANES], [0.0; LANES]);
    // 1/a₀, 4|Y₀|²/(Re Y₀ |a₀|²), and 2 r* · 2Y₀/a₀.
    let (mut inverse_r, mut inverse_i) = ([0.0; LANES], [0.0; LANES]);
    let (mut turn_r, mut turn_i) = ([0.0; LANES], [0.0; LANES]);
    for l in 0..LANES {
        (hr[l], hi[l]) = (-y0r[l], -y0i[l]);
        let y0 = (y0r[l], y0i[l]);
        let h = (fields.h_re[0][l], fields.h_im[0][l]);
        let ye = times(y0, (fields.e_re[0][l], fields.e_im[0][l]));
        let a = (h.0 + ye.0, h.1 + ye.1);
        let b = (h.0 - ye.0, h.1 - ye.1);
        let inverse = over((1.0, 0.0), a);
        (inverse_r[l], inverse_i[l]) = inverse;
        // r = −b/a.
        let r = times((-b.0, -b.1), inverse);
        let turn = times((4.0 * r.0, -4.0 * r.1), times(y0, inverse));
        (turn_r[l], turn_i[l]) = turn;
    }
    for j in 0..=films {
        let [z_re, z_im] = &mut growing.z[j];
        let (ue_r, ue_i) = (&fields.e_re[j], &fields.e_im[j]);
        let (uh_r, uh_i) = (&fields.h_re[j], &fields.h_im[j]);
        for l in 0..LANES {
            let (ue, uh) = ((ue_r[l], -ue_i[l]), (uh_r[l], -uh_i[l]));
            let (first, second) = (times((er[l], ei[l]), uh), times(ue, (hr[l], hi[l])));
            let size = (pr[l] * pr[l] + pi[l] * pi[l]).sqrt();
            let inverse = 1.0 / if size > f64::MIN_POSITIVE { size } else { f64::MIN_POSITIVE };
            let z = times((first.0 + second.0, first.1 + second.1), (pr[l] * inverse, -pi[l] * inverse));
            (z_re[l], z_im[l]) = z;
        }
        if j == films {
            break;
        }
        let medium = &run.films[j].medium;
        let (yr, yi, qr, qi) = (medium.y.re, medium.y.im, medium.q.re, medium.q.im);
        let scale = fields.scale[j];
        let (reflected, below) = (&mut growing.reflected[j], &mut growing.below[j]);
        let [b_re, b_im] = &mut growing.b[j];
        let (front, turn_re, turn_im) = (&fields.weight[0], &fields.turn_re[j], &fields.turn_im[j]);
        for l in 0..LANES {
            let (y, k0) = ((yr[l], yi[l]), run.k0[l]);
            let inverse = (inverse_r[l], inverse_i[l]);
            let (ue, uh) = ((ue_r[l], ue_i[l]), (uh_r[l], uh_i[l]));
            let ye = times(y, ue);
            let down = (uh.0 + ye.0, uh.1 + ye.1);
            let up = (uh.0 - ye.0, uh.1 - ye.1);
            let ratio = over((qr[l], qi[l]), y);
            // −2 Re α, with i z = (−z.1, z.0).
            let yve = times(y, (er[l], ei[l]));
            let (hh, ee) = (times(uh, (hr[l], hi[l])), times(ye, yve));
            let alpha = times(times(ratio, (hh.0 - ee.0, hh.1 - ee.1)), inverse);
            below[l] = 2.0 * k0 * alpha.1;
            let q_product = (pr[l], pi[l]);
            let c = times(times(times(ratio, times(down, up)), inverse), q_product);
            let c = (k0 * c.1, -k0 * c.0);
            reflected[l] = c.0 * turn_r[l] - c.1 * turn_i[l];
            (b_re[l], b_im[l]) = (front[l] * c.0, front[l] * c.1);
            // V and Q one film down.
            let p = (turn_re[l], turn_im[l]);
            let a = times(p, (hr[l] + yve.0, hi[l] + yve.1));
            let b = (hr[l] - yve.0, hi[l] - yve.1);
            (er[l], ei[l]) = (scale * (a.0 - b.0), scale * (a.1 - b.1));
            let h = times(y, (scale * (a.0 + b.0), scale * (a.1 + b.1)));
            (hr[l], hi[l]) = h;
            let square = times(y, y);
            let four = 4.0 * scale * scale;
            let q = times(times((four * square.0, four * square.1), p), q_product);
            (pr[l], pi[l]) = q;
        }
    }
}
