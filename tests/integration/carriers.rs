//! Carriers of plain slabs against finite volumes, and of whole stacks against what must hold.

use bandloom::carriers::region::{Region, Slab};
use bandloom::carriers::statistics::ln_degeneracy;
use bandloom::optics::wave::profile::Profile;
use serde_json::Value;

/// Finite volumes by scipy on two grids, extrapolated: tests/reference/carriers.py; versions inside.
fn reference() -> Value {
    let text = include_str!("../fixtures/carriers/collection.json");
    serde_json::from_str(text).expect("a fixture is sound JSON")
}

fn number(value: &Value, name: &str) -> f64 {
    value[name].as_f64().unwrap_or_else(|| panic!("{name} in {value}"))
}

fn slabs(case: &Value) -> Vec<Slab> {
    let slabs = case["slabs"].as_array().expect("a list");
    slabs
        .iter()
        .map(|slab| Slab {
            thickness_m: number(slab, "thickness"),
            diffusion_m2_per_s: number(slab, "diffusion"),
            length_m: number(slab, "length"),
            ln_minority: number(slab, "density").ln(),
            far_velocity_m_per_s: number(slab, "velocity"),
        })
        .collect()
}

#[test]
fn collection_and_dark_current_are_those_of_finite_volumes() {
    let reference = reference();
    for case in reference["cases"].as_array().expect("a list") {
        let slabs = slabs(case);
        let region = Region::solve(&slabs);
        let total: f64 = slabs.iter().map(|slab| slab.thickness_m).sum();
        let light = &case["profile"];
        let profile = Profile {
            thickness_m: total,
            decay_per_m: number(light, "decay"),
            wave_per_m: number(light, "wave"),
            down: number(light, "down"),
            up: number(light, "up"),
            cosine: number(light, "cosine"),
            sine: number(light, "sine"),
        };
        let sunward = case["junction"] == "sunward";
        let mut depth = 0.0;
        let mut collected = 0.0;
        for (piece, slab) in region.pieces.iter().zip(&slabs) {
            let stretch = if sunward {
                piece.below_junction(depth)
            } else {
                piece.above_junction(total - depth - slab.thickness_m)
            };
            collected += stretch.collected(|rate, from, to| profile.weighted(rate, from, to));
            depth += slab.thickness_m;
        }
        let expected = number(case, "collected");
        assert!((collected - expected).abs() < 1e-6 * expected, "{}: {collected} {expected}", case["name"]);
        let dark = region.dark_a_per_m2 / bandloom::numerics::constants::CHARGE;
        let expected = number(case, "dark");
        assert!((dark / expected - 1.0).abs() < 5e-6, "{}: {dark} {expected}", case["name"]);
    }
}

#[test]
fn the_filling_of_a_band_follows_the_fermi_integral() {
    // η − ln F₁/₂(η) by mpmath, same script: the series of Joyce and Dixon is good to 0.004.
    let reference = reference();
    for row in reference["fermi"].as_array().expect("a list") {
        let (ratio, expected) = (row[0].as_f64().expect("a number"), row[1].as_f64().expect("a number"));
        assert!((ln_degeneracy(ratio) + expected).abs() < 4e-3, "{ratio}");
    }
    assert_eq!(ln_degeneracy(0.0), 0.0);
}
