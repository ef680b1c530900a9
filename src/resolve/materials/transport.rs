//! Groups of a `material` or `alloy` block that say what carriers do: mobility, lifetime,
//! recombination, doping, damage.

use crate::finding::Finding;
use crate::materials::Origin;
use crate::materials::alloy::Family;
use crate::materials::alloy::transport::TernaryCarriers;
use crate::materials::carriers::{
    Carrier, Carriers, Damage, GapNarrowing, Lifetime, MobilityLaw, Particle, PerCarrier,
};
use crate::resolve::materials::Definition;
use crate::resolve::materials::blocks::Reader;
use crate::resolve::materials::values::{Arguments, Kind, quantity, single};
use crate::resolve::names;
use crate::syntax::Property;
use crate::units::Dimension;

/// The groups read here.
pub(super) const GROUPS: &[&str] = &[
    "auger",
    "damage",
    "doping_limit",
    "gap_narrowing",
    "intrinsic_density",
    "lifetime",
    "mobility",
    "radiative",
];

const MOBILITY: Kind = Kind::positive(Dimension::MOBILITY, 1.0, "9400 cm2/V/s");
const SECONDS: Kind = Kind::positive(Dimension::TIME, 1.0, "20 ns");
const PER_VOLUME: Kind = Kind::positive(Dimension::PER_VOLUME, 1.0, "1e17 /cm3");
const RADIATIVE: Kind = Kind::positive(Dimension::VOLUME_RATE, 1.0, "7e-10 cm3/s");
const AUGER: Kind = Kind::of(Dimension::VOLUME_SQUARED_RATE, 1.0, "1e-30 cm6/s");
const STEEPNESS: Kind = Kind::positive(Dimension::NONE, 1.0, "0.5");
const JOULE: Kind = Kind::positive(Dimension::ENERGY, 1.0, "1 MeV");

impl Reader<'_> {
    /// The groups of an alloy: each holds for every composition, but for `mobility`, which gives
    /// `sample Ga 0.51 { electron …; hole … }` at some.
    pub(super) fn family_carriers(&mut self, statements: &[&Property], family: &mut Family) {
        let (mut all, mut samples) = (Carriers::default(), Vec::new());
        for property in statements {
            match property.name.value.as_str() {
                "mobility" => {
                    samples = self.mobility_samples(property, family);
                    self.origin(property, "mobility");
                }
                "ternaries" => self.carriers_of_ternaries(property, family),
                word if GROUPS.contains(&word) => self.carriers(property, &mut all),
                _ => {}
            }
        }
        if all == Carriers::default() && samples.is_empty() {
            return;
        }
        // The ternary's own, for the quaternaries it belongs to.
        let mixed = family.sites.iter().position(|site| site.len() == 2).filter(|_| family.freedom() == 1);
        let Some(site) = mixed else {
            family.carriers.all = all;
            return;
        };
        let pair = [family.sites[site][0].clone(), family.sites[site][1].clone()];
        let with = family.sites[1 - site].first().cloned().unwrap_or_default();
        family.carriers.ternaries.push(TernaryCarriers { pair, with, all, samples });
    }

    /// What the ternaries of a quaternary state, with where it comes from.
    fn carriers_of_ternaries(&mut self, property: &Property, family: &mut Family) {
        let mut arguments = Arguments::of(property);
        while let Some(name) = arguments.word() {
            // One that is no family was reported where its members are read.
            let Some(Definition::Family(ternary)) = self.library.find(&name.value, self.scope) else {
                return;
            };
            family.carriers.ternaries.extend(ternary.carriers.ternaries.iter().cloned());
            let own = |origin: &&Origin| GROUPS.contains(&origin.what.replace(' ', "_").as_str());
            for origin in ternary.origins.iter().filter(own) {
                if !self.origins.contains(origin) {
                    self.origins.push(origin.clone());
                }
            }
        }
    }

    /// Mobility laws by fraction of the first mixed element, ascending.
    fn mobility_samples(&mut self, group: &Property, family: &Family) -> Vec<(f64, PerCarrier<MobilityLaw>)> {
        let mut samples = Vec::new();
        for property in self.inside(group) {
            match property.name.value.as_str() {
                "sample" => samples.extend(self.mobility_sample(property, family)),
                "cite" => {}
                _ => self.unknown_in("mobility", property, &["sample"]),
            }
        }
        samples.sort_by(|a, b| a.0.total_cmp(&b.0));
        samples
    }

    fn mobility_sample(
        &mut self,
        property: &Property,
        family: &Family,
    ) -> Option<(f64, PerCarrier<MobilityLaw>)> {
        let mut arguments = Arguments::of(property);
        let element = arguments.word()?;
        let fraction = quantity(&mut arguments, "sample", Kind::FRACTION, self.scope)?;
        arguments.end(self.scope);
        let (_, at) = self.mixed(element, family)?;
        let laws = self.per_carrier(property, Self::mobility_law);
        Some((if at == 0 { fraction } else { 1.0 - fraction }, laws))
    }

    /// Reads one of [`GROUPS`] into `carriers`.
    pub(super) fn carriers(&mut self, group: &Property, carriers: &mut Carriers) {
        match group.name.value.as_str() {
            "mobility" => {
                carriers.mobility = self.per_carrier(group, Self::mobility_law);
            }
            "lifetime" => carriers.lifetime = self.per_carrier(group, Self::lifetime_law),
            "auger" => {
                carriers.auger_m6_per_s =
                    self.per_carrier(group, |reader, property| single(property, AUGER, reader.scope));
            }
            "radiative" => {
                carriers.radiative_m3_per_s = self.only(group, "coefficient", RADIATIVE);
            }
            "intrinsic_density" => {
                carriers.intrinsic_per_m3 = self.only(group, "density", PER_VOLUME);
            }
            "doping_limit" => {
                carriers.doping_limit_per_m3 =
                    self.per_polarity(group, |reader, property| single(property, PER_VOLUME, reader.scope));
            }
            "gap_narrowing" => {
                carriers.gap_narrowing = self.per_polarity(group, Self::narrowing_law);
            }
            _ => carriers.damage = self.damage(group),
        }
        self.origin(group, &group.name.value.replace('_', " "));
    }

    /// `electron …` and `hole …`
    fn per_carrier<T>(
        &mut self,
        group: &Property,
        law: impl Fn(&mut Self, &Property) -> Option<T>,
    ) -> PerCarrier<T> {
        self.per_word(group, ["electron", "hole"], law)
    }

    /// `n …` and `p …`
    fn per_polarity<T>(
        &mut self,
        group: &Property,
        law: impl Fn(&mut Self, &Property) -> Option<T>,
    ) -> PerCarrier<T> {
        self.per_word(group, ["n", "p"], law)
    }

    fn per_word<T>(
        &mut self,
        group: &Property,
        words: [&str; 2],
        law: impl Fn(&mut Self, &Property) -> Option<T>,
    ) -> PerCarrier<T> {
        let mut both = PerCarrier::default();
        for property in self.inside(group) {
            match words.iter().position(|word| *word == property.name.value) {
                Some(0) => both.electron = law(self, property),
                Some(_) => both.hole = law(self, property),
                None if property.name.value == "cite" => {}
                None => self.unknown_in(&group.name.value, property, &words),
            }
        }
        both
    }

    /// A group of a single number.
    fn only(&mut self, group: &Property, word: &str, kind: Kind) -> Option<f64> {
        let mut value = None;
        for property in self.inside(group) {
            match property.name.value.as_str() {
                own if own == word => value = single(property, kind, self.scope),
                "cite" => {}
                _ => self.unknown_in(&group.name.value, property, &[word]),
            }
        }
        value
    }

    /// `9400 cm2/V/s least 500 cm2/V/s half 6e16 /cm3 steepness 0.394 cooling 2.1 3`; what follows
    /// the first value may be left out: a mobility alone holds at any doping.
    fn mobility_law(&mut self, property: &Property) -> Option<MobilityLaw> {
        let mut arguments = Arguments::of(property);
        let slot = property.name.value.as_str();
        let most_m2_per_vs = quantity(&mut arguments, slot, MOBILITY, self.scope)?;
        let mut law = MobilityLaw {
            most_m2_per_vs,
            least_m2_per_vs: most_m2_per_vs,
            half_per_m3: 1e24,
            steepness: 1.0,
            cooling: 0.0,
            half_cooling: 0.0,
        };
        if arguments.keyword("least") {
            law.least_m2_per_vs = quantity(&mut arguments, "least", MOBILITY, self.scope)?;
            if !arguments.keyword("half") {
                self.lacks(property, "half", "half 6e16 /cm3 steepness 0.4");
                return None;
            }
            law.half_per_m3 = quantity(&mut arguments, "half", PER_VOLUME, self.scope)?;
            if arguments.keyword("steepness") {
                law.steepness = quantity(&mut arguments, "steepness", STEEPNESS, self.scope)?;
            }
        }
        if arguments.keyword("cooling") {
            law.cooling = quantity(&mut arguments, "cooling", Kind::PLAIN, self.scope)?;
            if arguments.has_more() {
                law.half_cooling = quantity(&mut arguments, "cooling", Kind::PLAIN, self.scope)?;
            }
        }
        arguments.end(self.scope);
        if law.least_m2_per_vs > law.most_m2_per_vs {
            self.scope.report(
                Finding::error("material.statement", "the least mobility is above the one without doping")
                    .at(property.span, "out of order")
                    .help("write the larger one first: `electron 9400 cm2/V/s least 500 cm2/V/s half …`"),
            );
            return None;
        }
        Some(law)
    }

    /// `100 ns half 1e18 /cm3 steepness 1`; a lifetime alone holds at any doping.
    fn lifetime_law(&mut self, property: &Property) -> Option<Lifetime> {
        let mut arguments = Arguments::of(property);
        let most_s = quantity(&mut arguments, &property.name.value, SECONDS, self.scope)?;
        let mut law = Lifetime { most_s, half_per_m3: f64::INFINITY, steepness: 1.0 };
        if arguments.keyword("half") {
            law.half_per_m3 = quantity(&mut arguments, "half", PER_VOLUME, self.scope)?;
            if arguments.keyword("steepness") {
                law.steepness = quantity(&mut arguments, "steepness", STEEPNESS, self.scope)?;
            }
        }
        arguments.end(self.scope);
        Some(law)
    }

    /// `cube_root 16.5 meV fourth_root 7.6 meV square_root 91.4 meV`, each at 1e18 /cm3.
    fn narrowing_law(&mut self, property: &Property) -> Option<GapNarrowing> {
        const WORDS: [&str; 3] = ["cube_root", "fourth_root", "square_root"];
        let mut arguments = Arguments::of(property);
        let mut terms = [0.0; 3];
        while let Some(at) = WORDS.iter().position(|word| arguments.keyword(word)) {
            terms[at] = quantity(&mut arguments, WORDS[at], Kind::NOT_NEGATIVE_ENERGY, self.scope)?;
        }
        if terms == [0.0; 3] {
            self.lacks(property, "cube_root", "cube_root 10 meV");
            return None;
        }
        arguments.end(self.scope);
        let [cube_root_ev, fourth_root_ev, square_root_ev] = terms;
        Some(GapNarrowing { cube_root_ev, fourth_root_ev, square_root_ev })
    }

    /// `damage { of electrons 1 MeV; electron 7e-8; hole 7e-8; cite "…" }`
    fn damage(&mut self, group: &Property) -> Option<Damage> {
        let (mut of, mut constant) = (None, PerCarrier::default());
        let mut says_of = false;
        for property in self.inside(group) {
            match property.name.value.as_str() {
                "of" => (says_of, of) = (true, self.particle(property)),
                "electron" => {
                    constant.set(Carrier::Electron, single(property, Kind::NOT_NEGATIVE, self.scope));
                }
                "hole" => constant.set(Carrier::Hole, single(property, Kind::NOT_NEGATIVE, self.scope)),
                "cite" => {}
                _ => self.unknown_in("damage", property, &["of", "electron", "hole"]),
            }
        }
        if let Some((particle, energy_j)) = of {
            return Some(Damage { particle, energy_j, constant });
        }
        if group.block.is_some() && !says_of {
            self.scope.report(
                Finding::error(
                    "material.incomplete",
                    "`damage` does not say by which particle of which energy",
                )
                .at(group.name.span, "`of` is due in this group")
                .help("write `of electrons 1 MeV` in it"),
            );
        }
        None
    }

    /// `of electrons 1 MeV`
    fn particle(&mut self, property: &Property) -> Option<(Particle, f64)> {
        const PARTICLES: [Particle; 2] = [Particle::Electrons, Particle::Protons];
        let mut arguments = Arguments::of(property);
        let Some(word) = arguments.word() else {
            self.lacks(property, "a particle", "electrons 1 MeV");
            return None;
        };
        let particle = PARTICLES.into_iter().find(|particle| particle.word() == word.value);
        if particle.is_none() {
            let known = PARTICLES.iter().map(|particle| particle.word());
            self.scope.report(names::unknown("particle", word, known, "write `electrons` or `protons`"));
        }
        let energy = quantity(&mut arguments, "of", JOULE, self.scope)?;
        arguments.end(self.scope);
        Some((particle?, energy))
    }

    fn lacks(&mut self, property: &Property, what: &str, sample: &str) {
        let name = &property.name.value;
        let what = if what.contains(' ') { what.to_owned() } else { format!("`{what}`") };
        self.scope.report(
            Finding::error("material.incomplete", format!("`{name}` lacks {what}"))
                .at(property.span, "ends too early")
                .help(format!("add it, such as `{name} … {sample}`")),
        );
    }
}
