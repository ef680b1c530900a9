//! Faces that scatter, against closed forms.

use std::sync::Arc;

use bandloom::design::{Design, Duty, OpticsModel, Place, Texture, VoltageModel};
use bandloom::materials::SharedMaterial;
use bandloom::materials::optics::{IndexTable, Optics};
use bandloom::optics::model::LightModel;
use bandloom::source::Span;

use crate::integration::designs::{empty, junction, layer, material};

const AT_M: f64 = 900e-9;
const N: f64 = 3.6;
const FACET: f64 = 54.735_610_317_245_34;

fn constant(n: f64, k: f64) -> SharedMaterial {
    let table =
        IndexTable { wavelength_m: vec![AT_M], n: vec![n], k: vec![k], gap_ev: None, edge_is_direct: false };
    material(1.1, Optics::Table(Arc::new(table)))
}

/// Films and covers (material, um) over a junction of one wafer of absorption depth `depth`, over
/// further layers; a mirror last where there is one.
fn design(
    (pyramids, lambertian_rear): (bool, bool),
    above: &[(SharedMaterial, f64)],
    depth: f64,
    (below, mirror): (&[(SharedMaterial, f64)], Option<SharedMaterial>),
) -> Design {
    let mut design = empty();
    design.optics = OpticsModel::Interference { stated: None };
    design.texture = Some(Texture { pyramids, lambertian_rear, span: Span::default() });
    for (at, (material, um)) in above.iter().enumerate() {
        let duty = if *um > 10.0 { Duty::Cover } else { Duty::Coat };
        design.layers.push(layer(&format!("top{at}"), duty, Place::Front, material.clone(), Some(1e-6 * um)));
    }
    let k = depth / 200e-6 * AT_M / (4.0 * std::f64::consts::PI);
    let at = design.layers.len();
    design.layers.push(layer("only.wafer", Duty::Wafer, Place::Junction(0), constant(N, k), Some(200e-6)));
    design.junctions.push(junction("only", at..at + 1, VoltageModel::RadiativeLimit));
    for (at, (material, um)) in below.iter().enumerate() {
        let place = Place::Rear;
        design.layers.push(layer(
            &format!("rear{at}"),
            Duty::Layer,
            place,
            material.clone(),
            Some(1e-6 * um),
        ));
    }
    if let Some(mirror) = mirror {
        design.layers.push(layer("mirror", Duty::Mirror, Place::Rear, mirror, None));
    }
    design
}

/// Reflected, absorbed in each row, passing.
fn solve(design: &Design, degrees: f64) -> (f64, Vec<f64>, f64) {
    let shares = LightModel::new(design, 300.0, f64::to_radians(degrees)).shares(&[AT_M]);
    (shares.reflected[0], shares.absorbed.iter().map(|row| row[0]).collect(), shares.passing[0])
}

fn close(value: f64, expected: f64, within: f64) {
    assert!((value - expected).abs() <= within, "{value} is not {expected} within {within}");
}

/// Fresnel's reflectances from air onto `n`, s and p.
fn fresnel(n: f64, degrees: f64) -> (f64, f64) {
    let (sine, outside) = degrees.to_radians().sin_cos();
    let inside = (1.0 - (sine / n).powi(2)).sqrt();
    (
        ((outside - n * inside) / (outside + n * inside)).powi(2),
        ((n * outside - inside) / (n * outside + inside)).powi(2),
    )
}

#[test]
fn every_photon_is_accounted_for() {
    let covers: [&[(SharedMaterial, f64)]; 3] = [
        &[],
        &[(constant(1.9, 0.01), 0.08)],
        &[(constant(1.5, 1e-7), 3000.0), (constant(1.48, 1e-7), 400.0), (constant(2.0, 1e-3), 0.07)],
    ];
    let rear = [(constant(1.45, 0.0), 0.1), (constant(2.5, 0.02), 0.3)];
    for above in covers {
        for texture in [(true, false), (false, true), (true, true)] {
            for depth in [0.0, 1e-3, 0.4, 30.0] {
                for mirror in [None, Some(constant(0.2, 5.0))] {
                    for degrees in [0.0, 30.0, 60.0, 88.0] {
                        let design = design(texture, above, depth, (&rear, mirror.clone()));
                        let (reflected, absorbed, passing) = solve(&design, degrees);
                        let all = absorbed.iter().copied().chain([reflected, passing]);
                        for share in all.clone() {
                            assert!((0.0..=1.0).contains(&share), "{share} {texture:?} {depth} {degrees}");
                        }
                        close(all.sum(), 1.0, 1e-10);
                    }
                }
            }
        }
    }
}

#[test]
fn a_lambertian_rear_lengthens_the_path_by_four_n_squared() {
    // Tiedje, Yablonovitch, Cody and Brooks (1984): absorptance αd/(αd + 1/(4n²)) of the light let
    // in; the 1 in 1/(4n²) is what the front lets out of the cone, for a bare face the mean of
    // Fresnel's transmittance over the hemisphere outside.
    let steps = 20_000;
    let out: f64 = (0..steps)
        .map(|i| {
            let cosine = (f64::from(i) + 0.5) / f64::from(steps);
            let (s, p) = fresnel(N, cosine.acos().to_degrees());
            2.0 * cosine * (1.0 - 0.5 * (s + p)) / f64::from(steps)
        })
        .sum();
    let mirror = || Some(constant(1e-3, 300.0));
    for depth in [1e-4, 1e-3, 4e-3] {
        let (_, absorbed, _) = solve(&design((false, true), &[], depth, (&[], mirror())), 0.0);
        let enters = 1.0 - ((N - 1.0) / (N + 1.0)).powi(2);
        // The first way down is straight: one of some fifty passes is missing.
        close(absorbed[0] / (enters * depth / (depth + out / (4.0 * N * N))), 1.0, 1.5e-2);
        // Twenty times and more what flat faces give, about 2αd.
        let mut flat = design((false, true), &[], depth, (&[], mirror()));
        flat.texture = None;
        assert!(absorbed[0] > 5.0 * solve(&flat, 0.0).1[0]);
    }
}

#[test]
fn pyramids_reflect_twice() {
    // Facets at atan √2 to the face: 54.74°, then 180° − 3·54.74° = 15.79° (Campbell and Green 1987).
    let (reflected, absorbed, _) = solve(&design((true, false), &[], 40.0, (&[], None)), 0.0);
    let (first, second) = (fresnel(N, FACET), fresnel(N, 180.0 - 3.0 * FACET));
    let expected = 0.5 * (first.0 * second.0 + first.1 * second.1);
    // The wafer's k adds a few millionths.
    close(reflected, expected, 1e-5);
    close(absorbed[0], 1.0 - expected, 1e-5);
    // A flat face returns a third.
    assert!(reflected < 0.4 * ((N - 1.0) / (N + 1.0)).powi(2));
}

#[test]
fn profiles_hold_what_the_layers_absorb() {
    let films = [(constant(2.0, 0.05), 0.08), (constant(3.0, 0.1), 0.4)];
    for texture in [(true, false), (false, true), (true, true)] {
        for depth in [1e-3, 0.5, 20.0] {
            let design = design(texture, &films, depth, (&[], Some(constant(0.2, 5.0))));
            let model = LightModel::new(&design, 300.0, 0.3);
            let shares = model.shares(&[AT_M]);
            let profiles = model.profiles(&[0, 1, 2], &[AT_M]);
            for (row, profile) in profiles.iter().enumerate() {
                let profile = profile.as_ref().expect("a layer")[0];
                close(profile.between(0.0, profile.thickness_m), shares.absorbed[row][0], 1e-10);
                assert!(profile.at(0.3 * profile.thickness_m) >= 0.0);
            }
        }
    }
}
