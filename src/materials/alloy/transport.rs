//! Carriers of an alloy, from what its end members and some measured compositions state.
//!
//! A ternary takes mobility laws between its neighbours among end members and measured
//! compositions; everything else between its end members, unless it is stated for the whole family.
//! A quaternary takes the mean of the ternaries around it with the weights of its bowing
//! ([`Family::bands`]). Means are of logarithms where a quantity spans decades, so that an alloy
//! never leaves the range of its neighbours. Alloy scattering enters only through the measured
//! compositions.

use crate::materials::alloy::{Composition, Family, partners};
use crate::materials::carriers::{Carriers, MobilityLaw, PerCarrier};
use crate::materials::{Origin, OriginKind};

/// What is stated of the carriers of a ternary: two elements mixed on one sublattice, one on the
/// other.
#[derive(Clone, Debug, PartialEq)]
pub struct TernaryCarriers {
    /// The mixed elements; samples count the first.
    pub pair: [String; 2],
    /// The element of the other sublattice.
    pub with: String,
    /// Stated for every composition.
    pub all: Carriers,
    /// Mobility at some fractions of the first element, ascending.
    pub samples: Vec<(f64, PerCarrier<MobilityLaw>)>,
}

/// What a family states of its carriers.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct FamilyCarriers {
    /// Stated for every composition.
    pub all: Carriers,
    /// By the ternaries around it, of a ternary itself one.
    pub ternaries: Vec<TernaryCarriers>,
}

/// A ternary and its share in a composition.
struct Share<'a> {
    weight: f64,
    site: usize,
    pair: [usize; 2],
    other: usize,
    /// Fraction of the first element of the pair in the ternary.
    first: f64,
    stated: Option<&'a TernaryCarriers>,
}

impl Family {
    /// Every element in equal parts of its sublattice.
    pub fn middle(&self) -> Composition {
        [0, 1].map(|site| vec![1.0 / self.sites[site].len().max(1) as f64; self.sites[site].len()])
    }

    /// The carriers' laws at a composition.
    pub fn carriers_at(&self, composition: &Composition) -> Carriers {
        let shares = self.shares(composition);
        let mixed = if shares.is_empty() {
            let weighted = self.weighted(composition);
            let whole = weighted.iter().find(|(weight, _)| *weight > 0.0);
            whole.map(|(_, member)| member.carriers.clone()).unwrap_or_default()
        } else {
            let each: Vec<(f64, Carriers)> =
                shares.iter().map(|share| (share.weight, self.ternary(share))).collect();
            Carriers::between(&each)
        };
        self.carriers.all.clone().or(mixed)
    }

    /// The ternaries a composition lies between; none at a corner.
    fn shares(&self, composition: &Composition) -> Vec<Share<'_>> {
        let (mut shares, mut weights) = (Vec::new(), 0.0);
        for site in 0..2 {
            let (elements, fractions) = (&self.sites[site], &composition[site]);
            for a in 0..elements.len() {
                for b in a + 1..elements.len() {
                    let product = fractions[a] * fractions[b];
                    weights += product;
                    for (other, fraction) in partners(&composition[1 - site]).iter().enumerate() {
                        let weight = product * fraction;
                        if weight <= 0.0 {
                            continue;
                        }
                        let first = (1.0 + fractions[a] - fractions[b]) / 2.0;
                        let with = self.sites[1 - site].get(other).map_or("", String::as_str);
                        let stated = self.carriers.ternaries.iter().find(|ternary| {
                            ternary.with == with
                                && ternary.pair.contains(&elements[a])
                                && ternary.pair.contains(&elements[b])
                        });
                        shares.push(Share { weight, site, pair: [a, b], other, first, stated });
                    }
                }
            }
        }
        shares.iter_mut().for_each(|share| share.weight /= weights);
        shares
    }

    /// The laws of one ternary at its composition.
    fn ternary(&self, share: &Share<'_>) -> Carriers {
        let member = |element: usize| {
            let [three, five] = if share.site == 0 { [element, share.other] } else { [share.other, element] };
            &self.members[three][five].material.carriers
        };
        let (first, second) = (member(share.pair[0]), member(share.pair[1]));
        let ends = [(1.0 - share.first, second.clone()), (share.first, first.clone())];
        let mut mixed = Carriers::between(&ends);
        let Some(stated) = share.stated else { return mixed };
        let is_turned = stated.pair[0] != self.sites[share.site][share.pair[0]];
        let (at, ends) =
            if is_turned { (1.0 - share.first, [first, second]) } else { (share.first, [second, first]) };
        if !stated.samples.is_empty() {
            let mut samples = vec![(0.0, ends[0].mobility)];
            samples.extend(stated.samples.iter().copied());
            samples.push((1.0, ends[1].mobility));
            mixed.mobility = neighbours(&samples, at);
        }
        stated.all.clone().or(mixed)
    }

    /// What an alloy adds to the origins of its end members: how its laws lie between theirs.
    pub(super) fn carrier_origins(&self, composition: &Composition) -> Vec<Origin> {
        let shares = self.shares(composition);
        let all = self.carriers_at(composition);
        let stated = |what: &str| self.origins.iter().any(|origin| origin.what == what);
        let mut origins = Vec::new();
        for what in all.known() {
            let sampled = what == "mobility" && shares.iter().any(|share| share.stated.is_some());
            let how = match (self.freedom(), sampled) {
                _ if shares.is_empty() || (stated(what) && what != "mobility") => continue,
                (1, true) => {
                    "between the compositions given and the end members: means of the logarithms of mobilities and dopings and of the exponents"
                }
                (1, false) => "between the end members: means of logarithms by fraction",
                (_, _) if what == "mobility" => {
                    "means of logarithms over the ternaries around it, weighted as their bowings are; without the scattering of a random alloy of four, which slows electrons by up to 1.7"
                }
                (_, _) => "means of logarithms over the ternaries around it, weighted as their bowings are",
            };
            origins.push(Origin { what: what.to_owned(), kind: OriginKind::Model, cite: how.to_owned() });
        }
        origins
    }
}

/// Between the two samples around `at`, for each carrier both have a law for.
fn neighbours(samples: &[(f64, PerCarrier<MobilityLaw>)], at: f64) -> PerCarrier<MobilityLaw> {
    let above = samples.partition_point(|(fraction, _)| *fraction <= at).clamp(1, samples.len() - 1);
    let ((low, left), (high, right)) = (samples[above - 1], samples[above]);
    let share = if high > low { ((at - low) / (high - low)).clamp(0.0, 1.0) } else { 0.0 };
    PerCarrier::mixed(&[(1.0 - share, left), (share, right)], MobilityLaw::between)
}
