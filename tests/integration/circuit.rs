//! Curves against closed forms and independent solutions.
//!
//! The values in `tests/fixtures/circuit/curves.json` are those of `tests/reference/curves.py`, with
//! the libraries and versions named in the file.

use bandloom::circuit::curve::points;
use bandloom::circuit::diode::{Breakdown, Diode, SentDown};
use bandloom::circuit::radiative::{Radiative, Statistics};
use bandloom::circuit::series::Series;
use bandloom::circuit::tunnel::Tunnel;
use bandloom::design::{Interconnect, InterconnectKind, Terminals, VoltageModel};
use bandloom::evaluate::evaluate;
use bandloom::results::ConditionResult;
use bandloom::source::Span;

use super::designs::{ideal_stack, limit_stack, named};

const KT: f64 = 0.025_692_579;

fn reference(table: &str) -> serde_json::Value {
    let text = include_str!("../fixtures/circuit/curves.json");
    serde_json::from_str::<serde_json::Value>(text).expect("JSON")[table].take()
}

fn rows(table: &str) -> Vec<Vec<serde_json::Value>> {
    serde_json::from_value(reference(table)).expect("rows")
}

#[track_caller]
fn close(value: f64, expected: f64, tolerance: f64) {
    assert!((value - expected).abs() <= tolerance, "{value} is not {expected} ± {tolerance}");
}

fn numbers(row: &[serde_json::Value]) -> Vec<f64> {
    row.iter().map(|value| value.as_f64().expect("a number")).collect()
}

#[test]
fn one_diode_with_resistances_has_its_closed_form() {
    // Jain and Kapoor (2004): current at a voltage in Lambert's W, forward and in reverse.
    for row in rows("one_diode") {
        let [jph, j01, ohm, shunt, voltage, current] = numbers(&row)[..] else { panic!("{row:?}") };
        let diode = Diode { j01, shunt_conductance: shunt.recip(), ..Diode::lossless(jph, KT) };
        let series = Series::new(std::slice::from_ref(&diode), ohm, &[]);
        let point = series.at_voltage(voltage);
        // Where the voltage fixes the current; with resistance in the way everything is relative to
        // the largest current in play.
        close(point.current, current, 1e-9 * current.abs().max(jph));
        close(series.at_current(current).voltage, voltage, 1e-9 * voltage.abs().max(1.0));
    }
}

#[test]
fn breakdown_follows_bishop() {
    for row in rows("bishop") {
        let [voltage_v, current, voltage] = numbers(&row)[..] else { panic!("{row:?}") };
        let breakdown = Some(Breakdown { voltage_v, conductance: 0.1 * 0.01 });
        let diode = Diode { j01: 1e-16, shunt_conductance: 0.01, breakdown, ..Diode::lossless(138.0, KT) };
        close(diode.voltage(current).0, voltage, 1e-9 * voltage.abs());
    }
}

/// The three junctions of `curves.py`; what is sent down there is a share of the J01 current, which
/// is what an emission of that dark current is in the diode form.
fn three(sent: bool) -> Vec<Diode> {
    let plain = [
        (138.0, 2e-21, 3e-10, 0.001, 1.9, 0.4),
        (141.0, 4e-15, 2e-7, 0.002, 1.42, 0.6),
        (190.0, 3e-3, 0.0, 0.5, 0.7, 0.0),
    ];
    plain
        .into_iter()
        .map(|(jph, j01, j02, shunt_conductance, gap_ev, factor)| {
            let temperature_k = KT * 1.602_176_634e-19 / 1.380_649e-23;
            let emission =
                Radiative::new(gap_ev, temperature_k, Statistics::Diode, (&[], gap_ev), |energy| {
                    vec![1.0; energy.len()]
                });
            let factors = vec![factor * j01 / emission.dark_a_per_m2()];
            let sends_down = (sent && factor > 0.0).then_some(SentDown { emission, factors });
            Diode { j01, j02, shunt_conductance, sends_down, ..Diode::lossless(jph, KT) }
        })
        .collect()
}

#[test]
fn three_junctions_match_a_brute_force_solution() {
    for row in rows("series") {
        let sent = row[0].as_bool().expect("a flag");
        let (voltage, current) = (row[1].as_f64().expect("V"), row[2].as_f64().expect("A/m2"));
        let junctions = numbers(row[3].as_array().expect("V each"));
        let diodes = three(sent);
        let point = Series::new(&diodes, 2e-6, &[]).at_voltage(voltage);
        close(point.current, current, 1e-9 * current.abs());
        for (own, expected) in point.junctions.iter().zip(junctions) {
            close(*own, expected, 1e-8 * expected.abs().max(1.0));
        }
    }
}

#[test]
fn the_maximum_power_point_matches_dense_sampling() {
    for row in rows("best") {
        let sent = row[0].as_bool().expect("a flag");
        let [_, power] = numbers(&row[1..])[..] else { panic!("{row:?}") };
        let diodes = three(sent);
        let series = Series::new(&diodes, 2e-6, &[]);
        let best = series.maximum_power(&series.short_circuit());
        close(best.current * best.voltage, power, 1e-9 * power);
    }
}

#[test]
fn a_tunnel_junction_past_its_peak_dips_where_it_should() {
    let table = reference("tunnel");
    let diodes = [(140.0, 1e-20), (150.0, 1e-15)].map(|(jph, j01)| Diode { j01, ..Diode::lossless(jph, KT) });
    let tunnels = [Tunnel::new(100.0, 0.1, 10.0)];
    let series = Series::new(&diodes, 0.0, &tunnels);
    close(tunnels[0].crest().0, table["crest_v"].as_f64().expect("V"), 2e-6);
    let checked: Vec<Vec<serde_json::Value>> = serde_json::from_value(table["rows"].clone()).expect("rows");
    assert!(checked.len() >= 6);
    for row in checked {
        let [voltage, current] = numbers(&row)[..] else { panic!("{row:?}") };
        close(series.at_voltage(voltage).current, current, 1e-4 * current);
    }
    // The curve falls from the short-circuit current into the dip, and comes back up to the peak.
    let short = series.short_circuit();
    let best = series.maximum_power(&short);
    let curve = points(&series, &short, &best);
    let dip_v = table["dip_v"].as_f64().expect("V");
    let below = curve.iter().filter(|point| point.voltage < dip_v - 1e-6);
    let least = below.map(|point| point.current).fold(f64::INFINITY, f64::min);
    assert!(short.current > 139.0 && least < 60.0, "{least}");
    close(series.at_voltage(dip_v + 1e-6).current, 100.0, 0.5);
    let sampled = curve.iter().map(|point| point.current * point.voltage).fold(0.0, f64::max);
    assert!(best.current * best.voltage >= sampled);
}

fn first(design: &bandloom::design::Design) -> ConditionResult {
    let outcome = evaluate(design, "by hand");
    let found = outcome.findings;
    outcome.value.unwrap_or_else(|| panic!("{found:?}")).conditions.remove(0)
}

#[test]
fn light_sent_down_lifts_a_pair_limited_from_below() {
    // A pair short of current below, each junction at its radiative limit, emitting into both
    // hemispheres of index 1, all of the lower one caught. At short circuit in closed form: the
    // upper junction carries J and recombines the rest, half of it downwards, so that
    // J = J_b + (J_t − J)/2, i.e. J = (2 J_b + J_t)/3.
    let mut design = limit_stack(&[1.6, 1.42]);
    let without = first(&design);
    design.switches.luminescent_coupling = Some(true);
    let with = first(&design);
    let current = |result: &ConditionResult, at: usize| result.junctions[at].photocurrent_ma_per_cm2;
    let (top, bottom) = (current(&with, 0), current(&with, 1));
    assert!(top > 2.0 * bottom);
    close(without.jsc_ma_per_cm2.expect("series"), bottom, 1e-6);
    close(with.jsc_ma_per_cm2.expect("series"), (2.0 * bottom + top) / 3.0, 2e-4 * bottom);
    assert_eq!(with.current_mismatch, without.current_mismatch);
    close(current(&without, 1), bottom, 1e-12);
    assert!(with.junctions[1].coupled_ma_per_cm2 > 0.5 * bottom);
    assert!(with.junctions[0].coupled_ma_per_cm2 == 0.0);
    balanced(&with);
}

#[track_caller]
fn balanced(result: &ConditionResult) {
    let sum: f64 = result.ledger_w_per_m2.iter().map(|row| row.value).sum();
    close(sum, result.incident_w_per_m2, 1e-6 * result.incident_w_per_m2);
    for line in &result.ledger_w_per_m2 {
        assert!(
            line.value > -1e-9 * result.incident_w_per_m2
                || ["tail", "coupling"].contains(&line.line.as_str()),
            "{line:?}"
        );
    }
}

#[test]
fn a_stated_efficiency_bounds_what_is_sent_down() {
    // No more light leaves a junction than it recombines: with half of it out of the front, half is
    // left for below.
    let mut design = ideal_stack(&[(1.6, 1.0), (1.42, 1.0)], &VoltageModel::Ere(0.8));
    design.switches.luminescent_coupling = Some(true);
    let result = first(&design);
    let (top, bottom) =
        (result.junctions[0].photocurrent_ma_per_cm2, result.junctions[1].photocurrent_ma_per_cm2);
    // J = J_b + 0.2 (J_t − J): a fifth of the recombination goes down.
    close(result.jsc_ma_per_cm2.expect("series"), (bottom + 0.2 * top) / 1.2, 2e-4 * bottom);
    balanced(&result);
}

fn tunnel(peak_a_per_m2: f64) -> Interconnect {
    Interconnect {
        name: named("lower"),
        kind: InterconnectKind::Tunnel,
        layers: 0..0,
        below_junctions: 1,
        resistance_ohm_m2: None,
        peak_a_per_m2: Some(peak_a_per_m2),
        valley_a_per_m2: None,
        span: Span::default(),
    }
}

#[test]
fn a_weak_tunnel_costs_power_and_the_ledger_says_where() {
    let mut design = limit_stack(&[1.8, 1.42]);
    let free = first(&design);
    let wanted = 10.0 * free.jmp_ma_per_cm2.expect("series");
    design.interconnects.push(tunnel(20.0 * wanted));
    let strong = first(&design);
    close(strong.power_w_per_m2, free.power_w_per_m2, 3e-3 * free.power_w_per_m2);
    assert!(!strong.tunnels[0].beyond_peak);
    design.interconnects[0].peak_a_per_m2 = Some(0.7 * wanted);
    let weak = first(&design);
    assert!(weak.power_w_per_m2 < 0.85 * free.power_w_per_m2);
    close(10.0 * weak.tunnels[0].demanded_ma_per_cm2, wanted, 0.01 * wanted);
    for result in [&strong, &weak] {
        balanced(result);
        let lost: f64 =
            result.ledger_w_per_m2.iter().filter(|row| row.line == "tunnel").map(|row| row.value).sum();
        let current = 10.0 * result.jmp_ma_per_cm2.expect("series");
        close(lost, current * result.tunnels[0].voltage_at_mpp_v, 1e-9);
    }
}

#[test]
fn two_strings_with_three_terminals_add_their_powers() {
    // A common middle contact without resistance: two loads, each at its own best, as with four.
    let mut design = limit_stack(&[1.9, 1.4, 0.95]);
    design.junctions[0].separate = true;
    design.terminals = Terminals::Three;
    let three = first(&design);
    let below = first(&limit_stack(&[1.9, 1.4, 0.95]));
    let alone = three.junctions[0].power_w_per_m2;
    design.terminals = Terminals::Four;
    close(three.power_w_per_m2, first(&design).power_w_per_m2, 1e-9);
    assert!(three.power_w_per_m2 > below.power_w_per_m2 && three.power_w_per_m2 > alone);
    balanced(&three);
}

#[test]
fn breakdown_lets_a_shaded_junction_pass_the_others_on() {
    // One of three starved: without breakdown it holds everything back, with 4 V it breaks down
    // under the two others and carries more.
    let mut design = ideal_stack(&[(1.9, 0.05), (1.7, 1.0), (1.4, 1.0)], &VoltageModel::RadiativeLimit);
    let blocked = first(&design);
    design.junctions[0].breakdown_v = Some(2.0);
    let passed = first(&design);
    let jsc = |result: &ConditionResult| result.jsc_ma_per_cm2.expect("series");
    assert!(jsc(&passed) > 1.05 * jsc(&blocked), "{} {}", jsc(&passed), jsc(&blocked));
    let reverse = passed.junctions[0].voltage_at_short_circuit_v;
    assert!(reverse < -1.0 && reverse > -2.0, "{reverse}");
    balanced(&passed);
}

#[test]
fn five_thousand_suns_through_ten_ohm_end() {
    // J_sc is then what the resistance lets through: V_oc-like voltage over R, far below the light.
    for (suns, ohm_m2) in [(5000.0, 1e-3), (1e5, 1e-2), (1.0, 1e3)] {
        let mut design = limit_stack(&[1.8, 1.4]);
        design.conditions[0].concentration = suns;
        design.fingers = Some(bandloom::design::Fingers {
            shading: 0.0,
            series_resistance_ohm_m2: ohm_m2,
            shape: None,
            span: Span::default(),
        });
        let result = first(&design);
        let jsc = 10.0 * result.jsc_ma_per_cm2.expect("series");
        let dropped = jsc * ohm_m2;
        assert!(dropped < result.voc_v.expect("series") && dropped > 0.9 * result.voc_v.expect("series"));
        close(result.fill_factor.expect("series"), 0.25, 0.02);
        balanced(&result);
    }
}
