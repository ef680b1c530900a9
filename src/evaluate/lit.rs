//! What one light at one temperature does to a stack, before it is multiplied by anything.

use crate::circuit::radiative::{Radiative, Statistics};
use crate::design::{Condition, Design, Place, VoltageModel};
use crate::evaluate::collect::{Collected, collected};
use crate::evaluate::coupling::{self, Sent};
use crate::evaluate::transport::{Carrying, carrying};
use crate::light::{DATA_START_M, Spectrum};
use crate::numerics::constants::{CHARGE, HC_EV};
use crate::numerics::quadrature::linear_along;
use crate::optics::grid::{Features, spectral_grid};
use crate::optics::model::{LightModel, Shares};

/// How far material data are asked for where no edge lies further out, m: the end of the
/// terrestrial tables.
const DATA_END_M: f64 = 4000e-9;

/// How far below the gap a table may emit, eV: Urbach tails of 20 meV and less have lost all their
/// weight there; what a table holds further down is noise, not a band edge.
const TABLE_TAIL_EV: f64 = 0.4;

/// Absorption, photon currents and powers at one times and one angle, without fingers.
///
/// Integrals over wavelength are weighted sums over [`Lit::wavelength_m`]: the weights hold the
/// exact integral of a share that is linear between points against a photon flux (or an
/// irradiance) that is linear between them.
#[derive(Clone, Debug)]
pub(super) struct Lit {
    pub(super) optics: LightModel,
    /// Layer and junction of each row of `shares.absorbed`.
    pub(super) rows: Vec<(usize, Option<usize>)>,
    /// Ascending, m.
    pub(super) wavelength_m: Vec<f64>,
    /// Of the light that falls on the open front.
    pub(super) shares: Shares,
    /// A/m2 per unit share.
    pub(super) current_weight: Vec<f64>,
    /// W/m2 per unit share.
    pub(super) power_weight: Vec<f64>,
    /// Photon current absorbed in each row, A/m2, of the light that falls on the open front.
    pub(super) row_current: Vec<f64>,
    /// The part of it that is collected, A/m2.
    pub(super) row_collected: Vec<f64>,
    /// Power absorbed in each row, W/m2, of the light that falls on the open front.
    pub(super) row_power: Vec<f64>,
    /// How the carriers of each junction are taken.
    pub(super) carrying: Vec<Carrying>,
    /// What of the absorbed light is collected, by wavelength.
    pub(super) collected: Collected,
    /// Of each junction at this temperature, eV.
    pub(super) gap_ev: Vec<f64>,
    /// Of each junction through the front, by reciprocity with what it collects.
    pub(super) emission: Vec<Radiative>,
    /// Lowest photon energy each junction emits, eV.
    pub(super) lowest_emitted_ev: Vec<f64>,
    /// Light each junction loses as a multiple of what it sends out of the front: 1, or with a
    /// voltage from layers also what goes down and does not come back.
    pub(super) emits_times: Vec<f64>,
    /// What each junction sends down; empty where neither a voltage nor coupling asks for it.
    pub(super) sent: Vec<Sent>,
    /// Part of the spectrum's total that drives nothing: outside [`Lit::wavelength_m`], W/m2.
    pub(super) beyond_w_per_m2: f64,
}

impl Lit {
    /// `None` where a junction has no layer with a gap that collects.
    pub(super) fn new(design: &Design, condition: &Condition) -> Option<Self> {
        let (light, temperature_k) = (&*condition.light, condition.temperature_k);
        let gap_ev = junction_gaps(design, temperature_k)?;
        let optics = LightModel::new(design, temperature_k, condition.incidence_rad);
        let rows = optics.rows();
        let features = features(light, &optics, &gap_ev)?;
        let (wavelength_m, shares) = spectral_grid(light, &features, &optics, gap_ev.len());
        let flux = light.photon_flux();
        let at = |values: &[f64]| linear_along(&light.wavelength_m, values, &wavelength_m);
        let mut current_weight = weights(&wavelength_m, &at(&flux));
        current_weight.iter_mut().for_each(|weight| *weight *= CHARGE);
        let power_weight = weights(&wavelength_m, &at(&light.irradiance));
        let inside: f64 = power_weight.iter().sum();
        let by_row =
            |weight: &[f64]| -> Vec<f64> { shares.absorbed.iter().map(|share| dot(share, weight)).collect() };
        let mut lit = Self {
            row_current: by_row(&current_weight),
            row_collected: Vec::new(),
            row_power: by_row(&power_weight),
            carrying: carrying(design, condition),
            collected: Collected::default(),
            rows,
            wavelength_m,
            shares,
            current_weight,
            power_weight,
            gap_ev,
            emission: Vec::new(),
            lowest_emitted_ev: Vec::new(),
            emits_times: Vec::new(),
            sent: Vec::new(),
            beyond_w_per_m2: light.total_w_per_m2 - inside,
            optics,
        };
        lit.collected = collected(&mut lit);
        let collected = lit.collected.rows.iter().zip(&lit.row_current);
        lit.row_collected = collected
            .map(|(row, all)| row.as_ref().map_or(*all, |row| dot(row, &lit.current_weight)))
            .collect();
        lit.lowest_emitted_ev = lowest_emitted(&lit.optics, &lit.gap_ev);
        lit.emission = emission(&lit, temperature_k);
        lit.sent = coupling::sent(design, &lit, temperature_k);
        lit.emits_times = emits_times(design, &lit.sent);
        Some(lit)
    }

    /// Rows that `junction` collects from.
    pub(super) fn own_rows(&self, junction: usize) -> impl Iterator<Item = usize> {
        self.rows.iter().enumerate().filter(move |(_, row)| row.1 == Some(junction)).map(|(index, _)| index)
    }

    /// Photocurrent of `junction`, A/m2, of the light that falls on the open front.
    pub(super) fn photocurrent(&self, junction: usize) -> f64 {
        self.own_rows(junction).map(|row| self.row_collected[row]).sum()
    }

    /// Of shares that `junction` absorbs at some wavelengths, what it collects.
    pub(super) fn collects_of(&self, junction: usize, absorbed: Vec<f64>, wavelength_m: &[f64]) -> Vec<f64> {
        let efficiency = self.collected.efficiency_at(junction, &self.wavelength_m, wavelength_m);
        absorbed.iter().zip(efficiency).map(|(share, part)| share * part).collect()
    }

    /// Radiative dark current of `junction`, A/m2.
    pub(super) fn radiative_dark(&self, junction: usize) -> f64 {
        self.emits_times[junction] * self.emission[junction].dark_a_per_m2()
    }

    /// Photon current absorbed where `junction` collects from, A/m2; what [`Lit::photocurrent`]
    /// lacks of it recombines on its way.
    pub(super) fn absorbed_current(&self, junction: usize) -> f64 {
        self.own_rows(junction).map(|row| self.row_current[row]).sum()
    }

    /// Share `junction` collects of the light that falls on the open front, by wavelength.
    pub(super) fn collected_share(&self, junction: usize) -> Vec<f64> {
        let mut sum = vec![0.0; self.wavelength_m.len()];
        for row in self.own_rows(junction) {
            let part = self.collected.rows[row].as_ref().unwrap_or(&self.shares.absorbed[row]);
            sum.iter_mut().zip(part).for_each(|(sum, part)| *sum += part);
        }
        sum
    }

    /// Share absorbed where `junction` collects from, by wavelength.
    pub(super) fn absorbed_share(&self, junction: usize) -> Vec<f64> {
        let mut sum = vec![0.0; self.wavelength_m.len()];
        for row in self.own_rows(junction) {
            sum.iter_mut().zip(&self.shares.absorbed[row]).for_each(|(sum, part)| *sum += part);
        }
        sum
    }

    /// How many points, from the shortest wavelength on, lie above the lowest gap.
    pub(super) fn useful_points(&self) -> usize {
        let lowest = self.gap_ev.iter().copied().fold(f64::INFINITY, f64::min);
        self.wavelength_m.partition_point(|&wavelength| wavelength <= HC_EV / lowest)
    }

    /// Of what `junction` absorbs where it collects from: current and power above its gap, then below it (its tail).
    pub(super) fn split_at_gap(&self, junction: usize) -> [(f64, f64); 2] {
        let edge_m = HC_EV / self.gap_ev[junction];
        let cut = self.wavelength_m.partition_point(|&wavelength| wavelength <= edge_m);
        let mut parts = [(0.0, 0.0); 2];
        for row in self.own_rows(junction) {
            let share = &self.shares.absorbed[row];
            for (part, range) in parts.iter_mut().zip([0..cut, cut..share.len()]) {
                part.0 += dot(&share[range.clone()], &self.current_weight[range.clone()]);
                part.1 += dot(&share[range.clone()], &self.power_weight[range]);
            }
        }
        parts
    }

    /// Photon current reflected up to `edge_m`, A/m2.
    pub(super) fn reflected_current(&self, edge_m: f64) -> f64 {
        let cut = self.wavelength_m.partition_point(|&wavelength| wavelength <= edge_m);
        dot(&self.shares.reflected[..cut], &self.current_weight[..cut])
    }

    /// Power that is reflected and power that passes, W/m2. By waves, light below every gap that
    /// comes back from the rear counts as passing, and cannot be told from what the front returns
    /// at once; so all light beyond the longest edge that leaves is passing.
    pub(super) fn leaving_power(&self) -> (f64, f64) {
        let cut = match self.optics {
            LightModel::OnePass(_) => self.wavelength_m.len(),
            LightModel::Interference(_) => self.useful_points(),
        };
        let (near, far) = self.shares.reflected.split_at(cut);
        let (near_weight, far_weight) = self.power_weight.split_at(cut);
        let passing = dot(&self.shares.passing, &self.power_weight);
        (dot(near, near_weight), passing + dot(far, far_weight))
    }
}

/// Conditions that share light, angle, temperature and fluence share a [`Lit`].
pub(super) fn same_light(a: &Condition, b: &Condition) -> bool {
    let same =
        a.temperature_k == b.temperature_k && a.incidence_rad == b.incidence_rad && a.fluence == b.fluence;
    same && (std::sync::Arc::ptr_eq(&a.light, &b.light) || a.light == b.light)
}

fn junction_gaps(design: &Design, temperature_k: f64) -> Option<Vec<f64>> {
    (0..design.junctions.len()).map(|junction| junction_gap(design, junction, temperature_k)).collect()
}

/// The lowest gap of the layers a junction collects from, eV.
pub(super) fn junction_gap(design: &Design, junction: usize, temperature_k: f64) -> Option<f64> {
    design
        .lit_layers()
        .filter(|(_, layer)| layer.place == Place::Junction(junction) && layer.collects())
        .filter_map(|(_, layer)| layer.material.as_ref()?.gap(temperature_k))
        .map(|gap| gap.ev)
        .min_by(f64::total_cmp)
        .filter(|gap| *gap > 0.0)
}

fn features(light: &Spectrum, optics: &LightModel, gap_ev: &[f64]) -> Option<Features> {
    let (first, last) = light.range_m()?;
    let edges: Vec<f64> = gap_ev.iter().map(|gap| HC_EV / gap).collect();
    let longest = edges.iter().copied().fold(0.0, f64::max);
    let tables = !optics.table_ranges_m().is_empty();
    let from = if tables { light.drives_from_m.max(DATA_START_M) } else { light.drives_from_m };
    let bounded = tables || light.drives_from_m > 0.0;
    let to = if bounded { DATA_END_M.max(1.2 * longest) } else { f64::INFINITY };
    let range_m = (first.max(from), last.min(to));
    let jumps_m = optics.jumps_m().into_iter().chain(edges).collect();
    (range_m.0 < range_m.1).then(|| Features { range_m, jumps_m, knots_m: optics.knots_m() })
}

/// Lowest photon energy each junction emits, eV: where its tables end, and no further down than a
/// band edge can reach.
fn lowest_emitted(optics: &LightModel, gap_ev: &[f64]) -> Vec<f64> {
    let rows = optics.rows();
    let tables = optics.table_ranges_m();
    let lowest = |(junction, gap): (usize, &f64)| {
        let own = tables.iter().filter(|(row, ..)| rows[*row].1 == Some(junction));
        let ends: Vec<f64> = own.map(|(_, _, last)| HC_EV / last).collect();
        if optics.is_sharp(junction) {
            return *gap;
        }
        let end = ends.iter().copied().fold(0.0, f64::max);
        if ends.is_empty() { 0.0 } else { end.max(gap - TABLE_TAIL_EV) }
    };
    gap_ev.iter().enumerate().map(lowest).collect()
}

fn emission(lit: &Lit, temperature_k: f64) -> Vec<Radiative> {
    let optics = &lit.optics;
    let jumps: Vec<f64> = optics.jumps_m().iter().map(|edge| HC_EV / edge).collect();
    lit.gap_ev
        .iter()
        .zip(&lit.lowest_emitted_ev)
        .enumerate()
        .map(|(junction, (&gap, &lowest))| {
            let statistics =
                if optics.is_model(junction) { Statistics::BoseEinstein } else { Statistics::Diode };
            Radiative::new(gap, temperature_k, statistics, (&jumps, lowest), |energy| {
                let shares = |energy: &[f64]| {
                    let wavelength: Vec<f64> = energy.iter().map(|energy| HC_EV / energy).collect();
                    lit.collects_of(junction, optics.emissivity(junction, &wavelength), &wavelength)
                };
                match optics {
                    LightModel::Interference(_) if !optics.is_model(junction) => every_fourth(energy, shares),
                    _ => shares(energy),
                }
            })
        })
        .collect()
}

/// `shares` of ascending energies by asking for every fourth, linear between: by waves each costs
/// eight solutions of the stack, and a fringe or a tail is wider than that.
fn every_fourth(energy: &[f64], shares: impl Fn(&[f64]) -> Vec<f64>) -> Vec<f64> {
    let last = energy.len().saturating_sub(1);
    let asked: Vec<f64> =
        energy.iter().enumerate().filter(|(at, _)| at % 4 == 0 || *at == last).map(|(_, it)| *it).collect();
    linear_along(&asked, &shares(&asked), energy)
}

/// For each junction with a voltage from layers, all it emits over what the front lets out.
fn emits_times(design: &Design, sent: &[Sent]) -> Vec<f64> {
    let of = |(index, junction): (usize, &crate::design::Junction)| match &junction.voltage {
        VoltageModel::Layers => 1.0 + sent.get(index).map_or(0.0, |sent| sent.lost),
        _ => 1.0,
    };
    design.junctions.iter().enumerate().map(of).collect()
}

/// `w` with `Σ w_i s_i = ∫ s f dx` for `s` and `f` linear between the points.
fn weights(x: &[f64], f: &[f64]) -> Vec<f64> {
    let mut weights = vec![0.0; x.len()];
    for i in 1..x.len() {
        let sixth = (x[i] - x[i - 1]) / 6.0;
        weights[i - 1] += sixth * (2.0 * f[i - 1] + f[i]);
        weights[i] += sixth * (f[i - 1] + 2.0 * f[i]);
    }
    weights
}

fn dot(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).map(|(a, b)| a * b).sum()
}
