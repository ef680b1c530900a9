//! `stack "B" like "A"`: A with layers replaced, removed and put in by path.

use crate::finding::Finding;
use crate::resolve::names;
use crate::resolve::properties::Kept;
use crate::resolve::tree::{Body, Expansion, LayerNode, Node, local_names, numbered};
use crate::source::Spanned;
use crate::syntax::{Attribute, Block, GroupKind, Insert, Property, Replace, Statement};

/// Changes `base` as the statements of `block` say, in their order.
pub(super) fn derive<'s>(expansion: &mut Expansion<'_, 's>, base: Body<'s>, block: &'s Block) -> Body<'s> {
    let mut body = base;
    let sorted = expansion.block(block);
    let frame = expansion.scope.here();
    let mut kept = Kept::default();
    for (property, frame) in sorted.properties {
        if is_a_path(expansion, &body, property)
            || !crate::resolve::tree::known_of_stack(expansion.scope, property)
            || !kept.keep(expansion.scope, property)
        {
            continue;
        }
        override_property(&mut body, property.name.value.as_str());
        body.properties.push((property, frame));
    }
    for node in sorted.nodes {
        swap(expansion, &mut body, node);
    }
    for (statement, _) in sorted.rest {
        match statement {
            Statement::Replace(it) => replace(expansion, &mut body, it, frame),
            Statement::Remove(it) => {
                if let Some(way) = find(expansion, &body, &it.path)
                    && let Some((nodes, at)) = container(&mut body.nodes, &way)
                {
                    nodes.remove(at);
                }
            }
            Statement::Insert(it) => insert(expansion, &mut body, it),
            other => body.requests.push((other, frame)),
        }
    }
    body
}

/// `top 500 nm`: a group or a layer named without saying which layer of it.
fn is_a_path(expansion: &mut Expansion<'_, '_>, body: &Body<'_>, property: &Property) -> bool {
    let name = &property.name;
    let Some(at) = local_names(&body.nodes).iter().position(|known| *known == name.value) else {
        return false;
    };
    let help = match &body.nodes[at] {
        Node::Group(group) => match local_names(&group.nodes).first() {
            Some(first) => format!("name one layer of it, such as `{}.{first}`", name.value),
            None => "write the whole of it again, in its block".to_owned(),
        },
        Node::Layer(layer) => format!("write `{}` and what changes", layer.duty.value),
    };
    expansion.scope.report(
        Finding::error("name.unknown", format!("`{}` alone does not say what changes", name.value))
            .at(name.span, "which layer of it?")
            .help(help),
    );
    true
}

/// Takes out of the base what the new statement settles: the property itself, and with
/// `conditions` or a light of one's own also what stood for them.
fn override_property(body: &mut Body<'_>, name: &str) {
    const OWN: &[&str] =
        &["light", "temperature", "concentration", "irradiance", "incidence", "fluence", "distance"];
    body.properties.retain(|(known, _)| {
        let known = known.name.value.as_str();
        known != name
            && !(name == "conditions" && OWN.contains(&known))
            && !(OWN.contains(&name) && known == "conditions")
            && !(name == "irradiance" && known == "concentration")
            && !(name == "concentration" && known == "irradiance")
    });
}

/// A whole layer or group written in the body: it takes the place of the one of that name.
fn swap<'s>(expansion: &mut Expansion<'_, 's>, body: &mut Body<'s>, node: Node<'s>) {
    let named = local_names(&body.nodes);
    let own = local_names(std::slice::from_ref(&node)).pop().unwrap_or_default();
    match named.iter().position(|name| *name == own) {
        Some(at) => match (&mut body.nodes[at], node) {
            (Node::Layer(old), Node::Layer(new)) => merge(old, *new),
            (old, new) => *old = new,
        },
        None => {
            let (word, span) = match &node {
                Node::Layer(layer) => (own, layer.duty.span),
                Node::Group(group) => (own, group.head),
            };
            let neighbour = named.first().map_or("wafer", String::as_str);
            expansion.scope.report(
                Finding::error(
                    "name.unknown",
                    format!("the stack this one is like has no `{word}` to replace"),
                )
                .at(span, "nothing of that name")
                .help(format!("write `insert before {neighbour} {{ … }}` to put it in")),
            );
        }
    }
}

fn replace<'s>(expansion: &mut Expansion<'_, 's>, body: &mut Body<'s>, it: &'s Replace, frame: usize) {
    let Some(way) = find(expansion, body, &it.path) else { return };
    let Some((nodes, at)) = container(&mut body.nodes, &way) else { return };
    match &mut nodes[at] {
        Node::Layer(layer) => {
            let new = LayerNode {
                duty: layer.duty,
                alias: layer.alias,
                material: it.material.as_ref().map(|phrase| (phrase, frame)),
                attributes: it.attributes.iter().map(|attribute| (attribute, frame)).collect(),
                blocks: it.block.iter().map(|block| (block, frame)).collect(),
                span: it.span,
                unreadable: false,
            };
            merge(layer, new);
        }
        Node::Group(group) => {
            let word = group.kind.map_or("part", crate::resolve::properties::group_word);
            expansion.scope.report(
                Finding::error("name.unknown", format!("`{}` is a `{word}`, not a layer", it.path.value))
                    .at(it.path.span, "a group of layers")
                    .help(format!(
                        "name one layer of it, such as `{}.{}`",
                        it.path.value,
                        local_names(&group.nodes).first().map_or("base", String::as_str)
                    )),
            );
        }
    }
}

/// What is said replaces what was said of the same; the rest stays.
fn merge<'s>(old: &mut LayerNode<'s>, new: LayerNode<'s>) {
    if new.material.is_some() {
        old.material = new.material;
    }
    for (attribute, frame) in new.attributes {
        let kind = std::mem::discriminant(attribute);
        let opposite = |known: &Attribute| {
            matches!(
                (known, attribute),
                (Attribute::Relaxed(_), Attribute::Pseudomorphic(_))
                    | (Attribute::Pseudomorphic(_), Attribute::Relaxed(_))
                    | (Attribute::Removed(_), Attribute::OnlyUnderFingers(_))
                    | (Attribute::OnlyUnderFingers(_), Attribute::Removed(_))
            )
        };
        old.attributes.retain(|(known, at)| {
            *at == frame || !(std::mem::discriminant(*known) == kind || opposite(known))
        });
        old.attributes.push((attribute, frame));
    }
    old.blocks.extend(new.blocks);
    if new.alias.is_some() {
        old.alias = new.alias;
    }
    old.span = new.span;
}

fn insert<'s>(expansion: &mut Expansion<'_, 's>, body: &mut Body<'s>, it: &'s Insert) {
    let outer = expansion.scope.open();
    let sorted = expansion.block(&it.block);
    expansion.scope.close(outer);
    for (property, _) in &sorted.properties {
        let finding = crate::resolve::tree::near_or(
            &property.name,
            "an `insert`",
            crate::syntax::DUTIES.iter().chain(crate::resolve::tree::STRUCTURE).copied(),
            "write layers, junctions and tunnels in it",
        );
        expansion.scope.report(finding);
    }
    for (statement, _) in &sorted.rest {
        crate::resolve::properties::misplaced(expansion.scope, statement, "an `insert`");
    }
    let Some(way) = find(expansion, body, &it.path) else { return };
    let Some((nodes, at)) = container(&mut body.nodes, &way) else { return };
    let at = if it.after { at + 1 } else { at };
    nodes.splice(at..at, sorted.nodes);
}

/// The list a way of indices ends in, and the last index.
fn container<'b, 's>(nodes: &'b mut Vec<Node<'s>>, way: &[usize]) -> Option<(&'b mut Vec<Node<'s>>, usize)> {
    let (first, rest) = way.split_first()?;
    if rest.is_empty() {
        return (*first < nodes.len()).then_some((nodes, *first));
    }
    match nodes.get_mut(*first)? {
        Node::Group(group) => container(&mut group.nodes, rest),
        Node::Layer(_) => None,
    }
}

/// The way of indices to a path, or a finding with the near path.
fn find(expansion: &mut Expansion<'_, '_>, body: &Body<'_>, path: &Spanned<String>) -> Option<Vec<usize>> {
    let mut all = Vec::new();
    list(&body.nodes, "", &mut Vec::new(), &mut all);
    if let Some((_, way)) = all.iter().find(|(known, _)| *known == path.value) {
        return Some(way.clone());
    }
    let some = all.iter().take(12).map(|(known, _)| format!("`{known}`")).collect::<Vec<_>>().join(", ");
    let finding = names::unknown(
        "layer",
        path,
        all.iter().map(|(known, _)| known.as_str()),
        &format!("the stack this one is like has {some}"),
    );
    expansion.scope.report(finding);
    None
}

/// Every path of `nodes` with the way to it. A layer with a name after `as` goes by that name, alone
/// or behind its junction, and by its duty as well: `thick`, `top.thick`, `top.base`.
fn list(nodes: &[Node<'_>], prefix: &str, way: &mut Vec<usize>, all: &mut Vec<(String, Vec<usize>)>) {
    let behind = |name: &str| if prefix.is_empty() { name.to_owned() } else { format!("{prefix}.{name}") };
    let by_word = numbered(nodes.iter().map(|node| match node {
        Node::Layer(layer) => Err(layer.duty.value.clone()),
        Node::Group(_) => Ok(String::new()),
    }));
    for (at, ((node, name), word)) in nodes.iter().zip(local_names(nodes)).zip(by_word).enumerate() {
        way.push(at);
        let path = behind(&name);
        if matches!(node, Node::Layer(layer) if layer.alias.is_some()) {
            if !prefix.is_empty() {
                all.push((name, way.clone()));
            }
            all.push((behind(&word), way.clone()));
        }
        if let Node::Group(group) = node {
            let inner =
                if group.kind == Some(GroupKind::Repeat) && group.name.is_none() { prefix } else { &path };
            list(&group.nodes, inner, way, all);
        }
        all.push((path, way.clone()));
        way.pop();
    }
}
