//! `unit.unlikely`, where the material must be known to tell: a direct absorber as thick as a wafer
//! or as thin as a barrier, a window in micrometres, a barrier layer with next to no doping. What a number alone shows is told where it is read.

use super::junctions::{describe, letter};
use super::show::{length, significant};
use super::{Context, Report, Rule};
use crate::design::{Duty, Layer, Place};
use crate::finding::{Finding, Severity};
use crate::materials::MaterialClass;

pub(super) static RULE: Rule = Rule {
    code: "unit.unlikely",
    severity: Severity::Warning,
    title: "a value is far from what is met in practice",
    threshold: None,
    needs_results: false,
    run,
};

/// A direct absorber takes all it can within a few micrometres, m.
const DIRECT_M: (f64, f64) = (10e-9, 20e-6);
/// Indirect absorbers may be wafers; below this even they take next to nothing, m.
const LEAST_ABSORBER_M: f64 = 10e-9;
/// Layers that carriers cross between two others, and that light has to cross too, m. What is
/// thicker than any thin layer was told when the number was read.
const MOST_BARRIER_M: f64 = 2e-6;
const TOLD_M: f64 = 20e-6;
/// Graded buffers of the largest mismatch end near 20 um, m.
const MOST_BUFFER_M: f64 = 50e-6;
/// A transparent conductor thicker than this absorbs more than it conducts, m.
const MOST_CONTACT_M: f64 = 5e-6;
/// Least doping of a layer that is there for its doping, 1/m3.
const LEAST_DOPING_PER_M3: f64 = 1e21;

fn run(context: &Context, report: &mut Report) {
    for layer in &context.design.layers {
        for finding in [thickness(context, layer), doping(context, layer)].into_iter().flatten() {
            report.push([layer.path.as_str()], finding);
        }
    }
}

fn thickness(context: &Context, layer: &Layer) -> Option<Finding> {
    let (thickness, material) = (layer.thickness_m?, layer.material.as_ref()?);
    let direct = || material.gap(crate::growth::ROOM_K).is_some_and(|gap| gap.kind.is_direct());
    let grown = material.class == MaterialClass::Semiconductor;
    let barrier = matches!(layer.duty, Duty::Window | Duty::Bsf)
        || (layer.duty == Duty::Layer && matches!(layer.place, Place::Interconnect(_)));
    let (least, most) = match layer.duty {
        Duty::Base | Duty::Absorber if grown && direct() => DIRECT_M,
        Duty::Base | Duty::Absorber if grown => (LEAST_ABSORBER_M, f64::INFINITY),
        Duty::Intrinsic if grown && direct() => (0.0, DIRECT_M.1),
        Duty::Buffer if grown => (0.0, MOST_BUFFER_M),
        Duty::Contact | Duty::ElectronContact | Duty::HoleContact => (0.0, MOST_CONTACT_M),
        _ if barrier && thickness <= TOLD_M => (0.0, MOST_BARRIER_M),
        _ => return None,
    };
    if (least..=most).contains(&thickness) {
        return None;
    }
    let (size, factor) = if thickness > most { ("more", 1e-3) } else { ("less", 1e3) };
    let meant = length(thickness * factor);
    Some(
        Finding::warning(
            RULE.code,
            format!(
                "{} is {} thick, far {size} than is met in practice",
                describe(context.design, layer),
                length(thickness)
            ),
        )
        .at(layer.spans.thickness, format!("did you mean `{meant}`?"))
        .help(format!("write `{meant}`, or `accept unit.unlikely on {} because \"…\"`", layer.path)),
    )
}

fn doping(context: &Context, layer: &Layer) -> Option<Finding> {
    let doping = layer.doping.as_ref()?;
    let for_its_doping = matches!(
        layer.duty,
        Duty::Emitter | Duty::Window | Duty::Bsf | Duty::Cap | Duty::ElectronContact | Duty::HoleContact
    ) || matches!(layer.place, Place::Interconnect(_));
    let grown = layer.material.as_ref()?.class == MaterialClass::Semiconductor;
    // Below the least that any layer has it was told when the number was read.
    let told = doping.density_per_m3 < 1e19;
    if !for_its_doping || !grown || told || doping.density_per_m3 >= LEAST_DOPING_PER_M3 {
        return None;
    }
    let per_cm3 = |per_m3: f64| {
        let power = per_m3.log10().floor() as i32;
        format!("{}e{power} /cm3", significant(per_m3 / 10f64.powi(power), 2))
    };
    let sign = letter(doping.polarity);
    let meant = format!("{sign} {}", per_cm3(doping.density_per_m3));
    Some(
        Finding::warning(
            RULE.code,
            format!(
                "{} is doped to {}, far less than is met in practice",
                describe(context.design, layer),
                per_cm3(doping.density_per_m3 * 1e-6)
            ),
        )
        .at(doping.span, format!("did you mean `{meant}`?"))
        .help(format!("write `{meant}`, or `accept unit.unlikely on {} because \"…\"`", layer.path)),
    )
}
