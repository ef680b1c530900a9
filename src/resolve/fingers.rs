//! The front grid: what is stated of it, and what follows from its shape.

use std::collections::HashMap;

use crate::design::{Design, FingerShape, Fingers};
use crate::finding::Finding;
use crate::resolve::Resolver;
use crate::resolve::properties::{self, quantity};
use crate::resolve::quantities::{Expected, Role};
use crate::source::Span;
use crate::syntax::Property;
use crate::units::{Dimension, in_unit};

const KNOWN: &[(&str, Dimension, Role)] = &[
    ("shading", Dimension::NONE, Role::Loss),
    ("series_resistance", Dimension::RESISTANCE_AREA, Role::SeriesResistance),
    ("pitch", Dimension::LENGTH, Role::Positive),
    ("width", Dimension::LENGTH, Role::Positive),
    ("height", Dimension::LENGTH, Role::Positive),
    ("length", Dimension::LENGTH, Role::Positive),
    ("resistivity", Dimension::RESISTIVITY, Role::Positive),
    ("contact_resistance", Dimension::RESISTANCE_AREA, Role::SeriesResistance),
    ("sheet_resistance", Dimension::RESISTANCE, Role::Positive),
];

/// Words that describe the shape of the grid.
const SHAPE: &[&str] =
    &["pitch", "width", "height", "length", "resistivity", "contact_resistance", "sheet_resistance"];

/// Gold at 20 °C, ohm m: CRC Handbook of Chemistry and Physics, electrical resistivity of pure metals
/// (2.214e-8).
const GOLD_OHM_M: f64 = 2.214e-8;

/// What a grid states: SI values, and where.
pub(super) struct Stated {
    values: HashMap<&'static str, Option<f64>>,
    spans: HashMap<&'static str, Span>,
    broken: bool,
    span: Span,
}

/// Reads `fingers { … }`; `None` where it has no block, which is reported.
pub(super) fn read(resolver: &mut Resolver<'_, '_>, property: &Property) -> Option<Stated> {
    let scope = &mut resolver.scope;
    properties::no_more(scope, property, 0);
    let Some(block) = &property.block else {
        properties::missing(
            scope,
            property,
            "write `fingers { shading 3 %; series_resistance 20 mohm cm2 }`",
        );
        return None;
    };
    let mut stated = Stated {
        values: HashMap::new(),
        spans: HashMap::new(),
        broken: properties::is_broken(block),
        span: property.span,
    };
    let outer = scope.open();
    let words: Vec<&str> = KNOWN.iter().map(|(word, ..)| *word).collect();
    for inner in properties::of_block(scope, block, "`fingers`", &words) {
        let Some((word, dimension, role)) = KNOWN.iter().find(|it| it.0 == inner.name.value) else {
            continue;
        };
        let value = quantity(scope, inner, Expected::new(word, *dimension, *role));
        stated.values.insert(word, value);
        stated.spans.insert(word, inner.span);
    }
    scope.close(outer);
    Some(stated)
}

/// Puts the grid into the design: as stated, else from its shape, else none of it, said so.
pub(super) fn finish(resolver: &mut Resolver<'_, '_>, design: &mut Design, stated: Stated) {
    let has = |word: &str| stated.values.contains_key(word);
    let value = |word: &str| stated.values.get(word).copied().flatten();
    let shaped = SHAPE.iter().any(|word| has(word));
    let wrong = stated.broken || stated.values.values().any(Option::is_none);
    let mut fingers = Fingers {
        shading: value("shading").unwrap_or(0.0),
        series_resistance_ohm_m2: value("series_resistance").unwrap_or(0.0),
        shape: None,
        span: stated.span,
    };
    if let (Some(pitch), Some(width)) = (value("pitch"), value("width")) {
        if width >= pitch {
            resolver.scope.report(
                Finding::error(
                    "value.range",
                    format!(
                        "fingers {} wide with a pitch of {} let no light in",
                        in_unit(width, "um"),
                        in_unit(pitch, "um")
                    ),
                )
                .at(stated.spans["width"], "not below the pitch")
                .help(format!("write `width {}`", in_unit(0.05 * pitch, "um"))),
            );
            design.fingers = Some(fingers);
            return;
        }
        if !has("shading") {
            fingers.shading = width / pitch;
        }
    }
    for (word, sentence) in [
        ("shading", "the front grid shades nothing, as nothing is stated"),
        ("series_resistance", "the front grid adds no series resistance, as nothing is stated"),
    ] {
        let follows = shaped && (word != "shading" || (has("pitch") && has("width")));
        if !has(word) && !follows {
            design.assumptions.push(sentence.to_owned());
        }
    }
    if shaped && !has("series_resistance") && !wrong {
        fingers.shape = shape(resolver, design, &stated);
    }
    design.fingers = Some(fingers);
}

fn shape(resolver: &mut Resolver<'_, '_>, design: &mut Design, stated: &Stated) -> Option<FingerShape> {
    let value = |word: &str| stated.values.get(word).copied().flatten();
    let length = value("length").or(design.area_m2.map(|area| 0.5 * area.sqrt()));
    let mut whole = true;
    for (word, found, help) in [
        ("pitch", value("pitch"), "write `pitch 200 um`, or state `series_resistance 20 mohm cm2`"),
        ("width", value("width"), "write `width 10 um`, or state `series_resistance 20 mohm cm2`"),
        ("height", value("height"), "write `height 5 um`, or state `series_resistance 20 mohm cm2`"),
        ("length", length, "write `length 5 mm` in it, or `area 1 cm2` in the stack"),
    ] {
        if found.is_none() {
            whole = false;
            resolver.scope.report(
                Finding::error(
                    "value.missing",
                    format!("the series resistance of the fingers needs their {word}"),
                )
                .at(stated.span, format!("no `{word}`"))
                .help(help),
            );
            break;
        }
    }
    if !whole {
        return None;
    }
    let mut assume = |word: &str, sentence: &str| {
        if value(word).is_none() {
            design.assumptions.push(sentence.to_owned());
        }
    };
    assume("length", "fingers run from bus bars on two sides of a square of the stated area to its middle");
    assume("resistivity", "fingers of gold, 2.214e-8 ohm m, as no resistivity is stated");
    assume("contact_resistance", "no contact resistance under the fingers, as none is stated");
    assume("sheet_resistance", "the sheet resistance under the fingers follows from the front layers");
    Some(FingerShape {
        pitch_m: value("pitch")?,
        width_m: value("width")?,
        height_m: value("height")?,
        length_m: length?,
        resistivity_ohm_m: value("resistivity").unwrap_or(GOLD_OHM_M),
        contact_ohm_m2: value("contact_resistance").unwrap_or(0.0),
        sheet_ohm: value("sheet_resistance"),
    })
}
