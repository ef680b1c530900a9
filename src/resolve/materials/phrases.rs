//! Material phrases: what stands between the duty of a layer and its thickness.

use std::collections::BTreeMap;
use std::sync::Arc;

use crate::finding::Finding;
use crate::materials::alloy::solve::{Wanted, solve};
use crate::materials::alloy::{Composition, Family};
use crate::materials::{Material, Origin, OriginKind, SharedMaterial};
use crate::resolve::materials::models::{MODEL_PROPERTIES, MODELS, model};
use crate::resolve::materials::unsolved::{self, Asked};
use crate::resolve::materials::{Definition, Library, formulas, misplaced};
use crate::resolve::names;
use crate::resolve::quantities::{Expected, Role, Scope, Slot};
use crate::source::{Span, Spanned};
use crate::syntax::{Argument, Block, MaterialPhrase, Qualifier, Statement, Value};
use crate::units::{Dimension, ELEMENTARY_CHARGE};

/// A layer that another is matched to.
#[derive(Clone, Debug)]
pub struct Reference {
    /// Path of the layer, for wording: `wafer`.
    pub path: String,
    /// What it is made of.
    pub material: SharedMaterial,
    /// Where it was written.
    pub span: Span,
}

/// A phrase and what surrounds it.
#[derive(Clone, Copy, Debug)]
pub struct Phrase<'a> {
    /// As written.
    pub phrase: &'a MaterialPhrase,
    /// `absorbs all_above_gap`, `absorbs 95 %`, where stated on the line.
    pub absorbs: Option<&'a Argument>,
    /// The layer's block, for what the models without a chemistry need (see
    /// [`MODEL_PROPERTIES`]); its other statements are the layer's own business.
    pub block: Option<&'a Block>,
    /// The relaxed lattice beneath in growth order; `None` where there is none, or where it could
    /// not be resolved (see `beneath_unknown`).
    pub beneath: Option<&'a Reference>,
    /// Whether a layer beneath is wrong and was reported: then nothing is said of a missing
    /// lattice, and a phrase that needs one gives `None` in silence.
    pub beneath_unknown: bool,
    /// Layers grown before this one, by path, duty word and alias, for `matched to buffer`.
    pub named: &'a BTreeMap<String, Reference>,
    /// Growth temperature where stated, else 298.15 K.
    pub temperature_k: f64,
    /// Into how many steps a graded phrase is cut, sunward first; 1 elsewhere.
    pub steps: usize,
}

/// A quantity of a phrase that is left free.
#[derive(Clone, Debug)]
pub struct FreePart {
    /// `gap`, `composition.In`: appended to the layer's path.
    pub what: String,
    /// SI bounds.
    pub range: (f64, f64),
    /// SI value in force; `None` while not settled.
    pub value: Option<f64>,
    /// From the number or `free` on.
    pub span: Span,
}

/// What a phrase stands for.
#[derive(Clone, Debug, Default)]
pub struct Resolved {
    /// One material, or one a step where graded, in the order of the phrase's bounds. Empty where
    /// a free value is not settled.
    pub materials: Vec<SharedMaterial>,
    /// What it leaves free.
    pub free: Vec<FreePart>,
    /// Fractions that nobody stated and the family took: `MA 0, Cs 0.2`.
    pub taken: Option<String>,
}

/// Resolves a phrase. `None` where it is wrong, which is reported in `scope`.
pub fn materials_of(library: &mut Library, scope: &mut Scope, request: &Phrase<'_>) -> Option<Resolved> {
    let name = &request.phrase.name;
    if MODELS.contains(&name.value.as_str()) && !library.is_defined(&name.value) {
        return model(scope, request);
    }
    no_model(scope, request);
    match library.find(&name.value, scope) {
        Some(Definition::Compound(compound)) => {
            if let Some(qualifier) = request.phrase.qualifiers.first() {
                let finding = misplaced::fixed(name, qualifier, &compound.material);
                let finding =
                    misplaced::other_families(library, scope, finding, (qualifier, &compound.material));
                scope.report(finding);
                return None;
            }
            Some(Resolved { materials: vec![compound.material.clone()], ..Resolved::default() })
        }
        Some(Definition::Family(family)) => of_family(library, scope, request, (&family, None)),
        // Defined, but wrong, which was reported where it stands.
        None if library.is_defined(&name.value) => None,
        None if is_formula(&name.value) => {
            let (family, composition) = formulas::composition_of(library, scope, name)?;
            of_family(library, scope, request, (&family, Some(composition)))
        }
        None => {
            scope.report(unknown(library, name));
            None
        }
    }
}

/// What only a model without a chemistry takes is a finding beside a material.
fn no_model(scope: &mut Scope, request: &Phrase<'_>) {
    let name = &request.phrase.name.value;
    if let Some(absorbs) = request.absorbs {
        scope.report(
            Finding::error("material.statement", format!("`absorbs` belongs to `ideal`, not to `{name}`"))
                .at(absorbs.span(), "what a material absorbs follows from its index")
                .help("delete it, or write `ideal of gap …` instead of the material"),
        );
    }
    let statements = request.block.into_iter().flat_map(|block| &block.statements);
    for statement in statements {
        let Statement::Property(property) = statement else { continue };
        let word = property.name.value.as_str();
        if MODEL_PROPERTIES.contains(&word) {
            scope.report(
                Finding::error(
                    "material.statement",
                    format!("`{word}` belongs to `direct`, not to `{name}`"),
                )
                .at(property.span, "a material has its own")
                .help("delete it, or define a `material` of your own with it"),
            );
        }
    }
}

/// Whether a name that nothing is called should be read as a formula: it states fractions.
fn is_formula(name: &str) -> bool {
    name.contains(|c: char| c.is_ascii_digit())
        && name.starts_with(|c: char| c.is_ascii_uppercase() || c == '(')
}

fn unknown(library: &Library, name: &Spanned<String>) -> Finding {
    let known = library.names().into_iter().chain(MODELS.iter().copied());
    let otherwise =
        format!("define it: `material {} {{ … }}`; `bandloom materials` lists what is built in", name.value);
    names::unknown("material", name, known, &otherwise)
}

/// The free value of a slot, if it is one.
pub(super) fn free_part(what: &str, value: &Value, slot: &Slot) -> Option<FreePart> {
    let (range, _) = slot.free?;
    Some(FreePart { what: what.to_owned(), range, value: slot.value, span: value.span })
}

/// One wish with its first and, where graded, its last value.
struct Wish {
    make: Box<dyn Fn(f64) -> Wanted>,
    ends: (f64, Option<f64>),
}

/// A family, and its composition where a formula states it.
fn of_family(
    library: &mut Library,
    scope: &mut Scope,
    request: &Phrase<'_>,
    (family, stated): (&Arc<Family>, Option<Composition>),
) -> Option<Resolved> {
    let mut asked = Asked::new(request, family);
    let mut resolved = Resolved::default();
    let (mut wishes, mut ordered, mut open): (Vec<Wish>, Option<f64>, bool) = (Vec::new(), None, false);
    for qualifier in &request.phrase.qualifiers {
        match qualifier {
            Qualifier::OrderedTo { value, span } => {
                let slot = gap_slot(scope, value)?;
                resolved.free.extend(free_part("gap", value, &slot));
                asked.ordered = Some(*span);
                open |= slot.value.is_none();
                ordered = slot.value.map(|gap| gap / ELEMENTARY_CHARGE);
            }
            _ if stated.is_some() => {
                scope.report(misplaced::already_stated(request, family, qualifier));
                return None;
            }
            Qualifier::Matched { to, span } => {
                let reference = ground(scope, request, to.as_ref(), *span)?;
                let angstrom = lattice_beneath(scope, &reference, *span, request.temperature_k)?;
                asked.matched = Some((*span, reference));
                asked.lattice = Some((angstrom, request.temperature_k));
                let temperature_k = request.temperature_k;
                wishes.push(Wish {
                    make: Box::new(move |angstrom| Wanted::Lattice { angstrom, temperature_k }),
                    ends: (angstrom, None),
                });
            }
            Qualifier::OfGap { value, span } => {
                let slot = gap_slot(scope, value)?;
                resolved.free.extend(free_part("gap", value, &slot));
                asked.gap = Some(*span);
                let ev = |si: f64| si / ELEMENTARY_CHARGE;
                match slot.value {
                    Some(first) => wishes
                        .push(Wish { make: Box::new(Wanted::Gap), ends: (ev(first), slot.up_to.map(ev)) }),
                    None => open = true,
                }
            }
            Qualifier::With { element, value, span } => {
                if family.position(&element.value).is_none() {
                    scope.report(misplaced::no_such_element(family, element));
                    return None;
                }
                let slot_name = format!("with {}", element.value);
                let slot = scope.slot(value, Expected::new(&slot_name, Dimension::NONE, Role::Fraction));
                if slot.wrong {
                    return None;
                }
                let what = format!("composition.{}", element.value);
                resolved.free.extend(free_part(&what, value, &slot));
                asked.fractions.push(*span);
                let own = element.value.clone();
                match slot.value {
                    Some(first) => wishes.push(Wish {
                        make: Box::new(move |fraction| Wanted::Fraction(own.clone(), fraction)),
                        ends: (first, slot.up_to),
                    }),
                    None => open = true,
                }
            }
        }
    }
    if open {
        return Some(resolved);
    }
    // What a family takes where nothing is said, and only as much of it as is open.
    if stated.is_none() && !wishes.is_empty() {
        let named: Vec<&str> = request
            .phrase
            .qualifiers
            .iter()
            .filter_map(|it| match it {
                Qualifier::With { element, .. } => Some(element.value.as_str()),
                _ => None,
            })
            .collect();
        let unsaid = family.otherwise.iter().filter(|(element, _)| !named.contains(&element.as_str()));
        for (element, fraction) in unsaid.take(family.freedom().saturating_sub(wishes.len())) {
            asked.taken.push((element.clone(), *fraction));
            let own = element.clone();
            wishes.push(Wish {
                make: Box::new(move |fraction| Wanted::Fraction(own.clone(), fraction)),
                ends: (*fraction, None),
            });
        }
    }
    if !asked.taken.is_empty() {
        resolved.taken = Some(taken_text(&asked.taken));
    }
    let graded = wishes.iter().any(|wish| wish.ends.1.is_some());
    let steps = if graded { request.steps.max(1) } else { 1 };
    for step in 0..steps {
        let share = if steps > 1 { step as f64 / (steps - 1) as f64 } else { 0.0 };
        let wanted: Vec<Wanted> = wishes
            .iter()
            .map(|wish| {
                let (first, last) = wish.ends;
                (wish.make)(first + share * (last.unwrap_or(first) - first))
            })
            .collect();
        let composition = match &stated {
            Some(composition) => composition.clone(),
            None => match solve(family, &wanted) {
                Ok(composition) => composition,
                Err(error) => match unsolved::leniently(family, &asked, &wanted, &error) {
                    Some(composition) => composition,
                    None => {
                        scope.report(unsolved::finding(&asked, &wanted, &error));
                        return None;
                    }
                },
            },
        };
        if let Some(ordered) = ordered
            && let Some(finding) = unsolved::ordering(&asked, &composition, ordered)
        {
            scope.report(finding);
            return None;
        }
        let mut material = library.alloy(family, &composition, ordered);
        material.family = Some(Arc::clone(family));
        if stated.is_some() {
            material.label.clone_from(&request.phrase.name.value);
        }
        material.origins.insert(0, composition_origin(&asked, &material, &wanted, stated.is_some()));
        resolved.materials.push(Arc::new(material));
    }
    Some(resolved)
}

fn gap_slot(scope: &mut Scope, value: &Value) -> Option<Slot> {
    let slot = scope.slot(value, Expected::new("gap", Dimension::ENERGY, Role::Gap));
    (!slot.wrong).then_some(slot)
}

/// The layer a phrase is matched to.
fn ground(
    scope: &mut Scope,
    request: &Phrase<'_>,
    to: Option<&Spanned<String>>,
    span: Span,
) -> Option<Reference> {
    if let Some(to) = to {
        if let Some(found) = request.named.get(&to.value) {
            return Some(found.clone());
        }
        if !request.beneath_unknown {
            let known = request.named.keys().map(String::as_str);
            let otherwise = "name a layer that is grown before this one, such as `wafer`";
            scope.report(names::unknown("layer grown before this one", to, known, otherwise));
        }
        return None;
    }
    if let Some(beneath) = request.beneath {
        return Some(beneath.clone());
    }
    if !request.beneath_unknown {
        scope.report(
            Finding::error(
                "lattice.unmatchable",
                format!("`{}` has no lattice to match", unsolved::written(request)),
            )
            .at(span, "no layer with a lattice is grown before this one")
            .help("add a wafer, such as `wafer GaAs 350 um`, or state the composition"),
        );
    }
    None
}

fn lattice_beneath(scope: &mut Scope, reference: &Reference, span: Span, temperature_k: f64) -> Option<f64> {
    let found = reference.material.lattice_constant(temperature_k);
    if found.is_none() {
        scope.report(
            Finding::error(
                "lattice.unmatchable",
                format!("`{}` has no lattice constant to match", reference.material.label),
            )
            .at(span, "a crystal is due beneath")
            .beside(reference.span, format!("`{}`", reference.path))
            .help("match to a crystal, or state the composition"),
        );
    }
    found
}

/// `MA 0, Cs 0.2`
fn taken_text(taken: &[(String, f64)]) -> String {
    let parts: Vec<String> = taken
        .iter()
        .map(|(element, fraction)| format!("{element} {}", crate::units::number(*fraction)))
        .collect();
    parts.join(", ")
}

/// How the composition came to be.
fn composition_origin(asked: &Asked<'_>, material: &Material, wanted: &[Wanted], stated: bool) -> Origin {
    let what = "composition".to_owned();
    let fractions = wanted.iter().all(|wish| matches!(wish, Wanted::Fraction(..)));
    if stated || (fractions && asked.taken.is_empty()) {
        return Origin { what, kind: OriginKind::Stated, cite: "stated in the stack file".to_owned() };
    }
    let mut parts = Vec::new();
    for wish in wanted {
        match wish {
            Wanted::Lattice { angstrom, temperature_k } => {
                let beneath = asked.matched.as_ref().map_or("the layer beneath", |(_, it)| it.path.as_str());
                parts.push(format!(
                    "the lattice constant of `{beneath}`, {angstrom:.4} Å at {temperature_k:.0} K"
                ));
            }
            Wanted::Gap(ev) => {
                parts.push(format!("the gap asked for, {} eV at 300 K", crate::units::number(*ev)))
            }
            // Said at the end.
            Wanted::Fraction(element, fraction) if asked.taken.contains(&(element.clone(), *fraction)) => {}
            Wanted::Fraction(element, fraction) => {
                parts.push(format!("the fraction of {element} stated, {}", crate::units::number(*fraction)));
            }
        }
    }
    let family = &material.name;
    let mut cite =
        format!("worked out from {} by Vegard's rule and the bowing of {family}", parts.join(" and "));
    if !asked.taken.is_empty() {
        cite.push_str(&format!("; {} taken, since nothing was stated", taken_text(&asked.taken)));
    }
    Origin { what, kind: OriginKind::Model, cite }
}
