//! `gap.indirect-absorber`: an absorber whose lowest gap is indirect, too thin for that.

use super::families::last_direct;
use super::junctions::describe;
use super::show::{ev, length};
use super::{Context, Report, Rule, Threshold};
use crate::finding::{Finding, Severity};
use crate::growth::ROOM_K;

pub(super) static RULE: Rule = Rule {
    code: "gap.indirect-absorber",
    severity: Severity::Warning,
    title: "an absorber with an indirect gap is thin",
    threshold: Some(Threshold { default: 10e-6, unit: "um", meaning: "the thickness of the absorber" }),
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let enough = context.threshold(&RULE);
    for facts in &context.junctions {
        // Everything that absorbs counts: a diffused emitter is backed by its wafer.
        let Some(total) = facts.absorbers().map(|(_, layer)| layer.thickness_m).sum::<Option<f64>>() else {
            continue;
        };
        let Some((_, layer)) = facts.main_absorber() else { continue };
        let Some(material) = &layer.material else { continue };
        let Some(gap) = material.gap(ROOM_K) else { continue };
        if gap.kind.is_direct() || total >= enough {
            continue;
        }
        let direct = material
            .bands
            .as_ref()
            .and_then(|bands| bands.gamma.as_ref())
            .map_or_else(String::new, |gamma| format!("; its direct gap lies at {}", ev(gamma.at(ROOM_K))));
        report.push(
            [layer.path.as_str(), facts.name()],
            Finding::warning(
                RULE.code,
                format!(
                    "{} has its gap of {} at {}, and `{}` absorbs in only {}",
                    describe(context.design, layer),
                    ev(gap.ev),
                    valley(gap.kind.word()),
                    facts.name(),
                    length(total)
                ),
            )
            .at(layer.spans.material, format!("{}{direct}", gap.kind.word()))
            .help(match material.family.as_ref().and_then(|family| last_direct(family)) {
                Some(label) => format!("`{label}` is the last with a direct gap; write that or less"),
                None => format!("make the absorbers of `{}` at least {} thick", facts.name(), length(enough)),
            }),
        );
    }
}

/// `X` of `indirect (X)`
fn valley(word: &str) -> &str {
    word.split(['(', ')']).nth(1).unwrap_or(word)
}
