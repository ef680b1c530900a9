//! `place`: a part's layers, put in with its parameters bound.

use crate::finding::Finding;
use crate::resolve::names;
use crate::resolve::properties::{misplaced, missing_argument};
use crate::resolve::tree::{Expansion, GroupNode, Node};
use crate::source::Spanned;
use crate::syntax::{Part, Place, Value};

/// The nodes that `place` stands for.
pub(super) fn place<'s>(expansion: &mut Expansion<'_, 's>, place: &'s Place) -> Vec<Node<'s>> {
    let name = &place.part;
    let Some(part) = expansion.items.parts.get(&name.value) else {
        let known = expansion.items.parts.all.iter().map(|part| part.name.value.as_str());
        let finding = names::unknown(
            "part",
            name,
            known,
            &format!("state `part {}(…) {{ … }}`, or `use` the file that holds it", name.value),
        );
        expansion.scope.report(finding);
        return Vec::new();
    };
    if expansion.placing.contains(&part.name.value.as_str()) {
        let mut way: Vec<String> = expansion.placing.iter().map(|it| format!("`{it}`")).collect();
        way.push(format!("`{}`", name.value));
        expansion.scope.report(
            Finding::error("name.cycle", format!("part `{}` places itself: {}", name.value, way.join(" → ")))
                .at(name.span, "leads back here")
                .beside(part.name.span, "stated here")
                .help("write the layers out in one of the parts"),
        );
        return Vec::new();
    }
    // Parts that place parts twice each double at every level, with or without layers in them.
    if !expansion.room(place.span) {
        return Vec::new();
    }
    let caller = expansion.scope.here();
    let outer = expansion.scope.open_part();
    let bound = bind(expansion, part, place, caller);
    expansion.placing.push(&part.name.value);
    let sorted = expansion.block(&part.block);
    expansion.placing.pop();
    expansion.scope.close(outer);
    for (property, _) in &sorted.properties {
        let finding = crate::resolve::tree::near_or(
            &property.name,
            "a part",
            crate::syntax::DUTIES.iter().chain(crate::resolve::tree::STRUCTURE).copied(),
            "keep layers, junctions and tunnels in a part, and put the rest into the stack",
        );
        expansion.scope.report(finding);
    }
    for (statement, _) in &sorted.rest {
        misplaced(expansion.scope, statement, "a `part`");
    }
    if !bound {
        return Vec::new();
    }
    named(sorted.nodes, place)
}

/// Gives the placed nodes the name after `as`: the one group takes it, several nodes are put
/// under it.
fn named<'s>(mut nodes: Vec<Node<'s>>, place: &'s Place) -> Vec<Node<'s>> {
    let Some(alias) = &place.alias else { return nodes };
    match nodes.as_mut_slice() {
        [Node::Group(group)] => group.name = Some(alias),
        [Node::Layer(layer)] => layer.alias = Some(alias),
        _ => {
            return vec![Node::Group(Box::new(GroupNode {
                kind: None,
                name: Some(alias),
                count: None,
                words: &[],
                nodes,
                properties: Vec::new(),
                head: alias.span,
                span: place.span,
            }))];
        }
    }
    nodes
}

/// Binds parameters in the open frame; `false` where one is left without a value.
fn bind<'s>(expansion: &mut Expansion<'_, 's>, part: &'s Part, place: &'s Place, caller: usize) -> bool {
    let mut given: Vec<Option<&'s Value>> = vec![None; part.parameters.len()];
    let mut next = 0;
    let mut whole = true;
    for (name, value) in &place.arguments {
        let slot = match name {
            Some(name) => part.parameters.iter().position(|(known, _)| known.value == name.value),
            None => {
                next += 1;
                (next <= given.len()).then(|| next - 1)
            }
        };
        match (slot, name) {
            (Some(slot), _) if given[slot].is_none() => given[slot] = Some(value),
            (Some(slot), _) => {
                let called = &part.parameters[slot].0.value;
                expansion.scope.report(
                    Finding::error("name.duplicate", format!("`{called}` is given twice"))
                        .at(value.span, "given again here")
                        .help(format!("keep one value for `{called}`")),
                );
            }
            (None, Some(name)) => {
                whole = false;
                let known = part.parameters.iter().map(|(known, _)| known.value.as_str());
                let finding = names::unknown("parameter", name, known, &takes(part));
                expansion.scope.report(finding);
            }
            (None, None) => {
                whole = false;
                expansion.scope.report(
                    Finding::error(
                        "value.missing",
                        format!("part `{}` takes {}", part.name.value, count(part.parameters.len())),
                    )
                    .at(value.span, "one too many")
                    .beside(part.name.span, "stated here")
                    .help(takes(part)),
                );
            }
        }
    }
    for ((parameter, default), given) in part.parameters.iter().zip(given) {
        match (given, default) {
            (Some(value), _) => expansion.scope.define_argument(parameter, value, caller),
            (None, Some(default)) => expansion.scope.define(parameter, default),
            (None, None) if whole => {
                whole = false;
                missing_argument(expansion.scope, &place.part, parameter);
            }
            (None, None) => {}
        }
    }
    whole
}

fn count(parameters: usize) -> String {
    match parameters {
        0 => "no value".to_owned(),
        1 => "1 value".to_owned(),
        _ => format!("{parameters} values"),
    }
}

fn takes(part: &Part) -> String {
    let names: Vec<&str> =
        part.parameters.iter().map(|(name, _): &(Spanned<String>, _)| name.value.as_str()).collect();
    format!("write `place {}({})`", part.name.value, names.join(", "))
}
