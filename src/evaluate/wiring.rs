//! Which junctions share a string, and where each string works.

use crate::circuit::diode::Diode;
use crate::circuit::series::{Point, Series};
use crate::circuit::tunnel::Tunnel;
use crate::design::{Design, Terminals};
use crate::evaluate::tunnels::crossing;

/// Junctions that carry one current, and what is in their way.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Wiring {
    pub(super) junctions: Vec<usize>,
    pub(super) fingers_ohm_m2: f64,
    /// The ohmic part of all interconnects, ohm m2.
    pub(super) tunnels_ohm_m2: f64,
    /// Those with a peak.
    pub(super) tunnels: Vec<Tunnel>,
}

impl Wiring {
    /// The diodes of the string, out of those of all junctions.
    pub(super) fn own(&self, diodes: &[Diode]) -> Vec<Diode> {
        let mut own: Vec<Diode> = self.junctions.iter().map(|&junction| diodes[junction].clone()).collect();
        // Light for a junction of another string is made there from what this one does at its own
        // operating point; here it only leaves.
        for (at, diode) in own.iter_mut().enumerate() {
            let Some(sent) = &mut diode.sends_down else { continue };
            let junction = self.junctions[at];
            let factor = |below: usize| sent.factors.get(below - junction - 1).copied().unwrap_or(0.0);
            sent.factors = self.junctions[at + 1..].iter().map(|&below| factor(below)).collect();
        }
        own
    }

    /// The string of the diodes [`Wiring::own`] gives.
    pub(super) fn series<'a>(&self, own: &'a [Diode]) -> Series<'a> {
        Series::new(own, self.fingers_ohm_m2 + self.tunnels_ohm_m2, &self.tunnels)
    }
}

/// A string at work.
#[derive(Clone, Debug)]
pub(super) struct Operating {
    pub(super) wiring: Wiring,
    /// Short circuit.
    pub(super) short: Point,
    /// Maximum power point.
    pub(super) best: Point,
    /// V.
    pub(super) open_v: f64,
    /// A/m2 at the maximum power point, were every tunnel junction ohmic.
    pub(super) demanded: f64,
}

impl Operating {
    /// Terminal voltage less its parts at short circuit or at the maximum power point, whichever is
    /// more, V; over the largest part where that is above a volt.
    pub(super) fn residual_v(&self) -> f64 {
        let ohm_m2 = self.wiring.fingers_ohm_m2 + self.wiring.tunnels_ohm_m2;
        let off = |point: &Point| {
            let drops = point.tunnels.iter().copied().chain([point.current * ohm_m2]).map(|drop| -drop);
            let parts: Vec<f64> = point.junctions.iter().copied().chain(drops).collect();
            let largest = parts.iter().fold(1.0, |most: f64, part| most.max(part.abs()));
            (parts.iter().sum::<f64>() - point.voltage).abs() / largest
        };
        off(&self.short).max(off(&self.best))
    }

    /// Delivered, W/m2.
    pub(super) fn power(&self) -> f64 {
        self.best.current * self.best.voltage
    }
}

/// Light of one junction that makes current in another.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Flow {
    pub(super) from: usize,
    pub(super) to: usize,
    /// A/m2, at the maximum power points.
    pub(super) current: f64,
}

/// Every string with `diodes`, one per junction, and the light that flows between junctions.
///
/// Light that a junction sends into another string adds to the photocurrent there: strings are
/// worked out in the order of the sun, each with what those above send at their own maximum power
/// points; what would go into a string worked out before is left out.
pub(super) fn operating(strings: Vec<Wiring>, diodes: &[Diode]) -> (Vec<Operating>, Vec<Flow>) {
    let mut diodes = diodes.to_vec();
    let mut flows: Vec<Flow> = Vec::new();
    let mut done: Vec<Operating> = Vec::with_capacity(strings.len());
    for wiring in strings {
        let own = wiring.own(&diodes);
        let series = wiring.series(&own);
        let short = series.short_circuit();
        let best = series.maximum_power(&short);
        let demanded = if series.passes_a_peak(&short) {
            let free = series.without_peaks();
            free.maximum_power(&free.short_circuit()).current
        } else {
            best.current
        };
        for (&from, &voltage) in wiring.junctions.iter().zip(&best.junctions) {
            let light = diodes[from].shines(voltage).0;
            let factors = diodes[from].factors().to_vec();
            for (to, factor) in (from + 1..).zip(factors) {
                let here = wiring.junctions.contains(&to);
                if done.iter().any(|earlier| earlier.wiring.junctions.contains(&to)) {
                    continue;
                }
                let current = factor * light;
                flows.push(Flow { from, to, current });
                if !here {
                    diodes[to].photocurrent += current;
                }
            }
        }
        let open_v = series.open_circuit().voltage;
        done.push(Operating { wiring, short, best, open_v, demanded });
    }
    flows.retain(|flow| flow.current != 0.0);
    (done, flows)
}

/// The strings of a design, sunward first. With four terminals junctions marked `separate` stand
/// alone and the others share a string; where none is marked, each stands alone. The front grid
/// with its resistance in ohm m2 carries the current of the first string.
pub(super) fn strings(design: &Design, fingers_ohm_m2: f64) -> Vec<Wiring> {
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
            let crossings: Vec<_> = inner_interconnects(design, &junctions)
                .map(|at| crossing(&design.interconnects[at]))
                .collect();
            Wiring {
                fingers_ohm_m2: if index == 0 { fingers_ohm_m2 } else { 0.0 },
                tunnels_ohm_m2: crossings.iter().map(|(ohmic, _)| ohmic).sum(),
                tunnels: crossings.into_iter().filter_map(|(_, tunnel)| tunnel).collect(),
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
