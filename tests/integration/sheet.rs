//! The sheet: complete in itself, readable by everyone, safe with any name, the same every time.

use std::collections::BTreeSet;
use std::path::Path;
use std::sync::OnceLock;

use bandloom::compile::{Options, compile};
use bandloom::report::figure::Drawing;
use bandloom::report::view::{self, Sheet};
use bandloom::report::{AcceptedRow, FindingRow, Format, OutputFile, ReportInput, Templates, render};
use bandloom::world::memory::Memory;
use sha2::{Digest, Sha256};

const SANDPIPER: &str = include_str!("../../stacks/sandpiper.stack");
const KITTIWAKE: &str = include_str!("../../stacks/kittiwake.stack");
const LIMITS: &str = include_str!("../../stacks/gap_limits.stack");

const ALL: &[Format] = &[Format::Html, Format::Markdown, Format::Json, Format::Csv];

/// One stack that was evaluated, with everything the sheet is made of, and its files.
struct Case {
    files: Vec<OutputFile>,
    name: String,
    stack: bandloom::compile::Stack,
    findings: Vec<FindingRow>,
    accepted: Vec<AcceptedRow>,
}

impl Case {
    fn input(&self) -> ReportInput<'_> {
        ReportInput {
            design: &self.stack.design,
            results: self.stack.results.as_ref().expect("evaluated"),
            findings: &self.findings,
            accepted: &self.accepted,
        }
    }

    fn sheet(&self) -> Sheet {
        view::sheet(&self.input()).expect("a condition was evaluated")
    }

    fn rendered(&self) -> Vec<OutputFile> {
        render(&self.input(), ALL, &Templates::default()).expect("built-in templates hold")
    }

    fn text(&self, file: &str) -> String {
        let found = self.files.iter().find(|f| f.name == file).unwrap_or_else(|| panic!("no {file}"));
        String::from_utf8(found.bytes.clone()).expect("UTF-8")
    }
}

/// Every evaluated stack of a text read under `path`.
fn cases(path: &str, text: &str) -> Vec<Case> {
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
fn hostile() -> String {
    let long = "x".repeat(300);
    let word = "w".repeat(120);
    format!(
        "condition {word} {{\n    light AM1.5G\n    temperature 30 degC\n}}\nstack \"<script>alert(1)</script> | `tick` **bold** [a](b) \u{202e}turned\u{2066} &amp; {long}\" {{\n    note \"</style><img src=x onerror=alert(1)> | # heading | @all https://example.org\"\n    conditions {word}\n    junction {word} {{ absorber ideal of gap 1.9 eV absorbs all_above_gap }}\n    junction b {{ absorber ideal of gap 1.3 eV absorbs all_above_gap }}\n    require efficiency >= 99 %\n    accept current.mismatch on {word} because \"<b>|`why`|</b> \u{202e}\"\n}}\n"
    )
}

/// Made once: evaluation is the slow part.
fn every_case() -> &'static [Case] {
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
    all.extend(cases("a<b>|`c`.stack", &hostile()));
    all
}

/// Elements of HTML or SVG in order: name, attributes, whether it closes. Fails on what is not
/// well formed: a stray `<`, an attribute without quotes, an unknown entity.
fn elements(text: &str) -> Vec<(String, Vec<(String, String)>, bool)> {
    let mut out = Vec::new();
    let mut rest = text;
    while let Some(at) = rest.find('<') {
        for entity in rest[..at].split('&').skip(1) {
            let name = entity.split(';').next().unwrap_or("");
            let known = ["amp", "lt", "gt", "quot", "#39"].contains(&name);
            assert!(known, "entity `&{}`", entity.chars().take(12).collect::<String>());
        }
        rest = &rest[at + 1..];
        if let Some(after) = rest.strip_prefix("style>") {
            let end = after.find("</style>").expect("the style block ends");
            out.push(("style".into(), Vec::new(), false));
            out.push(("style".into(), Vec::new(), true));
            rest = &after[end + 8..];
            continue;
        }
        let end = rest.find('>').expect("every tag ends");
        let tag = &rest[..end];
        rest = &rest[end + 1..];
        if tag.starts_with("!DOCTYPE") {
            continue;
        }
        let closes = tag.starts_with('/');
        let body = tag.trim_start_matches('/').trim_end_matches('/');
        let (name, mut attributes_text) = body.split_once([' ', '\n']).unwrap_or((body, ""));
        assert!(name.chars().all(|c| c.is_ascii_alphanumeric()) && !name.is_empty(), "tag `{tag}`");
        let mut attributes = Vec::new();
        while let Some((key, value)) = attributes_text.trim_start().split_once("=\"") {
            let (value, after) = value.split_once('"').expect("quoted");
            assert!(!key.contains(['"', '<', '\'']), "attribute `{key}` of `{tag}`");
            attributes.push((key.to_string(), value.to_string()));
            attributes_text = after;
        }
        assert!(attributes_text.trim().is_empty(), "`{attributes_text}` in `{tag}`");
        let empty = tag.ends_with('/') || ["meta", "br", "img"].contains(&name);
        out.push((name.to_string(), attributes, closes));
        if empty && !closes {
            out.push((name.to_string(), Vec::new(), true));
        }
    }
    out
}

fn assert_balanced(what: &str, text: &str) {
    let mut open: Vec<String> = Vec::new();
    for (name, _, closes) in elements(text) {
        if closes {
            assert_eq!(open.pop().as_deref(), Some(name.as_str()), "{what}");
        } else {
            open.push(name);
        }
    }
    assert!(open.is_empty(), "{what}: {open:?} stay open");
}

#[test]
fn every_page_and_figure_is_well_formed() {
    for case in every_case() {
        for file in case.files.iter().filter(|f| f.name.ends_with(".html") || f.name.ends_with(".svg")) {
            let text = String::from_utf8(file.bytes.clone()).expect("UTF-8");
            assert_balanced(&format!("{} of {}", file.name, case.name), &text);
        }
    }
}

#[test]
fn nothing_is_fetched_and_nothing_runs() {
    for case in every_case() {
        let html = case.text("sheet.html");
        for (name, attributes, _) in elements(&html) {
            assert!(
                !["script", "link", "iframe", "object", "embed", "img", "base", "form"]
                    .contains(&name.as_str())
            );
            for (key, value) in attributes {
                assert!(!key.starts_with("on") && key != "style" && key != "src", "{name} {key}");
                assert!(key != "href" || value.starts_with('#'), "{value}");
            }
        }
        assert!(!html.contains("url(") && !html.contains("@import"), "{}", case.name);
        for file in case.files.iter().filter(|f| f.name.ends_with(".svg")) {
            let text = String::from_utf8_lossy(&file.bytes).into_owned();
            for banned in ["<script", "<image", "<use", "href", "url(", "@import", "var(", "<pattern"] {
                assert!(!text.contains(banned), "{banned} in {}", file.name);
            }
        }
    }
}

/// RFC 4648.
fn from_base64(text: &str) -> Vec<u8> {
    let value = |c: u8| match c {
        b'A'..=b'Z' => c - b'A',
        b'a'..=b'z' => c - b'a' + 26,
        b'0'..=b'9' => c - b'0' + 52,
        b'+' => 62,
        _ => 63,
    };
    let mut out = Vec::new();
    for four in text.trim_end_matches('=').as_bytes().chunks(4) {
        let word =
            four.iter().fold(0u32, |word, c| word << 6 | u32::from(value(*c))) << (6 * (4 - four.len()));
        out.extend(&word.to_be_bytes()[1..four.len()]);
    }
    out
}

/// Content Security Policy Level 3, 6.7.2.3: the hash is of the style element's whole text.
#[test]
fn the_policy_admits_the_style_block_and_nothing_else() {
    for case in every_case() {
        let html = case.text("sheet.html");
        let policy =
            html.split("http-equiv=\"Content-Security-Policy\" content=\"").nth(1).expect("a policy");
        let policy = policy.split('"').next().expect("quoted");
        assert!(policy.starts_with("default-src 'none'; style-src 'sha256-"), "{policy}");
        assert!(!policy.contains("unsafe"));
        let hash = policy.split("sha256-").nth(1).and_then(|rest| rest.split('\'').next()).expect("a hash");
        let style =
            html.split("<style>").nth(1).and_then(|rest| rest.split("</style>").next()).expect("a style");
        assert_eq!(from_base64(hash), Sha256::digest(style.as_bytes()).to_vec(), "{}", case.name);
        assert_eq!(html.matches("<style").count(), 1);
    }
}

#[test]
fn every_figure_has_a_name_a_description_and_its_numbers() {
    for case in every_case() {
        let html = case.text("sheet.html");
        let mut ids = BTreeSet::new();
        for (name, attributes, _) in elements(&html) {
            let get = |key: &str| attributes.iter().find(|(k, _)| k == key).map(|(_, v)| v.as_str());
            if let Some(id) = get("id") {
                assert!(ids.insert(id.to_string()), "two of id `{id}` in {}", case.name);
            }
            if name == "svg" && get("aria-hidden").is_none() && !attributes.is_empty() {
                assert_eq!(get("role"), Some("img"));
                let named: Vec<&str> = get("aria-labelledby").expect("labelled").split(' ').collect();
                assert_eq!(named.len(), 2);
                for id in named {
                    assert!(html.contains(&format!(" id=\"{id}\">")), "{id}");
                }
            }
            if name == "th" && !attributes.is_empty() {
                assert!(get("scope").is_some(), "a heading without scope in {}", case.name);
            }
        }
        for figure in case.sheet().figures() {
            assert!(!figure.title.is_empty() && figure.desc.len() > 40, "{}", figure.title);
            assert!(figure.data.groups.iter().any(|g| !g.rows.is_empty()), "{} has no table", figure.title);
            assert!(html.contains(&format!("<summary>Fig. {} as a table</summary>", figure.number)));
        }
        assert_eq!(html.matches("<table").count(), html.matches("<caption>").count());
    }
}

#[test]
fn headings_stand_in_order_and_sections_too() {
    for case in every_case() {
        let html = case.text("sheet.html");
        let levels: Vec<u32> = elements(&html)
            .into_iter()
            .filter(|(name, _, closes)| !closes && name.len() == 2 && name.starts_with('h'))
            .filter_map(|(name, _, _)| name[1..].parse().ok())
            .collect();
        assert_eq!(levels.first(), Some(&1));
        assert_eq!(levels.iter().filter(|level| **level == 1).count(), 1);
        assert!(levels.windows(2).all(|pair| pair[1] <= pair[0] + 1), "{levels:?}");
        let wanted = [
            "verdict",
            "figures",
            "stack",
            "findings",
            "layers",
            "light",
            "curves",
            "ledger",
            "conditions",
            "models",
            "cautions",
            "sources",
            "signed",
        ];
        let places: Vec<usize> = wanted
            .iter()
            .map(|id| {
                html.find(&format!("<section id=\"{id}\""))
                    .unwrap_or_else(|| panic!("no {id} in {}", case.name))
            })
            .collect();
        assert!(places.is_sorted(), "{places:?}");
    }
}

#[test]
fn hostile_names_are_words_everywhere() {
    for case in cases("a<b>|`c`.stack", &hostile()) {
        for file in &case.files {
            let text = String::from_utf8(file.bytes.clone()).expect("UTF-8");
            if file.name.ends_with(".json") || file.name.ends_with(".csv") {
                continue;
            }
            for banned in ["<script", "<img", "<b>|", "</style><", "\u{202e}", "\u{2066}"] {
                assert!(!text.contains(banned), "{banned} in {}", file.name);
            }
            if file.name == "sheet.md" {
                // Every row of a table has as many cells as its head.
                let mut width = None;
                for line in text.lines() {
                    if !line.starts_with('|') {
                        width = None;
                        continue;
                    }
                    let bars = line.replace("\\|", "").matches('|').count();
                    assert_eq!(*width.get_or_insert(bars), bars, "{line}");
                }
                assert!(
                    !text.contains("**bold**")
                        && !text.contains("[a](b)")
                        && !text.contains("https://example")
                        && !text.contains(" @all")
                );
            }
        }
    }
}

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
            "requirements",
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
