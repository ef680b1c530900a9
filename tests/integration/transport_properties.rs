//! What holds for the currents and voltages of any stack, whatever its layers.

use proptest::prelude::*;
use proptest::test_runner::RngSeed;

use super::transport::{compiled, lawful};

/// Material by number, thicknesses of emitter and base in nm, decades of both dopings, of a lifetime
/// if one is stated, and of the velocity at the rear.
type Junction = (usize, f64, f64, f64, f64, Option<f64>, f64);

#[derive(Clone, Debug)]
struct Case {
    flipped: bool,
    waves: bool,
    temperature_k: f64,
    concentration: f64,
    junctions: Vec<Junction>,
    fluence: f64,
    switches: (bool, bool),
}

fn case() -> impl Strategy<Value = Case> {
    let junction = (
        0..3_usize,
        20.0..300.0_f64,
        200.0..4000.0_f64,
        16.0..19.0_f64,
        15.5..18.5_f64,
        prop_oneof![Just(None), (-10.0..-6.0_f64).prop_map(Some)],
        0.0..7.0_f64,
    );
    let junctions = proptest::collection::vec(junction, 1..=3);
    let sun = (220.0..380.0_f64, 0.0..2.5_f64, any::<bool>(), any::<bool>());
    let fluence = prop_oneof![Just(0.0), 12.0..16.0_f64];
    (junctions, sun, fluence, (any::<bool>(), any::<bool>())).prop_map(
        |(junctions, sun, fluence, switches)| Case {
            flipped: sun.3,
            waves: sun.2,
            temperature_k: sun.0,
            concentration: 10f64.powf(sun.1),
            junctions,
            fluence,
            switches,
        },
    )
}

fn text(case: &Case) -> String {
    let materials =
        [("GaInP matched", "AlInP matched"), ("GaAs", "GaInP matched"), ("GaAs", "AlGaAs with Al 0.6")];
    let (front, rear) = if case.flipped { ("p", "n") } else { ("n", "p") };
    let mut kinds = case.junctions.clone();
    kinds.sort_by_key(|junction| junction.0);
    let mut text = format!(
        "stack \"Any\" {{ light AM1.5G; temperature {} K; concentration {} times\n",
        case.temperature_k, case.concentration
    );
    if case.fluence > 0.0 {
        text += &format!("fluence {:e} /cm2 of electrons 1 MeV\n", 10f64.powf(case.fluence));
    }
    if !case.waves {
        text += "optics one_pass { front_reflectance 3 % }\n";
    }
    text += if case.switches.0 { "photon_recycling on\n" } else { "" };
    text += if case.switches.1 { "gap_narrowing on\n" } else { "" };
    for (at, (kind, emitter, base, n_emitter, n_base, lifetime, velocity)) in kinds.iter().enumerate() {
        let (absorber, window) = materials[*kind];
        let own = lifetime.map_or(String::new(), |log| {
            format!("{{ lifetime {:e} s; rear_velocity {:e} cm/s }}", 10f64.powf(log), 10f64.powf(*velocity))
        });
        text += &format!(
            "junction j{at} {{\n window {window} 25 nm {front} 2e18 /cm3\n emitter {absorber} {emitter} nm {front} {:e} /cm3\n base {absorber} {base} nm {rear} {:e} /cm3 {own}\n bsf {window} 40 nm {rear} 1e18 /cm3 }}\n",
            10f64.powf(*n_emitter),
            10f64.powf(*n_base),
        );
        if at + 1 < kinds.len() {
            text += "tunnel { peak 100 A/cm2; resistance 1 mohm cm2 }\n";
        }
    }
    text + &format!("wafer GaAs 350 um {rear} 1e18 /cm3\n}}\n")
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 40, failure_persistence: None, rng_seed: RngSeed::Fixed(20261202), ..ProptestConfig::default() })]

    #[test]
    fn any_stack_keeps_the_laws(case in case()) {
        let text = text(&case);
        let compiled = compiled(&text);
        let stack = &compiled.stacks[0];
        prop_assert!(stack.results.is_some(), "{text}\n{:?}", compiled.findings);
        let results = stack.results.as_ref().expect("asked just before");
        lawful(&results.conditions[0]);
        prop_assert!(results.conditions[0].junctions.iter().all(|it| it.collection_efficiency.is_some()), "{text}\n{:?}", compiled.findings);
    }
}
