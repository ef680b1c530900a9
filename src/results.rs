//! What came out: plain data with units in the field names; all that a report may read.
//!
//! Conventions of the numbers file: names are snake case with their unit at the end, fractions
//! are plain (0.291), current is positive when the cell delivers power. Keys keep their meaning
//! once shipped; new ones may be added.

use std::collections::BTreeMap;

use serde::Serialize;

mod growth;

pub use growth::{CoatResult, GrowthResult, GrowthStep};

mod asked;
mod electrical;
mod maps;

pub use asked::{ChartAxisResult, ChartResult, MeasuredResult, SeasonResult, SeasonRowResult};
pub use electrical::{GridResult, JunctionTemperature, TemperatureCoefficients, TunnelResult};
pub use maps::{BandDiagram, BandLayer, BandStep, EndMember, FamilyCurve, GapMap, GapMark};

/// Version of the numbers file.
pub const SCHEMA_VERSION: u32 = 1;

/// All numbers of one stack.
#[derive(Clone, Debug, Serialize)]
pub struct Results {
    /// [`SCHEMA_VERSION`].
    pub schema_version: u32,
    /// `bandloom 0.1.0`
    pub tool: String,
    /// The stack's name.
    pub stack: String,
    /// SHA-256 of the resolved design, hexadecimal.
    pub design_hash: String,
    /// The file: as given, or its name where an absolute path was given.
    pub source: String,
    /// In the order of the design.
    pub conditions: Vec<ConditionResult>,
    /// Sunward first; every layer, also removed ones.
    pub layers: Vec<LayerResult>,
    /// The layers as they grow; `None` without a wafer or a lattice.
    pub growth: Option<GrowthResult>,
    /// Band edges in the dark without bias; `None` where no layer has a gap and an affinity.
    pub bands: Option<BandDiagram>,
    /// Gaps and lattices of the layers beside the families they are taken from, at 25 °C; `None`
    /// without a wafer that has a lattice.
    pub gap_map: Option<GapMap>,
    /// Each coat over the first junction against its best thickness; empty without wave optics.
    pub coats: Vec<CoatResult>,
    /// One per requirement and condition it holds for.
    pub requirements: Vec<RequirementResult>,
    /// In the order of the design.
    pub free_values: Vec<FreeValueResult>,
    /// Empty until sensitivities are evaluated.
    pub sensitivities: Vec<Sensitivity>,
    /// Weighted conditions and their energy; `None` where none are given.
    pub season: Option<SeasonResult>,
    /// In the order of the design; one per condition each holds for.
    pub charts: Vec<ChartResult>,
    /// Measurements beside the prediction, in the order of the design.
    pub measured: Vec<MeasuredResult>,
    /// Models used, with their blind spots, for the sheet.
    pub models: Vec<ModelNote>,
}

/// One condition.
#[derive(Clone, Debug, Default, Serialize)]
pub struct ConditionResult {
    /// Its name.
    pub name: String,
    /// The light's name.
    pub light: String,
    /// What efficiency divides by.
    pub incident_w_per_m2: f64,
    /// Cell temperature.
    pub temperature_k: f64,
    /// Multiple of the light given.
    pub concentration: f64,
    /// Power out over power in.
    pub efficiency: f64,
    /// At the maximum power point (sum over junctions for separate terminals).
    pub power_w_per_m2: f64,
    /// `None` with separate terminals.
    pub voc_v: Option<f64>,
    /// `None` with separate terminals.
    pub jsc_ma_per_cm2: Option<f64>,
    /// `None` with separate terminals.
    pub fill_factor: Option<f64>,
    /// `None` with separate terminals.
    pub vmp_v: Option<f64>,
    /// `None` with separate terminals.
    pub jmp_ma_per_cm2: Option<f64>,
    /// The junction with the smallest photocurrent; `None` for one junction or separate terminals.
    pub limiting_junction: Option<String>,
    /// (max − min)/min of the photocurrents; `None` for one junction.
    pub current_mismatch: Option<f64>,
    /// Power over that of the same condition without its particles; `None` without a fluence.
    pub remaining_factor: Option<f64>,
    /// Photon current reflected at the front, over the spectral range of the junctions.
    pub reflected_ma_per_cm2: f64,
    /// Sunward first.
    pub junctions: Vec<JunctionResult>,
    /// Photon current absorbed per layer of [`Results::layers`], same order.
    pub layers: Vec<LayerLight>,
    /// By how much the terminal voltage and the sum of its parts disagree at short circuit and at
    /// the maximum power point, the larger of both and of all strings: how far the solver got.
    pub curve_residual_v: f64,
    /// What joins the junctions, sunward first.
    pub tunnels: Vec<TunnelResult>,
    /// The front grid at this temperature; `None` without one.
    pub grid: Option<GridResult>,
    /// What a kelvin more does; `None` for a cell so cold that the step leads nowhere.
    pub temperature_coefficients: Option<TemperatureCoefficients>,
    /// In the account's order; the values sum to `incident_w_per_m2`.
    pub ledger_w_per_m2: Vec<LedgerLine>,
    /// Against wavelength.
    pub spectral: Spectral,
    /// The stack under light.
    pub curve: Curve,
    /// Without light, driven forward: each junction and the stack at the same currents, which are
    /// negative. `voltage_v` is empty with separate terminals.
    pub dark_curve: Curve,
    /// Each junction by itself under its own photocurrent, sunward first.
    pub junction_curves: Vec<JunctionCurve>,
}

/// One junction under one condition.
#[derive(Clone, Debug, Default, Serialize)]
pub struct JunctionResult {
    /// Its name.
    pub name: String,
    /// At the condition's temperature.
    pub gap_ev: f64,
    /// Collected photons, at zero bias, coupling left out.
    pub photocurrent_ma_per_cm2: f64,
    /// By itself.
    pub jsc_ma_per_cm2: f64,
    /// By itself.
    pub voc_v: f64,
    /// By itself.
    pub fill_factor: f64,
    /// By itself, at its own maximum power point.
    pub power_w_per_m2: f64,
    /// At the stack's maximum power point (its own with separate terminals).
    pub voltage_at_mpp_v: f64,
    /// At the stack's short circuit, negative where the others drive it backwards (0 with
    /// terminals of its own).
    pub voltage_at_short_circuit_v: f64,
    /// Made at the stack's maximum power point out of light from the junctions above; part of
    /// neither `photocurrent_ma_per_cm2` nor `current_mismatch`.
    pub coupled_ma_per_cm2: f64,
    /// Radiative recombination current prefactor: what leaves through the front and, with a voltage
    /// from layers, what goes down and does not come back.
    pub dark_current_radiative_a_per_cm2: f64,
    /// Prefactor of slope kT/q of emitter and base, radiation left out; `None` where carriers are
    /// not followed.
    pub dark_current_diffusion_a_per_cm2: Option<f64>,
    /// Prefactor of slope 2kT/q of the depleted layers; `None` where carriers are not followed.
    pub dark_current_depletion_a_per_cm2: Option<f64>,
    /// At zero bias; `None` where carriers are not followed.
    pub depletion_width_nm: Option<f64>,
    /// Collected over absorbed in the layers it collects from; `None` where carriers are not
    /// followed and all is taken as collected.
    pub collection_efficiency: Option<f64>,
}

/// Light and one layer under one condition.
#[derive(Clone, Debug, Serialize)]
pub struct LayerLight {
    /// Path of the layer.
    pub name: String,
    /// Photon current absorbed in it.
    pub absorbed_ma_per_cm2: f64,
    /// The part of it that is collected.
    pub collected_ma_per_cm2: f64,
}

/// One line of the ledger.
#[derive(Clone, Debug, Serialize)]
pub struct LedgerLine {
    /// `fingers`, `reflected`, `absorbed`, `passing`, `beyond_data`, `heat`, `tail`, `coupling`,
    /// `not_collected`, `mismatch`, `recombined`, `voltage`, `tunnel`, `series`, `delivered`.
    pub line: String,
    /// The junction it belongs to, if one.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub junction: Option<String>,
    /// The layer it belongs to, if one.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub layer: Option<String>,
    /// W/m2.
    pub value: f64,
}

/// Spectral results on one wavelength grid.
#[derive(Clone, Debug, Default, Serialize)]
pub struct Spectral {
    /// Ascending.
    pub wavelength_nm: Vec<f64>,
    /// Incident photon current per nm before shading, mA/cm2/nm.
    pub photon_current_ma_per_cm2_per_nm: Vec<f64>,
    /// Share reflected.
    pub reflectance: Vec<f64>,
    /// External quantum efficiency by junction (finger shading left out).
    pub eqe: BTreeMap<String, Vec<f64>>,
    /// Internal quantum efficiency by junction: electrons out per photon absorbed in the layers the
    /// junction collects from, which is the external one over 1 less what is reflected, what passes
    /// and what all other layers absorb. 0 where less than a millionth is absorbed.
    pub iqe: BTreeMap<String, Vec<f64>>,
    /// Share absorbed by layer path; only layers that absorb anything.
    pub absorptance: BTreeMap<String, Vec<f64>>,
}

/// A current–voltage curve.
#[derive(Clone, Debug, Default, Serialize)]
pub struct Curve {
    /// Terminal voltage, ascending.
    pub voltage_v: Vec<f64>,
    /// Current, positive when delivering.
    pub current_ma_per_cm2: Vec<f64>,
    /// Each junction's share of the voltage at the same current.
    pub junction_voltage_v: BTreeMap<String, Vec<f64>>,
}

/// One junction's own curve.
#[derive(Clone, Debug, Serialize)]
pub struct JunctionCurve {
    /// Its name.
    pub name: String,
    /// Ascending.
    pub voltage_v: Vec<f64>,
    /// Positive when delivering.
    pub current_ma_per_cm2: Vec<f64>,
}

/// One layer as resolved.
#[derive(Clone, Debug, Serialize)]
pub struct LayerResult {
    /// Path.
    pub name: String,
    /// `window`, `base`, …
    pub duty: String,
    /// The junction it belongs to, if any.
    pub junction: Option<String>,
    /// The material as resolved.
    pub material: String,
    /// Fraction of each element of its sublattice.
    pub composition: BTreeMap<String, f64>,
    /// `None` where none applies.
    pub thickness_nm: Option<f64>,
    /// `± 3 % sigma` as written.
    pub tolerance: Option<String>,
    /// At 25 °C.
    pub gap_ev: Option<f64>,
    /// `direct`, `indirect (X)`, `indirect (L)`
    pub gap_kind: Option<String>,
    /// At 25 °C.
    pub lattice_constant_angstrom: Option<f64>,
    /// (a − a_beneath)/a_beneath at 25 °C, relaxed; `None` without lattices.
    pub mismatch: Option<f64>,
    /// In-plane strain, 0 where relaxed; `None` without lattices.
    pub strain: Option<f64>,
    /// `n` or `p`.
    pub polarity: Option<String>,
    /// Doping density.
    pub doping_per_cm3: Option<f64>,
    /// Dopant.
    pub species: Option<String>,
    /// `everywhere`, `under fingers`, `removed`
    pub extent: String,
    /// Minority carriers at 25 °C at the beginning of life, where they are followed.
    pub transport: Option<LayerTransport>,
    /// Where its numbers come from.
    pub origins: Vec<OriginResult>,
}

/// Minority carriers of one layer.
#[derive(Clone, Debug, Serialize)]
pub struct LayerTransport {
    /// `electron` or `hole`; in an undoped layer the one with less reach.
    pub minority_carrier: String,
    /// Drift mobility.
    pub mobility_cm2_per_vs: f64,
    /// All recombination.
    pub lifetime_ns: f64,
    /// All recombination but the radiative.
    pub non_radiative_lifetime_ns: f64,
    /// By which carriers are collected.
    pub diffusion_length_um: f64,
    /// Where they come from: `mobility material, lifetime stated, diffusion length derived`.
    pub origin: String,
}

/// Where a number comes from.
#[derive(Clone, Debug, Serialize)]
pub struct OriginResult {
    /// `gap`, `index`, …
    pub what: String,
    /// `measured`, `model`, …
    pub kind: String,
    /// The citation.
    pub cite: String,
}

/// One requirement under one condition.
#[derive(Clone, Debug, Serialize)]
pub struct RequirementResult {
    /// As written.
    pub text: String,
    /// The condition; `None` where the metric has none (`top.gap`).
    pub condition: Option<String>,
    /// In the unit of `unit`.
    pub value: f64,
    /// In the unit of `unit`.
    pub bound: f64,
    /// Unit of both, `1` for plain fractions.
    pub unit: String,
    /// Whether it holds.
    pub met: bool,
    /// By how much it holds (negative: fails), same unit.
    pub margin: f64,
}

/// One free value.
#[derive(Clone, Debug, Serialize)]
pub struct FreeValueResult {
    /// Path.
    pub path: String,
    /// SI bounds.
    pub range: [f64; 2],
    /// SI value in force.
    pub value: Option<f64>,
    /// Whether it has one.
    pub settled: bool,
}

/// Derivative of a figure.
#[derive(Clone, Debug, Serialize)]
pub struct Sensitivity {
    /// `noon.efficiency`
    pub figure: String,
    /// `top.base.thickness`
    pub path: String,
    /// d figure / d path.
    pub derivative: f64,
    /// `1/nm`
    pub unit: String,
}

/// A model that was used, and what it does not see.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct ModelNote {
    /// `optics one_pass`
    pub name: String,
    /// What it does, one sentence.
    pub does: String,
    /// What it does not see, one sentence.
    pub blind_to: String,
    /// The publication; empty where the model is arithmetic on what the file or the tables state.
    pub cite: String,
}
