//! Which optics a stack gets, and what both kinds answer.

use crate::design::{Design, OpticsModel};
use crate::optics::downward::Downward;
use crate::optics::interference::Interference;
use crate::optics::one_pass::OnePass;
use crate::optics::wave::profile::Profile;

/// Shares of the light that falls on the front, by wavelength.
#[derive(Clone, Debug, Default)]
pub struct Shares {
    /// Goes back out of the front without having been inside, or after.
    pub reflected: Vec<f64>,
    /// Absorbed, `[row][wavelength]`, rows as [`LightModel::rows`].
    pub absorbed: Vec<Vec<f64>>,
    /// Leaves through the rear (in one pass over a mirror: back out of the front).
    pub passing: Vec<f64>,
}

/// The lit layers of a design at one temperature and angle, ready to be asked at any wavelength.
#[derive(Clone, Debug)]
pub enum LightModel {
    /// Beer–Lambert.
    OnePass(OnePass),
    /// Waves.
    Interference(Box<Interference>),
}

impl LightModel {
    /// The model `design` asks for: waves, unless one pass is stated or a lit layer has no index
    /// ([`layers_without_index`]), where one pass without reflection stands in.
    pub fn new(design: &Design, temperature_k: f64, incidence_rad: f64) -> Self {
        match design.optics {
            OpticsModel::Interference { .. } if layers_without_index(design).is_empty() => {
                Self::Interference(Box::new(Interference::new(design, temperature_k, incidence_rad)))
            }
            _ => Self::OnePass(OnePass::new(design, temperature_k)),
        }
    }

    /// Layer and junction of each row of [`Shares::absorbed`].
    pub fn rows(&self) -> Vec<(usize, Option<usize>)> {
        match self {
            Self::OnePass(model) => model.rows(),
            Self::Interference(model) => model.rows(),
        }
    }

    /// Wavelengths at which absorption jumps, m.
    pub fn jumps_m(&self) -> Vec<f64> {
        match self {
            Self::OnePass(model) => model.jumps_m(),
            Self::Interference(_) => Vec::new(),
        }
    }

    /// Wavelengths at which a slope may change, m; unsorted.
    pub fn knots_m(&self) -> Vec<f64> {
        match self {
            Self::OnePass(model) => model.knots_m(),
            Self::Interference(model) => model.knots_m(),
        }
    }

    /// First and last wavelength of each table that can absorb, m, with its row.
    pub fn table_ranges_m(&self) -> Vec<(usize, f64, f64)> {
        match self {
            Self::OnePass(model) => model.table_ranges_m(),
            Self::Interference(model) => model.table_ranges_m(),
        }
    }

    /// Whether `junction` absorbs nothing below its edge.
    pub fn is_sharp(&self, junction: usize) -> bool {
        match self {
            Self::OnePass(model) => model.is_sharp(junction),
            Self::Interference(_) => false,
        }
    }

    /// Whether every layer of `junction` that collects is a model without a chemistry.
    pub fn is_model(&self, junction: usize) -> bool {
        match self {
            Self::OnePass(model) => model.is_model(junction),
            Self::Interference(model) => model.is_model(junction),
        }
    }

    /// Shares at vacuum wavelengths in m.
    pub fn shares(&self, wavelength_m: &[f64]) -> Shares {
        match self {
            Self::OnePass(model) => model.shares(wavelength_m),
            Self::Interference(model) => model.shares(wavelength_m),
        }
    }

    /// Where in each of `rows` (as [`LightModel::rows`]) light is absorbed, `[of rows][wavelength]`:
    /// for unit flux on the front, mean of s and p. `None` for a row without a depth (`ideal`, a
    /// metal without end).
    pub fn profiles(&self, rows: &[usize], wavelength_m: &[f64]) -> Vec<Option<Vec<Profile>>> {
        match self {
            Self::OnePass(model) => model.profiles(rows, wavelength_m),
            Self::Interference(model) => model.profiles(rows, wavelength_m),
        }
    }

    /// Share each of the first `junctions` junctions collects, `[junction][wavelength]`.
    pub fn by_junction(&self, shares: &Shares, junctions: usize) -> Vec<Vec<f64>> {
        let mut sums = vec![vec![0.0; shares.passing.len()]; junctions];
        for ((_, junction), share) in self.rows().iter().zip(&shares.absorbed) {
            if let Some(sum) = junction.and_then(|junction| sums.get_mut(junction)) {
                sum.iter_mut().zip(share).for_each(|(sum, part)| *sum += part);
            }
        }
        sums
    }

    /// Share of light from the front hemisphere that `junction` absorbs, which is what it emits by
    /// detailed balance, at vacuum wavelengths in m. In one pass: of the light that enters,
    /// straight down.
    pub fn emissivity(&self, junction: usize, wavelength_m: &[f64]) -> Vec<f64> {
        match self {
            Self::OnePass(model) => model.junction_share(junction, wavelength_m),
            Self::Interference(model) => model.emissivity(junction, wavelength_m),
        }
    }
}

impl LightModel {
    /// What `junction` sends down and does not get back, and what of it each of the first
    /// `junctions` junctions absorbs, at vacuum wavelengths in m: see [`Downward`]. `None` where
    /// the lowest layer `junction` collects from has no refractive index (a limit study, which
    /// counts the front only) or there is none.
    pub fn downward(&self, junction: usize, junctions: usize, wavelength_m: &[f64]) -> Option<Downward> {
        match self {
            Self::OnePass(model) => model.downward(junction, junctions, wavelength_m),
            Self::Interference(model) => model.downward(junction, junctions, wavelength_m),
        }
    }

    /// [`Downward::lost`] alone, in units of black-body light from one hemisphere with index 1:
    /// 0..n². Added to [`LightModel::emissivity`] it gives all that a junction emits; zeros where
    /// [`LightModel::downward`] has no answer.
    pub fn emissivity_down(&self, junction: usize, wavelength_m: &[f64]) -> Vec<f64> {
        let down = self.downward(junction, 0, wavelength_m);
        down.map_or_else(|| vec![0.0; wavelength_m.len()], |down| down.lost)
    }

    /// Share of what `from` sends down and does not get back that the junction `to` absorbs, 0..1
    /// by wavelength: [`Downward::to`] over [`Downward::lost`]. 0 where nothing goes down, and
    /// where `to` stands above. A coupling by current is the two integrated over the emission
    /// first and divided then.
    pub fn coupling_share(&self, (from, to): (usize, usize), wavelength_m: &[f64]) -> Vec<f64> {
        let Some(down) = self.downward(from, to + 1, wavelength_m) else {
            return vec![0.0; wavelength_m.len()];
        };
        let share = |(part, whole): (&f64, &f64)| if *whole > 0.0 { part / whole } else { 0.0 };
        down.to[to].iter().zip(&down.lost).map(share).collect()
    }
}

/// The most lit layers that are evaluated: time and memory grow with them, and no cell has as many.
pub const MOST_LAYERS: usize = 2000;

/// Lit layers light cannot be followed through as a wave, as their material has no refractive
/// index; indices in [`Design::layers`].
pub fn layers_without_index(design: &Design) -> Vec<usize> {
    // Any wavelength tells: an index is there for all or for none.
    let lacks = |optics: &crate::materials::optics::Optics| optics.index(600e-9, 0.0).is_none();
    crate::optics::interference::passed(design)
        .filter(|(_, layer)| layer.material.as_ref().is_some_and(|material| lacks(&material.optics)))
        .map(|(index, _)| index)
        .collect()
}
