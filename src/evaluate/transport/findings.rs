//! What following carriers has to say.

use crate::carriers::statistics::DENSEST;
use crate::design::{Condition, Design, Duty, Face, Polarity, VoltageModel};
use crate::evaluate::lit::Lit;
use crate::evaluate::transport::{Carrying, Lack, LayerCarriers, Transport};
use crate::finding::{Finding, Findings};
use crate::materials::carriers::Carrier;
use crate::units::number;

/// Share of the light's photon current below which a junction is dark.
const DARK: f64 = 1e-9;

/// A field that reaches further asks for doping, not for thickness, m.
const FARTHEST_M: f64 = 1e-4;

/// Findings of all conditions, each thing said once, for the first condition it holds under.
pub(in crate::evaluate) fn findings<'a>(
    design: &Design,
    lit: impl Iterator<Item = (&'a Condition, &'a Lit)> + Clone,
) -> Findings {
    let mut told: Vec<Finding> = Vec::new();
    for junction in 0..design.junctions.len() {
        let mut lacking = lit.clone().filter_map(|(_, lit)| match &lit.carrying[junction] {
            Carrying::Lacking(lack) => Some(*lack),
            _ => None,
        });
        told.extend(lacking.next().and_then(|lack| missing(design, junction, lack)));
        let followed = lit.clone().filter_map(|(condition, lit)| match &lit.carrying[junction] {
            Carrying::Followed(transport) => Some((condition, &**transport)),
            _ => None,
        });
        for face in [Face::Sunward, Face::Rear] {
            told.extend(followed.clone().find_map(|it| full(design, face, it)));
        }
        let layers = design.junctions[junction].layers.clone();
        for layer in layers {
            let own = followed.clone().filter_map(|(condition, transport)| {
                Some((condition, transport.layers.iter().find(|own| own.layer == layer)?))
            });
            told.extend(own.clone().find_map(|it| degenerate(design, it)));
            told.extend(own.clone().find_map(|it| undamaged(design, it)));
        }
        told.extend(lit.clone().find_map(|it| dark(design, junction, it)));
    }
    let mut findings = Findings::new();
    told.into_iter().for_each(|finding| findings.push(finding));
    findings
}

/// The junctions whose layers do not say enough, with the first reason.
pub(in crate::evaluate) fn held_at_the_limit(design: &Design, lit: &Lit) -> Vec<String> {
    lit.carrying
        .iter()
        .zip(&design.junctions)
        .filter(|(carrying, _)| matches!(carrying, Carrying::Lacking(_)))
        .map(|(_, junction)| junction.name.value.clone())
        .collect()
}

fn missing(design: &Design, junction: usize, lack: Lack) -> Option<Finding> {
    let named = &design.junctions[junction];
    let name = &named.name.value;
    let from_layers = named.voltage == VoltageModel::Layers;
    let instead = if from_layers {
        format!("the radiative limit stands in for the voltage of `{name}`")
    } else {
        format!("all that `{name}` absorbs is taken as collected")
    };
    let path = |layer: usize| design.layers[layer].path.as_str();
    let material =
        |layer: usize| design.layers[layer].material.as_ref().map_or("it", |material| &material.label);
    let (layer, lacks, help) = match lack {
        // Two sides of one sign, or an emitter or base without any, are reported as that.
        Lack::Junction if ends(design, junction).is_some_and(|(top, bottom)| top == bottom) => return None,
        Lack::Doping(layer) if is_reported(design, junction, layer) => return None,
        Lack::Junction => (
            None,
            format!("nowhere in `{name}` does p meet n"),
            "dope its emitter and base, such as `n 2e18 /cm3` and `p 1e17 /cm3`".to_owned(),
        ),
        Lack::Model(layer) => (
            Some(layer),
            format!("`{}` of `{}` says nothing of carriers", material(layer), path(layer)),
            format!("write a semiconductor, such as `GaAs`, or `voltage from radiative_limit` in `{name}`"),
        ),
        Lack::Doping(layer) => (
            Some(layer),
            format!("`{}` says no doping", path(layer)),
            "write `p 1e17 /cm3` or `n 2e18 /cm3` after its thickness, with your own density".to_owned(),
        ),
        Lack::Intrinsic(layer) => (
            Some(layer),
            format!("`{}` of `{}` has no effective masses", material(layer), path(layer)),
            "state `effective_mass` in a `material` of your own, or write `voltage from ere 1 %`".to_owned(),
        ),
        Lack::Permittivity(layer) => (
            Some(layer),
            format!("`{}` of `{}` has no static permittivity", material(layer), path(layer)),
            "state `permittivity` in a `material` of your own, or write `voltage from ere 1 %`".to_owned(),
        ),
        Lack::Mobility(layer, carrier) => (
            Some(layer),
            format!("`{}` of `{}` has no {} mobility", material(layer), path(layer), carrier.word()),
            format!(
                "write `{{ mobility {} cm2/V/s }}` behind it, with your own value",
                usual_mobility(carrier)
            ),
        ),
        Lack::Lifetime(layer, carrier) => (
            Some(layer),
            format!("`{}` of `{}` has no {} lifetime", material(layer), path(layer), carrier.word()),
            "write `{ lifetime 10 ns }` behind it, with your own value".to_owned(),
        ),
        Lack::Depth(layer) => (
            Some(layer),
            format!("light in `{}` is known by its share only, not by its depth", path(layer)),
            "give the layer a thickness and a material with optical data".to_owned(),
        ),
    };
    let message = format!("{lacks}: {instead}");
    let finding = Finding::warning("transport.missing", message);
    let finding = match layer {
        Some(layer) => finding.at(design.layers[layer].spans.material, "not enough to follow its carriers"),
        None => finding.at(named.name.span, "no field to part carriers"),
    };
    Some(finding.help(help))
}

fn usual_mobility(carrier: Carrier) -> &'static str {
    if carrier == Carrier::Electron { "1000" } else { "100" }
}

/// Signs of the first and the last doped emitter, base, absorber or wafer.
fn ends(design: &Design, junction: usize) -> Option<(Polarity, Polarity)> {
    let mut signs = design.junctions[junction].layers.clone().filter_map(|index| {
        let layer = &design.layers[index];
        let inner = layer.duty.collects() || layer.duty == Duty::Wafer;
        layer.doping.as_ref().filter(|_| inner).map(|doping| doping.polarity)
    });
    let first = signs.next()?;
    Some((first, signs.next_back()?))
}

/// Whether `doping.missing` names the layer already.
fn is_reported(design: &Design, junction: usize, layer: usize) -> bool {
    let named = &design.junctions[junction];
    let doped = named.layers.clone().any(|index| design.layers[index].doping.is_some());
    let duty = matches!(design.layers[layer].duty, Duty::Emitter | Duty::Base);
    duty && (doped || named.voltage == VoltageModel::Layers)
}

/// A side of the junction that the field takes whole.
fn full(design: &Design, face: Face, (condition, transport): (&Condition, &Transport)) -> Option<Finding> {
    let depletion = &transport.depletion;
    let (is_full, asked_m, layers) = match face {
        Face::Sunward => (depletion.sunward_full, depletion.sunward_asked_m, &transport.sides[0]),
        Face::Rear => (depletion.rear_full, depletion.rear_asked_m, &transport.sides[1]),
    };
    let inner = match face {
        Face::Sunward => layers.last(),
        Face::Rear => layers.first(),
    };
    let layer = &design.layers[*inner.filter(|_| is_full)?];
    let whole: f64 = layers.iter().filter_map(|&index| design.layers[index].thickness_m).sum();
    let nm = |metres: f64| number(metres * 1e9);
    let message = format!(
        "`{}` is {} nm thick, less than the {} nm its field reaches at 0 V under `{}`",
        layer.path,
        nm(whole),
        nm(rounded(asked_m * 1e9) * 1e-9),
        condition.name
    );
    let help = if asked_m < FARTHEST_M {
        format!("make it {} nm or more, or dope it higher", nm(rounded(asked_m * 1.05e9).ceil() * 1e-9))
    } else {
        "dope it higher, such as 1e17 /cm3".to_owned()
    };
    Some(
        Finding::warning("depletion.full", message)
            .at(layer.spans.thickness, "depleted throughout")
            .help(help),
    )
}

/// Three digits.
fn rounded(value: f64) -> f64 {
    let unit = 10f64.powf(value.abs().max(f64::MIN_POSITIVE).log10().floor() - 2.0);
    (value / unit).round() * unit
}

/// A doping beyond what the statistics carry.
fn degenerate(design: &Design, (condition, own): (&Condition, &LayerCarriers)) -> Option<Finding> {
    let layer = &design.layers[own.layer];
    let doping = layer.doping.as_ref()?;
    let (at, band) = match doping.polarity {
        Polarity::N => (0, "conduction"),
        Polarity::P => (1, "valence"),
    };
    let ratio = own.doping_per_m3 / own.states_per_m3[at];
    if ratio <= DENSEST {
        return None;
    }
    let message = format!(
        "`{}` is doped to {} /cm3, {} times the states of its {band} band under `{}`",
        layer.path,
        number(doping.density_per_m3 * 1e-6),
        number(rounded(ratio)),
        condition.name
    );
    let most = rounded(0.99 * DENSEST * own.states_per_m3[at] * 1e-6);
    Some(
        Finding::advice("doping.degenerate", message).at(doping.span, "beyond Boltzmann statistics").help(
            format!("read its minority carriers as an estimate, or write {} /cm3 or less", number(most)),
        ),
    )
}

/// A layer whose material has no damage constant for the particles of the condition.
fn undamaged(design: &Design, (condition, own): (&Condition, &LayerCarriers)) -> Option<Finding> {
    let fluence = condition.fluence.filter(|fluence| fluence.per_m2 > 0.0)?;
    if own.damaged != Some(false) {
        return None;
    }
    let layer = &design.layers[own.layer];
    let material = layer.material.as_ref()?;
    let mev = fluence.energy_j / (1e6 * crate::numerics::constants::CHARGE);
    let particle = format!("{} of {} MeV", fluence.particle.word(), number(rounded(mev)));
    let constant = own.minority.word();
    Some(
        Finding::warning(
            "fluence.no-constant",
            format!(
                "`{}` has no damage constant for {particle}: `{}` stays as it began",
                material.label, layer.path
            ),
        )
        .at(layer.spans.material, format!("minority carrier: {constant}"))
        .beside(condition.span, "the fluence stands here")
        .help("state `damage` in a `material` of your own, or a `diffusion_length` at the end of life"),
    )
}

/// A junction that makes no current worth the name.
fn dark(design: &Design, junction: usize, (condition, lit): (&Condition, &Lit)) -> Option<Finding> {
    let whole: f64 = lit.current_weight.iter().sum();
    let current = lit.photocurrent(junction);
    if current > DARK * whole {
        return None;
    }
    let named = &design.junctions[junction];
    let name = &named.name.value;
    let message = format!(
        "`{name}` gets no light under `{}`: {} of {} mA/cm2",
        condition.name,
        number(rounded(0.1 * current)),
        number(rounded(0.1 * whole))
    );
    Some(
        Finding::warning("junction.dark", message)
            .at(named.name.span, format!("gap {} eV", number(rounded(lit.gap_ev[junction]))))
            .help("thin what stands above it, or give it a smaller gap"),
    )
}
