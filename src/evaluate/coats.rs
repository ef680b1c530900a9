//! How far each coat is from the thickness that lets most light in.
//!
//! One coat at a time, the others as they are, under the first condition. What counts is the
//! current the stack is limited to: the smallest photocurrent of a series stack, the sum weighed
//! with the gaps where junctions have terminals of their own. Collection is taken as it is at the
//! thickness stated.

use crate::design::{Condition, Design, Duty, Extent, Place, Terminals};
use crate::evaluate::lit::Lit;
use crate::optics::model::LightModel;
use crate::results::CoatResult;

/// Wavelengths that are enough to compare two thicknesses of a coat.
const POINTS: usize = 300;
/// Thinner is no coat, m.
const LEAST_M: f64 = 5e-9;
/// How far from the stated thickness is looked, as a factor to both sides: beyond it lie the next
/// orders of the fringes.
const REACH: f64 = 2.2;
/// Thicknesses tried before the best of them is narrowed down.
const STEPS: i32 = 6;
/// What a tenth more or less must gain for a search to be worth it.
const WORTH: f64 = 1e-3;

/// Light and weights on few wavelengths.
struct Scale<'a> {
    design: &'a Design,
    condition: &'a Condition,
    wavelength_m: Vec<f64>,
    weight: Vec<f64>,
    /// Of each junction at the stated thicknesses, A/m2.
    collected: Vec<f64>,
    /// The same as absorbed on the few wavelengths.
    absorbed: Vec<f64>,
}

/// Every coat over the first junction; empty where the light is not followed as waves.
pub(super) fn coats(design: &Design, lit: &Lit) -> Vec<CoatResult> {
    let (Some(condition), LightModel::Interference(_)) = (design.conditions.first(), &lit.optics) else {
        return Vec::new();
    };
    let coats: Vec<usize> = (0..design.layers.len())
        .filter(|&at| {
            let layer = &design.layers[at];
            layer.duty == Duty::Coat && layer.place == Place::Front && layer.extent == Extent::Everywhere
        })
        .collect();
    if coats.is_empty() {
        return Vec::new();
    }
    let scale = Scale::new(design, condition, lit);
    coats.into_iter().filter_map(|coat| scale.coat(coat)).collect()
}

impl<'a> Scale<'a> {
    fn new(design: &'a Design, condition: &'a Condition, lit: &Lit) -> Self {
        let stride = lit.wavelength_m.len().div_ceil(POINTS).max(1);
        let chunks = lit.wavelength_m.chunks(stride).zip(lit.current_weight.chunks(stride));
        let (wavelength_m, weight) =
            chunks.map(|(waves, weights)| (waves[waves.len() / 2], weights.iter().sum::<f64>())).unzip();
        let mut scale = Self {
            design,
            condition,
            wavelength_m,
            weight,
            collected: (0..lit.gap_ev.len()).map(|junction| lit.photocurrent(junction)).collect(),
            absorbed: Vec::new(),
        };
        scale.absorbed = scale.absorbed_in(design);
        scale
    }

    /// Photon current absorbed in each junction, A/m2.
    fn absorbed_in(&self, design: &Design) -> Vec<f64> {
        let model = LightModel::new(design, self.condition.temperature_k, self.condition.incidence_rad);
        let shares = model.shares(&self.wavelength_m);
        let mut absorbed = vec![0.0; self.collected.len()];
        for ((_, junction), share) in model.rows().iter().zip(&shares.absorbed) {
            if let Some(junction) = junction {
                absorbed[*junction] += share.iter().zip(&self.weight).map(|(s, w)| s * w).sum::<f64>();
            }
        }
        absorbed
    }

    /// What counts, with the coat at that thickness.
    fn merit(&self, coat: usize, thickness_m: f64) -> f64 {
        let mut other = self.design.clone();
        other.layers[coat].thickness_m = Some(thickness_m);
        let absorbed = self.absorbed_in(&other);
        let currents: Vec<f64> = (0..absorbed.len())
            .map(|at| match self.absorbed[at] > 0.0 {
                true => self.collected[at] * absorbed[at] / self.absorbed[at],
                false => 0.0,
            })
            .collect();
        let apart = self.design.terminals != Terminals::Two
            || self.design.junctions.iter().any(|junction| junction.separate);
        match apart {
            true => currents.iter().sum(),
            false => currents.into_iter().fold(f64::INFINITY, f64::min),
        }
    }

    fn coat(&self, coat: usize) -> Option<CoatResult> {
        let layer = &self.design.layers[coat];
        let stated = layer.thickness_m.filter(|thickness| *thickness > LEAST_M)?;
        let now = self.merit(coat, stated);
        let tenth = [0.9, 1.1].map(|factor| self.merit(coat, stated * factor));
        let (mut best, mut most) = (stated, now);
        if tenth.iter().any(|other| *other > now * (1.0 + WORTH)) {
            let step = REACH.ln() / f64::from(STEPS);
            for at in -STEPS..=STEPS {
                let thickness = (stated * (f64::from(at) * step).exp()).max(LEAST_M);
                let merit = self.merit(coat, thickness);
                if merit > most {
                    (best, most) = (thickness, merit);
                }
            }
            (best, most) = self.narrowed(coat, (best, most), step);
        }
        (now.is_finite() && most.is_finite()).then(|| CoatResult {
            layer: layer.path.clone(),
            condition: self.condition.name.clone(),
            thickness_nm: stated * 1e9,
            best_thickness_nm: best * 1e9,
            gain: if now > 0.0 { most / now - 1.0 } else { 0.0 },
        })
    }

    /// The best by golden section between the neighbours of the best of the steps.
    fn narrowed(&self, coat: usize, (best, most): (f64, f64), step: f64) -> (f64, f64) {
        const GOLDEN: f64 = 0.618_033_988_749_894_9;
        let (mut low, mut high) = (best * (-step).exp(), best * step.exp());
        let mut found = (best, most);
        for _ in 0..8 {
            let inner = [high - GOLDEN * (high - low), low + GOLDEN * (high - low)];
            let merits = inner.map(|thickness| self.merit(coat, thickness));
            for (thickness, merit) in inner.into_iter().zip(merits) {
                if merit > found.1 {
                    found = (thickness, merit);
                }
            }
            if merits[0] > merits[1] { high = inner[1] } else { low = inner[0] }
        }
        found
    }
}
