//! The view model: everything a template may show, already in words.
//!
//! Templates hold no arithmetic and format no number. Whatever comes from the user is a
//! [`Text`], which reaches a template as `{ html, md, plain }`, the first two escaped; the rest
//! is our own words. A folder of a user's own templates is written against this.

use serde::Serialize;

use crate::report::ReportInput;
use crate::report::context::Context;
use crate::report::figure::{Figure, section};
use crate::report::number::{celsius, short};
use crate::report::text::{Text, visible};

pub mod account;
pub mod bands;
pub mod carriers;
pub mod cautions;
pub mod charts;
pub mod conditions;
pub mod dark;
pub mod electrical;
pub mod findings;
pub mod further;
pub mod gap;
pub mod layers;
pub mod measured;
pub mod optical;
pub mod parts;
pub mod sources;
pub mod verdict;

pub use parts::{Beside, Column, Fold, Group, Item, Section, Table};
use sources::Sources;

/// One sheet. Sections come in reading order; an empty one has neither figures, tables nor items
/// and is left out by the templates.
#[derive(Clone, Debug, Serialize)]
pub struct Sheet {
    /// What the stack is called.
    pub name: Text,
    /// `long` where the name needs smaller letters.
    pub name_class: &'static str,
    /// What the file says about it.
    pub note: Option<Text>,
    /// The block beside the title: file, design, light, …
    pub block: Vec<Pair>,
    /// The band over the title, as decoration: for wide and for narrow screens.
    pub selvedge: [String; 2],
    /// Whether every requirement is met, in words and as a table.
    pub verdict: verdict::Verdict,
    /// Efficiency, voltage, current by condition.
    pub headline: Section,
    /// The cross-section.
    pub stack: Section,
    /// What was found, and what the file accepts.
    pub findings: findings::FindingsView,
    /// Every layer as resolved.
    pub layers: Section,
    /// Gap against mismatch to the wafer.
    pub gap: Section,
    /// Photon current by destination, and quantum efficiency.
    pub light: Section,
    /// Minority carriers of each layer.
    pub carriers: Section,
    /// Current against voltage.
    pub curves: Section,
    /// Power, line by line.
    pub ledger: Section,
    /// Conditions side by side.
    pub conditions: Section,
    /// Measurements over the prediction.
    pub measured: Section,
    /// Charts asked for.
    pub charts: Section,
    /// Energy over weighted conditions.
    pub energy: Section,
    /// Band edges through the stack.
    pub bands: Section,
    /// Models used and their blind spots.
    pub models: Section,
    /// Defaults that were used.
    pub assumptions: Section,
    /// What can hurt.
    pub cautions: Section,
    /// Where numbers come from.
    pub sources: Section,
    /// What each box for a signature is for.
    pub signatures: Vec<Signature>,
    /// Last lines.
    pub footer: Vec<Text>,
    /// Name and first digits of the design's hash, for the head of printed pages.
    pub running: String,
    /// Sections that are there, for the list of contents.
    pub contents: Vec<Link>,
}

/// A term and its value.
#[derive(Clone, Debug, Serialize)]
pub struct Pair {
    /// `file`
    pub term: &'static str,
    /// Its value.
    pub value: Text,
}

/// A box to sign.
#[derive(Clone, Debug, Serialize)]
pub struct Signature {
    /// `checked`
    pub role: &'static str,
    /// What signing means.
    pub meaning: &'static str,
}

/// An entry of the list of contents.
#[derive(Clone, Debug, Serialize)]
pub struct Link {
    /// Of the section.
    pub id: &'static str,
    /// Its heading.
    pub heading: &'static str,
}

impl Sheet {
    /// Every section but the verdict and the findings, in reading order.
    pub fn sections(&self) -> impl Iterator<Item = &Section> {
        [
            &self.headline,
            &self.stack,
            &self.layers,
            &self.gap,
            &self.light,
            &self.carriers,
            &self.curves,
            &self.ledger,
            &self.conditions,
            &self.measured,
            &self.charts,
            &self.energy,
            &self.bands,
            &self.models,
            &self.assumptions,
            &self.cautions,
            &self.sources,
        ]
        .into_iter()
    }

    /// Every figure, in reading order.
    pub fn figures(&self) -> impl Iterator<Item = &Figure> {
        self.sections().flat_map(Section::drawings)
    }

    fn sections_mut(&mut self) -> impl Iterator<Item = &mut Section> {
        [
            &mut self.headline,
            &mut self.stack,
            &mut self.layers,
            &mut self.gap,
            &mut self.light,
            &mut self.carriers,
            &mut self.curves,
            &mut self.ledger,
            &mut self.conditions,
            &mut self.measured,
            &mut self.charts,
            &mut self.energy,
            &mut self.bands,
            &mut self.models,
            &mut self.assumptions,
            &mut self.cautions,
            &mut self.sources,
        ]
        .into_iter()
    }

    /// Numbers the figures in reading order; the same under a further condition has the number of
    /// the first with the condition's behind it.
    fn number_figures(&mut self) {
        let mut kinds: Vec<&'static str> = Vec::new();
        for figure in self.sections_mut().flat_map(Section::drawings_mut) {
            figure.number = match figure.further {
                Some(condition) => {
                    let at = kinds.iter().position(|kind| *kind == figure.kind).unwrap_or(0);
                    format!("{}.{}", at + 1, condition + 1)
                }
                None => {
                    kinds.push(figure.kind);
                    kinds.len().to_string()
                }
            };
        }
    }
}

/// Prepares the sheet; `None` where no condition was evaluated.
pub fn sheet(input: &ReportInput<'_>) -> Option<Sheet> {
    let context = Context::new(input)?;
    let mut sources = Sources::new(&context);
    let name = visible(&input.design.name.value);
    let hash = hash_words(&input.results.design_hash);
    let selvedge = [(1180.0, 20.0, "fig selvedge wide"), (358.0, 14.0, "fig selvedge slim")]
        .map(|(w, h, class)| section::selvedge(&context, (w, h)).decoration(class));
    let mut sheet = Sheet {
        name: Text::of(name.clone()),
        name_class: if name.chars().count() > 48 { "long" } else { "" },
        note: input.design.note.as_ref().map(|note| Text::of(note.value.clone())),
        block: block(&context, &hash),
        selvedge,
        verdict: verdict::verdict(&context),
        headline: electrical::headline(&context),
        stack: layers::stack(&context),
        findings: findings::findings(&context),
        layers: layers::layers(&context, &mut sources),
        gap: gap::gap(&context),
        light: optical::light(&context),
        carriers: carriers::carriers(&context),
        curves: electrical::curves(&context),
        ledger: account::section(&context),
        conditions: conditions::conditions(&context),
        measured: measured::measured(&context),
        charts: charts::charts(&context),
        energy: charts::energy(&context),
        bands: bands::bands(&context),
        models: sources::models(&context, &mut sources),
        assumptions: assumptions(&context),
        cautions: cautions::cautions(&context),
        sources: sources.section(),
        signatures: vec![
            Signature { role: "designed", meaning: "the file says what is meant" },
            Signature { role: "checked", meaning: "sources, models and findings were read" },
            Signature { role: "released", meaning: "may be grown and built" },
        ],
        footer: footer(&context),
        running: format!("{}, design {hash}", crate::report::width::fit(&name, 10.0, false, 420.0)),
        contents: Vec::new(),
    };
    sheet.number_figures();
    sheet.contents = contents(&sheet);
    Some(sheet)
}

fn contents(sheet: &Sheet) -> Vec<Link> {
    let mut out = Vec::new();
    for section in sheet.sections() {
        if section.id == "layers" {
            out.push(Link { id: "findings", heading: "Findings" });
        }
        if section.is_there() {
            out.push(Link { id: section.id, heading: section.heading });
        }
    }
    out.push(Link { id: "signed", heading: "Signed for" });
    out
}

/// The first twelve digits of a hash in groups of four.
fn hash_words(hash: &str) -> String {
    let digits: Vec<char> = hash.chars().filter(char::is_ascii_hexdigit).take(12).collect();
    digits.chunks(4).map(|four| four.iter().collect::<String>()).collect::<Vec<_>>().join(" ")
}

fn block(context: &Context<'_>, hash: &str) -> Vec<Pair> {
    let design = context.design;
    let growth = match design.growth {
        crate::design::Growth::Upright => "upright",
        crate::design::Growth::Inverted => "inverted",
    };
    let wafer = design.layers.iter().find(|layer| layer.duty == crate::design::Duty::Wafer);
    let growth = match wafer.and_then(|wafer| wafer.material.as_ref()) {
        Some(material) => Text::of(format!("{growth} on ")).then(Text::material(&material.label)),
        None => Text::of("no wafer: a limit study"),
    };
    let mut lights: Vec<&str> = Vec::new();
    for condition in &context.results.conditions {
        if !lights.contains(&condition.light.as_str()) {
            lights.push(&condition.light);
        }
    }
    let terminals = if context.separate() { "one pair a junction" } else { "two, in series" };
    let mut out = vec![
        Pair { term: "file", value: Text::of(context.results.source.clone()) },
        Pair { term: "design", value: Text::code(hash) },
        Pair { term: "written by", value: Text::of(context.results.tool.clone()) },
        Pair { term: "growth", value: growth },
        Pair { term: "light", value: Text::of(lights.join(", ")) },
        Pair { term: "terminals", value: Text::of(terminals) },
    ];
    if hash.is_empty() {
        out.remove(1);
    }
    out
}

/// `AM1.5G, 25 °C, one sun`
pub(crate) fn condition_words(context: &Context<'_>, result: &crate::results::ConditionResult) -> String {
    let mut out = format!("{}, {}", visible(&result.light), celsius(result.temperature_k));
    let times = result.concentration;
    if (times - 1.0).abs() > 1e-9 {
        out.push_str(&format!(", {} times", short(times)));
    } else {
        out.push_str(", one sun");
    }
    if let Some(condition) = context.condition(result) {
        if condition.incidence_rad > 0.0 {
            let degrees = short(condition.incidence_rad.to_degrees());
            out.push_str(&format!(", at {degrees}° from the normal"));
        }
        if let Some(distance) = condition.distance_au {
            let au = short(distance);
            out.push_str(&format!(", {au}\u{a0}au from the sun"));
        }
    }
    out
}

fn assumptions(context: &Context<'_>) -> Section {
    let mut section = Section::new("assumptions", "Assumptions");
    let all = &context.design.assumptions;
    if all.is_empty() {
        return section;
    }
    section.lede = Some(Text::of(
        "The file leaves these open; each default that was used stands here, and a statement of the file replaces it.",
    ));
    section.items = all.iter().map(|words| Item { head: Text::new(), body: Text::message(words) }).collect();
    section
}

fn footer(context: &Context<'_>) -> Vec<Text> {
    let results = context.results;
    let mut out = vec![Text::of(
        "All figures are predictions of idealised models, not measurements. Whoever signs has read the models, the findings and the cautions.",
    )];
    let mut last = Text::of(format!("{}, from ", visible(&results.tool))).c(results.source.clone());
    if !results.design_hash.is_empty() {
        last = last.p("; design ").c(results.design_hash.clone());
    }
    out.push(last.p("."));
    out
}
