//! Points of a current–voltage curve, close where it bends.

use crate::circuit::series::{Point, Series};

/// Points on the flat part, even in voltage.
const FLAT: usize = 40;
/// Points around the knee, even in the logarithm of the distance from short circuit.
const KNEE: usize = 70;
/// Points on the falling part, even in current.
const FALLING: usize = 70;
/// Points below the dip of a tunnel junction, even in voltage.
const BEHIND: usize = 120;

/// The share of the short-circuit current that is missing where flat ends and the knee begins,
/// and where the knee ends.
const KNEE_FROM: f64 = 1e-3;
const KNEE_TO: f64 = 0.15;

/// The curve from short to open circuit, ascending in voltage, with `best` as one of its points;
/// where a tunnel junction passes its peak, as met on the way from open circuit down.
pub fn points(series: &Series, short: &Point, best: &Point) -> Vec<Point> {
    let mut points = vec![short.clone()];
    if short.current <= 0.0 {
        points.push(series.open_circuit());
        return tidy(points);
    }
    let mut most = short.current;
    if series.passes_a_peak(short) {
        most = series.least_crest();
        let crest = series.at_current(most);
        let dip_v = crest.voltage;
        points.push(crest);
        for i in 1..BEHIND {
            points.push(series.at_voltage(dip_v * i as f64 / BEHIND as f64));
        }
        points.push(series.at_voltage(dip_v * (1.0 - 1e-6)));
    } else {
        let knee_start = series.at_current(most * (1.0 - KNEE_FROM));
        for i in 1..FLAT {
            points.push(series.at_voltage(knee_start.voltage * i as f64 / FLAT as f64));
        }
    }
    let ratio = (KNEE_TO / KNEE_FROM).ln();
    for i in 0..KNEE {
        let missing = KNEE_FROM * (ratio * i as f64 / KNEE as f64).exp();
        points.push(series.at_current(most * (1.0 - missing)));
    }
    for i in 0..=FALLING {
        let missing = KNEE_TO + (1.0 - KNEE_TO) * i as f64 / FALLING as f64;
        points.push(series.at_current(most * (1.0 - missing)));
    }
    points.push(best.clone());
    tidy(points)
}

fn tidy(mut points: Vec<Point>) -> Vec<Point> {
    points.retain(|point| point.voltage.is_finite());
    points.sort_by(|a, b| a.voltage.total_cmp(&b.voltage).then(b.current.total_cmp(&a.current)));
    points.dedup_by(|a, b| a.voltage == b.voltage);
    points
}
