//! Materials as they stand in files: a user's definitions, graded and free compositions, any text.

use std::path::Path;

use bandloom::finding::Finding;
use bandloom::resolve::{Overrides, resolve};
use bandloom::source::Sources;
use bandloom::world::memory::Memory;

use super::{found, fraction, near};

/// The findings of a file beside others, as (path, finding).
fn findings(files: &[(&str, &str)]) -> Vec<(String, Finding)> {
    let world = files.iter().fold(Memory::new(), |world, (path, text)| world.with(path, *text));
    let mut sources = Sources::default();
    let outcome = resolve(&world, &mut sources, Path::new("main.stack"), &Overrides::default());
    let place = |finding: &Finding| {
        let label = finding.primary.as_ref().expect("a place");
        sources.get(label.span.source).path.display().to_string()
    };
    outcome.findings.0.iter().map(|finding| (place(finding), finding.clone())).collect()
}

#[test]
fn an_unsound_table_is_shown_at_its_own_line() {
    let main = "material Film { index { table \"data/film.csv\"; cite \"x\" } }\n";
    for (table, line, message) in [
        ("nm,n,k\n400,1.5,0\n390,1.5,0\n500,1.5,0\n", "390,1.5,0", "390 does not follow 400"),
        ("nm,n,k\n400,glass,0\n", "glass", "n is no number: `glass`"),
        ("nm,n,k\n400,1.5,-0.1\n", "-0.1", "k is -0.1"),
        ("nm,n,k\r\n400,0,0\r\n", "0", "n is 0"),
        ("", "", "there is no row"),
    ] {
        let found = findings(&[("main.stack", main), ("data/film.csv", table)]);
        let [(path, finding)] = &found[..] else { panic!("{table:?}: {found:#?}") };
        assert_eq!((path.as_str(), finding.code), ("data/film.csv", "material.table"));
        assert!(finding.message.contains(message), "{}", finding.message);
        let span = finding.primary.as_ref().expect("a place").span;
        assert_eq!(&table[span.range()], line, "{table:?}");
        assert!(!finding.helps.is_empty());
    }
}

#[test]
fn one_mistake_in_a_material_is_one_finding() {
    for wrong in [
        "index { table \"nowhere.csv\"; cite \"x\" }",
        "index { constant 1.4 }",
        "index { sellmeier 1.1 600 nm; cite \"x\" }",
        "index { constant 1.4 nm; cite \"x\" }",
        "about \"nothing\"",
    ] {
        let text = format!(
            "material Film {{ {wrong} }}\nstack \"S\" {{ light AM1.5G\n coat Film 90 nm\n coat Film 50 nm\n\
             junction only {{ absorber ideal of gap 1.4 eV absorbs all_above_gap }} }}\n"
        );
        assert_eq!(findings(&[("main.stack", &text)]).len(), 1, "{wrong}");
    }
}

#[test]
fn definitions_that_lead_in_a_circle_end() {
    let found = findings(&[(
        "main.stack",
        "alloy GaInP { members GaInP, InP }\nalloy AlInP { ternaries GaInX }\nalloy GaInX { ternaries AlInP }\n",
    )]);
    assert!(!found.is_empty());
}

/// The designs of a file that has no findings.
pub(super) fn designs(text: &str) -> Vec<bandloom::design::Design> {
    let world = Memory::new().with("main.stack", text);
    let mut sources = Sources::default();
    let outcome = resolve(&world, &mut sources, Path::new("main.stack"), &Overrides::default());
    assert!(outcome.findings.is_empty(), "{:#?}", outcome.findings);
    outcome.value.expect("designs")
}

#[test]
fn graded_layers_step_through_their_range() {
    let designs = designs(
        "stack \"Graded\" {\n light AM1.5G\n growth inverted\n junction top { emitter GaInP matched 50 nm n 1e18 /cm3\n base GaInP matched 500 nm p 1e17 /cm3\n voltage from ere 1 % }\n\
         buffer graded GaInP with In 0.49 .. 0.70 in 8 steps of 250 nm relaxed\n\
         junction low { emitter InGaAs matched 50 nm n 1e18 /cm3\n base InGaAs matched 2 um p 1e17 /cm3\n voltage from ere 1 % }\n wafer GaAs 350 um p 1e18 /cm3 removed\n}\n",
    );
    let material = |layer: &bandloom::design::Layer| layer.material.clone().expect("a material");
    let steps: Vec<f64> = designs[0]
        .layers
        .iter()
        .filter(|layer| layer.path.starts_with("buffer"))
        .map(|layer| fraction(&material(layer), "In"))
        .collect();
    assert_eq!(steps.len(), 8);
    for (step, value) in steps.iter().enumerate() {
        near(*value, 0.49 + 0.03 * step as f64, 1e-12, "a step");
    }
    // What is matched on top has the lattice of the last step, at 25 °C.
    let lattice = |path: &str| {
        let layer = designs[0].layers.iter().find(|layer| layer.path == path).expect("a layer");
        material(layer).lattice_constant(298.15).expect("a lattice")
    };
    near(lattice("low.base") / lattice("buffer.step8"), 1.0, 1e-9, "matched to the last step");
}

#[test]
fn compositions_and_gaps_may_be_left_free() {
    let designs = designs(
        "stack \"Free\" {\n light AM1.5G\n junction a { absorber ideal of gap 1.8 eV free 1.6 .. 2.2 eV absorbs all_above_gap }\n\
         junction b { emitter GaInP with In free 0.4 .. 0.6 50 nm n 1e18 /cm3\n base GaAs 3 um p 1e17 /cm3\n voltage from ere 1 % }\n wafer GaAs 350 um p 1e18 /cm3\n}\n",
    );
    let free = |path: &str| {
        designs[0].free_values.iter().find(|free| free.path == path).expect("a free value").clone()
    };
    // 1.8 eV in J by the exact elementary charge.
    near(free("a.absorber.gap").value.expect("settled") / 1.602_176_634e-19, 1.8, 1e-12, "settled gap");
    let indium = free("b.emitter.composition.In");
    assert_eq!((indium.value, indium.range), (None, (0.4, 0.6)));
    let layers = &designs[0].layers;
    let emitter = layers.iter().find(|layer| layer.path == "b.emitter").expect("a layer");
    assert!(emitter.material.is_none());
}

#[test]
fn matched_means_at_growth_temperature() {
    let text = |line: &str| {
        format!(
            "stack \"Hot\" {{\n light AM1.5G\n junction only {{\n emitter GaInP matched 60 nm n 1e18 /cm3\n\
             base GaInP matched 600 nm p 1e17 /cm3 {{ {line} }}\n voltage from ere 1 % }}\n wafer GaAs 350 um p 1e18 /cm3\n}}\n"
        )
    };
    let base = |line: &str| {
        let designs = designs(&text(line));
        let layer = designs[0].layers.iter().find(|layer| layer.path == "only.base").expect("a layer");
        fraction(layer.material.as_ref().expect("a material"), "Ga")
    };
    // Lattice constants and slopes of Vurgaftman et al. (2001), by hand at 923.15 K:
    // GaAs 5.65325 + 3.88e-5 ΔT, GaP 5.4505 + 2.92e-5 ΔT, InP 5.8697 + 2.79e-5 ΔT, ΔT = 623.15 K.
    let at = |a: f64, slope: f64| a + slope * 623.15;
    let (gaas, gap, inp) = (at(5.65325, 3.88e-5), at(5.4505, 2.92e-5), at(5.8697, 2.79e-5));
    near(base("growth_temperature 650 degC"), (inp - gaas) / (inp - gap), 1e-9, "hot");
    assert!(base("growth_temperature 650 degC") < base("") - 0.01);
}

#[test]
fn a_users_own_compound_leaves_built_in_alloys_alone() {
    let designs = designs(
        "material GaAs replaces { lattice { constant 5.7 Å; cite \"x\" }; gap { direct 1.3 eV; cite \"x\" }; index { constant 3.5; cite \"x\" } }\n\
         stack \"Own\" {\n light AM1.5G\n junction only {\n window Al0.8Ga0.2As 20 nm n 1e18 /cm3\n emitter AlGaAs with Al 0.1 60 nm n 1e18 /cm3\n\
         base GaAs 600 nm p 1e17 /cm3\n voltage from ere 1 % }\n}\n",
    );
    let gap = |path: &str| {
        let layer = designs[0].layers.iter().find(|layer| layer.path == path).expect("a layer");
        layer.material.as_ref().expect("a material").gap(300.0).expect("a gap").ev
    };
    near(gap("only.base"), 1.3, 1e-12, "the user's own");
    near(gap("only.emitter"), found("AlGaAs with Al 0.1").gap(300.0).expect("a gap").ev, 1e-12, "built in");
}

mod any_text {
    use bandloom::resolve::materials::look_up;
    use proptest::prelude::*;

    proptest! {
        // No file of past failures: a failure becomes a case of its own.
        #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::with_cases(300) })]

        /// Whatever is asked for, there is a material or at least one thing said of it, and no panic.
        #[test]
        fn a_phrase_gives_a_material_or_a_finding(
            phrase in "(Ga|In|Al|As|P|Sb|Ge|Xx|l|O|[0-9]|0\\.[0-9]{1,2}|1|\\(|\\)| matched| of gap [0-9]\\.[0-9] eV| with In 0\\.[0-9]| ordered to 1\\.[0-9]+ eV){1,7}"
        ) {
            let (outcome, _) = look_up(&phrase, Some("GaAs"));
            prop_assert!(outcome.value.is_some() || !outcome.findings.is_empty(), "{phrase}");
            if let Some(material) = outcome.value {
                let gap = material.gap(300.0).map_or(1.0, |gap| gap.ev);
                prop_assert!(gap.is_finite() && gap > 0.0, "{phrase}: {gap}");
                for nm in [280.0, 500.0, 900.0, 1900.0] {
                    if let Some((n, k)) = material.index(nm * 1e-9, 300.0) {
                        prop_assert!(n > 0.0 && n.is_finite() && k >= 0.0 && k.is_finite(), "{phrase}");
                    }
                }
            }
        }
    }
}
