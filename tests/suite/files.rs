//! Fixtures and demo stacks: files with their expectations in them or beside them.

use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};

use bandloom::source::Source;
use bandloom::world::disk::Disk;
use libtest_mimic::{Failed, Trial};

use crate::expect::{self, Stated};
use crate::numbers;
use crate::run::{Ran, Stage, run};

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

/// One trial for each `tests/fixtures/<stage>/*.stack` and each `stacks/*.stack`.
pub(crate) fn trials() -> Vec<Trial> {
    let mut trials = Vec::new();
    for folder in folders(&root().join("tests/fixtures")) {
        let name = folder.file_name().map(|name| name.to_string_lossy().into_owned()).unwrap_or_default();
        let stage = match name.as_str() {
            "parse" => Stage::Parse,
            "resolve" | "materials" => Stage::Resolve,
            // Raw bytes for the command line, and expectations of the demos: no fixtures.
            "bytes" | "stacks" => continue,
            _ => Stage::Check,
        };
        for path in stacks_in(&folder) {
            let title = format!("{name}/{}", stem(&path));
            let world = folder.clone();
            trials.push(Trial::test(title, move || fixture(&world, &path, stage)));
        }
    }
    for path in stacks_in(&root().join("stacks")) {
        trials.push(Trial::test(format!("stacks/{}", stem(&path)), move || demo(&path)));
    }
    trials
}

fn stem(path: &Path) -> String {
    path.file_stem().map(|stem| stem.to_string_lossy().into_owned()).unwrap_or_default()
}

fn folders(within: &Path) -> Vec<PathBuf> {
    sorted(within, |path| path.is_dir())
}

fn stacks_in(folder: &Path) -> Vec<PathBuf> {
    sorted(folder, |path| path.extension().is_some_and(|extension| extension == "stack"))
}

fn sorted(folder: &Path, keep: impl Fn(&Path) -> bool) -> Vec<PathBuf> {
    let Ok(entries) = fs::read_dir(folder) else { return Vec::new() };
    let mut paths: Vec<PathBuf> =
        entries.filter_map(|entry| Some(entry.ok()?.path())).filter(|path| keep(path)).collect();
    paths.sort();
    paths
}

fn updating() -> bool {
    std::env::var_os("BANDLOOM_UPDATE").is_some_and(|value| value == "1")
}

/// What was found, by the file it was found in; findings without a place go to the first file.
fn found(ran: &Ran, path: &Path) -> Result<BTreeMap<PathBuf, Vec<Stated>>, String> {
    let mut by_file: BTreeMap<PathBuf, Vec<Stated>> = BTreeMap::new();
    by_file.entry(path.to_path_buf()).or_default();
    for source in ran.sources.iter() {
        if on_disk(&source.path) {
            by_file.entry(source.path.clone()).or_default();
        }
    }
    let blank = Source::new(Default::default(), path, "");
    for finding in ran.findings.iter() {
        well_worded(finding)?;
        let source = finding.primary.as_ref().map(|label| ran.sources.get(label.span.source));
        let file = source.map_or(path, |source| &source.path);
        let stated = Stated::of(finding, source.unwrap_or(&blank));
        by_file.entry(file.to_path_buf()).or_default().push(stated);
    }
    Ok(by_file)
}

/// Embedded texts are sources too, but have no file whose comments could be read.
fn on_disk(path: &Path) -> bool {
    path.is_file()
}

/// The wording every finding keeps: one line, lower case, no full stop, labels inside the text.
fn well_worded(finding: &bandloom::finding::Finding) -> Result<(), String> {
    let message = &finding.message;
    let say = |what: &str| Err(format!("{}: message {what}: {message}", finding.code));
    if message.is_empty() || message.contains('\n') {
        return say("must be one line");
    }
    if message.ends_with('.') && !message.ends_with("..") {
        return say("ends in a full stop");
    }
    if message.matches('`').count() % 2 == 1 {
        return say("has an unpaired backtick");
    }
    if message.contains("NaN") || message.contains("Some(") || message.contains("None") {
        return say("shows an inner value");
    }
    if finding.severity > bandloom::finding::Severity::Advice && finding.helps.is_empty() {
        return Err(format!("{}: no help: {message}", finding.code));
    }
    Ok(())
}

fn fixture(folder: &Path, path: &Path, stage: Stage) -> Result<(), Failed> {
    let ran = run(&Disk::below(folder), path, stage)?;
    let mut trouble = Vec::new();
    for (file, found) in found(&ran, path)? {
        let text = fs::read_to_string(&file).map_err(|why| format!("{}: {why}", file.display()))?;
        if updating() {
            let fresh = expect::rewrite(&text, &found);
            if fresh != text {
                fs::write(&file, fresh).map_err(|why| why.to_string())?;
            }
            continue;
        }
        if let Err(why) = expect::read(&text).and_then(|stated| expect::compare(&stated, &found)) {
            trouble.push(format!("{}\n{why}", file.display()));
        }
    }
    if let Err(why) = numbers::hold(&ran, path) {
        trouble.push(why);
    }
    if trouble.is_empty() { Ok(()) } else { Err(trouble.join("\n").into()) }
}

/// A demo gives no finding but those stated in `tests/fixtures/stacks/<name>.expected`, one
/// a line: the line number, then as after `//~`.
fn demo(path: &Path) -> Result<(), Failed> {
    let beside = root().join("tests/fixtures/stacks").join(format!("{}.expected", stem(path)));
    let ran = run(&Disk::below(root()), path, Stage::Check)?;
    let all = found(&ran, path)?;
    let found: Vec<Stated> = all.into_values().flatten().collect();
    if updating() && beside.exists() {
        let lines =
            found.iter().map(|one| format!("{} {}\n", one.line, one.to_string().trim_start_matches("//~ ")));
        fs::write(&beside, lines.collect::<String>()).map_err(|why| why.to_string())?;
        return Ok(());
    }
    let text = fs::read_to_string(&beside).unwrap_or_default();
    let mut stated = Vec::new();
    for line in text.lines() {
        let (number, body) = line.split_once(' ').ok_or("an expectation wants a line number first")?;
        let number: usize = number.parse().map_err(|_| format!("no line number: {line}"))?;
        let one = expect::read(&format!("//~ {body}"))?.pop().ok_or("empty expectation")?;
        stated.push(Stated { line: number, ..one });
    }
    expect::compare(&stated, &found)?;
    if stated.is_empty() && ran.stacks.iter().any(|(_, results)| results.is_none()) {
        return Err("a stack was not evaluated, and nothing says why".into());
    }
    numbers::hold(&ran, path)?;
    Ok(())
}
