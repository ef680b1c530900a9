//! What junctions, tunnels and the front grid state of themselves, and how a junction turns light
//! into voltage.

use crate::design::{
    BARE_M_PER_S, COVERED_M_PER_S, Design, DiodeFit, Duty, Face, InterconnectKind, Place, Terminals,
    VoltageModel, ZERO_CELSIUS_K,
};
use crate::finding::Finding;
use crate::materials::MaterialClass;
use crate::resolve::layers::Placed;
use crate::resolve::properties::{self, Kept, quantity};
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::tree::{GroupNode, OF_INTERCONNECT, OF_JUNCTION, OF_RECOMBINATION, near_or};
use crate::resolve::{Resolver, stack};
use crate::source::Span;
use crate::syntax::{Argument, Property};
use crate::units::{Dimension, in_unit};

/// Reads the properties of every junction and interconnect.
pub(super) fn groups<'s>(resolver: &mut Resolver<'_, 's>, design: &mut Design, groups: &[Placed<'_, 's>]) {
    for placed in groups {
        match placed {
            Placed::Junction(index, group) => junction(resolver, design, *index, group),
            Placed::Interconnect(index, group) => interconnect(resolver, design, *index, group),
        }
    }
}

/// The properties of a group that are known there, each once.
fn stated<'s>(
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

fn interconnect<'s>(
    resolver: &mut Resolver<'_, 's>,
    design: &mut Design,
    index: usize,
    group: &GroupNode<'s>,
) {
    for word in group.words {
        resolver.scope.report(
            Finding::error("name.unknown", format!("`{}` says nothing of a tunnel", word.value))
                .at(word.span, "an unknown word here")
                .help("take it out"),
        );
    }
    let here = resolver.scope.here();
    let known = match design.interconnects[index].kind {
        InterconnectKind::Tunnel => OF_INTERCONNECT,
        // A contact of metal, oxide or defects has no peak to pass.
        InterconnectKind::Recombination => OF_RECOMBINATION,
    };
    let mut valley_span = None;
    for (property, frame) in stated(resolver, group, known) {
        resolver.scope.enter(frame);
        let scope = &mut resolver.scope;
        match property.name.value.as_str() {
            "resistance" => {
                let expected =
                    Expected::new("resistance", Dimension::RESISTANCE_AREA, Role::SeriesResistance);
                design.interconnects[index].resistance_ohm_m2 = quantity(scope, property, expected);
            }
            "peak" => {
                let expected = Expected::new("peak", Dimension::CURRENT_DENSITY, Role::Positive);
                design.interconnects[index].peak_a_per_m2 = quantity(scope, property, expected);
            }
            "valley" => {
                let expected = Expected::new("valley", Dimension::CURRENT_DENSITY, Role::Positive);
                design.interconnects[index].valley_a_per_m2 = quantity(scope, property, expected);
                valley_span = Some(property.span);
            }
            _ => {}
        }
    }
    resolver.scope.close(here);
    let has = |word: &str| group.properties.iter().any(|(property, _)| property.name.value == word);
    let interconnect = &mut design.interconnects[index];
    let name = interconnect.name.value.clone();
    if let (Some(valley), Some(span)) = (interconnect.valley_a_per_m2, valley_span) {
        let finding = match interconnect.peak_a_per_m2 {
            None if !has("peak") => Some(
                Finding::error("value.missing", format!("`{name}` states a valley and no peak"))
                    .at(span, "the least current beyond which peak?")
                    .help(format!("write `peak {}` too", in_unit(10.0 * valley, "A/cm2"))),
            ),
            Some(peak) if valley >= peak => Some(
                Finding::error(
                    "value.range",
                    format!(
                        "the valley of `{name}`, {}, is not below its peak of {}",
                        in_unit(valley, "A/cm2"),
                        in_unit(peak, "A/cm2")
                    ),
                )
                .at(span, "as much as the peak, or more")
                .help(format!("write `valley {}`", in_unit(0.1 * peak, "A/cm2"))),
            ),
            _ => None,
        };
        if let Some(finding) = finding {
            interconnect.valley_a_per_m2 = None;
            resolver.scope.report(finding);
        }
    }
    assume_tunnel(design, index, &has);
}

/// What is taken of an interconnect that does not state it.
fn assume_tunnel(design: &mut Design, index: usize, has: &dyn Fn(&str) -> bool) {
    let interconnect = &design.interconnects[index];
    let name = &interconnect.name.value;
    let mut sentences = Vec::new();
    match interconnect.peak_a_per_m2 {
        None if !has("resistance") && !has("peak") => {
            sentences.push(format!("`{name}` conducts without loss, as nothing is stated"));
        }
        Some(_) => {
            if !has("resistance") {
                sentences.push(format!("peak of `{name}` at 0.1 V, as no resistance is stated"));
            }
            if !has("valley") {
                sentences.push(format!("valley of `{name}` a tenth of its peak, as none is stated"));
            }
        }
        None => {}
    }
    design.assumptions.extend(sentences);
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

/// Junctions that stand apart in a stack whose terminals do not allow it, or the other way round.
pub(super) fn separate(resolver: &mut Resolver<'_, '_>, design: &Design, terminals: Option<Span>) {
    let mut marked = design.junctions.iter().enumerate().filter(|(_, junction)| junction.separate);
    let (first, second) = (marked.next(), marked.next());
    let name_of = |index: usize| design.junctions.get(index).map_or("top", |it| it.name.value.as_str());
    if let (Terminals::Three, None, Some(span)) = (design.terminals, first, terminals) {
        resolver.scope.report(
            Finding::error("value.missing", "`terminals three` does not say which junction stands apart")
                .at(span, "no junction is `separate`")
                .help(format!("write `junction {} separate {{ … }}`, or `terminals two`", name_of(0))),
        );
    }
    let Some((index, junction)) = first else { return };
    let (name, span) = (&junction.name.value, junction.name.span);
    let beside = |finding: Finding, label: &str| match terminals {
        Some(span) => finding.beside(span, label),
        None => finding,
    };
    match design.terminals {
        Terminals::Two => {
            let finding = Finding::error(
                "value.conflict",
                format!("`{name}` is `separate`, and the stack has two terminals"),
            );
            let finding = beside(finding.at(span, "has terminals of its own"), "two for the whole stack");
            resolver.scope.report(finding.help(match index == 0 || index + 1 == design.junctions.len() {
                true => "write `terminals three`, or leave `separate` out",
                false => "write `terminals four`, or leave `separate` out",
            }));
        }
        Terminals::Three => {
            // One contact between two strings: only the first or the last junction can stand apart.
            let inside = index > 0 && index + 1 < design.junctions.len();
            let (what, at) = match second {
                Some((_, other)) => (
                    format!(
                        "`{name}` and `{}` both stand apart, and the stack has three terminals",
                        other.name.value
                    ),
                    other.name.span,
                ),
                None if inside => (
                    format!("`{name}` stands apart between two others, and the stack has three terminals"),
                    span,
                ),
                None => return,
            };
            let finding = Finding::error("value.conflict", what).at(at, "needs a fourth terminal");
            resolver
                .scope
                .report(beside(finding, "three for the whole stack").help("write `terminals four`"));
        }
        Terminals::Four => {}
    }
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
                true => "light that a junction sends down makes current below, as nothing is stated",
                false => "light that a junction sends down makes no current below, as nothing is stated",
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
