//! Compositions as people write them.

use crate::materials::alloy::{Composition, Family};
use crate::materials::formula::{self, Part, Share};
use crate::materials::trim;

impl Family {
    /// `Ga0.516In0.484P`, `(Al0.3Ga0.7)0.516In0.484P`, `Cs0.2FA0.8Pb(I0.8Br0.2)3`; an element that
    /// is not there is left out.
    pub fn label(&self, composition: &Composition) -> String {
        let parts = self.pattern();
        if parts.is_empty() {
            return self.site_label(0, composition) + &self.site_label(1, composition);
        }
        let written = parts.iter().map(|share| {
            let count = share.fraction.map(trim).unwrap_or_default();
            match self.position(&share.element) {
                Some((site, _)) => {
                    let mixed = composition[site].iter().filter(|fraction| **fraction >= 5e-5).count() > 1;
                    let own = self.site_label(site, composition);
                    if mixed && !count.is_empty() { format!("({own}){count}") } else { own + &count }
                }
                None => format!("{}{count}", share.element),
            }
        });
        written.collect()
    }

    /// Elements that every member has and no composition changes: lead in a perovskite.
    pub fn frame(&self) -> Vec<String> {
        let all = self.pattern().into_iter().map(|share| share.element);
        all.filter(|element| self.position(element).is_none()).collect()
    }

    /// How many atoms a formula unit has on a sublattice: 3 for the halogens of a perovskite.
    pub fn times(&self, site: usize) -> f64 {
        let pattern = self.pattern();
        let own =
            pattern.iter().find(|share| self.position(&share.element).is_some_and(|(at, _)| at == site));
        own.and_then(|share| share.fraction).unwrap_or(1.0)
    }

    /// The formula of the first member with the number of atoms of each element where it is not 1;
    /// empty where its name is none.
    pub fn pattern(&self) -> Vec<Share> {
        let first = self.members.iter().flatten().next();
        let parts = first.and_then(|member| formula::split(&member.material.name).ok()).unwrap_or_default();
        let shares = parts.into_iter().filter_map(|part| match part {
            Part::Element(share) => Some(share),
            Part::Bracket { .. } => None,
        });
        shares.collect()
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
        // Ions of a perovskite stand side by side.
        if let [(first, a), (second, b), (third, c)] = present[..]
            && self.frame().is_empty()
        {
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
