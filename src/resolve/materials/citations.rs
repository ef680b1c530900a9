//! Where the numbers of an item come from: `source`, `cite`, and what is said where they lack.

use crate::finding::Finding;
use crate::materials::{Origin, OriginKind};
use crate::resolve::materials::blocks::Reader;
use crate::resolve::materials::values::Arguments;
use crate::resolve::names;
use crate::source::Spanned;
use crate::syntax::{Property, Statement};

impl Reader<'_> {
    /// `source NAME "…"` and the `cite` of the body.
    pub(super) fn read_sources(&mut self, statements: &[&Property]) {
        for property in statements.iter().filter(|property| property.name.value == "source") {
            let mut arguments = Arguments::of(property);
            if let (Some(name), Some(text)) = (arguments.word(), arguments.text()) {
                self.sources.insert(name.value.clone(), text.value.clone());
                arguments.end(self.scope);
            } else {
                self.scope.report(
                    Finding::error("material.statement", "`source` needs a name and a text")
                        .at(property.span, "a name for the source, then its citation")
                        .help("write `source smith \"J. Smith, J. Appl. Phys. 1, 2 (2003)\"`"),
                );
            }
        }
        let whole = statements.iter().find(|property| property.name.value == "cite");
        self.whole = whole.and_then(|property| self.citation(property));
    }

    /// Records where a group comes from; a group without a citation is a finding.
    pub(super) fn origin(&mut self, group: &Property, what: &str) {
        let inner = group.block.iter().flat_map(|block| &block.statements);
        let cites: Vec<&Property> = inner
            .filter_map(|statement| match statement {
                Statement::Property(property) if property.name.value == "cite" => Some(property),
                _ => None,
            })
            .collect();
        let before = self.origins.len();
        for property in &cites {
            if let Some((kind, cite)) = self.citation(property) {
                self.origins.push(Origin { what: what.to_owned(), kind, cite });
            }
        }
        if self.origins.len() > before {
            return;
        }
        if let Some((kind, cite)) = self.whole.clone() {
            self.origins.push(Origin { what: what.to_owned(), kind, cite });
            return;
        }
        // Only these may stand without a block; of the others that was reported already.
        let alone = ["affinity", "density"].contains(&group.name.value.as_str());
        if cites.is_empty() && (alone || group.block.is_some()) {
            let name = &group.name.value;
            self.scope.report(
                Finding::error(
                    "material.no-citation",
                    format!("`{name}` does not say where its numbers come from"),
                )
                .at(group.name.span, "no `cite` in this group")
                .help(format!("add `cite \"…\"` to `{name}`, for example `cite measured \"own run 17\"`")),
            );
        }
    }

    /// `cite [measured | published | …] [source …] ["…"]`
    fn citation(&mut self, property: &Property) -> Option<(OriginKind, String)> {
        let mut arguments = Arguments::of(property);
        let (mut kind, mut parts) = (OriginKind::Stated, Vec::new());
        let mut first = true;
        loop {
            if let Some(text) = arguments.text() {
                parts.push(text.value.clone());
            } else if let Some(word) = arguments.word() {
                match (origin_kind(&word.value), self.sources.get(&word.value)) {
                    (Some(known), _) if first => kind = known,
                    (_, Some(text)) => parts.push(text.clone()),
                    _ => {
                        self.unknown_source(word);
                        return None;
                    }
                }
            } else {
                break;
            }
            first = false;
        }
        arguments.end(self.scope);
        if parts.is_empty() {
            self.scope.report(
                Finding::error("material.no-citation", "`cite` names no source")
                    .at(property.span, "a text is due")
                    .help("write `cite \"…\"` with the paper, the handbook or the run the numbers come from"),
            );
            return None;
        }
        Some((kind, parts.join("; ")))
    }

    fn unknown_source(&mut self, word: &Spanned<String>) {
        let kinds = ["measured", "published", "joined", "model", "estimate", "memory", "stated"];
        let known = self.sources.keys().map(String::as_str).chain(kinds);
        let otherwise = format!("write it as a text, or define it: `source {} \"…\"`", word.value);
        self.scope.report(names::unknown("source", word, known, &otherwise));
    }
}

fn origin_kind(word: &str) -> Option<OriginKind> {
    Some(match word {
        "measured" => OriginKind::Measured,
        "published" => OriginKind::Published,
        "joined" => OriginKind::Joined,
        "model" => OriginKind::Model,
        "estimate" => OriginKind::Estimate,
        "memory" => OriginKind::Memory,
        "stated" => OriginKind::Stated,
        _ => return None,
    })
}
