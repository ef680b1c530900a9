//! What a junction emits into the layers below, against closed forms.

use std::sync::Arc;

use bandloom::design::{Design, Duty, OpticsModel, Place, VoltageModel};
use bandloom::materials::SharedMaterial;
use bandloom::materials::optics::{IndexTable, Optics};
use bandloom::optics::model::LightModel;

use crate::integration::designs::{empty, junction, layer, material};

const AT_M: f64 = 800e-9;
const N: f64 = 3.5;

/// The same index at every wavelength.
fn constant(n: f64, k: f64) -> SharedMaterial {
    let table =
        IndexTable { wavelength_m: vec![AT_M], n: vec![n], k: vec![k], gap_ev: None, edge_is_direct: false };
    material(1.4, Optics::Table(Arc::new(table)))
}

/// `k` that absorbs `depth` over `um`.
fn fading(depth: f64, um: f64) -> f64 {
    depth / (um * 1e-6) * AT_M / (4.0 * std::f64::consts::PI)
}

enum Rear {
    Wafer(SharedMaterial),
    Mirror(SharedMaterial),
}

/// Junctions of one absorber each, thickness in um, over a rear.
fn design(waves: bool, absorbers: &[(SharedMaterial, f64)], rear: Rear) -> Design {
    let mut design = empty();
    design.optics = if waves {
        OpticsModel::Interference { stated: None }
    } else {
        OpticsModel::OnePass { front_reflectance: 0.0, stated: true }
    };
    for (index, (material, um)) in absorbers.iter().enumerate() {
        let (name, place) = (format!("j{index}"), Place::Junction(index));
        let absorber = layer(&format!("{name}.base"), Duty::Base, place, material.clone(), Some(1e-6 * um));
        design.layers.push(absorber);
        design.junctions.push(junction(&name, index..index + 1, VoltageModel::RadiativeLimit));
    }
    design.layers.push(match rear {
        Rear::Wafer(material) => layer("wafer", Duty::Wafer, Place::Rear, material, Some(400e-6)),
        Rear::Mirror(material) => layer("mirror", Duty::Mirror, Place::Rear, material, None),
    });
    design
}

fn lost(design: &Design) -> f64 {
    LightModel::new(design, 300.0, 0.0).emissivity_down(0, &[AT_M])[0]
}

fn close(value: f64, expected: f64, share: f64) {
    assert!((value / expected - 1.0).abs() < share, "{value} is not {expected}");
}

#[test]
fn an_opaque_junction_on_a_matched_absorber_loses_n_squared() {
    // Emission into a half-space of index n is n² times that into vacuum (Planck in a medium).
    // By waves a little returns at grazing angles, where real index meets n + ik.
    for (waves, k, within) in [(false, 0.05, 1e-3), (true, 0.02, 1e-2)] {
        let opaque = [(constant(N, k), 9.9)];
        close(lost(&design(waves, &opaque, Rear::Wafer(constant(N, k)))), N * N, within);
    }
}

#[test]
fn a_faint_junction_loses_all_it_emits() {
    // van Roosbroeck and Shockley: a layer sends out 4n²αd of black-body light in all directions;
    // with an absorber of its own index behind it, all of it leaves.
    let (depth, um) = (1e-5, 8.0);
    let faint = [(constant(N, fading(depth, um)), um)];
    let behind = || Rear::Wafer(constant(N, 1e-3));
    let by_waves = design(true, &faint, behind());
    let front = LightModel::new(&by_waves, 300.0, 0.0).emissivity(0, &[AT_M])[0];
    close(front + lost(&by_waves), 4.0 * N * N * depth, 1e-2);
    // In one pass: straight out within the critical angle θc, down and back again beyond it.
    let critical = (1.0 - N.powi(-2)).sqrt();
    close(lost(&design(false, &faint, behind())), 2.0 * N * N * depth * (1.0 + critical), 1e-4);
}

#[test]
fn what_stands_behind_dictates_what_is_lost() {
    let opaque = || [(constant(N, 0.05), 9.9)];
    for waves in [false, true] {
        let silvered = lost(&design(waves, &opaque(), Rear::Mirror(constant(0.01, 300.0))));
        assert!((0.0..0.02).contains(&silvered), "{silvered}");
    }
    // A clear wafer to air: what Fresnel lets out of the rear face, mean of s and p, ∫₀¹ (1 − R) du,
    // by the midpoint rule in the cosine outside.
    let steps = 20_000;
    let out: f64 = (0..steps)
        .map(|i| {
            let c = (f64::from(i) + 0.5) / f64::from(steps);
            let inside = (1.0 - (1.0 - c * c) / (N * N)).sqrt();
            let s = (N * inside - c) / (N * inside + c);
            let p = (N * c - inside) / (N * c + inside);
            2.0 * c * (1.0 - 0.5 * (s * s + p * p)) / f64::from(steps)
        })
        .sum();
    close(lost(&design(true, &opaque(), Rear::Wafer(constant(N, 0.0)))), out, 5e-3);
}

#[test]
fn light_between_two_junctions_is_the_same_both_ways() {
    let (one, two) = ((constant(N, 4e-3), 1.5), (constant(N, 2e-2), 0.9));
    for waves in [false, true] {
        let between = |first: &(SharedMaterial, f64), second: &(SharedMaterial, f64)| {
            let mut design = design(waves, &[first.clone(), second.clone()], Rear::Wafer(constant(N, 0.0)));
            design.layers.pop();
            LightModel::new(&design, 300.0, 0.0).downward(0, 2, &[AT_M]).expect("an index").to[1][0]
        };
        let (forth, back) = (between(&one, &two), between(&two, &one));
        if waves {
            close(forth, back, 1e-9);
        }
        assert!(forth > 0.1 && back > 0.1);
    }
}

#[test]
fn the_next_junction_gets_a_share_and_an_opaque_one_all() {
    let faint = (constant(N, fading(0.5, 1.0)), 1.0);
    for waves in [false, true] {
        let share = |um: f64, rear: f64| {
            let own = [faint.clone(), (constant(N, 0.05), um)];
            let model = LightModel::new(&design(waves, &own, Rear::Wafer(constant(N, rear))), 300.0, 0.0);
            let share = model.coupling_share((0, 1), &[AT_M])[0];
            assert_eq!(model.coupling_share((1, 0), &[AT_M]), [0.0]);
            share
        };
        close(share(9.9, 0.05), 1.0, 2e-2);
        // Over a clear wafer nothing else takes it, but for what the rear lets out.
        let (thin, thinner) = (share(0.5, 0.05), share(0.1, 0.05));
        assert!(thin < 0.75 && thinner < 0.5 * thin, "{thin} {thinner}");
    }
}

#[test]
fn a_limit_study_counts_the_front_only() {
    let ideal = crate::integration::designs::limit_stack(&[1.8, 1.2]);
    let model = LightModel::new(&ideal, 300.0, 0.0);
    assert_eq!(model.downward(0, 2, &[AT_M]), None);
    assert_eq!(model.emissivity_down(0, &[AT_M, 0.5 * AT_M]), [0.0, 0.0]);
}
