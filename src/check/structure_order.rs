//! `structure.order`: a layer on the side where it cannot do its work.

use super::junctions::describe;
use super::{Context, Report, Rule};
use crate::design::{Duty, Extent, Growth, Layer, Place};
use crate::finding::{Finding, Severity};
use crate::materials::MaterialClass;

pub(super) static RULE: Rule = Rule {
    code: "structure.order",
    severity: Severity::Error,
    title: "a layer stands on the wrong side",
    threshold: None,
    needs_results: false,
    run,
};

/// Metal thinner than this passes a fifth of what enters it, m: k of silver is 3.6 at 550 nm
/// (Johnson and Christy, Phys. Rev. B 6, 4370 (1972)), exp(−4π k d/λ) = 0.19.
const SHEER_M: f64 = 20e-9;

fn run(context: &Context, report: &mut Report) {
    barriers(context, report);
    interconnects(context, report);
    let Some(first) = context.junctions.first().and_then(|facts| facts.layers.first()).map(|(at, _)| *at)
    else {
        return;
    };
    let last = context.junctions.iter().filter_map(|facts| facts.layers.last()).map(|(at, _)| *at).max();
    let last = last.unwrap_or(first);
    for (index, layer) in context.design.lit_layers() {
        let Some((fault, help)) = misplaced(context, index, layer, (first, last)) else { continue };
        let message = format!("{} {fault}", describe(context.design, layer));
        report.push(
            [layer.path.as_str()],
            Finding::error(RULE.code, message).at(layer.spans.statement, "on the wrong side").help(help),
        );
    }
}

/// A window below, or a back surface field above, everything that absorbs.
fn barriers(context: &Context, report: &mut Report) {
    for facts in &context.junctions {
        let (Some((front, sunmost)), Some((rear, rearmost))) =
            (facts.absorbers().next(), facts.absorbers().next_back())
        else {
            continue;
        };
        for (index, layer) in &facts.layers {
            let (side, other, neighbour) = match layer.duty {
                Duty::Window if *index > rear => ("below", "sunward of", sunmost),
                Duty::Bsf if *index < front => ("sunward of", "below", rearmost),
                _ => continue,
            };
            report.push(
                [layer.path.as_str()],
                Finding::error(
                    RULE.code,
                    format!(
                        "{} stands {side} all that absorbs in `{}`",
                        describe(context.design, layer),
                        facts.name()
                    ),
                )
                .at(layer.spans.statement, "on the wrong side")
                .beside(neighbour.spans.statement, format!("belongs {other} this"))
                .help(format!(
                    "write the {} line {other} the {}",
                    layer.duty.word(),
                    neighbour.duty.word()
                )),
            );
        }
    }
}

/// A tunnel junction with no junction above it, or straight after another one. One below the last
/// junction is left alone: it turns the sign for a wafer of the other one.
fn interconnects(context: &Context, report: &mut Report) {
    let joins = &context.design.interconnects;
    for (index, join) in joins.iter().enumerate() {
        let name = &join.name.value;
        let earlier = joins[..index].iter().find(|other| other.below_junctions == join.below_junctions);
        let finding = match (join.below_junctions, earlier) {
            (0, _) => {
                Finding::error(RULE.code, format!("`{name}` has no junction sunward of it and joins nothing"))
                    .at(join.span, "on the wrong side")
            }
            (_, Some(other)) => Finding::error(
                RULE.code,
                format!("`{name}` follows `{}` with no junction between them", other.name.value),
            )
            .at(join.span, "joins what is joined already")
            .beside(other.span, "the first of them"),
            _ => continue,
        };
        let help = format!("write `{name}` between the two junctions it joins, or remove it");
        report.push([name.as_str()], finding.help(help));
    }
}

/// What is wrong with a layer outside the junctions that stand at `span` (first, last layer).
fn misplaced(
    context: &Context,
    index: usize,
    layer: &Layer,
    (first, last): (usize, usize),
) -> Option<(String, String)> {
    let is_metal = layer.material.as_ref().is_some_and(|material| material.class == MaterialClass::Metal);
    let junction = |at: usize| context.junctions.get(at).map_or("", |facts| facts.name());
    let top = junction(0);
    match layer.duty {
        // A mirror of dielectrics or a very thin metal may let light through.
        Duty::Metal | Duty::Mirror
            if index < last && is_metal && layer.thickness_m.is_none_or(|thickness| thickness > SHEER_M) => Some((
            "lies in the light of what stands below it".to_string(),
            "write it as the last line, or `only under fingers`".to_string(),
        )),
        Duty::Wafer if context.design.growth == Growth::Upright && index < first => Some((
            format!("stands sunward of `{top}`, but upright growth starts from it"),
            "write the wafer below the junctions, or `growth inverted` and `removed` after its thickness"
                .to_string(),
        )),
        Duty::Wafer
            if context.design.growth == Growth::Inverted
                && layer.place == Place::Rear
                && layer.extent == Extent::Everywhere =>
        {
            Some((
                format!("stands below the junctions, but inverted growth starts sunward of `{top}`"),
                "write the wafer first with `removed` after its thickness, and what carries the cell as `handle`"
                    .to_string(),
            ))
        }
        _ => None,
    }
}
