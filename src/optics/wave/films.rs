//! Coherent films between two media: the recursion that carries the fields up, and the flux down.
//!
//! In every medium `E` and `H` are the fields along the layers, `H` in units of the vacuum's
//! admittance, time as `exp(−iωt)`, index `n + ik`. A wave going down has `H = YE`, one going up
//! `H = −YE`, with the tilted admittance `Y` (`q` for s, `(n + ik)²/q` for p) and the normal part
//! of the index `q = √((n + ik)² − n₀² sin²θ)`; the flux down is `Re(E H*)` for both (Macleod,
//! Thin-Film Optical Filters, 2010, chapter 2).

use crate::optics::wave::lanes::{LANES, Lane, Pair, decay, sin_cos};

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
/// what is needed of it.
#[derive(Clone, Debug, Default)]
pub(super) struct Fields {
    pub(super) e_re: Vec<Lane>,
    pub(super) e_im: Vec<Lane>,
    pub(super) h_re: Vec<Lane>,
    pub(super) h_im: Vec<Lane>,
    /// `exp(2iδ)` of each film.
    pub(super) turn_re: Vec<Lane>,
    pub(super) turn_im: Vec<Lane>,
    /// The power of two by which each film's fields were multiplied, lane by lane the same.
    pub(super) scale: Vec<f64>,
    /// `|2Yc|² |exp(2iδ)|` of each film.
    gain: Vec<Lane>,
    /// True `|field|²` for unit incident flux over `|field|²` here.
    pub(super) weight: Vec<Lane>,
    /// Net flux down for unit incident flux.
    pub(super) flux: Vec<Lane>,
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
    pub(super) fn make_room(&mut self, films: usize) {
        let rows = films + 1;
        for lanes in [
            &mut self.e_re,
            &mut self.e_im,
            &mut self.h_re,
            &mut self.h_im,
            &mut self.turn_re,
            &mut self.turn_im,
            &mut self.gain,
            &mut self.weight,
            &mut self.flux,
        ] {
            lanes.resize(rows, [0.0; LANES]);
        }
        self.scale.resize(rows, 1.0);
    }

    /// Share of the unit flux absorbed in each film: what enters its top less what leaves it.
    pub(super) fn absorbed(&self, film: usize, lane: usize) -> f64 {
        self.flux[film][lane] - self.flux[film + 1][lane]
    }
}

/// The power of two nearest below `1/|Y|`, of the block's first lane: fields then keep their size
/// from film to film however many there are, and not one bit of them changes.
fn scale_of(medium: &Medium<'_>) -> f64 {
    let size = 2.0 * (medium.y.re[0].abs() + medium.y.im[0].abs());
    let power = f64::from_bits(size.to_bits() & 0x7FF0_0000_0000_0000);
    if power.is_normal() { 1.0 / power } else { 1.0 }
}

/// Solves one run for one block: fields from the rear up, then flux from the front down.
///
/// Up through a film of phase `δ = k₀ q d` the wave that goes down is `a = H + YE`, the one that
/// goes up `b = exp(2iδ)(H − YE)`, both less the common `exp(−iδ)/2`; on top of it
/// `E = (a − b)/Y`, `H = a + b`. Leaving `1/Y` out as well needs no division, and as
/// `|exp(2iδ)| ≤ 1` nothing can overflow in a thick absorber. The flux down the stack makes good
/// for what was left out.
pub(super) fn solve(run: Run<'_>, fields: &mut Fields) -> Faces {
    fields.make_room(run.films.len());
    for (scale, film) in fields.scale.iter_mut().zip(run.films) {
        *scale = scale_of(&film.medium);
    }
    let mut faces = Faces::default();
    solve_block(run, fields, &mut faces);
    faces
}

/// The widest registers the machine has; the first that fits is taken.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2",
    "x86_64+avx2"
))]
fn solve_block(run: Run<'_>, fields: &mut Fields, faces: &mut Faces) {
    up_and_down(run, fields, faces);
}

#[inline(always)]
fn up_and_down(run: Run<'_>, fields: &mut Fields, faces: &mut Faces) {
    let rear = run.films.len();
    let (mut er, mut ei) = ([1.0; LANES], [0.0; LANES]);
    let (mut hr, mut hi) = (*run.rear.y.re, *run.rear.y.im);
    fields.e_re[rear] = er;
    fields.e_im[rear] = ei;
    fields.h_re[rear] = hr;
    fields.h_im[rear] = hi;
    fields.flux[rear] = hr;
    for (j, film) in run.films.iter().enumerate().rev() {
        let (yr, yi, qr, qi) = (film.medium.y.re, film.medium.y.im, film.medium.q.re, film.medium.q.im);
        let (twice, scale) = (2.0 * film.thickness_m, fields.scale[j]);
        let (turn_re, turn_im) = (&mut fields.turn_re[j], &mut fields.turn_im[j]);
        let (gain, flux) = (&mut fields.gain[j], &mut fields.flux[j]);
        for l in 0..LANES {
            let path = twice * run.k0[l];
            let (sine, cosine) = sin_cos(path * qr[l]);
            let size = decay(path * qi[l]);
            let (pr, pi) = (size * cosine, size * sine);
            // a = H + YE, H − YE, and b.
            let (ye_r, ye_i) = (yr[l] * er[l] - yi[l] * ei[l], yr[l] * ei[l] + yi[l] * er[l]);
            let (ar, ai) = (hr[l] + ye_r, hi[l] + ye_i);
            let (ur, ui) = (hr[l] - ye_r, hi[l] - ye_i);
            let (br, bi) = (pr * ur - pi * ui, pr * ui + pi * ur);
            // E = a − b, H = Y(a + b).
            er[l] = scale * (ar - br);
            ei[l] = scale * (ai - bi);
            let (sr, si) = (scale * (ar + br), scale * (ai + bi));
            hr[l] = yr[l] * sr - yi[l] * si;
            hi[l] = yr[l] * si + yi[l] * sr;
            flux[l] = er[l] * hr[l] + ei[l] * hi[l];
            gain[l] = 4.0 * scale * scale * (yr[l] * yr[l] + yi[l] * yi[l]) * size;
            turn_re[l] = pr;
            turn_im[l] = pi;
        }
        fields.e_re[j] = er;
        fields.e_im[j] = ei;
        fields.h_re[j] = hr;
        fields.h_im[j] = hi;
    }
    // Incident and reflected wave in the front medium.
    let (yr, yi) = (run.front.y.re, run.front.y.im);
    let mut weight = [0.0; LANES];
    for l in 0..LANES {
        let (ye_r, ye_i) = (yr[l] * er[l] - yi[l] * ei[l], yr[l] * ei[l] + yi[l] * er[l]);
        let (ar, ai) = (hr[l] + ye_r, hi[l] + ye_i);
        let (ur, ui) = (hr[l] - ye_r, hi[l] - ye_i);
        let incident = 1.0 / (ar * ar + ai * ai);
        faces.reflected[l] = (ur * ur + ui * ui) * incident;
        // Flux of the incident wave: Re(Y) |a|²/|2Y|². A medium that carries none is entered by
        // none, and only must not divide by 0.
        let y2 = yr[l] * yr[l] + yi[l] * yi[l];
        let carries = if yr[l] > 1e-24 * y2 { yr[l] } else { 1e-24 * y2 };
        weight[l] = 4.0 * y2 / carries * incident;
    }
    for j in 0..rear {
        fields.weight[j] = weight;
        for l in 0..LANES {
            fields.flux[j][l] *= weight[l];
            weight[l] *= fields.gain[j][l];
        }
    }
    fields.weight[rear] = weight;
    for l in 0..LANES {
        fields.flux[rear][l] *= weight[l];
        faces.transmitted[l] = fields.flux[rear][l];
    }
    faces.entering = fields.flux[0];
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
        let indices: Vec<[Lane; 2]> = (0..14)
            .map(|j| {
                let j = f64::from(j);
                [lane(1.3 + 0.21 * j, 0.011 * j), lane(0.0007 * j * j, 0.0013 * j)]
            })
            .collect();
        let media: Vec<Medium<'_>> =
            indices.iter().map(|[re, im]| Medium { y: Pair { re, im }, q: Pair { re, im } }).collect();
        let film = |j: usize| Film { medium: media[j], thickness_m: 37e-9 * j as f64 };
        let films: Vec<Film<'_>> = (1..13).map(film).collect();
        let run = Run { front: media[0], films: &films, rear: media[13], k0: &k0 };
        let (mut wide, mut narrow) = (Fields::default(), Fields::default());
        let faces = solve(run, &mut wide);
        narrow.make_room(films.len());
        narrow.scale.clone_from(&wide.scale);
        let mut plain = Faces::default();
        up_and_down(run, &mut narrow, &mut plain);
        let bits = |lanes: &[Lane]| -> Vec<u64> {
            lanes.as_flattened().iter().map(|value| value.to_bits()).collect()
        };
        let all = |fields: &Fields, faces: &Faces| {
            let rows = [&fields.e_re, &fields.e_im, &fields.h_re, &fields.h_im, &fields.flux, &fields.weight];
            let own = [faces.reflected, faces.transmitted, faces.entering];
            rows.iter().map(|rows| bits(rows)).chain([bits(&own)]).collect::<Vec<_>>()
        };
        assert_eq!(all(&wide, &faces), all(&narrow, &plain));
    }
}
