//! What DEVELOPERS.md promises about the code, read from the code.

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};

use bandloom::why::PAGES;

use super::tool::walk;

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

/// Name below the root, with `/`, and text, of every file below `folders` with one of `endings`.
pub(super) fn texts(folders: &[&str], endings: &[&str]) -> Vec<(String, String)> {
    let mut texts = Vec::new();
    let mut add = |path: &Path| {
        let name = path.strip_prefix(root()).expect("below the root").to_string_lossy().replace('\\', "/");
        if endings.is_empty() || endings.iter().any(|ending| name.ends_with(ending)) {
            let bytes = std::fs::read(path).expect("readable");
            if let Ok(text) = String::from_utf8(bytes) {
                texts.push((name, text));
            }
        }
    };
    for folder in folders {
        let path = root().join(folder);
        if path.is_dir() {
            walk(&path, &mut add);
        } else if path.exists() {
            add(&path);
        }
    }
    assert!(!texts.is_empty(), "nothing in {folders:?}");
    texts
}

pub(super) fn sources() -> Vec<(String, String)> {
    texts(&["src"], &[".rs"])
}

/// The part of a file before its unit tests.
pub(super) fn untested(text: &str) -> &str {
    text.find("#[cfg(test)]\nmod tests").map_or(text, |at| &text[..at])
}

/// A file of unit tests: `src/parse/tests.rs`, `src/parse/tests/numbers.rs`.
pub(super) fn is_test(name: &str) -> bool {
    name.ends_with("/tests.rs") || name.contains("/tests/")
}

const FAMILIES: &[&str] = &[
    "syntax",
    "name",
    "use",
    "unit",
    "number",
    "value",
    "formula",
    "gap",
    "lattice",
    "polarity",
    "doping",
    "tunnel",
    "structure",
    "optics",
    "light",
    "current",
    "require",
    "free",
    "accept",
    "limit",
    "feature",
    "caution",
    "material",
    "data",
    "voltage",
    "depletion",
    "fluence",
    "junction",
    "transport",
    "evaluate",
    "spectrum",
    "fit",
    "table",
    "index",
];

/// Codes are the string literals `family.words` in the code.
fn codes() -> BTreeMap<String, String> {
    let mut codes = BTreeMap::new();
    for (name, text) in sources() {
        if name == "src/why.rs" || is_test(&name) {
            continue;
        }
        for line in untested(&text).lines().filter(|line| !line.trim_start().starts_with("//")) {
            for literal in line.split('"').skip(1).step_by(2) {
                let Some((family, rest)) = literal.split_once('.') else { continue };
                let word =
                    |text: &str| !text.is_empty() && text.chars().all(|c| c.is_ascii_lowercase() || c == '-');
                if FAMILIES.contains(&family) && word(rest) {
                    codes.entry(literal.to_owned()).or_insert_with(|| name.clone());
                }
            }
        }
    }
    codes
}

/// A page's *Example* must fire its code (the other test binary runs it), so a page is a
/// firing fixture too.
#[test]
fn every_code_has_a_page_and_every_page_a_code() {
    let codes = codes();
    assert!(!codes.is_empty());
    let pages: BTreeSet<&str> = PAGES.iter().map(|(code, _)| *code).collect();
    let mut trouble = Vec::new();
    for (code, file) in &codes {
        if !pages.contains(code.as_str()) {
            trouble.push(format!("{file}: `{code}` has no page in src/why.rs"));
        }
    }
    for page in &pages {
        if !codes.contains_key(*page) {
            trouble.push(format!("src/why/{page}.md: no code names it"));
        }
    }
    for (name, text) in texts(&["src/why", "src/why.rs"], &[".md"]) {
        let stem = name.trim_start_matches("src/why/").trim_end_matches(".md");
        match PAGES.iter().find(|(code, _)| *code == stem) {
            Some((_, page)) if *page == text => {}
            _ => trouble.push(format!("{name} has no line of its own in src/why.rs")),
        }
    }
    assert!(trouble.is_empty(), "\n{}", trouble.join("\n"));
}

#[test]
fn files_are_short() {
    let mut trouble = Vec::new();
    for (name, text) in texts(&["src", "tests", "benches"], &[".rs"]) {
        let lines = untested(&text).lines().count();
        if lines > 400 {
            trouble.push(format!("{name} has {lines} lines without its tests"));
        }
    }
    assert!(trouble.is_empty(), "\n{}", trouble.join("\n"));
}

#[test]
fn no_room_is_a_drawer() {
    for (name, _) in texts(&["src", "tests"], &[".rs"]) {
        let stem = name.rsplit('/').next().unwrap_or_default().trim_end_matches(".rs");
        assert!(
            !["mod", "utils", "util", "helpers", "helper", "common", "manager", "misc"].contains(&stem),
            "{name}"
        );
    }
}

#[test]
fn every_exception_to_a_lint_has_its_reason() {
    let mut trouble = Vec::new();
    for (name, text) in texts(&["src", "tests", "benches"], &[".rs"]) {
        for mark in ["#[allow(", "#[expect(", "#![allow(", "#![expect("] {
            for (at, _) in text.match_indices(mark) {
                let quoted = text[..at].ends_with('"');
                let attribute = &text[at..text[at..].find(")]").map_or(text.len(), |end| at + end)];
                if !quoted && !attribute.contains("reason") {
                    trouble.push(format!("{name}:{}", text[..at].lines().count()));
                }
            }
        }
    }
    assert!(trouble.is_empty(), "without a reason:\n{}", trouble.join("\n"));
}

/// Hosts of package registries, and words that speak of how the project came about.
#[test]
fn no_word_stands_where_it_should_not() {
    // In two pieces each, so that this file holds none of them.
    let pieces = [
        ("crates", ".io"),
        ("docs", ".rs"),
        ("pypi", ".org"),
        ("npmjs", ".com"),
        ("conda", ".org"),
        ("proxy.go", "lang.org"),
        ("lec", "ture"),
        ("home", "work"),
        ("course", "work"),
        ("syl", "labus"),
        ("/wo", "rk/"),
        ("BRI", "EF.md"),
        ("TO", "DO"),
        ("FIX", "ME"),
    ];
    let mut trouble = Vec::new();
    let folders = [
        "src",
        "tests",
        "benches",
        "stacks",
        "grammar",
        "report_templates",
        ".ci",
        "README.md",
        "DEVELOPERS.md",
        "CHANGELOG.md",
        "Cargo.toml",
        "clippy.toml",
        "deny.toml",
    ];
    for (name, text) in texts(&folders, &[]) {
        for (index, line) in text.lines().enumerate() {
            for (a, b) in pieces {
                let word = format!("{a}{b}");
                let exact = word.chars().any(char::is_uppercase);
                let hit = if exact { line.contains(&word) } else { line.to_lowercase().contains(&word) };
                if hit {
                    trouble.push(format!("{name}:{}: {line}", index + 1));
                }
            }
        }
    }
    assert!(trouble.is_empty(), "\n{}", trouble.join("\n"));
}

/// Findings say what is wrong in the trade's words, never in the compiler's.
#[test]
fn no_finding_names_a_phase_or_a_type() {
    let mut trouble = Vec::new();
    for (name, text) in sources() {
        for (index, line) in untested(&text).lines().enumerate() {
            if line.trim_start().starts_with("//") {
                continue;
            }
            for word in
                ["parse error", "parser error", "syntax error", "resolver", "type checker", "semantic"]
            {
                if line.split('"').skip(1).step_by(2).any(|literal| literal.to_lowercase().contains(word)) {
                    trouble.push(format!("{name}:{}: {word}", index + 1));
                }
            }
        }
    }
    assert!(trouble.is_empty(), "\n{}", trouble.join("\n"));
}

#[test]
fn main_is_small() {
    let main = std::fs::read_to_string(root().join("src/main.rs")).expect("readable");
    assert!(main.lines().count() < 25);
    assert!(PathBuf::from(root()).join("grammar/bandloom.pest").exists());
}
