//! One stack's body to its [`Design`].

use crate::design::{Design, Growth, Layer, OpticsModel, Switches, Terminals, Texture};
use crate::finding::{Finding, Severity};
use crate::resolve::properties::{self, pending, quantity, word};
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::tree::Body;
use crate::resolve::{
    Resolver, Scope, chemistry, fingers, interconnects, junctions, layers, names, requests, season, strain,
};
use crate::source::Span;
use crate::syntax::{Argument, Property, Stack};
use crate::units::Dimension;

/// What a stack says of its own condition.
const OF_OWN_CONDITION: &[&str] =
    &["light", "temperature", "concentration", "irradiance", "incidence", "fluence", "distance"];

/// Resolves `stack`, whose names are looked up in `frame`.
pub(super) fn design<'s>(
    resolver: &mut Resolver<'_, 's>,
    stack: &'s Stack,
    body: &Body<'s>,
    frame: usize,
) -> Design {
    let outer = resolver.scope.enter(frame);
    let mut design = empty(stack);
    body_properties(resolver, &mut design, body);
    let conditions_whole = conditions(resolver, &mut design, body);
    resolver.conditions_whole = conditions_whole;
    if let Some((property, frame)) = body.properties.iter().find(|(it, _)| it.name.value == "season") {
        let here = resolver.scope.enter(*frame);
        season::season(resolver, &mut design, property);
        resolver.scope.close(here);
    }
    let mut drafts = layers::drafts(resolver, &mut design, body);
    let terminals = body.properties.iter().find(|(property, _)| property.name.value == "terminals");
    interconnects::separate(resolver, &design, terminals.map(|(property, _)| property.span));
    chemistry::materials(resolver, &mut design, &mut drafts);
    layers::finish(resolver, &mut design, drafts);
    assume_optics(&mut design);
    strain::strain(resolver, &mut design);
    junctions::voltages(&mut design);
    requests::requests(resolver, &mut design, body, conditions_whole);
    resolver.scope.close(outer);
    design
}

/// What light does where nothing is said of it: interference as soon as every lit layer has an
/// index.
fn assume_optics(design: &mut Design) {
    if !matches!(design.optics, OpticsModel::Interference { stated: None }) {
        return;
    }
    let without = |layer: &Layer| {
        let material = layer.material.as_ref();
        material.is_some_and(|material| material.optics.index(500e-9, 0.0).is_none())
    };
    let sentence = if design.lit_layers().any(|(_, layer)| without(layer)) {
        "one pass of light without reflection at the front, as no optics are stated"
    } else {
        "interference of light in the layers, as no optics are stated and each has an index"
    };
    design.assumptions.push(sentence.to_owned());
}

fn empty(stack: &Stack) -> Design {
    Design {
        name: stack.name.clone(),
        note: None,
        growth: Growth::Upright,
        terminals: Terminals::Two,
        optics: OpticsModel::Interference { stated: None },
        texture: None,
        layers: Vec::new(),
        junctions: Vec::new(),
        interconnects: Vec::new(),
        fingers: None,
        area_m2: None,
        switches: Switches::default(),
        conditions: Vec::new(),
        requirements: Vec::new(),
        free_values: Vec::new(),
        seek: Vec::new(),
        charts: Vec::new(),
        tolerances: Vec::new(),
        vary_together: Vec::new(),
        season: None,
        measured: Vec::new(),
        accepts: Vec::new(),
        file_accepts: Vec::new(),
        limits: Vec::new(),
        assumptions: Vec::new(),
        span: stack.span,
    }
}

fn body_properties(resolver: &mut Resolver<'_, '_>, design: &mut Design, body: &Body<'_>) {
    let here = resolver.scope.here();
    let mut stated: Vec<&str> = Vec::new();
    let mut grid = None;
    for (property, frame) in &body.properties {
        resolver.scope.enter(*frame);
        let name = property.name.value.as_str();
        stated.push(name);
        match name {
            "note" => design.note = properties::text(&mut resolver.scope, property).cloned(),
            "growth" => {
                if word(&mut resolver.scope, property, &["upright", "inverted"]) == Some("inverted") {
                    design.growth = Growth::Inverted;
                }
                properties::no_more(&mut resolver.scope, property, 1);
            }
            "terminals" => terminals(resolver, design, property),
            "optics" => optics(resolver, design, property),
            "fingers" => grid = fingers::read(resolver, property),
            "area" => {
                let expected = Expected::new("area", Dimension::AREA, Role::Positive);
                design.area_m2 = quantity(&mut resolver.scope, property, expected);
            }
            "luminescent_coupling" | "photon_recycling" | "gap_narrowing" => {
                switch(resolver, design, property)
            }
            "texture" => texture(&mut resolver.scope, design, property),
            "samples" => {
                let expected = Expected::new("samples", Dimension::NONE, Role::Count);
                quantity(&mut resolver.scope, property, expected);
                pending(
                    &mut resolver.scope,
                    Severity::Advice,
                    "sampling of tolerances is",
                    property.span,
                    "read the figures as those of the nominal design",
                );
            }
            _ => {}
        }
    }
    resolver.scope.close(here);
    if let Some(grid) = grid {
        fingers::finish(resolver, design, grid);
    }
    let mut assume = |name: &str, sentence: &str| {
        if !stated.contains(&name) {
            design.assumptions.push(sentence.to_owned());
        }
    };
    assume("growth", "grown upright, as nothing is stated");
    assume("terminals", "two terminals, as nothing is stated");
    assume("fingers", "no front grid: neither shading nor series resistance, as nothing is stated");
}

/// `texture pyramids` or `texture lambertian_rear`, or both words: of the stack, wherever stated.
pub(super) fn texture(scope: &mut Scope, design: &mut Design, property: &Property) {
    const WORDS: &[&str] = &["pyramids", "inverted_pyramids", "lambertian_rear"];
    let Some(first) = word(scope, property, WORDS) else { return };
    let second = property.arguments.get(1).and_then(|argument| match argument {
        Argument::Word(word) => WORDS.iter().find(|known| **known == word.value).copied(),
        _ => None,
    });
    properties::no_more(scope, property, if second.is_some() { 2 } else { 1 });
    let span = design.texture.map_or(property.span, |texture| texture.span);
    let texture = design.texture.get_or_insert(Texture { pyramids: false, lambertian_rear: false, span });
    for word in [Some(first), second].into_iter().flatten() {
        match word {
            "lambertian_rear" => texture.lambertian_rear = true,
            _ => texture.pyramids = true,
        }
    }
}

fn terminals(resolver: &mut Resolver<'_, '_>, design: &mut Design, property: &Property) {
    match word(&mut resolver.scope, property, &["two", "three", "four"]) {
        Some("three") => design.terminals = Terminals::Three,
        Some("four") => design.terminals = Terminals::Four,
        _ => {}
    }
    properties::no_more(&mut resolver.scope, property, 1);
}

fn optics(resolver: &mut Resolver<'_, '_>, design: &mut Design, property: &Property) {
    match word(&mut resolver.scope, property, &["one_pass", "interference"]) {
        Some("one_pass") => {
            let reflectance = front_reflectance(resolver, property);
            if reflectance.is_none() {
                design
                    .assumptions
                    .push("no light is reflected at the front, as nothing is stated".to_owned());
            }
            design.optics = OpticsModel::OnePass {
                front_reflectance: reflectance.flatten().unwrap_or(0.0),
                stated: reflectance.is_some(),
            };
        }
        Some(_) => {
            properties::no_more(&mut resolver.scope, property, 1);
            design.optics = OpticsModel::Interference { stated: Some(property.span) };
        }
        None => {}
    }
}

/// `{ front_reflectance 3 % }` or `front_reflectance 3 %` behind the word. The outer `None`:
/// nothing is said; the inner one: it is wrong, which is reported.
fn front_reflectance(resolver: &mut Resolver<'_, '_>, property: &Property) -> Option<Option<f64>> {
    let expected = Expected::new("front_reflectance", Dimension::NONE, Role::Loss);
    let scope = &mut resolver.scope;
    let mut found = None;
    match property.arguments.get(1) {
        Some(Argument::Word(word)) if word.value == "front_reflectance" => {
            properties::no_more(scope, property, 3);
            found = Some(match property.arguments.get(2).and_then(properties::as_value) {
                Some(value) => scope.quantity(&value, expected),
                None => {
                    properties::missing(scope, property, "write `front_reflectance 3 %`");
                    None
                }
            });
        }
        _ => properties::no_more(scope, property, 1),
    }
    if let Some(block) = &property.block {
        let outer = scope.open();
        for inner in properties::of_block(scope, block, "`optics one_pass`", &["front_reflectance"]) {
            found = Some(quantity(scope, inner, expected));
        }
        scope.close(outer);
    }
    found
}

fn switch(resolver: &mut Resolver<'_, '_>, design: &mut Design, property: &Property) {
    let Some(state) = word(&mut resolver.scope, property, &["on", "off"]) else { return };
    properties::no_more(&mut resolver.scope, property, 1);
    let on = state == "on";
    let switches = &mut design.switches;
    let slot = match property.name.value.as_str() {
        "luminescent_coupling" => &mut switches.luminescent_coupling,
        "photon_recycling" => &mut switches.photon_recycling,
        _ => &mut switches.gap_narrowing,
    };
    *slot = Some(on);
}

/// Conditions named, stated in the body, or assumed. `false` where one is wrong, which is
/// reported: then nothing is said of a name that may have been meant by it.
fn conditions<'s>(resolver: &mut Resolver<'_, 's>, design: &mut Design, body: &Body<'s>) -> bool {
    let named = body.properties.iter().find(|(property, _)| property.name.value == "conditions");
    let own: Vec<(&'s Property, usize)> = body
        .properties
        .iter()
        .filter(|(property, _)| OF_OWN_CONDITION.contains(&property.name.value.as_str()))
        .copied()
        .collect();
    if let (Some((property, _)), Some((first, _))) = (named, own.first()) {
        let word = &first.name.value;
        properties::conflict(
            &mut resolver.scope,
            format!("`conditions` and `{word}` both say under what light the stack works"),
            first.name.span,
            property.name.span,
            "move it into one of the conditions, or drop `conditions`",
        );
    }
    match named {
        Some((property, _)) => by_name(resolver, design, property),
        None => {
            let span = own.first().map_or(design.name.span, |(property, _)| property.span);
            if let Some((condition, assumed)) = resolver.stated_condition("stated", span, &own) {
                assume_once(design, assumed);
                design.conditions.push(condition);
            }
            !design.conditions.is_empty()
        }
    }
}

fn by_name(resolver: &mut Resolver<'_, '_>, design: &mut Design, property: &Property) -> bool {
    if property.arguments.is_empty() {
        properties::missing(
            &mut resolver.scope,
            property,
            "write `conditions noon`, with conditions of this file",
        );
    }
    let mut seen: Vec<(&str, Span)> = Vec::new();
    for argument in &property.arguments {
        let Argument::Word(name) = argument else {
            resolver.scope.report(
                Finding::error("value.missing", "`conditions` takes names of conditions")
                    .at(argument.span(), "not a name")
                    .help("write `conditions noon`"),
            );
            continue;
        };
        if let Some((_, first)) = seen.iter().find(|(known, _)| *known == name.value) {
            resolver.scope.report(
                Finding::error("name.duplicate", format!("condition `{}` is named twice", name.value))
                    .at(name.span, "named again here")
                    .beside(*first, "named here")
                    .help("name each condition once"),
            );
            continue;
        }
        seen.push((&name.value, name.span));
        if resolver.items.conditions.get(&name.value).is_none() {
            let known = resolver.items.conditions.all.iter().map(|item| item.name.value.as_str());
            let otherwise =
                format!("state `condition {} {{ light AM1.5G; temperature 25 degC }}`", name.value);
            let finding = names::unknown("condition", name, known, &otherwise);
            resolver.scope.report(finding);
            continue;
        }
        if let Some((condition, assumed)) = resolver.condition(&name.value) {
            assume_once(design, assumed);
            design.conditions.push(condition);
        }
    }
    design.conditions.len() == property.arguments.len()
}

/// Two conditions may have assumed the same.
fn assume_once(design: &mut Design, sentences: Vec<String>) {
    for sentence in sentences {
        if !design.assumptions.contains(&sentence) {
            design.assumptions.push(sentence);
        }
    }
}
