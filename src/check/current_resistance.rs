//! `current.resistance`: what lies in series takes a large part of the power.

use super::show::{current, percent, significant};
use super::{Context, Report, Rule, Threshold};
use crate::finding::{Finding, Severity};
use crate::numerics::constants::thermal_voltage;
use crate::results::ConditionResult;

pub(super) static RULE: Rule = Rule {
    code: "current.resistance",
    severity: Severity::Warning,
    title: "series resistance takes a large part of the power",
    threshold: Some(Threshold {
        default: 0.25,
        unit: "%",
        meaning: "what resistances take of the power before them",
    }),
    needs_results: true,
    run,
};

fn run(context: &Context, report: &mut Report) {
    let Some(results) = context.results else { return };
    let worst = results
        .conditions
        .iter()
        .map(|condition| (condition, lost(condition)))
        .reduce(|worst, next| if next.1 > worst.1 { next } else { worst });
    let Some((condition, share)) = worst.filter(|(_, share)| *share > context.threshold(&RULE)) else {
        return;
    };
    let Some(grid) = &condition.grid else { return };
    let Some(fingers) = &context.design.fingers else { return };
    let ohm_cm2 = grid.series_resistance_ohm_cm2;
    let least = condition.junctions.iter().map(|junction| junction.photocurrent_ma_per_cm2);
    let least = least.fold(f64::INFINITY, f64::min);
    let drop = 1e-3 * least * ohm_cm2;
    let finding = Finding::warning(
        RULE.code,
        format!(
            "{} ohm cm2 in series take {} of the power under `{}`: {} of light would drop {} V over it",
            significant(ohm_cm2, 3),
            percent(share),
            condition.name,
            current(least),
            significant(drop, 3)
        ),
    )
    .at(fingers.span, format!("{} ohm cm2", significant(ohm_cm2, 3)));
    report.push([condition.name.as_str()], finding.help(help(condition, (least, ohm_cm2))));
}

/// What series resistance takes of what it takes and what is delivered.
fn lost(condition: &ConditionResult) -> f64 {
    let of = |line: &str| -> f64 {
        let same = condition.ledger_w_per_m2.iter().filter(|known| known.line == line);
        same.map(|known| known.value).sum()
    };
    let (series, delivered) = (of("series"), of("delivered"));
    if series > 0.0 { series / (series + delivered) } else { 0.0 }
}

/// Efficiency over concentration peaks where the drop is kT/q for each junction of the string: the
/// resistance of that at this light, and the light of that with this resistance.
fn help(condition: &ConditionResult, (ma_per_cm2, ohm_cm2): (f64, f64)) -> String {
    let volts = condition.junctions.len() as f64 * thermal_voltage(condition.temperature_k);
    let enough = volts / (1e-3 * ma_per_cm2);
    let lower = if enough < 0.1 {
        format!("{} mohm cm2", significant(1e3 * enough, 2))
    } else {
        format!("{} ohm cm2", significant(enough, 2))
    };
    let times = condition.concentration * enough / ohm_cm2;
    if condition.concentration > 1.0 && times >= 1.0 {
        return format!("bring it below {lower}, or keep to {} times", significant(times, 2));
    }
    format!("bring it below {lower}, with more or taller fingers")
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::results::JunctionResult;

    #[test]
    fn names_the_light_at_which_efficiency_peaks() {
        // One junction at 25 °C and 500 times with 14 A/cm2: kT/q = 25.69 mV is 1.8 mohm cm2; with
        // 100 mohm cm2 the peak lies at 500·1.835/100 = 9.2 times.
        let condition = ConditionResult {
            concentration: 500.0,
            temperature_k: 298.15,
            junctions: vec![JunctionResult::default()],
            ..ConditionResult::default()
        };
        assert_eq!(help(&condition, (14_000.0, 0.1)), "bring it below 1.8 mohm cm2, or keep to 9.2 times");
    }
}
