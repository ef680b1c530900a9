//! `gap.equal`: two neighbouring junctions with the same gap.

use super::show::{ev, significant};
use super::{Context, Report, Rule, Threshold};
use crate::finding::{Finding, Severity};
use crate::light::Spectrum;
use crate::numerics::constants::{CHARGE, HC};

pub(super) static RULE: Rule = Rule {
    code: "gap.equal",
    severity: Severity::Warning,
    title: "two neighbouring junctions have the same gap",
    threshold: Some(Threshold { default: 0.02 * CHARGE, unit: "eV", meaning: "the difference of the gaps" }),
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let near = context.threshold(&RULE) / CHARGE;
    for pair in context.junctions.windows(2) {
        let [upper, lower] = pair else { continue };
        let (Some(above), Some(below)) = (upper.gap(), lower.gap()) else { continue };
        let apart = (above.ev - below.ev).abs();
        if apart >= near {
            continue;
        }
        let (Some((_, first)), Some((_, second))) = (upper.main_absorber(), lower.main_absorber()) else {
            continue;
        };
        let (top, bottom) = (upper.name(), lower.name());
        let apart = if apart < 5e-4 {
            format!("both have a gap of {}", ev(above.ev))
        } else {
            format!("have gaps only {} meV apart", significant(apart * 1e3, 2))
        };
        let mut finding = Finding::warning(
            RULE.code,
            format!("`{top}` and `{bottom}` {apart}: `{bottom}` gets what `{top}` is too thin to take"),
        )
        .at(first.spans.material, format!("gap {}", ev(above.ev)))
        .beside(second.spans.material, format!("gap {}", ev(below.ev)));
        let light = context.design.conditions.first();
        if let Some(gap) = light.and_then(|condition| halving_gap(&condition.light, below.ev)) {
            finding =
                finding.help(format!("give `{top}` a gap of {}, which shares the light evenly", ev(gap)));
        }
        report.push([top, bottom], finding);
    }
}

/// The gap in eV above which lies half of the photons of `light` that lie above `gap_ev`.
fn halving_gap(light: &Spectrum, gap_ev: f64) -> Option<f64> {
    let edge = HC / (gap_ev * CHARGE);
    let (first, last) = light.range_m()?;
    let half = light.photon_current(first, edge) / 2.0;
    if half <= 0.0 {
        return None;
    }
    let (mut low, mut high) = (first, edge.min(last));
    for _ in 0..50 {
        let middle = 0.5 * (low + high);
        if light.photon_current(first, middle) < half { low = middle } else { high = middle }
    }
    Some(HC / high / CHARGE)
}

#[cfg(test)]
mod tests {
    use super::halving_gap;
    use crate::light::Spectrum;

    #[test]
    fn flat_photon_flux_is_halved_in_the_middle() {
        // Photon flux ∝ E λ constant from 400 to 1000 nm: the half lies at 700 nm when the gap
        // lies beyond the table; hc/700 nm = 1.77120 eV (CODATA 2018).
        let wavelength_m: Vec<f64> = (0..=600).map(|i| (400.0 + f64::from(i)) * 1e-9).collect();
        let irradiance = wavelength_m.iter().map(|w| 1e-9 / w).collect();
        let light = Spectrum::from_table("flat", wavelength_m, irradiance, "made up");
        let gap = halving_gap(&light, 1.0).expect("has light");
        assert!((gap - 1.771_20).abs() < 1e-4, "{gap}");
    }
}
