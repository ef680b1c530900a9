//! What a stack asks for beside its conditions: seasons, charts, measurements.

use serde::Serialize;

/// A set of weighted conditions.
#[derive(Clone, Debug, Default, Serialize)]
pub struct SeasonResult {
    /// The table, as named.
    pub file: String,
    /// The condition the rows start from.
    pub condition: String,
    /// Together.
    pub hours: f64,
    /// Light received over them.
    pub incident_kwh_per_m2: f64,
    /// Delivered over them.
    pub energy_kwh_per_m2: f64,
    /// Energy over light.
    pub efficiency: f64,
    /// `efficiency` over that of the condition the rows start from.
    pub harvest_ratio: f64,
    /// In the order of the table.
    pub rows: Vec<SeasonRowResult>,
}

/// One row of it.
#[derive(Clone, Debug, Default, Serialize)]
pub struct SeasonRowResult {
    /// Its weight.
    pub hours: f64,
    /// The light's name.
    pub light: String,
    /// Cell temperature.
    pub temperature_k: f64,
    /// Multiple of the light given.
    pub concentration: f64,
    /// Received.
    pub incident_w_per_m2: f64,
    /// At the maximum power point.
    pub power_w_per_m2: f64,
}

/// A figure against one or two quantities.
#[derive(Clone, Debug, Default, Serialize)]
pub struct ChartResult {
    /// As written.
    pub text: String,
    /// Dotted path.
    pub metric: String,
    /// Of the values; `1` for plain fractions.
    pub unit: String,
    /// The condition it starts from.
    pub condition: String,
    /// One or two.
    pub axes: Vec<ChartAxisResult>,
    /// One per point of the axes, the last axis fastest; `None` where the figure has no value.
    pub values: Vec<Option<f64>>,
}

/// One axis of a chart.
#[derive(Clone, Debug, Default, Serialize)]
pub struct ChartAxisResult {
    /// `temperature`, `concentration`, `top.base.thickness`
    pub path: String,
    /// Of the values.
    pub unit: String,
    /// Ascending as written; evenly in the logarithm for a concentration over a decade or more.
    pub values: Vec<f64>,
}

/// One measurement beside the prediction.
#[derive(Clone, Debug, Default, Serialize)]
pub struct MeasuredResult {
    /// `eqe` or `jv`
    pub kind: String,
    /// The table, as named.
    pub file: String,
    /// `None` for the whole stack.
    pub junction: Option<String>,
    /// What it is laid over.
    pub condition: String,
    /// Wavelength in nm, or voltage in V, as measured.
    pub at: Vec<f64>,
    /// Quantum efficiency (plain), or current in mA/cm2.
    pub measured: Vec<f64>,
    /// The same of the model, at the same places.
    pub predicted: Vec<f64>,
    /// Root of the mean square of measured less predicted.
    pub rms: f64,
    /// Mean of measured less predicted.
    pub bias: f64,
    /// Current under the condition's light from the measured quantum efficiency, fingers shading as
    /// in the stack; at no voltage for a curve.
    pub measured_jsc_ma_per_cm2: Option<f64>,
    /// The same of the model, over the wavelengths measured.
    pub predicted_jsc_ma_per_cm2: Option<f64>,
    /// Of a measured curve that reaches it.
    pub measured_voc_v: Option<f64>,
    /// Greatest power of a measured curve.
    pub measured_power_w_per_m2: Option<f64>,
    /// IEC 60904-7: of the condition's light against AM1.5G, with the response of the reference
    /// device stated, else of the model, and the measured one as the device under test.
    pub spectral_mismatch_factor: Option<f64>,
}
