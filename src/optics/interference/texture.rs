//! Faces that scatter: two published estimates around one thick layer, the host.
//!
//! `pyramids` (regular, slow planes of silicon at 54.74°, upright or inverted): in a cut across
//! the facets light that a facet reflects falls on the one across from it, at `|180° − 3·54.74°|`
//! for light straight down, so that what is lost is the product of the two reflectances, each by
//! the waves in the films at its own angle (Campbell and Green, J. Appl. Phys. 62, 243 (1987)).
//! What a facet lets in runs obliquely through the host. `lambertian_rear`: the face behind the host
//! returns light to all directions alike. With either, all light after the first return is taken as
//! equally bright in all directions of the host: it fades by `2E₃(αd)` from face to face, `1/n²`
//! of it stands inside the escape cone (Yablonovitch, J. Opt. Soc. Am. 72, 899 (1982); Tiedje,
//! Yablonovitch, Cody and Brooks, IEEE Trans. Electron Devices 31, 711 (1984); Green, Prog.
//! Photovolt. 10, 235 (2002)), and the films of both faces take and return of it the mean over the
//! hemisphere by waves. Left out: a third facet, facets seen from oblique planes, films of another
//! thickness on a facet, and that a flat front keeps the light that it returns at its angle.

use std::f64::consts::{FRAC_PI_2, PI};
use std::sync::Arc;

use crate::numerics::exponential_integral::diffuse_pass;
use crate::optics::downward::rays;
use crate::optics::interference::{Interference, Slab, indices, keep_to_absorbers, sheet};
use crate::optics::model::Shares;
use crate::optics::wave::profile::Profile;
use crate::optics::wave::{self, Index, Polarization, Stack};

/// Between the (100) face and a (111) facet: atan √2.
const FACET_RAD: f64 = 0.955_316_618_124_509_3;

/// What scatters, and around which slab.
#[derive(Clone, Copy, Debug)]
pub(super) struct Scatter {
    pub(super) pyramids: bool,
    /// The layer whose faces they are.
    pub(super) host: usize,
}

/// Shares of unit flux, `[row][wavelength]` for a part of the slabs.
#[derive(Clone, Debug)]
struct Part {
    returned: Vec<f64>,
    rows: Vec<Vec<f64>>,
    passed: Vec<f64>,
}

/// A number at each wavelength.
type ByWavelength<'a> = &'a dyn Fn(usize) -> f64;

/// Light that enters the host: its flux, and the cosine of its angle there.
struct Beam {
    flux: Vec<f64>,
    cos: Vec<f64>,
}

/// What the host does, for its profile: light that fades in it on its way down and up.
pub(super) struct InHost {
    /// Absorbed of the beams from the front, and the rate at which they fade over that of `α`.
    first: Vec<f64>,
    slope: Vec<f64>,
    down: Vec<f64>,
    up: Vec<f64>,
}

impl Part {
    fn nothing(rows: usize, count: usize) -> Self {
        Self { returned: vec![0.0; count], rows: vec![vec![0.0; count]; rows], passed: vec![0.0; count] }
    }

    fn add(&mut self, share: impl Fn(usize) -> f64, other: &wave::Shares) {
        let add = |sum: &mut [f64], part: &[f64]| {
            sum.iter_mut().zip(part).enumerate().for_each(|(at, (sum, part))| *sum += share(at) * part);
        };
        add(&mut self.returned, &other.reflected);
        add(&mut self.passed, &other.transmitted);
        self.rows.iter_mut().zip(&other.absorbed).for_each(|(sum, part)| add(sum, part));
    }
}

/// The slabs around the host, at a set of wavelengths.
struct Around<'a> {
    model: &'a Interference,
    host: &'a Slab,
    wavelength_m: &'a [f64],
    indices: Vec<Arc<Index>>,
    air: Arc<Index>,
    /// Of the host.
    n: &'a [f64],
    /// Depth `αd` of the host.
    depth: Vec<f64>,
}

impl Interference {
    /// The slab whose faces scatter: the wafer, else the thickest layer that collects.
    pub(super) fn host(&self, wafer: Option<usize>) -> Option<usize> {
        let place = |layer: usize| self.slabs.iter().position(|slab| slab.layer == layer);
        let collecting = self.slabs.iter().enumerate().filter(|(_, slab)| slab.junction.is_some());
        let thickest = collecting.max_by(|a, b| a.1.thickness_m.total_cmp(&b.1.thickness_m));
        wafer.and_then(place).or(thickest.map(|(at, _)| at))
    }

    /// [`Interference::shares`] with faces that scatter, and what happens in the host.
    pub(super) fn scattered(
        &self,
        scatter: Scatter,
        (wavelength_m, incidence_rad): (&[f64], f64),
    ) -> (Shares, InHost) {
        let columns = self.columns(wavelength_m);
        let host = &self.slabs[scatter.host];
        let (n, k) = &columns[host.medium];
        let depth = |(k, wavelength): (&f64, &f64)| 4.0 * PI * k / wavelength * host.thickness_m;
        let around = Around {
            model: self,
            host,
            wavelength_m,
            indices: indices(&columns),
            air: Arc::new(Index::constant(1.0, 0.0, wavelength_m.len())),
            n,
            depth: k.iter().zip(wavelength_m).map(depth).collect(),
        };
        let (upper, lower) = (&self.slabs[..scatter.host], &self.slabs[scatter.host + 1..]);
        let (front, beams) = if scatter.pyramids {
            around.facets(upper, incidence_rad)
        } else {
            around.flat(upper, incidence_rad)
        };
        let (mut shares, inside) = around.bounce((upper, lower), front, &beams);
        for (row, slab) in shares.absorbed.iter_mut().zip(&self.slabs) {
            keep_to_absorbers(&columns[slab.medium].1, row);
        }
        (shares, inside)
    }

    /// Absorption by depth: what each layer absorbs, spread as light from the front would be
    /// between flat faces; in the host, as the beams and the diffuse light fade.
    pub(super) fn scattered_profiles(
        &self,
        scatter: Scatter,
        rows: &[usize],
        wavelength_m: &[f64],
    ) -> Vec<Option<Vec<Profile>>> {
        let (shares, inside) = self.scattered(scatter, (wavelength_m, self.incidence_rad));
        let mut all = self.flat_profiles(rows, wavelength_m);
        for (row, profiles) in rows.iter().zip(&mut all) {
            let Some(profiles) = profiles else { continue };
            for (at, profile) in profiles.iter_mut().enumerate() {
                if *row == scatter.host {
                    *profile = inside.profile(profile, at);
                }
                profile.scale_to(shares.absorbed[*row][at]);
            }
        }
        all
    }
}

impl InHost {
    fn profile(&self, flat: &Profile, at: usize) -> Profile {
        // One rate for all: that of the beams and of the diffuse light (2α), by what each leaves.
        let (first, diffuse) = (self.first[at], self.down[at] + self.up[at]);
        let sum = (first + diffuse).max(f64::MIN_POSITIVE);
        let slope = (first * self.slope[at] + diffuse * 2.0) / sum;
        Profile {
            decay_per_m: slope * flat.decay_per_m,
            down: (first + self.down[at]) / sum,
            up: self.up[at] / sum,
            cosine: 0.0,
            sine: 0.0,
            ..*flat
        }
    }
}

impl Around<'_> {
    /// Part of `slabs` lit at `along` in a medium of index `n`, over `rear`.
    fn lit(&self, slabs: &[&Slab], (n, along): (&[f64], &[f64]), rear: &Arc<Index>) -> Stack {
        let sheets = slabs.iter().map(|slab| sheet(slab, &self.indices)).collect();
        Stack::from_medium(self.wavelength_m, (n, along), sheets, rear.clone())
    }

    fn index(&self, slab: &Slab) -> &Arc<Index> {
        &self.indices[slab.medium]
    }

    /// A flat front: one beam.
    fn flat(&self, upper: &[Slab], incidence_rad: f64) -> (Part, Vec<Beam>) {
        let ones = vec![1.0; self.n.len()];
        let along = ones.iter().map(|n| n * incidence_rad.sin()).collect::<Vec<_>>();
        let slabs: Vec<&Slab> = upper.iter().collect();
        let solved = self.lit(&slabs, (&ones, &along), self.index(self.host)).solve();
        let mut front = Part::nothing(upper.len(), self.n.len());
        front.add(|_| 1.0, &solved);
        let cos = self.n.iter().map(|n| (1.0 - (incidence_rad.sin() / n).powi(2)).max(0.0).sqrt()).collect();
        let flux = std::mem::replace(&mut front.passed, vec![0.0; self.n.len()]);
        (front, vec![Beam { flux, cos }])
    }

    /// Facets under a flat cover, if there is one: what is thick above the host, and all on it.
    fn facets(&self, upper: &[Slab], incidence_rad: f64) -> (Part, Vec<Beam>) {
        let count = self.n.len();
        let covers = upper.iter().rposition(|slab| !slab.coherent).map_or(0, |at| at + 1);
        let (cover, films) = upper.split_at(covers);
        let columns = self.model.columns(self.wavelength_m);
        let ones = vec![1.0; count];
        let outside = cover.last().map_or(&ones, |slab| &columns[slab.medium].0);
        let mut facets = Part::nothing(films.len(), count);
        let mut beams = Vec::new();
        // The two facets of a cut, by the light that falls on each.
        let tilts: &[f64] = if incidence_rad == 0.0 { &[0.0] } else { &[1.0, -1.0] };
        let angle = |at: usize| (incidence_rad.sin() / outside[at]).asin();
        let lit = |at: usize, tilt: f64| (FACET_RAD - tilt * angle(at)).cos().max(0.0);
        for &tilt in tilts {
            let share = |at: usize| lit(at, tilt) / tilts.iter().map(|tilt| lit(at, *tilt)).sum::<f64>();
            let first = |at: usize| (FACET_RAD - tilt * angle(at)).min(FRAC_PI_2);
            let second = |at: usize| (PI - 3.0 * FACET_RAD + tilt * angle(at)).abs().min(FRAC_PI_2);
            self.two_facets((films, outside), [&share, &first, &second], &mut facets, &mut beams);
        }
        if cover.is_empty() {
            return (facets, beams);
        }
        self.under_cover(cover, (outside, incidence_rad), facets, beams)
    }

    fn two_facets(
        &self,
        (films, outside): (&[Slab], &[f64]),
        [share, first, second]: [ByWavelength<'_>; 3],
        facets: &mut Part,
        beams: &mut Vec<Beam>,
    ) {
        let count = self.n.len();
        let films: Vec<&Slab> = films.iter().collect();
        let along = |angle: &dyn Fn(usize) -> f64| {
            (0..count).map(|at| outside[at] * angle(at).sin()).collect::<Vec<_>>()
        };
        let (first, second) = (along(first), along(second));
        let (mut once, mut again) = (vec![0.0; count], vec![0.0; count]);
        for polarization in [Polarization::S, Polarization::P] {
            let [one, two] = [&first, &second].map(|along| {
                self.lit(&films, (outside, along), self.index(self.host)).solve_polarized(polarization)
            });
            for at in 0..count {
                let (part, left) = (0.5 * share(at), one.reflected[at]);
                facets.returned[at] += part * left * two.reflected[at];
                for (row, (one, two)) in facets.rows.iter_mut().zip(one.absorbed.iter().zip(&two.absorbed)) {
                    row[at] += part * (one[at] + left * two[at]);
                }
                once[at] += part * one.transmitted[at];
                again[at] += part * left * two.transmitted[at];
            }
        }
        // Refracted towards the facet's normal, from above it and from below.
        for (flux, along, side) in [(once, first, -1.0), (again, second, 1.0)] {
            let cos = (0..count).map(|at| {
                let refracted = (along[at] / self.n[at]).min(1.0).asin();
                (FACET_RAD + side * refracted).cos().max(1e-3)
            });
            beams.push(Beam { cos: cos.collect(), flux });
        }
    }

    /// Light between the cover and the facets.
    fn under_cover(
        &self,
        cover: &[Slab],
        (outside, incidence_rad): (&[f64], f64),
        facets: Part,
        mut beams: Vec<Beam>,
    ) -> (Part, Vec<Beam>) {
        let count = self.n.len();
        let ones = vec![1.0; count];
        let along = vec![incidence_rad.sin(); count];
        let down: Vec<&Slab> = cover.iter().collect();
        let up: Vec<&Slab> = cover.iter().rev().collect();
        let medium = self.index(cover.last().unwrap_or(&cover[0]));
        let from_air = self.lit(&down, (&ones, &along), medium).solve();
        let from_inside = self.lit(&up, (outside, &along), &self.air).solve();
        let mut front = Part::nothing(cover.len(), count);
        front.add(|_| 1.0, &from_air);
        let falls: Vec<f64> = (0..count)
            .map(|at| from_air.transmitted[at] / (1.0 - from_inside.reflected[at] * facets.returned[at]))
            .collect();
        let scaled = |values: &[f64]| {
            values.iter().zip(&falls).map(|(value, falls)| value * falls).collect::<Vec<_>>()
        };
        let returned = scaled(&facets.returned);
        for (at, back) in returned.iter().enumerate() {
            front.returned[at] += back * from_inside.transmitted[at];
        }
        for (row, inside) in front.rows.iter_mut().zip(from_inside.absorbed.iter().rev()) {
            row.iter_mut().zip(inside).zip(&returned).for_each(|((sum, inside), back)| *sum += inside * back);
        }
        front.rows.extend(facets.rows.iter().map(|row| scaled(row)));
        front.passed = vec![0.0; count];
        beams.iter_mut().for_each(|beam| beam.flux = scaled(&beam.flux));
        (front, beams)
    }

    /// The mean over the hemisphere of the host of what `slabs` do with its light.
    fn diffuse(&self, slabs: &[&Slab], rear: &Arc<Index>) -> Part {
        let mut part = Part::nothing(slabs.len(), self.n.len());
        for (ray, share) in rays(self.n) {
            let solved = self.lit(slabs, (self.n, &ray.along), rear).solve();
            part.add(|at| share[at] / (self.n[at] * self.n[at]), &solved);
        }
        part
    }

    /// Beams to the rear once, then diffuse light between the faces until nothing is left.
    fn bounce(&self, (upper, lower): (&[Slab], &[Slab]), front: Part, beams: &[Beam]) -> (Shares, InHost) {
        let count = self.n.len();
        let rear = self.model.rear.map_or(&self.air, |(_, medium)| &self.indices[medium]);
        let above: Vec<&Slab> = upper.iter().rev().collect();
        let below: Vec<&Slab> = lower.iter().collect();
        let (inside, beneath) = (self.diffuse(&above, &self.air), self.diffuse(&below, rear));
        let mut reflected = front.returned;
        let mut rows = front.rows;
        let (mut own, mut first, mut slope) = (vec![0.0; count], vec![0.0; count], vec![0.0; count]);
        let mut behind = Part::nothing(lower.len(), count);
        for beam in beams {
            let along: Vec<f64> =
                self.n.iter().zip(&beam.cos).map(|(n, cos)| n * (1.0 - cos * cos).max(0.0).sqrt()).collect();
            let met = self.lit(&below, (self.n, &along), rear).solve();
            let pass: Vec<f64> =
                self.depth.iter().zip(&beam.cos).map(|(depth, cos)| (-depth / cos).exp()).collect();
            behind.add(|at| beam.flux[at] * pass[at], &met);
            for at in 0..count {
                let taken = beam.flux[at] * (1.0 - pass[at]);
                first[at] += taken;
                slope[at] += taken / beam.cos[at];
            }
        }
        let (mut down, mut up) = (vec![0.0; count], vec![0.0; count]);
        for at in 0..count {
            slope[at] = if first[at] > 0.0 { slope[at] / first[at] } else { 1.0 };
            let t = diffuse_pass(self.depth[at]);
            let (above, under) = (inside.returned[at], beneath.returned[at]);
            // Diffuse light that leaves the rear upwards, comes back to it, and so on.
            let rises = behind.returned[at] / (1.0 - t * t * above * under).max(f64::EPSILON);
            let falls = rises * t * above;
            (up[at], down[at]) = (rises * (1.0 - t), falls * (1.0 - t));
            own[at] = first[at] + up[at] + down[at];
            reflected[at] += rises * t * inside.passed[at];
            for (row, part) in rows.iter_mut().zip(inside.rows.iter().rev()) {
                row[at] += rises * t * part[at];
            }
            for (row, part) in behind.rows.iter_mut().zip(&beneath.rows) {
                row[at] += falls * t * part[at];
            }
            behind.passed[at] += falls * t * beneath.passed[at];
        }
        rows.push(own);
        rows.append(&mut behind.rows);
        let mut passing = behind.passed;
        if self.model.rear.is_some() {
            rows.push(std::mem::replace(&mut passing, vec![0.0; count]));
        }
        (Shares { reflected, absorbed: rows, passing }, InHost { first, slope, down, up })
    }
}
