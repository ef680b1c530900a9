//! Wavelengths beneath the plot, where the photon current counted so far puts them.

use super::Light;
use crate::report::figure::plot::{Scale, interpolate};
use crate::report::figure::{Drawing, Label};
use crate::report::number::fixed;

/// Ticks and their words.
pub(super) fn wavelengths(drawing: &mut Drawing, light: &Light, x: Scale, foot: f64) {
    let place = |nm: f64| interpolate(&light.wavelength_nm, &light.counted_ma, nm).map(|ma| x.of(ma));
    let step = if light.range_nm.1 > 1300.0 { 100.0 } else { 50.0 };
    let first = (light.range_nm.0 / step).ceil() as i64;
    let last = (light.range_nm.1 / step + 1e-9).floor() as i64;
    let ticks: Vec<(f64, f64)> =
        (first..=last).filter_map(|i| place(i as f64 * step).map(|x| (i as f64 * step, x))).collect();
    let outward: Vec<_> = ticks.iter().map(|(_, at)| ((*at, foot), (*at, foot + 5.0))).collect();
    drawing.lines("axis", &outward);
    let label = |at: f64, words: &str| Label::at(at, foot + 18.0, words).size(11.5).class("q").middle();
    if let Some((nm, at)) = ticks.last() {
        let words = format!("{} nm", fixed(*nm, 0).replace('\u{202f}', ""));
        let half = label(0.0, &words).width() / 2.0;
        drawing.text(label(at.min(drawing.width - half), &words));
    }
    // Hundreds first: where there is no room for all, the round ones stay.
    for hundreds in [true, false] {
        for (nm, at) in ticks.iter().filter(|(nm, _)| (nm % 100.0 == 0.0) == hundreds) {
            let words = fixed(*nm, 0).replace('\u{202f}', "");
            drawing.text_where_free([label(*at, &words)]);
        }
    }
}
