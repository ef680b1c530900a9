//! Where every watt goes.

use crate::design::{Condition, Design};
use crate::evaluate::lit::Lit;
use crate::evaluate::wiring::{Flow, Operating};
use crate::results::LedgerLine;

/// One junction's part in the account.
struct Share {
    junction: usize,
    /// Photon current absorbed where it collects from, with the light it gets from other junctions
    /// and less that which it gives.
    absorbed: f64,
    /// The part of it that is collected.
    photocurrent: f64,
    /// The smallest photocurrent of its string, or the operating current where a shunt lets
    /// more than that through.
    reference: f64,
    current: f64,
    voltage: f64,
}

/// What one line takes of a junction's part, W/m2.
type Loss<'a> = &'a dyn Fn(&Share) -> f64;

/// The account of one condition, in W/m2, in this order: fingers, reflected, each layer that
/// collects nothing, passing below every gap, what no data reach, heat above the gap and tail
/// below it, coupling, not collected, mismatch, recombined, voltage — each by junction —, tunnel and
/// series resistance, delivered. Coupling stands at the junction that gets the light and is what is
/// lost between the two gaps; all lines behind it count the light where it ends up.
///
/// The lines sum to what the cell receives. Each is ≥ 0 but `tail`, photons absorbed below the
/// gap that still give one electron each, and `coupling` where a junction with the narrower gap
/// stands above or one is driven backwards and sends less than in the dark. Heat is the absorbed power less `E_g` per electron;
/// from there on every line is in units of `E_g` per charge, less the terminal's work.
pub(super) fn account(
    design: &Design,
    condition: &Condition,
    lit: &Lit,
    (strings, flows): (&[Operating], &[Flow]),
) -> Vec<LedgerLine> {
    let received = condition.concentration * condition.incidence_rad.cos();
    let shading = design.fingers.as_ref().map_or(0.0, |fingers| fingers.shading);
    let open = received * (1.0 - shading);

    let (reflected, passing) = lit.leaving_power();
    let mut lines = vec![
        line("fingers", received * condition.light.total_w_per_m2 * shading),
        line("reflected", open * reflected),
    ];
    for (row, (layer, junction)) in lit.rows.iter().enumerate() {
        let power = open * lit.row_power[row];
        if junction.is_none() && power > 0.0 {
            let path = design.layers[*layer].path.clone();
            lines.push(LedgerLine { layer: Some(path), ..line("absorbed", power) });
        }
    }
    lines.push(line("passing", open * passing));
    let beyond = open * lit.beyond_w_per_m2;
    if beyond.abs() > 1e-9 * condition.incident_w_per_m2() {
        lines.push(line("beyond_data", beyond));
    }

    let named = |name: &str, junction: usize, value: f64| LedgerLine {
        junction: Some(design.junctions[junction].name.value.clone()),
        ..line(name, value)
    };
    for junction in 0..design.junctions.len() {
        let gap = lit.gap_ev[junction];
        let [above, below] =
            lit.split_at_gap(junction).map(|(current, power)| open * (power - gap * current));
        lines.push(named("heat", junction, above));
        if below != 0.0 {
            lines.push(named("tail", junction, below));
        }
    }
    for flow in flows {
        let lost = (lit.gap_ev[flow.from] - lit.gap_ev[flow.to]) * flow.current;
        lines.push(named("coupling", flow.to, lost));
    }
    let shares = shares(lit, open, (strings, flows));
    let gap = |share: &Share| lit.gap_ev[share.junction];
    let carried = |share: &Share| share.photocurrent.min(share.reference);
    let each: [(&str, Loss); 4] = [
        ("not_collected", &|share| gap(share) * (share.absorbed - share.photocurrent)),
        ("mismatch", &|share| gap(share) * (share.photocurrent - carried(share))),
        ("recombined", &|share| gap(share) * (carried(share) - share.current).max(0.0)),
        ("voltage", &|share| gap(share) * carried(share).min(share.current) - share.current * share.voltage),
    ];
    for (name, value) in each {
        lines.extend(shares.iter().map(|share| named(name, share.junction, value(share))));
    }
    let sum = |of: &dyn Fn(&Operating) -> f64| -> f64 { strings.iter().map(of).sum() };
    let squared = |string: &Operating| string.best.current.powi(2);
    let tunnel = sum(&|it| {
        squared(it) * it.wiring.tunnels_ohm_m2 + it.best.current * it.best.tunnels.iter().sum::<f64>()
    });
    let series = sum(&|it| squared(it) * it.wiring.fingers_ohm_m2);
    let work: f64 = shares.iter().map(|share| share.current * share.voltage).sum();
    lines.push(line("tunnel", tunnel));
    lines.push(line("series", series));
    lines.push(line("delivered", work - tunnel - series));
    lines
}

fn shares(lit: &Lit, open: f64, (strings, flows): (&[Operating], &[Flow])) -> Vec<Share> {
    let net = |junction: usize| -> f64 {
        let part = |flow: &Flow| {
            let got = if flow.to == junction { flow.current } else { 0.0 };
            got - if flow.from == junction { flow.current } else { 0.0 }
        };
        open * lit.photocurrent(junction) + flows.iter().map(part).sum::<f64>()
    };
    let mut shares = Vec::new();
    for string in strings {
        let photocurrents: Vec<f64> = string.wiring.junctions.iter().map(|&junction| net(junction)).collect();
        let smallest = photocurrents.iter().copied().fold(f64::INFINITY, f64::min);
        for (at, &junction) in string.wiring.junctions.iter().enumerate() {
            shares.push(Share {
                junction,
                absorbed: photocurrents[at]
                    + open * (lit.absorbed_current(junction) - lit.photocurrent(junction)),
                photocurrent: photocurrents[at],
                reference: smallest.max(string.best.current),
                current: string.best.current,
                voltage: string.best.junctions[at],
            });
        }
    }
    shares.sort_by_key(|share| share.junction);
    shares
}

fn line(name: &str, value: f64) -> LedgerLine {
    LedgerLine { line: name.to_owned(), junction: None, layer: None, value }
}
