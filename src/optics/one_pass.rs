//! One pass down through the layers, sunward first, by Beer–Lambert.
//!
//! What is reflected at the front is stated; coats and other non-absorbing layers do nothing;
//! nothing returns from the rear unless a `mirror` is stated, which sends the light back once.

use crate::design::{Design, Duty, OpticsModel, Place};
use crate::materials::optics::Optics;
use crate::materials::{MaterialClass, SharedMaterial};
use crate::numerics::constants::HC_EV;
use crate::optics::downward::{Downward, Half, Ray, downward};
use crate::optics::media::{Media, Medium};
use crate::optics::model::Shares;
use crate::optics::wave::profile::Profile;

/// The lit layers of a design at one temperature, ready to be asked at any wavelength.
#[derive(Clone, Debug)]
pub struct OnePass {
    /// Share of the light that is reflected at the front, at every wavelength.
    pub front_reflectance: f64,
    media: Media,
    slabs: Vec<Slab>,
    mirror: Option<Mirror>,
}

/// One layer that may absorb.
#[derive(Clone, Debug)]
pub struct Slab {
    /// Index in [`Design::layers`].
    pub layer: usize,
    /// The junction that collects what is absorbed here; `None` where nothing is collected.
    pub junction: Option<usize>,
    law: Law,
}

#[derive(Clone, Copy, Debug)]
enum Law {
    /// Absorbs `share` of what reaches it up to `edge_m`, nothing beyond.
    Share { edge_m: f64, share: f64 },
    /// Beer–Lambert in the medium of that index.
    Bulk { medium: usize, thickness_m: f64 },
}

#[derive(Clone, Debug)]
struct Mirror {
    layer: usize,
    /// Media of the last layer above and of the mirror itself; without both indices everything
    /// is sent back.
    face: Option<(usize, usize)>,
}

impl OnePass {
    /// The lit layers of `design` at `temperature_k`. Layers without material or thickness do
    /// nothing here; whether they should have had one is decided before.
    pub fn new(design: &Design, temperature_k: f64) -> Self {
        let front_reflectance = match design.optics {
            OpticsModel::OnePass { front_reflectance, .. } => front_reflectance,
            OpticsModel::Interference { .. } => 0.0,
        };
        let mut model = Self { front_reflectance, media: Media::default(), slabs: Vec::new(), mirror: None };
        for (index, layer) in design.lit_layers() {
            let Some(material) = &layer.material else { continue };
            if layer.duty == Duty::Mirror {
                model.set_mirror(index, material, temperature_k);
                break;
            }
            if layer.duty == Duty::Coat {
                continue;
            }
            let junction = match layer.place {
                Place::Junction(junction) if layer.collects() => Some(junction),
                _ => None,
            };
            let law = match (&material.optics, layer.thickness_m) {
                (Optics::Ideal(ideal), _) => Law::Share {
                    edge_m: HC_EV / (ideal.gap_ev + material.edge_shift_ev(temperature_k)),
                    share: ideal.absorbs,
                },
                (Optics::None, _) | (_, None) => continue,
                (_, Some(thickness_m)) => {
                    Law::Bulk { medium: model.media.find_or_add(material, temperature_k), thickness_m }
                }
            };
            model.slabs.push(Slab { layer: index, junction, law });
        }
        model
    }

    fn set_mirror(&mut self, layer: usize, material: &SharedMaterial, temperature_k: f64) {
        let above = self.slabs.last().and_then(|slab| match slab.law {
            Law::Bulk { medium, .. } => Some(medium),
            Law::Share { .. } => None,
        });
        let own = self.media.find_or_add(material, temperature_k);
        let metal = material.class == MaterialClass::Metal && material.optics != Optics::None;
        self.mirror = Some(Mirror { layer, face: above.filter(|_| metal).map(|above| (above, own)) });
    }

    /// Layer and junction of each row of [`Shares::absorbed`].
    pub fn rows(&self) -> Vec<(usize, Option<usize>)> {
        let slabs = self.slabs.iter().map(|slab| (slab.layer, slab.junction));
        slabs.chain(self.mirror.iter().map(|mirror| (mirror.layer, None))).collect()
    }

    /// Wavelengths at which absorption jumps, m, in the order of the layers.
    pub fn jumps_m(&self) -> Vec<f64> {
        self.slabs
            .iter()
            .filter_map(|slab| match slab.law {
                Law::Share { edge_m, .. } => Some(edge_m),
                Law::Bulk { .. } => None,
            })
            .collect()
    }

    /// Wavelengths at which a slope may change, m, edges shifted; unsorted.
    pub fn knots_m(&self) -> Vec<f64> {
        self.media.knots_m()
    }

    /// First and last wavelength of each table that can absorb, edges shifted, with the row of
    /// [`Shares::absorbed`] that uses it, m.
    pub fn table_ranges_m(&self) -> Vec<(usize, f64, f64)> {
        let range = |(row, slab): (usize, &Slab)| match slab.law {
            Law::Bulk { medium, .. } => {
                let Medium { material, edge_shift_ev } = self.media.at(medium);
                material.optics.range(*edge_shift_ev).map(|(first, last)| (row, first, last))
            }
            Law::Share { .. } => None,
        };
        self.slabs.iter().enumerate().filter_map(range).collect()
    }

    /// Whether `junction` absorbs nothing below its edge: every layer that collects is `ideal`.
    pub fn is_sharp(&self, junction: usize) -> bool {
        let mut own = self.slabs.iter().filter(|slab| slab.junction == Some(junction)).peekable();
        own.peek().is_some() && own.all(|slab| matches!(slab.law, Law::Share { .. }))
    }

    /// Whether every layer of `junction` that collects is a model without a chemistry.
    pub fn is_model(&self, junction: usize) -> bool {
        let mut own = self.slabs.iter().filter(|slab| slab.junction == Some(junction)).peekable();
        own.peek().is_some()
            && own.all(|slab| match slab.law {
                Law::Share { .. } => true,
                Law::Bulk { medium, .. } => {
                    matches!(self.media.at(medium).material.optics, Optics::Direct(_))
                }
            })
    }

    /// Shares of the light that falls on the front, at vacuum wavelengths in m.
    ///
    /// For each layer in turn `a = t (1 − exp(−α d))` of what is left, `t` (Beer–Lambert); an
    /// ideal layer takes its share. At every wavelength reflected, absorbed and passing sum to 1.
    pub fn shares(&self, wavelength_m: &[f64]) -> Shares {
        let taken = self.taken(wavelength_m, self.slabs.len());
        let mut left = vec![1.0 - self.front_reflectance; wavelength_m.len()];
        let mut absorbed: Vec<Vec<f64>> = taken.iter().map(|taken| absorb(&mut left, taken)).collect();
        if let Some(mirror) = &self.mirror {
            let kept = self.mirror_absorbs(mirror, wavelength_m);
            let own = absorb(&mut left, &kept);
            for (row, taken) in absorbed.iter_mut().zip(&taken).rev() {
                for (sum, back) in row.iter_mut().zip(absorb(&mut left, taken)) {
                    *sum += back;
                }
            }
            absorbed.push(own);
        }
        Shares { reflected: vec![self.front_reflectance; wavelength_m.len()], absorbed, passing: left }
    }

    /// Share of the light entering at the front that `junction` collects, at wavelengths in m.
    pub fn junction_share(&self, junction: usize, wavelength_m: &[f64]) -> Vec<f64> {
        let mut sum = vec![0.0; wavelength_m.len()];
        let mut add = |row: &[f64]| sum.iter_mut().zip(row).for_each(|(sum, part)| *sum += part);
        if self.mirror.is_some() {
            let shares = Self { front_reflectance: 0.0, ..self.clone() }.shares(wavelength_m);
            for (slab, row) in self.slabs.iter().zip(&shares.absorbed) {
                if slab.junction == Some(junction) {
                    add(row);
                }
            }
            return sum;
        }
        // Without a mirror nothing below the junction matters.
        let last = self.slabs.iter().rposition(|slab| slab.junction == Some(junction));
        let mut left = vec![1.0; wavelength_m.len()];
        let taken = self.taken(wavelength_m, last.map_or(0, |last| last + 1));
        for (slab, taken) in self.slabs.iter().zip(&taken) {
            let row = absorb(&mut left, taken);
            if slab.junction == Some(junction) {
                add(&row);
            }
        }
        sum
    }

    /// See [`Downward`]. Rays keep their angle from layer to layer and fade by Beer–Lambert; the
    /// front lets out what is within its critical angle and returns the rest, a mirror returns as
    /// it does at normal incidence, and without one nothing comes back from below.
    pub fn downward(&self, junction: usize, junctions: usize, wavelength_m: &[f64]) -> Option<Downward> {
        let last = self.slabs.iter().rposition(|slab| slab.junction == Some(junction))?;
        let Law::Bulk { medium, .. } = self.slabs[last].law else { return None };
        let Medium { material, edge_shift_ev } = self.media.at(medium);
        let index = |wavelength: &f64| material.optics.index(*wavelength, *edge_shift_ev).map(|(n, _)| n);
        let host: Vec<f64> = wavelength_m.iter().map(index).collect::<Option<_>>()?;
        let straight = self.taken(wavelength_m, self.slabs.len());
        let mirror = self.mirror.as_ref().map(|mirror| self.mirror_absorbs(mirror, wavelength_m));
        let count = junctions.max(junction + 1);
        let half = |slabs: &mut dyn DoubleEndedIterator<Item = usize>, ray: &Ray, returns: &[f64]| {
            let own: Vec<usize> = slabs.collect();
            let oblique = |&at: &usize| match self.slabs[at].law {
                Law::Share { .. } => straight[at].clone(),
                Law::Bulk { .. } => {
                    let longer = |(taken, cos): (&f64, &f64)| -((-taken).ln_1p() / cos).exp_m1();
                    straight[at].iter().zip(&ray.cos).map(longer).collect()
                }
            };
            let taken: Vec<Vec<f64>> = own.iter().map(oblique).collect();
            let mut left = vec![1.0; wavelength_m.len()];
            let mut rows: Vec<Vec<f64>> = taken.iter().map(|taken| absorb(&mut left, taken)).collect();
            left.iter_mut().zip(returns).for_each(|(left, returns)| *left *= returns);
            for (row, taken) in rows.iter_mut().zip(&taken).rev() {
                for (sum, back) in row.iter_mut().zip(absorb(&mut left, taken)) {
                    *sum += back;
                }
            }
            Half::new(left, own.iter().map(|&at| self.slabs[at].junction).zip(rows), count)
        };
        Some(downward(&host, (junction, junctions), |ray| {
            let trapped = |along: &f64| if *along > 1.0 { 1.0 } else { 0.0 };
            let front: Vec<f64> = ray.along.iter().map(trapped).collect();
            let rear: Vec<f64> = match &mirror {
                Some(kept) => kept.iter().map(|kept| 1.0 - kept).collect(),
                None => vec![0.0; wavelength_m.len()],
            };
            let upper = half(&mut (0..=last).rev(), ray, &front);
            vec![[upper, half(&mut (last + 1..self.slabs.len()), ray, &rear)]]
        }))
    }

    /// Where in each row of [`OnePass::rows`] light is absorbed, by wavelength: what falls from
    /// the front and, over a mirror, what comes back. `None` for a row without a depth.
    pub fn profiles(&self, rows: &[usize], wavelength_m: &[f64]) -> Vec<Option<Vec<Profile>>> {
        let taken = self.taken(wavelength_m, self.slabs.len());
        let mut left = vec![1.0 - self.front_reflectance; wavelength_m.len()];
        let pass = |left: &mut Vec<f64>, taken: &[f64]| {
            let entering = left.clone();
            absorb(left, taken);
            entering
        };
        let down: Vec<Vec<f64>> = taken.iter().map(|taken| pass(&mut left, taken)).collect();
        let mut up = Vec::new();
        if let Some(mirror) = &self.mirror {
            absorb(&mut left, &self.mirror_absorbs(mirror, wavelength_m));
            up = taken.iter().rev().map(|taken| pass(&mut left, taken)).collect();
            up.reverse();
        }
        let of_row = |&row: &usize| {
            let Law::Bulk { medium, thickness_m } = self.slabs.get(row)?.law else { return None };
            let Medium { material, edge_shift_ev } = self.media.at(medium);
            let alpha = material.optics.absorption_along(wavelength_m, *edge_shift_ev);
            let at = |(at, alpha): (usize, f64)| Profile {
                thickness_m,
                decay_per_m: alpha,
                down: alpha * down[row][at],
                up: alpha * up.get(row).map_or(0.0, |up| up[at]),
                ..Profile::default()
            };
            Some(alpha.into_iter().enumerate().map(at).collect())
        };
        rows.iter().map(of_row).collect()
    }

    /// Share each of the first `count` slabs takes of what reaches it, `[slab][wavelength]`.
    fn taken(&self, wavelength_m: &[f64], count: usize) -> Vec<Vec<f64>> {
        let mut absorption: Vec<Option<Vec<f64>>> = vec![None; self.media.len()];
        self.slabs[..count]
            .iter()
            .map(|slab| match slab.law {
                Law::Share { edge_m, share } => wavelength_m
                    .iter()
                    .map(|&wavelength| if wavelength <= edge_m { share } else { 0.0 })
                    .collect(),
                Law::Bulk { medium, thickness_m } => {
                    let medium_absorption = absorption[medium].get_or_insert_with(|| {
                        let Medium { material, edge_shift_ev } = self.media.at(medium);
                        material.optics.absorption_along(wavelength_m, *edge_shift_ev)
                    });
                    medium_absorption.iter().map(|&alpha| taken_by(alpha * thickness_m)).collect()
                }
            })
            .collect()
    }

    /// `1 − |(N₁ − N₂)/(N₁ + N₂)|²` at the face of a metal mirror (Fresnel, normal incidence).
    fn mirror_absorbs(&self, mirror: &Mirror, wavelength_m: &[f64]) -> Vec<f64> {
        let Some((above, own)) = mirror.face else { return vec![0.0; wavelength_m.len()] };
        let index = |medium: usize, wavelength: f64| {
            let Medium { material, edge_shift_ev } = self.media.at(medium);
            material.optics.index(wavelength, *edge_shift_ev)
        };
        wavelength_m
            .iter()
            .map(|&wavelength| match (index(above, wavelength), index(own, wavelength)) {
                (Some((n1, k1)), Some((n2, k2))) => {
                    let reflected = (n1 - n2).powi(2) + (k1 - k2).powi(2);
                    1.0 - reflected / ((n1 + n2).powi(2) + (k1 + k2).powi(2))
                }
                _ => 0.0,
            })
            .collect()
    }
}

/// `1 − exp(−x)`; most of a spectrum lies beyond a layer's edge or is wholly absorbed, where there
/// is nothing to work out (`exp(−40)` is below the rounding of 1).
fn taken_by(depth: f64) -> f64 {
    if depth == 0.0 {
        0.0
    } else if depth > 40.0 {
        1.0
    } else {
        -(-depth).exp_m1()
    }
}

/// Takes the shares `taken` from `left` and returns what was absorbed.
fn absorb(left: &mut [f64], taken: &[f64]) -> Vec<f64> {
    left.iter_mut()
        .zip(taken)
        .map(|(left, taken)| {
            let absorbed = *left * taken;
            *left -= absorbed;
            absorbed
        })
        .collect()
}
