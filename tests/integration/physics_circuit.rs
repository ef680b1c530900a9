//! Diodes, strings and the ledger, against closed forms and published relations.

use bandloom::circuit::diode::Diode;
use bandloom::circuit::series::Series;
use bandloom::design::{
    DiodeFit, Duty, Fingers, Interconnect, InterconnectKind, Place, Terminals, VoltageModel,
};
use bandloom::evaluate::evaluate;
use bandloom::materials::optics::{DirectEdge, Optics};
use bandloom::numerics::constants::thermal_voltage;
use bandloom::results::ConditionResult;
use bandloom::source::Span;

use super::designs::{empty, ideal_stack, junction, layer, limit_stack, material, named};

fn first(design: &bandloom::design::Design) -> ConditionResult {
    let outcome = evaluate(design, "by hand");
    let found = outcome.findings;
    outcome.value.unwrap_or_else(|| panic!("{found:?}")).conditions.remove(0)
}

#[track_caller]
fn close(value: f64, expected: f64, tolerance: f64) {
    assert!((value - expected).abs() <= tolerance, "{value} is not {expected} ± {tolerance}");
}

fn one_diode(photocurrent: f64, j01: f64, temperature_k: f64) -> Diode {
    let thermal_v = thermal_voltage(temperature_k);
    Diode { j01, ..Diode::lossless(photocurrent, thermal_v) }
}

#[test]
fn a_decade_of_current_is_59_159_mv() {
    // kT/q ln 10 at 298.15 K from the exact constants.
    let voc = |photocurrent: f64| one_diode(photocurrent, 1e-15, 298.15).voltage(0.0).0;
    close(voc(1000.0) - voc(100.0), 0.059_159_35, 1e-8);
}

/// Shockley's diode: kT/q ln 10 a decade, and, light only shifting the curve, the photocurrent in
/// the dark at the voltage of open circuit.
#[test]
fn in_the_dark_a_junction_carries_its_photocurrent_at_its_open_circuit_voltage() {
    let result = first(&limit_stack(&[1.8, 1.2]));
    let dark = &result.dark_curve;
    let at = |voltages: &[f64], milliampere: f64| {
        let after = dark.current_ma_per_cm2.iter().position(|j| -j >= milliampere).expect("in range");
        let log = |i: usize| (-dark.current_ma_per_cm2[i]).log10();
        let share = (milliampere.log10() - log(after - 1)) / (log(after) - log(after - 1));
        voltages[after - 1] + share * (voltages[after] - voltages[after - 1])
    };
    for junction in &result.junctions {
        let own = &dark.junction_voltage_v[&junction.name];
        close(at(own, junction.photocurrent_ma_per_cm2), junction.voc_v, 1e-6);
        close(at(own, 10.0) - at(own, 1.0), 0.059_159_35, 1e-6);
        assert!(own.is_sorted(), "{own:?}");
    }
    // Two in series need the sum of both voltages.
    close(at(&dark.voltage_v, 1.0), dark.junction_voltage_v.values().map(|own| at(own, 1.0)).sum(), 1e-9);
    assert!(dark.current_ma_per_cm2.iter().all(|j| *j < 0.0), "the junction takes power");
}

#[test]
fn the_fill_factor_of_one_diode() {
    // Exact values by mpmath 1.3.0: maximum of v (1 − (e^v − 1)/(e^voc − 1)) over v, over voc.
    // Green, Solar Cells 7, 337 (1982): (v − ln(v + 0.72))/(v + 1), good to about 2e-4.
    for (v, exact) in [(15.0, 0.765_268), (25.0, 0.836_556), (40.0, 0.885_141)] {
        let j01 = 100.0 / f64::exp_m1(v);
        let diode = one_diode(100.0, j01, 298.15);
        let series = Series::new(std::slice::from_ref(&diode), 0.0, &[]);
        let best = series.maximum_power(&series.short_circuit());
        let fill = best.current * best.voltage / (100.0 * v * diode.thermal_v);
        close(fill, exact, 1e-6);
        close(fill, (v - f64::ln(v + 0.72)) / (v + 1.0), 2e-4);
    }
}

#[test]
fn two_unequal_cells_in_series() {
    // Trade: 13.8 mA/cm2 with 1.3 V and 17 mA/cm2 with 1.0 V give 2.3 V and nearly 13.8 mA/cm2.
    let thermal_v = thermal_voltage(298.15);
    let diodes = [
        one_diode(138.0, 138.0 / (1.3 / thermal_v).exp_m1(), 298.15),
        one_diode(170.0, 170.0 / (1.0 / thermal_v).exp_m1(), 298.15),
    ];
    let series = Series::new(&diodes, 0.0, &[]);
    close(series.open_circuit().voltage, 2.3, 1e-9);
    let short = series.short_circuit();
    assert!(short.current >= 138.0 * (1.0 - 1e-9) && short.current < 170.0);
    assert!(short.junctions[0] < -0.9 && short.junctions[1] > 0.9);
    // With a shunt of 1 kohm cm2 across the limiting cell its reverse voltage adds V/R: about
    // 0.96 V / 0.1 ohm m2 = 9.6 A/m2.
    let mut shunted = diodes.clone();
    shunted[0].shunt_conductance = 10.0;
    let short = Series::new(&shunted, 0.0, &[]).short_circuit();
    close(short.current, 138.0 - 10.0 * short.junctions[0], 1e-6);
    assert!(short.current > 147.0 && short.current < 148.0, "{}", short.current);
}

#[test]
fn a_fit_follows_the_temperature_by_its_law() {
    // V_oc = kT/q ln(J/J01 + 1) with J01 ∝ T³ exp(−E_g/kT), written out.
    let fit = DiodeFit { j01_a_per_m2: 1e-15, j02_a_per_m2: 0.0, shunt_ohm_m2: None, at_k: 298.15 };
    let mut design = ideal_stack(&[(1.42, 1.0)], &VoltageModel::Fit(fit));
    for t in [250.0, 298.15, 338.15] {
        design.conditions[0].temperature_k = t;
        let result = first(&design);
        let j01 = 1e-15
            * (t / 298.15_f64).powi(3)
            * (1.42 / thermal_voltage(298.15) - 1.42 / thermal_voltage(t)).exp();
        let current = 10.0 * result.jsc_ma_per_cm2.expect("series");
        close(result.voc_v.expect("series"), thermal_voltage(t) * (current / j01).ln_1p(), 1e-9);
    }
}

#[test]
fn a_second_diode_and_a_shunt_lower_the_fill_factor() {
    let fit = |j02: f64, shunt: Option<f64>| {
        let fit = DiodeFit { j01_a_per_m2: 1e-15, j02_a_per_m2: j02, shunt_ohm_m2: shunt, at_k: 298.15 };
        first(&ideal_stack(&[(1.42, 1.0)], &VoltageModel::Fit(fit))).fill_factor.expect("series")
    };
    let plain = fit(0.0, None);
    assert!(fit(1e-7, None) < plain - 1e-3);
    assert!(fit(0.0, Some(0.1)) < plain - 1e-2);
}

fn ledger(result: &ConditionResult, line: &str) -> f64 {
    result.ledger_w_per_m2.iter().filter(|row| row.line == line).map(|row| row.value).sum()
}

#[test]
fn resistances_cost_what_ohm_says() {
    let mut design = limit_stack(&[1.88, 1.42]);
    design.conditions[0].concentration = 100.0;
    design.fingers =
        Some(Fingers { shading: 0.04, series_resistance_ohm_m2: 2e-6, shape: None, span: Span::default() });
    design.interconnects.push(Interconnect {
        name: named("tunnel1"),
        kind: InterconnectKind::Tunnel,
        layers: 0..0,
        below_junctions: 1,
        resistance_ohm_m2: Some(1e-7),
        peak_a_per_m2: None,
        valley_a_per_m2: None,
        span: Span::default(),
    });
    let result = first(&design);
    let current = 10.0 * result.jmp_ma_per_cm2.expect("series");
    close(ledger(&result, "series"), current * current * 2e-6, 1e-9);
    close(ledger(&result, "tunnel"), current * current * 1e-7, 1e-9);
    close(ledger(&result, "fingers"), 0.04 * result.incident_w_per_m2, 1e-9);
    close(ledger(&result, "delivered"), result.power_w_per_m2, 1e-9);
    let sum: f64 = result.ledger_w_per_m2.iter().map(|row| row.value).sum();
    close(sum, result.incident_w_per_m2, 1e-9 * result.incident_w_per_m2);
    // The terminal voltage is what the junctions leave after the drop.
    let junctions: f64 = result.junctions.iter().map(|junction| junction.voltage_at_mpp_v).sum();
    close(result.vmp_v.expect("series"), junctions - current * 2.1e-6, 1e-9);
}

#[test]
fn marked_junctions_stand_alone_and_the_others_share_a_string() {
    let mut design = limit_stack(&[1.9, 1.4, 0.9]);
    design.terminals = Terminals::Four;
    design.junctions[2].separate = true;
    let result = first(&design);
    let string = first(&limit_stack(&[1.9, 1.4])).power_w_per_m2;
    close(result.power_w_per_m2, string + result.junctions[2].power_w_per_m2, 1e-6);
}

#[test]
fn a_mirror_sends_the_light_through_a_thin_absorber_twice() {
    // A thin direct absorber: 1 − exp(−αd) once, 1 − exp(−2αd) with a mirror that keeps nothing.
    let edge = DirectEdge { gap_ev: 1.42, coefficient_per_m: 2e6, urbach_ev: 0.0, index: None };
    let build = |thickness: f64, mirror: bool| {
        let mut design = empty();
        let absorber = material(1.42, Optics::Direct(edge));
        design.layers.push(layer(
            "j.absorber",
            Duty::Absorber,
            Place::Junction(0),
            absorber,
            Some(thickness),
        ));
        if mirror {
            let silver = material(1.42, Optics::None);
            design.layers.push(layer("mirror", Duty::Mirror, Place::Rear, silver, None));
        }
        design.junctions.push(junction("j", 0..1, VoltageModel::RadiativeLimit));
        first(&design)
    };
    let (thin, thick, mirrored) = (build(300e-9, false), build(600e-9, false), build(300e-9, true));
    assert!(thick.jsc_ma_per_cm2 > thin.jsc_ma_per_cm2);
    close(mirrored.jsc_ma_per_cm2.expect("series") / thick.jsc_ma_per_cm2.expect("series"), 1.0, 5e-5);
    close(mirrored.voc_v.expect("series"), thick.voc_v.expect("series"), 1e-6);
}
