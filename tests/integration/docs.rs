//! README and the other papers against the program.

use std::path::Path;

use super::tool::{Place, walk};

fn paper(name: &str) -> String {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(name);
    std::fs::read_to_string(&path).unwrap_or_else(|why| panic!("{name}: {why}"))
}

#[test]
fn every_stack_is_named_in_the_readme() {
    let readme = paper("README.md");
    let mut count = 0;
    walk(&Path::new(env!("CARGO_MANIFEST_DIR")).join("stacks"), &mut |path| {
        if path.extension().is_some_and(|extension| extension == "stack") {
            let name = path.file_name().expect("a file").to_string_lossy().into_owned();
            assert!(readme.contains(&name), "README does not name {name}");
            count += 1;
        }
    });
    assert!(count >= 4, "the demos are there");
}

/// Lines of fences, and what stands between backticks outside them.
fn code_in(text: &str) -> Vec<&str> {
    let mut code = Vec::new();
    let mut inside = false;
    for line in text.lines() {
        if line.starts_with("```") {
            inside = !inside;
        } else if inside {
            code.push(line.trim());
        } else {
            code.extend(line.split('`').skip(1).step_by(2));
        }
    }
    code
}

/// Every command shown is one the program takes, with every option shown.
#[test]
fn commands_in_the_readme_exist() {
    let readme = paper("README.md");
    let place = Place::new();
    let mut seen = 0;
    for code in code_in(&readme) {
        let (command, options) = match code.split_once("bandloom ").or_else(|| code.split_once(" -- ")) {
            Some((_, rest)) => (rest.split_whitespace().next().unwrap_or_default(), rest),
            // An option by itself belongs to all that read stacks.
            None if code.starts_with("--") => ("check", code),
            None => continue,
        };
        if command.is_empty() || !command.chars().all(|c| c.is_ascii_lowercase()) {
            continue;
        }
        let help = place.run(&[command, "--help"]).ends(0).out;
        for option in
            options.split([' ', '[', ']', '=', '|']).filter(|word| word.starts_with("--") && word.len() > 2)
        {
            assert!(help.contains(option), "`bandloom {command}` has no `{option}`: {code}");
        }
        seen += 1;
    }
    assert!(seen >= 5, "README shows {seen} commands");
}

#[test]
fn every_command_opens_its_help_with_examples() {
    let place = Place::new();
    let all = place.run(&["--help"]).ends(0).out;
    let examples = all.find("Examples:").expect("examples");
    assert!(examples < all.find("Usage:").expect("usage"));
    for command in ["check", "build", "watch", "why", "materials"] {
        assert!(all.contains(&format!("  {command} ")), "{command} is listed");
        let help = place.run(&[command, "--help"]).ends(0).out;
        let (examples, usage) = (help.find("Examples:"), help.find("Usage:"));
        assert!(examples.is_some() && examples < usage, "{command}\n{help}");
        assert!(help.lines().all(|line| line.chars().count() <= 100), "{command}\n{help}");
        // A broken example cannot be copied.
        let examples: Vec<&str> = help.lines().skip_while(|line| *line != "Examples:").skip(1).collect();
        let examples = examples.iter().take_while(|line| !line.is_empty());
        for line in examples {
            assert!(line.starts_with("  ") && line.contains("bandloom "), "{command}: {line}");
            assert!(line.chars().count() <= 80, "{command}: {line}");
        }
    }
}

#[test]
fn every_room_is_named_to_developers() {
    let paper = paper("DEVELOPERS.md");
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    for entry in std::fs::read_dir(folder).expect("readable") {
        let name = entry.expect("an entry").file_name().to_string_lossy().into_owned();
        let Some(room) = name.strip_suffix(".rs").filter(|room| !["main", "lib"].contains(room)) else {
            continue;
        };
        assert!(paper.contains(&format!("| `{room}` |")), "DEVELOPERS.md has no line for `{room}`");
    }
}

#[test]
fn papers_keep_their_length() {
    assert!(paper("DEVELOPERS.md").lines().count() < 200);
    assert!(
        paper("CHANGELOG.md").contains(env!("CARGO_PKG_VERSION"))
            || paper("CHANGELOG.md").contains("Unreleased")
    );
}
