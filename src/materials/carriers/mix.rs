//! Laws between the laws of neighbours, for alloys.

use crate::materials::carriers::{Carrier, Carriers, Damage, GapNarrowing, Lifetime, PerCarrier};

impl<T: Copy> PerCarrier<T> {
    /// For each carrier what `mean` makes of everyone's law, by shares that sum to 1; nothing where
    /// one with a share above 0 has no law.
    pub fn mixed(each: &[(f64, Self)], mean: impl Fn(&[(f64, T)]) -> Option<T>) -> Self {
        let mut both = Self::default();
        for carrier in Carrier::BOTH {
            let counted = each.iter().filter(|(share, _)| *share > 0.0);
            let laws: Option<Vec<(f64, T)>> =
                counted.map(|(share, own)| own.get(carrier).map(|law| (*share, *law))).collect();
            both.set(carrier, laws.filter(|laws| !laws.is_empty()).and_then(|laws| mean(&laws)));
        }
        both
    }

    /// Its own, else the other's.
    fn or(self, other: Self) -> Self {
        Self { electron: self.electron.or(other.electron), hole: self.hole.or(other.hole) }
    }
}

/// Geometric mean by shares that sum to 1; 0 where one is 0.
fn geometric(values: &[(f64, f64)]) -> Option<f64> {
    Some(values.iter().map(|(share, value)| share * value.ln()).sum::<f64>().exp())
}

fn lifetime(laws: &[(f64, Lifetime)]) -> Option<Lifetime> {
    let of = |what: fn(&Lifetime) -> f64| {
        let values: Vec<(f64, f64)> = laws.iter().map(|(share, law)| (*share, what(law))).collect();
        geometric(&values)
    };
    Some(Lifetime {
        most_s: of(|law| law.most_s)?,
        half_per_m3: of(|law| law.half_per_m3)?,
        steepness: laws.iter().map(|(share, law)| share * law.steepness).sum(),
    })
}

fn narrowing(laws: &[(f64, GapNarrowing)]) -> Option<GapNarrowing> {
    let mean = |of: fn(&GapNarrowing) -> f64| laws.iter().map(|(share, law)| share * of(law)).sum();
    Some(GapNarrowing {
        cube_root_ev: mean(|law| law.cube_root_ev),
        fourth_root_ev: mean(|law| law.fourth_root_ev),
        square_root_ev: mean(|law| law.square_root_ev),
    })
}

/// Only where all constants belong to the same particle at the same energy.
fn damage(each: &[(f64, Carriers)]) -> Option<Damage> {
    let counted = || each.iter().filter(|(share, _)| *share > 0.0);
    let all: Option<Vec<(f64, Damage)>> =
        counted().map(|(share, own)| own.damage.map(|damage| (*share, damage))).collect();
    let all = all?;
    let (_, first) = *all.first()?;
    let same = all.iter().all(|(_, damage)| {
        damage.particle == first.particle && (damage.energy_j / first.energy_j - 1.0).abs() < 1e-6
    });
    let constants: Vec<_> = all.iter().map(|(share, damage)| (*share, damage.constant)).collect();
    same.then(|| Damage { constant: PerCarrier::mixed(&constants, geometric), ..first })
}

impl Carriers {
    /// What lies between others, by shares that sum to 1. An intrinsic density stated of a
    /// neighbour is not carried over: it belongs to one gap.
    pub fn between(each: &[(f64, Self)]) -> Self {
        fn pick<T: Copy>(
            each: &[(f64, Carriers)],
            of: fn(&Carriers) -> PerCarrier<T>,
        ) -> Vec<(f64, PerCarrier<T>)> {
            each.iter().map(|(share, own)| (*share, of(own))).collect()
        }
        let counted = each.iter().filter(|(share, _)| *share > 0.0);
        let radiative: Option<Vec<(f64, f64)>> =
            counted.map(|(share, own)| own.radiative_m3_per_s.map(|value| (*share, value))).collect();
        Self {
            mobility: PerCarrier::mixed(
                &pick(each, |own| own.mobility),
                crate::materials::carriers::MobilityLaw::between,
            ),
            lifetime: PerCarrier::mixed(&pick(each, |own| own.lifetime), lifetime),
            radiative_m3_per_s: radiative.filter(|all| !all.is_empty()).and_then(|all| geometric(&all)),
            auger_m6_per_s: PerCarrier::mixed(&pick(each, |own| own.auger_m6_per_s), geometric),
            intrinsic_per_m3: None,
            doping_limit_per_m3: PerCarrier::mixed(&pick(each, |own| own.doping_limit_per_m3), geometric),
            damage: damage(each),
            gap_narrowing: PerCarrier::mixed(&pick(each, |own| own.gap_narrowing), narrowing),
        }
    }

    /// Its own laws, and the other's where it has none.
    #[must_use]
    pub fn or(self, other: Self) -> Self {
        Self {
            mobility: self.mobility.or(other.mobility),
            lifetime: self.lifetime.or(other.lifetime),
            radiative_m3_per_s: self.radiative_m3_per_s.or(other.radiative_m3_per_s),
            auger_m6_per_s: self.auger_m6_per_s.or(other.auger_m6_per_s),
            intrinsic_per_m3: self.intrinsic_per_m3.or(other.intrinsic_per_m3),
            doping_limit_per_m3: self.doping_limit_per_m3.or(other.doping_limit_per_m3),
            damage: self.damage.or(other.damage),
            gap_narrowing: self.gap_narrowing.or(other.gap_narrowing),
        }
    }

    /// What is known at all, as origins name it.
    pub fn known(&self) -> Vec<&'static str> {
        let all = [
            ("mobility", !self.mobility.is_empty()),
            ("lifetime", !self.lifetime.is_empty()),
            ("radiative", self.radiative_m3_per_s.is_some()),
            ("auger", !self.auger_m6_per_s.is_empty()),
            ("intrinsic density", self.intrinsic_per_m3.is_some()),
            ("doping limit", !self.doping_limit_per_m3.is_empty()),
            ("damage", self.damage.is_some()),
            ("gap narrowing", !self.gap_narrowing.is_empty()),
        ];
        all.into_iter().filter(|(_, is_known)| *is_known).map(|(what, _)| what).collect()
    }
}
