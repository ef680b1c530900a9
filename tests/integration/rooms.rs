//! Which room may name which, and which outside crate, read from the `use` lines.

use std::collections::BTreeMap;

use super::house_rules::{is_test, sources, untested};

/// `src/optics/film.rs` → `optics`.
fn room(name: &str) -> &str {
    let inner = name.strip_prefix("src/").unwrap_or(name);
    inner.split(['/', '.']).next().unwrap_or(inner)
}

/// Rooms named by `crate::…` in code, with the line.
fn named(text: &str) -> Vec<(usize, String)> {
    let mut found = Vec::new();
    for (index, line) in text.lines().enumerate() {
        if line.trim_start().starts_with("//") {
            continue;
        }
        for (at, _) in line.match_indices("crate::") {
            let rest = &line[at + "crate::".len()..];
            let name: String = rest.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect();
            if !name.is_empty() {
                found.push((index + 1, name));
            }
        }
    }
    found
}

/// What each room may name. A room that is not here is new and wants a line.
const MAY: &[(&str, &[&str])] = &[
    ("source", &[]),
    ("world", &[]),
    ("why", &[]),
    ("numerics", &[]),
    ("results", &[]),
    ("syntax", &["source"]),
    ("finding", &["source"]),
    ("units", &["source", "syntax", "finding"]),
    ("parse", &["source", "syntax", "finding"]),
    ("light", &["numerics", "units"]),
    ("materials", &["numerics", "units", "light"]),
    ("design", &["source", "syntax", "light", "materials"]),
    ("optics", &["numerics", "units", "light", "materials", "design"]),
    ("carriers", &["numerics", "units", "light", "materials", "design"]),
    ("circuit", &["numerics", "units", "light", "materials", "design"]),
    ("growth", &["numerics", "units", "materials", "design"]),
    (
        "resolve",
        &[
            "source",
            "world",
            "syntax",
            "finding",
            "units",
            "parse",
            "light",
            "materials",
            "design",
            "growth",
            "numerics",
            "why",
            // `limit CODE value` is read in the unit of its rule, the bound of a `require` in the
            // dimension of its metric: two static tables.
            "check",
            "evaluate",
        ],
    ),
    (
        "evaluate",
        &[
            "numerics",
            "units",
            "light",
            "materials",
            "design",
            "optics",
            "carriers",
            "circuit",
            "growth",
            "results",
            "finding",
            "source",
        ],
    ),
    (
        "check",
        &[
            "source",
            "finding",
            "units",
            "light",
            "materials",
            "design",
            // What counts as thick, and how many layers the light is followed through.
            "optics",
            "growth",
            "results",
            "numerics",
            "why",
        ],
    ),
    ("report", &["results", "design", "materials", "light", "growth", "units", "numerics"]),
    ("compile", &["source", "world", "finding", "resolve", "design", "check", "evaluate", "results"]),
    ("watch", &["world"]),
];

#[test]
fn rooms_depend_in_one_direction() {
    let may: BTreeMap<&str, &[&str]> = MAY.iter().copied().collect();
    let mut trouble = Vec::new();
    for (name, text) in sources() {
        let room = room(&name);
        if ["main", "lib", "cli"].contains(&room) || is_test(&name) {
            continue;
        }
        let Some(allowed) = may.get(room) else {
            trouble.push(format!("{name}: the room `{room}` has no line in MAY"));
            continue;
        };
        // Unit tests may stand things up from any room.
        for (line, other) in named(untested(&text)) {
            if other != room && !allowed.contains(&other.as_str()) {
                trouble.push(format!("{name}:{line}: `{room}` may not name `{other}`"));
            }
        }
    }
    assert!(trouble.is_empty(), "\n{}", trouble.join("\n"));
}

/// Crates that one place only knows.
#[test]
fn each_outside_crate_stays_in_its_room() {
    let places: &[(&str, &[&str])] = &[
        ("miette", &["src/finding/render.rs"]),
        ("pest", &["src/parse.rs", "src/parse/"]),
        ("pest_derive", &["src/parse.rs", "src/parse/"]),
        ("tera", &["src/report/"]),
        ("notify", &["src/watch/bell.rs"]),
        ("clap", &["src/cli.rs", "src/cli/"]),
        ("terminal_size", &["src/cli/console.rs"]),
    ];
    let mut trouble = Vec::new();
    for (name, text) in sources() {
        for (crate_name, allowed) in places {
            if allowed.iter().any(|place| name.starts_with(place)) {
                continue;
            }
            let uses =
                [format!("use {crate_name}::"), format!(" {crate_name}::"), format!("({crate_name}::")];
            for (index, line) in text.lines().enumerate().filter(|(_, line)| !line.trim().starts_with("//")) {
                if uses.iter().any(|mark| line.contains(mark)) {
                    trouble.push(format!("{name}:{}: `{crate_name}` is not named here", index + 1));
                }
            }
        }
    }
    assert!(trouble.is_empty(), "\n{}", trouble.join("\n"));
}
