//! Where in a layer light is absorbed, in closed form.

use std::f64::consts::TAU;
use std::ops::Range;

use crate::optics::wave::block::Block;
use crate::optics::wave::films::{Fields, Medium};
use crate::optics::wave::{LANES, Polarization, Stack};

/// Absorption per depth in one layer at one wavelength, for unit flux on the front of the stack.
///
/// With `z` from the layer's front and thickness `d`, in 1/m:
/// `g(z) = down·exp(−αz) + up·exp(−α(d − z)) + cosine·cos(κz) − sine·sin(κz)`: the wave that goes
/// down, the one that goes up, and their interference. `∫₀ᵈ g dz` is the layer's absorptance.
#[derive(Clone, Copy, Debug, PartialEq, Default)]
pub struct Profile {
    /// `d`, m.
    pub thickness_m: f64,
    /// `α = 2k₀ Im q`, 1/m.
    pub decay_per_m: f64,
    /// `κ = 2k₀ Re q`, 1/m.
    pub wave_per_m: f64,
    /// 1/m, at the front.
    pub down: f64,
    /// 1/m, at the rear.
    pub up: f64,
    /// 1/m.
    pub cosine: f64,
    /// 1/m.
    pub sine: f64,
}

impl Profile {
    /// `g(z)`, 1/m.
    pub fn at(&self, z_m: f64) -> f64 {
        let (sine, cosine) = (self.wave_per_m * z_m).sin_cos();
        self.down * (-self.decay_per_m * z_m).exp()
            + self.up * (-self.decay_per_m * (self.thickness_m - z_m)).exp()
            + self.cosine * cosine
            - self.sine * sine
    }

    /// Share absorbed between two depths in m.
    pub fn between(&self, from_m: f64, to_m: f64) -> f64 {
        self.weighted(0.0, from_m, to_m)
    }

    /// `∫ g(z) exp(rate·(z − from)) dz` from `from_m` to `to_m`: what collection by exponentials
    /// (or by `cosh` and `sinh`, their sums) is made of. `rate` in 1/m, of either sign.
    pub fn weighted(&self, rate_per_m: f64, from_m: f64, to_m: f64) -> f64 {
        let width = to_m - from_m;
        let fading = (-self.decay_per_m * from_m).exp();
        // From the rear backwards, so that no exponential grows.
        let rising = (-self.decay_per_m * (self.thickness_m - from_m)).exp();
        let down = self.down * fading * exponential(rate_per_m - self.decay_per_m, width);
        let up = if self.decay_per_m * width > 1.0 {
            let at_rear = (-self.decay_per_m * (self.thickness_m - to_m)).exp();
            self.up
                * at_rear
                * (rate_per_m * width).exp()
                * exponential(-(rate_per_m + self.decay_per_m), width)
        } else {
            self.up * rising * exponential(rate_per_m + self.decay_per_m, width)
        };
        // Re of (cosine + i sine) ∫ exp(iκz + rate (z − from)) dz.
        let (re, im) = oscillation(rate_per_m, self.wave_per_m, width);
        let (sine, cosine) = (self.wave_per_m * from_m).sin_cos();
        let (cr, ci) = (self.cosine * cosine - self.sine * sine, self.cosine * sine + self.sine * cosine);
        down + up + cr * re - ci * im
    }

    /// The same shape with another absorptance in all; evenly spread where it had none.
    pub fn scale_to(&mut self, absorbed: f64) {
        let own = self.between(0.0, self.thickness_m);
        if own <= 1e-30 || own.is_nan() {
            let even = if self.thickness_m > 0.0 { absorbed / self.thickness_m } else { 0.0 };
            (self.decay_per_m, self.down, self.up, self.cosine, self.sine) = (0.0, even, 0.0, 0.0, 0.0);
            return;
        }
        let factor = absorbed / own;
        for part in [&mut self.down, &mut self.up, &mut self.cosine, &mut self.sine] {
            *part *= factor;
        }
    }

    fn add(&mut self, share: f64, other: &Self) {
        self.down += share * other.down;
        self.up += share * other.up;
        self.cosine += share * other.cosine;
        self.sine += share * other.sine;
    }
}

/// `∫₀ʷ exp(cz) dz`.
fn exponential(c: f64, width: f64) -> f64 {
    let x = c * width;
    if x.abs() < 1e-9 { width * (1.0 + 0.5 * x) } else { x.exp_m1() / c }
}

/// `∫₀ʷ exp((c + iκ)z) dz`.
fn oscillation(c: f64, wave: f64, width: f64) -> (f64, f64) {
    let size = (c * c + wave * wave) * width * width;
    if size < 1e-12 {
        return (width * (1.0 + 0.5 * c * width), 0.5 * wave * width * width);
    }
    let growth = (c * width).exp();
    let (sine, cosine) = (wave * width).sin_cos();
    // exp(x + iy) − 1 without cancellation: expm1(x)cos y − 2 sin²(y/2) + i exp(x) sin y.
    let half = (0.5 * wave * width).sin();
    let (re, im) = ((c * width).exp_m1() * cosine - 2.0 * half * half, growth * sine);
    let inverse = 1.0 / (c * c + wave * wave);
    ((re * c + im * wave) * inverse, (im * c - re * wave) * inverse)
}

impl Stack {
    /// Where light of no preferred polarisation is absorbed in the layer `sheet`, by wavelength.
    pub fn profile(&self, sheet: usize) -> Vec<Profile> {
        self.profiles(&[sheet]).pop().unwrap_or_default()
    }

    /// The same of several layers, `[of sheets][wavelength]`, for the cost of one solution.
    pub fn profiles(&self, sheets: &[usize]) -> Vec<Vec<Profile>> {
        let mut profiles = self.profiles_polarized(Polarization::S, sheets);
        if self.is_oblique() {
            let other = self.profiles_polarized(Polarization::P, sheets);
            for (profile, other) in profiles.iter_mut().flatten().zip(other.iter().flatten()) {
                let own = *profile;
                (profile.down, profile.up, profile.cosine, profile.sine) = (0.0, 0.0, 0.0, 0.0);
                profile.add(0.5, &own);
                profile.add(0.5, other);
            }
        }
        profiles
    }

    /// [`Stack::profile`] for one polarisation.
    pub fn profile_polarized(&self, polarization: Polarization, sheet: usize) -> Vec<Profile> {
        self.profiles_polarized(polarization, &[sheet]).pop().unwrap_or_default()
    }

    fn profiles_polarized(&self, polarization: Polarization, sheets: &[usize]) -> Vec<Vec<Profile>> {
        let mut profiles = vec![vec![Profile::default(); self.wavelength_m.len()]; sheets.len()];
        self.each_block((polarization, true), |block, part| {
            let media = block.media(self, part.start / LANES);
            for (row, &sheet) in profiles.iter_mut().zip(sheets) {
                for (l, profile) in row[part.clone()].iter_mut().enumerate() {
                    let k0 = TAU / self.wavelength_m[part.start + l];
                    *profile = self.profile_in(block, (sheet, &media[sheet + 1]), k0, l);
                }
            }
        });
        profiles
    }

    fn profile_in(&self, block: &Block, (sheet, medium): (usize, &Medium<'_>), k0: f64, l: usize) -> Profile {
        let thickness_m = self.sheets[sheet].thickness_m;
        let mut profile = Profile {
            thickness_m,
            decay_per_m: 2.0 * k0 * medium.q.im[l],
            wave_per_m: 2.0 * k0 * medium.q.re[l],
            ..Profile::default()
        };
        let at = self.runs.iter().filter(|run| run.end < sheet).count();
        let run: &Range<usize> = &self.runs[at];
        let (down, up) = (block.between.down[at][l], block.between.up[at][l]);
        if !self.sheets[sheet].coherent {
            // Fluxes fade on their way down from the front and up from the rear.
            let front = down * block.fronts[at].transmitted[l] * block.between.echo[at][l];
            let below = block.between.reflectance[at + 1][l];
            profile.down = profile.decay_per_m * front;
            profile.up = profile.decay_per_m * front * block.pass[at][l] * below;
            // Where a wave meets its own reflection in an absorbing medium the flux at a face is
            // not quite the difference of the two (a share of order k/n): as much as the fluxes
            // say is absorbed, spread as the two fade.
            let whole = profile.between(0.0, thickness_m);
            if whole > 0.0 {
                let share = block.absorbed()[sheet][l].max(0.0) / whole;
                (profile.down, profile.up) = (share * profile.down, share * profile.up);
            }
            return profile;
        }
        let film = sheet - run.start;
        profile.add(down, &film_profile(&block.front_fields[at], film, (medium, &profile), l));
        if block.lit_from_rear[at] {
            let mirrored = run.len() - 1 - film;
            let own = film_profile(&block.rear_fields[at], mirrored, (medium, &profile), l);
            profile.add(up, &own.turned());
        }
        profile
    }
}

impl Profile {
    /// Seen from the other side: `z` becomes `d − z`.
    fn turned(&self) -> Self {
        let (sine, cosine) = (self.wave_per_m * self.thickness_m).sin_cos();
        Self {
            down: self.up,
            up: self.down,
            cosine: self.cosine * cosine - self.sine * sine,
            sine: -(self.cosine * sine + self.sine * cosine),
            ..*self
        }
    }
}

/// Coefficients of one film of a run lit from its front.
///
/// The wave down is `a/(2Y)` with `a = H + YE` on top of the film, the wave up `−b/(2Y)` with
/// `b = H − YE` below it; `g = −dS/dz` of the flux
/// `S = Re Y (|E₊|² exp(−αz) − |E₋|² exp(αz)) − 2 Im Y Im(E₊E₋* exp(iκz))`.
fn film_profile(fields: &Fields, film: usize, (medium, own): (&Medium<'_>, &Profile), l: usize) -> Profile {
    let (yr, yi) = (medium.y.re[l], medium.y.im[l]);
    let waves = |at: usize| {
        let (er, ei) = (fields.e_re[at][l], fields.e_im[at][l]);
        let (hr, hi) = (fields.h_re[at][l], fields.h_im[at][l]);
        let (ye_r, ye_i) = (yr * er - yi * ei, yr * ei + yi * er);
        ((hr + ye_r, hi + ye_i), (hr - ye_r, hi - ye_i))
    };
    let (a, b) = waves(film);
    let (_, below) = waves(film + 1);
    let quarter = 0.25 / (yr * yr + yi * yi);
    let top = quarter * fields.weight[film][l];
    let bottom = quarter * fields.weight[film + 1][l];
    // E₊E₋* = −a b*/|2Y|² at the top.
    let (cr, ci) = (-(a.0 * b.0 + a.1 * b.1) * top, -(a.1 * b.0 - a.0 * b.1) * top);
    Profile {
        down: own.decay_per_m * yr * (a.0 * a.0 + a.1 * a.1) * top,
        up: own.decay_per_m * yr * (below.0 * below.0 + below.1 * below.1) * bottom,
        cosine: 2.0 * own.wave_per_m * yi * cr,
        sine: 2.0 * own.wave_per_m * yi * ci,
        ..*own
    }
}
