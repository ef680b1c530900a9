//! What to say where a qualifier stands beside a material that has nothing to work out.

use crate::finding::Finding;
use crate::materials::alloy::Family;
use crate::materials::alloy::solve::gap_reach;
use crate::materials::{Material, ROOM_TEMPERATURE_K, formula};
use crate::resolve::materials::phrases::Phrase;
use crate::resolve::materials::unsolved::ev;
use crate::resolve::materials::{Definition, Library};
use crate::resolve::quantities::{Expected, Role, Scope};
use crate::source::Spanned;
use crate::syntax::Qualifier;
use crate::units::{Dimension, ELEMENTARY_CHARGE};

/// Something said of a compound that only a family could follow.
pub(super) fn fixed(name: &Spanned<String>, qualifier: &Qualifier, material: &Material) -> Finding {
    let text = &name.value;
    let gap = material.gap(ROOM_TEMPERATURE_K).map(|gap| ev(gap.ev));
    let (code, span, message) = match qualifier {
        Qualifier::OfGap { span, .. } | Qualifier::OrderedTo { span, .. } => {
            let has = gap.map_or_else(|| "no gap".to_owned(), |gap| format!("a gap of {gap}"));
            ("gap.unreachable", *span, format!("`{text}` has one composition and {has}"))
        }
        Qualifier::Matched { span, .. } => {
            let lattice = material.lattice_constant(ROOM_TEMPERATURE_K);
            let has = lattice.map_or_else(
                || "no lattice constant".to_owned(),
                |angstrom| format!("the lattice constant {angstrom:.4} Å"),
            );
            ("lattice.unmatchable", *span, format!("`{text}` has one composition and {has}"))
        }
        Qualifier::With { span, .. } => {
            ("formula.composition", *span, format!("`{text}` has one composition"))
        }
    };
    Finding::error(code, message)
        .at(span, "nothing is left to work out")
        .help(format!("write `{text}` alone"))
}

/// Adds the families that could give the gap a compound does not have.
pub(super) fn other_families(
    library: &mut Library,
    scope: &mut Scope,
    finding: Finding,
    (qualifier, material): (&Qualifier, &Material),
) -> Finding {
    let Qualifier::OfGap { value, .. } = qualifier else { return finding };
    let Some(own) = formula::elements(&material.name) else { return finding };
    let expected = Expected::new("gap", Dimension::ENERGY, Role::Gap);
    let Some(gap) = scope.quantity(value, expected).map(|si| si / ELEMENTARY_CHARGE) else { return finding };
    let names: Vec<String> = library.names().into_iter().map(str::to_owned).collect();
    for name in names {
        let holds = formula::elements(&name)
            .is_some_and(|all| all.len() == own.len() + 1 && own.iter().all(|it| all.contains(it)));
        if !holds {
            continue;
        }
        let Some(Definition::Family(family)) = library.find(&name, scope) else { continue };
        if gap_reach(&family, None).is_some_and(|reach| (reach.low.0.ev..=reach.high.0.ev).contains(&gap)) {
            return finding.help(format!("write `{name} of gap {}`", ev(gap)));
        }
    }
    finding
}

/// A qualifier after a formula that already states its composition.
pub(super) fn already_stated(request: &Phrase<'_>, family: &Family, qualifier: &Qualifier) -> Finding {
    let text = &request.phrase.name.value;
    let (span, word) = match qualifier {
        Qualifier::Matched { span, .. } => (*span, "matched"),
        Qualifier::OfGap { span, .. } => (*span, "of gap"),
        Qualifier::OrderedTo { span, .. } => (*span, "ordered to"),
        Qualifier::With { span, .. } => (*span, "with"),
    };
    let family = &family.name;
    let instead = match word {
        "matched" => format!("write `{family} matched`, or `{text}` alone"),
        "of gap" => format!("write `{family} of gap …`, or `{text}` alone"),
        _ => format!("write `{text}` alone"),
    };
    Finding::error(
        "material.open",
        format!("`{text}` states its composition, so `{word}` has nothing to set"),
    )
    .at(span, "one too many")
    .help(instead)
}

/// `with Sb 0.1` of a family without antimony.
pub(super) fn no_such_element(family: &Family, element: &Spanned<String>) -> Finding {
    let mixed: Vec<&str> =
        family.sites.iter().filter(|site| site.len() > 1).flatten().map(String::as_str).collect();
    let name = &family.name;
    Finding::error("formula.composition", format!("`{name}` has no {} to set", element.value))
        .at(element.span, "not in this family")
        .help(format!(
            "write `with {} 0.3`; `{name}` mixes {}",
            mixed.first().unwrap_or(&"In"),
            mixed.join(", ")
        ))
}
