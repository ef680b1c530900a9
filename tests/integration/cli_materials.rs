//! `bandloom materials`: the list, a material's sheet, the search, the drawing.

use super::tool::Place;

#[test]
fn a_family_is_shown_without_a_composition() {
    let place = Place::with(&[]);
    let family = place.run(&["materials", "GaInP"]).ends(0);
    for part in ["members   GaP, InP", "crossing", "bowing    Ga–In with P: Γ 0.65 eV", "sources"] {
        assert!(family.out.contains(part) && family.err.is_empty(), "{part}\n{}{}", family.out, family.err);
    }
    // Relaxed lattice constants of 300 K, Vurgaftman et al. (2001): 5.4505, 5.8697 and 5.65325 Å, so
    // that Vegard's rule gives Ga 0.5163.
    assert!(family.out.contains("matched   to GaAs: 1.880 eV, direct, `Ga0.516In0.484P`"), "{}", family.out);
    let elsewhere = place.run(&["materials", "GaAsP", "--on", "InP"]).ends(0);
    assert!(elsewhere.out.contains("not to InP") && !elsewhere.out.contains("to GaAs"), "{}", elsewhere.out);
    place.run(&["materials", "GaInN"]).ends(2);
}

#[test]
fn a_search_prints_what_fits_and_names_the_nearest_where_nothing_does() {
    let place = Place::with(&[]);
    let found = place.run(&["materials", "--over", "gap", "1.7..1.9", "--on", "GaAs"]).ends(0);
    // Vegard's rule and the ordered gap, as above.
    let row = found.out.lines().find(|line| line.contains(" Ga0.516In0.484P") && !line.contains("from"));
    let row = row.unwrap_or_else(|| panic!("{}", found.out));
    assert!(row.contains("1.880") && row.contains("direct") && row.contains(" 0.000"), "{row}");
    assert!(found.out.lines().all(|line| line.chars().count() <= 80), "{}", found.out);
    let json =
        place.run(&["materials", "--over", "gap", "1.7..1.9", "--on", "GaAs", "--format", "json"]).ends(0);
    let json: serde_json::Value = serde_json::from_str(&json.out).expect("a document");
    assert_eq!(json["schema_version"], 1);
    let labels = json["found"].as_array().expect("rows").iter().map(|row| row["label"].as_str());
    assert!(labels.clone().any(|label| label == Some("Ga0.516In0.484P")), "{json}");

    let wrong = |arguments: &[&str], parts: &[&str]| {
        let run = place.run(&[&["materials"], arguments].concat()).ends(2);
        assert!(run.out.is_empty(), "{}", run.out);
        for part in parts {
            assert!(run.err.contains(part), "{part}\n{}", run.err);
        }
    };
    wrong(&["--over", "gap", "1.9..1.7", "--on", "GaAs"], &["from 1.9 down to 1.7 eV", "`1.7..1.9`"]);
    wrong(&["--over", "gap", "3.5..3.6", "--on", "GaAs"], &["nothing in the library", "the nearest is `"]);
    wrong(&["--over", "gap", "1..2", "--on", "Unobtanium"], &["no material is called `Unobtanium`"]);
    wrong(&["--over", "gap", "1..2", "--on", "MgF2"], &["no lattice constant", "GaAs"]);
    wrong(&["--over", "lattice", "5..6"], &["`--over gap 1.7..1.9`"]);
    wrong(&["GaAs", "--at", "650"], &["`650nm`"]);
    wrong(&["GaAs", "--doping", "1e17"], &["`1e17/cm3`"]);
    wrong(&["GaAs", "--figure", "gap.svg"], &["--on"]);
}

#[test]
fn a_material_is_shown_at_a_temperature_a_wavelength_and_a_doping() {
    let place = Place::with(&[]);
    let shown = place.run(&["materials", "GaAs", "--at", "300K,826.6nm", "--doping", "1e18/cm3"]).ends(0);
    assert!(shown.out.lines().all(|line| line.chars().count() <= 80), "{}", shown.out);
    for part in ["gap ", "densities", "electrons", "holes", "recombination", "sources", "[estimate]"] {
        assert!(shown.out.contains(part), "{part}\n{}", shown.out);
    }
    let json = place.run(&["materials", "GaAs", "--at", "300K,826.6nm", "--format", "json"]).ends(0);
    let json: serde_json::Value = serde_json::from_str(&json.out).expect("a document");
    let gaas = &json["materials"][0];
    let number = |value: &serde_json::Value| value.as_f64().expect("a number");
    // D. E. Aspnes, A. A. Studna, Phys. Rev. B 27, 985 (1983): n 3.666, k 0.080 at 1.5 eV.
    assert!((number(&gaas["index"][0]["n"]) - 3.666).abs() < 0.01, "{gaas}");
    assert!((number(&gaas["index"][0]["k"]) - 0.080).abs() < 0.003, "{gaas}");
    // Vurgaftman et al. (2001): 1.519 - 5.405e-4 300²/(300 + 204) = 1.4225 eV.
    assert!((number(&gaas["gap_ev"]) - 1.4225).abs() < 2e-4, "{gaas}");
    let list = place.run(&["materials", "--format", "json"]).ends(0);
    let list: serde_json::Value = serde_json::from_str(&list.out).expect("a document");
    assert!(list["library"].as_array().expect("a list").len() > 40);
    // What is no datum is said to be none: no table of the library reaches 20 µm.
    let far = place.run(&["materials", "GaAs", "--at", "20um"]).ends(0);
    assert!(far.out.contains("no data at 20000 nm"), "{}", far.out);
}

#[test]
fn gap_against_mismatch_is_written_as_a_drawing() {
    let place = Place::with(&[]);
    let arguments = ["materials", "--over", "gap", "1.7..2.0", "--on", "GaAs", "--figure", "gap.svg"];
    place.run(&arguments).ends(0);
    let svg = place.read("gap.svg");
    assert!(svg.starts_with("<svg") && svg.contains("<title") && svg.contains("AlInP"), "{svg}");
    let piped = place.run(&["materials", "GaInP", "--on", "GaAs", "--figure", "-"]).ends(0);
    assert!(piped.out.starts_with("<svg") && !piped.out.contains("NaN"), "{}", piped.out);
    place.run(&["materials", "MgF2", "--on", "GaAs", "--figure", "gap.svg/below.svg"]).ends(2);
}

#[test]
fn a_definition_can_be_copied_into_a_file() {
    let place = Place::with(&[]);
    let text = place.run(&["materials", "InGaAs", "--definition"]).ends(0).out;
    assert!(text.starts_with("alloy GaInAs {") && text.contains("mobility {"), "{text}");
    // Under a name of its own it is read like any other file.
    let own = text.replacen("alloy GaInAs", "alloy GaInAs_own", 1);
    let stack =
        "stack \"A\" { light AM1.5G; junction a { absorber ideal of gap 1.4 eV absorbs all_above_gap } }\n";
    let place = Place::with(&[("own.stack", &format!("{own}{stack}"))]);
    place.run(&["check", "own.stack"]).ends(0);
    place.run(&["materials", "Nobody", "--definition"]).ends(2);
    place.run(&["materials", "--definition"]).ends(2);
}
