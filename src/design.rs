//! What a stack means: every name resolved, every quantity in SI, every default spelt out.
//!
//! Spans are kept for blame only and take no part in the design's hash.

use std::ops::Range;
use std::sync::Arc;

use crate::light::Spectrum;
use crate::materials::SharedMaterial;
use crate::source::{Span, Spanned};
pub use crate::syntax::{Comparison, Polarity, ToleranceMeaning};

/// Absolute zero of the Celsius scale, K.
pub const ZERO_CELSIUS_K: f64 = 273.15;

/// One stack, sunward first.
#[derive(Clone, Debug)]
pub struct Design {
    /// The name shown to people.
    pub name: Spanned<String>,
    /// `note "…"`
    pub note: Option<Spanned<String>>,
    /// In which order the layers are grown.
    pub growth: Growth,
    /// How the junctions are wired.
    pub terminals: Terminals,
    /// Which optics were asked for.
    pub optics: OpticsModel,
    /// Every layer, sunward first, with those that are removed or stand under fingers only.
    pub layers: Vec<Layer>,
    /// Every junction, sunward first.
    pub junctions: Vec<Junction>,
    /// What stands between junctions, sunward first.
    pub interconnects: Vec<Interconnect>,
    /// The front grid.
    pub fingers: Option<Fingers>,
    /// Cell area, m2, if stated.
    pub area_m2: Option<f64>,
    /// `luminescent_coupling`, `photon_recycling`, `gap_narrowing` as stated.
    pub switches: Switches,
    /// At least one.
    pub conditions: Vec<Condition>,
    /// What must hold.
    pub requirements: Vec<Requirement>,
    /// What the designer leaves open.
    pub free_values: Vec<FreeValue>,
    /// What the free values are to be settled for.
    pub seek: Vec<Seek>,
    /// Charts asked for.
    pub charts: Vec<Chart>,
    /// Tolerances stated.
    pub tolerances: Vec<Tolerance>,
    /// `vary together`, as written.
    pub vary_together: Vec<Spanned<String>>,
    /// Measurements to lay over.
    pub measured: Vec<Measured>,
    /// Rules silenced.
    pub accepts: Vec<Accept>,
    /// Thresholds set.
    pub limits: Vec<Limit>,
    /// Every default that was used, one sentence each, for the sheet.
    pub assumptions: Vec<String>,
    /// The whole `stack` item.
    pub span: Span,
}

impl Design {
    /// The condition of that name.
    pub fn condition(&self, name: &str) -> Option<&Condition> {
        self.conditions.iter().find(|condition| condition.name == name)
    }

    /// The junction of that name and its index.
    pub fn junction(&self, name: &str) -> Option<(usize, &Junction)> {
        self.junctions.iter().enumerate().find(|(_, junction)| junction.name.value == name)
    }

    /// The layer of that path.
    pub fn layer(&self, path: &str) -> Option<&Layer> {
        self.layers.iter().find(|layer| layer.path == path)
    }

    /// The layers light passes, sunward first, with their index in [`Design::layers`]:
    /// those that are neither removed nor only under fingers.
    pub fn lit_layers(&self) -> impl Iterator<Item = (usize, &Layer)> {
        self.layers.iter().enumerate().filter(|(_, layer)| layer.extent == Extent::Everywhere)
    }

    /// The threshold set for `code` by `limit`, if any.
    pub fn limit(&self, code: &str) -> Option<&Limit> {
        self.limits.iter().find(|limit| limit.code.value == code)
    }
}

/// In which order layers are grown.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Default)]
pub enum Growth {
    /// From the wafer up: the last written is grown first.
    #[default]
    Upright,
    /// Sunward side first: the first written is grown first.
    Inverted,
}

/// How junctions are wired.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Default)]
pub enum Terminals {
    /// All in series.
    #[default]
    Two,
    /// Three terminals.
    Three,
    /// Each junction by itself.
    Four,
}

/// Which optics the design asks for.
#[derive(Clone, Debug, PartialEq)]
pub enum OpticsModel {
    /// Beer–Lambert, one pass down.
    OnePass {
        /// Share of the light that is reflected at the front, 0..1.
        front_reflectance: f64,
        /// Whether it was stated.
        stated: bool,
    },
    /// Wave optics.
    Interference {
        /// Where it was asked for; `None` where it is the default.
        stated: Option<Span>,
    },
}

/// Switches of the electrical model; `None` where the user said nothing.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub struct Switches {
    /// Light from a wider junction feeds the next.
    pub luminescent_coupling: Option<bool>,
    /// Light re-absorbed where it was made.
    pub photon_recycling: Option<bool>,
    /// Narrowing by doping.
    pub gap_narrowing: Option<bool>,
}

/// What a layer is for.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[expect(missing_docs, reason = "each is the trade's own word")]
pub enum Duty {
    Absorber,
    Adhesive,
    Air,
    Base,
    Bsf,
    Buffer,
    Cap,
    Coat,
    Contact,
    Cover,
    ElectronContact,
    Emitter,
    EtchStop,
    Handle,
    HoleContact,
    Intrinsic,
    Layer,
    Metal,
    Mirror,
    Passivation,
    Wafer,
    Window,
}

impl Duty {
    /// Every duty with the word that opens its statement.
    pub const ALL: &[(Self, &'static str)] = &[
        (Self::Absorber, "absorber"),
        (Self::Adhesive, "adhesive"),
        (Self::Air, "air"),
        (Self::Base, "base"),
        (Self::Bsf, "bsf"),
        (Self::Buffer, "buffer"),
        (Self::Cap, "cap"),
        (Self::Coat, "coat"),
        (Self::Contact, "contact"),
        (Self::Cover, "cover"),
        (Self::ElectronContact, "electron_contact"),
        (Self::Emitter, "emitter"),
        (Self::EtchStop, "etch_stop"),
        (Self::Handle, "handle"),
        (Self::HoleContact, "hole_contact"),
        (Self::Intrinsic, "intrinsic"),
        (Self::Layer, "layer"),
        (Self::Metal, "metal"),
        (Self::Mirror, "mirror"),
        (Self::Passivation, "passivation"),
        (Self::Wafer, "wafer"),
        (Self::Window, "window"),
    ];

    /// The word in the file.
    pub fn word(self) -> &'static str {
        Self::ALL.iter().find(|(duty, _)| *duty == self).map_or("layer", |(_, word)| word)
    }

    /// The duty a word names.
    pub fn of_word(word: &str) -> Option<Self> {
        Self::ALL.iter().find(|(_, w)| *w == word).map(|(duty, _)| *duty)
    }

    /// Whether photons absorbed here make current by duty: emitter, base, absorber, intrinsic.
    pub fn collects(self) -> bool {
        matches!(self, Self::Emitter | Self::Base | Self::Absorber | Self::Intrinsic)
    }
}

/// Where in the stack a layer belongs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Place {
    /// Above the first junction.
    Front,
    /// In the junction of that index.
    Junction(usize),
    /// In the interconnect of that index.
    Interconnect(usize),
    /// Between junctions but in no interconnect.
    Between,
    /// Below the last junction.
    Rear,
}

/// Where a layer is in the finished cell.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Default)]
pub enum Extent {
    /// Everywhere.
    #[default]
    Everywhere,
    /// Only under the front grid.
    UnderFingers,
    /// Grown, not there in the end.
    Removed,
}

/// How a layer sits on the lattice beneath.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Default)]
pub enum Strain {
    /// Nothing said: pseudomorphic while thinner than critical.
    #[default]
    Unstated,
    /// Said to be relaxed.
    Relaxed,
    /// Said to be strained to the lattice beneath.
    Pseudomorphic,
}

/// Doping of a layer.
#[derive(Clone, Debug, PartialEq)]
pub struct Doping {
    /// Sign of the majority.
    pub polarity: Polarity,
    /// 1/m3, > 0.
    pub density_per_m3: f64,
    /// `Si`, `Zn`, `C`, …
    pub species: Option<String>,
    /// The words.
    pub span: Span,
}

/// One layer.
#[derive(Clone, Debug)]
pub struct Layer {
    /// Unique dotted path: `top.base`, `lower.layer2`, `wafer`, `coat1`; or the alias given.
    pub path: String,
    /// What it is for.
    pub duty: Duty,
    /// Where it belongs.
    pub place: Place,
    /// What it is made of; `None` where the phrase could not be resolved (already reported), in
    /// which case the design is checked but not evaluated.
    pub material: Option<SharedMaterial>,
    /// m; `None` where none was stated (`ideal` absorbers, metal) or where it is free and not
    /// settled.
    pub thickness_m: Option<f64>,
    /// Doping, if stated.
    pub doping: Option<Doping>,
    /// Where it is in the finished cell.
    pub extent: Extent,
    /// How it sits on the lattice beneath.
    pub strain: Strain,
    /// Whether it is said to be `collecting` although its duty does not collect.
    pub collecting: bool,
    /// Transport data stated in its block.
    pub transport: Transport,
    /// Growth temperature, K, if stated.
    pub growth_temperature_k: Option<f64>,
    /// Growth rate, m/s, if stated.
    pub rate_m_per_s: Option<f64>,
    /// Wafer offcut, rad, if stated.
    pub offcut_rad: Option<f64>,
    /// Sheet resistance, ohm per square, if stated.
    pub sheet_resistance_ohm: Option<f64>,
    /// Spans for blame.
    pub spans: LayerSpans,
}

impl Layer {
    /// Whether photons absorbed here count as current: by duty, by `collecting`, or because it
    /// is the wafer that a junction is made in.
    pub fn collects(&self) -> bool {
        matches!(self.place, Place::Junction(_))
            && (self.duty.collects() || self.duty == Duty::Wafer || self.collecting)
    }
}

/// Minority-carrier data stated for one layer, SI.
#[derive(Clone, Copy, Debug, PartialEq, Default)]
pub struct Transport {
    /// m.
    pub diffusion_length_m: Option<f64>,
    /// s.
    pub lifetime_s: Option<f64>,
    /// m2/V/s.
    pub mobility: Option<f64>,
    /// m/s at the face towards the sun.
    pub sunward_velocity: Option<f64>,
    /// m/s at the other face.
    pub rear_velocity: Option<f64>,
}

/// Where the parts of a layer were written.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub struct LayerSpans {
    /// The whole statement.
    pub statement: Span,
    /// The material phrase, or the duty word where there is none.
    pub material: Span,
    /// The thickness, or the duty word where there is none.
    pub thickness: Span,
}

/// One subcell.
#[derive(Clone, Debug)]
pub struct Junction {
    /// `top`
    pub name: Spanned<String>,
    /// Its layers, as a range of [`Design::layers`].
    pub layers: Range<usize>,
    /// How it turns light into voltage.
    pub voltage: VoltageModel,
    /// Where that was said; `None` where it is a default.
    pub voltage_span: Option<Span>,
    /// Shunt in ohm m2, if stated.
    pub shunt_ohm_m2: Option<f64>,
    /// Reverse breakdown voltage, V > 0, if stated.
    pub breakdown_v: Option<f64>,
    /// `separate` terminals.
    pub separate: bool,
    /// The whole statement.
    pub span: Span,
}

/// How a junction turns light into voltage.
#[derive(Clone, Debug, PartialEq)]
pub enum VoltageModel {
    /// Only radiative recombination.
    RadiativeLimit,
    /// Radiative limit and an external radiative efficiency, 0 < ere ≤ 1.
    Ere(f64),
    /// Two diodes, measured.
    Fit(DiodeFit),
    /// From layers, doping, lifetimes and velocities.
    Layers,
}

/// A measured two-diode fit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DiodeFit {
    /// A/m2, slope kT/q.
    pub j01_a_per_m2: f64,
    /// A/m2, slope 2kT/q.
    pub j02_a_per_m2: f64,
    /// ohm m2, if stated.
    pub shunt_ohm_m2: Option<f64>,
    /// The temperature it holds at, K.
    pub at_k: f64,
}

/// What joins two junctions.
#[derive(Clone, Debug)]
pub struct Interconnect {
    /// `as lower`, or `tunnel1`.
    pub name: Spanned<String>,
    /// Tunnel junction or recombination contact.
    pub kind: InterconnectKind,
    /// Its layers, as a range of [`Design::layers`]; empty where none are written.
    pub layers: Range<usize>,
    /// How many junctions stand sunward of it.
    pub below_junctions: usize,
    /// Resistance, ohm m2, if stated.
    pub resistance_ohm_m2: Option<f64>,
    /// Peak current, A/m2, if stated.
    pub peak_a_per_m2: Option<f64>,
    /// The whole statement.
    pub span: Span,
}

/// What joins two junctions.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum InterconnectKind {
    /// Esaki diode.
    Tunnel,
    /// Recombination contact.
    Recombination,
}

/// The front grid.
#[derive(Clone, Debug, PartialEq)]
pub struct Fingers {
    /// Share of the area that is covered, 0..1.
    pub shading: f64,
    /// Series resistance, ohm m2.
    pub series_resistance_ohm_m2: f64,
    /// The whole statement.
    pub span: Span,
}

/// One operating condition.
#[derive(Clone, Debug)]
pub struct Condition {
    /// `noon`; `stated` where the stack states its own.
    pub name: String,
    /// The light at one times.
    pub light: Arc<Spectrum>,
    /// By how much it is multiplied, > 0.
    pub concentration: f64,
    /// Cell temperature, K, > 0.
    pub temperature_k: f64,
    /// Angle of incidence from the normal, rad, 0..π/2.
    pub incidence_rad: f64,
    /// Particle fluence, 1/m2, if stated.
    pub fluence_per_m2: Option<f64>,
    /// Distance from the sun, in astronomical units, if stated; already in `concentration`.
    pub distance_au: Option<f64>,
    /// Where it was written; the stack's name where it was assumed.
    pub span: Span,
}

impl Condition {
    /// What the cell receives across its own plane, W/m2: light × concentration × cos θ.
    pub fn incident_w_per_m2(&self) -> f64 {
        self.light.total_w_per_m2 * self.concentration * self.incidence_rad.cos()
    }
}

/// One `require`.
#[derive(Clone, Debug)]
pub struct Requirement {
    /// Dotted path.
    pub metric: Spanned<String>,
    /// The sign between.
    pub comparison: Comparison,
    /// SI (fractions plain, gaps in J).
    pub bound: f64,
    /// The bound as written, for people.
    pub bound_text: String,
    /// Conditions by name; empty means all.
    pub under: Vec<Spanned<String>>,
    /// `at yield 95 %` as a fraction.
    pub at_yield: Option<f64>,
    /// The whole statement as written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}

/// A value left free.
#[derive(Clone, Debug, PartialEq)]
pub struct FreeValue {
    /// `top.base.thickness`, `top.base.gap`, `coat1.thickness`
    pub path: String,
    /// SI bounds.
    pub range: (f64, f64),
    /// SI value in force, `None` while not settled.
    pub value: Option<f64>,
    /// The range as written.
    pub text: String,
    /// From the number or `free` on.
    pub span: Span,
}

/// What is sought.
#[derive(Clone, Debug, PartialEq)]
pub struct Seek {
    /// As written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}

/// A chart asked for.
#[derive(Clone, Debug, PartialEq)]
pub struct Chart {
    /// As written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}

/// A tolerance of one quantity.
#[derive(Clone, Debug, PartialEq)]
pub struct Tolerance {
    /// `top.base.thickness`
    pub path: String,
    /// SI half width or standard deviation, > 0.
    pub amount: f64,
    /// Which of them.
    pub meaning: ToleranceMeaning,
    /// As written, `± 3 % sigma`.
    pub text: String,
    /// From the sign on.
    pub span: Span,
}

/// A measurement to lay over.
#[derive(Clone, Debug, PartialEq)]
pub struct Measured {
    /// As written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}

/// A rule silenced in one place.
#[derive(Clone, Debug, PartialEq)]
pub struct Accept {
    /// The code.
    pub code: Spanned<String>,
    /// The path; `None` for the whole stack.
    pub on: Option<Spanned<String>>,
    /// Why.
    pub because: Option<Spanned<String>>,
    /// The whole statement.
    pub span: Span,
}

/// A threshold set for this file.
#[derive(Clone, Debug, PartialEq)]
pub struct Limit {
    /// The code.
    pub code: Spanned<String>,
    /// SI.
    pub value: f64,
    /// As written.
    pub text: String,
    /// The whole statement.
    pub span: Span,
}
