//! `structure.no-absorber`: a junction without a layer that turns light into current.

use super::junctions::describe;
use super::{Context, Report, Rule};
use crate::finding::{Finding, Severity};
use crate::materials::MaterialClass;

pub(super) static RULE: Rule = Rule {
    code: "structure.no-absorber",
    severity: Severity::Error,
    title: "a junction has nothing that absorbs",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    if context.design.junctions.is_empty() && !context.has_faults() {
        let name = &context.design.name;
        report.push(
            Vec::<String>::new(),
            Finding::error(
                RULE.code,
                format!("stack `{}` has no junction, so no light becomes current", name.value),
            )
            .at(name.span, "no junction in it")
            .help("add one, such as `junction top { absorber ideal of gap 1.42 eV }`"),
        );
    }
    for facts in &context.junctions {
        let name = facts.name();
        let mut any = false;
        for (_, layer) in facts.absorbers() {
            any = true;
            let Some(material) = &layer.material else { continue };
            let gapless = matches!(material.class, MaterialClass::Dielectric | MaterialClass::Metal);
            if gapless && material.bands.is_none() {
                report.push(
                    [layer.path.as_str()],
                    Finding::error(
                        RULE.code,
                        format!(
                            "{} is no semiconductor and makes no current",
                            describe(context.design, layer)
                        ),
                    )
                    .at(layer.spans.material, "has no gap")
                    .help(format!(
                        "write `layer {} …` if it only lies in the way, and give `{name}` an absorber",
                        material.name
                    )),
                );
            }
        }
        if !any && !context.is_spoilt(facts.junction.span) {
            let what = match facts.layers.len() {
                0 => "holds no layer".to_string(),
                _ => "holds no emitter, base, intrinsic or absorber".to_string(),
            };
            report.push(
                [name],
                Finding::error(RULE.code, format!("junction `{name}` {what}, so no light becomes current"))
                    .at(facts.junction.name.span, "absorbs nothing")
                    .help(format!(
                        "add a line such as `base GaAs 3 um p 1e17 /cm3` to `{name}`, or remove it"
                    )),
            );
        }
    }
}
