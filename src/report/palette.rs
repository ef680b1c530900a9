//! The colours and line styles of the figures, as one table of classes.
//!
//! SVG files must read in programs that know neither custom properties nor `@media`, so every
//! class has literal light colours, and dark ones in a media block that they may skip. Solid
//! makes current or power, hatched serves or is lost: colour is never the only mark. Neighbouring
//! junctions alternate dark and light fills so that greyscale keeps them apart.

use std::collections::BTreeSet;
use std::fmt::Write as _;

/// Colours of one junction on paper and on dark.
#[derive(Clone, Copy, Debug)]
pub struct JunctionColours {
    /// Area.
    pub fill: &'static str,
    /// Outline of the area, curve, bracket, hatch.
    pub line: &'static str,
    /// Its name on the ground.
    pub text: &'static str,
    /// Words on the area.
    pub on_fill: &'static str,
}

/// What a sheet is set on, and with.
#[derive(Clone, Copy, Debug)]
pub struct Theme {
    /// Ground.
    pub paper: &'static str,
    /// Ground of a marked row.
    pub wash: &'static str,
    /// Rules that only decorate.
    pub hair: &'static str,
    /// Words, axes of tables.
    pub ink: &'static str,
    /// Secondary words, axes, hatches.
    pub quiet: &'static str,
    /// What fails, what limits.
    pub fail: &'static str,
    /// Power delivered.
    pub delivered: &'static str,
    /// Metal.
    pub metal: &'static str,
    /// Sunward first; from the seventh junction on they repeat.
    pub junctions: [JunctionColours; 6],
}

const fn junction(
    fill: &'static str,
    line: &'static str,
    text: &'static str,
    on_fill: &'static str,
) -> JunctionColours {
    JunctionColours { fill, line, text, on_fill }
}

/// On paper, and in print.
pub const LIGHT: Theme = Theme {
    paper: "#fdfdfb",
    wash: "#f1f2ef",
    hair: "#d3d8db",
    ink: "#1b232c",
    quiet: "#4c5762",
    fail: "#a3261f",
    delivered: "#33404d",
    metal: "#59646f",
    junctions: [
        junction("#2d4a94", "#2d4a94", "#2d4a94", "#ffffff"),
        junction("#d9a62e", "#a87607", "#7a5500", "#1b232c"),
        junction("#1f7f74", "#1a6d63", "#16635a", "#ffffff"),
        junction("#c9b8d9", "#7d619b", "#69508a", "#1b232c"),
        junction("#5b2b4f", "#5b2b4f", "#5b2b4f", "#ffffff"),
        junction("#dd9a75", "#a35c33", "#8a4a25", "#1b232c"),
    ],
};

/// On a dark screen.
pub const DARK: Theme = Theme {
    paper: "#12171c",
    wash: "#1b2229",
    hair: "#36404a",
    ink: "#e8ebec",
    quiet: "#a9b3bc",
    fail: "#ff8f82",
    delivered: "#c6d0d8",
    metal: "#87929c",
    junctions: [
        junction("#4163b0", "#6f94ea", "#9ab7fb", "#ffffff"),
        junction("#e3b54c", "#e3b54c", "#ecc468", "#12171c"),
        junction("#1c6f66", "#4fc0b2", "#6fd3c6", "#ffffff"),
        junction("#c9b8d9", "#c9b8d9", "#d6c8e4", "#12171c"),
        junction("#854573", "#d08cc0", "#e2a9d5", "#ffffff"),
        junction("#e0a17d", "#e0a17d", "#efb997", "#12171c"),
    ],
};

/// Dashes of the junctions' curves, sunward first.
const DASHES: [&str; 6] = ["", "8 2.5", "2.5 2", "9 2.5 2.5 2.5", "14 3", "9 2 2 2 2 2"];

const SANS: &str =
    "\"Segoe UI\",\"Helvetica Neue\",\"Noto Sans\",\"Liberation Sans\",Arial,system-ui,sans-serif";

/// Which of six styles a junction has.
pub fn style_number(junction: usize) -> usize {
    junction % 6 + 1
}

struct Rule {
    class: String,
    /// What does not depend on the theme.
    shape: String,
    light: String,
    dark: String,
}

/// Every class of the figures. `text` without a class comes first.
fn rules() -> Vec<Rule> {
    let mut rules = Vec::new();
    let mut rule = |class: &str, shape: &str, colour: &dyn Fn(&Theme) -> String| {
        rules.push(Rule {
            class: class.into(),
            shape: shape.into(),
            light: colour(&LIGHT),
            dark: colour(&DARK),
        });
    };
    let none = |_: &Theme| String::new();
    // Words.
    rule("s", "font-size:11.5px", &none);
    rule("sub", "font-size:9.5px", &none);
    rule("mid", "font-size:15px", &none);
    rule("big", "font-size:24px;font-weight:600", &none);
    rule("huge", "font-size:31px;font-weight:600", &none);
    rule("b", "font-weight:600", &none);
    rule("e", "text-anchor:end", &none);
    rule("m", "text-anchor:middle", &none);
    rule("q", "", &|t| format!("fill:{}", t.quiet));
    rule("bad", "", &|t| format!("fill:{}", t.fail));
    rule("od", "", &|t| format!("fill:{}", t.paper));
    rule("halo", "paint-order:stroke;stroke-width:3.5px;stroke-linejoin:round", &|t| {
        format!("stroke:{}", t.paper)
    });
    // Areas.
    rule("paper", "", &|t| format!("fill:{}", t.paper));
    rule("lay", "stroke-width:.8", &|t| format!("fill:{};stroke:{}", t.paper, t.quiet));
    rule("thru", "stroke-width:.8;stroke-dasharray:1.5 2.5", &|t| {
        format!("fill:{};stroke:{}", t.paper, t.quiet)
    });
    rule("fd", "", &|t| format!("fill:{}", t.delivered));
    rule("fm", "", &|t| format!("fill:{}", t.metal));
    rule("fbad", "", &|t| format!("fill:{}", t.fail));
    rule("mk", "stroke-width:1", &|t| format!("fill:{};stroke:{}", t.ink, t.paper));
    // Lines.
    rule("axis", "fill:none;stroke-width:.8", &|t| format!("stroke:{}", t.quiet));
    rule("hair", "fill:none;stroke-width:.8", &|t| format!("stroke:{}", t.hair));
    rule("zero", "fill:none;stroke-width:.8;stroke-dasharray:2 2", &|t| format!("stroke:{}", t.quiet));
    rule("eq", "fill:none;stroke-width:.9;stroke-dasharray:1.5 2.5", &|t| format!("stroke:{}", t.quiet));
    rule("lead", "fill:none;stroke-width:.7", &|t| format!("stroke:{}", t.quiet));
    rule("thin", "fill:none;stroke-width:.8", &|t| format!("stroke:{}", t.ink));
    rule("rule", "fill:none;stroke-width:1", &|t| format!("stroke:{}", t.ink));
    rule("pn", "fill:none;stroke-width:2.2", &|t| format!("stroke:{}", t.ink));
    rule("grid", "fill:none;stroke-width:.7;stroke-opacity:.5", &|t| format!("stroke:{}", t.paper));
    rule("cs", "fill:none;stroke-width:2.6;stroke-linejoin:round", &|t| format!("stroke:{}", t.ink));
    rule("cq", "fill:none;stroke-width:1.2;stroke-dasharray:4 3", &|t| format!("stroke:{}", t.quiet));
    rule("fam", "fill:none;stroke-width:1.1;stroke-linejoin:round", &|t| format!("stroke:{}", t.quiet));
    rule("famx", "fill:none;stroke-width:1.1;stroke-dasharray:4 3", &|t| format!("stroke:{}", t.quiet));
    rule("ring", "stroke-width:1.3", &|t| format!("fill:{};stroke:{}", t.paper, t.ink));
    for (index, dash) in DASHES.iter().enumerate().skip(1) {
        rule(
            &format!("d{}", index + 1),
            &format!("fill:none;stroke-width:1.6;stroke-dasharray:{dash}"),
            &|t| format!("stroke:{}", t.ink),
        );
    }
    // Bands of a map: the first junction's colour on the ground, ever more of it.
    for step in 0..=8u8 {
        rule(&format!("z{step}"), "stroke-width:.5;shape-rendering:crispEdges", &|t| {
            let colour = mixed(t.paper, t.junctions[0].line, 0.04 + 0.075 * f64::from(step));
            format!("fill:{colour};stroke:{colour}")
        });
    }
    rule("edge", "fill:none;stroke-width:1.8;stroke-linejoin:round", &|t| format!("stroke:{}", t.ink));
    rule("holds", "fill:none;stroke-width:4", &|t| format!("stroke:{}", t.ink));
    rule("blocks", "fill:none;stroke-width:4", &|t| format!("stroke:{}", t.fail));
    rule("level", "fill:none;stroke-width:.9;stroke-dasharray:7 2 1.5 2", &|t| format!("stroke:{}", t.quiet));
    rule("wash", "", &|t| format!("fill:{}", t.wash));
    rule("box", "fill:none;stroke-width:.8;stroke-dasharray:1.5 2.5", &|t| format!("stroke:{}", t.quiet));
    rule("tick", "fill:none;stroke-width:1.5", &|t| format!("stroke:{}", t.ink));
    rule("tickhalo", "fill:none;stroke-width:3.6", &|t| format!("stroke:{}", t.paper));
    // Hatches.
    rule("h", "fill:none;stroke-width:1", &|t| format!("stroke:{}", t.quiet));
    rule("ht", "fill:none;stroke-width:.7", &|t| format!("stroke:{}", t.quiet));
    rule("hd", "fill:none;stroke-width:2;stroke-linecap:round", &|t| format!("stroke:{}", t.quiet));
    for (index, dash) in DASHES.iter().enumerate() {
        let n = index + 1;
        let colours = move |t: &Theme| t.junctions[index];
        rule(&format!("f{n}"), "stroke-width:.8", &|t| {
            format!("fill:{};stroke:{}", colours(t).fill, colours(t).line)
        });
        let dash = if dash.is_empty() { String::new() } else { format!(";stroke-dasharray:{dash}") };
        rule(&format!("c{n}"), &format!("fill:none;stroke-width:2;stroke-linejoin:round{dash}"), &|t| {
            format!("stroke:{}", colours(t).line)
        });
        rule(&format!("br{n}"), "fill:none;stroke-width:2.4", &|t| format!("stroke:{}", colours(t).line));
        rule(&format!("i{n}"), "", &|t| format!("fill:{}", colours(t).text));
        rule(&format!("o{n}"), "", &|t| format!("fill:{}", colours(t).on_fill));
        rule(&format!("u{n}"), "fill:none;stroke-width:1.1", &|t| format!("stroke:{}", colours(t).on_fill));
        rule(&format!("g{n}"), "fill:none;stroke-width:.8", &|t| format!("stroke:{}", colours(t).on_fill));
        rule(&format!("hj{n}"), "fill:none;stroke-width:1.6", &|t| format!("stroke:{}", colours(t).line));
        rule(&format!("q{n}"), "fill:none;stroke-width:1", &|t| format!("stroke:{}", colours(t).line));
        rule(&format!("t{n}"), "fill-opacity:.22", &|t| format!("fill:{}", colours(t).fill));
        rule(&format!("mk{n}"), "stroke-width:1", &|t| format!("fill:{};stroke:{}", colours(t).fill, t.ink));
    }
    rules
}

/// `share` of colour `b` on `a`.
fn mixed(a: &str, b: &str, share: f64) -> String {
    let channel = |colour: &str, at: usize| {
        f64::from(colour.get(at..at + 2).and_then(|hex| u8::from_str_radix(hex, 16).ok()).unwrap_or(0))
    };
    let mix = |at: usize| (channel(a, at) * (1.0 - share) + channel(b, at) * share).round() as u8;
    format!("#{:02x}{:02x}{:02x}", mix(1), mix(3), mix(5))
}

/// The style of the figures: all classes, or those that occur in `used` (a drawing's text).
pub fn figure_css(used: Option<&str>) -> String {
    // Class lists are written by this crate with single spaces.
    let used: Option<BTreeSet<&str>> = used.map(|body| {
        body.split("class=\"")
            .skip(1)
            .filter_map(|rest| rest.split('"').next())
            .flat_map(|list| list.split(' '))
            .collect()
    });
    let wanted = |class: &str| used.as_ref().is_none_or(|used| used.contains(class));
    let rules: Vec<Rule> = rules().into_iter().filter(|rule| wanted(&rule.class)).collect();
    let mut css = format!(
        ".fig text{{font:12.5px {SANS};font-variant-numeric:tabular-nums lining-nums;fill:{}}}\n",
        LIGHT.ink
    );
    for rule in &rules {
        let both = [rule.shape.as_str(), rule.light.as_str()];
        let body: Vec<&str> = both.into_iter().filter(|part| !part.is_empty()).collect();
        let _ = writeln!(css, "{}{{{}}}", selector(&rule.class), body.join(";"));
    }
    let _ = writeln!(css, "@media screen and (prefers-color-scheme:dark){{\n.fig text{{fill:{}}}", DARK.ink);
    for rule in rules.iter().filter(|rule| !rule.dark.is_empty()) {
        let _ = writeln!(css, "{}{{{}}}", selector(&rule.class), rule.dark);
    }
    css.push_str("}\n");
    css
}

/// Classes of words must win over the rule for `text`.
fn selector(class: &str) -> String {
    format!(".fig .{class}")
}

/// The custom properties of the page: light, dark on screens only.
pub fn page_css() -> String {
    let block = |t: &Theme| {
        format!(
            "--paper:{};--wash:{};--hair:{};--ink:{};--quiet:{};--bad:{};--focus:{}",
            t.paper, t.wash, t.hair, t.ink, t.quiet, t.fail, t.junctions[0].text
        )
    };
    format!(
        ":root{{color-scheme:light dark;{}}}\n@media screen and (prefers-color-scheme:dark){{:root{{{}}}}}\n",
        block(&LIGHT),
        block(&DARK)
    )
}

/// WCAG 2.2 contrast ratio of two `#rrggbb` colours.
pub fn contrast(a: &str, b: &str) -> f64 {
    let (a, b) = (luminance(a), luminance(b));
    (a.max(b) + 0.05) / (a.min(b) + 0.05)
}

/// WCAG 2.2 relative luminance.
pub fn luminance(colour: &str) -> f64 {
    let channel = |at: usize| {
        let byte = colour.get(at..at + 2).and_then(|hex| u8::from_str_radix(hex, 16).ok()).unwrap_or(0);
        let c = f64::from(byte) / 255.0;
        if c <= 0.04045 { c / 12.92 } else { ((c + 0.055) / 1.055).powf(2.4) }
    };
    0.2126 * channel(1) + 0.7152 * channel(3) + 0.0722 * channel(5)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// WCAG 2.2, 1.4.3: 4.5 for words; 1.4.11: 3 for lines and areas that carry meaning.
    #[test]
    fn every_pair_that_is_read_has_contrast_aa() {
        for theme in [&LIGHT, &DARK] {
            for words in [theme.ink, theme.quiet, theme.fail] {
                for ground in [theme.paper, theme.wash] {
                    assert!(contrast(words, ground) >= 4.5, "{words} on {ground}");
                }
            }
            assert!(contrast(theme.paper, theme.delivered) >= 4.5);
            assert!(contrast(theme.metal, theme.paper) >= 3.0);
            for j in theme.junctions {
                assert!(contrast(j.text, theme.paper) >= 4.5, "{} on {}", j.text, theme.paper);
                assert!(contrast(j.on_fill, j.fill) >= 4.5, "{} on {}", j.on_fill, j.fill);
                assert!(contrast(j.line, theme.paper) >= 3.0, "{} on {}", j.line, theme.paper);
            }
        }
    }

    #[test]
    fn neighbouring_junctions_differ_in_greyscale() {
        for theme in [&LIGHT, &DARK] {
            for pair in theme.junctions.windows(2) {
                let ratio = contrast(pair[0].fill, pair[1].fill);
                assert!(ratio >= 1.9, "{} beside {}: {ratio:.2}", pair[0].fill, pair[1].fill);
            }
        }
    }

    #[test]
    fn the_ratio_is_the_one_of_the_standard() {
        // WCAG 2.2: black on white is 21:1; #767676 on white is the known 4.54:1.
        assert!((contrast("#000000", "#ffffff") - 21.0).abs() < 1e-9);
        assert!((contrast("#767676", "#ffffff") - 4.54).abs() < 0.005);
    }
}
