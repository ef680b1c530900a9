//! What junctions state of themselves, and how a junction turns light into voltage.

use crate::design::{
    BARE_M_PER_S, COVERED_M_PER_S, Design, DiodeFit, Duty, Face, PASSIVATED_M_PER_S, Place, VoltageModel,
    ZERO_CELSIUS_K,
};
use crate::finding::Finding;
use crate::materials::MaterialClass;
use crate::resolve::layers::Placed;
use crate::resolve::properties::{self, Kept, quantity};
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::tree::{GroupNode, OF_JUNCTION, near_or};
use crate::resolve::{Resolver, stack};
use crate::syntax::{Argument, Property};
use crate::units::Dimension;

/// Reads the properties of every junction and interconnect.
pub(super) fn groups<'s>(resolver: &mut Resolver<'_, 's>, design: &mut Design, groups: &[Placed<'_, 's>]) {
    for placed in groups {
        match placed {
            Placed::Junction(index, group) => junction(resolver, design, *index, group),
            Placed::Interconnect(index, group) => {
                crate::resolve::interconnects::interconnect(resolver, design, *index, group)
            }
        }
    }
}

/// The properties of a group that are known there, each once.
pub(super) fn stated<'s>(
    resolver: &mut Resolver<'_, 's>,
    group: &GroupNode<'s>,
    known: &[&str],
) -> Vec<(&'s Property, usize)> {
    let place = group.kind.map_or("part", properties::group_word);
    let place = format!("a `{place}`");
    let mut kept = Kept::default();
    let mut found = Vec::new();
    for (property, frame) in &group.properties {
        let name = &property.name;
        if !known.contains(&name.value.as_str()) {
            let words = known.iter().chain(crate::syntax::DUTIES).copied();
            let finding =
                near_or(name, &place, words, "write a layer, such as `base GaAs 3.5 um p 1e17 /cm3 Zn`");
            resolver.scope.report(finding);
        } else if kept.keep(&mut resolver.scope, property) {
            found.push((*property, *frame));
        }
    }
    found
}

fn junction<'s>(resolver: &mut Resolver<'_, 's>, design: &mut Design, index: usize, group: &GroupNode<'s>) {
    for word in group.words {
        if word.value == "separate" {
            design.junctions[index].separate = true;
            continue;
        }
        let finding = crate::resolve::names::unknown(
            "word for a junction",
            word,
            ["separate"].into_iter(),
            "write `separate` for terminals of its own",
        );
        resolver.scope.report(finding);
    }
    let here = resolver.scope.here();
    for (property, frame) in stated(resolver, group, OF_JUNCTION) {
        resolver.scope.enter(frame);
        match property.name.value.as_str() {
            "voltage" => {
                if let Some(model) = voltage(resolver, property) {
                    design.junctions[index].voltage = model;
                }
                design.junctions[index].voltage_span = Some(property.span);
            }
            "shunt" => {
                let expected = Expected::new("shunt", Dimension::RESISTANCE_AREA, Role::Positive);
                design.junctions[index].shunt_ohm_m2 = quantity(&mut resolver.scope, property, expected);
            }
            "breakdown" => {
                let expected = Expected::new("breakdown", Dimension::VOLTAGE, Role::Positive);
                design.junctions[index].breakdown_v = quantity(&mut resolver.scope, property, expected);
            }
            "texture" => stack::texture(&mut resolver.scope, design, property),
            _ => {}
        }
    }
    resolver.scope.close(here);
    let junction = &design.junctions[index];
    if let (VoltageModel::Fit(fit), Some(_), Some(span)) =
        (&junction.voltage, junction.shunt_ohm_m2, junction.voltage_span)
        && fit.shunt_ohm_m2.is_some()
        && let Some((shunt, _)) = group.properties.iter().find(|(it, _)| it.name.value == "shunt")
    {
        properties::conflict(
            &mut resolver.scope,
            format!("`{}` states its shunt and one in its fit", junction.name.value),
            shunt.name.span,
            span,
            "keep one of the two",
        );
    }
}

/// `voltage from radiative_limit | ere 2 % | fit { … } | layers`
fn voltage(resolver: &mut Resolver<'_, '_>, property: &Property) -> Option<VoltageModel> {
    const WORDS: &[&str] = &["radiative_limit", "ere", "fit", "layers"];
    let scope = &mut resolver.scope;
    let mut arguments = property.arguments.as_slice();
    let from = matches!(arguments.first(), Some(Argument::Word(word)) if word.value == "from");
    if from {
        arguments = &arguments[1..];
    }
    let taken = property.arguments.len() - arguments.len();
    let word = match arguments.first() {
        Some(Argument::Word(word)) => word,
        Some(other) => {
            scope.report(
                Finding::error("value.missing", "`voltage` does not say what it comes from")
                    .at(other.span(), "a value alone")
                    .help("write `voltage from ere 2 %`"),
            );
            return None;
        }
        None => {
            properties::missing(scope, property, "write `voltage from radiative_limit`");
            return None;
        }
    };
    match word.value.as_str() {
        "radiative_limit" => {
            properties::no_more(scope, property, taken + 1);
            Some(VoltageModel::RadiativeLimit)
        }
        "layers" => {
            properties::no_more(scope, property, taken + 1);
            Some(VoltageModel::Layers)
        }
        "ere" => {
            let expected = Expected::new("ere", Dimension::NONE, Role::PositiveShare);
            let Some(value) = arguments.get(1).and_then(properties::as_value) else {
                properties::missing_of(
                    scope,
                    "`ere` has no value",
                    word.span,
                    "write `voltage from ere 2 %`",
                );
                return None;
            };
            properties::no_more(scope, property, taken + 2);
            scope.quantity(&value, expected).map(VoltageModel::Ere)
        }
        "fit" => {
            properties::no_more(scope, property, taken + 1);
            fit(resolver, property)
        }
        _ => {
            let finding = crate::resolve::names::unknown(
                "origin of a voltage",
                word,
                WORDS.iter().copied(),
                "write one of `radiative_limit`, `ere 2 %`, `fit { … }`, `layers`",
            );
            scope.report(finding);
            None
        }
    }
}

fn fit(resolver: &mut Resolver<'_, '_>, property: &Property) -> Option<VoltageModel> {
    const KNOWN: &[&str] = &["j01", "j02", "shunt", "at"];
    let scope = &mut resolver.scope;
    let Some(block) = &property.block else {
        properties::missing(
            scope,
            property,
            "write `voltage from fit { j01 1e-20 A/cm2; j02 2e-12 A/cm2; at 25 degC }`",
        );
        return None;
    };
    let outer = scope.open();
    let stated = properties::of_block(scope, block, "a fit", KNOWN);
    let mut wrong = false;
    let mut read = |word: &str, dimension, role| {
        let inner = stated.iter().find(|inner| inner.name.value == word)?;
        let value = quantity(scope, inner, Expected::new(word, dimension, role));
        wrong |= value.is_none();
        value
    };
    let j01 = read("j01", Dimension::CURRENT_DENSITY, Role::NotNegative);
    let j02 = read("j02", Dimension::CURRENT_DENSITY, Role::NotNegative);
    let shunt = read("shunt", Dimension::RESISTANCE_AREA, Role::Positive);
    let at = read("at", Dimension::TEMPERATURE, Role::CellTemperature);
    scope.close(outer);
    let has = |word: &str| stated.iter().any(|inner| inner.name.value == word);
    if properties::is_broken(block) {
        return None;
    }
    if !has("j01") && !has("j02") {
        scope.report(
            Finding::error("value.missing", "the fit states no dark current")
                .at(property.span, "neither `j01` nor `j02`")
                .help("write `j01 1e-20 A/cm2`"),
        );
        return None;
    }
    if !has("at") {
        scope.report(
            Finding::error("value.missing", "the fit does not say at which temperature it holds")
                .at(property.span, "no `at`")
                .help("write `at 25 degC`"),
        );
        return None;
    }
    if !wrong && j01.unwrap_or(0.0) == 0.0 && j02.unwrap_or(0.0) == 0.0 {
        scope.report(
            Finding::error("value.range", "both dark currents of the fit are zero")
                .at(property.span, "no dark current at all")
                .help("write `j01 1e-20 A/cm2`"),
        );
        return None;
    }
    (!wrong).then(|| {
        VoltageModel::Fit(DiodeFit {
            j01_a_per_m2: j01.unwrap_or(0.0),
            j02_a_per_m2: j02.unwrap_or(0.0),
            shunt_ohm_m2: shunt,
            at_k: at.unwrap_or(ZERO_CELSIUS_K + 25.0),
        })
    })
}

/// Settles how each junction that says nothing turns light into voltage: from its layers where an
/// emitter and a base are given, else from the radiative limit. Then whether their light counts
/// below them.
pub(super) fn voltages(design: &mut Design) {
    for index in 0..design.junctions.len() {
        let junction = &design.junctions[index];
        if junction.voltage_span.is_some() {
            continue;
        }
        let layers = &design.layers[junction.layers.clone()];
        let model = layers
            .iter()
            .any(|layer| layer.material.as_ref().is_some_and(|it| it.class == MaterialClass::GapModel));
        let has = |duty: Duty| layers.iter().any(|layer| layer.duty == duty);
        let electronic = !model && has(Duty::Emitter) && (has(Duty::Base) || has(Duty::Wafer));
        let from = if electronic { "its layers" } else { "the radiative limit" };
        let sentence = format!("voltage of `{}` from {from}, as nothing is stated", junction.name.value);
        if electronic {
            design.junctions[index].voltage = VoltageModel::Layers;
        }
        design.assumptions.push(sentence);
    }
    for junction in design.junctions.iter().filter(|it| it.breakdown_v.is_some()) {
        let of_fit = matches!(&junction.voltage, VoltageModel::Fit(fit) if fit.shunt_ohm_m2.is_some());
        if junction.shunt_ohm_m2.is_none() && !of_fit {
            let name = &junction.name.value;
            let sentence = format!(
                "what breakdown multiplies in `{name}` leaks through 1 Mohm cm2, as no shunt is stated"
            );
            design.assumptions.push(sentence);
        }
    }
    if design.junctions.len() > 1 && design.switches.luminescent_coupling.is_none() {
        let from_layers = design.junctions.iter().any(|it| it.voltage == VoltageModel::Layers);
        design.assumptions.push(
            match from_layers {
                true => "luminescent coupling counts, as nothing is stated",
                false => "luminescent coupling is left out, as nothing is stated",
            }
            .to_owned(),
        );
    }
    for layer in &design.layers {
        if layer.duty == Duty::Wafer
            && let Place::Junction(index) = layer.place
            && !design.follows_carriers(index)
        {
            let name = &design.junctions[index].name.value;
            design.assumptions.push(format!("what the wafer of junction `{name}` absorbs is collected"));
        }
    }
    velocities(design);
}

/// Says which faces take a default recombination velocity, a sentence for each value.
fn velocities(design: &mut Design) {
    let faces = design.default_velocities();
    for (value, text, why) in [
        (PASSIVATED_M_PER_S, "10 cm/s", "next to a passivation"),
        (COVERED_M_PER_S, "1e3 cm/s", "next to a layer of the same junction"),
        (BARE_M_PER_S, "1e7 cm/s", "bare, or next to metal or a layer of no junction"),
    ] {
        let places: Vec<String> = faces
            .iter()
            .filter(|(_, _, velocity)| *velocity == value)
            .map(|(index, face, _)| {
                let side = if *face == Face::Sunward { "the sunward face" } else { "the rear" };
                format!("{side} of `{}`", design.layers[*index].path)
            })
            .collect();
        if !places.is_empty() {
            let sentence = format!(
                "recombination velocity of {text} at {}, {why}, as nothing is stated",
                places.join(", ")
            );
            design.assumptions.push(sentence);
        }
    }
}
