//! Growth: which layer is grown on which, how far its lattice is off, and what strain that costs.
//!
//! Sign conventions: mismatch `f = (a_layer − a_beneath)/a_beneath` is positive for a layer that
//! is too large; in-plane strain `ε∥ = a_beneath/a_layer − 1` is then negative (compressed).

use crate::design::{Design, Duty, Growth, Layer, Strain, ZERO_CELSIUS_K};
use crate::materials::{Elastic, Material};

pub mod accumulated;
pub mod balance;
pub mod bow;
pub mod critical;
pub mod record;

/// Room temperature of the sheet, 25 °C, in K.
pub const ROOM_K: f64 = ZERO_CELSIUS_K + 25.0;

/// How one layer sits on the lattice beneath it in growth order.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LayerGrowth {
    /// Index in [`Design::layers`] of the layer whose relaxed lattice lies beneath: the wafer, or
    /// the last relaxed layer grown before. `None` for the wafer itself.
    pub beneath: Option<usize>,
    /// Stated growth temperature, else room temperature, K.
    pub growth_temperature_k: f64,
    /// Relaxed mismatch at 25 °C, a plain fraction.
    pub mismatch: f64,
    /// Relaxed mismatch at [`LayerGrowth::growth_temperature_k`], a plain fraction.
    pub mismatch_at_growth: f64,
    /// In-plane strain that cooling from the growth temperature to 25 °C adds, positive in
    /// tension: the layer follows the wafer, which is far thicker. 0 where no temperature is stated.
    pub thermal_strain: f64,
    /// In-plane strain at 25 °C of a layer that keeps the lattice beneath; 0 where the layer is
    /// said to be relaxed. A layer beyond its critical thickness that says nothing is still
    /// counted as strained: how far it relaxes by itself is not predicted.
    pub strain: f64,
    /// Out-of-plane strain, `None` without elastic constants.
    pub perpendicular_strain: Option<f64>,
    /// Biaxial in-plane stress, GPa, positive in tension, `None` without elastic constants.
    pub stress_gpa: Option<f64>,
}

/// Where the layers of a design are grown from.
pub fn wafer(design: &Design) -> Option<usize> {
    design.layers.iter().position(|layer| layer.duty == Duty::Wafer)
}

/// Indices of the grown layers in growth order, the wafer first where there is one.
///
/// Upright: from the wafer towards the sun. Inverted: from the sunward side down; the wafer is
/// where growth starts wherever it is written. What is bonded, glued, coated or evaporated
/// afterwards is left out, and so is the far side of an upright wafer.
pub fn order(design: &Design) -> Vec<usize> {
    let wafer = wafer(design);
    let grown = |&index: &usize| Some(index) != wafer && is_grown(&design.layers[index]);
    let all = 0..design.layers.len();
    let upper: Vec<usize> = match design.growth {
        Growth::Upright => all.rev().filter(grown).filter(|&index| wafer.is_none_or(|w| index < w)).collect(),
        Growth::Inverted => all.filter(grown).collect(),
    };
    wafer.into_iter().chain(upper).collect()
}

fn is_grown(layer: &Layer) -> bool {
    !matches!(
        layer.duty,
        Duty::Cover | Duty::Adhesive | Duty::Air | Duty::Coat | Duty::Handle | Duty::Mirror | Duty::Metal
    )
}

/// The lattice state of every layer of [`Design::layers`], same order.
///
/// `None` where there is nothing to compare: no wafer, no crystal, not grown, or a material that
/// could not be resolved (layers above it are then compared with the lattice further down).
pub fn lattice_states(design: &Design) -> Vec<Option<LayerGrowth>> {
    let mut states = vec![None; design.layers.len()];
    if wafer(design).is_none() {
        return states;
    }
    let wafer = wafer(design).and_then(|at| design.layers[at].material.as_deref());
    let mut beneath: Option<usize> = None;
    for index in order(design) {
        let layer = &design.layers[index];
        let has_lattice = layer.material.as_ref().is_some_and(|material| material.lattice.is_some());
        if !has_lattice {
            if beneath.is_none() {
                // The wafer's own lattice is unknown: nothing above can be judged.
                return states;
            }
            continue;
        }
        states[index] = lattice_state(layer, beneath.map(|at| (at, &design.layers[at])));
        if let (Some(state), Some(material), Some(wafer)) = (&mut states[index], &layer.material, wafer) {
            state.thermal_strain = thermal_strain(material, wafer, state.growth_temperature_k);
        }
        if beneath.is_none() || layer.strain == Strain::Relaxed {
            beneath = Some(index);
        }
    }
    states
}

/// The state of `layer` on the relaxed lattice of the layer given with its index; without one the
/// layer is the ground everything stands on.
fn lattice_state(layer: &Layer, beneath: Option<(usize, &Layer)>) -> Option<LayerGrowth> {
    let material = layer.material.as_ref()?;
    let ground = beneath.map_or(Some(material), |(_, beneath)| beneath.material.as_ref())?;
    let growth_temperature_k = layer.growth_temperature_k.unwrap_or(ROOM_K);
    let mismatch_at = |temperature_k: f64| -> Option<f64> {
        let own = material.lattice_constant(temperature_k)?;
        let below = ground.lattice_constant(temperature_k)?;
        Some(own / below - 1.0).filter(|mismatch| mismatch.is_finite())
    };
    let mismatch = mismatch_at(ROOM_K)?;
    let strain = if layer.strain == Strain::Relaxed { 0.0 } else { in_plane_strain(mismatch) };
    Some(LayerGrowth {
        beneath: beneath.map(|(at, _)| at),
        growth_temperature_k,
        mismatch,
        mismatch_at_growth: mismatch_at(growth_temperature_k)?,
        thermal_strain: 0.0,
        strain,
        perpendicular_strain: material.elastic.map(|elastic| perpendicular_strain(elastic, strain)),
        stress_gpa: material.elastic.map(|elastic| biaxial_stress_gpa(elastic, strain)),
    })
}

/// In-plane strain of a film that is free of stress at `from_k` and follows `wafer` down to 25 °C;
/// 0 without the lattice of either.
fn thermal_strain(film: &Material, wafer: &Material, from_k: f64) -> f64 {
    let shrinks =
        |material: &Material| Some(material.lattice_constant(ROOM_K)? / material.lattice_constant(from_k)?);
    shrinks(wafer).zip(shrinks(film)).map_or(0.0, |(wafer, film)| wafer / film - 1.0)
}

/// In-plane strain of a coherent layer of relaxed mismatch `f`: `ε∥ = 1/(1 + f) − 1`.
pub fn in_plane_strain(mismatch: f64) -> f64 {
    -mismatch / (1.0 + mismatch)
}

/// Out-of-plane strain of a (001) layer free to relax along its normal: `ε⊥ = −2 (C12/C11) ε∥`
/// (Van de Walle, Phys. Rev. B 39, 1871 (1989)).
pub fn perpendicular_strain(elastic: Elastic, in_plane: f64) -> f64 {
    -2.0 * elastic.c12_gpa / elastic.c11_gpa * in_plane
}

/// Biaxial stress in GPa of a (001) layer, positive in tension:
/// `σ = (C11 + C12 − 2 C12²/C11) ε∥`.
pub fn biaxial_stress_gpa(elastic: Elastic, in_plane: f64) -> f64 {
    balance::biaxial_modulus_gpa(elastic) * in_plane
}

/// Poisson ratio of a (001) film, `ν = C12/(C11 + C12)`.
pub fn poisson_ratio(elastic: Elastic) -> f64 {
    elastic.c12_gpa / (elastic.c11_gpa + elastic.c12_gpa)
}

#[cfg(test)]
mod tests {
    use std::path::Path;

    use super::*;
    use crate::resolve::{Overrides, resolve};
    use crate::source::Sources;
    use crate::world::memory::Memory;

    /// Vurgaftman, Meyer and Ram-Mohan, J. Appl. Phys. 89, 5815 (2001): GaAs 5.65325 Å,
    /// C11 122.1, C12 56.6; InAs 6.0583 Å, C11 83.29, C12 45.26 GPa; linear in composition.
    fn in20_ga80_as() -> (f64, Elastic) {
        let mix = |gaas: f64, inas: f64| 0.8 * gaas + 0.2 * inas;
        let elastic =
            Elastic { c11_gpa: mix(122.1, 83.29), c12_gpa: mix(56.6, 45.26), c44_gpa: mix(60.0, 39.59) };
        (mix(5.65325, 6.0583), elastic)
    }

    #[test]
    fn indium_gallium_arsenide_on_gallium_arsenide() {
        // f +1.433 %, ε⊥ +0.013426, σ −1.653 GPa: computed outside from the published constants.
        let (lattice, elastic) = in20_ga80_as();
        let mismatch = lattice / 5.65325 - 1.0;
        assert!((mismatch - 0.01433).abs() < 2e-5, "{mismatch}");
        let strain = in_plane_strain(mismatch);
        assert!(strain < 0.0, "a larger layer is compressed");
        assert!((perpendicular_strain(elastic, strain) - 0.013_426).abs() < 2e-6);
        assert!((biaxial_stress_gpa(elastic, strain) + 1.653).abs() < 1e-3);
    }

    fn design(body: &str) -> Design {
        let text = format!("stack \"Trial\" {{ light AM1.5G\n{body}\n}}");
        let world = Memory::new().with("trial.stack", text.as_str());
        let mut sources = Sources::default();
        let outcome = resolve(&world, &mut sources, Path::new("trial.stack"), &Overrides::default());
        assert!(!outcome.findings.has_errors(), "{:?}", outcome.findings);
        outcome.value.expect("resolved").remove(0)
    }

    fn state(design: &Design, path: &str) -> LayerGrowth {
        let index = design.layers.iter().position(|layer| layer.path == path).expect("has the layer");
        lattice_states(design)[index].expect("has a lattice beneath")
    }

    #[test]
    fn mismatch_of_well_known_pairs() {
        // From the published lattice constants at 300 K (Vurgaftman, Meyer, Ram-Mohan 2001; Ge
        // 5.6579, Si 5.4310 Å), worked out outside: per cent.
        for (layer, wafer, percent) in
            [("GaAs", "Ge", -0.0822), ("GaP", "Si", 0.359), ("In0.2Ga0.8As", "GaAs", 1.433)]
        {
            let design = design(&format!(
                "junction only {{ base {layer} 10 nm p 1e17 /cm3; voltage from ere 1 % }}\n wafer {wafer} 350 um"
            ));
            let mismatch = state(&design, "only.base").mismatch * 100.0;
            assert!((mismatch - percent).abs() < 2e-3, "{layer} on {wafer}: {mismatch} %");
        }
    }

    #[test]
    fn a_relaxed_buffer_is_the_lattice_for_all_above_it() {
        let design = design(
            "junction only { base In0.2Ga0.8As 1 um p 1e17 /cm3; voltage from ere 1 % }
             buffer In0.2Ga0.8As 1 um relaxed p 1e18 /cm3
             wafer GaAs 350 um",
        );
        let buffer = design.layers.iter().position(|layer| layer.duty == Duty::Buffer);
        let (base, on_wafer) =
            (state(&design, "only.base"), lattice_states(&design)[buffer.expect("has one")]);
        assert_eq!(base.beneath, buffer);
        assert!(base.mismatch.abs() < 1e-12 && base.strain.abs() < 1e-12);
        let on_wafer = on_wafer.expect("stands on the wafer");
        assert_eq!(on_wafer.beneath, wafer(&design));
        assert!(on_wafer.mismatch > 0.014 && on_wafer.strain == 0.0, "off the wafer, but relaxed");
    }

    #[test]
    fn inverted_growth_starts_sunward() {
        let design = design(
            "growth inverted
             wafer GaAs 350 um removed
             junction top { base Al0.3Ga0.7As 1 um p 1e17 /cm3; voltage from ere 1 % }
             buffer In0.2Ga0.8As 1 um relaxed p 1e18 /cm3
             tunnel { resistance 1 mohm cm2 }
             junction bottom { base In0.2Ga0.8As 1 um p 1e17 /cm3; voltage from ere 1 % }",
        );
        let paths: Vec<&str> = order(&design).iter().map(|at| design.layers[*at].path.as_str()).collect();
        assert_eq!(paths.first(), Some(&"wafer"));
        assert_eq!(paths.last(), Some(&"bottom.base"));
        assert!(state(&design, "bottom.base").mismatch.abs() < 1e-12, "stands on the buffer");
        assert!(state(&design, "top.base").mismatch.abs() < 1e-3, "stands on the wafer");
    }

    #[test]
    fn growth_temperature_moves_the_mismatch_by_the_difference_of_expansions() {
        // GaAs 3.88e-5 Å/K (Vurgaftman, Meyer, Ram-Mohan 2001), 6.86e-6 /K; Si 2.6e-6 /K at room
        // temperature (handbook): 600 K make 0.256 %, within 0.02 % for Si's own rise.
        let design = design(
            "junction only { base GaAs 10 nm p 1e17 /cm3 { growth_temperature 625 degC }; voltage from ere 1 % }
             wafer Si 350 um",
        );
        let state = state(&design, "only.base");
        let grown = state.mismatch_at_growth - state.mismatch;
        assert!((grown - 0.002_56).abs() < 2e-4, "{grown}");
        // What was free at growth is stretched by as much once the wafer has cooled.
        assert!((state.thermal_strain / grown - 1.0).abs() < 0.05, "{}", state.thermal_strain);
    }

    #[test]
    fn poisson_ratio_of_gallium_arsenide() {
        // 0.31 for <001>: handbook value (Blakemore, J. Appl. Phys. 53, R123 (1982): 0.312).
        let elastic = Elastic { c11_gpa: 122.1, c12_gpa: 56.6, c44_gpa: 60.0 };
        assert!((poisson_ratio(elastic) - 0.312).abs() < 0.006);
    }
}
