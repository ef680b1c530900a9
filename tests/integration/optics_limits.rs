//! Wave optics at the limits of what a file can state: many layers, mirrors of any size, hard angles.

use std::sync::Arc;

use bandloom::optics::wave::slopes::Merit;
use bandloom::optics::wave::{Index, Shares, Sheet, Stack};

const NM: f64 = 1e-9;

fn index(n: f64, k: f64) -> Arc<Index> {
    Arc::new(Index::constant(n, k, 2))
}

fn films(count: usize, pair: [(f64, f64, f64); 2]) -> Vec<Sheet> {
    let indices = pair.map(|(n, k, _)| index(n, k));
    (0..count)
        .map(|at| Sheet { index: indices[at % 2].clone(), thickness_m: pair[at % 2].2 * NM, coherent: true })
        .collect()
}

fn whole(shares: &Shares, at: usize) -> f64 {
    shares.absorbed.iter().map(|row| row[at]).chain([shares.reflected[at], shares.transmitted[at]]).sum()
}

#[test]
fn thousands_of_layers_keep_every_photon() {
    // Two wavelengths of one block between which the fields grow quite differently.
    let light = [550.0 * NM, 1100.0 * NM];
    for pair in [
        [(3.5, 0.0, 550.0 / 4.0 / 3.5), (1.4, 0.0, 550.0 / 4.0 / 1.4)],
        [(3.5, 0.02, 70.0), (2.9, 1e-4, 85.0)],
        [(0.05, 6.0, 20.0), (1e-3, 80.0, 5.0)],
        [(1.0, 0.0, 100.0), (1.0, 0.0, 130.0)],
    ] {
        let sheets = films(4_985, pair);
        for angle in [0.0, 1.2] {
            let stack = Stack::new(&light, (1.0, angle), sheets.clone(), index(3.6, 0.01));
            let shares = stack.solve();
            let merit = Merit {
                light: vec![1.0; 2],
                reflected: 1.0,
                transmitted: -1.0,
                absorbed: vec![0.5; sheets.len()],
            };
            let (same, gradient) = stack.solve_with_gradient(&merit);
            assert_eq!(shares, same);
            assert!(gradient.iter().all(|slope| slope.is_finite()), "{pair:?} {angle}");
            for at in 0..2 {
                assert!((whole(&shares, at) - 1.0).abs() < 1e-10, "{pair:?} {angle}: {}", whole(&shares, at));
                let least = shares.absorbed.iter().map(|row| row[at]).fold(f64::INFINITY, f64::min);
                assert!(least > -1e-10, "{pair:?} {angle}: {least}");
            }
        }
    }
}

#[test]
fn an_endless_quarter_wave_mirror_reflects_all() {
    // Within the stop band of 4,000 pairs nothing is left, far outside it the mean over fringes is.
    let sheets = films(8_000, [(2.32, 0.0, 550.0 / 4.0 / 2.32), (1.38, 0.0, 550.0 / 4.0 / 1.38)]);
    let shares = Stack::new(&[550.0 * NM, 1100.0 * NM], (1.0, 0.0), sheets, index(1.52, 0.0)).solve();
    assert!((shares.reflected[0] - 1.0).abs() < 1e-12, "{}", shares.reflected[0]);
    assert!((shares.reflected[1] - 0.05).abs() < 0.3, "{}", shares.reflected[1]);
}

#[test]
fn grazing_and_trapped_light_is_returned() {
    // From a medium denser than the film behind it, beyond the critical angle: all returns, but
    // through a gap thin against the wave some gets across (frustrated total reflection).
    let gap = |nm: f64, angle: f64| {
        let sheets = vec![Sheet { index: index(1.0, 0.0), thickness_m: nm * NM, coherent: true }];
        let front = [1.5, 1.5];
        let along = front.map(|n| n * f64::sin(angle));
        let stack = Stack::from_medium(&[600.0 * NM, 900.0 * NM], (&front, &along), sheets, index(1.5, 0.0));
        stack.solve().transmitted[0]
    };
    assert!(gap(20_000.0, 1.0) < 1e-12);
    // Closed form for s: T = 1/(1 + ((q² + γ²)/(2qγ))² sinh²(k₀γd)), q = n cos θ, γ² = n² sin²θ − 1.
    let (angle, nm) = (1.0_f64, 80.0);
    let (q, g) = (1.5 * angle.cos(), ((1.5 * angle.sin()).powi(2) - 1.0).sqrt());
    let depth = std::f64::consts::TAU / 600.0 * g * nm;
    let s = 1.0 / (1.0 + ((q * q + g * g) / (2.0 * q * g) * depth.sinh()).powi(2));
    // For p the same with q/n² in place of q.
    let p_q = q / 2.25;
    let p = 1.0 / (1.0 + ((p_q * p_q + g * g) / (2.0 * p_q * g) * depth.sinh()).powi(2));
    assert!((gap(nm, angle) - 0.5 * (s + p)).abs() < 1e-12, "{} {}", gap(nm, angle), 0.5 * (s + p));
    // Along the face everything is returned, whatever stands behind.
    for sheets in [Vec::new(), films(5, [(2.0, 0.1, 50.0), (3.5, 0.0, 70.0)])] {
        let stack = Stack::new(
            &[500.0 * NM, 800.0 * NM],
            (1.0, std::f64::consts::FRAC_PI_2),
            sheets,
            index(3.5, 0.2),
        );
        let shares = stack.solve();
        assert!((shares.reflected[0] - 1.0).abs() < 1e-6 && (whole(&shares, 0) - 1.0).abs() < 1e-10);
    }
}

#[test]
fn what_no_index_can_be_is_held_at_the_nearest() {
    let odd = Arc::new(Index::new(&[f64::NAN, -2.0], &[-0.5, f64::NAN]));
    let sheets = vec![Sheet { index: odd, thickness_m: 80.0 * NM, coherent: true }];
    let shares = Stack::new(&[500.0 * NM, 800.0 * NM], (1.0, 0.4), sheets, index(3.5, 0.2)).solve();
    for at in 0..2 {
        assert!((whole(&shares, at) - 1.0).abs() < 1e-10);
    }
}
