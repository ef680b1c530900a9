//! Realistic slips, planted one at a time into every good demo: the right code must fire on each.
//!
//! `cargo test --test integration slips -- --nocapture` prints the table.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use bandloom::compile::{Options, compile};
use bandloom::world::disk::Disk;
use bandloom::world::memory::Memory;
use rayon::prelude::*;

use super::slips_planted::{block_slips, line_slips};
use super::tool::walk;

/// A demo that is good as it stands.
pub(crate) struct Demo {
    pub(crate) name: String,
    pub(crate) path: PathBuf,
    pub(crate) text: String,
}

impl Demo {
    /// The text with line `at` replaced, or left out.
    pub(crate) fn with(&self, at: usize, line: Option<&str>) -> String {
        let all = self.text.lines().enumerate();
        all.filter_map(|(index, old)| if index == at { line } else { Some(old) })
            .fold(String::new(), |text, line| text + line + "\n")
    }

    /// How often each code is found.
    pub(crate) fn found(&self, text: &str, evaluate: bool) -> BTreeMap<&'static str, usize> {
        let root = Path::new(env!("CARGO_MANIFEST_DIR"));
        let world = Memory::over(Disk::below(root)).with(&self.path, text);
        let options = Options { no_evaluation: !evaluate, ..Options::default() };
        let mut codes = BTreeMap::new();
        for finding in compile(&world, &self.path, &options).findings.iter() {
            *codes.entry(finding.code).or_default() += 1;
        }
        codes
    }

    /// Lines from `at` to the one that closes its block.
    pub(crate) fn block(&self, at: usize) -> std::ops::Range<usize> {
        let mut depth = 0_i32;
        for (index, line) in self.text.lines().enumerate().skip(at) {
            let code = line.split("//").next().unwrap_or_default();
            depth += code.matches('{').count() as i32 - code.matches('}').count() as i32;
            if depth <= 0 {
                return at..index + 1;
            }
        }
        at..self.text.lines().count()
    }
}

/// Demos of their own slips.
const NOT_GOOD: &[&str] = &["mistakes"];

fn demos() -> Vec<Demo> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let mut demos = Vec::new();
    walk(&root.join("stacks"), &mut |path| {
        let name = path.file_stem().map(|stem| stem.to_string_lossy().into_owned()).unwrap_or_default();
        let is_stack = path.extension().is_some_and(|extension| extension == "stack");
        if is_stack && !NOT_GOOD.contains(&name.as_str()) {
            let text = std::fs::read_to_string(path).expect("readable");
            demos.push(Demo { name, path: path.to_path_buf(), text });
        }
    });
    demos.sort_by(|a, b| a.name.cmp(&b.name));
    demos
}

#[test]
fn every_slip_in_every_demo_is_told() {
    let mut table: BTreeMap<&str, (usize, usize, BTreeMap<&str, usize>)> = BTreeMap::new();
    let mut missed = Vec::new();
    let demos = demos();
    for demo in &demos {
        let before = [demo.found(&demo.text, false), demo.found(&demo.text, true)];
        let mut mutants = line_slips(demo);
        mutants.extend(block_slips(demo));
        let found: Vec<_> =
            mutants.par_iter().map(|mutant| demo.found(&mutant.text, mutant.evaluate)).collect();
        for (mutant, found) in mutants.iter().zip(found) {
            let before = &before[usize::from(mutant.evaluate)];
            let more = |code: &&str| found.get(*code) > before.get(*code);
            let (told, all, codes) = table.entry(mutant.kind).or_default();
            *all += 1;
            match mutant.codes.iter().copied().find(more) {
                Some(code) => {
                    *told += 1;
                    *codes.entry(code).or_default() += 1;
                }
                None => missed.push(format!(
                    "{}: {} ({}): wanted one of {:?}, found {found:?}",
                    demo.name, mutant.kind, mutant.what, mutant.codes
                )),
            }
        }
    }
    println!("\n{:<38}{:>8}  codes", "slip", "told");
    let (mut told, mut planted) = (0, 0);
    for (kind, (one, all, codes)) in &table {
        let codes: Vec<String> = codes.iter().map(|(code, count)| format!("{code} {count}")).collect();
        println!("{kind:<38}{:>8}  {}", format!("{one}/{all}"), codes.join(", "));
        (told, planted) = (told + one, planted + all);
    }
    println!("{told} of {planted} slips told, in {} demos", demos.len());
    assert!(planted > 200, "only {planted} slips planted");
    assert!(missed.is_empty(), "{} missed:\n{}", missed.len(), missed.join("\n"));
}

#[test]
fn everything_wrong_is_told_once_by_as_many_codes() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let path = root.join("stacks/mistakes.stack");
    let text = std::fs::read_to_string(&path).expect("readable");
    let demo = Demo { name: "mistakes".to_owned(), path, text };
    let found = demo.found(&demo.text, true);
    let twice: Vec<_> = found.iter().filter(|(_, count)| **count > 1).collect();
    assert!(twice.is_empty(), "told more than once: {twice:?}");
    assert!(found.len() >= 55, "only {} codes", found.len());
}

/// Slips that cannot hide each other, one to a stack, up to fifty in one file.
#[test]
fn k_slips_are_k_findings() {
    const SLIPS: &[(&str, &str, &str)] = &[
        ("unit.missing", "emitter  GaAs  100 nm", "emitter  GaAs  100"),
        ("unit.dimension", "p 1e17 /cm3", "p 1e17 /cm2"),
        ("unit.unlikely", "100 nm", "100 um"),
        ("unit.unknown", "3 um", "3 Um"),
        ("number.decimal-comma", "ere 1.5 %", "ere 1,5 %"),
        ("name.unknown", "base     GaAs", "base     GaAS"),
        ("name.unknown", "voltage", "voltge"),
        ("syntax.unexpected", "wafer  GaAs", "wafer  GaAs,"),
        ("polarity.same", "n 2e18", "p 2e18"),
        ("value.range", "ere 1.5 %", "ere 150 %"),
        ("formula.sum", "base     GaAs", "base     Al0.5Ga0.6As"),
        ("formula.unknown-element", "base     GaAs", "base     Al0.5Xy0.5As"),
        ("name.look-alike", "light    AM1.5G", "light    АM1.5G"),
        ("lattice.mismatch", "base     GaAs", "base     InP"),
        ("value.missing", "  3 um", ""),
        ("accept.unused", "light    AM1.5G", "light    AM1.5G; accept gap.order because \"so\""),
        ("doping.limit", "n 2e18", "n 2e21"),
    ];
    let good = |number: usize| {
        format!(
            "stack \"Number {number}\" {{
    light    AM1.5G
    optics   one_pass {{ front_reflectance 3 % }}
    junction only {{
        emitter  GaAs  100 nm   n 2e18 /cm3 Si
        base     GaAs  3 um   p 1e17 /cm3 Zn
        voltage  from ere 1.5 %
    }}
    wafer  GaAs  350 um   p 1e18 /cm3 Zn
}}
"
        )
    };
    let demo = Demo { name: String::new(), path: PathBuf::from("many.stack"), text: String::new() };
    for k in [1, SLIPS.len(), 50] {
        let mut wanted: BTreeMap<&str, usize> = BTreeMap::new();
        let mut text = String::new();
        for number in 0..k {
            let (code, from, to) = SLIPS[number % SLIPS.len()];
            let stack = good(number);
            let slipped = stack.replacen(from, to, 1);
            assert_ne!(stack, slipped, "{code}: nothing was planted");
            text.push_str(&slipped);
            *wanted.entry(code).or_default() += 1;
        }
        let found = demo.found(&text, true);
        assert_eq!(found, wanted, "{k} slips planted");
    }
}
