//! `light.range`: a spectrum that does not reach as far as a junction can use it.

use super::junctions::JunctionFacts;
use super::show::{ev, percent, significant};
use super::{Context, Report, Rule, Threshold};
use crate::design::Condition;
use crate::finding::{Finding, Severity};
use crate::light::{DATA_START_M, Spectrum, blackbody};
use crate::numerics::constants::{CHARGE, HC};

pub(super) static RULE: Rule = Rule {
    code: "light.range",
    severity: Severity::Error,
    title: "a spectrum ends before a junction's edge",
    threshold: Some(Threshold {
        default: 1e-3,
        unit: "%",
        meaning: "the share of a junction's current that may be missing",
    }),
    needs_results: false,
    run,
};

/// Colour temperature of the sun's visible and near infrared light, K.
const SUN_K: f64 = 5772.0;

/// A table that has faded to this share of its peak has ended by itself.
const FADED: f64 = 1e-3;

fn run(context: &Context, report: &mut Report) {
    for condition in &context.design.conditions {
        let gaps: Vec<(&JunctionFacts, f64)> =
            context.junctions.iter().filter_map(|facts| facts.gap().map(|gap| (facts, gap.ev))).collect();
        if let Some(finding) = dark(condition, &gaps) {
            report.push([condition.name.as_str()], finding);
            continue;
        }
        let allowed = context.threshold(&RULE);
        // The junction that misses most speaks for the spectrum.
        let worst = bands(&gaps)
            .into_iter()
            .filter_map(|(facts, from, to)| {
                Some((facts, to, missing(&condition.light, from, to).filter(|share| *share > allowed)?))
            })
            .reduce(|worst, next| if next.2 > worst.2 { next } else { worst });
        if let Some((facts, edge, share)) = worst {
            report.push([condition.name.as_str(), facts.name()], short(condition, facts, edge, share));
        }
    }
}

/// Band of wavelengths that falls to each junction, m: from the edge of the widest-reaching
/// junction above it to its own.
fn bands<'a, 'b>(gaps: &[(&'b JunctionFacts<'a>, f64)]) -> Vec<(&'b JunctionFacts<'a>, f64, f64)> {
    let mut from = DATA_START_M;
    let mut bands = Vec::new();
    for (facts, gap) in gaps {
        let to = HC / (gap * CHARGE);
        if to > from {
            bands.push((*facts, from, to));
            from = to;
        }
    }
    bands
}

/// Share of the current between `from` and `to` that lies beyond the ends of `light`, judged by a
/// black body of the sun's colour with as many photons as `light` where it has any. `None` where
/// nothing is missing or the light has faded out before its table ends.
fn missing(light: &Spectrum, from: f64, to: f64) -> Option<f64> {
    let (start, end) = light.range_m()?;
    if start <= from && end >= to {
        return None;
    }
    let peak = light.irradiance.iter().copied().fold(0.0, f64::max);
    let goes_on = |value: Option<&f64>| value.is_some_and(|value| *value > FADED * peak);
    let before = (start > from && goes_on(light.irradiance.first())).then(|| (from, start.min(to)));
    let after = (end < to && goes_on(light.irradiance.last())).then(|| (end.max(from), to));
    if before.is_none() && after.is_none() {
        return None;
    }
    let model = blackbody(SUN_K, 1.0);
    let scale = light.photon_current(start, end) / model.photon_current(start, end);
    if !scale.is_finite() || scale <= 0.0 {
        return None;
    }
    let gaps = [before, after];
    let lost: f64 = gaps.into_iter().flatten().map(|(from, to)| scale * model.photon_current(from, to)).sum();
    let held = light.photon_current(from.max(start).min(to), to.min(end).max(from));
    (lost > 0.0).then(|| lost / (lost + held.max(0.0)))
}

fn short(condition: &Condition, facts: &JunctionFacts, edge: f64, share: f64) -> Finding {
    let light = &condition.light;
    let (start, end) = light.range_m().unwrap_or((0.0, 0.0));
    let nm = |metres: f64| format!("{} nm", significant(metres * 1e9, 4));
    let name = facts.name();
    let (fault, help) = if end < edge {
        (
            format!("ends at {}, but `{name}` absorbs to {}", nm(end), nm(edge)),
            format!("give a spectrum that reaches {}", nm(edge)),
        )
    } else {
        (
            format!("starts at {}, but `{name}` absorbs from {} on", nm(start), nm(DATA_START_M)),
            format!("give a spectrum that starts at {}", nm(DATA_START_M)),
        )
    };
    let finding = Finding::warning(
        RULE.code,
        format!("`{}` {fault}: about {} of its current may be missing", light.name, percent(share)),
    )
    .at(condition.span, format!("light `{}`", light.name))
    .help(help);
    match facts.main_absorber() {
        Some((_, layer)) => finding.beside(layer.spans.material, format!("edge at {}", nm(edge))),
        None => finding,
    }
}

/// A light with no photon that some junction could use.
fn dark(condition: &Condition, gaps: &[(&JunctionFacts, f64)]) -> Option<Finding> {
    let light = &condition.light;
    // Linear between points: light begins after the last dark point before the first lit one.
    let lit = light.irradiance.iter().position(|power| *power > 0.0);
    let begins = lit.and_then(|lit| light.wavelength_m.get(lit.saturating_sub(1)));
    let starved: Vec<_> =
        gaps.iter().filter(|(_, gap)| begins.is_none_or(|from| *from >= HC / (gap * CHARGE))).collect();
    // The narrowest of them says most: the wider ones are dark all the more.
    let (facts, gap) = starved.iter().min_by(|a, b| a.1.total_cmp(&b.1))?;
    let first = light.wavelength_m.iter().zip(&light.irradiance).find(|(_, power)| **power > 0.0);
    let (message, label) = match first {
        None => (format!("`{}` holds no light at all", light.name), "dark".to_string()),
        Some((from, _)) => (
            format!(
                "`{}` has no photons above the {} of `{}`, so the junction stays dark",
                light.name,
                ev(*gap),
                facts.name()
            ),
            format!("photons up to {}", ev(HC / from / CHARGE)),
        ),
    };
    let finding = Finding::error(RULE.code, message).at(condition.span, label).help(match first {
        Some((from, _)) => format!(
            "give `{}` a gap below {}, or a light with wavelengths below {} nm",
            facts.name(),
            ev(HC / from / CHARGE),
            significant(HC / (gap * CHARGE) * 1e9, 3)
        ),
        None => "give a spectrum with irradiance above 0".to_string(),
    });
    Some(match facts.main_absorber() {
        Some((_, layer)) => finding.beside(layer.spans.material, format!("gap {}", ev(*gap))),
        None => finding,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sun_between(start_nm: f64, end_nm: f64) -> Spectrum {
        let sun = blackbody(SUN_K, 1.0);
        let wavelength_m: Vec<f64> =
            (0..=400).map(|i| (start_nm + (end_nm - start_nm) * f64::from(i) / 400.0) * 1e-9).collect();
        let irradiance = wavelength_m.iter().map(|w| 3.0 * sun.irradiance_at(*w)).collect();
        Spectrum::from_table("cut", wavelength_m, irradiance, "made up")
    }

    #[test]
    fn a_cut_sun_misses_what_the_sun_has_there() {
        // Photons of a 5772 K black body in 800..870 nm over those in 660..870 nm:
        // tests/reference/light_range.py, scipy 1.17.1.
        let share = missing(&sun_between(300.0, 800.0), 660e-9, 870e-9).expect("ends early");
        assert!((share - 0.314_441).abs() < 2e-3, "{share}");
    }

    #[test]
    fn a_light_that_faded_out_misses_nothing() {
        let mut lamp = sun_between(600.0, 700.0);
        for power in [0, 400] {
            lamp.irradiance[power] = 0.0;
        }
        assert_eq!(missing(&lamp, 280e-9, 870e-9), None);
    }

    #[test]
    fn a_light_that_reaches_the_edge_misses_nothing() {
        assert_eq!(missing(&sun_between(280.0, 900.0), 280e-9, 870e-9), None);
    }
}
