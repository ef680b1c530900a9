//! `ideal` and `direct`: gaps without a chemistry.

use std::sync::Arc;

use crate::finding::Finding;
use crate::materials::optics::DirectEdge;
use crate::materials::{Material, Origin, OriginKind};
use crate::resolve::materials::phrases::{Phrase, Resolved, free_part};
use crate::resolve::materials::values::Kind;
use crate::resolve::quantities::{Expected, Role, Scope};
use crate::syntax::{Argument, Property, Qualifier, Statement};
use crate::units::{Dimension, ELEMENTARY_CHARGE};

/// Statements of a layer's block that belong to its material: `direct` takes them.
pub const MODEL_PROPERTIES: &[&str] = &["coefficient", "urbach", "index"];

/// The names of the models.
pub(super) const MODELS: &[&str] = &["ideal", "direct"];

/// `ideal of gap 1.42 eV absorbs all_above_gap`, `direct of gap 1.42 eV { coefficient … }`.
pub(super) fn model(scope: &mut Scope, request: &Phrase<'_>) -> Option<Resolved> {
    let phrase = request.phrase;
    let name = phrase.name.value.as_str();
    let mut gap = None;
    for qualifier in &phrase.qualifiers {
        match qualifier {
            Qualifier::OfGap { value, .. } if gap.is_none() => gap = Some(value),
            Qualifier::OfGap { span, .. }
            | Qualifier::Matched { span, .. }
            | Qualifier::OrderedTo { span, .. }
            | Qualifier::With { span, .. } => {
                scope.report(
                    Finding::error("material.statement", format!("`{name}` has a gap and nothing else"))
                        .at(*span, "a model without a chemistry has no composition")
                        .help(format!("write `{name} of gap 1.42 eV`")),
                );
                return None;
            }
        }
    }
    let Some(gap) = gap else {
        scope.report(
            Finding::error("material.incomplete", format!("`{name}` does not say its gap"))
                .at(phrase.span, "a gap is due")
                .help(format!("write `{name} of gap 1.42 eV`")),
        );
        return None;
    };
    let slot = scope.slot(gap, Expected::new("gap", Dimension::ENERGY, Role::Gap));
    if slot.wrong {
        return None;
    }
    let mut resolved = Resolved::default();
    resolved.free.extend(free_part("gap", gap, &slot));
    let ends = [slot.value, slot.up_to];
    let make = |scope: &mut Scope, gap_ev: f64| match name {
        "ideal" => ideal(scope, request, gap_ev),
        _ => direct(scope, request, gap_ev),
    };
    match ends {
        [Some(first), Some(last)] => {
            for step in 0..request.steps.max(1) {
                let share = step as f64 / (request.steps.max(2) - 1) as f64;
                let gap_ev = (first + share * (last - first)) / ELEMENTARY_CHARGE;
                resolved.materials.push(Arc::new(make(scope, gap_ev)?));
            }
        }
        [Some(only), None] => resolved.materials.push(Arc::new(make(scope, only / ELEMENTARY_CHARGE)?)),
        // Free and not settled: what else is said of it is still checked.
        _ => drop(make(scope, 1.0)),
    }
    Some(resolved)
}

fn stated(material: Material, text: String) -> Material {
    let origin = |what: &str, cite: String| Origin { what: what.to_owned(), kind: OriginKind::Stated, cite };
    let origins = vec![
        origin("gap", "stated in the stack file; the same at every temperature".to_owned()),
        origin("index", text),
    ];
    Material { origins, ..material }
}

fn ideal(scope: &mut Scope, request: &Phrase<'_>, gap_ev: f64) -> Option<Material> {
    let share = match request.absorbs {
        None => 1.0,
        Some(Argument::Word(word)) if word.value == "all_above_gap" => 1.0,
        Some(Argument::Value(value)) => {
            scope.quantity(value, Expected::new("absorbs", Dimension::NONE, Role::PositiveShare))?
        }
        Some(other) => {
            scope.report(
                Finding::error("material.statement", "`absorbs` takes `all_above_gap` or a share")
                    .at(other.span(), "neither of them")
                    .help("write `absorbs all_above_gap`, or a share such as `absorbs 95 %`"),
            );
            return None;
        }
    };
    let percent = crate::units::number((share * 1e4).round() / 100.0);
    let how = if request.absorbs.is_some() { "stated" } else { "taken, since nothing was stated" };
    let text =
        format!("absorbs {percent} % at and above the gap, nothing below ({how}); no refractive index");
    Some(stated(Material::ideal(gap_ev, share), text))
}

fn direct(scope: &mut Scope, request: &Phrase<'_>, gap_ev: f64) -> Option<Material> {
    let name = &request.phrase.name;
    let find = |word: &str| -> Option<&Property> {
        request.block?.statements.iter().find_map(|statement| match statement {
            Statement::Property(property) if property.name.value == word => Some(property),
            _ => None,
        })
    };
    let coefficient_kind =
        Kind::of(Dimension::EDGE_COEFFICIENT, 1.0 / ELEMENTARY_CHARGE.sqrt(), "3e4 /cm/eV^0.5");
    let Some(coefficient) = find("coefficient") else {
        scope.report(
            Finding::error("material.incomplete", "`direct` does not say how strongly it absorbs")
                .at(name.span, "`coefficient` is due in its block")
                .help("write `{ coefficient 3e4 /cm/eV^0.5; urbach 8 meV }` after the layer"),
        );
        return None;
    };
    let mut value =
        |property: &Property, kind: Kind| crate::resolve::materials::values::single(property, kind, scope);
    let coefficient_per_m = value(coefficient, coefficient_kind)?;
    let urbach_ev = match find("urbach") {
        Some(property) => value(property, Kind::of(Dimension::ENERGY, ELEMENTARY_CHARGE, "8 meV"))?,
        None => 0.0,
    };
    let index = match find("index") {
        Some(property) => Some(value(property, Kind::NOT_NEGATIVE)?),
        None => None,
    };
    let tail = if urbach_ev > 0.0 {
        format!(
            "Urbach tail of {} meV joined with equal value and slope",
            crate::units::number(urbach_ev * 1e3)
        )
    } else {
        "no tail below the gap, since none was stated".to_owned()
    };
    let text = format!("square-root law with the coefficient stated; {tail}");
    Some(stated(Material::direct(DirectEdge { gap_ev, coefficient_per_m, urbach_ev, index }), text))
}
