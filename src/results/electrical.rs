//! Tunnel junctions, the front grid and temperature under one condition.

use serde::Serialize;

/// A tunnel junction or a recombination contact under one condition.
#[derive(Clone, Debug, Default, Serialize)]
pub struct TunnelResult {
    /// `tunnel1`, or the name given.
    pub name: String,
    /// The most it tunnels, if stated.
    pub peak_ma_per_cm2: Option<f64>,
    /// What would flow at the maximum power point if it carried any current; 0 where no string
    /// crosses it.
    pub demanded_ma_per_cm2: f64,
    /// Lost over it at the stack's maximum power point.
    pub voltage_at_mpp_v: f64,
    /// Whether it works beyond its peak, on the way over its barrier.
    pub beyond_peak: bool,
}

/// The front grid under one condition.
#[derive(Clone, Debug, Default, Serialize)]
pub struct GridResult {
    /// Share of the area covered.
    pub shading: f64,
    /// All of the front in series with the cell.
    pub series_resistance_ohm_cm2: f64,
    /// The part of the current's way to the fingers through the front layers; `None` where the
    /// whole is stated.
    pub lateral_ohm_cm2: Option<f64>,
    /// The part under the fingers; `None` where the whole is stated.
    pub contact_ohm_cm2: Option<f64>,
    /// The part along the fingers; `None` where the whole is stated.
    pub metal_ohm_cm2: Option<f64>,
    /// Of the front layers together; `None` where the whole is stated.
    pub sheet_ohm_per_square: Option<f64>,
}

/// Change per kelvin of cell temperature, the light kept: central differences.
#[derive(Clone, Debug, Default, Serialize)]
pub struct TemperatureCoefficients {
    /// Evaluated at this much above and below.
    pub step_k: f64,
    /// `None` with separate terminals.
    pub voc_mv_per_k: Option<f64>,
    /// Of `voc_v`; `None` with separate terminals.
    pub voc_relative_per_k: Option<f64>,
    /// `None` with separate terminals.
    pub jsc_ma_per_cm2_per_k: Option<f64>,
    /// Of `jsc_ma_per_cm2`; `None` with separate terminals.
    pub jsc_relative_per_k: Option<f64>,
    /// `None` with separate terminals.
    pub fill_factor_per_k: Option<f64>,
    /// Plain fraction: −0.0005 is −0.05 points.
    pub efficiency_per_k: f64,
    /// Of `efficiency`.
    pub efficiency_relative_per_k: f64,
    /// Sunward first, each by itself.
    pub junctions: Vec<JunctionTemperature>,
}

/// One junction by itself, per kelvin.
#[derive(Clone, Debug, Default, Serialize)]
pub struct JunctionTemperature {
    /// Its name.
    pub name: String,
    /// Its gap.
    pub gap_mev_per_k: f64,
    /// Its open-circuit voltage.
    pub voc_mv_per_k: f64,
    /// Its photocurrent.
    pub photocurrent_ma_per_cm2_per_k: f64,
}
