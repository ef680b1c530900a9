use super::*;

fn words(all: &[Spanned<String>]) -> Vec<&str> {
    all.iter().map(|word| word.value.as_str()).collect()
}

#[test]
fn the_examples_of_the_language_read_without_a_finding() {
    let file = sound(TWO_JUNCTIONS);
    assert_eq!((file.items.len(), file.comments.len()), (3, 1));
    let Some(Item::Stack(stack)) = file.items.last() else { panic!("{:?}", file.items.last()) };
    assert_eq!(stack.name.value, "Sandpiper 2J");
    let groups = stack.block.statements.iter().filter(|it| matches!(it, Statement::Group(_))).count();
    let layers = stack.block.statements.iter().filter(|it| matches!(it, Statement::Layer(_))).count();
    assert_eq!((groups, layers, stack.block.statements.len()), (3, 5, 16));
    sound(include_str!("../../../tests/fixtures/parse/limit_study.stack"));
}

#[test]
fn every_layer_phrase_has_its_parts() {
    let it = layer("base GaInP matched 612 nm free 300 .. 1200 nm p 1e17 /cm3 Zn as thick { rate 3 um/h }");
    assert_eq!(it.duty.value, "base");
    let material = it.material.expect("a material");
    assert_eq!(material.name.value, "GaInP");
    assert!(matches!(material.qualifiers.as_slice(), [Qualifier::Matched { to: None, .. }]));
    assert!(matches!(
        it.attributes.as_slice(),
        [
            Attribute::Value(_),
            Attribute::Doping { polarity: Spanned { value: Polarity::P, .. }, species: Some(_), .. }
        ]
    ));
    assert_eq!(it.alias.expect("a name").value, "thick");
    assert_eq!(it.block.expect("a block").statements.len(), 1);
    assert_eq!(layer("base GaAs 3 um { } as thick").alias.expect("a name").value, "thick");
}

#[test]
fn materials_keep_their_formula_as_written() {
    for formula in [
        "GaAs",
        "Ga0.51In0.49P",
        "(Al0.3Ga0.7)0.51In0.49P",
        "Cs0.2FA0.8Pb(I0.8Br0.2)3",
        "GaIn0.49P",
        "MgF2",
        "my_glass",
    ] {
        let it = layer(&format!("layer {formula} 20 nm"));
        assert_eq!(it.material.expect("a material").name.value, formula);
        assert_eq!(it.attributes.len(), 1, "{formula}");
    }
    let it = property("between (Al0.3Ga0.7)0.51In0.49P Cs0.2FA0.8Pb(I0.8Br0.2)3 GaAs");
    let names: Vec<_> = it.arguments.iter().map(|it| matches!(it, Argument::Word(_))).collect();
    assert_eq!(names, [true, true, true]);
    let named = sound("material (Al0.5Ga0.5)0.5In0.5P { density 4.2 g/cm3 }");
    assert!(matches!(&named.items[0], Item::Material(it) if it.name.value == "(Al0.5Ga0.5)0.5In0.5P"));
}

#[test]
fn phrases_are_narrowed_down_in_order() {
    let qualifiers = |text: &str| layer(text).material.expect("a material").qualifiers;
    assert!(matches!(
        qualifiers("bsf AlGaInP matched of gap 2.1 eV 50 nm").as_slice(),
        [Qualifier::Matched { .. }, Qualifier::OfGap { .. }]
    ));
    assert!(matches!(
        qualifiers("bsf GaInP matched ordered to 1.85 eV 50 nm").as_slice(),
        [Qualifier::Matched { .. }, Qualifier::OrderedTo { .. }]
    ));
    assert!(matches!(
        qualifiers("base GaInAs matched to step.last 3 um").as_slice(),
        [Qualifier::Matched { to: Some(path), .. }] if path.value == "step.last"
    ));
    let with = qualifiers("base GaInP with In free 0.4 .. 0.6 500 nm");
    let [Qualifier::With { element, value, .. }] = with.as_slice() else { panic!("{with:?}") };
    assert!(element.value == "In" && value.free.is_some());
    let graded = layer("buffer graded GaInP with In 0.49 .. 0.72 in 8 steps of 250 nm relaxed");
    assert!(graded.material.expect("a material").graded.is_some());
    assert!(matches!(
        graded.attributes.as_slice(),
        [Attribute::Steps { of: Some(_), .. }, Attribute::Relaxed(_)]
    ));
    let ideal = layer("absorber ideal of gap free 1.6 .. 2.3 eV absorbs all_above_gap");
    assert!(matches!(
        ideal.attributes.as_slice(),
        [Attribute::Absorbs { argument: Argument::Word(word), .. }] if word.value == "all_above_gap"
    ));
}

#[test]
fn layers_that_are_not_there_everywhere_say_so() {
    let cap = layer("cap GaAs 200 nm n 6e18 /cm3 Si only under fingers");
    assert!(matches!(cap.attributes.last(), Some(Attribute::OnlyUnderFingers(_))));
    let stop = layer("etch_stop GaInP matched 100 nm removed");
    assert!(matches!(stop.attributes.last(), Some(Attribute::Removed(_))));
    let window = layer("window AlInP matched 20 nm pseudomorphic collecting");
    assert!(matches!(
        window.attributes.as_slice(),
        [_, Attribute::Pseudomorphic(_), Attribute::Collecting(_)]
    ));
    let wafer = layer("wafer GaAs 350 um p 1e18 /cm3 Zn offcut 6 deg");
    assert!(matches!(wafer.attributes.last(), Some(Attribute::Offcut { .. })));
}

#[test]
fn a_diffused_skin_may_have_no_material_of_its_own() {
    let own = layer("emitter diffused Ge 200 nm n 5e18 /cm3 P").material.expect("a phrase");
    assert!(own.diffused.is_some() && own.name.value == "Ge");
    let skin = layer("emitter diffused 200 nm n 5e18 /cm3 P").material.expect("a phrase");
    assert!(skin.diffused.is_some() && skin.name.value.is_empty());
}

#[test]
fn a_lone_name_is_the_thickness_unless_one_is_written() {
    let named = layer("base GaAs d p 1e17 /cm3 Zn");
    assert!(matches!(&named.attributes[0], Attribute::Value(value)
        if matches!(&value.expression, Some(Expression::Name(name)) if name.value == "d")));
    let beside = layer("base GaAs 3 um matchd");
    assert!(matches!(&beside.attributes[1], Attribute::Word(word) if word.value == "matchd"));
    assert!(layer("air").material.is_none());
    assert!(layer("air 2 mm").material.is_none());
    assert!(layer("air gap_width").material.is_none());
    let times = layer("base GaAs d * 2");
    assert!(matches!(&times.attributes[0], Attribute::Value(_)));
}

#[test]
fn groups_take_names_counts_and_words() {
    let Statement::Group(it) = only(body("junction top separate { base GaAs 3 um }")) else {
        panic!("a group")
    };
    assert_eq!(it.name.expect("a name").value, "top");
    assert_eq!(words(&it.words), ["separate"]);
    let Statement::Group(it) = only(body("tunnel as lower { peak 20 A/cm2 }")) else { panic!("a group") };
    assert_eq!(it.name.expect("a name").value, "lower");
    let Statement::Group(it) = only(body("repeat 20 { layer GaAs 3 nm; layer AlAs 3 nm }")) else {
        panic!("a group")
    };
    assert_eq!((it.count.is_some(), it.block.statements.len()), (true, 2));
    let Statement::Group(it) = only(body("recombination\n{ }")) else { panic!("a group") };
    assert!(it.name.is_none() && it.block.statements.is_empty());
}

#[test]
fn properties_take_anything() {
    let it = property("voltage from fit { j01 1e-20 A/cm2; j02 2e-12 A/cm2; shunt 1e6 ohm cm2; at 25 degC }");
    assert_eq!((it.arguments.len(), it.block.expect("a block").statements.len()), (2, 4));
    let it = property("fluence 1e15 /cm2 of electrons 1 MeV");
    assert_eq!(it.arguments.len(), 4);
    let it = property("conditions noon, summer_roof");
    assert_eq!(it.arguments.len(), 2);
    assert!(matches!(property("light AM1.5G").arguments.as_slice(),
        [Argument::Word(word)] if word.value == "AM1.5G"));
    assert!(matches!(property("thickness d + 5 nm").arguments.as_slice(), [Argument::Value(_)]));
    assert!(matches!(property("note \"a \\\"b\\\" c\"").arguments.as_slice(),
        [Argument::Text(text)] if text.value == "a \"b\" c"));
    assert!(property("nonsense").arguments.is_empty());
}

#[test]
fn requests_have_their_parts() {
    let Statement::Require(it) = only(body("require voc >= 2.3 V under noon, roof at yield 95 %")) else {
        panic!("a require")
    };
    assert_eq!((it.metric.value.as_str(), it.comparison.value), ("voc", Comparison::AtLeast));
    assert_eq!((words(&it.under), it.at_yield.is_some()), (vec!["noon", "roof"], true));
    for (sign, comparison) in [
        (">=", Comparison::AtLeast),
        ("≥", Comparison::AtLeast),
        ("<=", Comparison::AtMost),
        ("≤", Comparison::AtMost),
        (">", Comparison::Above),
        ("<", Comparison::Below),
    ] {
        let Statement::Require(it) = only(body(&format!("require top.jsc {sign} 14 mA/cm2"))) else {
            panic!("a require")
        };
        assert_eq!(it.comparison.value, comparison);
    }
    for (text, target) in [
        ("seek highest efficiency under noon", SeekTarget::Highest),
        ("seek least current_mismatch weighing noon 3, summer_roof 1", SeekTarget::Least),
    ] {
        let Statement::Seek(it) = only(body(text)) else { panic!("a seek") };
        assert_eq!(it.target, target);
    }
    let Statement::Seek(it) = only(body("seek top.jsc equal 14 mA/cm2")) else { panic!("a seek") };
    assert!(matches!(it.target, SeekTarget::Equal(_)));
}

#[test]
fn charts_count_their_points() {
    let text = "chart efficiency against top.base.thickness over 0.2 .. 1.5 um, 40 points \
                against noon.temperature over 0 .. 80 degC under noon";
    let Statement::Chart(it) = only(body(text)) else { panic!("a chart") };
    assert_eq!((it.axes.len(), words(&it.under)), (2, vec!["noon"]));
    let points = it.axes[0].points.as_ref().and_then(|value| value.expression.as_ref()).map(shown);
    assert_eq!(points.as_deref(), Some("40"));
    assert!(it.axes[1].points.is_none());
    assert_eq!(it.axes[0].over.up_to.as_ref().map(shown).as_deref(), Some("1.5 um"));
}

#[test]
fn the_other_requests_read() {
    let Statement::Vary(it) = only(body("vary together top.*, bottom.base ± 2 % sigma")) else {
        panic!("a vary")
    };
    assert_eq!(words(&it.paths), ["top.*", "bottom.base"]);
    let Statement::Measured(it) = only(body("measured eqe \"run-17.csv\" of top under noon")) else {
        panic!("a measurement")
    };
    assert_eq!(it.file.value, "run-17.csv");
    assert_eq!(
        (it.of.map(|it| it.value), it.under.map(|it| it.value)),
        (Some("top".into()), Some("noon".into()))
    );
    let text = "accept gap.window-absorbs on top.window because \"it is thin\"";
    let Statement::Accept(it) = only(body(text)) else { panic!("an accept") };
    assert_eq!(
        (it.code.value.as_str(), it.because.map(|it| it.value)),
        ("gap.window-absorbs", Some("it is thin".into()))
    );
    let Statement::Accept(it) = only(body("accept lattice.mismatch")) else { panic!("an accept") };
    assert!(it.on.is_none() && it.because.is_none());
    let Statement::Limit(it) = only(body("limit lattice.mismatch 0.05 %")) else { panic!("a limit") };
    assert_eq!(it.code.value, "lattice.mismatch");
}

#[test]
fn a_stack_like_another_replaces_removes_and_inserts() {
    let file = sound(
        "stack \"B\" like \"A\" {\n top.base 580 nm p 2e17 /cm3\n top.bsf AlInP matched 40 nm\n top.base d\n remove top.bsf\n insert after top.window { layer GaAs 3 nm }\n}",
    );
    let Some(Item::Stack(stack)) = file.items.first() else { panic!("a stack") };
    assert_eq!(stack.like.as_ref().map(|it| it.value.as_str()), Some("A"));
    let [
        Statement::Replace(values),
        Statement::Replace(material),
        Statement::Replace(name),
        Statement::Remove(remove),
        Statement::Insert(insert),
    ] = stack.block.statements.as_slice()
    else {
        panic!("{:?}", stack.block.statements)
    };
    assert!(values.material.is_none() && values.attributes.len() == 2);
    assert!(material.material.is_some() && material.attributes.len() == 1);
    assert!(name.material.is_none() && matches!(name.attributes.as_slice(), [Attribute::Value(_)]));
    assert_eq!(remove.path.value, "top.bsf");
    assert!(insert.after && insert.block.statements.len() == 1);
}

#[test]
fn parts_take_defaults_and_line_breaks() {
    let file = sound(
        "part pair(a,\n     b = 15 nm, // the n side\n     c = max(3 nm, 4 nm)\n) {\n layer GaAs a\n}\n",
    );
    let Some(Item::Part(part)) = file.items.first() else { panic!("a part") };
    let defaults: Vec<bool> = part.parameters.iter().map(|(_, value)| value.is_some()).collect();
    assert_eq!(defaults, [false, true, true]);
    assert_eq!(file.comments.len(), 1);
}

#[test]
fn statements_share_a_line_or_take_several() {
    assert_eq!(body("let a = 3 nm; let b = 4 nm;; layer GaAs a").len(), 3);
    let block =
        body("junction top\n// between\n{\n}\nfingers { shading 3 %; series_resistance 20 mohm cm2 }");
    assert_eq!(block.len(), 2);
    assert!(matches!(
        sound("let a = 3 nm // one\r\nlet b = 4 nm\r\n").items.as_slice(),
        [Item::Let(_), Item::Let(_)]
    ));
    assert!(sound("").items.is_empty());
    assert_eq!(sound("// only a comment").comments[0].value, "// only a comment");
    assert!(matches!(sound("light AM1.5G").items.as_slice(), [Item::Stray(Statement::Property(_))]));
}

#[test]
fn spans_are_exact_behind_signs_of_several_bytes() {
    let text = "stack \"Ä\" {\n  base GaAs 3 µm ± 2 % sigma as x // µ\n}\n";
    let source = source(text);
    let file = parse(&source).value.expect("a value");
    let Some(Item::Stack(stack)) = file.items.first() else { panic!("a stack") };
    let Some(Statement::Layer(layer)) = stack.block.statements.first() else { panic!("a layer") };
    let slice = |span: Span| source.slice(span);
    assert_eq!(slice(layer.span), "base GaAs 3 µm ± 2 % sigma as x");
    let Attribute::Value(value) = &layer.attributes[0] else { panic!("a value") };
    assert_eq!(slice(value.span), "3 µm ± 2 % sigma");
    assert_eq!(slice(value.tolerance.as_ref().expect("a tolerance").span), "± 2 % sigma");
    assert_eq!(slice(layer.alias.as_ref().expect("a name").span), "x");
    assert_eq!(slice(stack.name.span), "\"Ä\"");
    assert_eq!(slice(stack.block.span), &text[text.find('{').expect("planted")..text.len() - 1]);
    assert_eq!(slice(file.comments[0].span), "// µ");
}
