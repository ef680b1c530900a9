//! What a stack means: every name resolved, every quantity in SI, every default spelt out.
//!
//! Spans are kept for blame only and take no part in the design's hash.

use std::sync::Arc;

use crate::light::Spectrum;
use crate::materials::carriers::{Damage, Particle};
use crate::source::{Span, Spanned};

mod faces;
mod junction;
mod layer;
mod request;

pub use crate::syntax::{Accept, Comparison, Polarity, ToleranceMeaning};
pub use faces::{BARE_M_PER_S, COVERED_M_PER_S, Face, PASSIVATED_M_PER_S};
pub use junction::{DiodeFit, FingerShape, Fingers, Interconnect, InterconnectKind, Junction, VoltageModel};
pub use layer::{Doping, Duty, Extent, Layer, LayerSpans, Place, Strain, Transport};
pub use request::{
    AxisKind, Chart, ChartAxis, FreeValue, Limit, Measured, MeasuredKind, Requirement, Season, SeasonRow,
    Seek, Tolerance,
};

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
    /// How faces scatter; `None` where all are flat.
    pub texture: Option<Texture>,
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
    /// Weighted conditions, if given.
    pub season: Option<Season>,
    /// Measurements to lay over.
    pub measured: Vec<Measured>,
    /// Rules silenced in this stack.
    pub accepts: Vec<Accept>,
    /// Rules silenced in every stack of the file, each with a reason.
    pub file_accepts: Vec<Accept>,
    /// Thresholds set, those of the stack before those of the file.
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

/// Faces that scatter.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Texture {
    /// Pyramids of silicon's slow planes, upright or inverted, on the sunward face of the wafer.
    pub pyramids: bool,
    /// A rear face that sends light back in all directions alike.
    pub lambertian_rear: bool,
    /// The first statement of it.
    pub span: Span,
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
    /// Particles the cell has been through, if stated.
    pub fluence: Option<Fluence>,
    /// Distance from the sun, in astronomical units, if stated; already in `concentration`.
    pub distance_au: Option<f64>,
    /// Where it was written; the stack's name where it was assumed.
    pub span: Span,
}

/// Particles that have damaged a cell.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Fluence {
    /// 1/m2, ≥ 0.
    pub per_m2: f64,
    /// Which.
    pub particle: Particle,
    /// Kinetic energy of each, J.
    pub energy_j: f64,
}

impl Fluence {
    /// Whether `damage` holds for this particle at this energy, to one part in a thousand.
    pub fn is_of(&self, damage: &Damage) -> bool {
        let near = (self.energy_j - damage.energy_j).abs() <= 1e-3 * damage.energy_j;
        self.particle == damage.particle && near
    }
}

impl Condition {
    /// What the cell receives across its own plane, W/m2: light × concentration × cos θ.
    pub fn incident_w_per_m2(&self) -> f64 {
        self.light.total_w_per_m2 * self.concentration * self.incidence_rad.cos()
    }
}
