use super::*;

#[test]
fn a_unit_belongs_to_its_number_and_a_dopant_does_not() {
    for (text, unit) in [
        ("612 nm", Some("nm")),
        ("612nm", Some("nm")),
        ("2e18 /cm3", Some("/cm3")),
        ("2e18/cm3", Some("/cm3")),
        ("2e18 cm-3", Some("cm-3")),
        ("2e18 cm^-3", Some("cm^-3")),
        ("2e18 cm⁻³", Some("cm⁻³")),
        ("3 µm", Some("µm")),
        ("3 μm", Some("μm")),
        ("5.6 Å", Some("Å")),
        ("5.6 \u{212b}", Some("\u{212b}")),
        ("25 °C", Some("°C")),
        ("25 degC", Some("degC")),
        ("20 mohm cm2", Some("mohm cm2")),
        ("20 mohm·cm²", Some("mohm·cm²")),
        ("2 ohm cm", Some("ohm cm")),
        ("30 ohm/sq", Some("ohm/sq")),
        ("8500 cm2/V/s", Some("cm2/V/s")),
        ("1 W/m2/nm", Some("W/m2/nm")),
        ("1 photons/s/m2/nm", Some("photons/s/m2/nm")),
        ("5e4 /cm/eV^0.5", Some("/cm/eV^0.5")),
        ("5.32 g/cm3", Some("g/cm3")),
        ("-0.06 %/K", None),
        ("3 %", Some("%")),
        ("500 times", Some("times")),
        ("2 points", Some("points")),
        ("6 deg", Some("deg")),
        ("5 min", Some("min")),
        ("1 MeV", Some("MeV")),
        ("1e-10 cm3/s", Some("cm3/s")),
        ("612", None),
        ("1_000", None),
    ] {
        if text.starts_with('-') {
            assert_eq!(arithmetic(text), "-[0.06 %/K]");
            continue;
        }
        assert_eq!(number(text).unit.map(|unit| unit.value).as_deref(), unit, "{text}");
    }
    // No unit, so a word of its own: a later pass says so.
    for text in ["500 suns", "25 C", "3 micron", "3 x"] {
        let property = property(&format!("light {text}"));
        assert_eq!(property.arguments.len(), 2, "{text}");
        assert!(matches!(&property.arguments[1], Argument::Word(_)), "{text}");
    }
}

#[test]
fn units_read_here_are_known_to_the_table_of_units() {
    let prefixed = [
        "nm ns nA nW ng cm eV meV mohm min mrad mm ms mA mV mW mg mK mJ m um us uA uV uW ug uohm",
        "keV kohm kPa km kA kV kW kg kJ MeV Mohm MPa MW MJ pm ps pA degC deg ohm sq s hPa h times",
        "GPa Pa angstrom au Å A K V W J rad g fs fA points photons % °C",
    ];
    for unit in prefixed.iter().flat_map(|line| line.split(' ')) {
        assert_eq!(number(&format!("2 {unit}")).unit.map(|it| it.value).as_deref(), Some(unit));
        assert!(crate::units::text::parse(unit).is_ok(), "the table of units does not know `{unit}`");
    }
}

#[test]
fn values_of_numbers_are_read_as_written() {
    for (text, value, comma) in [
        ("612 nm", 612.0, false),
        ("0.7", 0.7, false),
        ("2e18 /cm3", 2e18, false),
        ("1.5E-3 V", 1.5e-3, false),
        ("1_000 nm", 1000.0, false),
        ("0,7 um", 0.7, true),
        ("1,5e3", 1500.0, true),
    ] {
        let number = number(text);
        assert_eq!((number.value, number.decimal_comma), (value, comma), "{text}");
    }
}

#[test]
fn a_comma_separates_inside_brackets_and_marks_decimals_outside() {
    assert_eq!(arithmetic("min(3, 4) + max(1,2)"), "[min(3, 4) + max(1, 2)]");
    let Statement::Place(place) = only(body("place pair(12 nm,3 nm, b = 0.5)")) else { panic!("a place") };
    assert_eq!(place.arguments.len(), 3);
    assert_eq!(place.arguments[2].0.as_ref().map(|name| name.value.as_str()), Some("b"));
    let weights = only(body("seek highest efficiency weighing noon 3, roof 1"));
    let Statement::Seek(seek) = weights else { panic!("a seek") };
    assert_eq!(seek.weighing.len(), 2);
}

#[test]
fn arithmetic_binds_as_in_school() {
    for (text, expected) in [
        ("1 + 2 * 3", "[1 + [2 * 3]]"),
        ("1 - 2 - 3", "[[1 - 2] - 3]"),
        ("8 / 4 / 2", "[[8 / 4] / 2]"),
        ("2 ^ 3 ^ 2", "[2 ^ [3 ^ 2]]"),
        ("-2 ^ 2", "-[[2 ^ 2]]"),
        ("2 ^ -3", "[2 ^ -[3]]"),
        ("- - 2", "-[-[2]]"),
        ("2 * -3", "[2 * -[3]]"),
        ("(1 + 2) * 3", "[[1 + 2] * 3]"),
        ("a + b * c ^ d - e / f", "[[a + [b * [c ^ d]]] - [e / f]]"),
        ("700 nm/2", "[700 nm / 2]"),
        ("10 nm / d", "[10 nm / d]"),
        ("sqrt(2) * top.base.thickness", "[sqrt(2) * top.base.thickness]"),
        ("3 − 2", "[3 - 2]"),
        ("2 * (a\n + b)", "bad"),
    ] {
        if expected == "bad" {
            // A bracket may break after `(` and before `)`, not inside an operand.
            assert!(read(&format!("let x = {text}\n")).findings.has_errors());
            continue;
        }
        assert_eq!(arithmetic(text), expected, "{text}");
    }
}

#[test]
fn ranges_free_values_and_tolerances_are_kept_apart() {
    let all = value("612 nm free 300 .. 1200 nm ± 3 % sigma");
    assert_eq!(shown(all.expression.as_ref().expect("settled")), "612 nm");
    let free = all.free.expect("free");
    assert_eq!((shown(&free.low), shown(&free.high)), ("300".to_owned(), "1200 nm".to_owned()));
    let tolerance = all.tolerance.expect("a tolerance");
    assert_eq!(shown(&tolerance.amount), "3 %");
    assert_eq!(tolerance.meaning.map(|it| it.value), Some(ToleranceMeaning::Sigma));

    let open = value("free 1.6 .. 2.3 eV");
    assert!(open.expression.is_none() && open.free.is_some());
    let range = value("0.49..0.72");
    assert_eq!(range.up_to.as_ref().map(shown).as_deref(), Some("0.72"));
    let limits = value("5 um +- 50 nm limits").tolerance.expect("a tolerance");
    assert_eq!(limits.meaning.map(|it| it.value), Some(ToleranceMeaning::Limits));
    assert!(value("5 um ± 50 nm").tolerance.expect("a tolerance").meaning.is_none());
}
