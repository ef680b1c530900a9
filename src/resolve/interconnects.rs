//! What tunnels and recombination contacts state of themselves, and which junctions stand apart.

use crate::design::{Design, InterconnectKind, Terminals};
use crate::finding::Finding;
use crate::resolve::Resolver;
use crate::resolve::junctions::stated;
use crate::resolve::properties::quantity;
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::tree::{GroupNode, OF_INTERCONNECT, OF_RECOMBINATION};
use crate::source::Span;
use crate::units::{Dimension, in_unit};

/// Reads the properties of one interconnect.
pub(super) fn interconnect<'s>(
    resolver: &mut Resolver<'_, 's>,
    design: &mut Design,
    index: usize,
    group: &GroupNode<'s>,
) {
    for word in group.words {
        resolver.scope.report(
            Finding::error("name.unknown", format!("`{}` says nothing of a tunnel", word.value))
                .at(word.span, "an unknown word here")
                .help("take it out"),
        );
    }
    let here = resolver.scope.here();
    let known = match design.interconnects[index].kind {
        InterconnectKind::Tunnel => OF_INTERCONNECT,
        // A contact of metal, oxide or defects has no peak to pass.
        InterconnectKind::Recombination => OF_RECOMBINATION,
    };
    let mut valley_span = None;
    for (property, frame) in stated(resolver, group, known) {
        resolver.scope.enter(frame);
        let scope = &mut resolver.scope;
        match property.name.value.as_str() {
            "resistance" => {
                let expected =
                    Expected::new("resistance", Dimension::RESISTANCE_AREA, Role::SeriesResistance);
                design.interconnects[index].resistance_ohm_m2 = quantity(scope, property, expected);
            }
            "peak" => {
                let expected = Expected::new("peak", Dimension::CURRENT_DENSITY, Role::Positive);
                design.interconnects[index].peak_a_per_m2 = quantity(scope, property, expected);
            }
            "valley" => {
                let expected = Expected::new("valley", Dimension::CURRENT_DENSITY, Role::Positive);
                design.interconnects[index].valley_a_per_m2 = quantity(scope, property, expected);
                valley_span = Some(property.span);
            }
            _ => {}
        }
    }
    resolver.scope.close(here);
    let has = |word: &str| group.properties.iter().any(|(property, _)| property.name.value == word);
    let interconnect = &mut design.interconnects[index];
    let name = interconnect.name.value.clone();
    if let (Some(valley), Some(span)) = (interconnect.valley_a_per_m2, valley_span) {
        let finding = match interconnect.peak_a_per_m2 {
            None if !has("peak") => Some(
                Finding::error("value.missing", format!("`{name}` states a valley and no peak"))
                    .at(span, "the least current beyond which peak?")
                    .help(format!("write `peak {}` too", in_unit(10.0 * valley, "A/cm2"))),
            ),
            Some(peak) if valley >= peak => Some(
                Finding::error(
                    "value.range",
                    format!(
                        "the valley of `{name}`, {}, is not below its peak of {}",
                        in_unit(valley, "A/cm2"),
                        in_unit(peak, "A/cm2")
                    ),
                )
                .at(span, "as much as the peak, or more")
                .help(format!("write `valley {}`", in_unit(0.1 * peak, "A/cm2"))),
            ),
            _ => None,
        };
        if let Some(finding) = finding {
            interconnect.valley_a_per_m2 = None;
            resolver.scope.report(finding);
        }
    }
    assume_tunnel(design, index, &has);
}

/// What is taken of an interconnect that does not state it.
fn assume_tunnel(design: &mut Design, index: usize, has: &dyn Fn(&str) -> bool) {
    let interconnect = &design.interconnects[index];
    let name = &interconnect.name.value;
    let mut sentences = Vec::new();
    match interconnect.peak_a_per_m2 {
        None if !has("resistance") && !has("peak") => {
            sentences.push(format!("`{name}` conducts without loss, as nothing is stated"));
        }
        Some(_) => {
            if !has("resistance") {
                sentences.push(format!("peak of `{name}` at 0.1 V, as no resistance is stated"));
            }
            if !has("valley") {
                sentences.push(format!("valley of `{name}` a tenth of its peak, as none is stated"));
            }
        }
        None => {}
    }
    design.assumptions.extend(sentences);
}

/// Junctions that stand apart in a stack whose terminals do not allow it, or the other way round.
pub(super) fn separate(resolver: &mut Resolver<'_, '_>, design: &Design, terminals: Option<Span>) {
    let mut marked = design.junctions.iter().enumerate().filter(|(_, junction)| junction.separate);
    let (first, second) = (marked.next(), marked.next());
    let name_of = |index: usize| design.junctions.get(index).map_or("top", |it| it.name.value.as_str());
    if let (Terminals::Three, None, Some(span)) = (design.terminals, first, terminals) {
        resolver.scope.report(
            Finding::error("value.missing", "`terminals three` does not say which junction stands apart")
                .at(span, "no junction is `separate`")
                .help(format!("write `junction {} separate {{ … }}`, or `terminals two`", name_of(0))),
        );
    }
    let Some((index, junction)) = first else { return };
    let (name, span) = (&junction.name.value, junction.name.span);
    let beside = |finding: Finding, label: &str| match terminals {
        Some(span) => finding.beside(span, label),
        None => finding,
    };
    match design.terminals {
        Terminals::Two => {
            let finding = Finding::error(
                "value.conflict",
                format!("`{name}` is `separate`, and the stack has two terminals"),
            );
            let finding = beside(finding.at(span, "has terminals of its own"), "two for the whole stack");
            resolver.scope.report(finding.help(match index == 0 || index + 1 == design.junctions.len() {
                true => "write `terminals three`, or leave `separate` out",
                false => "write `terminals four`, or leave `separate` out",
            }));
        }
        Terminals::Three => {
            // One contact between two strings: only the first or the last junction can stand apart.
            let inside = index > 0 && index + 1 < design.junctions.len();
            let (what, at) = match second {
                Some((_, other)) => (
                    format!(
                        "`{name}` and `{}` both stand apart, and the stack has three terminals",
                        other.name.value
                    ),
                    other.name.span,
                ),
                None if inside => (
                    format!("`{name}` stands apart between two others, and the stack has three terminals"),
                    span,
                ),
                None => return,
            };
            let finding = Finding::error("value.conflict", what).at(at, "needs a fourth terminal");
            resolver
                .scope
                .report(beside(finding, "three for the whole stack").help("write `terminals four`"));
        }
        Terminals::Four => {}
    }
}
