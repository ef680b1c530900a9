//! What holds for every design, whatever the input.

use std::sync::Arc;

use bandloom::design::{
    Design, DiodeFit, Duty, Fingers, Interconnect, InterconnectKind, OpticsModel, Place, Terminals,
    VoltageModel,
};
use bandloom::evaluate::evaluate;
use bandloom::light::{SUN_DILUTION, Spectrum, blackbody, builtin};
use bandloom::materials::optics::{DirectEdge, Optics};
use bandloom::numerics::constants::{CHARGE, HC_EV, LIGHT_SPEED, PLANCK, thermal_voltage};
use bandloom::source::Span;
use proptest::prelude::*;
use proptest::test_runner::RngSeed;

use super::designs::{condition, empty, ideal, junction, layer, material, named};

#[derive(Clone, Debug)]
struct Absorber {
    gap_ev: f64,
    /// Share of an ideal one, or `None` for a direct edge.
    share: Option<f64>,
    thickness_m: f64,
    urbach_ev: f64,
    voltage: VoltageModel,
    shunt_ohm_m2: Option<f64>,
    breakdown_v: Option<f64>,
}

#[derive(Clone, Debug)]
struct Case {
    absorbers: Vec<Absorber>,
    light: usize,
    concentration: f64,
    temperature_k: f64,
    incidence_rad: f64,
    reflectance: f64,
    shading: f64,
    fingers_ohm_m2: f64,
    tunnel_ohm_m2: f64,
    mirror: bool,
    window_share: f64,
    four: bool,
    coupling: Option<bool>,
    peak_a_per_m2: Option<f64>,
}

fn voltage() -> impl Strategy<Value = VoltageModel> {
    prop_oneof![
        Just(VoltageModel::RadiativeLimit),
        Just(VoltageModel::Layers),
        (-5.0..0.0_f64).prop_map(|log| VoltageModel::Ere(10f64.powf(log))),
        (-30.0..-4.0_f64, -14.0..-3.0_f64, 280.0..320.0_f64).prop_map(|(j01, j02, at_k)| {
            VoltageModel::Fit(DiodeFit {
                j01_a_per_m2: 10f64.powf(j01),
                j02_a_per_m2: 10f64.powf(j02),
                shunt_ohm_m2: None,
                at_k,
            })
        }),
    ]
}

fn absorber() -> impl Strategy<Value = Absorber> {
    let share = prop_oneof![Just(Some(1.0)), (0.0..=1.0).prop_map(Some), Just(None)];
    let shunt = prop_oneof![Just(None), (-3.0..3.0_f64).prop_map(|log| Some(10f64.powf(log)))];
    let breakdown = prop_oneof![Just(None), (0.5..20.0_f64).prop_map(Some)];
    (0.5..2.4, share, 1e-7..3e-6, 0.0..0.018, voltage(), (shunt, breakdown)).prop_map(
        |(gap_ev, share, thickness_m, urbach_ev, voltage, (shunt_ohm_m2, breakdown_v))| Absorber {
            breakdown_v,
            gap_ev,
            share,
            thickness_m,
            urbach_ev,
            voltage,
            shunt_ohm_m2,
        },
    )
}

fn case() -> impl Strategy<Value = Case> {
    let absorbers = proptest::collection::vec(absorber(), 1..=6);
    let sun = (0..5_usize, 0.0..3.0_f64, 200.0..400.0_f64, prop_oneof![Just(0.0), 0.0..1.4_f64]);
    let losses = (0.0..0.3_f64, 0.0..0.2_f64, 0.0..1e-4_f64, 0.0..1e-5_f64);
    let window = prop_oneof![Just(0.0), 0.0..0.5_f64];
    let peak = prop_oneof![Just(None), (0.0..6.0_f64).prop_map(|log| Some(10f64.powf(log)))];
    let electrical = (any::<bool>(), any::<Option<bool>>(), peak);
    (absorbers, sun, losses, any::<bool>(), window, electrical).prop_map(
        |(absorbers, sun, losses, mirror, window_share, (four, coupling, peak_a_per_m2))| Case {
            coupling,
            peak_a_per_m2,
            absorbers,
            light: sun.0,
            concentration: 10f64.powf(sun.1),
            temperature_k: sun.2,
            incidence_rad: sun.3,
            reflectance: losses.0,
            shading: losses.1,
            fingers_ohm_m2: losses.2,
            tunnel_ohm_m2: losses.3,
            mirror,
            window_share,
            four,
        },
    )
}

fn light(index: usize) -> Arc<Spectrum> {
    match index {
        0 => builtin("AM1.5G").expect("built in"),
        1 => builtin("AM1.5D").expect("built in"),
        2 => builtin("AM0").expect("built in"),
        3 => builtin("AM0_G173").expect("built in"),
        _ => Arc::new(blackbody(5772.0, SUN_DILUTION)),
    }
}

fn design(case: &Case) -> Design {
    let mut design = empty();
    let mut sun = condition("case", light(case.light), case.temperature_k);
    sun.concentration = case.concentration;
    sun.incidence_rad = case.incidence_rad;
    design.conditions = vec![sun];
    design.optics = OpticsModel::OnePass { front_reflectance: case.reflectance, stated: true };
    design.fingers = Some(Fingers {
        shading: case.shading,
        series_resistance_ohm_m2: case.fingers_ohm_m2,
        shape: None,
        span: Span::default(),
    });
    design.switches.luminescent_coupling = case.coupling;
    design.terminals = if case.four { Terminals::Four } else { Terminals::Two };
    if case.window_share > 0.0 {
        design.layers.push(layer("w", Duty::Layer, Place::Front, ideal(2.6, case.window_share), None));
    }
    for (index, absorber) in case.absorbers.iter().enumerate() {
        let optics = match absorber.share {
            Some(share) => ideal(absorber.gap_ev, share),
            None => material(
                absorber.gap_ev,
                Optics::Direct(DirectEdge {
                    gap_ev: absorber.gap_ev,
                    coefficient_per_m: 4e6,
                    urbach_ev: absorber.urbach_ev,
                    index: None,
                }),
            ),
        };
        let at = design.layers.len();
        let name = format!("j{index}");
        let path = format!("{name}.absorber");
        let thickness = Some(absorber.thickness_m);
        design.layers.push(layer(&path, Duty::Absorber, Place::Junction(index), optics, thickness));
        let mut own = junction(&name, at..at + 1, absorber.voltage.clone());
        own.shunt_ohm_m2 = absorber.shunt_ohm_m2;
        own.breakdown_v = absorber.breakdown_v;
        design.junctions.push(own);
        if index > 0 {
            design.interconnects.push(Interconnect {
                name: named(&format!("t{index}")),
                kind: InterconnectKind::Tunnel,
                layers: 0..0,
                below_junctions: index,
                resistance_ohm_m2: Some(case.tunnel_ohm_m2),
                peak_a_per_m2: case.peak_a_per_m2,
                valley_a_per_m2: None,
                span: Span::default(),
            });
        }
    }
    if case.mirror {
        design.layers.push(layer("mirror", Duty::Mirror, Place::Rear, material(1.0, Optics::None), None));
    }
    design
}

/// Upper bound of the power of any stack of these gaps, W/m2: each photon to the widest gap below
/// it, separate terminals, emission of its own band in the diode form (less than the exact one).
fn limit_w_per_m2(gaps_ev: &[f64], light: &Spectrum, factor: f64, temperature_k: f64) -> f64 {
    let kt = thermal_voltage(temperature_k);
    let prefactor =
        2.0 * std::f64::consts::PI * CHARGE.powi(4) / (PLANCK.powi(3) * LIGHT_SPEED.powi(2)) * kt.powi(3);
    let above = |gap: f64| {
        let g = gap / kt;
        prefactor * (-g).exp() * (g * g + 2.0 * g + 2.0)
    };
    let mut gaps = gaps_ev.to_vec();
    gaps.sort_by(|a, b| b.total_cmp(a));
    let mut upper = f64::INFINITY;
    let mut power = 0.0;
    for gap in gaps {
        let (dark, photons) = if upper.is_finite() {
            (above(gap) - above(upper), light.photon_current(HC_EV / upper, HC_EV / gap))
        } else {
            (above(gap), light.photon_current(0.0, HC_EV / gap))
        };
        upper = gap;
        let current = factor * photons;
        if current <= 0.0 || dark <= 0.0 {
            continue;
        }
        let voc = kt * (current / dark).ln_1p();
        let best = (1..2000)
            .map(|i| voc * f64::from(i) / 2000.0)
            .map(|v| v * (current - dark * (v / kt).exp_m1()))
            .fold(0.0, f64::max);
        power += best;
    }
    // The scan of the voltage misses the maximum by less than (1/2000)² · V/kT.
    power * (1.0 + 1e-4)
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 300, failure_persistence: None, rng_seed: RngSeed::Fixed(20261201), ..ProptestConfig::default() })]

    #[test]
    fn every_design_keeps_the_laws(case in case()) {
        let design = design(&case);
        let outcome = evaluate(&design, "by hand");
        prop_assert!(outcome.value.is_some(), "{:?}", outcome.findings);
        let result = &outcome.value.expect("asked just before").conditions[0];
        let incident = result.incident_w_per_m2;

        // The ledger closes, and only a tail and the light between junctions can be negative.
        let sum: f64 = result.ledger_w_per_m2.iter().map(|line| line.value).sum();
        prop_assert!((sum - incident).abs() <= 1e-6 * incident, "ledger {sum} of {incident}");
        for line in &result.ledger_w_per_m2 {
            prop_assert!(["tail", "coupling"].contains(&line.line.as_str()) || line.value >= -1e-9 * incident, "{line:?} of {incident}");
        }
        let delivered = result.ledger_w_per_m2.last().expect("never empty").value;
        prop_assert!((delivered - result.power_w_per_m2).abs() <= 1e-9 * incident);

        // No more than detailed balance allows for its gaps. A direct edge has no single gap to
        // compare with: a thin one acts as a wider gap, a tail as a narrower one.
        if case.absorbers.iter().all(|absorber| absorber.share.is_some()) {
            let gaps: Vec<f64> = case.absorbers.iter().map(|absorber| absorber.gap_ev).collect();
            let factor = case.concentration * case.incidence_rad.cos();
            let limit = limit_w_per_m2(&gaps, &design.conditions[0].light, factor, case.temperature_k);
            prop_assert!(result.power_w_per_m2 <= limit, "{} above {limit}", result.power_w_per_m2);
        }
        // Infinitely many gaps at full concentration: 86.8 % (De Vos 1980).
        prop_assert!(result.efficiency < 0.868);
        prop_assert!(result.power_w_per_m2 >= 0.0);

        // No junction above its radiative limit, none above its gap.
        let kt = thermal_voltage(case.temperature_k);
        for junction in &result.junctions {
            let dark = 1e4 * junction.dark_current_radiative_a_per_cm2;
            let current = 10.0 * junction.photocurrent_ma_per_cm2;
            let radiative = if dark > 0.0 { kt * (current / dark).ln_1p() } else { 0.0 };
            prop_assert!(junction.voc_v <= radiative + 1e-9, "{junction:?} {radiative}");
            let lit = current + 10.0 * junction.coupled_ma_per_cm2;
            // One that nothing reaches from the front does not emit there either.
            let radiative = if dark > 0.0 { kt * (lit / dark).ln_1p() } else { f64::INFINITY };
            prop_assert!(junction.voltage_at_mpp_v <= radiative + 1e-9, "{junction:?} {radiative}");
        }

        // Absorbed, passing and reflected photons are all there are.
        if let Some(fill) = result.fill_factor {
            // Where a tunnel junction is past its peak at no voltage, less flows there than at the best.
            let dips = case.peak_a_per_m2.is_some_and(|peak| {
                result.tunnels.iter().any(|tunnel| 10.0 * tunnel.demanded_ma_per_cm2 > 0.9 * peak)
            });
            prop_assert!(fill >= 0.0 && (fill < 1.0 || dips), "{fill}");
        }
        prop_assert!(result.curve.voltage_v.windows(2).all(|pair| pair[0] <= pair[1]));
    }
}

#[test]
fn one_and_two_threads_give_the_same_bytes() {
    let mut design = super::designs::limit_stack(&[1.9, 1.4, 0.9]);
    for (index, name) in ["AM0", "AM1.5D", "AM1.5G"].iter().enumerate() {
        let mut sun = condition(name, builtin(name).expect("built in"), 298.15 + 10.0 * index as f64);
        sun.concentration = 1.0 + index as f64;
        design.conditions.push(sun);
    }
    let bytes = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a small pool");
        let results = pool.install(|| evaluate(&design, "by hand")).value.expect("whole design");
        serde_json::to_string(&results).expect("plain data")
    };
    assert_eq!(bytes(1), bytes(2));
    assert_eq!(bytes(2), bytes(2));
}
