//! `optics.coat`: a coat whose thickness gives light away.

use super::junctions::describe;
use super::show::{percent, significant};
use super::{Context, Report, Rule, Threshold};
use crate::finding::{Finding, Severity};

pub(super) static RULE: Rule = Rule {
    code: "optics.coat",
    severity: Severity::Warning,
    title: "a coat is off the thickness that lets most light in",
    threshold: Some(Threshold {
        default: 0.02,
        unit: "%",
        meaning: "how much more current another thickness of the coat alone would give",
    }),
    needs_results: true,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let Some(results) = context.results else { return };
    for coat in results.coats.iter().filter(|coat| coat.gain > context.threshold(&RULE)) {
        let Some(layer) = context.design.layer(&coat.layer) else { continue };
        let nm = |value: f64| format!("{} nm", significant(value.round(), 4));
        report.push(
            [layer.path.as_str()],
            Finding::warning(
                RULE.code,
                format!(
                    "{} of {} gives away {} of the current under `{}`: it is best at {}",
                    describe(context.design, layer),
                    nm(coat.thickness_nm),
                    percent(coat.gain),
                    coat.condition,
                    nm(coat.best_thickness_nm)
                ),
            )
            .at(layer.spans.thickness, "off its best, the other layers as they are")
            .help(format!("write `{}`", nm(coat.best_thickness_nm))),
        );
    }
}
