//! What was meant of a layer's material and spilled over into the rest of its line: one slip, of
//! which the parts must not be told one by one.

use crate::finding::Finding;
use crate::resolve::Resolver;
use crate::resolve::materials::MODEL_PROPERTIES;
use crate::resolve::tree::LayerNode;
use crate::source::Span;
use crate::syntax::{Attribute, MaterialPhrase};

/// What of a line was told of at once.
#[derive(Default)]
pub(super) struct Spilled {
    /// Attributes, by place, that mean nothing more.
    pub(super) attributes: Vec<usize>,
    /// Whether the material cannot be known.
    pub(super) material: bool,
}

/// Looks for it and reports what it finds.
pub(super) fn over(resolver: &mut Resolver<'_, '_>, node: &LayerNode<'_>) -> Spilled {
    let Some((phrase, _)) = node.material else { return Spilled::default() };
    let glued = glued(phrase, node);
    if glued.is_empty() {
        of_a_model(resolver, phrase, node)
    } else {
        broken_formula(resolver, (phrase, node), glued)
    }
}

/// A value or a bare word; the other attributes never belong to a material.
fn span_of(attribute: &Attribute) -> Option<Span> {
    match attribute {
        Attribute::Value(value) => Some(value.span),
        Attribute::Word(word) => Some(word.span),
        _ => None,
    }
}

/// Attributes that follow the material without a space: the rest of a formula that broke.
fn glued(phrase: &MaterialPhrase, node: &LayerNode<'_>) -> Vec<usize> {
    let mut end = phrase.span.end;
    let follows = |(_, (attribute, _)): &(usize, &(&Attribute, usize))| {
        let span = span_of(attribute).filter(|span| span.source == phrase.span.source && span.start == end);
        span.is_some_and(|span| {
            end = span.end;
            true
        })
    };
    node.attributes.iter().enumerate().take_while(follows).map(|(at, _)| at).collect()
}

/// `Ga1.2In-0.2P`: read as `Ga1.2In` less 0.2, then `P`.
fn broken_formula(
    resolver: &mut Resolver<'_, '_>,
    (phrase, node): (&MaterialPhrase, &LayerNode<'_>),
    glued: Vec<usize>,
) -> Spilled {
    let last = glued.last().and_then(|at| span_of(node.attributes[*at].0)).unwrap_or(phrase.span);
    let whole = phrase.name.span.to(last);
    let text = resolver.text(whole);
    let rest = resolver.text(Span { start: phrase.span.end, ..last });
    let finding = if rest.starts_with(['-', '\u{2212}']) {
        Finding::error("formula.composition", format!("`{text}` has a fraction below 0"))
            .at(Span { start: phrase.span.end, ..last }, "no fraction")
    } else {
        Finding::error("formula.unknown-element", format!("`{text}` cannot be read as a formula"))
            .at(Span { start: phrase.span.end, ..last }, "neither a symbol nor a fraction")
    };
    resolver.scope.report(finding.help("write fractions from 0 to 1 that sum to 1, such as `Ga0.51In0.49P`"));
    Spilled { attributes: glued, material: true }
}

/// `direct of gap 1.4 eV coefficient 3e4 /cm/eV^0.5 urbach 8 meV`: those belong into the block.
fn of_a_model(resolver: &mut Resolver<'_, '_>, phrase: &MaterialPhrase, node: &LayerNode<'_>) -> Spilled {
    let mut told: Vec<usize> = Vec::new();
    let mut statements: Vec<Span> = Vec::new();
    for (at, (attribute, _)) in node.attributes.iter().enumerate() {
        let Attribute::Word(word) = attribute else { continue };
        if !MODEL_PROPERTIES.contains(&word.value.as_str()) {
            continue;
        }
        told.push(at);
        statements.push(word.span);
        if let Some((Attribute::Value(value), _)) = node.attributes.get(at + 1) {
            told.push(at + 1);
            if let Some(span) = statements.last_mut() {
                *span = span.to(value.span);
            }
        }
    }
    let (Some(first), Some(last)) = (statements.first(), statements.last()) else {
        return Spilled::default();
    };
    let place = first.to(*last);
    let written: Vec<String> = statements.iter().map(|span| resolver.text(*span)).collect();
    let name = &phrase.name.value;
    let finding = if name == "direct" {
        Finding::error("material.statement", format!("`{}` stands on the line of `direct`", written[0]))
            .at(place, "belongs into the block of the layer")
            .help(format!("write `{{ {} }}` at the end of the line", written.join("; ")))
    } else {
        Finding::error("material.statement", format!("`{}` belongs to `direct`, not to `{name}`", written[0]))
            .at(place, "a material has its own")
            .help("delete it, or write `direct of gap …` instead of the material")
    };
    resolver.scope.report(finding);
    Spilled { attributes: told, material: name == "direct" }
}
