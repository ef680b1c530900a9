//! `tunnel.missing`: two junctions in series with nothing that joins them.

use super::junctions::{JunctionFacts, letter, opposite};
use super::{Context, Report, Rule};
use crate::design::{Polarity, Terminals};
use crate::finding::{Finding, Severity};
use crate::source::Span;

pub(super) static RULE: Rule = Rule {
    code: "tunnel.missing",
    severity: Severity::Error,
    title: "two series junctions have no tunnel junction between them",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let design = context.design;
    if design.terminals != Terminals::Two {
        return;
    }
    for (index, pair) in context.junctions.windows(2).enumerate() {
        let [upper, lower] = pair else { continue };
        let joined = design.interconnects.iter().any(|it| it.below_junctions == index + 1);
        // A limit study with bare gaps speaks of no layers at all.
        if joined || !is_layered(upper) || !is_layered(lower) {
            continue;
        }
        // What joins them may stand there, misread.
        let (above, below) = (upper.junction.span, lower.junction.span);
        if context.is_spoilt(Span { start: above.end, end: below.start, ..below }) {
            continue;
        }
        let rear = upper.rear_sign().unwrap_or(Polarity::P);
        let (top, bottom) = (upper.name(), lower.name());
        report.push(
            [top, bottom],
            Finding::error(
                RULE.code,
                format!(
                    "nothing joins `{top}` to `{bottom}`: where the {} side of one meets the {} side of the other a diode blocks the current",
                    letter(rear),
                    letter(opposite(rear))
                ),
            )
            .at(lower.junction.name.span, format!("meets `{top}` here"))
            .beside(upper.junction.name.span, "the junction above")
            .help(format!(
                "write `tunnel {{ resistance 1 mohm cm2 }}` between them, or its two layers, the {} one first",
                letter(rear)
            )),
        );
    }
}

/// Whether a junction is described by layers that could be grown.
fn is_layered(facts: &JunctionFacts) -> bool {
    !facts.junction.separate
        && facts.absorbers().any(|(_, layer)| layer.material.is_some())
        && !facts.is_gap_model()
}
