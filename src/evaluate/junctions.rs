//! From voltage models to diodes, and which junctions share a string.

use crate::circuit::diode::Diode;
use crate::design::{Condition, Design, DiodeFit, Junction, Terminals, VoltageModel};
use crate::evaluate::lit::{Lit, junction_gap};
use crate::evaluate::transport::Carrying;
use crate::numerics::constants::thermal_voltage;

/// Photocurrents below this are dark, A/m2: one electron in five thousand years over a square
/// metre. What a tail absorbs by rounding has no voltage.
const DARK_A_PER_M2: f64 = 1e-30;

/// The diode of each junction under `condition`, sunward first.
///
/// `factor` is what multiplies the light on the open front: concentration, obliquity, what fingers
/// leave.
pub(super) fn diodes(design: &Design, condition: &Condition, lit: &Lit, factor: f64) -> Vec<Diode> {
    design
        .junctions
        .iter()
        .enumerate()
        .map(|(index, junction)| {
            let thermal_v = thermal_voltage(condition.temperature_k);
            let radiative = &lit.emission[index];
            let photocurrent = factor * lit.photocurrent(index);
            let made = if photocurrent < DARK_A_PER_M2 { 0.0 } else { photocurrent };
            let mut diode = Diode {
                radiative: Some((radiative.clone(), 1.0)),
                shunt_conductance: shunt(junction).map_or(0.0, f64::recip),
                ..Diode::lossless(made, thermal_v)
            };
            match &junction.voltage {
                VoltageModel::RadiativeLimit => {}
                VoltageModel::Layers => {
                    // What the front sends out and what goes down for good are both lost.
                    diode.radiative = Some((radiative.clone(), lit.emits_times[index]));
                    if let Carrying::Followed(transport) = &lit.carrying[index] {
                        diode.j01 = transport.diffusion_a_per_m2;
                        diode.j02 = transport.depletion_a_per_m2;
                    }
                }
                VoltageModel::Ere(ere) => diode.radiative = Some((radiative.clone(), ere.recip())),
                VoltageModel::Fit(fit) => {
                    let gap_now = lit.gap_ev[index];
                    let gap_then = junction_gap(design, index, fit.at_k).unwrap_or(gap_now);
                    let (j01, j02) = fit_at(fit, gap_then, (condition, gap_now));
                    diode.j02 = j02;
                    // A fit below the radiative limit cannot be: the limit stands in for it.
                    if j01 >= radiative.dark_a_per_m2() {
                        (diode.j01, diode.radiative) = (j01, None);
                    }
                }
            }
            diode
        })
        .collect()
}

/// A fit's dark currents at the condition's temperature, A/m2: `J01 ∝ T³ exp(−E_g/kT)`,
/// `J02 ∝ T^1.5 exp(−E_g/2kT)`, from the temperature at which it holds.
pub(super) fn fit_at(fit: &DiodeFit, gap_at_fit_ev: f64, now: (&Condition, f64)) -> (f64, f64) {
    let (condition, gap_ev) = now;
    let ratio = condition.temperature_k / fit.at_k;
    let lift = gap_at_fit_ev / thermal_voltage(fit.at_k) - gap_ev / thermal_voltage(condition.temperature_k);
    (fit.j01_a_per_m2 * ratio.powi(3) * lift.exp(), fit.j02_a_per_m2 * ratio.powf(1.5) * (0.5 * lift).exp())
}

/// Shunt of a junction, ohm m2: its own, or its fit's.
fn shunt(junction: &Junction) -> Option<f64> {
    let of_fit = match &junction.voltage {
        VoltageModel::Fit(fit) => fit.shunt_ohm_m2,
        _ => None,
    };
    junction.shunt_ohm_m2.or(of_fit).filter(|shunt| *shunt > 0.0)
}

/// Junctions that carry one current, and the resistances in their way, ohm m2.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Wiring {
    pub(super) junctions: Vec<usize>,
    pub(super) fingers_ohm_m2: f64,
    pub(super) tunnels_ohm_m2: f64,
}

/// The strings of a design, sunward first. With four terminals junctions marked `separate` stand
/// alone and the others share a string; where none is marked, each stands alone. The front grid
/// carries the current of the first string.
pub(super) fn strings(design: &Design) -> Vec<Wiring> {
    let all = 0..design.junctions.len();
    let marked = design.junctions.iter().any(|junction| junction.separate);
    let mut strings: Vec<Vec<usize>> = match design.terminals {
        Terminals::Two | Terminals::Three if !marked => vec![all.collect()],
        Terminals::Four if !marked => all.map(|junction| vec![junction]).collect(),
        _ => {
            let (alone, shared): (Vec<usize>, Vec<usize>) =
                all.partition(|&junction| design.junctions[junction].separate);
            std::iter::once(shared).chain(alone.into_iter().map(|junction| vec![junction])).collect()
        }
    };
    strings.retain(|string| !string.is_empty());
    strings.sort_by_key(|string| string[0]);
    strings
        .into_iter()
        .enumerate()
        .map(|(index, junctions)| {
            let fingers = design.fingers.as_ref().filter(|_| index == 0);
            let tunnels_ohm_m2 = inner_interconnects(design, &junctions)
                .filter_map(|at| design.interconnects[at].resistance_ohm_m2);
            Wiring {
                fingers_ohm_m2: fingers.map_or(0.0, |fingers| fingers.series_resistance_ohm_m2),
                tunnels_ohm_m2: tunnels_ohm_m2.sum(),
                junctions,
            }
        })
        .collect()
}

/// Interconnects that stand between two junctions of one string, as indices of
/// [`Design::interconnects`].
pub(super) fn inner_interconnects<'a>(
    design: &'a Design,
    junctions: &'a [usize],
) -> impl Iterator<Item = usize> + 'a {
    design.interconnects.iter().enumerate().filter_map(move |(index, interconnect)| {
        let below = interconnect.below_junctions;
        let inside = below > 0 && junctions.contains(&(below - 1)) && junctions.contains(&below);
        inside.then_some(index)
    })
}
