//! Where the layers stand among the materials: gap against mismatch, and band edges.

use serde::Serialize;

/// Band edges through the stack, in the dark, without bias.
#[derive(Clone, Debug, Serialize)]
pub struct BandDiagram {
    /// `equilibrium`: bent by doping, energies over the Fermi level; `flat_band`: unbent, energies
    /// over the vacuum level, where a layer lacks densities of states or a permittivity.
    pub model: String,
    /// 25 °C.
    pub temperature_k: f64,
    /// Semiconductor layers that have a gap and an affinity, sunward first.
    pub layers: Vec<BandLayer>,
    /// Steps at the faces of layers that collect.
    pub steps: Vec<BandStep>,
}

/// Band edges through one layer.
#[derive(Clone, Debug, Serialize)]
pub struct BandLayer {
    /// Path.
    pub name: String,
    /// From its sunward face to the other.
    pub depth_nm: Vec<f64>,
    /// Conduction edge.
    pub conduction_ev: Vec<f64>,
    /// Valence edge.
    pub valence_ev: Vec<f64>,
}

/// What one kind of carrier meets on its way out of a layer that collects.
#[derive(Clone, Debug, Serialize)]
pub struct BandStep {
    /// Path of the layer that collects.
    pub from: String,
    /// Path of its neighbour.
    pub to: String,
    /// `electrons`, `holes`
    pub carrier: String,
    /// How much energy the step takes; negative where the way is downhill.
    pub barrier_ev: f64,
    /// Whether these are the carriers to be kept in here: the neighbour carries the others off.
    pub keeps_in: bool,
}

/// Gap against mismatch to the wafer, at 25 °C.
#[derive(Clone, Debug, Serialize)]
pub struct GapMap {
    /// The wafer's material.
    pub wafer: String,
    /// Its lattice, where the mismatch is 0.
    pub lattice_constant_angstrom: f64,
    /// The ternaries around each family that a layer is taken from.
    pub families: Vec<FamilyCurve>,
    /// Where they end.
    pub compounds: Vec<EndMember>,
    /// Layers grown on the wafer that have a gap and a lattice, sunward first.
    pub layers: Vec<GapMark>,
}

/// A ternary from one end to the other.
#[derive(Clone, Debug, Serialize)]
pub struct FamilyCurve {
    /// `GaInP`
    pub name: String,
    /// Relaxed, against the wafer.
    pub mismatch: Vec<f64>,
    /// The lowest.
    pub gap_ev: Vec<f64>,
    /// Whether it is direct there.
    pub direct: Vec<bool>,
}

/// Where a ternary ends.
#[derive(Clone, Debug, Serialize)]
pub struct EndMember {
    /// `GaP`
    pub name: String,
    /// Relaxed, against the wafer.
    pub mismatch: f64,
    /// The lowest.
    pub gap_ev: f64,
}

/// A layer on the map.
#[derive(Clone, Debug, Serialize)]
pub struct GapMark {
    /// Path.
    pub name: String,
    /// Relaxed, against the wafer.
    pub mismatch: f64,
    /// The lowest, unstrained.
    pub gap_ev: f64,
    /// The size of the mismatch at which a layer of its thickness would begin to relax, by
    /// balance of forces; `None` where it does not lie on the wafer's lattice.
    pub critical_mismatch: Option<f64>,
}
