//! Compositions as people write them.

use crate::materials::alloy::{Composition, Family};
use crate::materials::trim;

impl Family {
    /// `Ga0.516In0.484P`, `(Al0.3Ga0.7)0.516In0.484P`; an element that is not there is left out.
    pub fn label(&self, composition: &Composition) -> String {
        let [three, five] = [self.site_label(0, composition), self.site_label(1, composition)];
        three + &five
    }

    fn site_label(&self, site: usize, composition: &Composition) -> String {
        let present: Vec<(&String, f64)> = self.sites[site]
            .iter()
            .zip(composition[site].iter().copied())
            .filter(|(_, fraction)| *fraction >= 5e-5)
            .collect();
        if let [(only, _)] = present[..] {
            return only.clone();
        }
        if let [(first, a), (second, b), (third, c)] = present[..] {
            // Aluminium and gallium share a bracket: the fraction of aluminium in it is what the
            // trade calls the composition.
            let inner = round3(a / (a + b));
            return format!(
                "({first}{}{second}{}){}{third}{}",
                trim(inner),
                trim(1.0 - inner),
                trim(1.0 - round3(c)),
                trim(round3(c))
            );
        }
        // The last fraction is what the rounded others leave, so that a label always sums to 1.
        let mut left = 1.0;
        let count = present.len();
        let parts = present.into_iter().enumerate().map(|(at, (element, fraction))| {
            let shown = if at + 1 == count { left } else { round3(fraction) };
            left -= shown;
            format!("{element}{}", trim(shown))
        });
        parts.collect()
    }
}

fn round3(fraction: f64) -> f64 {
    (fraction * 1000.0).round() / 1000.0
}
