//! The command as scripts and people use it.

use std::process::Stdio;

use serde_json::Value;

use super::tool::{PAIR, Place, SLIP};

fn json(text: &str) -> Value {
    serde_json::from_str(text).unwrap_or_else(|why| panic!("{why}\n{text}"))
}

#[test]
fn the_exit_code_says_found_or_trouble() {
    let place = Place::with(&[("pair.stack", PAIR), ("slip.stack", SLIP)]);
    place.run(&["check", "pair.stack"]).ends(0);
    place.run(&["check", "slip.stack"]).ends(1);
    place.run(&["check", "pair.stack", "slip.stack"]).ends(1);
    place.run(&["check", "gone.stack"]).ends(2);
    place.run(&["check", "slip.stack", "gone.stack"]).ends(2);
    place.run(&["check"]).ends(2);
    place.run(&["chekc", "pair.stack"]).ends(2);
    place.run(&["check", "pair.stack", "--set", "d"]).ends(2);
    place.run(&["check", "pair.stack", "--read-as", "x.stack"]).ends(2);
    place.run(&["build", "pair.stack", "--as", "pdf"]).ends(2);
    place.run(&["--version"]).ends(0);
}

#[test]
fn the_result_goes_to_standard_output_and_messages_to_standard_error() {
    let place = Place::with(&[("pair.stack", PAIR), ("slip.stack", SLIP)]);
    let check = place.run(&["check", "slip.stack"]).ends(1);
    assert!(check.out.contains("error: name.unknown") && check.err.is_empty(), "{}", check.err);
    let trouble = place.run(&["check", "gone.stack"]).ends(2);
    assert!(trouble.out.is_empty() && trouble.err.contains("cannot read `gone.stack`"), "{}", trouble.err);
    assert!(trouble.err.contains("help: "));
    let build = place.run(&["build", "slip.stack"]).ends(1);
    assert!(build.err.contains("error: name.unknown"), "{}", build.err);
    let build = place.run(&["build", "pair.stack"]).ends(0);
    assert!(build.err.is_empty() && build.out.contains("Pair"), "{}{}", build.out, build.err);
}

#[test]
fn json_says_what_the_frame_says() {
    let place = Place::with(&[("slip.stack", SLIP)]);
    let human = place.run(&["check", "slip.stack"]).ends(1).out;
    let run = place.run(&["check", "slip.stack", "--format", "json"]).ends(1);
    assert!(run.err.is_empty(), "{}", run.err);
    let document = json(&run.out);
    assert_eq!(document["schema_version"], 1);
    let findings = document["findings"].as_array().expect("a list");
    assert_eq!(findings.len(), human.matches("error: ").count() + human.matches("warning: ").count());
    let finding = &findings[0];
    assert_eq!(finding["code"], "name.unknown");
    assert_eq!(finding["severity"], "error");
    assert_eq!(finding["file"], "slip.stack");
    assert_eq!((&finding["line"], &finding["column"]), (&3.into(), &31.into()));
    assert_eq!((&finding["end_line"], &finding["end_column"]), (&3.into(), &36.into()));
    // The micro sign in the first line has two bytes.
    let start = SLIP.find("GaAss").expect("planted");
    assert_eq!(finding["start_byte"], start);
    assert_eq!(finding["end_byte"], start + 5);
    for text in [&finding["message"], &finding["help"][0]] {
        let text = text.as_str().expect("text");
        let flat = human.split_whitespace().collect::<Vec<_>>().join(" ").replace(" │ ", " ");
        assert!(flat.contains(text), "{text}\n{human}");
    }
    assert!(human.contains("[slip.stack:3:31]"), "{human}");
}

#[test]
fn annotations_are_one_line_each() {
    let place = Place::with(&[("slip.stack", SLIP)]);
    let out = place.run(&["check", "slip.stack", "--format", "github"]).ends(1).out;
    assert!(
        out.starts_with("::error file=slip.stack,line=3,endLine=3,col=31,endColumn=36,title=name.unknown::"),
        "{out}"
    );
    assert!(out.lines().all(|line| line.starts_with("::")), "{out}");
}

#[test]
fn colour_is_written_only_where_it_is_wanted() {
    let place = Place::with(&[("slip.stack", SLIP)]);
    let escape = "\u{1b}[";
    let colored = |arguments: &[&str], environment: &[(&str, &str)]| {
        let output = place.command(arguments).envs(environment.iter().copied()).output().expect("starts");
        String::from_utf8_lossy(&output.stdout).contains(escape)
    };
    let check = ["check", "slip.stack"];
    assert!(!colored(&check, &[]), "a pipe is no terminal");
    assert!(colored(&check, &[("CLICOLOR_FORCE", "1")]));
    assert!(!colored(&check, &[("CLICOLOR_FORCE", "1"), ("NO_COLOR", "1")]));
    assert!(colored(&["check", "slip.stack", "--color", "always"], &[("NO_COLOR", "1")]));
    assert!(!colored(&["check", "slip.stack", "--color", "never"], &[("CLICOLOR_FORCE", "1")]));
    assert!(!colored(&["check", "slip.stack", "--format", "json", "--color", "always"], &[]));
}

#[test]
fn standard_input_is_a_file_like_any_other() {
    let place = Place::with(&[("sub/lets.stack", "let gap = 1.70 eV\n")]);
    let text = "use \"lets.stack\"\n".to_owned() + &PAIR.replace("1.70 eV", "gap");
    place.run_with_input(&["check", "-", "--read-as", "sub/x.stack"], text.as_bytes()).ends(0);
    let found = place.run_with_input(&["check", "-", "--read-as", "sub/x.stack"], SLIP.as_bytes()).ends(1);
    assert!(found.out.contains("[sub/x.stack:3:31]"), "{}", found.out);
    let found = place.run_with_input(&["check", "-"], SLIP.as_bytes()).ends(1);
    assert!(found.out.contains("[<stdin>:3:31]"), "{}", found.out);
    let bad = place.run_with_input(&["check", "-"], b"stack \xff").ends(2);
    assert!(bad.err.contains("not UTF-8") && bad.err.contains("byte 7"), "{}", bad.err);
}

#[test]
fn a_let_can_be_set_from_outside() {
    let text = "let gap = 1.70 eV\n".to_owned() + &PAIR.replace("1.70 eV", "gap");
    let place = Place::with(&[("pair.stack", &text)]);
    let top = |arguments: &[&str]| {
        let mut all = vec!["build", "pair.stack", "--as", "json", "--into", "-"];
        all.extend(arguments);
        json(&place.run(&all).ends(0).out)["conditions"][0]["junctions"][0]["gap_ev"]
            .as_f64()
            .expect("a number")
    };
    assert!((top(&[]) - 1.7).abs() < 1e-9);
    assert!((top(&["--set", "gap=1.75 eV"]) - 1.75).abs() < 1e-9);
    let unknown = place.run(&["check", "pair.stack", "--set", "gpa=1.75 eV"]);
    assert_ne!(unknown.code, Some(0), "a name that sets nothing is no success");
    assert!((unknown.out + &unknown.err).contains("gpa"));
}

#[test]
fn build_writes_one_folder_a_stack() {
    let two = PAIR.to_owned() + &PAIR.replace("Pair", "pair!");
    let place = Place::with(&[("two.stack", &two)]);
    let out = place.run(&["build", "two.stack", "--into", "out"]).ends(0).out;
    let files = place.list("out");
    for folder in ["out/pair", "out/pair-2"] {
        for name in ["sheet.html", "sheet.md", "results.json", "curves.csv"] {
            assert!(files.contains(&format!("{folder}/{name}")), "{files:?}");
        }
        assert!(out.contains(&format!("{folder}/")), "{out}");
    }
    assert!(files.iter().all(|name| !name.contains(".part")), "{files:?}");
    assert!(out.lines().all(|line| line.chars().count() <= 80), "{out}");
    assert_eq!(json(&place.read("out/pair-2/results.json"))["stack"], "pair!");
}

#[test]
fn only_what_is_asked_for_is_written() {
    let place = Place::with(&[("pair.stack", PAIR)]);
    place.run(&["build", "pair.stack", "--into", "out", "--as", "json"]).ends(0);
    assert_eq!(place.list("out"), ["out/pair/results.json"]);
    let two = PAIR.to_owned() + &PAIR.replace("Pair", "Other");
    place.write("two.stack", two);
    let many = place.run(&["build", "two.stack", "--as", "json", "--into", "-"]).ends(2);
    assert!(many.out.is_empty() && many.err.contains("--stack"), "{}", many.err);
    let one = place.run(&["build", "two.stack", "--as", "json", "--into", "-", "--stack", "Other"]).ends(0);
    assert_eq!(json(&one.out)["stack"], "Other");
    let none = place.run(&["build", "two.stack", "--stack", "Nobody"]).ends(2);
    assert!(none.err.contains("`Pair`") && none.err.contains("`Other`"), "{}", none.err);
}

#[test]
fn the_same_input_gives_the_same_bytes() {
    let place = Place::with(&[("pair.stack", PAIR)]);
    let demos = ["sandpiper", "kittiwake", "gap_limits"];
    for demo in demos {
        let text = std::fs::read_to_string(format!("{}/stacks/{demo}.stack", env!("CARGO_MANIFEST_DIR")));
        place.write(&format!("{demo}.stack"), text.expect("a demo"));
    }
    let build = |into: &str, threads: &str| {
        let files = ["pair", "sandpiper", "kittiwake", "gap_limits"].map(|name| format!("{name}.stack"));
        let mut arguments = vec!["build", "--into", into];
        arguments.extend(files.iter().map(String::as_str));
        let output = place.command(&arguments).env("RAYON_NUM_THREADS", threads).output().expect("starts");
        assert!(matches!(output.status.code(), Some(0 | 1)), "{}", String::from_utf8_lossy(&output.stderr));
        let names = place.list(into);
        let bytes: Vec<_> =
            names.iter().map(|name| std::fs::read(place.path(name)).expect("readable")).collect();
        (names.iter().map(|name| name.trim_start_matches(into).to_owned()).collect::<Vec<_>>(), bytes)
    };
    let first = build("one", "1");
    assert!(first.0.len() >= 16, "{:?}", first.0);
    assert!(first == build("two", "2"), "two threads");
    assert!(first == build("three", "2"), "again");
}

#[test]
fn an_unchanged_file_is_not_touched() {
    let place = Place::with(&[("pair.stack", PAIR)]);
    place.run(&["build", "pair.stack", "--into", "out"]).ends(0);
    let stamp =
        |name: &str| std::fs::metadata(place.path(name)).and_then(|facts| facts.modified()).expect("stamp");
    let before: Vec<_> = place.list("out").iter().map(|name| stamp(name)).collect();
    std::thread::sleep(std::time::Duration::from_millis(20));
    place.run(&["build", "pair.stack", "--into", "out"]).ends(0);
    let after: Vec<_> = place.list("out").iter().map(|name| stamp(name)).collect();
    assert_eq!(before, after);
}

#[test]
fn a_folder_that_cannot_be_written_is_trouble() {
    let place = Place::with(&[("pair.stack", PAIR), ("out", "a file in the way")]);
    let run = place.run(&["build", "pair.stack", "--into", "out"]).ends(2);
    assert!(run.err.contains("cannot write `out") && run.err.contains("a file is in the way"), "{}", run.err);
    assert!(run.err.contains("--into"), "{}", run.err);
    assert_eq!(place.read("out"), "a file in the way");
}

#[cfg(target_os = "linux")]
#[test]
fn a_full_disk_is_trouble_and_a_closed_pipe_is_not() {
    let place = Place::with(&[("slip.stack", SLIP), ("pair.stack", PAIR)]);
    let full = std::fs::OpenOptions::new().write(true).open("/dev/full").expect("opens");
    let output = place.command(&["check", "pair.stack"]).stdout(full).output().expect("starts");
    assert_eq!(output.status.code(), Some(2));
    assert!(String::from_utf8_lossy(&output.stderr).contains("cannot write to standard output"));

    // A reader that is gone before the first byte.
    let (reader, writer) = std::io::pipe().expect("a pipe");
    drop(reader);
    let output = place.command(&["check", "slip.stack"]).stdout(writer).output().expect("starts");
    assert_eq!(output.status.code(), Some(1));
    assert_eq!(String::from_utf8_lossy(&output.stderr), "");
    for arguments in [&["--help"][..], &["why"], &["build", "pair.stack", "--as", "json", "--into", "-"]] {
        let (reader, writer) = std::io::pipe().expect("a pipe");
        drop(reader);
        let output = place.command(arguments).stdout(writer).output().expect("starts");
        assert_eq!(String::from_utf8_lossy(&output.stderr), "", "{arguments:?}");
        assert_eq!(output.status.code(), Some(0), "{arguments:?}");
    }
}

#[test]
fn the_number_of_findings_shown_can_be_capped() {
    let many: String = (0..60).map(|n| format!("let a{n} = {n} parsec\n")).collect::<String>() + PAIR;
    let place = Place::with(&[("many.stack", &many)]);
    let count = |arguments: &[&str]| {
        let mut all = vec!["check", "many.stack"];
        all.extend(arguments);
        let out = place.run(&all).out;
        (out.matches("error: ").count() + out.matches("warning: ").count(), out)
    };
    let (all, text) = count(&["--max-findings", "0"]);
    assert!(all >= 60, "{text}");
    let (shown, text) = count(&[]);
    assert_eq!(shown, 50);
    assert!(text.contains(&format!("{} more not shown", all - 50)), "{text}");
    let (shown, _) = count(&["--max-findings", "3"]);
    assert_eq!(shown, 3);
    let document = json(&place.run(&["check", "many.stack", "--format", "json"]).ends(1).out);
    assert_eq!(document["findings"].as_array().map(Vec::len), Some(all));
    assert_eq!(document["left_out"], 0);
}

#[test]
fn strict_makes_warnings_fail() {
    // An `accept` that accepts nothing is a warning.
    let text = PAIR.replace("light ", "accept gap.order because \"none here\"\n    light ");
    let place = Place::with(&[("warned.stack", &text)]);
    let run = place.run(&["check", "warned.stack"]).ends(0);
    assert!(run.out.contains("warning: "), "{}", run.out);
    place.run(&["check", "warned.stack", "--strict"]).ends(1);
}

#[test]
fn why_shows_pages_families_and_near_names() {
    let place = Place::new();
    let page = place.run(&["why", "gap.order"]).ends(0).out;
    assert!(page.starts_with("# gap.order"), "{page}");
    let family = place.run(&["why", "gap"]).ends(0).out;
    assert!(family.lines().count() >= 2 && family.lines().all(|line| line.starts_with("gap.")), "{family}");
    let all = place.run(&["why"]).ends(0).out;
    assert_eq!(all.lines().count(), bandloom::why::PAGES.len());
    let near = place.run(&["why", "gap.oder"]).ends(2);
    assert!(near.err.contains("bandloom why gap.order"), "{}", near.err);
    let far = place.run(&["why", "zzz"]).ends(2);
    assert!(far.err.contains("lists every code"), "{}", far.err);
}

#[test]
fn static_checks_leave_figures_out() {
    let text = PAIR.replace("}\n}", "}\n    require efficiency >= 90 %\n}");
    let place = Place::with(&[("pair.stack", &text)]);
    let run = place.run(&["check", "pair.stack"]).ends(1);
    assert!(run.out.contains("require.failed"), "{}", run.out);
    place.run(&["check", "pair.stack", "--static"]).ends(0);
    // The sheet of a stack that fails a requirement is written all the same.
    let build = place.run(&["build", "pair.stack", "--into", "out"]).ends(1);
    assert!(build.out.contains("the requirement fails"), "{}", build.out);
    assert!(place.list("out").contains(&"out/pair/sheet.html".to_owned()));
}

#[test]
fn the_user_may_replace_a_template() {
    let place = Place::with(&[("pair.stack", PAIR), ("mine/sheet.css", "body { color: rebeccapurple }")]);
    place.run(&["build", "pair.stack", "--templates", "mine", "--as", "html", "--into", "out"]).ends(0);
    assert!(place.read("out/pair/sheet.html").contains("rebeccapurple"));
    place.write("mine/sheet.html", "{{ nobody.home }}");
    let run =
        place.run(&["build", "pair.stack", "--templates", "mine", "--as", "html", "--into", "two"]).ends(2);
    assert!(run.err.contains("sheet.html"), "{}", run.err);
    assert!(place.list("two").is_empty());
    place.run(&["build", "pair.stack", "--templates", "nowhere"]).ends(2);
}

#[test]
fn output_is_read_by_a_pager_that_stops_early() {
    let many: String = (0..400).map(|n| format!("let a{n} = {n} parsec\n")).collect();
    let place = Place::with(&[("many.stack", &many)]);
    let mut command = place.command(&["check", "many.stack", "--max-findings", "0"]);
    let mut child = command.stdout(Stdio::piped()).stderr(Stdio::piped()).spawn().expect("starts");
    // Closed unread while it writes.
    drop(child.stdout.take());
    let output = child.wait_with_output().expect("ends");
    assert_eq!(String::from_utf8_lossy(&output.stderr), "");
    assert_eq!(output.status.code(), Some(1));
}

#[test]
fn helps_name_values_of_their_own_slot() {
    let file = "stack \"A\" {
        mirror { }
        junction a {
            absorber  ideal of gap 1.42 eV   absorbs all_above_gap
            voltage from fit { j01 0 A/cm2; j02 -2e-12 A/cm2; shunt 0 ohm cm2; at 25 degC }
        }
        require  efficiency >= 28 A
    }
";
    let out = Place::with(&[("a.stack", file)]).run(&["check", "a.stack"]).ends(1).out;
    for help in ["`mirror Ag`", "`2e-12 A/cm2`", "`1e6 ohm cm2`", "help: write `28 %`"] {
        assert!(out.contains(help), "{help}\n{out}");
    }
}

#[test]
fn a_cell_too_hot_for_any_figure_is_told() {
    let file = "stack \"A\" {
        temperature  5000 K
        junction a { absorber ideal of gap 1.4 eV   absorbs all_above_gap }
    }
";
    let out = Place::with(&[("a.stack", file)]).run(&["check", "a.stack"]).ends(1).out;
    assert!(out.contains("is beyond what can be computed"), "{out}");
}

#[test]
fn no_file_is_named_that_could_not_be_written() {
    let place = Place::with(&[("pair.stack", PAIR), ("taken", "a file where a folder is due")]);
    let run = place.run(&["build", "pair.stack", "--into", "taken"]).ends(2);
    assert!(run.err.contains("cannot write"), "{}", run.err);
    assert!(run.out.contains("Pair") && !run.out.contains("sheet.html"), "{}", run.out);
}

/// A sheet is mailed around: it says nothing of the host it was made on.
#[test]
fn no_file_tells_where_the_work_lies() {
    let place = Place::new();
    let text = include_str!("../../stacks/sandpiper.stack").replace("voc >= 2.3 V", "voc >= 9.3 V");
    place.write("deep/mast.stack", text);
    let file = place.path("deep/mast.stack").to_string_lossy().into_owned();
    let folder = place.path("deep").to_string_lossy().into_owned();
    place.run(&["build", "--into", "sheets", &file]).ends(1);
    let made = place.path("sheets/sandpiper-2j");
    let mut seen = 0;
    for entry in std::fs::read_dir(made).expect("built") {
        let path = entry.expect("readable").path();
        let text = std::fs::read_to_string(&path).expect("text");
        assert!(!text.contains(&folder), "{} names {folder}", path.display());
        seen += usize::from(text.contains("mast.stack"));
    }
    assert!(seen >= 3, "sheet.html, sheet.md and results.json name the file");
}
