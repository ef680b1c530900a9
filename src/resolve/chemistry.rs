//! Materials of the layers, worked out in growth order, because a phrase may be matched to the
//! relaxed lattice beneath it.

use std::collections::{BTreeMap, HashMap};
use std::sync::Arc;

use crate::design::{Design, Duty, FreeValue, Growth, Place, Strain, ZERO_CELSIUS_K};
use crate::materials::optics::{IndexTable, Optics};
use crate::materials::{Material, MaterialClass, Origin, OriginKind, SharedMaterial};
use crate::resolve::Resolver;
use crate::resolve::layers::Draft;
use crate::resolve::materials::{Phrase, Reference, Resolved, materials_of};
use crate::syntax::{Attribute, Expression, Qualifier, Value};

/// Room temperature, at which a lattice is matched where no growth temperature is stated, K.
const ROOM_K: f64 = ZERO_CELSIUS_K + 25.0;

/// Fills the material of every draft.
pub(super) fn materials(resolver: &mut Resolver<'_, '_>, design: &mut Design, drafts: &mut [Draft<'_, '_>]) {
    // A layer that could not be read may be the one that carries the others.
    let unknown = drafts.iter().any(|draft| draft.node.unreadable && draft.layer.duty == Duty::Wafer);
    let mut walk = Walk { beneath: None, unknown, named: BTreeMap::new(), graded: Vec::new() };
    for index in order(design.growth, drafts) {
        let found = walk.material(resolver, design, &drafts[index], drafts);
        let draft = &mut drafts[index];
        draft.layer.material = found;
        if draft.layer.duty == Duty::Wafer && matches!(draft.layer.place, Place::Junction(_)) {
            draft.layer.collecting = true;
        }
        walk.step_on(draft);
    }
}

/// Indices in growth order. The wafer comes first wherever it is written; upright, what is written
/// below it grows on its far face.
fn order(growth: Growth, drafts: &[Draft<'_, '_>]) -> Vec<usize> {
    let wafer = drafts.iter().position(|draft| draft.layer.duty == Duty::Wafer);
    let all = 0..drafts.len();
    let mut order: Vec<usize> = wafer.into_iter().collect();
    match (growth, wafer) {
        (Growth::Upright, Some(wafer)) => {
            order.extend((0..wafer).rev());
            order.extend(wafer + 1..drafts.len());
        }
        (Growth::Upright, None) => order.extend(all.rev()),
        (Growth::Inverted, _) => order.extend(all.filter(|index| Some(*index) != wafer)),
    }
    order
}

struct Walk {
    /// The relaxed lattice beneath.
    beneath: Option<Reference>,
    /// Whether the layer that would be it is wrong.
    unknown: bool,
    named: BTreeMap<String, Reference>,
    /// Materials of the graded layer whose steps are being filled.
    graded: Vec<SharedMaterial>,
}

impl Walk {
    fn material(
        &mut self,
        resolver: &mut Resolver<'_, '_>,
        design: &mut Design,
        draft: &Draft<'_, '_>,
        all: &[Draft<'_, '_>],
    ) -> Option<SharedMaterial> {
        let layer = &draft.layer;
        if draft.material_wrong {
            return None;
        }
        let (phrase, frame) = match (&draft.node.material, &draft.phrase) {
            (Some((phrase, frame)), _) => (*phrase, *frame),
            (None, Some(phrase)) => (phrase, resolver.scope.here()),
            (None, None) => return (layer.duty == Duty::Air).then(|| Arc::new(air())),
        };
        if let Some((step, _)) = draft.step
            && step > 0
        {
            return self.graded.get(step).cloned();
        }
        // A doped skin without a name of its own is made of the wafer it was diffused into.
        if phrase.diffused.is_some() && phrase.name.value.is_empty() {
            return wafer_of(draft, all);
        }
        let absorbs = draft.node.attributes.iter().find_map(|(attribute, _)| match attribute {
            Attribute::Absorbs { argument, .. } => Some(argument),
            _ => None,
        });
        let here = resolver.scope.enter(frame);
        let resolved = cached(
            resolver,
            &Phrase {
                phrase,
                absorbs,
                block: draft.node.blocks.last().map(|(block, _)| *block),
                beneath: self.beneath.as_ref(),
                beneath_unknown: self.unknown,
                named: &self.named,
                temperature_k: layer.growth_temperature_k.unwrap_or(ROOM_K),
                steps: draft.step.map_or(1, |(_, count)| count),
            },
        );
        resolver.scope.close(here);
        let resolved = resolved?;
        for free in resolved.free {
            design.free_values.push(FreeValue {
                path: format!("{}.{}", layer.path, free.what),
                range: free.range,
                value: free.value,
                text: resolver.text(free.span),
                span: free.span,
            });
        }
        if let (Some(taken), Some(made)) = (&resolved.taken, resolved.materials.first()) {
            let (path, name) = (&layer.path, &made.name);
            let sentence = format!("`{path}`, {name}, has {taken}, as its other fractions are not stated");
            if !design.assumptions.contains(&sentence) {
                design.assumptions.push(sentence);
            }
        }
        self.graded = resolved.materials;
        self.graded.first().cloned()
    }

    /// Makes the layer the lattice beneath where it is one, and keeps it for `matched to`.
    fn step_on(&mut self, draft: &Draft<'_, '_>) {
        let layer = &draft.layer;
        if !crystal_duty(layer.duty) {
            return;
        }
        let carries = layer.duty == Duty::Wafer || layer.strain == Strain::Relaxed;
        let first = self.beneath.is_none();
        let Some(material) = &layer.material else {
            // Only a layer that would carry the next ones hides their lattice when it is wrong.
            if carries || first {
                self.unknown = true;
                self.beneath = if carries { None } else { self.beneath.take() };
            }
            return;
        };
        if material.lattice.is_none() {
            return;
        }
        let reference =
            Reference { path: layer.path.clone(), material: material.clone(), span: layer.spans.material };
        let alias = draft.node.alias.map(|alias| alias.value.as_str());
        for name in [layer.path.as_str(), draft.node.duty.value.as_str()].into_iter().chain(alias) {
            self.named.insert(name.to_owned(), reference.clone());
        }
        // The path of a graded layer as a whole names its last step.
        if let Some((whole, _)) = layer.path.rsplit_once(".step") {
            self.named.insert(whole.to_owned(), reference.clone());
        }
        if carries || (first && !self.unknown) {
            self.beneath = Some(reference);
            self.unknown = false;
        }
    }
}

/// What the same words mean on the same lattice: worked out once in a run.
pub(super) type Cache = HashMap<Key, (Resolved, Option<SharedMaterial>)>;

/// The words, the lattice beneath by identity, the temperature by its bits, and the steps.
type Key = (String, usize, u64, usize);

/// [`materials_of`], or what it gave before. Only phrases whose meaning is settled by the key are
/// kept: no names of values, nothing left free, no layer named.
fn cached(resolver: &mut Resolver<'_, '_>, phrase: &Phrase<'_>) -> Option<Resolved> {
    let settled = phrase.absorbs.is_none()
        && phrase.block.is_none()
        && !phrase.beneath_unknown
        && phrase.phrase.qualifiers.iter().all(|qualifier| match qualifier {
            Qualifier::Matched { to, .. } => to.is_none(),
            Qualifier::OfGap { value, .. }
            | Qualifier::OrderedTo { value, .. }
            | Qualifier::With { value, .. } => is_literal(value),
        });
    if !settled {
        return materials_of(&mut resolver.library, &mut resolver.scope, phrase);
    }
    let lattice = phrase.beneath.map(|reference| reference.material.clone());
    let identity = lattice.as_ref().map_or(0, |material| Arc::as_ptr(material) as usize);
    let key = (resolver.text(phrase.phrase.span), identity, phrase.temperature_k.to_bits(), phrase.steps);
    if let Some((known, _)) = resolver.materials.get(&key) {
        return Some(known.clone());
    }
    let before = resolver.scope.finding_count();
    let resolved = materials_of(&mut resolver.library, &mut resolver.scope, phrase)?;
    if resolver.scope.finding_count() == before {
        // The lattice is kept beside it, so that its address is not given to another one.
        resolver.materials.insert(key, (resolved.clone(), lattice));
    }
    Some(resolved)
}

fn is_literal(value: &Value) -> bool {
    let number = |it: &Option<Expression>| it.as_ref().is_none_or(|it| matches!(it, Expression::Number(_)));
    value.free.is_none() && value.tolerance.is_none() && number(&value.expression) && number(&value.up_to)
}

/// Layers that are grown and can carry others.
fn crystal_duty(duty: Duty) -> bool {
    !matches!(
        duty,
        Duty::Cover | Duty::Adhesive | Duty::Air | Duty::Coat | Duty::Handle | Duty::Mirror | Duty::Metal
    )
}

/// The wafer a skin was diffused into: that of its junction, else that of the stack.
fn wafer_of(draft: &Draft<'_, '_>, all: &[Draft<'_, '_>]) -> Option<SharedMaterial> {
    let wafers = || all.iter().filter(|other| other.layer.duty == Duty::Wafer);
    wafers()
        .find(|other| other.layer.place == draft.layer.place)
        .or_else(|| wafers().next())
        .and_then(|wafer| wafer.layer.material.clone())
}

/// Air: an index of 1 from the vacuum ultraviolet to the far infrared.
fn air() -> Material {
    Material {
        optics: Optics::Table(Arc::new(IndexTable {
            wavelength_m: vec![1e-7, 1e-3],
            n: vec![1.0, 1.0],
            k: vec![0.0, 0.0],
            gap_ev: None,
            edge_is_direct: false,
        })),
        origins: vec![Origin {
            what: "index".to_owned(),
            kind: OriginKind::Model,
            cite: "vacuum; the index of air is 1.0003".to_owned(),
        }],
        ..Material::bare("air", MaterialClass::Dielectric)
    }
}
