//! Wave optics from the text of a stack: mirrors by `repeat`, graded layers, what light does not
//! meet, and the error of the currents of whole cells.

use std::path::Path;

use bandloom::compile::{Options, compile};
use bandloom::design::Design;
use bandloom::numerics::constants::HC_EV;
use bandloom::numerics::quadrature::product_integral;
use bandloom::optics::grid::{Features, spectral_grid};
use bandloom::optics::model::LightModel;
use bandloom::world::memory::Memory;

fn designs(text: &str) -> Vec<Design> {
    let world = Memory::new().with("a.stack", text);
    let options = Options { no_evaluation: true, ..Options::default() };
    let compiled = compile(&world, Path::new("a.stack"), &options);
    assert!(!compiled.findings.has_errors(), "{:?}", compiled.findings);
    compiled.stacks.into_iter().map(|stack| stack.design).collect()
}

const JUNCTION: &str = r#"
    junction only {
        base   GaAs    3 um   p 1e17 /cm3 Zn
        voltage from ere 1 %
    }
    wafer  GaAs  350 um   p 1e18 /cm3 Zn
"#;

/// Share reflected at 500 nm, where gallium arsenide lets nothing through.
fn reflected(design: &Design) -> f64 {
    LightModel::new(design, 300.0, 0.0).shares(&[500e-9]).reflected[0]
}

#[test]
fn a_repeated_pair_is_a_quarter_wave_mirror() {
    // N pairs of quarter waves, high index first, on a half-space of admittance Y: (n_H/n_L)^2N Y
    // (Macleod, Thin-Film Optical Filters, 2010); magnesium fluoride by Dodge (1984), and
    // sapphire as the library has it, both clear at 500 nm.
    let plain = designs(&format!("stack \"Bare\" {{\n light AM1.5G\n{JUNCTION}}}\n")).remove(0);
    let index = |design: &Design, path: &str| {
        let material = design.layer(path).and_then(|layer| layer.material.clone()).expect("a layer");
        material.optics.index(500e-9, material.edge_shift_ev(300.0)).expect("an index")
    };
    let probe = format!(
        "stack \"Probe\" {{\n light AM1.5G\n layer Al2O3 1 nm as high\n layer MgF2 1 nm as low\n{JUNCTION}}}\n"
    );
    let probe = designs(&probe).remove(0);
    let ((high, high_k), (low, low_k)) = (index(&probe, "high"), index(&probe, "low"));
    assert_eq!((high_k, low_k), (0.0, 0.0));
    let (n, k) = index(&plain, "only.base");
    for pairs in [0, 1, 3, 8] {
        let (h, l) = (500.0 / 4.0 / high, 500.0 / 4.0 / low);
        let mirror = if pairs == 0 {
            String::new()
        } else {
            format!(" repeat {pairs} {{\n layer Al2O3 {h} nm\n layer MgF2 {l} nm\n }}\n")
        };
        let design =
            designs(&format!("stack \"Mirror\" {{\n light AM1.5G\n{mirror}{JUNCTION}}}\n")).remove(0);
        let turned = (high / low).powi(2 * pairs);
        let (re, im) = (turned * n, turned * k);
        let expected = ((1.0 - re).powi(2) + im * im) / ((1.0 + re).powi(2) + im * im);
        let found = reflected(&design);
        assert!((found - expected).abs() < 1e-9, "{pairs}: {found} is not {expected}");
    }
}

#[test]
fn light_does_not_meet_what_is_removed_or_under_fingers() {
    let plain =
        designs(&format!("stack \"Bare\" {{\n light AM1.5G\n coat MgF2 90 nm\n{JUNCTION}}}\n")).remove(0);
    let more = format!(
        "stack \"More\" {{\n light AM1.5G\n cap GaAs 300 nm n 8e18 /cm3 Te only under fingers\n \
         etch_stop AlInP matched 100 nm removed\n coat MgF2 90 nm\n{JUNCTION}}}\n"
    );
    let more = designs(&more).remove(0);
    assert_eq!(more.layers.len(), plain.layers.len() + 2);
    assert_eq!(reflected(&plain).to_bits(), reflected(&more).to_bits());
}

#[test]
fn a_graded_buffer_is_as_many_layers_as_steps() {
    let text = r#"
stack "Graded" {
    light AM1.5G
    junction only {
        base   GaInAs matched   3 um   p 1e17 /cm3 Zn
        voltage from ere 1 %
    }
    buffer graded GaInP with In 0.49 .. 0.72 in 8 steps of 250 nm relaxed
    wafer  GaAs  350 um   p 1e18 /cm3 Zn
}
"#;
    let design = designs(text).remove(0);
    let model = LightModel::new(&design, 300.0, 0.0);
    let steps: Vec<usize> = model
        .rows()
        .iter()
        .map(|(layer, _)| *layer)
        .filter(|&layer| design.layers[layer].path.starts_with("buffer"))
        .collect();
    assert_eq!(steps.len(), 8);
    // Each step has its own gap, wider towards the wafer's lattice.
    let gap = |layer: &usize| {
        design.layers[*layer].material.as_ref().and_then(|it| it.gap(300.0)).expect("a gap").ev
    };
    let gaps: Vec<f64> = steps.iter().map(gap).collect();
    assert!(gaps.windows(2).all(|pair| pair[0] < pair[1]), "{gaps:?}");
    let shares = model.shares(&[600e-9]);
    let absorbed: f64 = shares.absorbed.iter().map(|row| row[0]).sum();
    assert!((absorbed + shares.reflected[0] + shares.passing[0] - 1.0).abs() < 1e-10);
}

#[test]
fn currents_of_whole_cells_are_those_of_a_grid_eight_times_as_fine() {
    // Promised: within 0.01 % of the spectrum's full grid with every table's points, here with
    // seven points more in each of its intervals.
    let cells = [
        include_str!("../../stacks/sandpiper.stack"),
        include_str!("../../stacks/kittiwake.stack"),
        include_str!("../../stacks/swift.stack"),
    ];
    for text in cells {
        let design = designs(text).remove(0);
        let condition = &design.conditions[0];
        let light = &condition.light;
        let model = LightModel::new(&design, condition.temperature_k, condition.incidence_rad);
        assert!(matches!(model, LightModel::Interference(_)), "{}", design.name.value);
        let gaps = design.lit_layers().filter(|(_, layer)| layer.collects());
        let gaps = gaps.filter_map(|(_, layer)| layer.material.as_ref()?.gap(condition.temperature_k));
        let edges: Vec<f64> = gaps.map(|gap| HC_EV / gap.ev).collect();
        let range_m = (280e-9, 1.2 * edges.iter().copied().fold(0.0, f64::max));
        let features = Features { range_m, jumps_m: edges, knots_m: model.knots_m() };
        let junctions = design.junctions.len();
        let (points, shares) = spectral_grid(light, &features, &model, junctions);
        let flux = light.photon_flux();
        let current = |points: &[f64], sums: Vec<Vec<f64>>| -> Vec<f64> {
            let here: Vec<f64> = points
                .iter()
                .map(|&at| bandloom::numerics::quadrature::linear_at(&light.wavelength_m, &flux, at))
                .collect();
            sums.iter().map(|sum| product_integral(points, sum, &here)).collect()
        };
        let mut fine: Vec<f64> = points
            .windows(2)
            .flat_map(|pair| (0..8).map(move |i| pair[0] + (pair[1] - pair[0]) * f64::from(i) / 8.0))
            .collect();
        fine.push(range_m.1);
        fine.dedup();
        let coarse = current(&points, model.by_junction(&shares, junctions));
        let exact = current(&fine, model.by_junction(&model.shares(&fine), junctions));
        for (coarse, exact) in coarse.iter().zip(&exact) {
            let off = coarse / exact - 1.0;
            assert!(off.abs() < 1e-4, "{}: {off}", design.name.value);
        }
    }
}
