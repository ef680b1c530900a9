//! The same findings in every format, and each format as its readers want it.

use std::collections::BTreeMap;

use serde_json::Value;

use super::schema::violations;
use super::tool::{PAIR, Place, SLIP};

/// Slips with and without a place of their own, an accepted finding, text that every format must
/// escape, and a requirement that holds.
const MIXED: &str = "\
condition noon { light AM1.5G; temperature 25 degC }

stack \"Mixed <µ> & 'more'\" {
    conditions  noon
    optics      one_pass { front_reflectance 3 % }
    junction top {
        window   AllnP matched         20 nm   n 2e18 /cm3 Si
        emitter  GaInP matched         70 nm   n 2e18 /cm3 Si
        base     GaInP with In 0.40   600 nm   p 1e17 /cm3 Zn
        voltage  from ere 1 %
    }
    wafer  GaAs  350 µm  p 1e18 /cm3 Zn
    accept lattice.mismatch on top.base because \"to show <it> & 'why'\"
}

stack \"Judged\" {
    conditions  noon
    junction only { absorber ideal of gap 1.4 eV  absorbs all_above_gap }
    require  efficiency >= 10 %
    require  efficiency >= 60 %
    seek     highest efficiency
}
";

fn mixed() -> Place {
    Place::with(&[("a b/µ,mixed.stack", MIXED), ("slip.stack", SLIP), ("pair.stack", PAIR)])
}

fn run(place: &Place, format: &str) -> String {
    place.run(&["check", "a b/µ,mixed.stack", "slip.stack", "pair.stack", "--format", format]).ends(1).out
}

fn json(text: &str) -> Value {
    serde_json::from_str(text).unwrap_or_else(|why| panic!("{why}\n{text}"))
}

/// Code, severity, message, file, line and column of every finding, as the JSON document says.
fn findings(place: &Place) -> Vec<BTreeMap<&'static str, String>> {
    let document = json(&run(place, "json"));
    let keys = ["code", "severity", "message", "file", "line", "column"];
    let text = |value: &Value| match value {
        Value::String(text) => text.clone(),
        Value::Null => String::new(),
        other => other.to_string(),
    };
    let all = document["findings"].as_array().expect("a list");
    all.iter().map(|it| keys.iter().map(|key| (*key, text(&it[*key]))).collect()).collect()
}

/// What a reader of XML sees.
fn unescaped(text: &str) -> String {
    let mut text = text.to_owned();
    for (from, to) in [("&lt;", "<"), ("&gt;", ">"), ("&quot;", "\""), ("&#10;", "\n"), ("&amp;", "&")] {
        text = text.replace(from, to);
    }
    text
}

#[test]
fn every_format_tells_the_same_findings() {
    let place = mixed();
    let all = findings(&place);
    assert!(all.len() >= 4, "{all:?}");
    let severities: Vec<&str> = all.iter().map(|it| it["severity"].as_str()).collect();
    assert!(severities.contains(&"error") && severities.contains(&"advice"), "{severities:?}");

    let lines = run(&place, "jsonl");
    let lines: Vec<Value> = lines.lines().map(json).filter(|line| line["kind"] == "finding").collect();
    let sarif = json(&run(&place, "sarif"));
    let sarif: Vec<&Value> = sarif["runs"][0]["results"]
        .as_array()
        .expect("results")
        .iter()
        .filter(|result| result.get("suppressions").is_none())
        .collect();
    let gitlab = json(&run(&place, "gitlab"));
    let gitlab = gitlab.as_array().expect("a list");
    let short: Vec<String> = run(&place, "short").lines().map(str::to_owned).collect();
    let github: Vec<String> = run(&place, "github").lines().map(str::to_owned).collect();
    let narrated = run(&place, "narrated");
    let junit = run(&place, "junit");
    let human = run(&place, "human");
    let flat = |text: &str| text.split_whitespace().collect::<Vec<_>>().join(" ").replace(" │ ", " ");
    let human = flat(&human);
    for (name, count) in [
        ("jsonl", lines.len()),
        ("sarif", sarif.len()),
        ("gitlab", gitlab.len()),
        ("short", short.len()),
        ("github", github.len()),
        ("narrated", narrated.lines().filter(|line| line.starts_with("At ")).count()),
        ("junit", junit.matches("<failure ").count() + junit.matches("<skipped ").count()),
    ] {
        assert_eq!(count, all.len(), "{name}");
    }
    for (at, finding) in all.iter().enumerate() {
        let [code, severity, message, file, line, column] =
            ["code", "severity", "message", "file", "line", "column"].map(|key| finding[key].as_str());
        let line_number: u64 = line.parse().expect("has a place");

        assert_eq!(lines[at]["code"], code);
        assert_eq!(lines[at]["message"], message);
        assert_eq!(lines[at]["line"], line_number);

        let level = if severity == "advice" { "note" } else { severity };
        let physical = &sarif[at]["locations"][0]["physicalLocation"];
        assert_eq!((&sarif[at]["ruleId"], &sarif[at]["level"]), (&code.into(), &level.into()));
        assert!(sarif[at]["message"]["text"].as_str().expect("text").starts_with(message));
        assert_eq!(physical["region"]["startLine"], line_number);
        assert_eq!(physical["region"]["startColumn"].to_string(), column);

        assert_eq!(gitlab[at]["check_name"], code);
        assert!(gitlab[at]["description"].as_str().expect("text").starts_with(message));
        assert_eq!(gitlab[at]["location"]["positions"]["begin"]["line"], line_number);
        assert_eq!(gitlab[at]["location"]["path"], file);

        assert_eq!(short[at], format!("{file}:{line}:{column}: {severity}[{code}]: {message}"));
        let kind = if severity == "advice" { "notice" } else { severity };
        assert!(github[at].starts_with(&format!("::{kind} file=")), "{}", github[at]);
        assert!(
            github[at].contains(&format!(",line={line},")) && github[at].contains(&format!("title={code}"))
        );
        assert!(
            narrated.contains(&format!(" {code}: {message}.\nAt {file} line {line}, column")),
            "{message}"
        );
        assert!(
            unescaped(&junit).contains(&format!("{code} at {file}:{line}:{column}\n{message}")),
            "{message}"
        );
        assert!(
            human.contains(&format!("{severity}: {code}")) && human.contains(&flat(message)),
            "{message}"
        );
        assert!(human.contains(&format!("[{file}:{line}:{column}]")));
    }
}

#[test]
fn json_keeps_to_its_schema() {
    let schema: Value = json(include_str!("../../schemas/findings.schema.json"));
    let place = mixed();
    let document = json(&run(&place, "json"));
    assert_eq!(violations(&document, &schema, &schema), Vec::<String>::new());
    assert_eq!(document["accepted"].as_array().map(Vec::len), Some(1));
    let line = &schema["$defs"]["line"];
    let text = run(&place, "jsonl");
    let lines: Vec<Value> = text.lines().map(json).collect();
    for one in &lines {
        assert_eq!(violations(one, line, &schema), Vec::<String>::new(), "{one}");
    }
    assert_eq!(lines.first().map(|it| it["kind"].clone()), Some("begin".into()));
    assert_eq!(lines.last().map(|it| it["kind"].clone()), Some("end".into()));
    // And the validator does refuse what is wrong.
    let mut broken = document.clone();
    broken["findings"][0]["line"] = 0.into();
    assert!(!violations(&broken, &schema, &schema).is_empty());
    let mut broken = document;
    broken["findings"][0].as_object_mut().expect("an object").remove("code");
    assert!(!violations(&broken, &schema, &schema).is_empty());
}

/// Checked against the published schema with `tests/reference/sarif.py`; what that leaves open
/// (OASIS SARIF 2.1.0, sections 3.4, 3.27, 3.30, 3.35) is held here.
#[test]
fn sarif_says_what_its_readers_need() {
    let place = mixed();
    let document = json(&run(&place, "sarif"));
    assert_eq!(document["version"], "2.1.0");
    let run = &document["runs"][0];
    let rules = run["tool"]["driver"]["rules"].as_array().expect("rules");
    let results = run["results"].as_array().expect("results");
    assert_eq!(run["columnKind"], "unicodeCodePoints");
    let mut prints = Vec::new();
    for result in results {
        let index = result["ruleIndex"].as_u64().expect("a number") as usize;
        assert_eq!(rules[index]["id"], result["ruleId"]);
        let place = &result["locations"][0]["physicalLocation"];
        let uri = place["artifactLocation"]["uri"].as_str().expect("text");
        assert!(!uri.contains(' ') && !uri.contains('\\') && uri.is_ascii(), "{uri}");
        prints.push(result["partialFingerprints"]["bandloomFinding/v1"].to_string());
    }
    let suppressed: Vec<&Value> = results.iter().filter(|it| it.get("suppressions").is_some()).collect();
    assert_eq!(suppressed.len(), 1);
    assert_eq!(suppressed[0]["suppressions"][0]["kind"], "inSource");
    let count = prints.len();
    prints.sort();
    prints.dedup();
    assert_eq!(prints.len(), count, "each its own");
    let fixed = results.iter().find(|it| it["ruleId"] == "name.unknown").expect("AllnP");
    let change = &fixed["fixes"][0]["artifactChanges"][0]["replacements"][0];
    assert_eq!(change["insertedContent"]["text"], "AlInP");

    let gone = place.run(&["check", "gone.stack", "--format", "sarif"]).ends(2);
    let gone = json(&gone.out);
    let invocation = &gone["runs"][0]["invocations"][0];
    assert_eq!(invocation["executionSuccessful"], false);
    assert_eq!(invocation["toolExecutionNotifications"].as_array().map(Vec::len), Some(1));
}

#[test]
fn requirements_are_cases_of_a_test_report() {
    let text = unescaped(&run(&mixed(), "junit"));
    assert!(
        text.contains("name=\"require  efficiency >= 10 % (under noon)\" classname=\"Judged\""),
        "{text}"
    );
    assert!(text.contains("type=\"require.failed\""), "{text}");
    assert!(!text.contains("name=\"require  efficiency >= 60 %"), "told as a failure only: {text}");
    assert!(text.contains("accepted: to show <it> & 'why'"), "{text}");
}

#[test]
fn several_outputs_come_of_one_run() {
    let place = mixed();
    let arguments = [
        "check",
        "slip.stack",
        "--format",
        "short",
        "--output",
        "sarif=out/a.sarif",
        "--output",
        "junit=out/a.xml",
        "--output",
        "human=out/a.txt",
    ];
    let ran = place.run(&arguments).ends(1);
    assert!(ran.out.starts_with("slip.stack:3:31: error[name.unknown]: "), "{}", ran.out);
    assert!(ran.err.is_empty(), "{}", ran.err);
    assert_eq!(json(&place.read("out/a.sarif"))["runs"][0]["results"].as_array().map(Vec::len), Some(1));
    assert!(place.read("out/a.xml").contains("failures=\"1\""));
    let human = place.read("out/a.txt");
    assert!(human.contains("[slip.stack:3:31]") && !human.contains('\u{1b}'), "{human}");
    let build = place.run(&["build", "pair.stack", "--output", "jsonl=out/b.jsonl"]).ends(0);
    assert!(build.err.is_empty(), "{}", build.err);
    assert_eq!(place.read("out/b.jsonl").lines().count(), 2);
    for wrong in ["sarif", "sarif=", "xml=a.xml"] {
        place.run(&["check", "pair.stack", "--output", wrong]).ends(2);
    }
    let into_file = format!("json={}", "pair.stack/x.json");
    let blocked = place.run(&["check", "pair.stack", "--output", &into_file]).ends(2);
    assert!(blocked.err.contains("a file is in the way"), "{}", blocked.err);
}

#[test]
fn certain_cures_are_applied_and_the_rest_is_told() {
    // A byte order mark, Windows line ends and odd spacing stay as they are.
    let text = "\u{feff}// keep µ\r\nstack \"Slips\" {\r\n    light   АM1.5G\r\n    optics  one_pass { front_reflectance 3 % }\r\n\
        \x20   junction top {\r\n        window   AllnP matched   20 nm   n 2e18 /cm3 Si // keep\r\n\
        \x20       base     GaAs     3,5 um         p 1e17 /cm3 Zn\r\n        emiter   GaAs 100 nm n 2e18 /cm3 Si\r\n\
        \x20       voltage  from ere 1 %\r\n    }\r\n    wafer  GaAs  350 um  p 1e18 /cm3 Zn\r\n}\r\n";
    let place = Place::with(&[("a.stack", text)]);
    let ran = place.run(&["check", "a.stack", "--apply", "--format", "short"]).ends(1);
    for did in [
        "a.stack:3: `АM1.5G` is now `AM1.5G` (name.look-alike)",
        "a.stack:6: `AllnP` is now `AlInP` (name.unknown)",
        "a.stack:7: `3,5` is now `3.5` (number.decimal-comma)",
    ] {
        assert!(ran.err.contains(did), "{did}\n{}", ran.err);
    }
    assert_eq!(ran.err.lines().count(), 3, "{}", ran.err);
    // `emiter` may be an emitter, but nobody can be sure.
    assert!(ran.out.contains("`emiter`") && ran.out.lines().count() == 1, "{}", ran.out);
    let expected = text.replace("АM1.5G", "AM1.5G").replace("AllnP", "AlInP").replace("3,5", "3.5");
    assert_eq!(place.read("a.stack"), expected);
    let again = place.run(&["check", "a.stack", "--apply", "--format", "short"]).ends(1);
    assert!(again.err.is_empty(), "nothing is left to do: {}", again.err);
    assert_eq!(again.out, ran.out);
    assert_eq!(place.read("a.stack"), expected);
    assert_eq!(place.list("").len(), 1, "no temporary file stays");
    let piped = place.run_with_input(&["check", "-", "--apply"], text.as_bytes()).ends(2);
    assert!(piped.err.contains("no file to write"), "{}", piped.err);
}

#[test]
fn an_accept_without_effect_leaves_with_its_line() {
    let text = PAIR.replace("    junction top ", "    accept gap.order because \"no\"\n    junction top ");
    let place = Place::with(&[("a.stack", &text)]);
    let ran = place.run(&["check", "a.stack", "--apply", "--strict"]).ends(0);
    assert!(ran.err.contains("a.stack:3: removed `accept gap.order because \"no\"`"), "{}", ran.err);
    assert_eq!(place.read("a.stack"), PAIR);
}
