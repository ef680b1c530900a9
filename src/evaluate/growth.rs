//! The growth record as figures.

use crate::design::Design;
use crate::growth::lattice_states;
use crate::growth::record::{Grown, record};
use crate::results::{GrowthResult, GrowthStep};

/// The layers as they grow; `None` where there is nothing to grow on or nothing to compare.
pub(super) fn growth_result(design: &Design) -> Option<GrowthResult> {
    let record = record(design, &lattice_states(design));
    (!record.steps.is_empty()).then(|| GrowthResult {
        steps: record.steps.iter().map(|grown| step(design, grown)).collect(),
        force_n_per_m: record.force_n_per_m,
        bow_um_over_100_mm: record.bow_m.map(|bow| bow * 1e6),
        crack_energy_j_per_m2: record.crack_energy_j_per_m2,
    })
}

fn step(design: &Design, grown: &Grown) -> GrowthStep {
    let nanometres = |metres: f64| metres * 1e9;
    GrowthStep {
        layer: design.layers[grown.layer].path.clone(),
        grown_nm: nanometres(grown.grown_m),
        temperature_k: grown.state.growth_temperature_k,
        mismatch_at_growth: grown.state.mismatch_at_growth,
        strain: grown.strain,
        stress_gpa: grown.stress_gpa,
        strain_thickness_nm: nanometres(grown.strain_thickness_m),
        critical_thickness_nm: grown.critical.and_then(|it| it.safe_m).map(nanometres),
        critical_thickness_upper_nm: grown.critical.and_then(|it| it.hopeless_m).map(nanometres),
    }
}
