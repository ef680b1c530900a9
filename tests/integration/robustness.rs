//! Bad input through the real binary: a finding at the right place with a way out, or trouble
//! told in a sentence; never a panic, never a sheet of what was not understood.

use std::time::{Duration, Instant};

use serde_json::Value;

use super::tool::{PAIR, Place, Ran};

/// Builds `bad.stack` and returns the findings, having seen that nothing was written.
#[track_caller]
fn found(place: &Place) -> Vec<Value> {
    let run = place.run(&["build", "bad.stack", "--into", "out", "--format", "json"]).ends(1);
    assert!(place.list("out").is_empty(), "{:?}", place.list("out"));
    let document: Value = serde_json::from_str(&run.err).unwrap_or_else(|why| panic!("{why}\n{}", run.err));
    let findings = document["findings"].as_array().cloned().expect("a list");
    for finding in &findings {
        assert!(!finding["help"].as_array().expect("a list").is_empty(), "no way out: {finding}");
    }
    // People are told the same.
    let human = place.run(&["check", "bad.stack", "--max-findings", "0"]).ends(1);
    assert_eq!(human.out.matches("\n  help: ").count(), total(&findings, "help"), "{}", human.out);
    findings
}

fn total(findings: &[Value], key: &str) -> usize {
    findings.iter().map(|finding| finding[key].as_array().map_or(0, Vec::len)).sum()
}

/// `bad.stack` gives exactly this code at this line (0: no place).
#[track_caller]
fn gives(text: &str, code: &str, line: u64) -> Vec<Value> {
    let findings = found(&Place::with(&[("bad.stack", text)]));
    assert_only(&findings, code, line);
    findings
}

#[track_caller]
fn assert_only(findings: &[Value], code: &str, line: u64) {
    let seen: Vec<(&str, u64)> = findings
        .iter()
        .map(|finding| (finding["code"].as_str().unwrap_or_default(), finding["line"].as_u64().unwrap_or(0)))
        .collect();
    assert_eq!(seen, [(code, line)], "{findings:#?}");
}

#[track_caller]
fn trouble(place: &Place, name: &str, words: &str) -> Ran {
    let run = place.run(&["build", name, "--into", "out"]).ends(2);
    assert!(run.err.contains(words), "{}", run.err);
    assert!(run.err.contains("help: "), "{}", run.err);
    assert!(place.list("out").is_empty());
    let json = place.run(&["check", name, "--format", "json"]).ends(2);
    let document: Value = serde_json::from_str(&json.out).expect("JSON");
    assert!(document["unreadable"][0]["message"].as_str().expect("text").contains(words));
    run
}

#[test]
fn a_file_with_nothing_in_it() {
    for text in ["", "\n\n", "// only a comment\n", "\u{feff}", "let d = 3 nm\n"] {
        let findings = found(&Place::with(&[("bad.stack", text)]));
        assert_eq!(findings.len(), 1, "{text:?} {findings:#?}");
        assert_eq!(findings[0]["code"], "structure.empty", "{text:?}");
    }
}

#[test]
fn two_stacks_of_one_name() {
    let findings = gives(&(PAIR.to_owned() + PAIR), "name.duplicate", 6);
    assert_eq!(findings[0]["related"][0]["line"], 1);
}

#[test]
fn an_unknown_material_and_a_wrong_dimension() {
    gives(
        &PAIR.replace("ideal of gap 1.70 eV   absorbs all_above_gap", "Unobtainium 3 um"),
        "name.unknown",
        3,
    );
    gives(&PAIR.replace("1.70 eV", "1.70 nm"), "unit.dimension", 3);
    gives(&PAIR.replace("1.70 eV", "1.70"), "unit.missing", 3);
}

#[test]
fn a_missing_file() {
    trouble(&Place::new(), "gone.stack", "there is no such file");
    gives(&format!("use \"gone.stack\"\n{PAIR}"), "use.missing", 1);
}

#[test]
fn a_folder_instead_of_a_file() {
    let place = Place::with(&[("folder.stack/inner.stack", PAIR)]);
    trouble(&place, "folder.stack", "it is a folder");
    place.write("bad.stack", format!("use \"folder.stack\"\n{PAIR}"));
    assert_only(&found(&place), "use.missing", 1);
}

#[test]
fn bytes_that_are_no_text() {
    let place = Place::new();
    place.write("latin.stack", b"stack \"M\xfcnster\" { }\n");
    let run = trouble(&place, "latin.stack", "not UTF-8");
    assert!(run.err.contains("byte 9"), "{}", run.err);
    place.write("zeros.stack", [0_u8; 100]);
    let run = place.run(&["check", "zeros.stack"]).ends(1);
    assert!(!run.out.contains('\0'));
    place.write("bad.stack", format!("use \"latin.stack\"\n{PAIR}"));
    let findings = found(&place);
    assert_eq!(findings.len(), 1, "{findings:#?}");
    assert!(findings[0]["code"].as_str().expect("text").starts_with("use."), "{findings:#?}");
}

#[test]
fn fifty_megabytes() {
    let place = Place::new();
    place.write("large.stack", "// nothing but noise\n".repeat(2_500_000));
    let start = Instant::now();
    trouble(&place, "large.stack", "MB");
    assert!(start.elapsed() < Duration::from_secs(5));
}

#[test]
fn ten_thousand_brackets() {
    for (open, close) in [("{", "}"), ("(", ")"), ("[", "]"), ("(", ""), ("{", ""), ("", "}"), ("{\n", "}\n")]
    {
        let text = format!("let d = {}3 nm{}\n{PAIR}", open.repeat(10_000), close.repeat(10_000));
        let place = Place::with(&[("bad.stack", &text)]);
        let start = Instant::now();
        let run = place.run(&["check", "bad.stack"]).ends(1);
        assert!(start.elapsed() < Duration::from_secs(5), "{open}{close}");
        assert!(run.out.contains("error: "), "{}", run.out);
        assert!(run.out.lines().all(|line| line.chars().count() < 400), "{open}{close}");
    }
    // Nested blocks that are well-formed but far too deep.
    let text = format!("stack \"Deep\" {}{}\n", "{ junction a ".repeat(10_000), "}".repeat(10_000));
    Place::with(&[("bad.stack", &text)]).run(&["check", "bad.stack"]).ends(1);
    let formula = format!(
        "stack \"Deep\" {{ junction a {{ base {}GaAs{} 3 um }} }}\n",
        "(".repeat(10_000),
        ")".repeat(10_000)
    );
    Place::with(&[("bad.stack", &formula)]).run(&["check", "bad.stack"]).ends(1);
}

/// A lamp of ten-nanometre rows from `rows`, and a stack under it.
fn lamp(rows: &str) -> Place {
    let stack = PAIR.replace("AM1.5G", "lamp");
    let spectrum = "\
spectrum lamp {
    file        \"lamp.csv\"
    wavelength  column 1 in nm
    irradiance  column 2 in W/m2/nm
}
";
    Place::with(&[("bad.stack", &(spectrum.to_owned() + &stack)), ("lamp.csv", rows)])
}

#[test]
fn a_table_with_text_in_a_number_column() {
    let findings = found(&lamp("nm,E\n300,0.1\n400,bright\n1200,0.3\n"));
    assert_eq!(findings.len(), 1, "{findings:#?}");
    assert_eq!((&findings[0]["file"], &findings[0]["line"]), (&"lamp.csv".into(), &3.into()));
    assert_eq!(findings[0]["column"], 5);
    assert!(findings[0]["message"].as_str().expect("text").contains("`bright`"));
}

#[test]
fn a_table_whose_wavelength_falls() {
    let findings = found(&lamp("nm,E\n300,0.1\n500,0.2\n400,0.3\n1200,0.3\n"));
    assert_eq!(findings.len(), 1, "{findings:#?}");
    assert_eq!((&findings[0]["file"], &findings[0]["line"]), (&"lamp.csv".into(), &4.into()));
}

#[test]
fn tables_that_hold_no_numbers() {
    for rows in ["", "nm,E\n", "300,0.1\n", "300,NaN\n400,inf\n", "300,-1\n400,-1\n", "\0\0\0"] {
        let findings = found(&lamp(rows));
        assert!(!findings.is_empty(), "{rows:?}");
    }
}

#[test]
fn a_spectrum_with_no_photons_above_any_gap() {
    // 2000 nm is 0.62 eV, below both gaps.
    let findings = found(&lamp("nm,E\n2000,0.1\n2500,0.3\n"));
    assert_eq!(findings.len(), 1, "{findings:#?}");
    assert!(findings[0]["line"].as_u64().is_some(), "{findings:#?}");
}

#[test]
fn temperatures_at_and_below_absolute_zero() {
    for temperature in ["0 K", "-1 K", "-273.15 degC", "-300 degC"] {
        gives(&PAIR.replace("AM1.5G", &format!("AM1.5G\n    temperature {temperature}")), "value.range", 3);
    }
}

#[test]
fn thicknesses_that_are_none() {
    for thickness in ["0 nm", "-3 um", "0.0 mm"] {
        let layers = PAIR.replace(
            "absorber ideal of gap 1.10 eV",
            &format!("base GaAs {thickness} absorber ideal of gap 1.10 eV"),
        );
        let layers =
            layers.replace(&format!("{thickness} absorber"), &format!("{thickness} p 1e17 /cm3; absorber"));
        let layers = layers.replace("}\n}", "}\n    wafer GaAs 350 um\n}");
        gives(&layers, "value.range", 4);
    }
}

#[test]
fn a_stack_without_a_junction() {
    let findings = found(&Place::with(&[(
        "bad.stack",
        "stack \"None\" {\n    light AM1.5G\n    wafer GaAs 350 um\n}\n",
    )]));
    assert_eq!(findings.len(), 1, "{findings:#?}");
    let code = findings[0]["code"].as_str().expect("text");
    assert!(code.starts_with("structure."), "{findings:#?}");
}

#[test]
fn numbers_beyond_numbers() {
    for gap in ["1e999 eV", "-1e999 eV", "0 eV", "1e-300 eV", "1e300 eV", "(1 eV)/0", "sqrt(-1) eV"] {
        let place = Place::with(&[("bad.stack", &PAIR.replace("1.70 eV", gap))]);
        let findings = found(&place);
        assert!(!findings.is_empty(), "{gap}");
        for finding in &findings {
            let message = finding["message"].as_str().expect("text");
            assert!(!message.contains("NaN") && !message.contains("inf "), "{message}");
        }
    }
}

#[test]
fn names_that_mean_harm() {
    let name = "</title><script>alert(1)</script> \\u{1b}[2J ../../x";
    let text = PAIR.replace("Pair", name);
    let place = Place::with(&[("good.stack", &text)]);
    let run = place.run(&["build", "good.stack", "--into", "out"]);
    assert!(!run.err.contains("panicked") && !run.out.contains('\u{1b}'));
    let files = place.list("out");
    assert!(files.iter().all(|file| file.starts_with("out/") && file.matches('/').count() == 2), "{files:?}");
    for file in
        files.iter().filter(|file| file.ends_with(".html") || file.ends_with(".md") || file.ends_with(".svg"))
    {
        assert!(!place.read(file).contains("<script>alert"), "{file}");
    }
    assert!(!place.path("../x").exists());
}

#[test]
fn use_that_leads_astray() {
    let place = Place::with(&[("bad.stack", &format!("use \"../../../etc/passwd\"\n{PAIR}"))]);
    assert_only(&found(&place), "use.outside", 1);
    let place = Place::with(&[
        ("bad.stack", &format!("use \"b.stack\"\n{PAIR}")),
        ("b.stack", "use \"bad.stack\"\n"),
    ]);
    let findings = found(&place);
    assert_eq!(findings.len(), 1, "{findings:#?}");
    assert_eq!(findings[0]["code"], "use.cycle");
}

/// Every prefix of a real file, and the file with every token left out once, is answered without
/// a panic and within a second.
#[test]
fn half_typed_files() {
    let path = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("stacks/sandpiper.stack");
    let text = std::fs::read_to_string(path).expect("a demo");
    let options = bandloom::compile::Options { no_evaluation: true, ..Default::default() };
    let answer = |text: &str| {
        let start = Instant::now();
        let world = bandloom::world::memory::Memory::new().with("a.stack", text);
        let compiled = bandloom::compile::compile(&world, std::path::Path::new("a.stack"), &options);
        for finding in compiled.findings.iter() {
            let look = bandloom::finding::render::Look { color: false, width: 80 };
            assert!(!bandloom::finding::render::render(finding, &compiled.sources, look).is_empty());
        }
        assert!(start.elapsed() < Duration::from_secs(1));
    };
    for (at, _) in text.char_indices().step_by(7) {
        answer(&text[..at]);
    }
    let words: Vec<&str> = text.split_inclusive(char::is_whitespace).collect();
    for gone in (0..words.len()).step_by(5) {
        let rest: String =
            words.iter().enumerate().filter(|(index, _)| *index != gone).map(|(_, word)| *word).collect();
        answer(&rest);
    }
}
