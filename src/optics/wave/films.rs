//! Coherent films between two media: the recursion that carries the fields up, and the flux down.
//!
//! In every medium `E` and `H` are the fields along the layers, `H` in units of the vacuum's
//! admittance, time as `exp(−iωt)`, index `n + ik`. A wave going down has `H = YE`, one going up
//! `H = −YE`, with the tilted admittance `Y` (`q` for s, `(n + ik)²/q` for p) and the normal part
//! of the index `q = √((n + ik)² − n₀² sin²θ)`; the flux down is `Re(E H*)` for both (Macleod,
//! Thin-Film Optical Filters, 2010, chapter 2).

use crate::optics::wave::Kernel;
use crate::optics::wave::lanes::{ABREAST, APART, LANES, Lane, Pair, decay_all, each, product_sum, sin_cos};

/// A medium under one polarisation at one angle.
#[derive(Clone, Copy, Debug)]
pub(super) struct Medium<'a> {
    /// Tilted admittance.
    pub(super) y: Pair<'a>,
    /// Part of the index along the normal.
    pub(super) q: Pair<'a>,
}

/// A coherent film.
#[derive(Clone, Copy, Debug)]
pub(super) struct Film<'a> {
    pub(super) medium: Medium<'a>,
    pub(super) thickness_m: f64,
}

/// What stands around and between the films of one run.
#[derive(Clone, Copy, Debug)]
pub(super) struct Run<'a> {
    pub(super) front: Medium<'a>,
    pub(super) films: &'a [Film<'a>],
    pub(super) rear: Medium<'a>,
    /// Vacuum wavenumber `2π/λ`, 1/m.
    pub(super) k0: &'a Lane,
}

/// Fields and flux at every interface of a run, the top of each film and then of the rear medium.
///
/// Fields carry no common scale: the true ones of interface `j` are these times the product of
/// `exp(−iδ)/(2Yc)` over the films from `j` down, which is never formed. `gain` and `weight` are
/// what is needed of it. Fields and turns are there only where they were asked to be kept.
#[derive(Clone, Debug, Default)]
pub(super) struct Fields {
    pub(super) e_re: Vec<Lane>,
    pub(super) e_im: Vec<Lane>,
    pub(super) h_re: Vec<Lane>,
    pub(super) h_im: Vec<Lane>,
    /// `exp(2iδ)` of each film.
    pub(super) turn_re: Vec<Lane>,
    pub(super) turn_im: Vec<Lane>,
    /// `|exp(2iδ)|` of each film.
    pub(super) size: Vec<Lane>,
    /// `c` of those films that have one ([`is_scaled`]), from the rear up.
    scale: Vec<Lane>,
    /// `|2Yc|² |exp(2iδ)|` of each film.
    pub(super) gain: Vec<Lane>,
    /// True `|field|²` for unit incident flux over `|field|²` here.
    pub(super) weight: Vec<Lane>,
    /// Net flux down for unit incident flux.
    pub(super) flux: Vec<Lane>,
    /// Share absorbed in each film: what enters its top less what leaves it.
    pub(super) absorbed: Vec<Lane>,
}

/// Unscaled fields grow by `2|Y|` from film to film. Every eighth film, counted from the rear,
/// brings them back to the size of 1 by a power of two, which changes not one bit of them: in
/// between even `|Y| = 10⁸` of light along a layer leaves room for squares.
const EVERY: usize = 8;

/// Whether the fields on top of film `at` are brought back to the size of 1.
pub(super) fn is_scaled(films: usize, at: usize) -> bool {
    (films - at).is_multiple_of(EVERY)
}

/// What a run does with unit flux coming from its front.
#[derive(Clone, Debug)]
pub(super) struct Faces {
    /// `|r|²`.
    pub(super) reflected: Lane,
    /// Flux into the rear medium.
    pub(super) transmitted: Lane,
    /// Net flux through the first interface: `1 − |r|²` where the front medium does not absorb.
    pub(super) entering: Lane,
}

impl Default for Faces {
    fn default() -> Self {
        Self { reflected: [0.0; LANES], transmitted: [0.0; LANES], entering: [0.0; LANES] }
    }
}

impl Fields {
    /// Room for `films` films.
    fn make_room(&mut self, films: usize, keep: bool) {
        let rows = films + 1;
        for lanes in [&mut self.gain, &mut self.flux, &mut self.absorbed] {
            lanes.resize(rows, [0.0; LANES]);
        }
        self.scale.resize(films / EVERY, [1.0; LANES]);
        let kept = if keep { rows } else { 1 };
        for lanes in [
            &mut self.e_re,
            &mut self.e_im,
            &mut self.h_re,
            &mut self.h_im,
            &mut self.turn_re,
            &mut self.turn_im,
            &mut self.size,
            &mut self.weight,
        ] {
            lanes.resize(kept, [0.0; LANES]);
        }
    }

    /// `c` of film `at` of `films`, one of those that have one.
    pub(super) fn scale(&self, films: usize, at: usize) -> &Lane {
        &self.scale[(films - at) / EVERY - 1]
    }
}

/// Solves one run for one block: fields from the rear up, then flux from the front down. Fields
/// and turns stay in `fields` where `keep`.
///
/// Up through a film of phase `δ = k₀ q d` the wave that goes down is `a = H + YE`, the one that
/// goes up `b = exp(2iδ)(H − YE)`, both less the common `exp(−iδ)/2`; on top of it
/// `E = (a − b)/Y`, `H = a + b`. Leaving `1/Y` out as well needs no division, and as
/// `|exp(2iδ)| ≤ 1` nothing can overflow in a thick absorber. The flux down the stack makes good
/// for what was left out.
pub(super) fn solve(
    run: Run<'_>,
    (fields, faces): (&mut Fields, &mut Faces),
    (kernel, keep): (Kernel, bool),
) {
    fields.make_room(run.films.len(), keep);
    match (kernel, keep) {
        (_, true) => kept(run, fields, faces),
        (Kernel::Widest, _) => widest(run, fields, faces),
        (Kernel::Avx2, _) => narrower(run, fields, faces),
        (Kernel::Baseline, _) => up_and_down::<false, false>(run, fields, faces),
        (Kernel::Fused, _) => fused(run, fields, faces),
    }
}

/// The widest registers the machine has; the first that fits is taken.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2",
    "x86_64+avx2"
))]
fn widest(run: Run<'_>, fields: &mut Fields, faces: &mut Faces) {
    up_and_down::<false, false>(run, fields, faces);
}

#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2",
    "x86_64+avx2"
))]
fn kept(run: Run<'_>, fields: &mut Fields, faces: &mut Faces) {
    up_and_down::<false, true>(run, fields, faces);
}

#[multiversion::multiversion(targets("x86_64+avx2"))]
fn narrower(run: Run<'_>, fields: &mut Fields, faces: &mut Faces) {
    up_and_down::<false, false>(run, fields, faces);
}

/// Without the instruction a fused operation is a call into a library: [`Kernel::fused`] gives this
/// kernel only to machines that have it.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2+fma",
    "x86_64+avx2+fma",
    "aarch64+neon"
))]
fn fused(run: Run<'_>, fields: &mut Fields, faces: &mut Faces) {
    up_and_down::<true, false>(run, fields, faces);
}

#[inline(always)]
fn up_and_down<const FUSED: bool, const KEEP: bool>(run: Run<'_>, fields: &mut Fields, faces: &mut Faces) {
    let rear = run.films.len();
    let (mut er, mut ei) = ([1.0; LANES], [0.0; LANES]);
    let (mut hr, mut hi) = (*run.rear.y.re, *run.rear.y.im);
    if KEEP {
        fields.keep(rear, [&er, &ei, &hr, &hi]);
    }
    fields.flux[rear] = hr;
    for (j, film) in run.films.iter().enumerate().rev() {
        let at = if KEEP { j } else { 0 };
        let (turn_re, turn_im) = (&mut fields.turn_re[at], &mut fields.turn_im[at]);
        let (gain, flux) = (&mut fields.gain[j], &mut fields.flux[j]);
        turns::<FUSED>((run.k0, film), gain, (turn_re, turn_im));
        if KEEP {
            fields.size[j] = *gain;
        }
        let (yr, yi) = (film.medium.y.re, film.medium.y.im);
        let sum = product_sum::<FUSED>;
        for l in 0..LANES {
            let (pr, pi) = (turn_re[l], turn_im[l]);
            // a = H + YE, H − YE, and b.
            let (ye_r, ye_i) = (sum(-yi[l], ei[l], yr[l] * er[l]), sum(yi[l], er[l], yr[l] * ei[l]));
            let (ar, ai) = (hr[l] + ye_r, hi[l] + ye_i);
            let (ur, ui) = (hr[l] - ye_r, hi[l] - ye_i);
            let (br, bi) = (sum(-pi, ui, pr * ur), sum(pi, ur, pr * ui));
            // E = a − b, H = Y(a + b).
            er[l] = ar - br;
            ei[l] = ai - bi;
            let (sr, si) = (ar + br, ai + bi);
            hr[l] = sum(-yi[l], si, yr[l] * sr);
            hi[l] = sum(yi[l], sr, yr[l] * si);
            flux[l] = sum(ei[l], hi[l], er[l] * hr[l]);
            gain[l] *= 4.0 * sum(yi[l], yi[l], yr[l] * yr[l]);
        }
        if is_scaled(rear, j) {
            let scale = &mut fields.scale[(rear - j) / EVERY - 1];
            for l in 0..LANES {
                let c = to_one(er[l].abs().max(ei[l].abs()).max(hr[l].abs().max(hi[l].abs())));
                scale[l] = c;
                (er[l], ei[l], hr[l], hi[l]) = (c * er[l], c * ei[l], c * hr[l], c * hi[l]);
                (flux[l], gain[l]) = (c * c * flux[l], c * c * gain[l]);
            }
        }
        if KEEP {
            fields.keep(j, [&er, &ei, &hr, &hi]);
        }
    }
    let mut weight = [0.0; LANES];
    enter(run.front.y, [&er, &ei, &hr, &hi], &mut faces.reflected, &mut weight);
    if KEEP {
        fields.weight[0] = weight;
    }
    for l in 0..LANES {
        fields.flux[0][l] *= weight[l];
    }
    for j in 0..rear {
        for l in 0..LANES {
            weight[l] *= fields.gain[j][l];
            fields.flux[j + 1][l] *= weight[l];
            fields.absorbed[j][l] = fields.flux[j][l] - fields.flux[j + 1][l];
        }
        if KEEP {
            fields.weight[j + 1] = weight;
        }
    }
    faces.transmitted = fields.flux[rear];
    faces.entering = fields.flux[0];
}

/// `exp(2iδ)` of a film, and its size.
#[inline(always)]
pub(super) fn turns<const FUSED: bool>(
    (k0, film): (&Lane, &Film<'_>),
    size: &mut Lane,
    (re, im): (&mut Lane, &mut Lane),
) {
    let (twice, q) = (2.0 * film.thickness_m, film.medium.q);
    decay_all::<FUSED>(|l| twice * k0[l] * q.im[l], size);
    for l in 0..APART {
        let (sine, cosine) = sin_cos::<FUSED>(each(|p| twice * k0[l + p * APART] * q.re[l + p * APART]));
        for p in 0..ABREAST {
            let l = l + p * APART;
            re[l] = size[l] * cosine[p];
            im[l] = size[l] * sine[p];
        }
    }
}

/// `|r|²` on top of a run, and the weight of the fields there for unit incident flux.
#[inline(always)]
pub(super) fn enter(y: Pair<'_>, [er, ei, hr, hi]: [&Lane; 4], reflected: &mut Lane, weight: &mut Lane) {
    for l in 0..LANES {
        let (yr, yi) = (y.re[l], y.im[l]);
        let (ye_r, ye_i) = (yr * er[l] - yi * ei[l], yr * ei[l] + yi * er[l]);
        let (ar, ai) = (hr[l] + ye_r, hi[l] + ye_i);
        let (ur, ui) = (hr[l] - ye_r, hi[l] - ye_i);
        let incident = 1.0 / (ar * ar + ai * ai);
        reflected[l] = (ur * ur + ui * ui) * incident;
        // Flux of the incident wave: Re(Y) |a|²/|2Y|². A medium that carries none is entered by
        // none, and only must not divide by 0.
        let y2 = yr * yr + yi * yi;
        let carries = if yr > 1e-24 * y2 { yr } else { 1e-24 * y2 };
        weight[l] = 4.0 * y2 / carries * incident;
    }
}

/// The power of two that brings `size` between 1 and 2.
#[inline(always)]
fn to_one(size: f64) -> f64 {
    let size = if size > 1e-290 { size } else { 1e-290 };
    let exponent = size.to_bits() & 0x7FF0_0000_0000_0000;
    // 2046 is twice the exponent's bias.
    f64::from_bits((2046u64 << 52).wrapping_sub(exponent))
}

impl Fields {
    #[inline(always)]
    fn keep(&mut self, at: usize, [er, ei, hr, hi]: [&Lane; 4]) {
        self.e_re[at] = *er;
        self.e_im[at] = *ei;
        self.h_re[at] = *hr;
        self.h_im[at] = *hi;
    }
}

/// `q` of index `n + ik` with `n₀ sin θ = along`, and `Y` for p: `(n + ik)²/q`.
///
/// `q` is kept off 0, where a wave would run exactly along the layer, by 1e-8: its square then
/// loses nothing.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2",
    "x86_64+avx2"
))]
pub(super) fn tilt(index: Pair<'_>, along: &Lane, q: &mut [Lane; 2], y: &mut [Lane; 2]) {
    let [q_re, q_im] = q;
    let [y_re, y_im] = y;
    for l in 0..LANES {
        let (n, k) = (index.re[l], index.im[l]);
        let (sr, si) = (n * n - k * k, 2.0 * n * k);
        let (dr, di) = (sr - along[l] * along[l], si);
        let size = (dr * dr + di * di).sqrt();
        let large = (0.5 * (size + dr.abs())).sqrt();
        let large = if large > 1e-8 { large } else { 1e-8 };
        let small = 0.5 * di / large;
        let (qr, qi) = if dr >= 0.0 { (large, small) } else { (small, large) };
        let inverse = 1.0 / (qr * qr + qi * qi);
        q_re[l] = qr;
        q_im[l] = qi;
        y_re[l] = (sr * qr + si * qi) * inverse;
        y_im[l] = (si * qr - sr * qi) * inverse;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_width_of_register_gives_the_same_bits() {
        // Outside of its dispatch the same source is compiled for the narrowest machine.
        let lane = |from: f64, step: f64| -> Lane { std::array::from_fn(|l| from + step * l as f64) };
        let k0 = lane(3.7e6, 0.9e6);
        let indices: Vec<[Lane; 2]> = (0..24)
            .map(|j| {
                let j = f64::from(j);
                [lane(1.3 + 0.11 * j, 0.011 * j), lane(0.0003 * j * j, 0.0007 * j)]
            })
            .collect();
        let media: Vec<Medium<'_>> =
            indices.iter().map(|[re, im]| Medium { y: Pair { re, im }, q: Pair { re, im } }).collect();
        let film = |j: usize| Film { medium: media[j], thickness_m: 37e-9 * j as f64 };
        let films: Vec<Film<'_>> = (1..23).map(film).collect();
        let run = Run { front: media[0], films: &films, rear: media[23], k0: &k0 };
        let bits = |lanes: &[Lane]| -> Vec<u64> {
            lanes.as_flattened().iter().map(|value| value.to_bits()).collect()
        };
        let all = |kernel: Kernel, keep: bool| {
            let (mut fields, mut faces) = (Fields::default(), Faces::default());
            solve(run, (&mut fields, &mut faces), (kernel, keep));
            let own = [faces.reflected, faces.transmitted, faces.entering];
            let kept = [&fields.e_re, &fields.h_im, &fields.turn_re, &fields.weight];
            let kept = kept.map(|rows| if keep { bits(rows) } else { Vec::new() });
            (bits(&own), bits(&fields.flux), bits(&fields.absorbed), kept)
        };
        let baseline = all(Kernel::Baseline, false);
        assert_eq!(baseline, all(Kernel::Avx2, false));
        assert_eq!(baseline, all(Kernel::Widest, false));
        let kept = all(Kernel::Widest, true);
        assert_eq!((&baseline.0, &baseline.1, &baseline.2), (&kept.0, &kept.1, &kept.2));
    }

    #[test]
    fn a_power_of_two_brings_any_size_near_one() {
        for size in [1e-280, 0.3, 1.0, 1.999, 2.0, 7e200] {
            assert!((1.0..2.0).contains(&(size * to_one(size))), "{size}");
        }
        assert!(to_one(0.0).is_finite());
    }
}
