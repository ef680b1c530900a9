//! Temperature coefficients, charts, seasons, grids and measurements, against closed forms.

use std::sync::Arc;

use bandloom::design::{
    AxisKind, Chart, ChartAxis, Design, DiodeFit, FingerShape, Fingers, Measured, MeasuredKind, Season,
    SeasonRow, VoltageModel,
};
use bandloom::evaluate::evaluate;
use bandloom::light::builtin;
use bandloom::numerics::constants::thermal_voltage;
use bandloom::results::Results;
use bandloom::source::Span;

use super::designs::{condition, ideal_stack, limit_stack, named};

fn run(design: &Design) -> Results {
    let outcome = evaluate(design, "by hand");
    let found = outcome.findings;
    outcome.value.unwrap_or_else(|| panic!("{found:?}"))
}

#[track_caller]
fn close(value: f64, expected: f64, tolerance: f64) {
    assert!((value - expected).abs() <= tolerance, "{value} is not {expected} ± {tolerance}");
}

/// One diode of 1.42 eV, J01 as of gallium arsenide, at 25 °C.
fn one_diode() -> Design {
    let fit = DiodeFit { j01_a_per_m2: 1e-15, j02_a_per_m2: 0.0, shunt_ohm_m2: None, at_k: 298.15 };
    ideal_stack(&[(1.42, 1.0)], &VoltageModel::Fit(fit))
}

#[test]
fn temperature_coefficients_of_one_diode() {
    // V = kT/q ln(J/J01 + 1), J01 ∝ T³ exp(−E_g/kT): dV/dT = (V − E_g/q − 3kT/q)/T at a fixed
    // current and gap (Green, Prog. Photovolt. 11, 333 (2003), with γ = 3).
    let results = run(&one_diode());
    let result = &results.conditions[0];
    let of = result.temperature_coefficients.as_ref().expect("warm enough");
    let voc = result.voc_v.expect("series");
    let expected = (voc - 1.42 - 3.0 * thermal_voltage(298.15)) / 298.15;
    close(of.voc_mv_per_k.expect("series"), 1e3 * expected, 2e-3);
    close(of.voc_relative_per_k.expect("series"), expected / voc, 2e-6);
    close(of.jsc_ma_per_cm2_per_k.expect("series"), 0.0, 1e-9);
    // The fill factor falls too, so that power loses more than the voltage does.
    assert!(of.efficiency_relative_per_k < of.voc_relative_per_k.expect("series"));
    close(of.junctions[0].voc_mv_per_k, of.voc_mv_per_k.expect("series"), 1e-9);
    close(of.junctions[0].gap_mev_per_k, 0.0, 1e-12);
    // Nothing lies below a cell of 15 K.
    let mut cold = one_diode();
    cold.conditions[0].temperature_k = 15.0;
    assert!(run(&cold).conditions[0].temperature_coefficients.is_none());
}

fn axis(path: &str, kind: AxisKind, (from, to): (f64, f64), points: usize) -> ChartAxis {
    ChartAxis { path: named(path), kind, from, to, points }
}

fn chart(metric: &str, axes: Vec<ChartAxis>) -> Chart {
    Chart { metric: named(metric), axes, under: Vec::new(), text: String::new(), span: Span::default() }
}

#[test]
fn efficiency_peaks_where_the_resistance_takes_kt() {
    // At a fixed share j of the light's current, V = kT/q ln(X (J₁ − j)/J01) − X j R: greatest where
    // X j R = kT/q; by the envelope theorem the same holds at the maximum power point.
    let mut design = one_diode();
    let ohm_m2 = 2e-6;
    design.fingers =
        Some(Fingers { shading: 0.0, series_resistance_ohm_m2: ohm_m2, shape: None, span: Span::default() });
    design.charts = vec![
        chart("efficiency", vec![axis("concentration", AxisKind::Concentration, (1.0, 1000.0), 301)]),
        chart("jmp", vec![axis("concentration", AxisKind::Concentration, (1.0, 1000.0), 301)]),
    ];
    let results = run(&design);
    let (efficiency, current) = (&results.charts[0], &results.charts[1]);
    let figure = |chart: &bandloom::results::ChartResult, at: usize| chart.values[at].expect("a figure");
    let best =
        (0..301).max_by(|&a, &b| figure(efficiency, a).total_cmp(&figure(efficiency, b))).expect("points");
    close(10.0 * figure(current, best) * ohm_m2 / thermal_voltage(298.15), 1.0, 0.02);
    assert!(best > 20 && best < 280);
    // Even in the logarithm, both ends as asked.
    let axis = &efficiency.axes[0].values;
    assert_eq!((axis[0], axis[300]), (1.0, 1000.0));
    close(axis[100], 10.0, 1e-9);
}

#[test]
fn a_map_holds_what_single_conditions_give() {
    let mut design = limit_stack(&[1.8, 1.42]);
    design.charts = vec![chart(
        "voc",
        vec![
            axis("temperature", AxisKind::Temperature, (298.15, 348.15), 3),
            axis("concentration", AxisKind::Concentration, (1.0, 500.0), 2),
        ],
    )];
    let map = run(&design).charts.remove(0);
    assert_eq!((map.values.len(), map.unit.as_str()), (6, "V"));
    close(map.axes[0].values[1], 50.0, 1e-9);
    let mut single = limit_stack(&[1.8, 1.42]);
    (single.conditions[0].temperature_k, single.conditions[0].concentration) = (323.15, 500.0);
    let voc = run(&single).conditions[0].voc_v;
    close(map.values[3].expect("a figure"), voc.expect("series"), 1e-12);
}

#[test]
fn a_chart_over_a_thickness_moves_the_layer() {
    use bandloom::design::{Duty, Place};
    use bandloom::materials::optics::{DirectEdge, Optics};
    let edge = DirectEdge { gap_ev: 1.42, coefficient_per_m: 2e6, urbach_ev: 0.0, index: None };
    let mut design = super::designs::empty();
    let absorber = super::designs::material(1.42, Optics::Direct(edge));
    design.layers =
        vec![super::designs::layer("top.base", Duty::Base, Place::Junction(0), absorber, Some(3e-7))];
    design.junctions = vec![super::designs::junction("top", 0..1, VoltageModel::RadiativeLimit)];
    design.charts =
        vec![chart("jsc", vec![axis("top.base.thickness", AxisKind::Thickness(0), (1e-7, 3e-7), 3)])];
    let results = run(&design);
    let chart = &results.charts[0];
    close(chart.values[2].expect("a figure"), results.conditions[0].jsc_ma_per_cm2.expect("series"), 1e-9);
    assert!(chart.values[0] < chart.values[1] && chart.values[1] < chart.values[2]);
    close(chart.axes[0].values[0], 100.0, 1e-9);
}

#[test]
fn a_season_sums_the_powers_of_its_rows() {
    // Each row against the same condition evaluated by itself; temperatures that lie between those at
    // which light is worked out, two lights, two angles, a night.
    let mut design = limit_stack(&[1.8, 1.42]);
    let global = Arc::clone(&design.conditions[0].light);
    let direct = builtin("AM1.5D").expect("built in");
    let row = |hours: f64, light: &Arc<bandloom::light::Spectrum>, t: f64, x: f64, angle: f64| {
        let mut condition = condition("row", Arc::clone(light), t);
        (condition.concentration, condition.incidence_rad) = (x, angle);
        SeasonRow { seconds: 3600.0 * hours, condition }
    };
    let rows = vec![
        row(300.0, &global, 283.15, 0.3, 0.0),
        row(200.0, &global, 286.0, 0.6, 0.0),
        row(150.0, &global, 331.7, 1.05, 0.0),
        row(100.0, &direct, 301.3, 0.9, 0.6),
        row(4000.0, &global, 275.0, 0.0, 0.0),
    ];
    let mut energy = 0.0;
    for row in &rows[..4] {
        let mut single = limit_stack(&[1.8, 1.42]);
        single.conditions = vec![row.condition.clone()];
        energy += row.seconds / 3.6e6 * run(&single).conditions[0].power_w_per_m2;
    }
    design.season = Some(Season { file: "mast.csv".into(), condition: 0, rows, span: Span::default() });
    let results = run(&design);
    let season = results.season.as_ref().expect("a season");
    close(season.energy_kwh_per_m2, energy, 2e-5 * energy);
    close(season.hours, 4750.0, 1e-9);
    let light = 0.3 * 300.0 + 0.6 * 200.0 + 1.05 * 150.0;
    let expected = 1.000_37 * light + 0.900_14 * 0.9 * 100.0 * f64::cos(0.6);
    close(season.incident_kwh_per_m2, expected, 1e-4 * expected);
    let here = results.conditions[0].efficiency;
    close(season.harvest_ratio, season.energy_kwh_per_m2 / season.incident_kwh_per_m2 / here, 1e-12);
    assert_eq!(season.rows[4].power_w_per_m2, 0.0);
}

#[test]
fn a_grid_from_its_shape_costs_what_its_parts_say() {
    // Serreze (1978): ρ_s p²/12 + ρ_m p l²/(3 w h), with 400 ohm/sq, 0.2 mm, 8 by 4 um, 5 mm of
    // 2.4e-8 ohm m: 1.3333e-6 + 1.25e-6 ohm m2.
    let shape = FingerShape {
        pitch_m: 2e-4,
        width_m: 8e-6,
        height_m: 4e-6,
        length_m: 5e-3,
        resistivity_ohm_m: 2.4e-8,
        contact_ohm_m2: 0.0,
        sheet_ohm: Some(400.0),
    };
    let mut design = limit_stack(&[1.42]);
    design.conditions[0].concentration = 100.0;
    design.fingers = Some(Fingers {
        shading: 0.04,
        series_resistance_ohm_m2: 0.0,
        shape: Some(shape),
        span: Span::default(),
    });
    let results = run(&design);
    let result = &results.conditions[0];
    let grid = result.grid.as_ref().expect("a grid");
    close(grid.lateral_ohm_cm2.expect("from shape"), 1.333_333e-2, 1e-7);
    close(grid.metal_ohm_cm2.expect("from shape"), 1.25e-2, 1e-9);
    let current = 10.0 * result.jmp_ma_per_cm2.expect("series");
    let lost = result.ledger_w_per_m2.iter().find(|line| line.line == "series").expect("a line").value;
    close(lost, current * current * 2.583_333e-6, 1e-5 * lost);
}

#[test]
fn a_measurement_off_by_a_tenth_says_so() {
    let mut design = limit_stack(&[1.42]);
    design.conditions[0].light = builtin("AM1.5D").expect("built in");
    let at: Vec<f64> = (0..=100).map(|i| 400e-9 + 4e-9 * f64::from(i)).collect();
    design.measured = vec![Measured {
        kind: MeasuredKind::Eqe,
        file: "run.csv".into(),
        junction: Some(0),
        condition: 0,
        values: vec![0.9; at.len()],
        at,
        reference: None,
        text: String::new(),
        span: Span::default(),
    }];
    let eqe = run(&design).measured.remove(0);
    close(eqe.bias, -0.1, 1e-9);
    close(eqe.rms, 0.1, 1e-9);
    let (measured, predicted) =
        (eqe.measured_jsc_ma_per_cm2.expect("eqe"), eqe.predicted_jsc_ma_per_cm2.expect("eqe"));
    close(measured / predicted, 0.9, 1e-4);
    // The light of AM1.5D from 400 to 800 nm by the table itself.
    let light = 0.1 * builtin("AM1.5D").expect("built in").photon_current(400e-9, 800e-9);
    close(predicted, light, 1e-3);

    // A curve: current of the model itself, sampled, has no residual.
    let mut design = one_diode();
    let result = run(&design).conditions.remove(0);
    let jsc = 10.0 * result.jsc_ma_per_cm2.expect("series");
    let kt = thermal_voltage(298.15);
    let at: Vec<f64> = (0..=12).map(|i| -0.1 + 0.1 * f64::from(i)).collect();
    let values: Vec<f64> = at.iter().map(|v| jsc - 1e-15 * f64::exp_m1(v / kt)).collect();
    design.measured = vec![Measured {
        kind: MeasuredKind::Jv,
        file: "sweep.csv".into(),
        junction: None,
        condition: 0,
        at,
        values,
        reference: None,
        text: String::new(),
        span: Span::default(),
    }];
    let jv = run(&design).measured.remove(0);
    assert!(jv.rms < 1e-6 && jv.bias.abs() < 1e-6, "{} {}", jv.rms, jv.bias);
    close(jv.measured_jsc_ma_per_cm2.expect("through zero"), 0.1 * jsc, 1e-6);
    assert!(jv.spectral_mismatch_factor.is_none());
}
