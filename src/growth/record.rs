//! The stack as it grows: thickness so far, strain, stress, and what it does to the wafer.
//!
//! In-plane strains are positive in tension. A layer said to be relaxed, and one beyond People and
//! Bean's critical thickness, keeps no strain of growth; everything keeps the thermal strain of
//! cooling down with the wafer from its growth temperature, as far as one is stated.

use crate::design::{Design, Strain};
use crate::growth::bow::{BOW_DIAMETER_M, bow_m, crack_energy_j_per_m2, stoney_curvature_per_m};
use crate::growth::critical::Critical;
use crate::growth::{LayerGrowth, biaxial_stress_gpa, in_plane_strain, order, wafer};

/// One grown layer with a lattice.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Grown {
    /// Index in [`Design::layers`].
    pub layer: usize,
    /// Everything grown when it is finished, m, the wafer left out.
    pub grown_m: f64,
    /// How it sits on the lattice beneath.
    pub state: LayerGrowth,
    /// How thick it may be; `None` for layers that fit exactly.
    pub critical: Option<Critical>,
    /// In-plane strain at 25 °C with what cooling adds.
    pub strain: f64,
    /// Stress at 25 °C, GPa, positive in tension, `None` without elastic constants.
    pub stress_gpa: Option<f64>,
    /// Net Σ f·h of the coherent layers since the last relaxed one, m.
    pub strain_thickness_m: f64,
}

/// The whole of it.
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Record {
    /// In growth order, the wafer left out.
    pub steps: Vec<Grown>,
    /// Force per length of all layers on the wafer at 25 °C, N/m, positive in tension.
    pub force_n_per_m: f64,
    /// Bow over [`BOW_DIAMETER_M`], m, positive where the grown side is hollow; `None` without a
    /// wafer of known thickness and elastic constants.
    pub bow_m: Option<f64>,
    /// What a crack through the layers in tension sets free, J/m2.
    pub crack_energy_j_per_m2: f64,
}

/// The record of `design`; `states` are those of [`lattice_states`](crate::growth::lattice_states).
pub fn record(design: &Design, states: &[Option<LayerGrowth>]) -> Record {
    let mut record = Record::default();
    let ground = wafer(design);
    let (mut grown_m, mut sum) = (0.0, 0.0);
    let mut films = Vec::new();
    for index in order(design) {
        if Some(index) == ground {
            continue;
        }
        let layer = &design.layers[index];
        let thickness = layer.thickness_m.unwrap_or(0.0);
        grown_m += thickness;
        let Some(state) = states[index] else { continue };
        let critical = Critical::of(design, states, index);
        let relaxed = layer.strain == Strain::Relaxed
            || critical.is_some_and(|it| it.hopeless_m.is_none_or(|most| thickness > most));
        let kept = if relaxed { 0.0 } else { in_plane_strain(state.mismatch_at_growth) };
        let strain = kept + state.thermal_strain;
        let elastic = layer.material.as_ref().and_then(|material| material.elastic);
        let stress_gpa = elastic.map(|elastic| biaxial_stress_gpa(elastic, strain));
        sum = if relaxed { 0.0 } else { sum + state.mismatch_at_growth * thickness };
        record.force_n_per_m += stress_gpa.unwrap_or(0.0) * 1e9 * thickness;
        films.extend(elastic.map(|elastic| (strain, thickness, elastic)));
        record.steps.push(Grown {
            layer: index,
            grown_m,
            state,
            critical,
            strain,
            stress_gpa,
            strain_thickness_m: sum,
        });
    }
    record.crack_energy_j_per_m2 = crack_energy_j_per_m2(films.into_iter());
    record.bow_m = ground.and_then(|at| {
        let layer = &design.layers[at];
        let (elastic, thickness) = (layer.material.as_ref()?.elastic?, layer.thickness_m?);
        Some(bow_m(stoney_curvature_per_m(record.force_n_per_m, elastic, thickness), BOW_DIAMETER_M))
    });
    record
}

#[cfg(test)]
mod tests {
    use std::path::Path;

    use super::*;
    use crate::growth::lattice_states;
    use crate::resolve::{Overrides, resolve};
    use crate::source::Sources;
    use crate::world::memory::Memory;

    fn of(body: &str) -> (Design, Record) {
        let text = format!("stack \"Trial\" {{ light AM1.5G\n{body}\n}}");
        let world = Memory::new().with("trial.stack", text.as_str());
        let mut sources = Sources::default();
        let outcome = resolve(&world, &mut sources, Path::new("trial.stack"), &Overrides::default());
        let design = outcome.value.expect("resolved").remove(0);
        let record = record(&design, &lattice_states(&design));
        (design, record)
    }

    #[test]
    fn a_coherent_layer_pulls_with_its_stress_times_its_thickness() {
        // 5 nm In0.2Ga0.8As on GaAs: σ −1.653 GPa (published constants, worked out outside), so
        // −8.27 N/m; net strain times thickness 1.433 % of 5 nm.
        let (_, record) = of(
            "junction only { base In0.2Ga0.8As 5 nm p 1e17 /cm3; voltage from ere 1 % }\n wafer GaAs 350 um",
        );
        assert_eq!(record.steps.len(), 1);
        assert!((record.force_n_per_m + 8.27).abs() < 0.01, "{}", record.force_n_per_m);
        assert!((record.steps[0].strain_thickness_m - 0.01433 * 5e-9).abs() < 1e-14);
        assert_eq!(record.crack_energy_j_per_m2, 0.0);
        assert!(record.bow_m.is_some_and(|bow| bow < 0.0), "compression bends it round");
    }

    #[test]
    fn a_relaxed_film_keeps_only_what_cooling_adds() {
        // GaAs on Si cooled by 600 K: 0.256 % of tension within 0.02 %, 0.323 GPa, so that 1 um on
        // 525 um bends 49 um over 100 mm; handbook expansions, tests/reference/strain.py.
        let (_, record) = of(
            "junction only { base GaAs 1 um relaxed p 1e17 /cm3 { growth_temperature 625 degC }; voltage from ere 1 % }
             wafer Si 525 um",
        );
        assert!((record.steps[0].strain - 0.002_56).abs() < 2e-4);
        let bow = record.bow_m.expect("known wafer");
        assert!((bow - 48.7e-6).abs() < 4e-6, "{bow}");
    }
}
