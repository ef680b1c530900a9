//! The wave optics of a design: which layers add waves, which only fluxes, and what lies behind.

use std::sync::Arc;

mod texture;

use crate::design::{Design, Duty, Layer, Place};
use crate::materials::optics::Optics;
use crate::numerics::quadrature::GAUSS4;
use crate::optics::downward::{Downward, Half, Ray, downward};
use crate::optics::interference::texture::Scatter;
use crate::optics::media::Media;
use crate::optics::model::Shares;
use crate::optics::wave::profile::Profile;
use crate::optics::wave::{Index, Polarization, Sheet, Stack};

/// Layers thicker than this show no fringes in sunlight (its coherence length is below 1 µm, and
/// no wafer is flat to a tenth of a wave), m. A wafer is taken so whatever its thickness.
pub const THICK_M: f64 = 10e-6;

/// The lit layers of a design at one temperature and angle.
#[derive(Clone, Debug)]
pub struct Interference {
    media: Media,
    slabs: Vec<Slab>,
    /// Layer and medium of a metal or mirror without end; air where there is none.
    rear: Option<(usize, usize)>,
    incidence_rad: f64,
    scatter: Option<Scatter>,
}

#[derive(Clone, Debug)]
struct Slab {
    layer: usize,
    junction: Option<usize>,
    medium: usize,
    thickness_m: f64,
    coherent: bool,
}

/// The layers light passes, down to the first metal or mirror without a thickness, which ends
/// them. Other layers without a thickness are not there.
pub(super) fn passed(design: &Design) -> impl Iterator<Item = (usize, &Layer)> {
    let mut ended = false;
    design.lit_layers().filter(move |(_, layer)| {
        let ends = ends_light(layer);
        let passed = !ended && (ends || layer.thickness_m.is_some() || layer.collects());
        ended |= ends;
        passed
    })
}

fn ends_light(layer: &Layer) -> bool {
    matches!(layer.duty, Duty::Metal | Duty::Mirror) && layer.thickness_m.is_none()
}

impl Interference {
    /// The lit layers of `design`, all of which have an index, at `temperature_k` and
    /// `incidence_rad` from the normal.
    pub fn new(design: &Design, temperature_k: f64, incidence_rad: f64) -> Self {
        let mut model =
            Self { media: Media::default(), slabs: Vec::new(), rear: None, incidence_rad, scatter: None };
        let mut wafer = None;
        for (index, layer) in passed(design) {
            let Some(material) = &layer.material else { continue };
            let medium = model.media.find_or_add(material, temperature_k);
            if ends_light(layer) {
                model.rear = Some((index, medium));
                break;
            }
            let Some(thickness_m) = layer.thickness_m else { continue };
            let junction = match layer.place {
                Place::Junction(junction) if layer.collects() => Some(junction),
                _ => None,
            };
            if layer.duty == Duty::Wafer {
                wafer = Some(index);
            }
            let coherent = layer.duty != Duty::Wafer && thickness_m <= THICK_M;
            model.slabs.push(Slab { layer: index, junction, medium, thickness_m, coherent });
        }
        let host = model.host(wafer);
        model.scatter =
            design.texture.zip(host).map(|(texture, host)| Scatter { pyramids: texture.pyramids, host });
        model
    }

    /// Layer and junction of each row of [`Shares::absorbed`]; a metal without end comes last.
    pub fn rows(&self) -> Vec<(usize, Option<usize>)> {
        let slabs = self.slabs.iter().map(|slab| (slab.layer, slab.junction));
        slabs.chain(self.rear.iter().map(|(layer, _)| (*layer, None))).collect()
    }

    /// Wavelengths at which a slope may change, m; unsorted.
    pub fn knots_m(&self) -> Vec<f64> {
        self.media.knots_m()
    }

    /// First and last wavelength of each table, m, with the row that uses it.
    pub fn table_ranges_m(&self) -> Vec<(usize, f64, f64)> {
        let slabs = self.slabs.iter().map(|slab| slab.medium);
        let media = slabs.chain(self.rear.iter().map(|(_, medium)| *medium));
        let range = |(row, medium): (usize, usize)| {
            let medium = self.media.at(medium);
            medium.material.optics.range(medium.edge_shift_ev).map(|(first, last)| (row, first, last))
        };
        media.enumerate().filter_map(range).collect()
    }

    /// Whether every layer of `junction` that collects is a model without a chemistry.
    pub fn is_model(&self, junction: usize) -> bool {
        let mut own = self.slabs.iter().filter(|slab| slab.junction == Some(junction)).peekable();
        own.peek().is_some()
            && own.all(|slab| matches!(self.media.at(slab.medium).material.optics, Optics::Direct(_)))
    }

    /// Shares at vacuum wavelengths in m, mean of s and p. At every wavelength reflected, absorbed
    /// and passing sum to 1.
    pub fn shares(&self, wavelength_m: &[f64]) -> Shares {
        if let Some(scatter) = self.scatter {
            return self.scattered(scatter, (wavelength_m, self.incidence_rad)).0;
        }
        let columns = self.columns(wavelength_m);
        let solved = self.stack(wavelength_m, self.incidence_rad, &indices(&columns)).solve();
        let mut absorbed: Vec<Vec<f64>> = solved.absorbed;
        for (row, slab) in absorbed.iter_mut().zip(&self.slabs) {
            keep_to_absorbers(&columns[slab.medium].1, row);
        }
        let mut passing = solved.transmitted;
        if self.rear.is_some() {
            absorbed.push(std::mem::replace(&mut passing, vec![0.0; wavelength_m.len()]));
        }
        Shares { reflected: solved.reflected, absorbed, passing }
    }

    /// See [`LightModel::profiles`](crate::optics::model::LightModel::profiles).
    pub fn profiles(&self, rows: &[usize], wavelength_m: &[f64]) -> Vec<Option<Vec<Profile>>> {
        match self.scatter {
            Some(scatter) => self.scattered_profiles(scatter, rows, wavelength_m),
            None => self.flat_profiles(rows, wavelength_m),
        }
    }

    fn flat_profiles(&self, rows: &[usize], wavelength_m: &[f64]) -> Vec<Option<Vec<Profile>>> {
        let stack = self.stack(wavelength_m, self.incidence_rad, &indices(&self.columns(wavelength_m)));
        let sheets: Vec<usize> = rows.iter().copied().filter(|row| *row < self.slabs.len()).collect();
        let mut profiles = stack.profiles(&sheets).into_iter();
        rows.iter().map(|row| if *row < self.slabs.len() { profiles.next() } else { None }).collect()
    }

    /// Share of light from the whole front hemisphere, `∫ A cos θ dΩ / π`, that `junction`
    /// absorbs: four Gauss points in sin² θ.
    pub fn emissivity(&self, junction: usize, wavelength_m: &[f64]) -> Vec<f64> {
        let mut sum = vec![0.0; wavelength_m.len()];
        let indices = indices(&self.columns(wavelength_m));
        for (node, weight) in GAUSS4 {
            let incidence_rad = (0.5 * (1.0 + node)).sqrt().asin();
            let rows = match self.scatter {
                Some(scatter) => self.scattered(scatter, (wavelength_m, incidence_rad)).0.absorbed,
                None => self.stack(wavelength_m, incidence_rad, &indices).solve().absorbed,
            };
            for (slab, row) in self.slabs.iter().zip(&rows) {
                if slab.junction == Some(junction) {
                    sum.iter_mut().zip(row).for_each(|(sum, part)| *sum += 0.5 * weight * part.max(0.0));
                }
            }
        }
        sum
    }

    /// See [`Downward`]. Both halves by waves, s and p each by itself; between the halves light
    /// adds fluxes.
    pub fn downward(&self, junction: usize, junctions: usize, wavelength_m: &[f64]) -> Option<Downward> {
        let last = self.slabs.iter().rposition(|slab| slab.junction == Some(junction))?;
        let columns = self.columns(wavelength_m);
        let host = &columns[self.slabs[last].medium].0;
        let indices = indices(&columns);
        let air = Arc::new(Index::constant(1.0, 0.0, wavelength_m.len()));
        let upper: Vec<&Slab> = self.slabs[..=last].iter().rev().collect();
        let lower: Vec<&Slab> = self.slabs[last + 1..].iter().collect();
        let solve = |slabs: &[&Slab], rear: &Arc<Index>, ray: &Ray, polarization| {
            let sheets = slabs.iter().map(|slab| sheet(slab, &indices)).collect();
            let stack = Stack::from_medium(wavelength_m, (host, &ray.along), sheets, rear.clone());
            let shares = stack.solve_polarized(polarization);
            let rows = slabs.iter().map(|slab| slab.junction).zip(shares.absorbed);
            Half::new(shares.reflected, rows, junctions.max(junction + 1))
        };
        let rear = self.rear.map_or(&air, |(_, medium)| &indices[medium]);
        Some(downward(host, (junction, junctions), |ray| {
            let both = [Polarization::S, Polarization::P];
            both.map(|it| [solve(&upper, &air, ray, it), solve(&lower, rear, ray, it)]).into()
        }))
    }

    /// `n` and `k` of each medium.
    fn columns(&self, wavelength_m: &[f64]) -> Vec<(Vec<f64>, Vec<f64>)> {
        self.media
            .iter()
            .map(|medium| {
                let along = medium.material.optics.index_along(wavelength_m, medium.edge_shift_ev);
                along.unwrap_or_else(|| (vec![1.0; wavelength_m.len()], vec![0.0; wavelength_m.len()]))
            })
            .collect()
    }

    fn stack(&self, wavelength_m: &[f64], incidence_rad: f64, indices: &[Arc<Index>]) -> Stack {
        let sheets = self.slabs.iter().map(|slab| sheet(slab, indices)).collect();
        let rear = match self.rear {
            Some((_, medium)) => indices[medium].clone(),
            None => Arc::new(Index::constant(1.0, 0.0, wavelength_m.len())),
        };
        Stack::new(wavelength_m, (1.0, incidence_rad), sheets, rear)
    }
}

fn sheet(slab: &Slab, indices: &[Arc<Index>]) -> Sheet {
    Sheet { index: indices[slab.medium].clone(), thickness_m: slab.thickness_m, coherent: slab.coherent }
}

fn indices(columns: &[(Vec<f64>, Vec<f64>)]) -> Vec<Arc<Index>> {
    columns.iter().map(|(n, k)| Arc::new(Index::new(n, k))).collect()
}

/// Differences of fluxes leave a last digit where nothing absorbs: exactly nothing is meant.
fn keep_to_absorbers(k: &[f64], row: &mut [f64]) {
    for (share, k) in row.iter_mut().zip(k) {
        if *k == 0.0 || *share < 0.0 {
            *share = 0.0;
        }
    }
}
