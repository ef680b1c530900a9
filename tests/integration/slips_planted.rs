//! Realistic slips and the codes that must tell them.

use super::slips::Demo;

/// A demo with one slip in it.
pub(crate) struct Mutant {
    pub(crate) kind: &'static str,
    pub(crate) what: String,
    pub(crate) text: String,
    /// Codes of which one must be found more often than before.
    pub(crate) codes: &'static [&'static str],
    pub(crate) evaluate: bool,
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
pub(crate) fn line_slips(demo: &Demo) -> Vec<Mutant> {
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
pub(crate) fn block_slips(demo: &Demo) -> Vec<Mutant> {
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
