use super::*;

/// What a file with this one statement in a stack gives.
fn slip(statement: &str) -> Outcome<syntax::File> {
    read(&format!("stack \"A\" {{\n    {statement}\n    wafer GaAs 350 um\n}}\n"))
}

#[track_caller]
fn help(statement: &str) -> String {
    let findings = slip(statement).findings;
    assert_eq!(findings.0.len(), 1, "{statement}: {findings:#?}");
    findings.0[0].helps.join("; ")
}

#[test]
fn the_way_out_is_the_statement_as_it_was_meant() {
    for (wrong, right) in [
        ("light: AM1.5G", "light AM1.5G"),
        ("temperature = 25 degC", "temperature 25 degC"),
        ("let d 700 nm", "let d = 700 nm"),
        ("let d := 700 nm", "let d = 700 nm"),
        ("requir efficiency >= 28 %", "require efficiency >= 28 %"),
        ("require efficiency => 28 %", "require efficiency >= 28 %"),
        ("voc >= 2.3 V", "require voc >= 2.3 V"),
        ("base GaAs, 3 um", "base GaAs 3 um"),
        ("base GaAs free 300 to 1200 nm", "base GaAs free 300 .. 1200 nm"),
        ("base GaAs free 300 - 1200 nm", "base GaAs free 300 .. 1200 nm"),
        ("base GaAs .5 um", "base GaAs 0.5 um"),
        ("window AlInP mached to buffer 20 nm", "window AlInP matched to buffer 20 nm"),
        ("bsf GaInP of bandgap 1.9 eV", "bsf GaInP of gap 1.9 eV"),
        ("cap GaAs 200 nm only under finger", "cap GaAs 200 nm only under fingers"),
        ("seek higest efficiency", "seek highest efficiency"),
        ("vary top.* ± 2 % sigma", "vary together top.* ± 2 % sigma"),
        ("measured eqe run-17.csv of top", "measured eqe \"run-17.csv\" of top"),
        ("accept lattice.mismatch becuse \"x\"", "accept lattice.mismatch because \"x\""),
        ("note 'First'", "note \"First\""),
        ("note “First”", "note \"First\""),
        ("junction top", "junction top { … }"),
        ("place pair(12 nm", "place pair(12 nm)"),
    ] {
        assert_eq!(help(wrong), format!("write `{right}`"), "{wrong}");
    }
}

#[test]
fn an_edit_that_is_offered_makes_the_statement_read() {
    for wrong in [
        "light: AM1.5G",
        "let d 700 nm",
        "requir efficiency >= 28 %",
        "base GaAs, 3 µm",
        "note 'First'",
        "# a comment",
        "junction top",
        "note \"First",
        "place pair(12 nm",
        "cap GaAs 200 nm only under finger",
    ] {
        let text = format!("stack \"A\" {{\n    note \"µ²°\"\n    {wrong}\n    wafer GaAs 350 um\n}}\n");
        let findings = read(&text).findings;
        let fix = findings.0[0].fix.clone().expect("an edit");
        let mut mended = text.clone();
        mended.replace_range(fix.span.range(), &fix.replacement);
        assert!(read(&mended).findings.is_empty(), "{mended}");
    }
}

#[test]
fn the_rest_of_a_file_with_slips_is_kept() {
    let outcome = slip("light: AM1.5G");
    let file = outcome.value.expect("a value");
    let Some(Item::Stack(stack)) = file.items.first() else { panic!("a stack") };
    assert!(matches!(stack.block.statements.as_slice(), [Statement::Invalid(_), Statement::Layer(_)]));
}

#[test]
fn an_item_with_an_open_block_is_not_judged_further() {
    let outcome = read(
        "condition noon { light AM0 }\nstack \"A\" {\n  junction top {\n    base GaAs 3 um\n}\nstack \"B\" { }\n",
    );
    assert_eq!(codes(&outcome.findings), ["syntax.unclosed"]);
    let items = outcome.value.expect("a value").items;
    assert!(matches!(items.as_slice(), [Item::Condition(_), Item::Invalid(_), Item::Stack(_)]));
}

#[test]
fn what_a_brace_too_many_cuts_off_is_not_judged_either() {
    let outcome = read("stack \"A\" {\n  junction top {\n  } }\n  wafer GaAs 350 um\n  metal Au\n}\n");
    assert_eq!(codes(&outcome.findings), ["syntax.stray-close"]);
    let items = outcome.value.expect("a value").items;
    assert!(matches!(items.as_slice(), [Item::Stack(_), Item::Invalid(_), Item::Invalid(_)]));
}

/// Slips that are one finding each, wherever they stand.
const SLIPS: &[&str] = &[
    "light: AM1.5G",
    "let d 700 nm",
    "require efficiency 28 %",
    "base GaAs, 3 um",
    "layer GaAs 3 um @",
    "note \"open",
    "place pair(12 nm",
    "tunnel 20 nm { peak 20 A/cm2 }",
    "[[[[ ]]]]",
    "= = =",
    "chart x over 3",
    "( ( (",
    "µ µ",
];

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::with_cases(100) })]

    #[test]
    fn k_slips_are_k_findings(chosen in proptest::collection::vec((0..SLIPS.len(), 0..3_usize), 0..12)) {
        let mut text = "stack \"A\" {\n    junction top {\n".to_owned();
        for &(slip, sound) in &chosen {
            text.push_str(&"        base GaAs 3 um p 1e17 /cm3 Zn // fine\n".repeat(sound));
            text.push_str(&format!("        {}\n", SLIPS[slip]));
        }
        text.push_str("    }\n}\n");
        let findings = read(&text).findings;
        prop_assert_eq!(findings.0.len(), chosen.len(), "{}\n{:#?}", text, findings);
    }
}
