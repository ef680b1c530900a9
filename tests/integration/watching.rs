//! `watch` under the ways editors save.

use std::io::{BufRead, BufReader};
use std::process::Stdio;
use std::sync::mpsc::{Receiver, channel};
use std::time::{Duration, Instant};

use super::tool::{PAIR, Place, Running};

/// A running `bandloom watch`, whose status lines come as they are written.
struct Watching {
    _child: Running,
    lines: Receiver<String>,
}

/// Long enough for a loaded machine.
const SOON: Duration = Duration::from_secs(20);
/// Long enough to be sure that nothing comes, and longer than the slow look.
const NOTHING: Duration = Duration::from_millis(1_300);

impl Watching {
    fn start(place: &Place, arguments: &[&str]) -> Self {
        let mut all = vec!["watch", "--into", "out", "--as", "json"];
        all.extend(arguments);
        let mut command = place.command(&all);
        let mut child = command.stdout(Stdio::null()).stderr(Stdio::piped()).spawn().expect("starts");
        let (sender, lines) = channel();
        let err = BufReader::new(child.stderr.take().expect("piped"));
        std::thread::spawn(move || {
            for line in err.lines().map_while(Result::ok) {
                if line.starts_with('[') && sender.send(line).is_err() {
                    return;
                }
            }
        });
        Self { _child: Running(child), lines }
    }

    #[track_caller]
    fn status(&self) -> String {
        self.lines.recv_timeout(SOON).expect("a build within time")
    }

    /// The next build says `words`; one caught in the middle of a save may come before it.
    #[track_caller]
    fn says(&self, words: &str) -> String {
        let end = Instant::now() + SOON;
        let mut last = String::new();
        while let Ok(line) = self.lines.recv_timeout(end.saturating_duration_since(Instant::now())) {
            if line.contains(words) {
                return line;
            }
            last = line;
        }
        panic!("never `{words}`, last `{last}`")
    }

    #[track_caller]
    fn silent(&self) {
        if let Ok(line) = self.lines.recv_timeout(NOTHING) {
            panic!("a build without a change: {line}");
        }
    }
}

fn pair(gap: &str) -> String {
    PAIR.replace("1.70 eV", gap)
}

#[track_caller]
fn gap(place: &Place) -> f64 {
    let numbers: serde_json::Value =
        serde_json::from_str(&place.read("out/pair/results.json")).expect("JSON");
    numbers["conditions"][0]["junctions"][0]["gap_ev"].as_f64().expect("a number")
}

#[track_caller]
fn becomes(place: &Place, watching: &Watching, expected: f64) {
    let end = Instant::now() + SOON;
    loop {
        watching.says("no findings");
        if (gap(place) - expected).abs() < 1e-9 {
            return;
        }
        assert!(Instant::now() < end);
    }
}

#[test]
fn every_way_of_saving_is_seen() {
    let place = Place::with(&[("pair.stack", PAIR)]);
    let watching = Watching::start(&place, &["pair.stack"]);
    watching.says("no findings");
    assert!((gap(&place) - 1.7).abs() < 1e-9);

    // Written in place.
    place.write("pair.stack", pair("1.71 eV"));
    becomes(&place, &watching, 1.71);
    // Under another name, then renamed, three times: a watch on the file would follow the first.
    for value in ["1.72", "1.73", "1.74"] {
        place.write("pair.stack~", pair(&format!("{value} eV")));
        std::fs::rename(place.path("pair.stack~"), place.path("pair.stack")).expect("renamed");
        becomes(&place, &watching, value.parse().expect("a number"));
    }
    // The old one moved away, a new one written.
    std::fs::rename(place.path("pair.stack"), place.path("pair.bak")).expect("renamed");
    place.write("pair.stack", pair("1.75 eV"));
    becomes(&place, &watching, 1.75);
    // Emptied, and written after a while.
    place.write("pair.stack", "");
    std::thread::sleep(Duration::from_millis(60));
    place.write("pair.stack", pair("1.76 eV"));
    becomes(&place, &watching, 1.76);
    // Deleted, told, and made again.
    std::fs::remove_file(place.path("pair.stack")).expect("removed");
    watching.says("no such file");
    place.write("pair.stack", pair("1.77 eV"));
    becomes(&place, &watching, 1.77);
}

#[test]
fn what_changes_nothing_builds_nothing() {
    let place = Place::with(&[("pair.stack", PAIR)]);
    let watching = Watching::start(&place, &["pair.stack"]);
    watching.says("no findings");
    // Its own output, in the folder watched, is no change; nor is reading, a touch, or a stranger.
    watching.silent();
    let _ = place.read("pair.stack");
    place.write("pair.stack", PAIR);
    place.write("stranger.stack", "nonsense");
    watching.silent();
}

#[test]
fn errors_do_not_end_it_and_keep_the_last_sheet() {
    let place = Place::with(&[("pair.stack", PAIR)]);
    let watching = Watching::start(&place, &["pair.stack"]);
    watching.says("no findings");
    place.write("pair.stack", pair("1.70 nm"));
    watching.says("1 error");
    assert!((gap(&place) - 1.7).abs() < 1e-9, "the last good numbers stay");
    place.write("pair.stack", "stack {{{");
    watching.says("error");
    place.write("pair.stack", b"\xff\xfe");
    watching.says("not UTF-8");
    place.write("pair.stack", pair("1.78 eV"));
    becomes(&place, &watching, 1.78);
}

#[test]
fn files_that_are_used_are_watched_from_the_moment_they_are_named() {
    let place = Place::with(&[("pair.stack", &pair("gap"))]);
    let watching = Watching::start(&place, &["pair.stack"]);
    watching.says("error");
    // A file that is not there yet, in a folder that is not there yet.
    place.write("pair.stack", format!("use \"parts/lets.stack\"\n{}", pair("gap")));
    watching.says("error");
    place.write("parts/lets.stack", "let gap = 1.79 eV\n");
    becomes(&place, &watching, 1.79);
    place.write("parts/lets.stack", "let gap = 1.80 eV\n");
    becomes(&place, &watching, 1.80);
    place.write("parts/lets.stack", "let gap = 1.80 parsec\n");
    watching.says("error");
    place.write("parts/lets.stack", "let gap = 1.81 eV\n");
    becomes(&place, &watching, 1.81);
}

#[test]
fn a_folder_is_watched_with_the_files_that_come_into_it() {
    let place = Place::with(&[("stacks/pair.stack", PAIR)]);
    let watching = Watching::start(&place, &["stacks"]);
    watching.says("pair.stack: no findings");
    place.write("stacks/other.stack", PAIR.replace("Pair", "Other"));
    let line = watching.says("other.stack");
    assert!(line.contains("pair.stack"), "{line}");
}

#[test]
fn polling_sees_the_same() {
    let place = Place::with(&[("pair.stack", PAIR)]);
    let watching = Watching::start(&place, &["pair.stack", "--poll", "50"]);
    watching.says("no findings");
    place.write("pair.stack", pair("1.82 eV"));
    becomes(&place, &watching, 1.82);
    std::fs::remove_file(place.path("pair.stack")).expect("removed");
    watching.says("no such file");
    place.write("pair.stack", pair("1.83 eV"));
    becomes(&place, &watching, 1.83);
}

#[test]
fn once_is_one_build() {
    let place = Place::with(&[("pair.stack", PAIR), ("bad.stack", &pair("1.70 nm"))]);
    let run = place.run(&["watch", "pair.stack", "--once", "--into", "out"]).ends(0);
    assert!(run.err.starts_with('[') && run.err.contains(" ms]"), "{}", run.err);
    place.run(&["watch", "bad.stack", "--once"]).ends(1);
    place.run(&["watch", "gone.stack", "--once"]).ends(2);
    place.run(&["watch", "-"]).ends(2);
}

#[test]
fn the_status_says_how_long_it_took() {
    let place = Place::with(&[("pair.stack", PAIR)]);
    let watching = Watching::start(&place, &["pair.stack"]);
    let line = watching.status();
    let time = line.trim_start_matches('[').split(" ms]").next().unwrap_or_default();
    assert!(time.parse::<f64>().is_ok_and(|time| time > 0.0), "{line}");
}
