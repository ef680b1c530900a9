//! The integration grid: refining it moves nothing that is printed.

use std::sync::Arc;

use bandloom::design::{Design, Duty, OpticsModel, Place, VoltageModel};
use bandloom::light::{SUN_DILUTION, Spectrum, blackbody, builtin};
use bandloom::materials::SharedMaterial;
use bandloom::materials::optics::{DirectEdge, IndexTable, Optics};
use bandloom::numerics::constants::HC_EV;
use bandloom::numerics::quadrature::{linear_along, product_integral};
use bandloom::optics::grid::{Features, spectral_grid};
use bandloom::optics::model::LightModel;

use super::designs::{empty, ideal, junction, layer, material};

fn direct(gap_ev: f64, urbach_ev: f64) -> SharedMaterial {
    let edge = DirectEdge { gap_ev, coefficient_per_m: 4e6, urbach_ev, index: None };
    material(gap_ev, Optics::Direct(edge))
}

/// A coarse table with an edge at `gap_ev`: k in steps of 25 nm, a tail below.
fn coarse_table(gap_ev: f64) -> SharedMaterial {
    let wavelength_m: Vec<f64> = (0..70).map(|i| (250.0 + 25.0 * f64::from(i)) * 1e-9).collect();
    let k = wavelength_m
        .iter()
        .map(|wavelength| {
            let above = HC_EV / wavelength - gap_ev;
            if above > 0.0 { 0.05 + 0.4 * above * above } else { 0.05 * (above / 0.02).exp() }
        })
        .collect();
    let n = vec![3.5; wavelength_m.len()];
    let table = IndexTable { wavelength_m, n, k, gap_ev: Some(gap_ev), edge_is_direct: true };
    material(gap_ev, Optics::Table(Arc::new(table)))
}

fn film_over_rest(film: SharedMaterial, thickness_m: f64, mirror: bool) -> Design {
    let mut design = empty();
    design.layers.push(layer("top.absorber", Duty::Absorber, Place::Junction(0), film, Some(thickness_m)));
    design.layers.push(layer("low.absorber", Duty::Absorber, Place::Junction(1), ideal(0.9, 0.7), None));
    design.junctions.push(junction("top", 0..1, VoltageModel::RadiativeLimit));
    design.junctions.push(junction("low", 1..2, VoltageModel::RadiativeLimit));
    if mirror {
        design.layers.push(layer("mirror", Duty::Mirror, Place::Rear, material(1.0, Optics::None), None));
    }
    design
}

fn currents(light: &Spectrum, optics: &LightModel, points: &[f64]) -> Vec<f64> {
    let flux = linear_along(&light.wavelength_m, &light.photon_flux(), points);
    let shares = optics.by_junction(&optics.shares(points), 2);
    shares.iter().map(|share| product_integral(points, share, &flux)).collect()
}

fn halved(points: &[f64]) -> Vec<f64> {
    let mut all: Vec<f64> = points.windows(2).flat_map(|pair| [pair[0], 0.5 * (pair[0] + pair[1])]).collect();
    all.extend(points.last());
    all.dedup();
    all
}

#[test]
fn halving_every_interval_moves_no_current_by_a_hundredth_of_a_percent() {
    let lights = [
        builtin("AM1.5G").expect("built in"),
        builtin("AM0").expect("built in"),
        Arc::new(blackbody(5772.0, SUN_DILUTION)),
        // A user's spectrum with hardly any points: flat photon flux over 300–1500 nm.
        Arc::new(Spectrum::from_table(
            "flat",
            vec![300e-9, 700e-9, 1500e-9],
            vec![7e8, 3e8, 1.4e8],
            "invented",
        )),
    ];
    for light in &lights {
        for film in [direct(1.42, 0.0), direct(1.42, 0.007), direct(1.8, 0.015), coarse_table(1.42)] {
            for thickness in [20e-9, 300e-9, 4e-6] {
                for mirror in [false, true] {
                    let design = film_over_rest(film.clone(), thickness, mirror);
                    let optics = LightModel::new(&design, 298.15, 0.0);
                    let features = Features {
                        range_m: light.range_m().expect("has points"),
                        jumps_m: optics.jumps_m(),
                        knots_m: optics.knots_m(),
                    };
                    let (points, shares) = spectral_grid(light, &features, &optics, 2);
                    assert!(points.windows(2).all(|pair| pair[0] < pair[1]));
                    // What comes with the grid is what the optics say there.
                    assert_eq!(shares.absorbed, optics.shares(&points).absorbed);
                    let here = currents(light, &optics, &points);
                    let once = halved(&points);
                    let often = halved(&halved(&halved(&once)));
                    for finer in [once, often] {
                        for (a, b) in here.iter().zip(currents(light, &optics, &finer)) {
                            assert!(
                                (b / a - 1.0).abs() < 1e-4,
                                "{} {thickness} {mirror} {}",
                                light.name,
                                b / a - 1.0
                            );
                        }
                    }
                }
            }
        }
    }
}

#[test]
fn halving_every_interval_resolves_fringes_too() {
    let light = builtin("AM1.5G").expect("built in");
    for film in [coarse_table(1.42), coarse_table(1.8)] {
        for thickness in [20e-9, 300e-9, 4e-6] {
            for behind in [20e-9, 300e-6] {
                let mut design = film_over_rest(film.clone(), thickness, false);
                design.layers[1].material = Some(coarse_table(0.9));
                design.layers[1].thickness_m = Some(behind);
                design.optics = OpticsModel::Interference { stated: None };
                let optics = LightModel::new(&design, 298.15, 0.4);
                assert!(matches!(optics, LightModel::Interference(_)));
                let features = Features {
                    range_m: light.range_m().expect("has points"),
                    jumps_m: vec![HC_EV / 1.42, HC_EV / 1.8, HC_EV / 0.9],
                    knots_m: optics.knots_m(),
                };
                let (points, _) = spectral_grid(&light, &features, &optics, 2);
                let here = currents(&light, &optics, &points);
                let often = halved(&halved(&halved(&points)));
                for (a, b) in here.iter().zip(currents(&light, &optics, &often)) {
                    assert!((b / a - 1.0).abs() < 1e-4, "{thickness} {behind} {}", b / a - 1.0);
                }
                let shares = optics.shares(&points);
                for at in 0..points.len() {
                    let absorbed: f64 = shares.absorbed.iter().map(|row| row[at]).sum();
                    assert!((shares.reflected[at] + absorbed + shares.passing[at] - 1.0).abs() < 1e-10);
                }
            }
        }
    }
}

#[test]
fn a_cut_moves_the_current_smoothly() {
    // An ideal edge between two points of the table gives the interpolated current, not that of a
    // whole interval: 0.3 nm apart, far less than the table's 1 nm.
    let light = builtin("AM1.5G").expect("built in");
    let current = |edge_nm: f64| {
        let mut design = empty();
        let gap = HC_EV / (edge_nm * 1e-9);
        design.layers.push(layer("j.absorber", Duty::Absorber, Place::Junction(0), ideal(gap, 1.0), None));
        design.junctions.push(junction("j", 0..1, VoltageModel::RadiativeLimit));
        let value = bandloom::evaluate::evaluate(&design, "by hand").value.expect("whole");
        10.0 * value.conditions[0].junctions[0].photocurrent_ma_per_cm2
    };
    for edge in [700.2, 700.5, 873.1] {
        let expected = light.photon_current(0.0, edge * 1e-9);
        assert!((current(edge) / expected - 1.0).abs() < 1e-9);
    }
}

#[test]
fn many_wavelengths_at_once_are_the_same_to_the_bit() {
    let table = coarse_table(1.42);
    let up: Vec<f64> = (0..400).map(|i| (200.0 + 5.0 * f64::from(i)) * 1e-9).collect();
    let down: Vec<f64> = up.iter().rev().copied().collect();
    for wavelengths in [up, down] {
        for shift in [0.0, -0.05, 0.3] {
            let each: Vec<f64> = wavelengths.iter().map(|&w| table.optics.absorption(w, shift)).collect();
            assert_eq!(table.optics.absorption_along(&wavelengths, shift), each);
        }
    }
}
