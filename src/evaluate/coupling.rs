//! Light that a junction sends to the junctions below it.

use crate::circuit::radiative::dark_currents;
use crate::design::{Design, Junction, Place, VoltageModel};
use crate::evaluate::lit::Lit;
use crate::materials::optics::Optics;
use crate::numerics::constants::HC_EV;

/// What one junction sends down, as multiples of its radiative dark current through the front.
#[derive(Clone, Debug, PartialEq, Default)]
pub(super) struct Sent {
    /// Goes down and does not come back.
    pub(super) lost: f64,
    /// Of that, absorbed where each junction below collects, the next one first.
    pub(super) to: Vec<f64>,
}

/// Whether light sent down counts as current: as stated, else where a voltage comes from layers,
/// whose dark current holds that light as lost.
pub(super) fn is_on(design: &Design) -> bool {
    let from_layers = design.junctions.iter().any(|junction| junction.voltage == VoltageModel::Layers);
    design.junctions.len() > 1 && design.switches.luminescent_coupling.unwrap_or(from_layers)
}

/// What each junction sends down at the temperature of `lit`, by reciprocity with the stack's own
/// optics and with what it collects of light from there. Without a refractive index (limit studies)
/// it is what goes out of a rear face of index 1. Empty where nobody asks: neither coupling nor a
/// voltage from layers, to which it is a loss.
pub(super) fn sent(design: &Design, lit: &Lit, temperature_k: f64) -> Vec<Sent> {
    let from_layers = |junction: &Junction| junction.voltage == VoltageModel::Layers;
    let coupled = is_on(design);
    if !coupled && !design.junctions.iter().any(from_layers) {
        return Vec::new();
    }
    let count = design.junctions.len();
    let of = |(junction, named): (usize, &Junction)| {
        let front = lit.emission[junction].dark_a_per_m2();
        // So cold that not even the dark current can be told: nothing is sent.
        if front <= 0.0 || !(coupled || from_layers(named)) {
            return Sent::default();
        }
        let range = (lit.gap_ev[junction], lit.lowest_emitted_ev[junction]);
        let down = dark_currents(range, temperature_k, |energy_ev| {
            let wavelength_m: Vec<f64> = energy_ev.iter().map(|energy| HC_EV / energy).collect();
            let (lost, to) = match lit.optics.downward(junction, count, &wavelength_m) {
                Some(down) => (down.lost, down.to),
                // Without an index below it either: an upper bound is what layers are for.
                None if coupled => without_index(design, junction, &wavelength_m, temperature_k),
                None => (vec![0.0; wavelength_m.len()], Vec::new()),
            };
            let emits = |row| lit.collects_of(junction, row, &wavelength_m);
            let mut rows = vec![emits(lost)];
            for (below, row) in to.into_iter().enumerate().skip(junction + 1) {
                rows.push(lit.collects_of(below, emits(row), &wavelength_m));
            }
            rows
        });
        let share = |current: &f64| current / front;
        Sent { lost: share(&down[0]), to: down[1..].iter().map(share).collect() }
    };
    design.junctions.iter().enumerate().map(of).collect()
}

/// What junction `from` sends into air below, and what each junction below takes of it in one
/// straight pass; as [`Downward`](crate::optics::downward::Downward).
fn without_index(
    design: &Design,
    from: usize,
    wavelength_m: &[f64],
    temperature_k: f64,
) -> (Vec<f64>, Vec<Vec<f64>>) {
    let lost = taken(design, from, wavelength_m, temperature_k);
    let mut left = lost.clone();
    let mut to = vec![vec![0.0; wavelength_m.len()]; from + 1];
    for junction in from + 1..design.junctions.len() {
        let own = taken(design, junction, wavelength_m, temperature_k);
        to.push(left.iter().zip(&own).map(|(left, own)| left * own).collect());
        left.iter_mut().zip(&own).for_each(|(left, own)| *left *= 1.0 - own);
    }
    (lost, to)
}

/// Share `junction` takes of the light that reaches it.
fn taken(design: &Design, junction: usize, wavelength_m: &[f64], temperature_k: f64) -> Vec<f64> {
    let mut passes = vec![1.0; wavelength_m.len()];
    for (_, layer) in design.lit_layers() {
        let Some(material) = &layer.material else { continue };
        if layer.place != Place::Junction(junction) || !layer.collects() {
            continue;
        }
        let shift = material.edge_shift_ev(temperature_k);
        let thickness_m = layer.thickness_m.unwrap_or(0.0);
        let absorbs: Vec<f64> = match &material.optics {
            Optics::Ideal(ideal) => {
                let edge_m = HC_EV / (ideal.gap_ev + shift);
                wavelength_m.iter().map(|&at| if at <= edge_m { ideal.absorbs } else { 0.0 }).collect()
            }
            optics => optics
                .absorption_along(wavelength_m, shift)
                .iter()
                .map(|alpha| -(-alpha * thickness_m).exp_m1())
                .collect(),
        };
        passes.iter_mut().zip(absorbs).for_each(|(passes, absorbs)| *passes *= 1.0 - absorbs);
    }
    passes.iter().map(|passes| 1.0 - passes).collect()
}
