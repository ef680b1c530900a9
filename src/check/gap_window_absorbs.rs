//! `gap.window-absorbs`: a window or back surface field takes light that makes no current.

use super::junctions::describe;
use super::show::{current, length, percent};
use super::{Context, Report, Rule, Threshold};
use crate::design::Duty;
use crate::finding::{Finding, Severity};
use crate::numerics::constants::{CHARGE, HC};
use crate::results::ConditionResult;

pub(super) static RULE: Rule = Rule {
    code: "gap.window-absorbs",
    severity: Severity::Warning,
    title: "a window or back surface field absorbs light",
    threshold: Some(Threshold {
        default: 0.1,
        unit: "%",
        meaning: "the current lost in the layer, as a share of its junction's",
    }),
    needs_results: true,
    run,
};

/// What one layer loses under one condition, mA/cm2.
pub(super) struct Loss<'a> {
    /// The condition's name.
    pub(super) condition: &'a str,
    /// Absorbed and not collected, of photons above the smallest gap.
    pub(super) lost: f64,
    /// Of the junction it is compared with.
    pub(super) photocurrent: f64,
}

fn run(context: &Context, report: &mut Report) {
    let allowed = context.threshold(&RULE);
    for facts in &context.junctions {
        for (_, layer) in facts.layers.iter().filter(|(_, layer)| is_barrier(layer.duty)) {
            // A back surface field of smaller gap is `gap.bsf-low`: one fault, one finding.
            if layer.duty == Duty::Bsf && super::gap_bsf_low::is_low(context, facts, layer) {
                continue;
            }
            let Some(loss) = worst(context, facts.name(), &layer.path) else { continue };
            let share = loss.lost / loss.photocurrent;
            if share <= allowed {
                continue;
            }
            let mut finding = Finding::warning(
                RULE.code,
                format!(
                    "{} absorbs {} under `{}`, {} of what its junction makes",
                    describe(context.design, layer),
                    current(loss.lost),
                    loss.condition,
                    percent(share)
                ),
            )
            .at(layer.spans.material, "its light makes no current");
            if let Some(thickness) = layer.thickness_m {
                finding = finding.help(match thinner(thickness, share, allowed) {
                    Some(thin) => format!("thin it to {}, or choose a wider gap", length(thin)),
                    None => "choose a material with a wider gap".to_string(),
                });
            }
            report.push([layer.path.as_str()], finding);
        }
    }
}

fn is_barrier(duty: Duty) -> bool {
    matches!(duty, Duty::Window | Duty::Bsf)
}

/// The condition under which `layer` loses the largest share of the photocurrent of `junction`.
pub(super) fn worst<'a>(context: &Context<'a>, junction: &str, layer: &str) -> Option<Loss<'a>> {
    let losses = context.results?.conditions.iter().filter_map(|condition| {
        let light = condition.layers.iter().find(|light| light.name == layer)?;
        let photocurrent = condition.junctions.iter().find(|it| it.name == junction)?.photocurrent_ma_per_cm2;
        let lost = usable(condition, layer).unwrap_or(light.absorbed_ma_per_cm2) - light.collected_ma_per_cm2;
        (photocurrent > 0.0).then_some(Loss { condition: &condition.name, lost, photocurrent })
    });
    losses.reduce(
        |worst, next| {
            if next.lost / next.photocurrent > worst.lost / worst.photocurrent { next } else { worst }
        },
    )
}

/// Current in mA/cm2 that `layer` absorbs of photons above the smallest gap of the stack: what
/// lies below every gap is no loss. `None` without spectral data of the layer.
fn usable(condition: &ConditionResult, layer: &str) -> Option<f64> {
    let smallest = condition.junctions.iter().map(|it| it.gap_ev).reduce(f64::min)?;
    let edge_nm = HC / (smallest * CHARGE) * 1e9;
    let spectral = &condition.spectral;
    let absorptance = spectral.absorptance.get(layer)?;
    let end = spectral.wavelength_nm.partition_point(|nm| *nm <= edge_nm);
    let value = |i: usize| absorptance[i] * spectral.photon_current_ma_per_cm2_per_nm[i];
    let steps = spectral.wavelength_nm[..end].windows(2).enumerate();
    Some(steps.map(|(i, pair)| 0.5 * (value(i) + value(i + 1)) * (pair[1] - pair[0])).sum())
}

/// Thickness in whole nanometres at which the layer keeps within `allowed`, taking the light it
/// absorbs as proportional to thickness (cautious: absorption saturates, so less is needed off).
/// `None` below a thickness that still closes a surface.
pub(super) fn thinner(thickness_m: f64, share: f64, allowed: f64) -> Option<f64> {
    let nanometres = (thickness_m * 1e9 * allowed / share).floor();
    (nanometres >= 5.0).then_some(nanometres * 1e-9)
}

#[cfg(test)]
mod tests {
    use super::thinner;

    #[test]
    fn thinner_in_proportion() {
        // 5 % allowed, 12.5 % lost: 0.4 of 100 nm.
        let thin = thinner(100e-9, 0.125, 0.05).expect("worth it");
        assert!((thin - 40e-9).abs() < 1e-15);
        assert_eq!(thinner(20e-9, 0.5, 0.05), None, "2 nm close no surface");
    }
}
