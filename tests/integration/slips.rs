//! Realistic slips, planted one at a time into every good demo: the right code must fire on each.
//!
//! `cargo test --test integration slips -- --nocapture` prints the table.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use bandloom::compile::{Options, compile};
use bandloom::world::disk::Disk;
use bandloom::world::memory::Memory;
use rayon::prelude::*;

use super::tool::walk;

/// A demo with one slip in it.
struct Mutant {
    kind: &'static str,
    what: String,
    text: String,
    /// Codes of which one must be found more often than before.
    codes: &'static [&'static str],
    evaluate: bool,
}

/// One line of a demo, with the heads of the blocks around it.
struct Line<'a> {
    text: &'a str,
    within: Vec<&'a str>,
}

impl Line<'_> {
    fn words(&self) -> Vec<&str> {
        self.text.split("//").next().unwrap_or_default().split_whitespace().collect()
    }

    fn first(&self) -> &str {
        self.words().first().copied().unwrap_or_default()
    }

    fn is_within(&self, word: &str) -> bool {
        self.within.iter().any(|head| head.split_whitespace().next() == Some(word))
    }
}

fn lines(text: &str) -> Vec<Line<'_>> {
    let mut within: Vec<&str> = Vec::new();
    let mut all = Vec::new();
    for line in text.lines() {
        let code = line.split("//").next().unwrap_or_default();
        all.push(Line { text: line, within: within.clone() });
        for c in code.chars() {
            match c {
                '{' => within.push(code.trim()),
                '}' => {
                    within.pop();
                }
                _ => {}
            }
        }
    }
    all
}

struct Demo {
    name: String,
    path: PathBuf,
    text: String,
}

impl Demo {
    /// The text with line `at` replaced, or left out.
    fn with(&self, at: usize, line: Option<&str>) -> String {
        let all = self.text.lines().enumerate();
        all.filter_map(|(index, old)| if index == at { line } else { Some(old) })
            .fold(String::new(), |text, line| text + line + "\n")
    }

    /// How often each code is found.
    fn found(&self, text: &str, evaluate: bool) -> BTreeMap<&'static str, usize> {
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
    fn block(&self, at: usize) -> std::ops::Range<usize> {
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

const DUTIES: &[&str] = &[
    "absorber",
    "base",
    "bsf",
    "cap",
    "coat",
    "contact",
    "electron_contact",
    "emitter",
    "hole_contact",
    "intrinsic",
    "layer",
    "wafer",
    "window",
];

/// `word` at whole words only, first of them.
fn replaced(line: &str, word: &str, by: &str) -> Option<String> {
    let boundary = |c: Option<char>| c.is_none_or(|c| !(c.is_alphanumeric() || c == '_' || c == '.'));
    line.match_indices(word)
        .find(|(at, _)| {
            boundary(line[..*at].chars().last()) && boundary(line[at + word.len()..].chars().next())
        })
        .map(|(at, _)| format!("{}{by}{}", &line[..at], &line[at + word.len()..]))
}

fn exchanged(line: &str) -> Option<String> {
    let doped = |sign: &str| {
        let words: Vec<&str> = line.split_whitespace().collect();
        words.windows(2).any(|pair| pair[0] == sign && pair[1].starts_with(|c: char| c.is_ascii_digit()))
    };
    if doped("n") {
        replaced(line, "n", "p")
    } else if doped("p") {
        replaced(line, "p", "n")
    } else {
        None
    }
}

/// Everything that can go wrong on one line.
fn line_slips(demo: &Demo) -> Vec<Mutant> {
    let mut all = Vec::new();
    let lines = lines(&demo.text);
    for (at, line) in lines.iter().enumerate() {
        let mut slip = |kind, codes: &'static [&'static str], evaluate: bool, new: Option<String>| {
            if let Some(new) = new.filter(|new| new != line.text) {
                let what =
                    format!("line {}: {}", at + 1, new.split_whitespace().collect::<Vec<_>>().join(" "));
                all.push(Mutant { kind, what, text: demo.with(at, Some(&new)), codes, evaluate });
            }
        };
        let words = line.words();
        let first = line.first();
        let layer = DUTIES.contains(&first);
        let in_junction = line.is_within("junction");
        let length = words
            .windows(2)
            .position(|pair| pair[0].parse::<f64>().is_ok() && ["nm", "um"].contains(&pair[1]) && layer);
        if let Some(index) = length {
            let (number, unit) = (words[index], words[index + 1]);
            if unit == "nm" {
                slip("nm to um", &["unit.unlikely"], false, replaced(line.text, "nm", "um"));
            } else {
                slip("um to nm", &["unit.unlikely"], false, replaced(line.text, "um", "nm"));
            }
            let bare = line.text.replacen(&format!("{number} {unit}"), number, 1);
            slip("unit of a thickness left out", &["unit.missing"], false, Some(bare));
            if number.contains('.') {
                let comma = line.text.replacen(number, &number.replace('.', ","), 1);
                slip("decimal comma", &["number.decimal-comma"], false, Some(comma));
            }
        }
        if layer && line.text.contains(" /cm3") {
            slip(
                "unit of a doping left out",
                &["unit.missing"],
                false,
                Some(line.text.replacen(" /cm3", "", 1)),
            );
            slip("/cm2 for /cm3", &["unit.dimension"], false, Some(line.text.replacen("/cm3", "/cm2", 1)));
            slip("/m3 for /cm3", &["unit.unlikely"], false, Some(line.text.replacen("/cm3", "/m3", 1)));
        }
        if in_junction && ["emitter", "base", "window", "bsf"].contains(&first) {
            let codes: &[&str] = &["polarity.same", "polarity.flipped"];
            slip("n and p exchanged in a layer", codes, false, exchanged(line.text));
        }
        if line.is_within("tunnel") && first == "layer" {
            slip("n and p exchanged in a tunnel layer", &["tunnel.polarity"], false, exchanged(line.text));
        }
        for (material, typed) in [
            ("GaAs", "GaAS"),
            ("GaInP", "GalnP"),
            ("AlInP", "AllnP"),
            ("AlGaInP", "AlGaIP"),
            ("Ge", "Gee"),
            ("MgF2", "MgF"),
            ("ZnS", "ZnSS"),
        ] {
            if layer && words.get(1) == Some(&material) {
                let codes: &[&str] = &["name.unknown", "formula.unknown-element"];
                slip("typo in a material", codes, false, replaced(line.text, material, typed));
            }
        }
        if ["junction", "window", "emitter", "base", "tunnel", "conditions", "fingers", "wafer"]
            .contains(&first)
            && !line.within.is_empty()
        {
            let mut typed = first.to_owned();
            typed.remove(1);
            let codes: &[&str] = &["name.unknown", "syntax.unexpected"];
            slip("typo in a word", codes, false, replaced(line.text, first, &typed));
        }
        if first == "conditions" {
            let name = words[1].trim_end_matches(',');
            slip(
                "typo in a condition",
                &["name.unknown"],
                false,
                replaced(line.text, name, &format!("{name}x")),
            );
        }
        if in_junction && ["emitter", "base"].contains(&first) {
            let wrong = |from: &str, to: &str| {
                (words.get(1) == Some(&from)).then(|| replaced(line.text, from, to)).flatten()
            };
            slip(
                "wrong family: InP for GaAs",
                &["lattice.mismatch"],
                false,
                wrong("GaAs", "InP").filter(|_| first == "base"),
            );
            slip(
                "wrong family: AlInP for GaInP",
                &["gap.indirect-absorber"],
                false,
                wrong("GaInP", "AlInP").filter(|_| first == "base"),
            );
            slip(
                "wrong family: GaInAs for GaInP",
                &["gap.order", "gap.equal"],
                false,
                wrong("GaInP", "GaInAs").filter(|_| first == "base"),
            );
        }
        if in_junction
            && first == "base"
            && words.get(1) == Some(&"GaInP")
            && words.get(2) == Some(&"matched")
        {
            // Matched to GaAs and to Ge: In 0.484 and 0.495; one per cent more.
            for off in ["GaInP with In 0.474", "GaInP with In 0.505"] {
                slip(
                    "composition off by 1 %",
                    &["lattice.mismatch"],
                    false,
                    Some(line.text.replacen("GaInP matched", off, 1)),
                );
            }
        }
        if first == "temperature" && line.text.contains("degC") {
            slip(
                "unit of a temperature left out",
                &["unit.missing"],
                false,
                Some(line.text.replacen(" degC", "", 1)),
            );
            slip(
                "K for degC",
                &["unit.unlikely"],
                false,
                (words[1] < "60").then(|| line.text.replacen("degC", "K", 1)),
            );
        }
        if line.text.contains(" times") && first == "concentration" {
            slip("`times` left out", &["unit.unlikely"], false, Some(line.text.replacen(" times", "", 1)));
        }
        if line.text.contains("ohm cm2") {
            slip(
                "ohm for ohm cm2",
                &["unit.dimension"],
                false,
                Some(line.text.replacen("ohm cm2", "ohm", 1)),
            );
        }
        if ["fingers", "voltage", "optics"].contains(&first) && line.text.contains(" %") {
            let codes: &[&str] = &["unit.unlikely", "unit.missing", "value.range", "unit.dimension"];
            slip("percent sign left out", codes, false, Some(line.text.replacen(" %", "", 1)));
        }
        if line.text.contains("of gap 2.1 eV") {
            slip("gap in nm", &["unit.dimension"], false, Some(line.text.replacen("2.1 eV", "590 nm", 1)));
            slip(
                "gap out of reach",
                &["gap.unreachable"],
                false,
                Some(line.text.replacen("2.1 eV", "2.9 eV", 1)),
            );
        }
        if first == "light" {
            slip("Cyrillic letter", &["name.look-alike"], false, Some(line.text.replacen('A', "А", 1)));
        }
        if first == "require" && words[1] == "efficiency" && words[2] == ">=" {
            slip(
                "more asked than there is",
                &["require.failed"],
                true,
                Some(line.text.replacen(words[3], "70", 1)),
            );
        }
        if in_junction && ["window", "bsf"].contains(&first) {
            let other = if first == "window" { "bsf" } else { "window" };
            slip("window and bsf exchanged", &["structure.order"], false, replaced(line.text, first, other));
        }
    }
    all
}

/// Slips that move or drop more than a line.
fn block_slips(demo: &Demo) -> Vec<Mutant> {
    let mut all = Vec::new();
    let lines = lines(&demo.text);
    let mut junctions: Vec<(usize, std::ops::Range<usize>)> = Vec::new();
    let layered = |range: &std::ops::Range<usize>| {
        lines[range.clone()].iter().any(|line| ["base", "wafer"].contains(&line.first()))
    };
    for (at, line) in lines.iter().enumerate() {
        let block = demo.block(at);
        match line.first() {
            "stack" => junctions.clear(),
            "junction" => {
                if let Some((above, upper)) = junctions.last() {
                    let text: Vec<&str> = demo.text.lines().collect();
                    let order = [
                        &text[..*above],
                        &text[block.clone()],
                        &text[upper.end..at],
                        &text[upper.clone()],
                        &text[block.end..],
                    ];
                    all.push(Mutant {
                        kind: "two junctions swapped",
                        what: format!("lines {} and {}", above + 1, at + 1),
                        text: order.concat().join("\n") + "\n",
                        codes: &["gap.order"],
                        evaluate: false,
                    });
                    let name = text[*above].split_whitespace().nth(1).unwrap_or_default();
                    let own = line.words()[1];
                    all.push(Mutant {
                        kind: "two things of one name",
                        what: format!("line {}: {name}", at + 1),
                        text: demo.with(at, replaced(line.text, own, name).as_deref()),
                        codes: &["name.duplicate"],
                        evaluate: false,
                    });
                }
                if layered(&block) {
                    let text: String = demo
                        .text
                        .lines()
                        .enumerate()
                        .map(|(index, line)| {
                            let turned = block.contains(&index).then(|| exchanged(line)).flatten();
                            turned.unwrap_or_else(|| line.to_owned()) + "\n"
                        })
                        .collect();
                    all.push(Mutant {
                        kind: "n and p exchanged in a junction",
                        what: format!("line {}", at + 1),
                        text,
                        codes: &["polarity.flipped"],
                        evaluate: false,
                    });
                }
                junctions.push((at, block));
            }
            "tunnel" | "recombination" | "place" if !line.is_within("part") => {
                let kept = demo.text.lines().enumerate().filter(|(index, _)| !block.contains(index));
                all.push(Mutant {
                    kind: "a tunnel junction dropped",
                    what: format!("line {}", at + 1),
                    text: kept.fold(String::new(), |text, (_, line)| text + line + "\n"),
                    codes: &["tunnel.missing"],
                    evaluate: false,
                });
            }
            "metal" => {
                let text = demo.with(at, None);
                let first = lines.iter().position(|line| line.first() == "junction").unwrap_or(0);
                let moved = text.lines().enumerate().fold(String::new(), |out, (index, old)| {
                    let here = if index == first {
                        format!("{}\n", line.text.replace(" Au", " Au 200 nm"))
                    } else {
                        String::new()
                    };
                    out + &here + old + "\n"
                });
                all.push(Mutant {
                    kind: "the metal on the sunny side",
                    what: format!("line {}", at + 1),
                    text: moved,
                    codes: &["structure.order"],
                    evaluate: false,
                });
            }
            "}" => all.push(Mutant {
                kind: "a closing brace left out",
                what: format!("line {}", at + 1),
                text: demo.with(at, None),
                codes: &["syntax.unclosed"],
                evaluate: false,
            }),
            _ => {}
        }
    }
    all
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
