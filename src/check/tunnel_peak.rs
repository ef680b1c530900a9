//! `tunnel.peak`: the current the stack would work at is above what a tunnel junction carries by
//! tunnelling.

use super::show::{current, current_beside, significant};
use super::{Context, Report, Rule};
use crate::finding::{Finding, Severity};

pub(super) static RULE: Rule = Rule {
    code: "tunnel.peak",
    severity: Severity::Error,
    title: "the operating current is above a tunnel junction's peak",
    threshold: None,
    needs_results: true,
    run,
};

/// A/m2 → mA/cm2.
const MA_PER_CM2: f64 = 0.1;

/// Head room a peak should keep over the current it carries, for spread over wafer and lenses.
const HEAD_ROOM: f64 = 1.5;

fn run(context: &Context, report: &mut Report) {
    let Some(results) = context.results else { return };
    for (index, tunnel) in context.design.interconnects.iter().enumerate() {
        let Some(peak) = tunnel.peak_a_per_m2.map(|peak| peak * MA_PER_CM2) else { continue };
        let worst = results
            .conditions
            .iter()
            .filter_map(|condition| Some((condition, condition.tunnels.get(index)?.demanded_ma_per_cm2)))
            .reduce(|worst, next| if next.1 > worst.1 { next } else { worst });
        let Some((condition, demanded)) = worst.filter(|(_, demanded)| *demanded > peak) else { continue };
        let name = &tunnel.name.value;
        report.push(
            [name.as_str()],
            Finding::error(
                RULE.code,
                format!(
                    "`{name}` has to carry {} under `{}`, above its peak of {}: past the peak it drops into its valley and the voltage collapses",
                    current_beside(demanded, peak),
                    condition.name,
                    current_beside(peak, demanded)
                ),
            )
            .at(tunnel.span, format!("peak {}", current(peak)))
            .help(help(condition.concentration, demanded, peak)),
        );
    }
}

fn help(concentration: f64, operating: f64, peak: f64) -> String {
    let wanted = current(operating * HEAD_ROOM);
    if concentration > 1.0 {
        let most = concentration * peak / operating;
        return format!(
            "dope both sides for a peak of {wanted}, or keep to {} times",
            significant(most.floor().max(1.0), 4)
        );
    }
    format!("dope both sides for a peak of {wanted}")
}

#[cfg(test)]
mod tests {
    use super::help;

    #[test]
    fn names_the_concentration_it_would_carry() {
        // 500 times gives 7 A/cm2; a peak of 4.9 A/cm2 carries 500·4.9/7 = 350 times.
        assert_eq!(
            help(500.0, 7000.0, 4900.0),
            "dope both sides for a peak of 10.5 A/cm2, or keep to 350 times"
        );
    }
}
