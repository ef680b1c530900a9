//! Materials: bands, lattice, optics, and where each number comes from.
//!
//! A [`Material`] is one composition, fully worked out, with no syntax left in it. Everything
//! that depends on temperature is a law here, not a value, so that a condition can ask for its
//! own temperature. The library itself is written in the stack language
//! (`src/materials/library/*.stack`) and read by `resolve`.

use std::sync::Arc;

pub mod alloy;
pub mod carriers;
pub mod constants;
pub mod elements;
pub mod formula;
pub mod library;
pub mod optics;
pub mod strain;
pub mod table;

use carriers::Carriers;
use constants::Constants;
use optics::Optics;

/// The temperature handbook values hold at, K. A gap asked for in a stack file is the gap here.
pub const ROOM_TEMPERATURE_K: f64 = 300.0;

/// A temperature law `E(T) = at_zero − alpha·T²/(T + beta)` (Varshni, Physica 34, 149 (1967)).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Varshni {
    /// Gap at 0 K, eV.
    pub at_zero_ev: f64,
    /// eV/K.
    pub alpha_ev_per_k: f64,
    /// K.
    pub beta_k: f64,
}

impl Varshni {
    /// The gap in eV at `temperature_k`.
    pub fn at(self, temperature_k: f64) -> f64 {
        let t = temperature_k;
        // Also keeps 0/0 out where beta is 0 K, as for the X valley of InP.
        if self.alpha_ev_per_k == 0.0 || t <= 0.0 {
            return self.at_zero_ev;
        }
        self.at_zero_ev - self.alpha_ev_per_k * t * t / (t + self.beta_k)
    }
}

/// How one gap of one compound moves with temperature.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum GapLaw {
    /// Varshni's form; a gap without a known law has `alpha` 0.
    Varshni(Varshni),
    /// `E(T) = at_zero + amplitude·(1 − coth(theta/T))`, phonon occupation at one temperature.
    Phonon {
        /// eV.
        at_zero_ev: f64,
        /// eV.
        amplitude_ev: f64,
        /// K.
        theta_k: f64,
    },
}

impl GapLaw {
    /// A gap that stays put.
    pub fn constant(ev: f64) -> Self {
        Self::Varshni(Varshni { at_zero_ev: ev, alpha_ev_per_k: 0.0, beta_k: 0.0 })
    }

    /// The gap in eV at `temperature_k`.
    pub fn at(self, temperature_k: f64) -> f64 {
        match self {
            Self::Varshni(law) => law.at(temperature_k),
            Self::Phonon { at_zero_ev, .. } if temperature_k <= 0.0 => at_zero_ev,
            Self::Phonon { at_zero_ev, amplitude_ev, theta_k } => {
                at_zero_ev + amplitude_ev * (1.0 - 1.0 / (theta_k / temperature_k).tanh())
            }
        }
    }
}

/// One conduction-band valley of a compound or alloy: a weighted sum of the end members' laws
/// plus an offset that does not depend on temperature (bowing, ordering, a gap asked for).
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Valley {
    /// End members: weight and law. The weights sum to 1.
    pub members: Vec<(f64, GapLaw)>,
    /// eV.
    pub offset_ev: f64,
}

impl Valley {
    /// The valley of a compound.
    pub fn of(law: GapLaw) -> Self {
        Self { members: vec![(1.0, law)], offset_ev: 0.0 }
    }

    /// The gap of this valley in eV at `temperature_k`.
    pub fn at(&self, temperature_k: f64) -> f64 {
        self.members.iter().map(|(w, law)| w * law.at(temperature_k)).sum::<f64>() + self.offset_ev
    }
}

/// Which valley is the lowest.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum GapKind {
    /// Γ.
    Direct,
    /// X.
    IndirectX,
    /// L.
    IndirectL,
}

impl GapKind {
    /// Whether light is absorbed without phonons at the gap.
    pub fn is_direct(self) -> bool {
        self == Self::Direct
    }

    /// For tables and JSON: `direct`, `indirect (X)`, `indirect (L)`.
    pub fn word(self) -> &'static str {
        match self {
            Self::Direct => "direct",
            Self::IndirectX => "indirect (X)",
            Self::IndirectL => "indirect (L)",
        }
    }
}

/// A gap at one temperature.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Gap {
    /// eV.
    pub ev: f64,
    /// Which valley.
    pub kind: GapKind,
}

/// The valleys of a semiconductor. One that is unknown is `None` and is never the lowest.
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Bands {
    /// Γ.
    pub gamma: Option<Valley>,
    /// X (Δ in silicon).
    pub x: Option<Valley>,
    /// L.
    pub l: Option<Valley>,
}

impl Bands {
    /// The lowest gap at `temperature_k`.
    pub fn gap(&self, temperature_k: f64) -> Option<Gap> {
        [(&self.gamma, GapKind::Direct), (&self.x, GapKind::IndirectX), (&self.l, GapKind::IndirectL)]
            .into_iter()
            .filter_map(|(valley, kind)| {
                valley.as_ref().map(|valley| Gap { ev: valley.at(temperature_k), kind })
            })
            .min_by(|a, b| a.ev.total_cmp(&b.ev))
    }

    /// Moves every valley by `ev`.
    pub fn shift(&mut self, ev: f64) {
        for valley in [&mut self.gamma, &mut self.x, &mut self.l].into_iter().flatten() {
            valley.offset_ev += ev;
        }
    }
}

/// A cubic lattice: `a(T) = Σ w·(a300 + slope·(T − 300 K))`, linear in composition (Vegard).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lattice {
    /// Lattice constant at 300 K, Å.
    pub a300_angstrom: f64,
    /// da/dT, Å/K.
    pub slope_angstrom_per_k: f64,
}

impl Lattice {
    /// Lattice constant in Å at `temperature_k`.
    pub fn at(self, temperature_k: f64) -> f64 {
        self.a300_angstrom + self.slope_angstrom_per_k * (temperature_k - 300.0)
    }
}

/// Elastic constants, GPa.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Elastic {
    /// C11.
    pub c11_gpa: f64,
    /// C12.
    pub c12_gpa: f64,
    /// C44.
    pub c44_gpa: f64,
}

/// How a number came to be.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum OriginKind {
    /// A measured, published table.
    Measured,
    /// A published law or parameter set.
    Published,
    /// Measured pieces joined to each other or to a law.
    Joined,
    /// A model evaluated here: interpolation, shift of a parent table.
    Model,
    /// A stand-in nobody should design by.
    Estimate,
    /// A digit remembered, not seen.
    Memory,
    /// Stated in the user's file.
    Stated,
}

impl OriginKind {
    /// For tables and JSON.
    pub fn word(self) -> &'static str {
        match self {
            Self::Measured => "measured",
            Self::Published => "published",
            Self::Joined => "joined",
            Self::Model => "model",
            Self::Estimate => "estimate",
            Self::Memory => "from memory",
            Self::Stated => "stated",
        }
    }
}

/// Where one group of numbers of a material comes from.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Origin {
    /// `lattice`, `gap`, `index`, …
    pub what: String,
    /// How it came to be.
    pub kind: OriginKind,
    /// The citation; for `Model` and `Estimate` also what was done.
    pub cite: String,
}

/// What a material is, as far as the checks care.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum MaterialClass {
    /// Has bands; can be an absorber.
    Semiconductor,
    /// Transparent, no carriers: coats, glass, adhesive, air.
    Dielectric,
    /// Transparent conductor or contact layer.
    Contact,
    /// Metal.
    Metal,
    /// `ideal` and `direct`: a gap without a chemistry.
    GapModel,
}

/// One material at one composition.
#[derive(Clone, Debug, PartialEq)]
pub struct Material {
    /// As shown: `Ga0.516In0.484P`, `MgF2`, `ideal 1.42 eV`.
    pub label: String,
    /// The library name or family: `GaInP`, `MgF2`, `ideal`.
    pub name: String,
    /// What it is.
    pub class: MaterialClass,
    /// The family it is a composition of; `None` for compounds and models.
    pub family: Option<Arc<alloy::Family>>,
    /// Fraction of each element of its sublattice, in the order of the label. Empty for models
    /// and for compounds without a free composition.
    pub composition: Vec<(String, f64)>,
    /// `None` where there is no crystal to match.
    pub lattice: Option<Lattice>,
    /// `None` where there are no bands.
    pub bands: Option<Bands>,
    /// `None` where nobody said.
    pub elastic: Option<Elastic>,
    /// Density, g/cm3, where known.
    pub density_g_per_cm3: Option<f64>,
    /// Masses, split-off energy, deformation potentials, permittivity, … as far as stated.
    pub constants: Constants,
    /// Mobility, lifetimes, recombination, doping limits, damage, as far as known.
    pub carriers: Carriers,
    /// Refractive index, and what is absorbed.
    pub optics: Optics,
    /// Where its numbers come from, one entry a group.
    pub origins: Vec<Origin>,
    /// Caution classes: `arsenic`, `phosphorus`, `hydride`, `lead`, `cadmium`, `beryllium`, …
    pub cautions: Vec<String>,
}

impl Material {
    /// A material of which nothing is known yet.
    pub fn bare(name: &str, class: MaterialClass) -> Self {
        Self {
            label: name.to_owned(),
            name: name.to_owned(),
            class,
            family: None,
            composition: Vec::new(),
            lattice: None,
            bands: None,
            elastic: None,
            density_g_per_cm3: None,
            constants: Constants::default(),
            carriers: Carriers::default(),
            optics: Optics::None,
            origins: Vec::new(),
            cautions: Vec::new(),
        }
    }

    /// A limit-study material: nothing absorbed below `gap_ev`, the share `absorbs` above it. The
    /// gap stays put with temperature and there is no refractive index.
    pub fn ideal(gap_ev: f64, absorbs: f64) -> Self {
        Self {
            label: format!("ideal {} eV", trim(gap_ev)),
            bands: Some(Bands { gamma: Some(Valley::of(GapLaw::constant(gap_ev))), ..Bands::default() }),
            optics: Optics::Ideal(optics::IdealEdge { gap_ev, absorbs }),
            ..Self::bare("ideal", MaterialClass::GapModel)
        }
    }

    /// A direct edge without a chemistry. The gap stays put with temperature.
    pub fn direct(edge: optics::DirectEdge) -> Self {
        Self {
            label: format!("direct {} eV", trim(edge.gap_ev)),
            bands: Some(Bands { gamma: Some(Valley::of(GapLaw::constant(edge.gap_ev))), ..Bands::default() }),
            optics: Optics::Direct(edge),
            ..Self::bare("direct", MaterialClass::GapModel)
        }
    }

    /// The lowest gap at `temperature_k`, if it has bands.
    pub fn gap(&self, temperature_k: f64) -> Option<Gap> {
        self.bands.as_ref().and_then(|bands| bands.gap(temperature_k))
    }

    /// Lattice constant in Å at `temperature_k`, if it has a lattice.
    pub fn lattice_constant(&self, temperature_k: f64) -> Option<f64> {
        self.lattice.map(|lattice| lattice.at(temperature_k))
    }

    /// Absorption coefficient in 1/m at a vacuum wavelength in m; 0 where there is no optical
    /// data. `ideal` materials have none either: ask [`Optics::share_absorbed`].
    ///
    /// For many wavelengths at one temperature take [`Material::edge_shift_ev`] once and ask
    /// [`Material::optics`] directly.
    pub fn absorption(&self, wavelength_m: f64, temperature_k: f64) -> f64 {
        self.optics.absorption(wavelength_m, self.edge_shift_ev(temperature_k))
    }

    /// Complex refractive index `(n, k)` at a vacuum wavelength in m, `None` without data.
    pub fn index(&self, wavelength_m: f64, temperature_k: f64) -> Option<(f64, f64)> {
        self.optics.index(wavelength_m, self.edge_shift_ev(temperature_k))
    }

    /// How far the optical edge has to move, eV: the gap in force now less the table's own.
    ///
    /// 0 for tables without an edge and for the gap models, whose gap stays put.
    pub fn edge_shift_ev(&self, temperature_k: f64) -> f64 {
        let (Optics::Table(table), Some(bands)) = (&self.optics, &self.bands) else { return 0.0 };
        let Some(own) = table.gap_ev else { return 0.0 };
        // The direct edge is what a table shows, also where the lowest valley is indirect by a
        // little: the whole table moves with the valley it was measured at.
        let direct = bands.gamma.as_ref().filter(|_| table.edge_is_direct);
        let now = direct
            .map(|gamma| gamma.at(temperature_k))
            .or_else(|| bands.gap(temperature_k).map(|gap| gap.ev));
        now.map_or(0.0, |now| now - own)
    }
}

/// A number for a label: at most three decimals, no trailing zeros.
pub(crate) fn trim(value: f64) -> String {
    let text = format!("{value:.3}");
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// Materials are shared between the layers that use them.
pub type SharedMaterial = Arc<Material>;
