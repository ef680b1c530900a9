//! Gaps of strained layers, from the text of a stack to the edge its light is absorbed at.

use bandloom::materials::SharedMaterial;
use bandloom::materials::optics::EV_M;

use super::files::designs;
use super::{found, near};

/// The material of `only.base`, 10 nm of `phrase` on `wafer`, and what the design assumes.
fn on_wafer(phrase: &str, wafer: &str) -> (SharedMaterial, Vec<String>) {
    let designs = designs(&format!(
        "stack \"Strained\" {{\n light AM1.5G\n optics one_pass\n junction only {{ base {phrase} 10 nm p 1e17 /cm3; voltage from ere 1 % }}\n wafer {wafer} 350 um p 1e18 /cm3\n}}\n"
    ));
    let layer = designs[0].layers.iter().find(|layer| layer.path == "only.base").expect("a layer");
    (layer.material.clone().expect("a material"), designs[0].assumptions.clone())
}

/// By tests/reference/strained_gaps.py (numpy 2.4.6, eigenvalues of the strain matrix) from the
/// constants of Vurgaftman et al. (2001), at 300 K.
#[test]
fn strained_gaps_reach_the_design() {
    for (phrase, wafer, relaxed, strained) in [
        ("In0.2Ga0.8As", "GaAs", 1.1324, 1.1953),
        ("In0.1Ga0.9As", "GaAs", 1.2727, 1.3066),
        ("GaAs", "Ge", 1.4225, 1.4119),
        ("GaAs0.9P0.1", "GaAs", 1.5408, 1.4932),
        ("In0.6Ga0.4As", "InP", 0.6668, 0.6810),
    ] {
        let (material, assumptions) = on_wafer(phrase, wafer);
        let gap = |material: &SharedMaterial| material.gap(300.0).expect("a gap").ev;
        near(gap(&found(phrase)), relaxed, 3e-4, phrase);
        // 5e-4: the lattices are compared at 25 °C, not at 300 K.
        near(gap(&material), strained, 5e-4, phrase);
        assert!(
            assumptions.iter().any(|it| it.contains("`only.base`") && it.contains("strained")),
            "{assumptions:?}"
        );
        assert!(material.origins.iter().any(|origin| origin.what == "strain"), "{phrase}");
        // The same k, at an energy further by the shift.
        let shift = gap(&material) - gap(&found(phrase));
        let k = |material: &SharedMaterial, ev: f64| material.index(EV_M / ev, 300.0).expect("an index").1;
        near(k(&material, relaxed + 0.02 + shift) / k(&found(phrase), relaxed + 0.02), 1.0, 1e-6, phrase);
    }
}

#[test]
fn matched_and_relaxed_layers_keep_their_gap() {
    for (phrase, wafer) in [("GaInP matched", "GaAs"), ("In0.2Ga0.8As relaxed", "GaAs"), ("GaAs", "GaAs")] {
        let (material, assumptions) = on_wafer(phrase, wafer);
        // Matched at 25 °C here and at 300 K there.
        let own = super::on(phrase.trim_end_matches(" relaxed"), Some(wafer));
        near(material.gap(300.0).expect("a gap").ev, own.gap(300.0).expect("a gap").ev, 2e-4, phrase);
        assert!(!assumptions.iter().any(|it| it.contains("as strained")), "{assumptions:?}");
    }
}

#[test]
fn without_potentials_the_design_says_so() {
    let (material, assumptions) = on_wafer("Ge", "Si");
    assert_eq!(material.gap(300.0), found("Ge").gap(300.0));
    assert!(assumptions.iter().any(|it| it.contains("`only.base` is strained, but")), "{assumptions:?}");
}
