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

/// Fences marked `console` hold commands; each must be one the program takes.
#[test]
fn commands_in_the_readme_exist() {
    let readme = paper("README.md");
    let place = Place::new();
    let mut seen = 0;
    for line in readme.lines() {
        let line = line.trim().trim_start_matches("$ ");
        let Some(rest) =
            line.strip_prefix("bandloom ").or_else(|| line.split_once(" -- ").map(|(_, rest)| rest))
        else {
            continue;
        };
        let Some(command) = rest.split_whitespace().next() else { continue };
        if command.chars().all(|c| c.is_ascii_lowercase()) {
            let help = place.run(&[command, "--help"]).ends(0);
            for option in rest.split_whitespace().filter(|word| word.starts_with("--") && word.len() > 2) {
                let option = option
                    .split('=')
                    .next()
                    .unwrap_or(option)
                    .trim_matches(|c: char| !c.is_alphanumeric() && c != '-');
                assert!(help.out.contains(option), "`{command}` has no `{option}`: {line}");
            }
            seen += 1;
        }
    }
    assert!(seen > 0, "README shows no command");
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
