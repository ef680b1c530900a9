//! What a text means, held against values worked out by hand.

use std::path::Path;

use proptest::prelude::*;

use super::*;
use crate::design::{Duty, Growth, OpticsModel, Place, VoltageModel};
use crate::finding::Findings;
use crate::world::memory::Memory;

fn resolved_in(world: &Memory, set: &[(&str, &str)]) -> (Vec<Design>, Findings) {
    let mut sources = Sources::default();
    let set = set.iter().map(|(name, text)| ((*name).to_owned(), (*text).to_owned())).collect();
    let outcome = resolve(world, &mut sources, Path::new("a.stack"), &Overrides { set });
    for finding in outcome.findings.iter() {
        for label in finding.primary.iter().chain(&finding.secondary) {
            assert!(label.span.source.0 as usize <= sources.iter().count(), "{finding:?}");
        }
    }
    (outcome.value.unwrap_or_default(), outcome.findings)
}

fn resolved(text: &str) -> (Vec<Design>, Findings) {
    resolved_in(&Memory::new().with("a.stack", text), &[])
}

fn silent(text: &str) -> Vec<Design> {
    let (designs, findings) = resolved(text);
    assert!(findings.is_empty(), "{findings:?}");
    designs
}

fn codes(findings: &Findings) -> Vec<&'static str> {
    findings.clone().sorted().iter().map(|finding| finding.code).collect()
}

fn close(a: f64, b: f64) {
    assert!((a - b).abs() <= 1e-12 * a.abs().max(b.abs()), "{a} against {b}");
}

const TWO: &str = r#"
part pair(side = 15 nm) {
    tunnel {
        layer  GaAs  15 nm  p 9e19 /cm3 C   as acceptor
        layer  GaAs  side   n 3e19 /cm3 Te
        peak   40 A/cm2
        resistance 0.2 mohm cm2
    }
}
part skin() {
    layer GaAs 5 nm n 1e18 /cm3 Si
    layer GaAs 6 nm n 1e18 /cm3 Si
}
stack "Two" {
    light AM1.5G
    temperature 25 degC
    optics one_pass front_reflectance 3 %
    fingers { shading 3 %; series_resistance 20 mohm cm2 }
    coat MgF2 95 nm
    coat ZnS 48 nm
    place skin() as shell
    junction top {
        emitter GaAs 70 nm n 2e18 /cm3 Si
        base    GaAs 0.6 µm p 1e17 /cm3 Zn as thick { diffusion_length 20 um; rear_velocity 1e3 cm/s }
        voltage from ere 2 %
    }
    place pair(12 nm) as upper
    junction middle { absorber GaAs 1 um p 1e17 /cm3 Zn; voltage from fit { j01 1e-20 A/cm2; at 25 degC } }
    place pair() as lower
    junction bottom { absorber GaAs 1 um p 1e17 /cm3 Zn }
    wafer GaAs 350 um p 1e18 /cm3 Zn offcut 6 deg
    metal Au
}
"#;

#[test]
fn layers_have_paths_places_and_si_values() {
    let designs = silent(TWO);
    let [design] = designs.as_slice() else { panic!("one stack") };
    let paths: Vec<&str> = design.layers.iter().map(|layer| layer.path.as_str()).collect();
    assert_eq!(
        paths,
        [
            "coat1",
            "coat2",
            "shell.layer1",
            "shell.layer2",
            "top.emitter",
            "thick",
            "acceptor",
            "upper.layer",
            "middle.absorber",
            "lower.acceptor",
            "lower.layer",
            "bottom.absorber",
            "wafer",
            "metal",
        ]
    );
    let layer = |path: &str| design.layer(path).expect("a layer");
    close(layer("coat1").thickness_m.expect("stated"), 95e-9);
    close(layer("thick").thickness_m.expect("stated"), 6e-7);
    close(layer("upper.layer").thickness_m.expect("stated"), 12e-9);
    close(layer("lower.layer").thickness_m.expect("default"), 15e-9);
    close(layer("thick").doping.as_ref().expect("doped").density_per_m3, 1e23);
    close(layer("thick").transport.diffusion_length_m.expect("stated"), 2e-5);
    close(layer("thick").transport.rear_velocity.expect("stated"), 10.0);
    close(layer("wafer").offcut_rad.expect("stated"), 6.0_f64.to_radians());
    assert_eq!(layer("coat1").place, Place::Front);
    assert_eq!(layer("thick").place, Place::Junction(0));
    assert_eq!(layer("lower.layer").place, Place::Interconnect(1));
    assert_eq!(layer("wafer").place, Place::Rear);
    let fingers = design.fingers.as_ref().expect("stated");
    close(fingers.shading, 0.03);
    close(fingers.series_resistance_ohm_m2, 2e-6);
    assert!(
        matches!(design.optics, OpticsModel::OnePass { front_reflectance, stated: true } if (front_reflectance - 0.03).abs() < 1e-15)
    );
    assert_eq!(design.interconnects.iter().map(|it| it.below_junctions).collect::<Vec<_>>(), [1, 2]);
    close(design.interconnects[0].peak_a_per_m2.expect("stated"), 4e5);
    close(design.interconnects[0].resistance_ohm_m2.expect("stated"), 2e-8);
    assert_eq!(design.junctions[0].voltage, VoltageModel::Ere(0.02));
    assert!(
        matches!(design.junctions[1].voltage, VoltageModel::Fit(fit) if (fit.j01_a_per_m2 / 1e-16 - 1.0).abs() < 1e-12)
    );
    assert_eq!(design.junctions[2].voltage, VoltageModel::RadiativeLimit);
    close(design.conditions[0].temperature_k, 298.15);
}

#[test]
fn a_stack_made_like_another_keeps_what_is_not_said() {
    let text = format!(
        "{TWO}{}",
        r#"
stack "Three" like "Two" {
    top.base 580 nm
    remove coat2
    insert after top.emitter { layer GaAs 5 nm n 1e18 /cm3 Si }
    wafer GaAs 200 um
    temperature 60 degC
    growth inverted
}
"#
    );
    let designs = silent(&text);
    let [two, three] = designs.as_slice() else { panic!("two stacks") };
    close(two.layer("thick").and_then(|layer| layer.thickness_m).expect("stated"), 6e-7);
    let base = three.layer("thick").expect("kept");
    close(base.thickness_m.expect("stated"), 580e-9);
    close(base.doping.as_ref().expect("kept").density_per_m3, 1e23);
    close(base.transport.diffusion_length_m.expect("kept"), 2e-5);
    close(three.layer("wafer").and_then(|layer| layer.thickness_m).expect("stated"), 2e-4);
    assert!(three.layer("coat").is_some() && three.layer("coat2").is_none());
    let inserted = three.layers.iter().position(|layer| layer.path == "top.layer").expect("put in");
    assert_eq!(three.layers[inserted - 1].path, "top.emitter");
    close(three.conditions[0].temperature_k, 333.15);
    assert_eq!((two.growth, three.growth), (Growth::Upright, Growth::Inverted));
}

#[test]
fn values_set_from_outside_win_and_unknown_ones_are_told() {
    let text = r#"
let d = 2 * half
let half = 100 nm
stack "One" { light AM1.5G; temperature 25 degC; junction j { absorber GaAs d p 1e17 /cm3 Zn } }
"#;
    let world = Memory::new().with("a.stack", text);
    let thickness = |set: &[(&str, &str)]| {
        let (designs, findings) = resolved_in(&world, set);
        (designs[0].layers[0].thickness_m, codes(&findings))
    };
    let (plain, findings) = thickness(&[]);
    close(plain.expect("stated"), 2e-7);
    assert!(findings.is_empty());
    close(thickness(&[("half", "0.3 um")]).0.expect("set"), 6e-7);
    close(thickness(&[("d", "half / 2")]).0.expect("set"), 5e-8);
    assert_eq!(thickness(&[("hlaf", "3 nm")]).1, ["name.unknown"]);
    assert_eq!(thickness(&[("half", "3 eV")]).1, ["unit.dimension"]);
    assert_eq!(thickness(&[("half", "3")]).1, ["unit.missing"]);
    assert!(!thickness(&[("half", "3 nm }")]).1.is_empty());
    assert!(!thickness(&[("a b", "3 nm")]).1.is_empty());
}

#[test]
fn light_is_multiplied_as_stated() {
    let text = r#"
condition a { light AM1.5D; irradiance 450 kW/m2; temperature 25 degC }
condition b { light AM0; distance 5.2 au; temperature -120 degC }
condition c { light AM1.5G; concentration 500 times; temperature 25 degC; incidence 60 deg }
stack "One" { conditions a, b, c; junction j { absorber ideal of gap 1.42 eV } }
"#;
    let designs = silent(text);
    let conditions = &designs[0].conditions;
    close(conditions[0].concentration * conditions[0].light.total_w_per_m2, 450e3);
    close(conditions[1].concentration, 1.0 / (5.2 * 5.2));
    close(conditions[1].temperature_k, 153.15);
    close(conditions[2].concentration, 500.0);
    close(conditions[2].incidence_rad.cos(), 0.5);
}

#[test]
fn tables_are_read_in_their_units() {
    let stack = r#"
spectrum lamp {
    file "t.csv"
    wavelength column "l" in um
    irradiance column 3 in mW/cm2/um
    filtered by "f.txt" { wavelength column 1 in "Å"; transmittance column 2 in percent }
}
stack "One" { light lamp; temperature 25 degC; junction j { absorber ideal of gap 1.42 eV } }
"#;
    let world = Memory::new()
        .with("a.stack", stack)
        .with("t.csv", "l;n;e\r\n0.4;x;100\r\n\r\n0.6;y;50\r\n1.0;z;0\r\n")
        .with("f.txt", "# Å and percent\n3000\t80\n12000 \t 80\n");
    let (designs, findings) = resolved_in(&world, &[]);
    assert!(findings.is_empty(), "{findings:?}");
    let light = &designs[0].conditions[0].light;
    // 100 mW/cm2/um = 1000 W/m2 per 1e-6 m = 1e9 W/m2/m; 80 % pass.
    close(light.irradiance[0], 0.8e9);
    close(light.wavelength_m[1], 0.6e-6);
    // Trapezia: (1e9 + 5e8)/2 · 0.2e-6 + 5e8/2 · 0.4e-6 = 250 W/m2, of which 80 %.
    close(light.total_w_per_m2, 200.0);
}

#[test]
fn steps_of_a_buffer_are_grown_in_the_order_of_their_bounds() {
    let text = |growth: &str| {
        format!(
            r#"stack "One" {{
    light AM1.5G
    temperature 25 degC
    growth {growth}
    junction j {{ absorber GaInAs matched 1 um p 1e17 /cm3 Zn }}
    buffer graded GaInAs with In 0 .. 0.2 in 5 steps of 250 nm relaxed
    wafer GaAs 350 um p 1e18 /cm3 Zn
}}"#
        )
    };
    let (designs, _) = resolved(&text("upright"));
    let indium = |path: &str| {
        let layer = designs[0].layer(path).expect("a layer");
        let material = layer.material.as_ref().expect("resolved");
        material.composition.iter().find(|(element, _)| element == "In").expect("holds In").1
    };
    let order: Vec<&str> = designs[0].layers.iter().map(|layer| layer.path.as_str()).collect();
    assert_eq!(order[1..3], ["buffer.step5", "buffer.step4"]);
    assert!(indium("buffer.step1") < indium("buffer.step4"));
    close(indium("buffer.step5"), 0.2);
    // What is matched sits on the last step, not on the wafer.
    assert!((indium("j.absorber") - 0.2).abs() < 1e-9, "{}", indium("j.absorber"));
    let (designs, _) = resolved(&text("inverted"));
    let order: Vec<&str> = designs[0].layers.iter().map(|layer| layer.path.as_str()).collect();
    assert_eq!(order[1..3], ["buffer.step1", "buffer.step2"]);
}

#[test]
fn free_values_and_tolerances_are_kept_in_si() {
    let text = r#"
let d = 612 nm free 300 .. 1200 nm ± 3 % sigma
stack "One" {
    light AM1.5G
    temperature 25 degC
    coat MgF2 95 nm ± 2 nm limits
    junction j { base GaAs d p 1e17 /cm3 Zn { diffusion_length free 1 .. 20 um } }
}"#;
    let (designs, findings) = resolved(text);
    assert_eq!(codes(&findings), ["feature.pending"]);
    let design = &designs[0];
    let [thickness, length] = design.free_values.as_slice() else { panic!("{:?}", design.free_values) };
    assert_eq!(thickness.path, "j.base.thickness");
    close(thickness.range.0, 3e-7);
    close(thickness.range.1, 1.2e-6);
    close(thickness.value.expect("settled"), 612e-9);
    assert_eq!((length.path.as_str(), length.value), ("j.base.diffusion_length", None));
    close(length.range.0, 1e-6);
    let [coat, base] = design.tolerances.as_slice() else { panic!("{:?}", design.tolerances) };
    close(coat.amount, 2e-9);
    close(base.amount, 0.03 * 612e-9);
}

#[test]
fn a_wafer_may_be_the_base_of_a_junction() {
    let text = r#"stack "One" {
    light AM1.5G
    temperature 25 degC
    junction j {
        emitter diffused 300 nm n 1e19 /cm3 P
        wafer Si 160 um p 1e16 /cm3 B
        voltage from ere 1 %
    }
}"#;
    let designs = silent(text);
    let [emitter, wafer] = designs[0].layers.as_slice() else { panic!("two layers") };
    assert_eq!(emitter.material.as_ref().map(|it| it.name.as_str()), Some("Si"));
    assert!(wafer.collects() && wafer.duty == Duty::Wafer);
}

#[test]
fn empty_files_and_large_repeats_are_told() {
    assert_eq!(codes(&resolved("").1), ["structure.empty"]);
    assert_eq!(codes(&resolved(" \n\t\n").1), ["structure.empty"]);
    assert_eq!(codes(&resolved("// nothing\n").1), ["structure.empty"]);
    let large = r#"stack "L" { light AM1.5G; temperature 25 degC
        repeat 9000 { layer GaAs 3 nm; layer GaAs 3 nm; layer GaAs 4 nm }
        junction j { absorber GaAs 1 um p 1e17 /cm3 } }"#;
    assert_eq!(codes(&resolved(large).1), ["value.range"]);
    // Parts that place parts twice each: 2^40 layers if nothing stopped them.
    let mut parts = String::from("part p0() { layer GaAs 3 nm }\n");
    for level in 1..40 {
        parts += &format!("part p{level}() {{ place p{}(); place p{}() }}\n", level - 1, level - 1);
    }
    parts += r#"stack "P" { light AM1.5G; temperature 25 degC; place p39(); junction j { absorber GaAs 1 um p 1e17 /cm3 } }"#;
    assert_eq!(codes(&resolved(&parts).1), ["value.range"]);
}

#[test]
fn files_in_a_circle_are_each_read_once() {
    let world = Memory::new()
        .with("a.stack", "use \"b.stack\"\nstack \"A\" { light AM1.5G; temperature 25 degC; junction j { absorber GaAs d p 1e17 /cm3 } }")
        .with("b.stack", "use \"c/c.stack\"\nlet d = 2 * e")
        .with("c/c.stack", "use \"../b.stack\"\nlet e = 1 um");
    let (designs, findings) = resolved_in(&world, &[]);
    assert_eq!(codes(&findings), ["use.cycle"]);
    close(designs[0].layers[0].thickness_m.expect("through two files"), 2e-6);
}

/// A number with a unit whose SI value is known, or arithmetic on such; text and value side by side.
fn arithmetic() -> impl Strategy<Value = (String, f64)> {
    let leaf =
        (1u32..1000, prop::sample::select(vec![("nm", 1e-9), ("um", 1e-6), ("Å", 1e-10), ("mm", 1e-3)]))
            .prop_map(|(n, (unit, factor))| (format!("{n} {unit}"), f64::from(n) * factor));
    leaf.prop_recursive(4, 32, 3, |inner| {
        prop_oneof![
            (inner.clone(), inner.clone()).prop_map(|(a, b)| (format!("({} + {})", a.0, b.0), a.1 + b.1)),
            (inner.clone(), inner.clone())
                .prop_map(|(a, b)| (format!("max({}, {})", a.0, b.0), a.1.max(b.1))),
            (inner.clone(), inner.clone())
                .prop_map(|(a, b)| (format!("min({}, {})", a.0, b.0), a.1.min(b.1))),
            (inner.clone(), 1u32..9).prop_map(|(a, n)| (format!("{} * {n}", a.0), a.1 * f64::from(n))),
            (inner.clone(), 1u32..9).prop_map(|(a, n)| (format!("({} / {n})", a.0), a.1 / f64::from(n))),
            (inner.clone(), inner)
                .prop_map(|(a, b)| (format!("sqrt({} * {})", a.0, b.0), (a.1 * b.1).sqrt())),
        ]
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 48, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn expressions_come_to_their_hand_value((text, value) in arithmetic()) {
        let file = format!(
            "let d = {text}\nstack \"S\" {{ light AM1.5G; temperature 25 degC; junction j {{ absorber GaAs d p 1e17 /cm3 }} }}"
        );
        let (designs, _) = resolved(&file);
        let found = designs[0].layers[0].thickness_m.expect("a length");
        prop_assert!((found / value - 1.0).abs() < 1e-12, "{text}: {found} against {value}");
    }

    #[test]
    fn no_mangled_text_makes_it_stop(at in 0usize..1000, length in 0usize..40, put in "[ -~µ°²{}\n]{0,12}") {
        let start = (0..=at.min(TWO.len())).rev().find(|&i| TWO.is_char_boundary(i)).unwrap_or(0);
        let end = (start + length).min(TWO.len());
        let end = (end..=TWO.len()).find(|&i| TWO.is_char_boundary(i)).unwrap_or(TWO.len());
        let text = format!("{}{put}{}", &TWO[..start], &TWO[end..]);
        let (designs, _) = resolved(&text);
        for layer in designs.iter().flat_map(|design| &design.layers) {
            prop_assert!(layer.thickness_m.is_none_or(|it| it.is_finite() && it > 0.0));
        }
    }
}
