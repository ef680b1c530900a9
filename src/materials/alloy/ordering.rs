//! Spontaneous ordering: a direct gap below that of the random alloy.

use crate::materials::ROOM_TEMPERATURE_K;
use crate::materials::alloy::{Composition, Family};

/// Spontaneous ordering of two elements of one sublattice lowers the direct gap below that of the
/// random alloy. A quaternary takes it from the ternary in which it is known.
#[derive(Clone, Debug, PartialEq)]
pub struct Ordering {
    /// The ordered pair; the fraction of the first marks the reference composition.
    pub pair: [String; 2],
    /// That fraction, in the ternary of the pair alone.
    pub fraction: f64,
    /// The direct gap there at 300 K by default, eV.
    pub gap_ev: f64,
    /// Lowest and highest gap met there, eV.
    pub span_ev: (f64, f64),
}

impl Family {
    /// What ordering adds to the direct gap, eV, ≤ 0 by default: in proportion to
    /// [`Family::ordering_share`], and such that the gap at the reference composition is the stated
    /// one.
    pub(super) fn ordering_shift(&self, composition: &Composition) -> f64 {
        let Some(ordering) = &self.ordering else { return 0.0 };
        let Some(reference) = self.ordering_reference(ordering) else { return 0.0 };
        let Some(random) = self.random_bands(&reference).gamma else { return 0.0 };
        (ordering.gap_ev - random.at(ROOM_TEMPERATURE_K)) * self.ordering_share(composition)
    }

    /// How much of the ordering at the reference composition is left here: the product of the
    /// fractions of the ordered pair, as the bowing is, over that at the reference. 0 where one of
    /// them is absent: `(Al,Ga)InP` without gallium shows none.
    pub fn ordering_share(&self, composition: &Composition) -> f64 {
        let Some(ordering) = &self.ordering else { return 0.0 };
        let product: Option<f64> = ordering
            .pair
            .iter()
            .map(|element| self.position(element).map(|(site, at)| composition[site][at]))
            .product();
        let at_reference = ordering.fraction * (1.0 - ordering.fraction);
        product.filter(|_| at_reference > 0.0).map_or(0.0, |product| product / at_reference)
    }

    /// The ternary of the ordered pair at the fraction for which the gap is stated.
    fn ordering_reference(&self, ordering: &Ordering) -> Option<Composition> {
        let [(site, first), (_, second)] =
            [self.position(&ordering.pair[0])?, self.position(&ordering.pair[1])?];
        let mut reference = self.corner();
        reference[site] = vec![0.0; self.sites[site].len()];
        reference[site][first] = ordering.fraction;
        reference[site][second] = 1.0 - ordering.fraction;
        Some(reference)
    }

    /// Lowest and highest direct gap at 300 K that ordering gives a composition, eV.
    pub fn ordered_span_ev(&self, composition: &Composition) -> Option<(f64, f64)> {
        let ordering = self.ordering.as_ref()?;
        let random = self.random_gap_ev(composition)?;
        let depth = (ordering.span_ev.1 - ordering.span_ev.0) * self.ordering_share(composition).min(1.0);
        Some((random - depth, random))
    }
}
