//! Sources, numbered in the order in which the sheet first needs them; models; lights.

use crate::report::context::{Context, Row};
use crate::report::number::ranges;
use crate::report::text::Text;
use crate::report::view::{Item, Section, Table};

/// The list of sources while the sheet is written.
#[derive(Clone, Debug)]
pub struct Sources {
    cites: Vec<String>,
    /// For each, what it was used for.
    uses: Vec<Vec<String>>,
    lights: Vec<(String, String)>,
}

impl Sources {
    /// Nothing numbered yet.
    pub fn new(context: &Context<'_>) -> Self {
        let lights = context
            .design
            .conditions
            .iter()
            .filter(|c| !c.light.cite.is_empty())
            .map(|c| (c.light.name.clone(), c.light.cite.clone()))
            .collect();
        Self { cites: Vec::new(), uses: Vec::new(), lights }
    }

    /// The number of a source, which is put at the end of the list where it is new.
    pub fn number(&mut self, cite: &str, used_for: &str) -> usize {
        let at = match self.cites.iter().position(|known| known == cite) {
            Some(at) => at,
            None => {
                self.cites.push(cite.to_string());
                self.uses.push(Vec::new());
                self.cites.len() - 1
            }
        };
        if !used_for.is_empty() && !self.uses[at].iter().any(|known| known == used_for) {
            self.uses[at].push(used_for.to_string());
        }
        at + 1
    }

    /// The numbers of a layer's origins, ascending, once each.
    pub fn of_layer(&mut self, row: &Row<'_>) -> String {
        let mut numbers: Vec<usize> = row
            .result
            .origins
            .iter()
            .filter(|origin| !origin.cite.is_empty())
            .map(|origin| self.number(&origin.cite, &origin.what))
            .collect();
        numbers.sort_unstable();
        numbers.dedup();
        ranges(&numbers, "\u{a0}")
    }

    /// The list.
    pub fn section(mut self) -> Section {
        for (name, cite) in std::mem::take(&mut self.lights) {
            self.number(&cite, &format!("spectrum {name}"));
        }
        let mut section = Section::new("sources", "Sources");
        section.numbered = true;
        section.items = self
            .cites
            .iter()
            .zip(&self.uses)
            .map(|(cite, uses)| {
                let uses = if uses.is_empty() {
                    String::new()
                } else {
                    format!(" ({})", uses.join(", ").replace('_', " "))
                };
                Item { head: Text::new(), body: Text::message(cite).p(uses) }
            })
            .collect();
        section
    }
}

/// Models used and what they do not see.
pub fn models(context: &Context<'_>, sources: &mut Sources) -> Section {
    let mut section = Section::new("models", "Models and blind spots");
    if context.results.models.is_empty() {
        return section;
    }
    section.lede = Some(Text::of(
        "The figures hold as far as these models do. One dimension, no grain boundaries, no lateral crowding of current beyond the stated series resistance.",
    ));
    let mut table = Table::new(
        Text::of("Each model that was used"),
        &["model", "what it does", "what it does not see", "source"],
    );
    table.kind = "roomy";
    for note in &context.results.models {
        let source =
            if note.cite.is_empty() { String::new() } else { sources.number(&note.cite, "").to_string() };
        table.row(vec![
            Text::code(note.name.clone()),
            Text::message(&note.does),
            Text::message(&note.blind_to),
            Text::of(source),
        ]);
    }
    section.tables.push(table);
    section
}
