//! Where every watt goes.

use crate::design::{Condition, Design};
use crate::evaluate::junctions::Wiring;
use crate::evaluate::lit::Lit;
use crate::results::LedgerLine;

/// A string at its maximum power point.
#[derive(Clone, Debug)]
pub(super) struct Operating {
    pub(super) wiring: Wiring,
    /// A/m2.
    pub(super) current: f64,
    /// Of each junction of the string, V.
    pub(super) junction_v: Vec<f64>,
}

/// One junction's part in the account.
struct Share {
    junction: usize,
    /// Photon current absorbed where it collects from.
    absorbed: f64,
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
/// below it, not collected, mismatch, recombined, voltage — each by junction —, tunnel and series
/// resistance, delivered.
///
/// The lines sum to what the cell receives. Each is ≥ 0 but `tail`: photons absorbed below the
/// gap that still give one electron each. Heat is the absorbed power less `E_g` per electron;
/// from there on every line is in units of `E_g` per charge, less the terminal's work.
pub(super) fn account(
    design: &Design,
    condition: &Condition,
    lit: &Lit,
    strings: &[Operating],
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
    let shares = shares(lit, open, strings);
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
    let resistance = |ohm: fn(&Wiring) -> f64| -> f64 {
        strings.iter().map(|string| string.current.powi(2) * ohm(&string.wiring)).sum()
    };
    let (tunnel, series) = (resistance(|w| w.tunnels_ohm_m2), resistance(|w| w.fingers_ohm_m2));
    let work: f64 = shares.iter().map(|share| share.current * share.voltage).sum();
    lines.push(line("tunnel", tunnel));
    lines.push(line("series", series));
    lines.push(line("delivered", work - tunnel - series));
    lines
}

fn shares(lit: &Lit, open: f64, strings: &[Operating]) -> Vec<Share> {
    let mut shares = Vec::new();
    for string in strings {
        let photocurrents: Vec<f64> =
            string.wiring.junctions.iter().map(|&junction| open * lit.photocurrent(junction)).collect();
        let smallest = photocurrents.iter().copied().fold(f64::INFINITY, f64::min);
        for (at, &junction) in string.wiring.junctions.iter().enumerate() {
            shares.push(Share {
                junction,
                absorbed: open * lit.absorbed_current(junction),
                photocurrent: photocurrents[at],
                reference: smallest.max(string.current),
                current: string.current,
                voltage: string.junction_v[at],
            });
        }
    }
    shares.sort_by_key(|share| share.junction);
    shares
}

fn line(name: &str, value: f64) -> LedgerLine {
    LedgerLine { line: name.to_owned(), junction: None, layer: None, value }
}
