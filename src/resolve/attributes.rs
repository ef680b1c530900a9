//! What is said of one layer on its line and in its block.

use crate::design::{Design, Doping, Duty, Extent, Place, Strain};
use crate::finding::Finding;
use crate::resolve::layers::{Draft, blank};
use crate::resolve::materials::MODEL_PROPERTIES;
use crate::resolve::properties::{self, Kept, conflict};
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::slots::slot;
use crate::resolve::tree::LayerNode;
use crate::resolve::{Resolver, names, spilled, stack};
use crate::source::{Span, Spanned};
use crate::syntax::{Attribute, Expression, MaterialPhrase, Property, Statement, Value};
use crate::units::{Dimension, trade};

/// Words that say something of a layer.
const WORDS: &[&str] = &[
    "absorbs",
    "collecting",
    "graded",
    "matched",
    "offcut",
    "only under fingers",
    "pseudomorphic",
    "relaxed",
    "removed",
];

/// What a layer's block states.
const OF_LAYER: &[&str] = &[
    "diffusion_length",
    "lifetime",
    "mobility",
    "sunward_velocity",
    "rear_velocity",
    "growth_temperature",
    "rate",
    "texture",
    "note",
];

/// What the thickness of a layer of that duty may be.
pub(super) fn thickness_role(duty: Duty, place: Place) -> Role {
    match duty {
        Duty::Coat => Role::Coat,
        Duty::Wafer | Duty::Cover | Duty::Handle => Role::Wafer,
        Duty::Air => Role::Positive,
        Duty::Emitter | Duty::Window | Duty::Bsf | Duty::Cap | Duty::EtchStop | Duty::Passivation => {
            Role::ThinLayer
        }
        Duty::Layer if matches!(place, Place::Interconnect(_)) => Role::ThinLayer,
        _ => Role::ThickLayer,
    }
}

/// A layer with everything but its material. `what` is the node, its path and its place.
pub(super) fn draft<'b, 's>(
    resolver: &mut Resolver<'_, 's>,
    design: &mut Design,
    what: (&'b LayerNode<'s>, String, Place),
    step: Option<(usize, usize)>,
) -> Draft<'b, 's> {
    let (node, path, place) = what;
    let duty = Duty::of_word(&node.duty.value).unwrap_or(Duty::Layer);
    let layer = blank(duty, path, place, node);
    let spilled = spilled::over(resolver, node);
    let mut draft = Draft { layer, node, step, phrase: None, material_wrong: spilled.material, wrong: false };
    let here = resolver.scope.here();
    let mut thickness: Option<Span> = None;
    let mut skip = false;
    for (at, (attribute, frame)) in node.attributes.iter().enumerate() {
        if std::mem::take(&mut skip) || spilled.attributes.contains(&at) {
            continue;
        }
        resolver.scope.enter(*frame);
        // `70 Nm`: a bare number and a word that is nearly a unit are one slip, not two.
        if let Some((Attribute::Word(word), _)) = node.attributes.get(at + 1)
            && let Attribute::Value(value) | Attribute::Doping { value, species: None, .. } = attribute
            && properties::lone_unit(&mut resolver.scope, value, word)
        {
            skip = true;
            draft.wrong = true;
            thickness = thickness.or(Some(value.span));
            continue;
        }
        match attribute {
            Attribute::Value(value) => {
                if let Some(first) = thickness
                    && !is_sheet_resistance(resolver, value)
                {
                    conflict(
                        &mut resolver.scope,
                        format!("`{}` has two thicknesses", draft.layer.path),
                        value.span,
                        first,
                        "keep one of them",
                    );
                    continue;
                }
                if value_of_layer(resolver, design, &mut draft, value) {
                    thickness = Some(value.span);
                }
            }
            Attribute::Word(word) => stray_word(resolver, word),
            other => said(resolver, design, &mut draft, other),
        }
    }
    resolver.scope.close(here);
    if node.unreadable {
        draft.wrong = true;
    } else if node.material.is_none() && draft.phrase.is_none() && duty != Duty::Air {
        let example = match duty {
            Duty::Mirror => "Ag",
            Duty::Metal => "Au",
            Duty::Coat => "MgF2",
            Duty::Cover | Duty::Adhesive => "SiO2",
            _ => "GaAs",
        };
        resolver.scope.report(
            Finding::error("value.missing", format!("`{}` has no material", draft.layer.path))
                .at(node.duty.span, "made of what?")
                .help(format!("write it after the word, such as `{} {example}`", node.duty.value)),
        );
        draft.wrong = true;
    }
    block(resolver, design, &mut draft);
    draft
}

fn is_sheet_resistance(resolver: &mut Resolver<'_, '_>, value: &Value) -> bool {
    is_unit_number(value)
        && resolver.scope.dimension(value).is_some_and(|(it, _)| it == Dimension::RESISTANCE)
}

fn is_unit_number(value: &Value) -> bool {
    !matches!(&value.expression, Some(Expression::Name(_)))
}

/// A thickness or a sheet resistance. `false` where it was neither.
fn value_of_layer(
    resolver: &mut Resolver<'_, '_>,
    design: &mut Design,
    draft: &mut Draft<'_, '_>,
    value: &Value,
) -> bool {
    if let Some(Expression::Name(name)) = &value.expression
        && !resolver.scope.knows(&name.value)
    {
        return not_a_name(resolver, draft, name);
    }
    if is_sheet_resistance(resolver, value) {
        let expected = Expected::new("sheet resistance", Dimension::RESISTANCE, Role::Positive);
        draft.layer.sheet_resistance_ohm =
            slot(resolver, design, (&draft.layer.path, "sheet_resistance"), value, expected);
        return false;
    }
    let role = thickness_role(draft.layer.duty, draft.layer.place);
    let name = format!("the thickness of `{}`", draft.layer.path);
    let expected = Expected::new(&name, Dimension::LENGTH, role);
    let before = resolver.scope.finding_count();
    draft.layer.thickness_m = slot(resolver, design, (&draft.layer.path, "thickness"), value, expected);
    draft.layer.spans.thickness = value.span;
    draft.wrong |= draft.layer.thickness_m.is_none()
        && (value.free.is_none() || resolver.scope.finding_count() > before);
    true
}

/// A word where a thickness might stand: nearly one of the layer's words, nearly a `let`, or, where
/// no material was read, the material itself.
fn not_a_name(resolver: &mut Resolver<'_, '_>, draft: &mut Draft<'_, '_>, name: &Spanned<String>) -> bool {
    let lets = resolver.scope.file_names();
    let near = names::near(&name.value, WORDS.iter().copied().chain(lets.iter().map(String::as_str)));
    if draft.node.material.is_none() && near.is_none() && draft.phrase.is_none() {
        draft.phrase = Some(MaterialPhrase {
            graded: None,
            diffused: None,
            name: name.clone(),
            qualifiers: Vec::new(),
            span: name.span,
        });
        draft.layer.spans.material = name.span;
        return false;
    }
    draft.wrong = true;
    let finding = Finding::error("name.unknown", format!("`{}` says nothing of a layer", name.value));
    resolver.scope.report(match near {
        Some(near) => finding
            .at(name.span, format!("did you mean `{near}`?"))
            .help(format!("write `{near}`"))
            .fix(name.span, near, false),
        None => finding
            .at(name.span, "neither a `let` nor a word for layers")
            .help(format!("write the thickness, such as `50 nm`, or state `let {} = 50 nm`", name.value)),
    });
    false
}

fn stray_word(resolver: &mut Resolver<'_, '_>, word: &Spanned<String>) {
    let finding = Finding::error("name.unknown", format!("`{}` says nothing of a layer", word.value));
    resolver.scope.report(match names::near(&word.value, WORDS.iter().copied()) {
        Some(near) => finding
            .at(word.span, format!("did you mean `{near}`?"))
            .help(format!("write `{near}`"))
            .fix(word.span, near, false),
        None => finding
            .at(word.span, "an unknown word here")
            .help("a layer takes a thickness, `n` or `p` with a density, `removed`, `only under fingers`, `relaxed`, `pseudomorphic`, `collecting`, `offcut`"),
    });
}

fn said(
    resolver: &mut Resolver<'_, '_>,
    design: &mut Design,
    draft: &mut Draft<'_, '_>,
    attribute: &Attribute,
) {
    let path = draft.layer.path.clone();
    match attribute {
        Attribute::Doping { polarity, value, species, span } => {
            if let Some(first) = &draft.layer.doping {
                let first = first.span;
                conflict(
                    &mut resolver.scope,
                    format!("`{path}` is doped twice"),
                    *span,
                    first,
                    "keep the doping that counts",
                );
                return;
            }
            let name = format!("the doping of `{path}`");
            let expected = Expected::new(&name, Dimension::PER_VOLUME, Role::Doping);
            let density = slot(resolver, design, (&path, "doping"), value, expected);
            draft.layer.doping = density.map(|density_per_m3| Doping {
                polarity: polarity.value,
                density_per_m3,
                species: species.as_ref().map(|it| it.value.clone()),
                span: *span,
            });
        }
        Attribute::Removed(_) => draft.layer.extent = Extent::Removed,
        Attribute::OnlyUnderFingers(_) => draft.layer.extent = Extent::UnderFingers,
        Attribute::Relaxed(_) => draft.layer.strain = Strain::Relaxed,
        Attribute::Pseudomorphic(_) => draft.layer.strain = Strain::Pseudomorphic,
        Attribute::Collecting(_) => draft.layer.collecting = true,
        Attribute::Steps { of, span, .. } => {
            let Some((_, count)) = draft.step else { return };
            let Some(value) = of else { return };
            if let Some(total) = draft.layer.thickness_m {
                let text = trade(total, Dimension::LENGTH);
                let first = draft.layer.spans.thickness;
                conflict(
                    &mut resolver.scope,
                    format!("`{path}` has a thickness of {text} and steps of their own"),
                    *span,
                    first,
                    &format!("keep one of the two, such as `in {count} steps of 250 nm`"),
                );
                return;
            }
            let expected = Expected::new("a step", Dimension::LENGTH, Role::ThickLayer);
            draft.layer.thickness_m = slot(resolver, design, (&path, "thickness"), value, expected);
            draft.layer.spans.thickness = value.span;
            draft.wrong |= draft.layer.thickness_m.is_none();
        }
        Attribute::Offcut { value, .. } => {
            let expected = Expected::new("offcut", Dimension::ANGLE, Role::Incidence);
            draft.layer.offcut_rad = slot(resolver, design, (&path, "offcut"), value, expected);
        }
        Attribute::Text(text) => resolver.scope.report(
            Finding::error("name.unknown", format!("\"{}\" says nothing of a layer", text.value))
                .at(text.span, "a text here")
                .help("write `note \"…\"` in the layer's block"),
        ),
        // Taken with the material.
        Attribute::Absorbs { .. } | Attribute::Value(_) | Attribute::Word(_) => {}
    }
}

/// The statements of the layer's blocks, a later block over an earlier one.
fn block(resolver: &mut Resolver<'_, '_>, design: &mut Design, draft: &mut Draft<'_, '_>) {
    let here = resolver.scope.here();
    for (block, frame) in draft.node.blocks.clone() {
        resolver.scope.enter(frame);
        resolver.scope.open();
        let mut kept = Kept::default();
        for statement in &block.statements {
            match statement {
                Statement::Property(property) => {
                    let allowed: Vec<&str> = OF_LAYER.iter().chain(MODEL_PROPERTIES).copied().collect();
                    let known = properties::known(&mut resolver.scope, property, "a layer", &allowed);
                    if known && kept.keep(&mut resolver.scope, property) {
                        property_of_layer(resolver, design, draft, property);
                    }
                }
                Statement::Let(item) => resolver.scope.define(&item.name, &item.value),
                Statement::Invalid(_) => {}
                other => properties::misplaced(&mut resolver.scope, other, "a layer"),
            }
        }
        let stated = |word: &str| {
            block.statements.iter().find_map(|statement| match statement {
                Statement::Property(property) if property.name.value == word => Some(property.name.span),
                _ => None,
            })
        };
        if let (Some(first), Some(second)) = (stated("diffusion_length"), stated("lifetime")) {
            let (first, second) = if first < second { (first, second) } else { (second, first) };
            conflict(
                &mut resolver.scope,
                format!("`{}` states a diffusion length and a lifetime", draft.layer.path),
                second,
                first,
                "keep one of them: the other follows from it and the mobility",
            );
        }
    }
    resolver.scope.close(here);
}

fn property_of_layer(
    resolver: &mut Resolver<'_, '_>,
    design: &mut Design,
    draft: &mut Draft<'_, '_>,
    property: &Property,
) {
    let name = property.name.value.as_str();
    let (dimension, role) = match name {
        "diffusion_length" => (Dimension::LENGTH, Role::Positive),
        "lifetime" => (Dimension::TIME, Role::Positive),
        "mobility" => (Dimension::MOBILITY, Role::Positive),
        "sunward_velocity" | "rear_velocity" => (Dimension::VELOCITY, Role::NotNegative),
        "growth_temperature" => (Dimension::TEMPERATURE, Role::GrowthTemperature),
        "rate" => (Dimension::VELOCITY, Role::GrowthRate),
        "texture" => {
            stack::texture(&mut resolver.scope, design, property);
            return;
        }
        // `note` is for the reader, the rest belongs to the material.
        _ => return,
    };
    let expected = Expected::new(name, dimension, role);
    let Some(value) = properties::first_value(&mut resolver.scope, property, expected) else { return };
    properties::no_more(&mut resolver.scope, property, 1);
    let read = slot(resolver, design, (&draft.layer.path, name), &value, expected);
    let layer = &mut draft.layer;
    match name {
        "diffusion_length" => layer.transport.diffusion_length_m = read,
        "lifetime" => layer.transport.lifetime_s = read,
        "mobility" => layer.transport.mobility = read,
        "sunward_velocity" => layer.transport.sunward_velocity = read,
        "rear_velocity" => layer.transport.rear_velocity = read,
        "growth_temperature" => layer.growth_temperature_k = read,
        _ => layer.rate_m_per_s = read,
    }
}
