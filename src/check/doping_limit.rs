//! `doping.limit`: more doping than the material takes up electrically.

use super::junctions::{describe, letter};
use super::show::significant;
use super::{Context, Report, Rule, Threshold};
use crate::design::Polarity;
use crate::finding::{Finding, Severity};
use crate::materials::carriers::Carrier;

pub(super) static RULE: Rule = Rule {
    code: "doping.limit",
    severity: Severity::Warning,
    title: "a layer is doped beyond what stays active",
    threshold: Some(Threshold {
        default: 3.0,
        unit: "%",
        meaning: "the doping, as a share of what practice gets active in the material",
    }),
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    for layer in &context.design.layers {
        let (Some(doping), Some(material)) = (&layer.doping, &layer.material) else { continue };
        let majority = match doping.polarity {
            Polarity::N => Carrier::Electron,
            Polarity::P => Carrier::Hole,
        };
        let Some(most) = material.doping_limit_per_m3(majority) else { continue };
        let share = doping.density_per_m3 / most;
        if share <= context.threshold(&RULE) {
            continue;
        }
        let sign = letter(doping.polarity);
        let density = |per_m3: f64| format!("{} /cm3", exponent(per_m3 * 1e-6));
        report.push(
            [layer.path.as_str()],
            Finding::warning(
                RULE.code,
                format!(
                    "{} is {sign}-doped to {}, {} times what stays active in it, about {}",
                    describe(context.design, layer),
                    density(doping.density_per_m3),
                    significant(share, 2),
                    density(most)
                ),
            )
            .at(doping.span, "more than the material takes up")
            .help(format!("write `{sign} {}`, or another dopant's limit as `doping_limit`", density(most))),
        );
    }
}

/// `8e19`, `2.5e18`
fn exponent(value: f64) -> String {
    let power = value.abs().max(f64::MIN_POSITIVE).log10().floor() as i32;
    format!("{}e{power}", significant(value / 10f64.powi(power), 2))
}

#[cfg(test)]
mod tests {
    #[test]
    fn densities_read_as_written() {
        assert_eq!(super::exponent(8e19), "8e19");
        assert_eq!(super::exponent(2.5e18), "2.5e18");
    }
}
