//! A stack's body with its parts put in: layers and groups, each with the block its names are
//! looked up in.

use std::collections::HashMap;
use std::sync::OnceLock;

use crate::design::Duty;
use crate::finding::Finding;
use crate::resolve::load::Items;
use crate::resolve::properties::{self, Kept};
use crate::resolve::quantities::Scope;
use crate::resolve::{names, parts};
use crate::source::{Sources, Span, Spanned};
use crate::syntax::{
    Attribute, Block, Group, GroupKind, LayerStatement, MaterialPhrase, Property, Statement,
};

/// The most layers one stack may come to, with parts and repeats put in.
pub(super) const MOST_LAYERS: usize = 20_000;

/// One layer as stated, with what a stack made like another said of it later.
#[derive(Clone, Debug)]
pub(super) struct LayerNode<'s> {
    pub(super) duty: &'s Spanned<String>,
    pub(super) alias: Option<&'s Spanned<String>>,
    pub(super) material: Option<(&'s MaterialPhrase, usize)>,
    pub(super) attributes: Vec<(&'s Attribute, usize)>,
    /// Blocks in the order stated; a later one overrides an earlier one by property.
    pub(super) blocks: Vec<(&'s Block, usize)>,
    pub(super) span: Span,
    /// Stands for a statement that could not be read, which was reported: it keeps the layer's
    /// place, so that no rule misses it.
    pub(super) unreadable: bool,
}

/// A junction, a tunnel, a recombination contact, a repeat, or a placed part of several layers.
#[derive(Clone, Debug)]
pub(super) struct GroupNode<'s> {
    /// `None` for a placed part.
    pub(super) kind: Option<GroupKind>,
    pub(super) name: Option<&'s Spanned<String>>,
    pub(super) count: Option<(&'s crate::syntax::Value, usize)>,
    pub(super) words: &'s [Spanned<String>],
    pub(super) nodes: Vec<Node<'s>>,
    pub(super) properties: Vec<(&'s Property, usize)>,
    pub(super) head: Span,
    pub(super) span: Span,
}

/// A layer or a group.
#[derive(Clone, Debug)]
pub(super) enum Node<'s> {
    Layer(Box<LayerNode<'s>>),
    Group(Box<GroupNode<'s>>),
}

/// A stack's body.
#[derive(Clone, Debug, Default)]
pub(super) struct Body<'s> {
    pub(super) nodes: Vec<Node<'s>>,
    /// Properties in force, by name once each.
    pub(super) properties: Vec<(&'s Property, usize)>,
    /// `require`, `seek`, `chart`, `vary`, `measured`, `accept`, `limit`.
    pub(super) requests: Vec<(&'s Statement, usize)>,
}

/// What is needed to put parts in.
pub(super) struct Expansion<'e, 's> {
    pub(super) scope: &'e mut Scope,
    pub(super) items: &'e Items<'s>,
    pub(super) sources: &'e Sources,
    /// Parts being placed, outermost first.
    pub(super) placing: Vec<&'s str>,
    /// Layers and placed parts so far.
    pub(super) layers: usize,
    pub(super) too_many: bool,
}

/// What stands in one block, sorted.
#[derive(Default)]
pub(super) struct Sorted<'s> {
    pub(super) nodes: Vec<Node<'s>>,
    pub(super) properties: Vec<(&'s Property, usize)>,
    pub(super) rest: Vec<(&'s Statement, usize)>,
    pub(super) broken: bool,
}

impl<'s> Expansion<'_, 's> {
    /// Sorts the statements of a block; its own names go into the open frame first, so that their
    /// order does not matter.
    pub(super) fn block(&mut self, block: &'s Block) -> Sorted<'s> {
        for statement in &block.statements {
            if let Statement::Let(item) = statement {
                self.scope.define(&item.name, &item.value);
            }
        }
        let frame = self.scope.here();
        let mut sorted = Sorted::default();
        for statement in &block.statements {
            match statement {
                Statement::Layer(layer) => sorted.nodes.extend(self.layer(layer)),
                Statement::Group(group) => sorted.nodes.push(self.group(group)),
                Statement::Place(place) => {
                    let placed = parts::place(self, place);
                    sorted.broken |= placed.is_empty();
                    sorted.nodes.extend(placed);
                }
                Statement::Property(property) => {
                    let nearly = nearly_structure(property);
                    sorted.nodes.extend(nearly.and_then(|word| placeholder(word, property.span)));
                    sorted.properties.push((property, frame));
                }
                Statement::Invalid(span) => {
                    sorted.broken = true;
                    let text = self.sources.get(span.source).slice(*span);
                    let word = text.trim_start().split(|c: char| !(c.is_alphanumeric() || c == '_')).next();
                    sorted.nodes.extend(word.and_then(|word| placeholder(word, *span)));
                }
                Statement::Let(_) => {}
                other => sorted.rest.push((other, frame)),
            }
        }
        sorted
    }

    fn layer(&mut self, layer: &'s LayerStatement) -> Option<Node<'s>> {
        if !self.room(layer.span) {
            return None;
        }
        let frame = self.scope.here();
        Some(Node::Layer(Box::new(LayerNode {
            duty: &layer.duty,
            alias: layer.alias.as_ref(),
            material: layer.material.as_ref().map(|phrase| (phrase, frame)),
            attributes: layer.attributes.iter().map(|attribute| (attribute, frame)).collect(),
            blocks: layer.block.iter().map(|block| (block, frame)).collect(),
            span: layer.span,
            unreadable: false,
        })))
    }

    fn group(&mut self, group: &'s Group) -> Node<'s> {
        let outer = self.scope.open();
        let sorted = self.block(&group.block);
        self.scope.close(outer);
        let place = match group.kind.value {
            GroupKind::Junction => "a `junction`",
            GroupKind::Tunnel => "a `tunnel`",
            GroupKind::Recombination => "a `recombination`",
            GroupKind::Repeat => "a `repeat`",
        };
        for (statement, _) in &sorted.rest {
            properties::misplaced(self.scope, statement, place);
        }
        Node::Group(Box::new(GroupNode {
            kind: Some(group.kind.value),
            name: group.name.as_ref(),
            count: group.count.as_ref().map(|count| (count, outer)),
            words: &group.words,
            nodes: filled(sorted.nodes, group.kind.value, sorted.broken, group.span),
            properties: sorted.properties,
            head: group.name.as_ref().map_or(group.kind.span, |name| group.kind.span.to(name.span)),
            span: group.span,
        }))
    }

    /// Counts one more layer or part; reports once where there are too many.
    pub(super) fn room(&mut self, span: Span) -> bool {
        self.layers += 1;
        if self.layers > MOST_LAYERS && !std::mem::replace(&mut self.too_many, true) {
            report_too_many(self.scope, span);
        }
        self.layers <= MOST_LAYERS
    }

    /// The body of a stack that is made like no other.
    pub(super) fn body(&mut self, block: &'s Block) -> Body<'s> {
        let sorted = self.block(block);
        let mut kept = Kept::default();
        let mut body = Body { nodes: sorted.nodes, ..Body::default() };
        for (property, frame) in sorted.properties {
            if known_of_stack(self.scope, property) && kept.keep(self.scope, property) {
                body.properties.push((property, frame));
            }
        }
        for (statement, frame) in sorted.rest {
            match statement {
                Statement::Replace(_) | Statement::Remove(_) | Statement::Insert(_) => {
                    let (word, span) = properties::head(statement);
                    self.scope.report(
                        Finding::error(
                            "structure.nesting",
                            format!("`{word}` changes a layer of another stack"),
                        )
                        .at(span, "this stack is made like no other")
                        .help("name the other one after the stack, such as `stack \"B\" like \"A\" { … }`"),
                    );
                }
                _ => body.requests.push((statement, frame)),
            }
        }
        body
    }
}

/// The layers of a junction; where nothing of it could be read, one that stands for them.
fn filled<'s>(mut nodes: Vec<Node<'s>>, kind: GroupKind, broken: bool, span: Span) -> Vec<Node<'s>> {
    let absorbs = |node: &Node<'_>| match node {
        Node::Layer(layer) => {
            Duty::of_word(&layer.duty.value).is_some_and(|duty| duty.collects() || duty == Duty::Wafer)
        }
        Node::Group(_) => true,
    };
    if broken && kind == GroupKind::Junction && !nodes.iter().any(absorbs) {
        nodes.extend(placeholder("absorber", span));
    }
    nodes
}

/// The duty or the group a mistyped word most likely opens.
fn nearly_structure(property: &Property) -> Option<&'static str> {
    let name = property.name.value.as_str();
    let known = OF_STACK.iter().chain(OF_JUNCTION).chain(OF_INTERCONNECT);
    if known.clone().any(|known| *known == name) {
        return None;
    }
    let structure = crate::syntax::DUTIES.iter().chain(&STRUCTURE[..3]);
    let near = names::near(name, known.chain(structure.clone()).copied())?;
    structure.copied().find(|word| *word == near)
}

/// A node without content in the place of one that could not be read.
fn placeholder<'s>(word: &str, span: Span) -> Option<Node<'s>> {
    static WORDS: OnceLock<Vec<Spanned<String>>> = OnceLock::new();
    let words = WORDS.get_or_init(|| {
        crate::syntax::DUTIES.iter().map(|word| Spanned::new((*word).to_owned(), Span::default())).collect()
    });
    if let Some(duty) = words.iter().find(|duty| duty.value == word) {
        return Some(Node::Layer(Box::new(LayerNode {
            duty,
            alias: None,
            material: None,
            attributes: Vec::new(),
            blocks: Vec::new(),
            span,
            unreadable: true,
        })));
    }
    let kind = match word {
        "junction" => GroupKind::Junction,
        "tunnel" => GroupKind::Tunnel,
        "recombination" => GroupKind::Recombination,
        _ => return None,
    };
    Some(Node::Group(Box::new(GroupNode {
        kind: Some(kind),
        name: None,
        count: None,
        words: &[],
        nodes: filled(Vec::new(), kind, true, span),
        properties: Vec::new(),
        head: span,
        span,
    })))
}

/// Reports that a stack is too large.
pub(super) fn report_too_many(scope: &mut Scope, span: Span) {
    scope.report(
        Finding::error("value.range", format!("the stack comes to more than {MOST_LAYERS} layers"))
            .at(span, "one layer too many")
            .help("place fewer parts, or repeat them less often"),
    );
}

/// What a junction states of itself.
pub(super) const OF_JUNCTION: &[&str] = &["voltage", "shunt", "breakdown", "texture", "note"];

/// What a tunnel junction states of itself.
pub(super) const OF_INTERCONNECT: &[&str] = &["resistance", "peak", "valley", "note"];

/// What a recombination contact states of itself.
pub(super) const OF_RECOMBINATION: &[&str] = &["resistance", "note"];

/// Properties a stack's body takes.
pub(super) const OF_STACK: &[&str] = &[
    "area",
    "concentration",
    "conditions",
    "distance",
    "fingers",
    "fluence",
    "gap_narrowing",
    "growth",
    "incidence",
    "irradiance",
    "light",
    "luminescent_coupling",
    "note",
    "optics",
    "photon_recycling",
    "samples",
    "season",
    "temperature",
    "terminals",
    "texture",
];

/// Whether a stack's body takes the property; a slip for a layer's or a group's word counts.
pub(super) fn known_of_stack(scope: &mut Scope, property: &Property) -> bool {
    let name = &property.name;
    if OF_STACK.contains(&name.value.as_str()) {
        return true;
    }
    let structural = crate::syntax::DUTIES.iter().chain(STRUCTURE);
    let known = OF_STACK.iter().chain(structural).copied();
    scope.report(near_or(name, "a stack", known, "write a layer such as `coat MgF2 95 nm`, or a `junction`"));
    false
}

/// Words that open a statement of another form.
pub(super) const STRUCTURE: &[&str] = &[
    "junction",
    "tunnel",
    "recombination",
    "repeat",
    "place",
    "require",
    "seek",
    "chart",
    "vary",
    "measured",
    "accept",
    "limit",
    "remove",
    "insert",
    "let",
];

/// A word that means nothing in `place`, with the near one.
pub(super) fn near_or<'a>(
    name: &Spanned<String>,
    place: &str,
    known: impl Iterator<Item = &'a str>,
    otherwise: &str,
) -> Finding {
    let finding = Finding::error("name.unknown", format!("{place} has no `{}`", name.value));
    match names::near(&name.value, known) {
        Some(near) => finding
            .at(name.span, format!("did you mean `{near}`?"))
            .help(format!("write `{near}`"))
            .fix(name.span, near.clone(), names::alike(&name.value, &near)),
        None => finding.at(name.span, "an unknown word here").help(otherwise),
    }
}

/// The local names of the nodes of one container, same order: the alias or the name, else the
/// word, numbered where it stands more than once.
pub(super) fn local_names(nodes: &[Node<'_>]) -> Vec<String> {
    let word = |node: &Node<'_>| match node {
        Node::Layer(layer) => layer.duty.value.clone(),
        Node::Group(group) => group.kind.map_or("part", properties::group_word).to_owned(),
    };
    let given = |node: &Node<'_>| match node {
        Node::Layer(layer) => layer.alias.map(|alias| alias.value.clone()),
        Node::Group(group) => group.name.map(|name| name.value.clone()),
    };
    numbered(nodes.iter().map(|node| given(node).ok_or_else(|| word(node))))
}

/// Names that were given, and words numbered from 1 where they stand more than once.
pub(super) fn numbered(all: impl Iterator<Item = Result<String, String>>) -> Vec<String> {
    let all: Vec<_> = all.collect();
    let mut total: HashMap<&str, usize> = HashMap::new();
    for word in all.iter().filter_map(|name| name.as_ref().err()) {
        *total.entry(word).or_default() += 1;
    }
    let mut seen: HashMap<&str, usize> = HashMap::new();
    all.iter()
        .map(|name| match name {
            Ok(given) => given.clone(),
            Err(word) if total.get(word.as_str()) == Some(&1) => word.clone(),
            Err(word) => {
                let number = seen.entry(word).or_default();
                *number += 1;
                format!("{word}{number}")
            }
        })
        .collect()
}
