//! One layer: what it is for, where it belongs, how thick and how doped it is.

use crate::design::Polarity;
use crate::materials::SharedMaterial;
use crate::source::Span;

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
