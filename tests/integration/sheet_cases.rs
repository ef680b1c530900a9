//! Stacks whose sheets are held in tests: the demos, one to six junctions, very many layers, and
//! names that try to be markup.

use std::path::Path;
use std::sync::OnceLock;

use bandloom::compile::{Options, compile};
use bandloom::report::view::{self, Sheet};
use bandloom::report::{AcceptedRow, FindingRow, Format, OutputFile, ReportInput, Templates, render};
use bandloom::results::{
    ChartAxisResult, ChartResult, MeasuredResult, Results, SeasonResult, SeasonRowResult,
};
use bandloom::world::memory::Memory;

pub(super) const SANDPIPER: &str = include_str!("../../stacks/sandpiper.stack");
pub(super) const KITTIWAKE: &str = include_str!("../../stacks/kittiwake.stack");
pub(super) const LIMITS: &str = include_str!("../../stacks/gap_limits.stack");

pub(super) const ALL: &[Format] = &[Format::Html, Format::Markdown, Format::Json, Format::Csv];

/// One stack that was evaluated, with everything the sheet is made of, and its files.
pub(super) struct Case {
    pub(super) files: Vec<OutputFile>,
    pub(super) name: String,
    stack: bandloom::compile::Stack,
    findings: Vec<FindingRow>,
    accepted: Vec<AcceptedRow>,
}

impl Case {
    pub(super) fn input(&self) -> ReportInput<'_> {
        ReportInput {
            design: &self.stack.design,
            results: self.stack.results.as_ref().expect("evaluated"),
            findings: &self.findings,
            accepted: &self.accepted,
        }
    }

    pub(super) fn sheet(&self) -> Sheet {
        view::sheet(&self.input()).expect("a condition was evaluated")
    }

    pub(super) fn rendered(&self) -> Vec<OutputFile> {
        render(&self.input(), ALL, &Templates::default()).expect("built-in templates hold")
    }

    pub(super) fn text(&self, file: &str) -> String {
        let found = self.files.iter().find(|f| f.name == file).unwrap_or_else(|| panic!("no {file}"));
        String::from_utf8(found.bytes.clone()).expect("UTF-8")
    }
}

/// Every evaluated stack of a text read under `path`.
pub(super) fn cases(path: &str, text: &str) -> Vec<Case> {
    let world = Memory::new().with(path, text);
    let compiled = compile(&world, Path::new(path), &Options::default());
    let row = |finding: &bandloom::finding::Finding| {
        let place = finding.primary.as_ref().map(|label| {
            let source = compiled.sources.get(label.span.source);
            source.position(label.span.start as usize)
        });
        FindingRow {
            code: finding.code.into(),
            severity: finding.severity.word().into(),
            message: finding.message.clone(),
            file: place.map(|_| path.into()),
            line: place.map(|p| p.line),
            column: place.map(|p| p.column),
            end_line: None,
            end_column: None,
            help: finding.helps.clone(),
            fix: None,
        }
    };
    let found: Vec<String> = compiled.findings.iter().map(|f| format!("{}: {}", f.code, f.message)).collect();
    let mut out: Vec<Case> = compiled
        .stacks
        .iter()
        .filter(|stack| stack.results.is_some())
        .map(|stack| Case {
            files: Vec::new(),
            name: stack.design.name.value.chars().take(40).collect(),
            findings: stack.findings.iter().map(row).collect(),
            accepted: stack
                .accepted
                .iter()
                .map(|a| AcceptedRow { finding: row(&a.finding), reason: a.because.clone() })
                .collect(),
            stack: stack.clone(),
        })
        .collect();
    assert!(!out.is_empty(), "nothing of {path} was evaluated: {found:#?}");
    for case in &mut out {
        case.files = case.rendered();
    }
    out
}

/// `n` junctions of a limit study, wide gaps first.
fn junctions(n: usize) -> String {
    let mut text = format!("stack \"{n} junctions\" {{\n    light AM1.5G\n");
    for index in 0..n {
        let gap = 2.2 - 1.5 * index as f64 / n as f64;
        text.push_str(&format!(
            "    junction number_{index} {{ absorber ideal of gap {gap:.3} eV absorbs all_above_gap }}\n"
        ));
    }
    text + "}\n"
}

/// Sixty layers over one junction.
fn many_layers() -> String {
    let mut text =
        String::from("stack \"Sixty\" {\n    light AM1.5G\n    optics one_pass { front_reflectance 2 % }\n");
    for index in 0..58 {
        let (name, nm) = if index % 2 == 0 { ("MgF2", 95) } else { ("ZnS", 48) };
        text.push_str(&format!("    coat {name} {nm} nm\n"));
    }
    text + "    junction only {\n        emitter GaAs 100 nm n 2e18 /cm3 Si\n        base GaAs 3 um p 1e17 /cm3 Zn\n        voltage from ere 1 %\n    }\n    wafer GaAs 350 um p 1e18 /cm3 Zn\n}\n"
}

/// Names that try to be markup, break tables, turn the text around, or never end.
pub(super) fn hostile() -> String {
    let long = "x".repeat(300);
    let word = "w".repeat(120);
    format!(
        "condition {word} {{\n    light AM1.5G\n    temperature 30 degC\n}}\nstack \"<script>alert(1)</script> | `tick` **bold** [a](b) \u{202e}turned\u{2066} &amp; {long}\" {{\n    note \"</style><img src=x onerror=alert(1)> | # heading | @all https://example.org\"\n    conditions {word}\n    junction {word} {{ absorber ideal of gap 1.9 eV absorbs all_above_gap }}\n    junction b {{ absorber ideal of gap 1.3 eV absorbs all_above_gap }}\n    require efficiency >= 99 %\n    accept current.mismatch on {word} because \"<b>|`why`|</b> \u{202e}\"\n}}\n"
    )
}

/// The demo of three junctions under twelve lights and temperatures.
fn twelve_conditions() -> String {
    let mut text = String::new();
    for index in 0..12 {
        let light = ["AM1.5G", "AM1.5D", "AM0"][index % 3];
        let celsius = 10 + 8 * index;
        text.push_str(&format!(
            "condition month_{index} {{\n    light {light}\n    temperature {celsius} degC\n}}\n"
        ));
    }
    let stack = &KITTIWAKE[KITTIWAKE.find("part clear_tunnel").expect("the demo has a part")..];
    let names: Vec<String> = (0..12).map(|index| format!("month_{index}")).collect();
    let kept = |line: &&str| !line.trim_start().starts_with("require");
    let stack: Vec<String> = stack
        .lines()
        .filter(kept)
        .map(|line| match line.trim_start().starts_with("conditions") {
            true => format!("    conditions {}", names.join(", ")),
            false => line.to_string(),
        })
        .collect();
    text + &stack.join("\n").replace("Kittiwake 3J", "Twelve conditions")
}

/// Six junctions, eighty layers, a nanometre and half a millimetre, a name that tries to be markup.
fn eighty_layers() -> String {
    let material = |al: f64| if al > 0.0 { format!("AlGaAs with Al {al:.3}") } else { "GaAs".to_string() };
    let mut text = String::from(
        "stack \"Eighty <b>layers</b> | `x`\" {\n    light AM0\n    optics one_pass { front_reflectance 2 % }\n    coat MgF2 95 nm\n",
    );
    for (junction, al) in [0.44, 0.36, 0.28, 0.18, 0.09, 0.0].into_iter().enumerate() {
        let name = if junction == 2 { "w".repeat(40) } else { format!("j{junction}") };
        text.push_str(&format!(
            "    junction {name} {{\n        window {} 1 nm n 2e18 /cm3 Si\n",
            material(al + 0.3)
        ));
        text.push_str(&format!("        emitter {} 50 nm n 2e18 /cm3 Si\n", material(al)));
        for part in 0..5 {
            let own = material(al + 0.002 * f64::from(part));
            text.push_str(&format!("        base {own} 120 nm p 1e17 /cm3 Zn as base{part}_{junction}\n"));
        }
        text.push_str(&format!(
            "        bsf {} 30 nm p 1e18 /cm3 Zn\n        voltage from ere 1 %\n    }}\n",
            material(al + 0.2)
        ));
        if junction < 5 {
            text.push_str(&format!("    tunnel as t{junction} {{\n        layer {} 15 nm p 8e19 /cm3 C\n        layer GaInP matched 15 nm n 2e19 /cm3 Te\n        peak 20 A/cm2\n        resistance 1 mohm cm2\n    }}\n", material(al + 0.1)));
        }
    }
    for step in 0..20 {
        let al = 0.01 * f64::from(step);
        text.push_str(&format!(
            "    buffer {} {} nm p 1e18 /cm3 Zn\n",
            material(al),
            if step % 2 == 0 { 1 } else { 200 }
        ));
    }
    text + "    wafer GaAs 500 um p 1e18 /cm3 Zn\n}\n"
}

/// Charts, measurements and a season by hand, as wide and as narrow as they come.
fn asked_for(results: &mut Results) {
    let axis = |path: &str, unit: &str, values: Vec<f64>| ChartAxisResult {
        path: path.into(),
        unit: unit.into(),
        values,
    };
    let times: Vec<f64> = (0..=40).map(|i| 10f64.powf(f64::from(i) / 40.0 * 3.0)).collect();
    let warm: Vec<f64> = (0..=20).map(|i| -20.0 + 6.0 * f64::from(i)).collect();
    let efficiency =
        |times: f64, celsius: f64| 0.30 + 0.012 * times.ln() - 4e-5 * times - 4e-4 * (celsius - 25.0);
    for (condition, shift) in [("noon", 0.0), ("summer_roof", 40.0)] {
        results.charts.push(ChartResult {
            text: "chart efficiency against concentration over 1 .. 1000 times, 41 points".into(),
            metric: "efficiency".into(),
            unit: "1".into(),
            condition: condition.into(),
            axes: vec![axis("concentration", "times", times.clone())],
            values: times.iter().map(|t| Some(efficiency(*t, 25.0 + shift))).collect(),
        });
    }
    results.charts.push(ChartResult {
        text: "chart top.voc against temperature over 100 .. -20 degC, 21 points".into(),
        metric: "top.voc".into(),
        unit: "V".into(),
        condition: "noon".into(),
        axes: vec![axis("temperature", "degC", warm.iter().rev().copied().collect())],
        values: warm.iter().rev().map(|c| (*c > 0.0).then_some(1.4 - 0.002 * c)).collect(),
    });
    results.charts.push(ChartResult {
        text: "chart efficiency against concentration over 1 .. 1000 times, temperature over -20 .. 100 degC"
            .into(),
        metric: "efficiency".into(),
        unit: "1".into(),
        condition: "noon".into(),
        axes: vec![axis("concentration", "times", times.clone()), axis("temperature", "degC", warm.clone())],
        values: times.iter().flat_map(|t| warm.iter().map(move |c| Some(efficiency(*t, *c)))).collect(),
    });
    let at: Vec<f64> = (0..=40).map(|i| 300.0 + 10.0 * f64::from(i)).collect();
    let predicted: Vec<f64> = at.iter().map(|nm| 0.9 - ((nm - 480.0) / 260.0).powi(2)).collect();
    results.measured.push(MeasuredResult {
        kind: "eqe".into(),
        file: "runs/<17>.csv".into(),
        junction: Some("top".into()),
        condition: "noon".into(),
        measured: predicted.iter().enumerate().map(|(i, p)| p - 0.01 * (i % 3) as f64).collect(),
        predicted,
        at,
        rms: 0.0129,
        bias: -0.01,
        measured_jsc_ma_per_cm2: Some(14.1),
        predicted_jsc_ma_per_cm2: Some(14.4),
        spectral_mismatch_factor: Some(1.002),
        ..MeasuredResult::default()
    });
    let curve = results.conditions[0].curve.clone();
    results.measured.push(MeasuredResult {
        kind: "jv".into(),
        file: "jv.csv".into(),
        condition: "noon".into(),
        measured: curve.current_ma_per_cm2.iter().map(|j| j - 0.12).collect(),
        predicted: curve.current_ma_per_cm2,
        at: curve.voltage_v,
        rms: 0.12,
        bias: -0.12,
        measured_voc_v: Some(2.46),
        measured_power_w_per_m2: Some(322.0),
        ..MeasuredResult::default()
    });
    let row = |index: usize| SeasonRowResult {
        hours: 80.0 + index as f64,
        light: "AM1.5G".into(),
        temperature_k: 280.0 + index as f64,
        concentration: 0.02 * index as f64,
        incident_w_per_m2: 20.0 * index as f64,
        power_w_per_m2: 6.1 * index as f64,
    };
    results.season = Some(SeasonResult {
        file: "mast_year.csv".into(),
        condition: "noon".into(),
        hours: 4380.0,
        incident_kwh_per_m2: 1680.0,
        energy_kwh_per_m2: 510.0,
        efficiency: 0.3036,
        harvest_ratio: 0.921,
        rows: (0..40).map(row).collect(),
    });
}

/// The demo of two junctions with its voltages from the layers, new and after years in orbit.
pub(super) fn begin_and_end_of_life() -> String {
    let kept: Vec<&str> = SANDPIPER.lines().filter(|line| !line.contains("voltage from")).collect();
    kept.join("\n")
        .replace("temperature  65 degC", "temperature  25 degC\n    fluence 1e15 /cm2 of electrons 1 MeV")
        .replace("Sandpiper 2J", "Begin and end of life")
        + "\n"
}

/// Every duty, inverted growth, removed layers, five conditions, tolerances.
const ZOO: &str = r#"condition a { light AM1.5G
 temperature 25 degC }
condition b { light AM1.5D
 temperature 60 degC
 concentration 2 times }
condition c { light AM0
 temperature -20 degC }
condition d { light AM1.5G
 temperature 85 degC }
condition e { light AM1.5G
 temperature 45 degC
 incidence 30 deg }
stack "Zoo of layers, inverted" {
    note        "Everything that may stand in a stack."
    growth      inverted
    conditions  a, b, c, d, e
    optics      one_pass { front_reflectance 4 % }
    cover       SiO2 100 um
    fingers     { shading 5 %; series_resistance 30 mohm cm2 }
    wafer       GaAs 350 um removed
    etch_stop   GaInP matched 200 nm removed
    cap         GaAs 150 nm n 6e18 /cm3 Te only under fingers
    coat        MgF2  95 nm  ± 2 % sigma
    coat        TiO2  48 nm  ± 3 % limits
    junction top {
        window   AlInP matched 20 nm n 2e18 /cm3 Si
        emitter  GaInP matched 70 nm n 2e18 /cm3 Si
        base     GaInP matched 700 nm p 1e17 /cm3 Zn
        bsf      AlGaInP matched of gap 2.1 eV 50 nm p 1e18 /cm3 Be
        voltage from ere 0.5 %
    }
    tunnel as upper {
        layer    Al0.3Ga0.7As 15 nm p 8e19 /cm3 C
        layer    GaInP matched 15 nm n 2e19 /cm3 Te
        peak 20 A/cm2
        resistance 1 mohm cm2
    }
    junction bottom {
        window   GaInP matched 50 nm n 2e18 /cm3 Si
        emitter  GaAs 100 nm n 2e18 /cm3 Si
        intrinsic GaAs 50 nm
        base     GaAs 3.5 um ± 3 % sigma p 1e17 /cm3 Zn
        bsf      GaInP matched 60 nm p 1e18 /cm3 Zn
        voltage from ere 1 %
    }
    buffer   AlGaAs with Al 0.2 1 um p 1e18 /cm3 Zn
    layer    GaAs 100 nm p 1e19 /cm3 Zn as rear_contact
    mirror   Ag 200 nm
    handle   Si 200 um
    metal    Au
    require efficiency >= 30 %
    require top.jsc >= 14 mA/cm2 under a
    require fill_factor >= 80 %
    accept current.mismatch because "the dish decides | `later`"
}
"#;

/// Made once: evaluation is the slow part.
pub(super) fn every_case() -> &'static [Case] {
    static ALL_CASES: OnceLock<Vec<Case>> = OnceLock::new();
    ALL_CASES.get_or_init(make_cases)
}

fn make_cases() -> Vec<Case> {
    let mut all = Vec::new();
    all.extend(cases("stacks/sandpiper.stack", SANDPIPER));
    all.extend(cases("stacks/kittiwake.stack", KITTIWAKE));
    all.extend(cases("stacks/gap_limits.stack", LIMITS));
    for n in 1..=6 {
        all.extend(cases("limit.stack", &junctions(n)));
    }
    all.extend(cases("sixty.stack", &many_layers()));
    all.extend(cases("zoo.stack", ZOO));
    all.extend(cases("eighty.stack", &eighty_layers()));
    let mut asked = cases("stacks/sandpiper.stack", SANDPIPER);
    for case in &mut asked {
        case.name = "Charts and measurements".into();
        if let Some(results) = &mut case.stack.results {
            asked_for(results);
        }
        case.files = case.rendered();
    }
    all.extend(asked);
    all.extend(cases("life.stack", &begin_and_end_of_life()));
    all.extend(cases("twelve.stack", &twelve_conditions()));
    all.extend(cases("a<b>|`c`.stack", &hostile()));
    all
}
