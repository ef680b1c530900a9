//! Layers in order with their paths, junctions and interconnects, and all that is said of a layer
//! but its material.

use std::collections::HashMap;

use crate::design::{
    Design, Duty, Growth, Interconnect, InterconnectKind, Junction, Layer, LayerSpans, Place, Strain,
    Transport, VoltageModel,
};
use crate::finding::Finding;
use crate::resolve::load::report_duplicate;
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::tree::{Body, GroupNode, LayerNode, MOST_LAYERS, Node, numbered, report_too_many};
use crate::resolve::{Resolver, attributes, properties};
use crate::source::{Span, Spanned};
use crate::syntax::{Attribute, GroupKind, MaterialPhrase, Value};
use crate::units::Dimension;

/// A layer whose material is still to be worked out.
pub(super) struct Draft<'b, 's> {
    pub(super) layer: Layer,
    pub(super) node: &'b LayerNode<'s>,
    /// Which step of a graded layer it is, counted from 0 in growth order, and of how many.
    pub(super) step: Option<(usize, usize)>,
    /// A phrase read out of a word that stood in the place of a thickness.
    pub(super) phrase: Option<MaterialPhrase>,
    /// Whether its material was reported to be unreadable.
    pub(super) material_wrong: bool,
    /// Whether something of it was reported that leaves it without a thickness.
    pub(super) wrong: bool,
}

/// Every layer of `body` sunward first; fills the junctions and interconnects of `design`.
pub(super) fn drafts<'b, 's>(
    resolver: &mut Resolver<'_, 's>,
    design: &mut Design,
    body: &'b Body<'s>,
) -> Vec<Draft<'b, 's>> {
    let mut walk = Walk {
        resolver,
        design,
        drafts: Vec::new(),
        seen: Vec::new(),
        taken: HashMap::new(),
        groups: Vec::new(),
        too_many: false,
    };
    walk.container(&body.nodes, "", Home::Stack);
    let Walk { mut drafts, seen, groups, .. } = walk;
    let total = design.junctions.len();
    for (draft, seen) in drafts.iter_mut().zip(seen) {
        if draft.layer.place == Place::Between {
            draft.layer.place = match seen {
                0 => Place::Front,
                _ if seen == total => Place::Rear,
                _ => Place::Between,
            };
        }
    }
    super::junctions::groups(resolver, design, &groups);
    drafts
}

/// Where a container of layers belongs.
#[derive(Clone, Copy, PartialEq)]
enum Home {
    Stack,
    Junction(usize),
    Interconnect(usize),
}

/// A junction or an interconnect, with the node it came from.
pub(super) enum Placed<'b, 's> {
    Junction(usize, &'b GroupNode<'s>),
    Interconnect(usize, &'b GroupNode<'s>),
}

struct Walk<'w, 'a, 'b, 's> {
    resolver: &'w mut Resolver<'a, 's>,
    design: &'w mut Design,
    drafts: Vec<Draft<'b, 's>>,
    /// Junctions seen before each draft.
    seen: Vec<usize>,
    /// Paths and names in use, with where they were given.
    taken: HashMap<String, Span>,
    groups: Vec<Placed<'b, 's>>,
    too_many: bool,
}

/// One thing of a container, repeats written out.
#[derive(Clone, Copy)]
enum Entry<'b, 's> {
    Layer(&'b LayerNode<'s>, bool),
    Group(&'b GroupNode<'s>),
}

impl<'b, 's> Walk<'_, '_, 'b, 's> {
    fn container(&mut self, nodes: &'b [Node<'s>], prefix: &str, home: Home) {
        let mut entries = Vec::new();
        self.entries(nodes, false, &mut entries);
        let names = numbered(entries.iter().map(|entry| match entry {
            Entry::Layer(layer, copied) => match layer.alias {
                Some(alias) if *copied => Err(alias.value.clone()),
                Some(alias) => Ok(alias.value.clone()),
                None => Err(layer.duty.value.clone()),
            },
            Entry::Group(group) => match group.name {
                Some(name) => Ok(name.value.clone()),
                None => Err(group.kind.map_or("part", properties::group_word).to_owned()),
            },
        }));
        for (entry, name) in entries.into_iter().zip(names) {
            match entry {
                Entry::Layer(layer, _) => self.layer(layer, prefix, &name, home),
                Entry::Group(group) => self.group(group, prefix, name, home),
            }
        }
    }

    fn entries(&mut self, nodes: &'b [Node<'s>], copied: bool, into: &mut Vec<Entry<'b, 's>>) {
        for node in nodes {
            match node {
                Node::Layer(layer) => into.push(Entry::Layer(layer, copied)),
                Node::Group(group) if group.kind == Some(GroupKind::Repeat) => {
                    for (property, _) in &group.properties {
                        let finding = super::tree::near_or(
                            &property.name,
                            "a `repeat`",
                            crate::syntax::DUTIES.iter().copied(),
                            "write layers in it",
                        );
                        self.resolver.scope.report(finding);
                    }
                    let count = self.count(group);
                    for _ in 0..count {
                        self.entries(&group.nodes, count > 1, into);
                        if into.len() + self.drafts.len() > MOST_LAYERS {
                            if !std::mem::replace(&mut self.too_many, true) {
                                report_too_many(&mut self.resolver.scope, group.head);
                            }
                            into.truncate(MOST_LAYERS);
                            return;
                        }
                    }
                }
                Node::Group(group) => into.push(Entry::Group(group)),
            }
        }
    }

    fn count(&mut self, group: &GroupNode<'s>) -> usize {
        let Some((value, frame)) = group.count else {
            self.resolver.scope.report(
                Finding::error("value.missing", "`repeat` does not say how often")
                    .at(group.head, "no count")
                    .help("write `repeat 20 { … }`"),
            );
            return 1;
        };
        let here = self.resolver.scope.enter(frame);
        let expected = Expected::new("repeat", Dimension::NONE, Role::Count);
        let count = self.resolver.scope.quantity(value, expected);
        self.resolver.scope.close(here);
        count.map_or(1, |count| count as usize)
    }

    fn group(&mut self, group: &'b GroupNode<'s>, prefix: &str, name: String, home: Home) {
        let Some(kind) = group.kind else {
            // Layers of a placed part: they belong where the part was placed.
            let path = joined(prefix, &name);
            return self.container(&group.nodes, &path, home);
        };
        let word = properties::group_word(kind);
        if home != Home::Stack {
            let outer = if matches!(home, Home::Junction(_)) { "a `junction`" } else { "a `tunnel`" };
            self.resolver.scope.report(
                Finding::error("structure.nesting", format!("`{word}` cannot stand in {outer}"))
                    .at(group.head, "belongs in the stack")
                    .help("move it out, between two junctions"),
            );
            return;
        }
        let path = joined(prefix, &name);
        let named = Spanned::new(path.clone(), group.name.map_or(group.head, |name| name.span));
        self.take(&named, "thing");
        let from = self.drafts.len();
        if kind == GroupKind::Junction {
            let index = self.design.junctions.len();
            self.design.junctions.push(Junction {
                name: named,
                layers: from..from,
                voltage: VoltageModel::RadiativeLimit,
                voltage_span: None,
                shunt_ohm_m2: None,
                breakdown_v: None,
                separate: false,
                span: group.span,
            });
            self.groups.push(Placed::Junction(index, group));
            self.container(&group.nodes, &path, Home::Junction(index));
            self.design.junctions[index].layers = from..self.drafts.len();
        } else {
            let index = self.design.interconnects.len();
            self.design.interconnects.push(Interconnect {
                name: named,
                kind: match kind {
                    GroupKind::Recombination => InterconnectKind::Recombination,
                    _ => InterconnectKind::Tunnel,
                },
                layers: from..from,
                below_junctions: self.design.junctions.len(),
                resistance_ohm_m2: None,
                peak_a_per_m2: None,
                valley_a_per_m2: None,
                span: group.span,
            });
            self.groups.push(Placed::Interconnect(index, group));
            self.container(&group.nodes, &path, Home::Interconnect(index));
            self.design.interconnects[index].layers = from..self.drafts.len();
        }
    }

    /// Takes a name; one that is taken already is reported.
    fn take(&mut self, name: &Spanned<String>, kind: &str) {
        match self.taken.get(&name.value) {
            Some(first) => report_duplicate(&mut self.resolver.scope, kind, name, *first),
            None => {
                self.taken.insert(name.value.clone(), name.span);
            }
        }
    }

    fn layer(&mut self, node: &'b LayerNode<'s>, prefix: &str, name: &str, home: Home) {
        let dotted = joined(prefix, name);
        let path = match node.alias {
            // The same part placed twice brings the same alias twice: then the path tells them apart.
            Some(alias) if self.taken.get(&alias.value) != Some(&alias.span) => {
                self.take(alias, "thing");
                if name == alias.value { alias.value.clone() } else { dotted }
            }
            _ => {
                self.taken.entry(dotted.clone()).or_insert(node.duty.span);
                dotted
            }
        };
        let place = match home {
            Home::Stack => Place::Between,
            Home::Junction(index) => Place::Junction(index),
            Home::Interconnect(index) => Place::Interconnect(index),
        };
        for (path, step) in self.steps(node, &path) {
            let draft = attributes::draft(self.resolver, self.design, (node, path, place), step);
            self.drafts.push(draft);
            self.seen.push(self.design.junctions.len());
        }
    }

    /// The paths of the layers a statement stands for, sunward first: one, or the steps of a
    /// graded layer, whose first step is grown first.
    fn steps(&mut self, node: &LayerNode<'s>, path: &str) -> Vec<(String, Option<(usize, usize)>)> {
        let alone = || vec![(path.to_owned(), None)];
        let steps = node.attributes.iter().find_map(|(attribute, frame)| match attribute {
            Attribute::Steps { count, span, .. } => Some((count, *span, *frame)),
            _ => None,
        });
        let graded = node.material.and_then(|(phrase, _)| phrase.graded);
        let (count, frame): (&Value, usize) = match (graded, steps) {
            (None, None) => return alone(),
            (Some(graded), None) => {
                self.resolver.scope.report(
                    Finding::error(
                        "value.missing",
                        format!("graded `{path}` does not say in how many steps"),
                    )
                    .at(graded, "no steps")
                    .help("write `in 8 steps of 250 nm`"),
                );
                return alone();
            }
            (None, Some((_, span, _))) => {
                self.resolver.scope.report(
                    Finding::error("name.unknown", format!("`{path}` has steps but is not graded"))
                        .at(span, "steps of what?")
                        .help(
                            "write `graded` before the material, such as `graded GaInP with In 0.49 .. 0.72`",
                        ),
                );
                return alone();
            }
            (Some(_), Some((count, _, frame))) => (count, frame),
        };
        let here = self.resolver.scope.enter(frame);
        let expected = Expected::new("steps", Dimension::NONE, Role::Count);
        let count = self.resolver.scope.quantity(count, expected);
        self.resolver.scope.close(here);
        let Some(count) = count.map(|count| (count as usize).min(1000)) else { return alone() };
        let step = |index: usize| (format!("{path}.step{}", index + 1), Some((index, count)));
        match self.design.growth {
            Growth::Upright => (0..count).rev().map(step).collect(),
            Growth::Inverted => (0..count).map(step).collect(),
        }
    }
}

fn joined(prefix: &str, name: &str) -> String {
    if prefix.is_empty() { name.to_owned() } else { format!("{prefix}.{name}") }
}

/// A layer of which nothing is known but where it stands.
pub(super) fn blank(duty: Duty, path: String, place: Place, node: &LayerNode<'_>) -> Layer {
    Layer {
        path,
        duty,
        place,
        material: None,
        thickness_m: None,
        doping: None,
        extent: crate::design::Extent::Everywhere,
        strain: Strain::Unstated,
        collecting: false,
        transport: Transport::default(),
        growth_temperature_k: None,
        rate_m_per_s: None,
        offcut_rad: None,
        sheet_resistance_ohm: None,
        spans: LayerSpans {
            statement: node.span,
            material: node.material.map_or(node.duty.span, |(phrase, _)| phrase.span),
            thickness: node.duty.span,
        },
    }
}

/// Checks that every layer that needs a thickness has one, and hands the layers over.
pub(super) fn finish(resolver: &mut Resolver<'_, '_>, design: &mut Design, drafts: Vec<Draft<'_, '_>>) {
    let free = &design.free_values;
    for draft in &drafts {
        let layer = &draft.layer;
        let exempt = match layer.duty {
            Duty::Metal | Duty::Air | Duty::Handle | Duty::Mirror | Duty::Adhesive => true,
            Duty::Wafer => !matches!(layer.place, Place::Junction(_)),
            _ => false,
        };
        let model = draft.node.material.is_some_and(|(phrase, _)| phrase.name.value == "ideal");
        if layer.thickness_m.is_some() || exempt || model || draft.wrong || layer.material.is_none() {
            continue;
        }
        let path = format!("{}.thickness", layer.path);
        if free.iter().any(|value| value.path == path) {
            continue;
        }
        let example = match super::attributes::thickness_role(layer.duty, layer.place) {
            Role::Wafer => "350 um",
            Role::ThickLayer => "3.5 um",
            _ => "50 nm",
        };
        resolver.scope.report(
            Finding::error("value.missing", format!("`{}` has no thickness", layer.path))
                .at(layer.spans.material, "how thick?")
                .help(format!("write it after the material, such as `{example}`")),
        );
    }
    design.layers = drafts.into_iter().map(|draft| draft.layer).collect();
}
