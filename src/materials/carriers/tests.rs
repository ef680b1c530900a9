use super::*;
use crate::materials::Material;
use crate::resolve::materials::look_up;
use std::sync::Arc;

fn material(phrase: &str) -> Arc<Material> {
    let (outcome, _) = look_up(phrase, Some("GaAs"));
    assert!(!outcome.findings.has_errors(), "{phrase}: {:#?}", outcome.findings);
    outcome.value.expect("a material")
}

#[track_caller]
fn within(value: Option<f64>, low: f64, high: f64) {
    let value = value.expect("a value");
    assert!((low..=high).contains(&value), "{value:e} is not within {low:e} and {high:e}");
}

/// cm-3 to m-3, cm3/s to m3/s, cm2/V/s to m2/V/s.
const PER_CM3: f64 = 1e6;
const CM3_PER_S: f64 = 1e-6;
const CM2: f64 = 1e-4;

#[test]
fn densities_of_states_are_those_of_handbooks() {
    let at = |name: &str| {
        let material = material(name);
        (material.conduction_density_per_m3(300.0), material.valence_density_per_m3(300.0))
    };
    // S. M. Sze, K. K. Ng, Physics of Semiconductor Devices, 3rd ed. (2007), appendix, from memory:
    // GaAs 4.7e17 and 7.0e18; J. S. Blakemore, J. Appl. Phys. 53, R123 (1982): 4.21e17 and 9.51e18.
    let (electrons, holes) = at("GaAs");
    within(electrons, 4.1e17 * PER_CM3, 4.8e17 * PER_CM3);
    within(holes, 7.0e18 * PER_CM3, 1.0e19 * PER_CM3);
    // M. A. Green, J. Appl. Phys. 67, 2944 (1990): 2.86e19 and 3.10e19.
    let (electrons, holes) = at("Si");
    within(electrons, 2.84e19 * PER_CM3, 2.88e19 * PER_CM3);
    within(holes, 3.08e19 * PER_CM3, 3.12e19 * PER_CM3);
    // Ioffe Institute archive: 1.0e19 and 5.0e18.
    let (electrons, holes) = at("Ge");
    within(electrons, 0.95e19 * PER_CM3, 1.1e19 * PER_CM3);
    within(holes, 4.5e18 * PER_CM3, 6.0e18 * PER_CM3);
    // Ioffe Institute archive: 5.7e17 and 1.1e19.
    let (electrons, holes) = at("InP");
    within(electrons, 5.2e17 * PER_CM3, 6.0e17 * PER_CM3);
    within(holes, 1.0e19 * PER_CM3, 1.3e19 * PER_CM3);
}

#[test]
fn silicon_counts_its_valleys_and_germanium_its_own() {
    // The whole mass from one ellipsoid of each: (6² · 0.98 · 0.19²)^(1/3) and (4² · 1.59 · 0.0815²)^(1/3).
    let silicon = (36.0_f64 * 0.98 * 0.19 * 0.19).cbrt();
    let germanium = (16.0_f64 * 1.59 * 0.0815 * 0.0815).cbrt();
    let stated = |name: &str| material(name).constants.get("mass.electron_density");
    within(stated("Si"), silicon * 0.99, silicon * 1.02);
    within(stated("Ge"), germanium * 0.98, germanium * 1.01);
}

#[test]
fn warped_bands_average_to_the_closed_form_where_they_are_not_warped() {
    let mut spherical = Material::bare("x", crate::materials::MaterialClass::Semiconductor);
    for (name, value) in [("mass.luttinger1", 7.0), ("mass.luttinger2", 2.5), ("mass.luttinger3", 2.5)] {
        spherical.constants.0.insert(name, value);
    }
    let of_two = (1.0_f64 / 2.0).powf(1.5) + (1.0_f64 / 12.0).powf(1.5);
    let per_mass = 2.509_4e25;
    within(spherical.valence_density_per_m3(300.0), of_two * per_mass * 0.9995, of_two * per_mass * 1.0005);
}

#[test]
fn intrinsic_densities_at_300_k() {
    let at = |name: &str| material(name).intrinsic_density_per_m3(300.0);
    // 2.1e6 (modern) to 2.25e6 (Blakemore 1982); 1.79e6 in older textbooks.
    within(at("GaAs"), 1.8e6 * PER_CM3, 2.5e6 * PER_CM3);
    // 2.0e13 (Sze) to 2.33e13 (F. J. Morin, J. P. Maita, Phys. Rev. 94, 1525 (1954)).
    within(at("Ge"), 1.9e13 * PER_CM3, 2.4e13 * PER_CM3);
    // P. P. Altermatt et al., J. Appl. Phys. 93, 1598 (2003).
    within(at("Si"), 9.6e9 * PER_CM3, 9.7e9 * PER_CM3);
    // Ioffe Institute archive: 6.3e11 for Ga0.47In0.53As, 1e15 for InAs, 1.3e7 for InP.
    within(at("In0.53Ga0.47As"), 5.0e11 * PER_CM3, 9.5e11 * PER_CM3);
    within(at("InAs"), 0.8e15 * PER_CM3, 1.2e15 * PER_CM3);
    within(at("InP"), 0.9e7 * PER_CM3, 1.6e7 * PER_CM3);
}

#[test]
fn low_field_mobilities_at_300_k() {
    let electrons = |name: &str, doping: f64| {
        material(name).mobility_m2_per_vs(Carrier::Electron, doping * PER_CM3, 300.0)
    };
    let holes =
        |name: &str, doping: f64| material(name).mobility_m2_per_vs(Carrier::Hole, doping * PER_CM3, 300.0);
    // Measured Hall mobilities of n-GaAs as collected in handbooks (Ioffe Institute archive): about
    // 8000 to 9400 undoped, 4500 to 5500 at 1e17, 2300 to 3000 at 1e18 /cm3; p-GaAs 400 undoped,
    // 200 to 250 at 1e18, 50 to 100 at 1e20 /cm3.
    within(electrons("GaAs", 1e13), 8000.0 * CM2, 9400.0 * CM2);
    within(electrons("GaAs", 1e17), 4000.0 * CM2, 5500.0 * CM2);
    within(electrons("GaAs", 1e18), 2200.0 * CM2, 3200.0 * CM2);
    within(holes("GaAs", 1e14), 380.0 * CM2, 492.0 * CM2);
    within(holes("GaAs", 1e18), 150.0 * CM2, 250.0 * CM2);
    within(holes("GaAs", 1e20), 40.0 * CM2, 100.0 * CM2);
    // InP: 5000 undoped, 2500 to 3200 at 1e17, 1500 to 2200 at 1e18 /cm3.
    within(electrons("InP", 1e14), 4500.0 * CM2, 5400.0 * CM2);
    within(electrons("InP", 1e17), 2800.0 * CM2, 3800.0 * CM2);
    within(electrons("InP", 1e18), 1500.0 * CM2, 2400.0 * CM2);
    // Ga0.51In0.49P: 1000 to 1700 at 1e17 /cm3, falling to 500 to 900 at 1e18; holes 30 to 40 at 1e18.
    within(electrons("Ga0.51In0.49P", 1e17), 900.0 * CM2, 1800.0 * CM2);
    within(electrons("Ga0.51In0.49P", 1e18), 450.0 * CM2, 900.0 * CM2);
    within(holes("Ga0.51In0.49P", 1e18), 30.0 * CM2, 50.0 * CM2);
}

#[test]
fn mobilities_of_elements_and_alloys_at_300_k() {
    let at = |name: &str, carrier, doping: f64| {
        material(name).mobility_m2_per_vs(carrier, doping * PER_CM3, 300.0).map(|value| value / CM2)
    };
    // W. R. Thurber et al., J. Electrochem. Soc. 127, 1807 and 2291 (1980), from memory: silicon with
    // phosphorus 1250 at 1e16, 730 at 1e17; with boron 430 at 1e16, 320 at 1e17, within 8 %.
    within(at("Si", Carrier::Electron, 1e16), 1150.0, 1300.0);
    within(at("Si", Carrier::Electron, 1e17), 670.0, 790.0);
    within(at("Si", Carrier::Hole, 1e16), 400.0, 450.0);
    within(at("Si", Carrier::Hole, 1e17), 295.0, 345.0);
    // Ioffe Institute archive: germanium at most 3900 and 1900.
    within(at("Ge", Carrier::Electron, 1e14), 3500.0, 3900.0);
    within(at("Ge", Carrier::Hole, 1e14), 1700.0, 1900.0);
    // Ioffe Institute archive, undoped Hall mobilities: Al0.2Ga0.8As 8000 - 22000 x + 10000 x² = 4000,
    // Al0.45Ga0.55As 125, Al0.8Ga0.2As -255 + 1160 x - 720 x² = 212; Ga0.47In0.53As 12 900.
    within(at("Al0.2Ga0.8As", Carrier::Electron, 1e13), 3000.0, 4400.0);
    within(at("Al0.45Ga0.55As", Carrier::Electron, 1e13), 110.0, 140.0);
    within(at("Al0.8Ga0.2As", Carrier::Electron, 1e13), 150.0, 300.0);
    within(at("In0.53Ga0.47As", Carrier::Electron, 1e14), 10_000.0, 14_000.0);
    // Ga0.28In0.72As0.6P0.4, same archive: holes at most 200 - 400 y + 500 y² = 140, electrons at most
    // 5400 - 7750 y + 14400 y² = 5900; here without the scattering of an alloy of four, up to 1.7 times.
    within(at("Ga0.28In0.72As0.6P0.4", Carrier::Electron, 1e14), 5900.0 / 1.7, 5900.0 * 1.7);
    within(at("Ga0.28In0.72As0.6P0.4", Carrier::Hole, 1e14), 90.0, 320.0);
}

#[test]
fn a_mobility_falls_with_doping_and_with_temperature() {
    for name in [
        "GaAs",
        "InP",
        "GaP",
        "InAs",
        "AlAs",
        "GaSb",
        "Si",
        "Ge",
        "Ga0.51In0.49P",
        "Ga0.7In0.3P",
        "Al0.2Ga0.8As",
        "Al0.52In0.48P",
        "In0.53Ga0.47As",
        "In0.52Al0.48As",
        "GaAs0.8P0.2",
        "(Al0.3Ga0.7)0.52In0.48P",
    ] {
        let material = material(name);
        for carrier in Carrier::BOTH {
            let at = |doping: f64, kelvin: f64| {
                material.mobility_m2_per_vs(carrier, doping, kelvin).expect("a mobility")
            };
            for decade in 18..27 {
                let (low, high) = (10f64.powi(decade), 10f64.powi(decade + 1));
                assert!(at(high, 300.0) < at(low, 300.0) && at(high, 300.0) > 0.0, "{name} {decade}");
            }
            assert!(at(1e20, 400.0) < at(1e20, 300.0) && at(1e20, 300.0) < at(1e20, 200.0), "{name}");
        }
    }
}

#[test]
fn absorption_gives_the_published_radiative_coefficients() {
    let at = |name: &str| material(name).radiative_coefficient_m3_per_s(300.0);
    let near = |name: &str, published: f64, factor: f64| {
        within(at(name), published * CM3_PER_S / factor, published * CM3_PER_S * factor);
    };
    // Y. P. Varshni, Phys. Status Solidi 19, 459 (1967), and handbooks since: GaAs 7.2e-10.
    near("GaAs", 7.2e-10, 1.5);
    // Varshni (1967): 6.41e-14 by the same formula.
    near("Ge", 6.4e-14, 1.5);
    // T. Trupke et al., J. Appl. Phys. 94, 4930 (2003): 4.73e-15 at 300 K.
    near("Si", 4.73e-15, 1.1);
    // Ioffe Institute archive, measured: 1.2e-10 for InP and 0.96e-10 for Ga0.47In0.53As; calculated
    // from absorption by Varshni (1967): 1.26e-9 for InP. Between both.
    within(at("InP"), 1.2e-10 * CM3_PER_S, 1.26e-9 * CM3_PER_S);
    within(at("In0.53Ga0.47As"), 0.96e-10 * CM3_PER_S, 4.0e-10 * CM3_PER_S);
}

#[test]
fn affinities_follow_the_valence_offsets() {
    let affinity = |name: &str| material(name).affinity_ev(300.0);
    within(affinity("GaAs"), 4.069, 4.071);
    // Handbooks (Ioffe Institute archive): InP 4.38, GaP 3.8; measured one by one.
    within(affinity("InP"), 4.2, 4.45);
    within(affinity("GaP"), 3.6, 3.9);
    within(affinity("InAs"), 4.8, 5.0);
    within(affinity("GaSb"), 3.9, 4.1);
    within(affinity("InSb"), 4.45, 4.65);
    // The conduction band of GaInP lies 0.1 to 0.22 eV above that of GaAs: published offsets.
    let step = affinity("GaAs").zip(affinity("Ga0.516In0.484P")).map(|(low, high)| low - high);
    within(step, 0.08, 0.22);
}

#[test]
fn narrowing_rises_with_doping_from_nothing() {
    let gallium_arsenide = material("GaAs");
    let at = |majority, doping: f64| gallium_arsenide.gap_narrowing_ev(majority, doping, 300.0);
    assert_eq!(at(Carrier::Hole, 0.0), Some(0.0));
    // p-GaAs at 1e19 /cm3: 50 to 75 meV by measurement (H. C. Casey, F. Stern, J. Appl. Phys. 47,
    // 631 (1976): 1.6e-8 N^(1/3) = 34 meV, as the lower end; M. E. Klausmeier-Brown et al. (1987): 70).
    within(at(Carrier::Hole, 1e25), 0.034, 0.075);
}

#[test]
fn damage_shortens_a_diffusion_length() {
    let damage = material("GaAs").damage().expect("a constant");
    assert_eq!(damage.particle, Particle::Electrons);
    // 1 MeV.
    assert!((damage.energy_j / 1.602_176_634e-13 - 1.0).abs() < 1e-12);
    // 1/L² = 1/(5 µm)² + 6e-8 · 1e15 /cm2.
    let after = damage.diffusion_length_m(Carrier::Electron, 5e-6, 1e19);
    let expected = (1.0 / (1.0 / 25e-12 + 6e-8 * 1e19_f64)).sqrt();
    within(after, expected * 0.999_999, expected * 1.000_001);
}

#[test]
fn an_indirect_alloy_has_states_too() {
    // AlInP matched to GaAs: X valley, three ellipsoids of 0.8 to 0.9 electron masses together.
    let window = material("Al0.52In0.48P");
    within(window.conduction_density_per_m3(300.0), 1.5e19 * PER_CM3, 4e19 * PER_CM3);
    within(window.affinity_ev(300.0), 3.6, 3.9);
}

#[test]
fn silicon_germanium_lies_between_its_ends() {
    let mixed = material("Si0.5Ge0.5");
    let lifetime = |material: &Material| {
        material.non_radiative_lifetime_s(Carrier::Electron, 1e22, 300.0).expect("a lifetime")
    };
    let (silicon, germanium) = (material("Si"), material("Ge"));
    assert!(lifetime(&mixed) < lifetime(&silicon) && lifetime(&mixed) > lifetime(&germanium));
    // Alloy scattering: slower than either end.
    within(mixed.mobility_m2_per_vs(Carrier::Electron, 1e20, 300.0), 500.0 * CM2, 1400.0 * CM2);
    within(mixed.static_permittivity(), 11.7, 16.2);
}

#[test]
fn films_have_carriers_too() {
    let perovskite = material("MAPbI3");
    // Densities published for MAPbI3 lie around 1e5 /cm3, B between 1e-11 and 2e-9 cm3/s (from memory).
    within(perovskite.intrinsic_density_per_m3(300.0), 1e4 * PER_CM3, 1e6 * PER_CM3);
    within(perovskite.radiative_coefficient_m3_per_s(300.0), 1e-11 * CM3_PER_S, 2e-9 * CM3_PER_S);
    // A mixed one has everything its ends have.
    let mixed = material("Cs0.2FA0.8Pb(I0.8Br0.2)3");
    for carrier in Carrier::BOTH {
        assert!(mixed.mobility_m2_per_vs(carrier, 1e22, 300.0).is_some());
        within(mixed.non_radiative_lifetime_s(carrier, 1e22, 300.0), 1e-7, 1e-6);
    }
    within(mixed.affinity_ev(300.0), 3.5, 4.0);
    within(material("CuIn0.7Ga0.3Se2").affinity_ev(300.0), 4.2, 4.5);
}

#[test]
fn carriers_of_every_family_are_finite_and_above_zero() {
    use crate::resolve::materials::{Group, entries, family};
    let shares = [0.0, 0.03, 0.5, 1.0];
    for entry in entries().into_iter().filter(|entry| entry.is_family) {
        let family = family(&entry.name).expect("a family");
        for (first, second) in shares.iter().flat_map(|a| shares.iter().map(move |b| (a, b))) {
            // Every sublattice runs from one element to the next, the rest in equal parts.
            let fill = |length: usize, share: f64| match length {
                0 => Vec::new(),
                1 => vec![1.0],
                _ => {
                    let rest = (1.0 - share) / (length - 1) as f64;
                    (0..length).map(|at| if at == 0 { share } else { rest }).collect()
                }
            };
            let composition = [fill(family.sites[0].len(), *first), fill(family.sites[1].len(), *second)];
            let material = family.without_optics(&composition, None);
            let label = &material.label;
            for kelvin in [77.0, 500.0] {
                for doping in [0.0, 1e26] {
                    for carrier in Carrier::BOTH {
                        let all = [
                            material.mobility_m2_per_vs(carrier, doping, kelvin),
                            material.non_radiative_lifetime_s(carrier, doping, kelvin),
                        ];
                        for value in all.into_iter().flatten() {
                            assert!(value.is_finite() && value > 0.0, "{label} {kelvin} {doping:e}: {value}");
                        }
                        let narrowing = material.gap_narrowing_ev(carrier, doping, kelvin).unwrap_or(0.0);
                        assert!((0.0..2.0).contains(&narrowing), "{label} {doping:e}: {narrowing}");
                    }
                }
                let states = [
                    material.conduction_density_per_m3(kelvin),
                    material.valence_density_per_m3(kelvin),
                    material.affinity_ev(kelvin),
                    material.static_permittivity(),
                ];
                for value in states.into_iter().flatten() {
                    assert!(value.is_finite() && value > 0.0, "{label} {kelvin}: {value}");
                }
            }
            let knows = material.conduction_density_per_m3(300.0).is_some()
                && material.valence_density_per_m3(300.0).is_some()
                && Carrier::BOTH.iter().all(|it| material.mobility_m2_per_vs(*it, 1e23, 300.0).is_some());
            let is_film = entry.group == Group::Perovskite;
            assert!(knows || is_film, "{label} has no states or mobilities");
        }
    }
}

#[test]
fn unknown_stays_unknown() {
    let coat = material("MgF2");
    assert_eq!(coat.mobility_m2_per_vs(Carrier::Hole, 1e22, 300.0), None);
    assert_eq!(coat.intrinsic_density_per_m3(300.0), None);
    assert_eq!(coat.radiative_coefficient_m3_per_s(300.0), None);
    assert_eq!(coat.non_radiative_lifetime_s(Carrier::Hole, 1e22, 300.0), None);
    assert_eq!(coat.affinity_ev(300.0), None);
    assert_eq!(coat.damage(), None);
}
