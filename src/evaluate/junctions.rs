//! From voltage models to diodes.

use crate::circuit::diode::{Breakdown, Diode, SentDown};
use crate::circuit::radiative::Radiative;
use crate::design::{Condition, Design, DiodeFit, Junction, VoltageModel};
use crate::evaluate::coupling::{self, Sent};
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
    let mut diodes: Vec<Diode> = design
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
                breakdown: breakdown(junction),
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
            if let Some(sent) = lit.sent.get(index).filter(|_| coupling::is_on(design)) {
                send_down(&mut diode, sent, radiative);
            }
            diode
        })
        .collect();
    // What a junction can absorb from above it emits up there too, by reciprocity: without that loss
    // one that nothing reaches from the front would have no voltage to end at.
    for from in 0..diodes.len() {
        let Some(sent) = diodes[from].sends_down.clone() else { continue };
        let dark = sent.emission.dark_a_per_m2();
        for (diode, factor) in diodes[from + 1..].iter_mut().zip(sent.factors) {
            diode.j01 += factor * dark;
        }
    }
    diodes
}

/// Lets a junction's light count below it.
///
/// In the radiative limit that light is recombination on top of what leaves at the front; a stated
/// efficiency, a fit or a sum over layers holds it already. No junction sends more than it
/// recombines beyond its front's emission.
fn send_down(diode: &mut Diode, sent: &Sent, emission: &Radiative) {
    let front = emission.dark_a_per_m2();
    if let Some((_, factor)) = &mut diode.radiative
        && *factor == 1.0
    {
        *factor += sent.lost;
    }
    let recombines = diode.j01 + diode.radiative.as_ref().map_or(0.0, |(_, factor)| factor * front);
    let wanted = sent.lost * front;
    if wanted <= 0.0 {
        return;
    }
    let share = ((recombines - front).max(0.0) / wanted).min(1.0);
    let factors = sent.to.iter().map(|to| share * to).collect();
    diode.sends_down = Some(SentDown { emission: emission.clone(), factors });
}

/// Leakage that is multiplied on the way to breakdown, 1/(ohm m2), where the junction states no
/// shunt: of 1 Mohm cm2, below what any curve shows.
const LEAKAGE: f64 = 1.0 / (1e6 * 1e-4);

/// Share of the leakage that is multiplied: Bishop, Solar Cells 25, 73 (1988).
const MULTIPLIED: f64 = 0.1;

fn breakdown(junction: &Junction) -> Option<Breakdown> {
    let leakage = shunt(junction).map_or(LEAKAGE, f64::recip);
    junction.breakdown_v.map(|voltage_v| Breakdown { voltage_v, conductance: MULTIPLIED * leakage })
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
