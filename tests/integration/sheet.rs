//! What the sheet says: numbers that add up, labels that fit, the same every time.

use bandloom::report::figure::Drawing;
use bandloom::report::{Format, Templates, render};

use super::sheet_cases::{KITTIWAKE, SANDPIPER, cases, every_case};

#[test]
fn the_same_input_gives_the_same_bytes() {
    for case in every_case() {
        assert!(case.files == case.rendered(), "{}", case.name);
    }
    let again =
        |path: &str, text: &str| cases(path, text).into_iter().map(|case| case.files).collect::<Vec<_>>();
    assert!(again("kittiwake.stack", KITTIWAKE) == again("kittiwake.stack", KITTIWAKE));
}

#[test]
fn no_number_is_missing() {
    for case in every_case() {
        for file in &case.files {
            let text = String::from_utf8(file.bytes.clone()).expect("UTF-8");
            let words = text.split(|c: char| !c.is_ascii_alphanumeric());
            for word in words {
                assert!(
                    !["NaN", "nan", "inf", "Infinity", "undefined"].contains(&word),
                    "{word} in {}",
                    file.name
                );
            }
            assert!(!text.contains("-0\"") && !text.contains(",-0 "), "a signed zero in {}", file.name);
        }
    }
}

#[test]
fn markdown_stays_small_and_names_every_figure_file() {
    for case in every_case() {
        let files = &case.files;
        let markdown = case.text("sheet.md");
        assert!(markdown.len() < 60_000, "{} bytes for {}", markdown.len(), case.name);
        for figure in case.sheet().figures() {
            assert!(markdown.contains(&format!("]({})", figure.file)), "{}", figure.file);
            assert!(files.iter().any(|file| file.name == figure.file), "{}", figure.file);
        }
    }
}

/// A sheet is mailed around and read on telephones.
#[test]
fn pages_stay_small() {
    for case in every_case() {
        let size = case.text("sheet.html").len();
        assert!(size < 600_000, "{size} bytes for {}", case.name);
    }
}

/// Conditions after the first are folded, under their number; what is not drawn is said.
#[test]
fn further_conditions_are_drawn() {
    let case = every_case().iter().find(|case| case.name == "Twelve conditions").expect("there");
    let html = case.text("sheet.html");
    for condition in 2..=5 {
        for kind in ["light", "eqe", "curves", "dark", "ledger"] {
            let id = format!("<figure id=\"fig-{kind}-{condition}\">");
            assert!(html.contains(&id), "no {id}");
        }
    }
    assert_eq!(html.matches("<details class=\"more\">").count(), 3 * 4);
    assert!(html.contains("Seven conditions more are in the tables"), "seven are left out without a word");
}

fn labels_fit(what: &str, drawing: &Drawing) {
    let labels = &drawing.labels;
    for (index, label) in labels.iter().enumerate() {
        let inside = label.left >= -1.0
            && label.right <= drawing.width + 1.0
            && label.top >= -2.0
            && label.bottom <= drawing.height + 2.0;
        assert!(inside, "{what}: {label:?} leaves {} × {}", drawing.width, drawing.height);
        for other in &labels[index + 1..] {
            assert!(!label.meets(other, 0.0), "{what}: {label:?} meets {other:?}");
        }
    }
}

/// With the widest advances of two libre fonts; the browser's own choice only leaves more room.
#[test]
fn no_label_meets_another_or_is_cut() {
    for case in every_case() {
        for figure in case.sheet().figures() {
            labels_fit(&format!("{}, {}", case.name, figure.title), &figure.wide);
            if let Some(slim) = &figure.slim {
                labels_fit(&format!("{}, {} on a narrow screen", case.name, figure.title), slim);
            }
        }
    }
}

/// Hundredths of a printed number.
fn hundredths(text: &str) -> i64 {
    let digits: String = text.chars().filter(char::is_ascii_digit).collect();
    let value: i64 = digits.parse().unwrap_or_else(|_| panic!("no number in `{text}`"));
    if text.starts_with('−') { -value } else { value }
}

/// The printed lines add up to the printed sum, under every condition.
#[test]
fn the_printed_ledger_closes() {
    for case in every_case() {
        let sheet = case.sheet();
        let table = &sheet.ledger.figures[0].data;
        let rows = &table.groups[0].rows;
        for column in 1..table.columns.len() {
            let values: Vec<i64> = rows.iter().map(|row| hundredths(&row[column].plain())).collect();
            let (total, lines) = (values[0], &values[1..values.len() - 1]);
            assert_eq!(lines.iter().sum::<i64>(), total, "{} {column}", case.name);
            let incident = case.input().results.conditions[column - 1].incident_w_per_m2;
            assert!((total as f64 / 100.0 - incident).abs() < 0.011, "{total} for {incident}");
        }
    }
}

/// The parts of the light add up to all of it, as printed, within the rounding of each line.
#[test]
fn the_printed_light_adds_up() {
    for case in every_case() {
        let sheet = case.sheet();
        let figure = sheet.light.figures.iter().find(|f| f.title == "Where the light goes").expect("drawn");
        let rows = &figure.data.groups[0].rows;
        for column in 1..3 {
            let values: Vec<i64> = rows.iter().map(|row| hundredths(&row[column].plain())).collect();
            let (all, parts) = values.split_last().expect("a last row");
            let off = (parts.iter().sum::<i64>() - all).abs();
            assert!(off <= parts.len() as i64 / 2 + 1, "{}: {off} hundredths off", case.name);
        }
    }
}

/// Vurgaftman et al., J. Appl. Phys. 89, 5815 (2001): at 300 K GaP 5.4505 Å and 2.27 eV (X), InP
/// 5.8697 Å and 1.353 eV, AlAs 5.6611 Å, on GaAs of 5.65325 Å; Ga0.52In0.48P meets GaAs.
#[test]
fn families_stand_where_the_handbook_has_them() {
    let case = &cases("stacks/sandpiper.stack", SANDPIPER)[0];
    let map = case.input().results.gap_map.as_ref().expect("it has a wafer");
    for (name, angstrom, gap) in [("GaP", 5.4505, 2.27), ("InP", 5.8697, 1.353), ("AlAs", 5.6611, 2.16)] {
        let end = map.compounds.iter().find(|end| end.name == name).expect("an end of a family");
        let mismatch = angstrom / 5.65325 - 1.0;
        assert!((end.mismatch - mismatch).abs() < 1e-4, "{name}: {} for {mismatch}", end.mismatch);
        assert!((end.gap_ev - gap).abs() < 0.02, "{name}: {} eV for {gap}", end.gap_ev);
    }
    let family = map.families.iter().find(|family| family.name == "GaInP").expect("the tops are made of it");
    // From GaP: indirect first, then direct to the end; its lattice grows all the way.
    assert!(family.mismatch.is_sorted() && !family.direct[0] && family.direct[family.direct.len() - 1]);
    assert_eq!(family.direct.windows(2).filter(|pair| pair[0] != pair[1]).count(), 1);
    let base = map.layers.iter().find(|layer| layer.name == "top.base").expect("marked");
    assert!(base.mismatch.abs() < 1e-6, "{}", base.mismatch);
}

/// At rest the Fermi level is one: the built-in voltage of a junction is what both neutral sides
/// differ by, `kT ln(N_D N_A/n_i²)`; for gallium arsenide n_i is 2.1e6 /cm3 at 300 K (Blakemore,
/// J. Appl. Phys. 53, R123 (1982), from memory), some 1.6e6 at 298 K. Heavy doping lifts the Fermi
/// level into the band, which adds to it.
#[test]
fn band_edges_bend_by_the_built_in_voltage() {
    let case = &cases("stacks/sandpiper.stack", SANDPIPER)[0];
    let bands = case.input().results.bands.as_ref().expect("every layer has its data");
    assert_eq!(bands.model, "equilibrium");
    let conduction = |name: &str, depth: f64| {
        let layer = bands.layers.iter().find(|layer| layer.name == name).expect(name);
        assert_eq!(layer.depth_nm.len(), layer.conduction_ev.len());
        let after = layer.depth_nm.iter().position(|z| *z >= depth).expect("inside").max(1);
        let (z, ev) = (&layer.depth_nm[after - 1..], &layer.conduction_ev[after - 1..]);
        ev[0] + (depth - z[0]) / (z[1] - z[0]) * (ev[1] - ev[0])
    };
    // Far from every face: two micrometres into the base, half way through the emitter.
    let lift = conduction("bottom.base", 2000.0) - conduction("bottom.emitter", 50.0);
    let kt = 0.025_692_6;
    let boltzmann = kt * (2e18_f64 * 1e17 / (1.6e6_f64 * 1.6e6)).ln();
    assert!((boltzmann - 0.01..boltzmann + 0.08).contains(&lift), "{lift} V for {boltzmann}");
    // Each junction is closed by its window and its BSF.
    assert_eq!(bands.steps.iter().filter(|step| step.keeps_in && step.barrier_ev > 0.1).count(), 4);
}

/// What irradiation does, in the order every handbook has it: the base with the longest way loses
/// most, nothing gains, and the table says what is left of each.
#[test]
fn begin_and_end_of_life_stand_side_by_side() {
    let case = every_case().iter().find(|case| case.name == "Begin and end of life").expect("there");
    let sheet = case.sheet();
    let caption = |table: &bandloom::report::view::Table| table.caption.plain();
    let life =
        sheet.conditions.tables.iter().find(|t| caption(t).starts_with("Begin and end")).expect("a table");
    let rows = &life.groups[0].rows;
    let remains = |figure: &str| -> f64 {
        let row = rows.iter().find(|row| row[0].plain() == figure).expect(figure);
        row[3].plain().trim_end_matches("\u{a0}%").parse().expect("a number")
    };
    assert!(remains("efficiency") < 95.0 && remains("efficiency") > 40.0);
    assert!(remains("bottom, photocurrent") < remains("top, photocurrent"));
    assert!(remains("bottom, photocurrent") < 100.0 && remains("Voc") < 100.0);
    // Each layer that collects has its minority carriers stated.
    let table = &sheet.carriers.tables[0];
    let minority: Vec<String> = table.groups[0].rows.iter().map(|row| row[3].plain()).collect();
    assert_eq!(minority, ["holes", "electrons", "holes", "electrons"]);
}

/// Numbers become words in one place; a template that got a float could print `0.30000000000000004`.
#[test]
fn the_view_holds_no_float() {
    fn floats(value: &serde_json::Value, path: &str) {
        match value {
            serde_json::Value::Number(n) => assert!(n.is_u64() || n.is_i64(), "{path}: {n}"),
            serde_json::Value::Array(items) => items.iter().for_each(|item| floats(item, path)),
            serde_json::Value::Object(map) => map.iter().for_each(|(k, v)| floats(v, &format!("{path}.{k}"))),
            _ => {}
        }
    }
    for case in every_case() {
        floats(&serde_json::to_value(case.sheet()).expect("plain data"), "sheet");
    }
}

#[test]
fn what_fails_comes_first_and_says_so_in_words() {
    let text = "stack \"Short\" {\n    light AM1.5G\n    junction a { absorber ideal of gap 1.4 eV absorbs all_above_gap }\n    require voc >= 0.5 V\n    require efficiency >= 40 %\n}\n";
    for case in cases("short.stack", text) {
        let sheet = case.sheet();
        assert!(sheet.verdict.rows[0].fails && !sheet.verdict.rows[1].fails);
        let sentence = sheet.verdict.sentence.plain();
        assert!(sentence.starts_with("One of two requirements is met. Efficiency"), "{sentence}");
        assert!(sentence.contains("points short of 40"), "{sentence}");
        let html = case.text("sheet.html");
        assert!(html.find(">fails<").expect("in words") < html.find(">met<").expect("in words"));
    }
}

#[test]
fn a_template_of_the_users_own_takes_the_place_of_one_piece() {
    let case = &cases("stacks/sandpiper.stack", SANDPIPER)[0];
    let own = |name: &str, text: &str| Templates { replaced: vec![(name.into(), text.into())] };
    let files = render(
        &case.input(),
        &[Format::Html],
        &own("parts/title.html", "<h1>{{ sheet.name.html | safe }}, ours</h1>"),
    )
    .expect("it renders");
    let html = String::from_utf8(files[0].bytes.clone()).expect("UTF-8");
    assert!(html.contains("<h1>Sandpiper 2J, ours</h1>") && html.contains("<section id=\"ledger\""));

    let error =
        render(&case.input(), &[Format::Html], &own("parts/title.html", "<h1>\n{{ sheet.nmae }}</h1>"))
            .expect_err("there is no such field");
    assert_eq!(error.template.as_deref(), Some("parts/title.html"), "{error}");
    assert_eq!(error.line, Some(2), "{error}");
    assert!(!error.to_string().contains('\n'));
}

/// The keys are a promise to other programs; see `results.rs`.
#[test]
fn the_numbers_file_has_its_keys_and_ten_digits() {
    let case = &cases("stacks/kittiwake.stack", KITTIWAKE)[0];
    let text = case.text("results.json");
    let value: serde_json::Value = serde_json::from_str(&text).expect("JSON");
    let has = |value: &serde_json::Value, keys: &[&str]| {
        for key in keys {
            assert!(value.get(*key).is_some_and(|v| !v.is_null()), "no {key}");
        }
    };
    has(
        &value,
        &[
            "schema_version",
            "tool",
            "stack",
            "design_hash",
            "source",
            "conditions",
            "layers",
            "growth",
            "coats",
            "requirements",
            "bands",
            "gap_map",
            "free_values",
            "sensitivities",
            "findings",
        ],
    );
    for condition in value["conditions"].as_array().expect("a list") {
        has(
            condition,
            &[
                "name",
                "incident_w_per_m2",
                "temperature_k",
                "concentration",
                "efficiency",
                "power_w_per_m2",
                "voc_v",
                "jsc_ma_per_cm2",
                "fill_factor",
                "vmp_v",
                "jmp_ma_per_cm2",
                "limiting_junction",
                "current_mismatch",
                "reflected_ma_per_cm2",
                "junctions",
                "ledger_w_per_m2",
                "spectral",
                "curve",
            ],
        );
        has(
            &condition["junctions"][0],
            &[
                "name",
                "gap_ev",
                "photocurrent_ma_per_cm2",
                "jsc_ma_per_cm2",
                "voc_v",
                "voltage_at_mpp_v",
                "dark_current_radiative_a_per_cm2",
            ],
        );
        has(&condition["ledger_w_per_m2"][0], &["line", "value"]);
        has(&condition["spectral"], &["wavelength_nm", "reflectance", "eqe", "absorptance"]);
        has(&condition["curve"], &["voltage_v", "current_ma_per_cm2", "junction_voltage_v"]);
        let efficiency = condition["efficiency"].as_f64().expect("a number");
        assert!((0.0..1.0).contains(&efficiency), "fractions are plain: {efficiency}");
    }
    has(
        &value["layers"][4],
        &[
            "name",
            "duty",
            "junction",
            "material",
            "composition",
            "thickness_nm",
            "gap_ev",
            "gap_kind",
            "lattice_constant_angstrom",
            "mismatch",
            "strain",
            "doping_per_cm3",
            "origins",
        ],
    );
    has(&value["requirements"][0], &["text", "condition", "value", "bound", "met"]);
    for number in text.split(|c: char| !(c.is_ascii_digit() || matches!(c, '.' | '-' | '+' | 'e'))) {
        if number.parse::<f64>().is_ok() && number.contains('.') {
            let mantissa = number.split('e').next().unwrap_or("");
            let digits =
                mantissa.trim_start_matches(['-', '0', '.']).chars().filter(char::is_ascii_digit).count();
            assert!(digits <= 10, "{number}");
        }
    }
    let csv = case.text("curves.csv");
    assert!(csv.starts_with("condition,curve,voltage_v,current_ma_per_cm2\n"));
    assert!(csv.lines().all(|line| line.split(',').count() == 4));
}
