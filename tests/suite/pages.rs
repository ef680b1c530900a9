//! The pages behind the codes and the fences of the README, run as they stand.
//!
//! A fence marked `stack` is a whole file. In a page, a further fence with a name in its mark
//! (`csv lamp.csv`, `stack parts/tunnels.stack`) is a file beside it.

use std::fs;
use std::path::Path;

use bandloom::finding::Finding;
use bandloom::why::PAGES;
use bandloom::world::memory::Memory;
use libtest_mimic::{Failed, Trial};

use crate::run::{Ran, Stage, run};

/// One trial for each *Example*, each *Instead*, and each `stack` fence of the README.
pub(crate) fn trials() -> Vec<Trial> {
    let mut trials = Vec::new();
    for &(code, page) in PAGES {
        trials.push(Trial::test(format!("why/{code}/shape"), move || shape(code, page)));
        trials.push(Trial::test(format!("why/{code}/example"), move || example(code, page)));
        trials.push(Trial::test(format!("why/{code}/instead"), move || instead(page)));
    }
    let readme = fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join("README.md"));
    let fences = fences(&readme.unwrap_or_default());
    for (index, fence) in fences.into_iter().filter(|fence| fence.mark == "stack").enumerate() {
        trials.push(Trial::test(format!("readme/{}", index + 1), move || {
            let world = Memory::new().with(MAIN, fence.text.as_str());
            silent(&run(&world, Path::new(MAIN), Stage::Check)?)
        }));
    }
    trials
}

const MAIN: &str = "example.stack";
const HEADINGS: [&str; 5] =
    ["## What it reports", "## Why it matters", "## Example", "## Instead", "## Sources"];

struct Fence {
    mark: String,
    text: String,
}

fn fences(text: &str) -> Vec<Fence> {
    let mut fences = Vec::new();
    let mut open: Option<Fence> = None;
    for line in text.lines() {
        match (&mut open, line.strip_prefix("```")) {
            (None, Some(mark)) => open = Some(Fence { mark: mark.trim().to_owned(), text: String::new() }),
            (Some(_), Some(_)) => fences.extend(open.take()),
            (Some(fence), None) => {
                fence.text.push_str(line);
                fence.text.push('\n');
            }
            (None, None) => {}
        }
    }
    fences
}

fn section<'a>(page: &'a str, heading: &str) -> Result<&'a str, String> {
    let mark = format!("\n{heading}\n");
    let start = page.find(&mark).ok_or_else(|| format!("no `{heading}`"))? + mark.len();
    let rest = &page[start..];
    Ok(&rest[..rest.find("\n## ").unwrap_or(rest.len())])
}

fn shape(code: &str, page: &str) -> Result<(), Failed> {
    if page.lines().next() != Some(format!("# {code}").as_str()) {
        return Err(format!("the first line must be `# {code}`").into());
    }
    let headings: Vec<&str> = page.lines().filter(|line| line.starts_with("## ")).collect();
    if headings != HEADINGS {
        return Err(format!("headings are {headings:?}, not {HEADINGS:?}").into());
    }
    for heading in HEADINGS {
        if section(page, heading)?.trim().is_empty() {
            return Err(format!("`{heading}` is empty").into());
        }
    }
    Ok(())
}

fn run_section(page: &str, heading: &str) -> Result<Ran, String> {
    let mut world = Memory::new();
    let mut whole = 0;
    for fence in fences(section(page, heading)?) {
        match fence.mark.split_once(' ') {
            Some((_, name)) => world = world.with(name, fence.text.as_str()),
            None if fence.mark == "stack" => {
                whole += 1;
                world = world.with(MAIN, fence.text.as_str());
            }
            None => {}
        }
    }
    if whole != 1 {
        return Err(format!("`{heading}` must hold one `stack` fence, has {whole}"));
    }
    run(&world, Path::new(MAIN), Stage::Check)
}

fn listed<'a>(findings: impl Iterator<Item = &'a Finding>) -> String {
    findings
        .map(|f| format!("{}[{}]: {}", f.severity.word(), f.code, f.message))
        .collect::<Vec<_>>()
        .join("\n")
}

fn example(code: &str, page: &str) -> Result<(), Failed> {
    let ran = run_section(page, "## Example")?;
    if ran.findings.iter().all(|finding| finding.code != code) {
        return Err(format!("`{code}` was not found\n{}", listed(ran.findings.iter())).into());
    }
    let other: Vec<&Finding> = ran.findings.iter().filter(|finding| finding.code != code).collect();
    if !other.is_empty() {
        return Err(format!("other codes were found\n{}", listed(other.into_iter())).into());
    }
    Ok(())
}

fn instead(page: &str) -> Result<(), Failed> {
    silent(&run_section(page, "## Instead")?)
}

fn silent(ran: &Ran) -> Result<(), Failed> {
    let loud: Vec<&Finding> = ran.findings.iter().collect();
    if !loud.is_empty() {
        return Err(listed(loud.into_iter()).into());
    }
    if ran.stacks.is_empty() {
        return Err("there is no stack in it".into());
    }
    if ran.stacks.iter().any(|(_, results)| results.is_none()) {
        return Err("a stack was not evaluated".into());
    }
    Ok(())
}
