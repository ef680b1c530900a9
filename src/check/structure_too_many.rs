//! `structure.too-many`: more layers than light can be followed through in a reasonable time.

use super::show::count;
use super::{Context, Report, Rule};
use crate::finding::{Finding, Severity};
use crate::optics::model::MOST_LAYERS;

pub(super) static RULE: Rule = Rule {
    code: "structure.too-many",
    severity: Severity::Error,
    title: "more layers in the light than are evaluated",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let design = context.design;
    let layers = design.lit_layers().count();
    if layers <= MOST_LAYERS {
        return;
    }
    report.push(
        std::iter::empty::<String>(),
        Finding::error(
            RULE.code,
            format!("`{}` has {} in the light", design.name.value, count(layers, "layer")),
        )
        .at(design.name.span, format!("at most {MOST_LAYERS} are evaluated"))
        .help("repeat its mirrors fewer times, such as `repeat 20 { … }`"),
    );
}
