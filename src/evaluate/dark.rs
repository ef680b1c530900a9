//! The current–voltage curve in the dark.

use crate::circuit::diode::Diode;
use crate::circuit::series::Series;
use crate::design::Design;
use crate::evaluate::wiring::Wiring;
use crate::results::Curve;

/// The least current, mA/cm2: a hundred thousandth of what a good meter on a square centimetre
/// resolves, and low enough to show where one recombination current takes over from another.
const LEAST_DECADE: i32 = -9;
/// Points in a decade of current.
const PER_DECADE: i32 = 8;
/// mA/cm2 to A/m2.
const A_PER_M2: f64 = 10.0;

/// Each junction, and the stack where all stand in one string, driven forward without light, from
/// 1e-9 mA/cm2 to the decade above twice the largest photocurrent.
///
/// Voltages ascend; currents are negative, since the junction takes power. With separate terminals
/// only the junctions' voltages are filled in.
pub(super) fn dark_curve(design: &Design, diodes: &[Diode], strings: &[Wiring]) -> Curve {
    let largest = diodes.iter().map(|diode| diode.photocurrent / A_PER_M2).fold(0.0, f64::max);
    let last_decade = (2.0 * largest).max(10.0).log10().ceil().min(12.0) as i32;
    let dark: Vec<Diode> = diodes.iter().map(|diode| Diode { photocurrent: 0.0, ..diode.clone() }).collect();
    let own = match strings {
        [one] => one.own(&dark),
        // Each junction by itself, without the light of the others.
        _ => dark.iter().map(|diode| Diode { sends_down: None, ..diode.clone() }).collect(),
    };
    let series = match strings {
        [one] => one.series(&own),
        _ => Series::new(&own, 0.0, &[]),
    };
    let mut points = Vec::new();
    for step in LEAST_DECADE * PER_DECADE..=last_decade * PER_DECADE {
        let current_ma = 10f64.powf(f64::from(step) / f64::from(PER_DECADE));
        let point = series.at_current(-A_PER_M2 * current_ma);
        if point.voltage.is_finite() {
            points.push((-current_ma, point));
        }
    }
    let of_junction = |index: usize| points.iter().map(|(_, point)| point.junctions[index]).collect();
    Curve {
        voltage_v: match strings {
            [_] => points.iter().map(|(_, point)| point.voltage).collect(),
            _ => Vec::new(),
        },
        current_ma_per_cm2: points.iter().map(|(current, _)| *current).collect(),
        junction_voltage_v: design
            .junctions
            .iter()
            .enumerate()
            .map(|(index, junction)| (junction.name.value.clone(), of_junction(index)))
            .collect(),
    }
}
