//! `gap.band-offset`: a window, back surface field or contact layer whose band edge holds back the
//! carriers that must leave through it.
//!
//! Barrier: the step of the conduction band for electrons, of the valence band for holes, met on
//! the way out, from the electron affinities and gaps at 25 °C (Anderson's rule; for III–V
//! compounds from their valence-band offsets). Interface charge and band bending are left out.

use super::junctions::{JunctionFacts, describe, sign};
use super::show::{current, ev};
use super::{Context, Report, Rule, Threshold};
use crate::design::{Duty, Layer, Polarity};
use crate::finding::{Finding, Severity};
use crate::growth::ROOM_K;
use crate::materials::{Material, MaterialClass};
use crate::numerics::constants::{CHARGE, thermal_voltage};

pub(super) static RULE: Rule = Rule {
    code: "gap.band-offset",
    severity: Severity::Warning,
    title: "a band edge holds back the carriers that must leave",
    threshold: Some(Threshold {
        default: 0.5 * CHARGE,
        unit: "eV",
        meaning: "the step of the band on the way out",
    }),
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    for facts in &context.junctions {
        for (inner, outer, outwards_is_up) in ways_out(facts) {
            // On the wrong side it is `structure.order`.
            let astray = match outer.duty {
                Duty::Window => !outwards_is_up,
                Duty::Bsf => outwards_is_up,
                _ => false,
            };
            if astray {
                continue;
            }
            if let Some(finding) = finding(context, inner, outer) {
                report.push([outer.path.as_str()], finding);
            }
        }
    }
}

/// Neighbours in a junction, the one nearer to the main absorber first, and whether the other lies
/// sunward of it.
fn ways_out<'a>(facts: &JunctionFacts<'a>) -> Vec<(&'a Layer, &'a Layer, bool)> {
    let Some((main, _)) = facts.main_absorber() else { return Vec::new() };
    facts
        .layers
        .windows(2)
        .filter_map(|pair| match pair {
            [(_, upper), (at, lower)] if *at <= main => Some((*lower, *upper, true)),
            [(_, upper), (_, lower)] => Some((*upper, *lower, false)),
            _ => None,
        })
        .collect()
}

fn finding(context: &Context, inner: &Layer, outer: &Layer) -> Option<Finding> {
    // Across the junction itself the field does the work.
    let way = sign(outer)?;
    if sign(inner).is_some_and(|own| own != way) {
        return None;
    }
    let (from, to) = (inner.material.as_ref()?, outer.material.as_ref()?);
    let barrier = edge(to, way)? - edge(from, way)?;
    if barrier <= context.threshold(&RULE) / CHARGE {
        return None;
    }
    let (carriers, band, side) = match way {
        Polarity::N => ("electrons", "conduction", "above"),
        Polarity::P => ("holes", "valence", "below"),
    };
    let most = context.threshold(&RULE) / CHARGE;
    Some(
        Finding::warning(
            RULE.code,
            format!(
                "{} holds back the {carriers} of the {}: its {band} band lies {} {side}, which lets {} pass",
                describe(context.design, outer),
                inner.duty.word(),
                ev(barrier),
                current(thermionic_ma_per_cm2(barrier))
            ),
        )
        .at(outer.spans.material, format!("{band} band {} {side}", ev(barrier)))
        .beside(inner.spans.material, format!("{carriers} come from here"))
        .help(format!(
            "choose a material whose {band} band lies less than {} {side} that of `{}`, or grade the step",
            ev(most),
            from.label
        )),
    )
}

/// How high a carrier of that sign stands, eV: the conduction edge for electrons, the valence edge
/// counted downwards for holes, from the vacuum level.
fn edge(material: &Material, way: Polarity) -> Option<f64> {
    if !matches!(material.class, MaterialClass::Semiconductor | MaterialClass::Contact) {
        return None;
    }
    let affinity = material.affinity_ev(ROOM_K)?;
    match way {
        Polarity::N => Some(-affinity),
        Polarity::P => Some(affinity + material.gap(ROOM_K)?.ev),
    }
}

/// What crosses a barrier in eV by thermionic emission at 25 °C, mA/cm2: `A T² exp(−E/kT)` with
/// the Richardson constant of a free electron, 120 A/cm2/K2, an upper estimate for semiconductors
/// (S. M. Sze, K. K. Ng, Physics of Semiconductor Devices, 3rd ed. (2007), section 3.3).
fn thermionic_ma_per_cm2(barrier_ev: f64) -> f64 {
    1e3 * 120.17 * ROOM_K * ROOM_K * (-barrier_ev / thermal_voltage(ROOM_K)).exp()
}

#[cfg(test)]
mod tests {
    use super::thermionic_ma_per_cm2;

    #[test]
    fn current_over_half_an_electronvolt() {
        // 120.17 × 298.15² × exp(−0.5/0.0256926) = 0.0378 A/cm2, worked out by hand.
        assert!((thermionic_ma_per_cm2(0.5) - 37.8).abs() < 0.3, "{}", thermionic_ma_per_cm2(0.5));
    }
}
