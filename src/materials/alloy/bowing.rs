//! Bowing: what a mixed crystal lacks of the weighted mean of its end members.

use std::collections::BTreeMap;

use crate::materials::alloy::{Composition, Family, partners};

/// A bowing parameter `constant + slope·x`, `x` the fraction of the pair's first element.
#[derive(Clone, Copy, Debug, PartialEq, Default)]
pub struct BowingLaw {
    /// At `x` = 0.
    pub constant: f64,
    /// Per unit of `x`.
    pub slope: f64,
}

/// The bowing of one ternary: two elements mixed on one sublattice, one element on the other.
#[derive(Clone, Debug, PartialEq)]
pub struct Bowing {
    /// The mixed elements; the first is the one a slope counts.
    pub pair: [String; 2],
    /// The element of the other sublattice; empty where both are shared.
    pub with: String,
    /// By quantity: `direct`, `x`, `l`, [`LATTICE`], or a name of
    /// [`constants::NAMES`](crate::materials::constants::NAMES).
    pub laws: BTreeMap<&'static str, BowingLaw>,
}

/// The quantity under which a family's lattice constant bows, Å.
pub const LATTICE: &str = "lattice";

/// How a quaternary takes the bowing of the ternaries around it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Surface {
    /// Each in full: R. L. Moon, G. A. Antypas, L. W. James, J. Electron. Mater. 3, 635 (1974). Meets
    /// the gaps measured of InGaAsP and AlGaInAs on InP within 0.03 eV.
    Full,
    /// The mean of the ternaries, weighted by the products of the mixed fractions: T. H. Glisson et
    /// al., J. Electron. Mater. 7, 1 (1978). Up to 0.06 eV above what is measured of InGaAsP, 0.05 eV
    /// above that of GaInAsSb, where the full sum is 0.1 eV below.
    Mean,
}

impl Surface {
    /// What was done, with its source.
    pub fn cite(self) -> &'static str {
        match self {
            Self::Full => {
                "bowing of the ternaries around it, each in full: R. L. Moon, G. A. Antypas, L. W. James, J. Electron. Mater. 3, 635 (1974)"
            }
            Self::Mean => {
                "mean of the ternaries around it, weighted by the products of the mixed fractions: T. H. Glisson, J. R. Hauser, M. A. Littlejohn, C. K. Williams, J. Electron. Mater. 7, 1 (1978)"
            }
        }
    }
}

impl Family {
    /// What bowing takes off a quantity, see [`Surface`]: `Σ p_ab y_c C_abc(u) f_ab` over pairs `ab` of
    /// either sublattice and elements `c` of the other, with `p_ab = x_a x_b` and
    /// `u = (1 + x_a − x_b)/2`; `f` is 1, or `u (1 − u)/Σ p` for the mean. Both are exact in ternaries.
    pub(super) fn bowing(&self, composition: &Composition, quantity: &str) -> f64 {
        let (mut sum, mut weights) = (0.0, 0.0);
        for site in 0..2 {
            let (elements, fractions) = (&self.sites[site], &composition[site]);
            for first in 0..elements.len() {
                for second in first + 1..elements.len() {
                    let pair = fractions[first] * fractions[second];
                    if pair <= 0.0 {
                        continue;
                    }
                    weights += pair;
                    let share = (1.0 + fractions[first] - fractions[second]) / 2.0;
                    let part = match self.surface {
                        Surface::Full => 1.0,
                        Surface::Mean => share * (1.0 - share),
                    };
                    let others = self.sites[1 - site].iter().map(String::as_str);
                    let others = others.chain(self.sites[1 - site].is_empty().then_some(""));
                    for (other, fraction) in others.zip(partners(&composition[1 - site])) {
                        let names = [&elements[first], &elements[second]];
                        sum += pair * fraction * part * self.bowing_law(names, other, quantity, share);
                    }
                }
            }
        }
        match self.surface {
            Surface::Full => sum,
            Surface::Mean => sum / weights.max(f64::MIN_POSITIVE),
        }
    }

    fn bowing_law(&self, pair: [&String; 2], with: &str, quantity: &str, share: f64) -> f64 {
        for bowing in self.bowings.iter().filter(|bowing| bowing.with == with) {
            let of_first = if [&bowing.pair[0], &bowing.pair[1]] == pair {
                share
            } else if [&bowing.pair[1], &bowing.pair[0]] == pair {
                1.0 - share
            } else {
                continue;
            };
            let law = bowing.laws.get(quantity).copied().unwrap_or_default();
            return law.constant + law.slope * of_first;
        }
        0.0
    }
}
