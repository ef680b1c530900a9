//! `gap.window-absorbs`: a window or back surface field takes light that makes no current.

use super::absorption::{Point, integral, scale_for};
use super::junctions::describe;
use super::show::{current, length, percent};
use super::{Context, Report, Rule, Threshold};
use crate::design::{Duty, Layer};
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
    /// Under which.
    pub(super) condition: &'a ConditionResult,
    /// Absorbed and not collected, of photons above the smallest gap.
    pub(super) lost: f64,
    /// Of the junction it is compared with.
    pub(super) photocurrent: f64,
}

impl Loss<'_> {
    fn share(&self) -> f64 {
        self.lost / self.photocurrent
    }
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
            let share = loss.share();
            if share <= allowed {
                continue;
            }
            let finding = Finding::warning(
                RULE.code,
                format!(
                    "{} absorbs {} under `{}`, {} of what its junction makes",
                    describe(context.design, layer),
                    current(loss.lost),
                    loss.condition.name,
                    percent(share)
                ),
            )
            .at(layer.spans.material, "its light makes no current");
            let finding = finding.help(match thinner(loss.condition, layer, allowed / share) {
                Some(thin) => format!("thin it to {}, or choose a wider gap", length(thin)),
                None => "choose a material with a wider gap".to_string(),
            });
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
        let lost = light.absorbed_ma_per_cm2 * usable(condition, layer) - light.collected_ma_per_cm2;
        (photocurrent > 0.0).then_some(Loss { condition, lost, photocurrent })
    });
    losses.reduce(|worst, next| if next.share() > worst.share() { next } else { worst })
}

/// Share of the photons absorbed in `layer` that lie above the smallest gap of the stack: what
/// lies below every gap is no loss. 1 without spectral data of the layer.
fn usable(condition: &ConditionResult, layer: &str) -> f64 {
    let spectral = &condition.spectral;
    let smallest = condition.junctions.iter().map(|it| it.gap_ev).reduce(f64::min);
    let (Some(gap), Some(absorptance)) = (smallest, spectral.absorptance.get(layer)) else { return 1.0 };
    let edge_nm = HC / (gap * CHARGE) * 1e9;
    let absorbed = |i: usize| absorptance[i] * spectral.photon_current_ma_per_cm2_per_nm[i];
    let end = spectral.wavelength_nm.partition_point(|nm| *nm <= edge_nm);
    let (part, whole) =
        (integral(&spectral.wavelength_nm[..end], absorbed), integral(&spectral.wavelength_nm, absorbed));
    if whole > 0.0 { part / whole } else { 1.0 }
}

/// Thickness in whole nanometres at which `layer` absorbs `ratio` of what it absorbs now. `None`
/// where that would be too thin to close a surface.
pub(super) fn thinner(condition: &ConditionResult, layer: &Layer, ratio: f64) -> Option<f64> {
    let (thickness, material) = (layer.thickness_m?, layer.material.as_ref()?);
    let spectral = &condition.spectral;
    let absorptance = spectral.absorptance.get(&layer.path)?;
    let points: Vec<Point> = spectral
        .wavelength_nm
        .iter()
        .zip(absorptance)
        .zip(&spectral.photon_current_ma_per_cm2_per_nm)
        .map(|((nm, share), flux)| Point {
            main: material.absorption(nm * 1e-9, condition.temperature_k) * thickness,
            others: 0.0,
            eqe: *share,
            flux: *flux,
        })
        .collect();
    let scale = scale_for(&spectral.wavelength_nm, &points, ratio)?;
    let nanometres = (thickness * scale * 1e9).floor();
    (nanometres >= LEAST_NM).then_some(nanometres * 1e-9)
}

/// Thinner than this no film closes a surface, nm.
const LEAST_NM: f64 = 5.0;
