//! Material phrases: names, formulas, families whose composition is to be worked out.

use std::collections::BTreeMap;

use crate::materials::SharedMaterial;
use crate::resolve::files::Files;
use crate::resolve::quantities::Scope;
use crate::source::Span;
use crate::syntax::{Argument, Block, MaterialPhrase, Named};

/// Statements of a layer's block that belong to its material: `ideal` and `direct` take them.
pub const MODEL_PROPERTIES: &[&str] = &["coefficient", "urbach", "index"];

/// Library and user materials, by name.
#[derive(Debug, Default)]
pub struct Library {}

impl Library {
    /// The built-in library.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a user's `material` item.
    pub fn add_material(&mut self, _scope: &mut Scope, _files: &mut Files<'_>, _item: &Named) {}

    /// Adds a user's `alloy` item.
    pub fn add_alloy(&mut self, _scope: &mut Scope, _files: &mut Files<'_>, _item: &Named) {}
}

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
}

/// Resolves a phrase. `None` where it is wrong, which is reported in `scope`.
pub fn materials_of(_library: &mut Library, _scope: &mut Scope, _phrase: &Phrase<'_>) -> Option<Resolved> {
    None
}
