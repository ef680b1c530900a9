//! Wave optics against closed forms and a general-purpose library.

use std::f64::consts::PI;
use std::sync::Arc;

use bandloom::optics::wave::slopes::Merit;
use bandloom::optics::wave::{Index, Kernel, Polarization, Shares, Sheet, Stack};

const NM: f64 = 1e-9;

fn film(n: f64, k: f64, nm: f64) -> Sheet {
    Sheet { index: Arc::new(Index::constant(n, k, 1)), thickness_m: nm * NM, coherent: true }
}

fn thick(n: f64, k: f64, um: f64) -> Sheet {
    Sheet { coherent: false, ..film(n, k, 1000.0 * um) }
}

fn rear(n: f64, k: f64) -> Arc<Index> {
    Arc::new(Index::constant(n, k, 1))
}

/// One wavelength in nm.
fn stack(nm: f64, degrees: f64, sheets: &[Sheet], (n, k): (f64, f64)) -> Stack {
    Stack::new(&[nm * NM], (1.0, degrees.to_radians()), sheets.to_vec(), rear(n, k))
}

fn normal(nm: f64, sheets: &[Sheet], behind: (f64, f64)) -> Shares {
    stack(nm, 0.0, sheets, behind).solve()
}

fn close(value: f64, expected: f64, within: f64) {
    assert!((value - expected).abs() <= within, "{value} is not {expected} within {within}");
}

fn sum(shares: &Shares) -> f64 {
    shares.reflected[0] + shares.transmitted[0] + shares.absorbed.iter().map(|row| row[0]).sum::<f64>()
}

#[test]
fn fresnel_quarter_wave_and_half_wave_have_their_closed_forms() {
    // ((n − 1)/(n + 1))², Fresnel; a quarter wave of √n removes it; a half wave is as absent.
    close(normal(600.0, &[], (3.5, 0.0)).reflected[0], (2.5_f64 / 4.5).powi(2), 1e-12);
    let matching = 3.5_f64.sqrt();
    let quarter = film(matching, 0.0, 600.0 / 4.0 / matching);
    close(normal(600.0, &[quarter], (3.5, 0.0)).reflected[0], 0.0, 1e-12);
    let half = film(2.1, 0.0, 600.0 / 2.0 / 2.1);
    close(normal(600.0, &[half], (3.5, 0.0)).reflected[0], (2.5_f64 / 4.5).powi(2), 1e-12);
    let absent = film(2.1, 0.4, 0.0);
    let shares = normal(600.0, &[absent], (3.5, 0.0));
    close(shares.reflected[0], (2.5_f64 / 4.5).powi(2), 1e-12);
    close(shares.absorbed[0][0], 0.0, 1e-14);
}

#[test]
fn a_quarter_wave_mirror_has_its_closed_form() {
    // ((n₀ n_L^2N − n_s n_H^2N)/(n₀ n_L^2N + n_s n_H^2N))² for N pairs, high index first.
    let (high, low, behind, at) = (2.32_f64, 1.38_f64, 1.52, 550.0);
    for pairs in [1, 3, 8, 20, 100] {
        let sheets: Vec<Sheet> = (0..pairs)
            .flat_map(|_| [film(high, 0.0, at / 4.0 / high), film(low, 0.0, at / 4.0 / low)])
            .collect();
        let ratio = (high / low).powi(2 * pairs);
        let expected = ((1.0 - behind * ratio) / (1.0 + behind * ratio)).powi(2);
        let shares = normal(at, &sheets, (behind, 0.0));
        close(shares.reflected[0], expected, 1e-10);
        close(sum(&shares), 1.0, 1e-10);
    }
}

#[test]
fn a_thick_plate_adds_fluxes_between_its_faces() {
    // R = ρ + ρ(1 − ρ)²/(1 − ρ²) with ρ = 0.04: 2ρ/(1 + ρ).
    let shares = normal(600.0, &[thick(1.5, 0.0, 2000.0)], (1.0, 0.0));
    close(shares.reflected[0], 0.08 / 1.04, 1e-10);
    close(shares.transmitted[0], 0.96 / 1.04, 1e-10);
    // With absorption t = exp(−αd): T = (1 − ρ)² t/(1 − ρ² t²); ρ with k in both its terms.
    let (n, k, um) = (1.5, 2e-5, 2000.0);
    let rho = ((n - 1.0_f64).powi(2) + k * k) / ((n + 1.0).powi(2) + k * k);
    let t = (-4.0 * PI * k * um * 1000.0 / 600.0).exp();
    let shares = normal(600.0, &[thick(n, k, um)], (1.0, 0.0));
    close(shares.transmitted[0], (1.0 - rho).powi(2) * t / (1.0 - rho * rho * t * t), 1e-9);
}

#[test]
fn random_stacks_agree_with_a_general_purpose_library() {
    let text = include_str!("../fixtures/optics/thin_films.json");
    let data: serde_json::Value = serde_json::from_str(text).expect("a fixture");
    let cases = data["cases"].as_array().expect("cases");
    assert!(cases.len() > 100);
    let number = |value: &serde_json::Value| value.as_f64().expect("a number");
    for (at, case) in cases.iter().enumerate() {
        let sheets: Vec<Sheet> = case["sheets"]
            .as_array()
            .expect("sheets")
            .iter()
            .map(|sheet| Sheet {
                coherent: sheet["coherent"].as_bool().expect("a flag"),
                ..film(number(&sheet["n"]), number(&sheet["k"]), number(&sheet["nm"]))
            })
            .collect();
        let behind = (number(&case["rear"][0]), number(&case["rear"][1]));
        let stack = stack(number(&case["wavelength_nm"]), number(&case["degrees"]), &sheets, behind);
        let polarization = if case["polarization"] == "s" { Polarization::S } else { Polarization::P };
        let shares = stack.solve_polarized(polarization);
        let agree = |value: f64, expected: &serde_json::Value, what: &str| {
            let expected = number(expected);
            assert!((value - expected).abs() < 1e-9, "case {at}, {what}: {value} is not {expected}");
        };
        agree(shares.reflected[0], &case["reflected"], "reflected");
        agree(shares.transmitted[0], &case["transmitted"], "transmitted");
        for (row, expected) in shares.absorbed.iter().zip(case["absorbed"].as_array().expect("rows")) {
            agree(row[0], expected, "absorbed");
        }
        close(sum(&shares), 1.0, 1e-10);
        // Absorption per nm in the middle of one film.
        if let Some(film) = case["density_film"].as_u64() {
            let profile = stack.profile_polarized(polarization, film as usize)[0];
            agree(profile.at(0.5 * profile.thickness_m) * NM, &case["density_per_nm"], "density");
        }
        for (sheet, row) in shares.absorbed.iter().enumerate() {
            let profile = stack.profile_polarized(polarization, sheet)[0];
            close(profile.between(0.0, profile.thickness_m), row[0], 1e-10);
        }
    }
}

/// A number in 0..1 from a seed (Steele, Lea and Flood's mixing, OOPSLA 2014).
fn random(seed: &mut u64) -> f64 {
    *seed = seed.wrapping_add(0x9E37_79B9_7F4A_7C15);
    let mut z = *seed;
    z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    ((z ^ (z >> 31)) >> 11) as f64 / (1u64 << 53) as f64
}

fn random_sheets(seed: &mut u64, count: usize) -> Vec<Sheet> {
    (0..count)
        .map(|_| {
            let k = if random(seed) < 0.2 { 0.0 } else { 10f64.powf(-5.0 + 5.3 * random(seed)) };
            film(1.2 + 3.3 * random(seed), k, 2.0 + 250.0 * random(seed))
        })
        .collect()
}

#[test]
fn transmittance_is_the_same_from_either_side() {
    let mut seed = 7;
    for case in 0..60 {
        let mut sheets = random_sheets(&mut seed, 10);
        if case % 3 == 0 {
            sheets.insert(4, thick(1.6, 2e-6, 300.0));
        }
        let (nm, degrees) = (400.0 + 900.0 * random(&mut seed), 80.0 * random(&mut seed));
        for polarization in [Polarization::S, Polarization::P] {
            let forth = stack(nm, degrees, &sheets, (1.0, 0.0)).solve_polarized(polarization);
            let mut turned = sheets.clone();
            turned.reverse();
            let back = stack(nm, degrees, &turned, (1.0, 0.0)).solve_polarized(polarization);
            close(forth.transmitted[0], back.transmitted[0], 1e-12 + 1e-10 * back.transmitted[0]);
        }
    }
}

#[test]
fn hard_stacks_stay_finite_and_keep_every_photon() {
    let absorbing = film(4.0, 2.0, 500_000.0);
    let gap = [film(3.5, 0.0, 300.0), film(1.0, 0.0, 400.0), film(3.5, 0.01, 300.0)];
    let mut seed = 3;
    let many: Vec<Sheet> = (0..240).flat_map(|_| random_sheets(&mut seed, 1)).collect();
    let mixed = [film(2.3, 0.0, 60.0), thick(3.6, 0.3, 500.0), film(1.4, 0.0, 100.0), thick(1.0, 0.0, 20.0)];
    let metals = [film(0.05, 4.0, 30.0), film(1.45, 0.0, 90.0), film(0.05, 4.0, 200.0)];
    let stacks: [&[Sheet]; 6] = [&[absorbing], &gap, &many, &mixed, &metals, &[]];
    for sheets in stacks {
        for behind in [(1.0, 0.0), (0.2, 3.5), (3.5, 0.0), (4.0, 1e-3)] {
            for degrees in [0.0, 1e-9, 16.6, 45.0, 80.0, 89.9, 90.0] {
                for nm in [280.0, 650.0, 4000.0] {
                    let shares = stack(nm, degrees, sheets, behind).solve();
                    let rows = shares.absorbed.iter().map(|row| row[0]);
                    for value in rows.chain([shares.reflected[0], shares.transmitted[0]]) {
                        assert!(
                            (-1e-10..=1.0 + 1e-10).contains(&value),
                            "{value} at {degrees} {nm} {behind:?}"
                        );
                    }
                    close(sum(&shares), 1.0, 1e-10);
                }
            }
        }
    }
    // From glass onto a gap of air beyond the critical angle: everything returns.
    let inside =
        Stack::new(&[600.0 * NM], (1.5, 60f64.to_radians()), vec![film(1.0, 0.0, 20_000.0)], rear(1.5, 0.0));
    close(inside.solve().reflected[0], 1.0, 1e-12);
}

#[test]
fn matched_thick_absorbers_reach_the_ray_limit() {
    // Nothing reflects between equal indices: Beer–Lambert.
    let (n, k, um) = (3.6, 1e-3, 40.0);
    for coherent in [true, false] {
        let absorber = Sheet { coherent, ..thick(n, k, um) };
        let shares = Stack::new(&[800.0 * NM], (n, 0.0), vec![absorber], rear(n, k)).solve();
        let expected = (-4.0 * PI * k * um * 1000.0 / 800.0).exp();
        close(shares.transmitted[0], expected, 1e-6);
        close(shares.absorbed[0][0], 1.0 - expected, 1e-6);
    }
}

#[test]
fn a_profile_integrates_against_exponentials() {
    let sheets = [film(2.0, 0.0, 80.0), film(3.6, 0.12, 700.0), film(3.2, 0.0, 200.0)];
    for degrees in [0.0, 50.0] {
        let profile = stack(620.0, degrees, &sheets, (0.2, 3.4)).profile(1)[0];
        for rate in [0.0, 3e6, -8e6, 9e7] {
            let (from, to) = (130.0 * NM, 610.0 * NM);
            // Simpson's rule over 20,000 intervals.
            let (steps, step) = (20_000, (to - from) / 20_000.0);
            let value = |i: i32| {
                let z = from + step * f64::from(i);
                profile.at(z) * (rate * (z - from)).exp()
            };
            let simpson: f64 = (0..steps / 2)
                .map(|i| (value(2 * i) + 4.0 * value(2 * i + 1) + value(2 * i + 2)) * step / 3.0)
                .sum();
            let exact = profile.weighted(rate, from, to);
            close(exact / simpson, 1.0, 1e-10);
        }
    }
}

#[test]
fn slopes_agree_with_central_differences() {
    let mut seed = 11;
    let mut stacks: Vec<Vec<Sheet>> = (0..6).map(|_| random_sheets(&mut seed, 8)).collect();
    for shape in ["ftff", "fftf", "tfft", "fftfftf"] {
        let mixed = shape.chars().map(|kind| match kind {
            'f' => random_sheets(&mut seed, 1).remove(0),
            _ => thick(1.4 + random(&mut seed), 1e-4 * random(&mut seed), 40.0),
        });
        stacks.push(mixed.collect());
    }
    for (at, sheets) in stacks.iter().enumerate() {
        let (nm, degrees) = (500.0 + 700.0 * random(&mut seed), [0.0, 50.0][at % 2]);
        let behind = [(1.0, 0.0), (0.2, 3.4), (3.5, 0.1)][at % 3];
        let solve = |sheets: &[Sheet]| stack(nm, degrees, sheets, behind).solve();
        let (shares, slopes) = stack(nm, degrees, sheets, behind).solve_with_slopes();
        assert_eq!(shares, solve(sheets));
        for by in 0..sheets.len() {
            // Ridders: two central differences, their leading error taken out. Thick layers only
            // fade, and want longer steps.
            let h = if sheets[by].coherent { 0.2 * NM } else { 300.0 * NM };
            let moved = |h: f64| {
                let mut sheets = sheets.clone();
                sheets[by].thickness_m += h;
                solve(&sheets)
            };
            let (near, far) = ((moved(h), moved(-h)), (moved(2.0 * h), moved(-2.0 * h)));
            let difference = |of: &dyn Fn(&Shares) -> f64| {
                let first = (of(&near.0) - of(&near.1)) / (2.0 * h);
                let second = (of(&far.0) - of(&far.1)) / (4.0 * h);
                (4.0 * first - second) / 3.0
            };
            let agree = |slope: f64, of: &dyn Fn(&Shares) -> f64, what: &str| {
                let expected = difference(of);
                // Rounding of the difference itself: 1e-16/h.
                let within = 1e-6 * expected.abs() + 2e-15 / h + 1e-3;
                assert!(
                    (slope - expected).abs() < within,
                    "stack {at}, d {what}/d {by}: {slope} is not {expected}"
                );
            };
            agree(slopes.reflected(by, 0), &|shares| shares.reflected[0], "R");
            agree(slopes.transmitted(by, 0), &|shares| shares.transmitted[0], "T");
            for of in 0..sheets.len() {
                agree(slopes.absorbed(of, by, 0), &|shares| shares.absorbed[of][0], &format!("A{of}"));
            }
        }
    }
}

#[test]
fn one_changed_sheet_answers_as_the_whole_stack_does() {
    // The whole stack worked out anew is what the library above is held against.
    let mut seed = 41;
    for shape in ["ffffffffffffffffffff", "ftff", "fftf", "tfft", "fftfftf", "f", "t"] {
        let sheets: Vec<Sheet> = shape
            .chars()
            .map(|kind| match kind {
                'f' => random_sheets(&mut seed, 1).remove(0),
                _ => thick(1.4 + random(&mut seed), 1e-5 * random(&mut seed), 40.0),
            })
            .collect();
        for degrees in [0.0, 55.0] {
            let behind = [(1.0, 0.0), (0.2, 3.4), (3.5, 0.1)][seed as usize % 3];
            let nm = 400.0 + 800.0 * random(&mut seed);
            let whole = stack(nm, degrees, &sheets, behind);
            for sheet in 0..sheets.len() {
                let one = whole.change_of(sheet);
                let unit = if sheets[sheet].coherent { 300.0 * NM } else { 60_000.0 * NM };
                for thickness_m in [sheets[sheet].thickness_m, 0.0, unit * random(&mut seed)] {
                    let mut changed = sheets.clone();
                    changed[sheet].thickness_m = thickness_m;
                    let expected = stack(nm, degrees, &changed, behind).solve();
                    let (reflected, absorbed) = one.solve(thickness_m);
                    close(reflected[0], expected.reflected[0], 1e-11);
                    close(absorbed[0], expected.absorbed[sheet][0], 1e-11);
                }
            }
        }
    }
}

#[test]
fn every_kernel_agrees_and_all_but_the_fused_to_the_bit() {
    let count = 70;
    let wavelengths: Vec<f64> = (0..count).map(|i| (350.0 + 13.0 * f64::from(i)) * NM).collect();
    let mut seed = 29;
    let sheets: Vec<Sheet> = (0..30)
        .map(|at| {
            let (n, k) = (1.3 + 3.0 * random(&mut seed), 0.1 * random(&mut seed));
            let index = Arc::new(Index::constant(n, k, count as usize));
            let coherent = at != 11;
            let thickness_m = if coherent { 200.0 * NM * random(&mut seed) } else { 30_000.0 * NM };
            Sheet { index, thickness_m, coherent }
        })
        .collect();
    for degrees in [0.0, 0.9] {
        let behind = Arc::new(Index::constant(3.5, 0.2, count as usize));
        let of = |kernel| {
            let stack = Stack::new(&wavelengths, (1.0, degrees), sheets.clone(), behind.clone());
            stack.with_kernel(kernel).solve()
        };
        let widest = of(Kernel::Widest);
        assert_eq!(widest, of(Kernel::Avx2));
        assert_eq!(widest, of(Kernel::Baseline));
        let fused = of(Kernel::fused());
        for (row, fused) in widest.absorbed.iter().zip(&fused.absorbed) {
            row.iter().zip(fused).for_each(|(value, fused)| close(*fused, *value, 1e-12));
        }
    }
}

#[test]
fn wavelengths_do_not_see_each_other_nor_threads() {
    // Bits are those of each wavelength alone, however many share a block and whoever works.
    let count = 103;
    let wavelengths: Vec<f64> = (0..count).map(|i| (350.0 + 9.0 * f64::from(i)) * NM).collect();
    let mut seed = 5;
    let sheets: Vec<Sheet> = random_sheets(&mut seed, 9)
        .into_iter()
        .enumerate()
        .map(|(at, sheet)| {
            let (n, k) = (1.3 + 0.2 * at as f64, 0.01 * at as f64);
            Sheet { index: Arc::new(Index::constant(n, k, count as usize)), ..sheet }
        })
        .collect();
    let behind = Arc::new(Index::constant(3.5, 0.2, count as usize));
    let of =
        |wavelengths: &[f64]| Stack::new(wavelengths, (1.0, 0.6), sheets.clone(), behind.clone()).solve();
    let whole = of(&wavelengths);
    for (at, &wavelength) in wavelengths.iter().enumerate() {
        let alone = of(&[wavelength]);
        assert_eq!(alone.reflected[0].to_bits(), whole.reflected[at].to_bits());
        for (one, all) in alone.absorbed.iter().zip(&whole.absorbed) {
            assert_eq!(one[0].to_bits(), all[at].to_bits());
        }
    }
    let threads: Vec<_> = (0..4)
        .map(|_| std::thread::scope(|scope| scope.spawn(|| of(&wavelengths)).join().expect("no panic")))
        .collect();
    assert!(threads.iter().all(|shares| *shares == whole));
}

#[test]
fn the_gradient_of_a_merit_is_the_sum_of_its_slopes() {
    let mut seed = 23;
    let mut stacks = vec![random_sheets(&mut seed, 9)];
    let mut mixed = random_sheets(&mut seed, 5);
    mixed.insert(2, thick(1.5, 3e-5, 50.0));
    mixed.push(thick(3.6, 1e-4, 90.0));
    stacks.push(mixed);
    for sheets in stacks {
        let absorbed: Vec<f64> = sheets.iter().map(|_| random(&mut seed)).collect();
        let merit = Merit { light: vec![2.5], reflected: -0.3, transmitted: 0.7, absorbed };
        let stack = stack(730.0, 40.0, &sheets, (0.3, 3.0));
        let (shares, slopes) = stack.solve_with_slopes();
        let (same, gradient) = stack.solve_with_gradient(&merit);
        assert_eq!(shares, same);
        for (by, gradient) in gradient.iter().enumerate() {
            let each = (0..sheets.len()).map(|of| merit.absorbed[of] * slopes.absorbed(of, by, 0));
            let sum = each.sum::<f64>() - 0.3 * slopes.reflected(by, 0) + 0.7 * slopes.transmitted(by, 0);
            close(*gradient, 2.5 * sum, 1e-9 * (1e6 + sum.abs()));
        }
    }
}
