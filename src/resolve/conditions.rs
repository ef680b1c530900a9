//! Operating conditions: a light, by how much it is multiplied, and a cell temperature.

use std::sync::Arc;

use crate::design::{Condition, Fluence, ZERO_CELSIUS_K};
use crate::light::{self, Spectrum};
use crate::materials::carriers::Particle;
use crate::numerics::constants::CHARGE;
use crate::resolve::properties::{self, conflict, quantity};
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::{Resolver, names};
use crate::source::Span;
use crate::syntax::{Argument, Property};
use crate::units::Dimension;

/// What a `condition` states.
pub(super) const OF_CONDITION: &[&str] =
    &["light", "temperature", "concentration", "irradiance", "incidence", "distance", "fluence", "note"];

/// What a fluence can be of.
const PARTICLES: [Particle; 2] = [Particle::Electrons, Particle::Protons];

/// Cell temperature where none is stated, K.
const STANDARD_K: f64 = ZERO_CELSIUS_K + 25.0;

impl<'s> Resolver<'_, 's> {
    /// The condition item of that name, resolved once; `None` where it is wrong, which is
    /// reported, or where there is none.
    pub(super) fn condition(&mut self, name: &str) -> Option<(Condition, Vec<String>)> {
        if let Some(known) = self.conditions.get(name) {
            return known.clone();
        }
        let item = self.items.conditions.get(name)?;
        let outer = self.scope.open();
        let place = format!("condition `{name}`");
        let found = properties::of_block(&mut self.scope, &item.block, &place, OF_CONDITION);
        let stated: Vec<(&Property, usize)> =
            found.into_iter().map(|property| (property, self.scope.here())).collect();
        let condition = self.stated_condition(name, item.name.span, &stated);
        self.scope.close(outer);
        self.conditions.insert(&item.name.value, condition.clone());
        condition
    }

    /// A condition out of its properties, with the sentences for what was assumed.
    pub(super) fn stated_condition(
        &mut self,
        name: &str,
        span: Span,
        stated: &[(&'s Property, usize)],
    ) -> Option<(Condition, Vec<String>)> {
        let here = self.scope.here();
        let mut assumed = Vec::new();
        let mut wrong = false;
        let find = |word: &str| stated.iter().find(|(property, _)| property.name.value == word).copied();

        let light = match find("light") {
            Some((property, frame)) => {
                self.scope.enter(frame);
                self.light(property, &mut assumed)
            }
            None => {
                assumed.push(format!("condition `{name}`: light AM1.5G, as none is stated"));
                light::builtin("AM1.5G")
            }
        };
        wrong |= light.is_none();

        let mut read = |this: &mut Self, word: &str, dimension, role| -> Option<f64> {
            let (property, frame) = find(word)?;
            this.scope.enter(frame);
            let value = quantity(&mut this.scope, property, Expected::new(word, dimension, role));
            wrong |= value.is_none();
            value
        };
        let temperature = read(self, "temperature", Dimension::TEMPERATURE, Role::CellTemperature);
        let times = read(self, "concentration", Dimension::NONE, Role::Concentration);
        let irradiance = read(self, "irradiance", Dimension::IRRADIANCE, Role::Irradiance);
        let incidence = read(self, "incidence", Dimension::ANGLE, Role::Incidence);
        let distance = read(self, "distance", Dimension::LENGTH, Role::Positive);
        if find("temperature").is_none() {
            assumed.push(format!("condition `{name}`: cell temperature 25 degC, as none is stated"));
        }
        if let (Some((first, _)), Some((second, _))) = (find("concentration"), find("irradiance")) {
            wrong = true;
            conflict(
                &mut self.scope,
                "`concentration` and `irradiance` both set how strong the light is".to_owned(),
                second.name.span,
                first.name.span,
                "keep one of the two",
            );
        }
        let fluence = find("fluence").and_then(|(property, frame)| {
            self.scope.enter(frame);
            self.fluence(property, &mut assumed)
        });
        self.scope.close(here);
        let light = light.filter(|_| !wrong)?;

        // One astronomical unit is what the tables of AM0 hold for; light thins with the square.
        let distance_au = distance.map(|metres| metres / 149_597_870_700.0);
        let thinned = distance_au.map_or(1.0, |au| 1.0 / (au * au));
        let concentration = match irradiance {
            Some(power) => power / light.total_w_per_m2,
            None => times.unwrap_or(1.0),
        };
        let condition = Condition {
            name: name.to_owned(),
            light,
            concentration: concentration * thinned,
            temperature_k: temperature.unwrap_or(STANDARD_K),
            incidence_rad: incidence.unwrap_or(0.0),
            fluence,
            distance_au,
            span,
        };
        Some((condition, assumed))
    }

    /// `light AM1.5G`, `light blackbody 5800 K`, `light lamp`.
    fn light(&mut self, property: &'s Property, assumed: &mut Vec<String>) -> Option<Arc<Spectrum>> {
        let Some(first) = property.arguments.first() else {
            properties::missing(&mut self.scope, property, "write `light AM1.5G`");
            return None;
        };
        if let Argument::Word(word) = first
            && word.value == "blackbody"
        {
            return self.blackbody(property, 1, assumed).map(Arc::new);
        }
        // `AM0-G173` reads as a difference of two names; the text is what counts.
        let name = crate::source::Spanned::new(self.text(first.span()), first.span());
        properties::no_more(&mut self.scope, property, 1);
        if let Some(item) = self.items.spectra.get(&name.value) {
            return self.spectrum(item);
        }
        if let Some(found) = builtin(&name.value) {
            return Some(found);
        }
        let known = light::BUILTIN
            .iter()
            .map(|(known, _)| *known)
            .chain(["blackbody"])
            .chain(self.items.spectra.all.iter().map(|item| item.name.value.as_str()));
        let finding = names::unknown(
            "light",
            &name,
            known,
            "write `AM1.5G`, `AM1.5D`, `AM0` or `blackbody 5800 K`, or state a `spectrum` of that name",
        );
        self.scope.report(finding);
        None
    }

    /// `blackbody 5800 K`, whose temperature is argument `at`.
    pub(super) fn blackbody(
        &mut self,
        property: &Property,
        at: usize,
        assumed: &mut Vec<String>,
    ) -> Option<Spectrum> {
        let expected = Expected::new("blackbody", Dimension::TEMPERATURE, Role::SourceTemperature);
        let Some(value) = property.arguments.get(at).and_then(properties::as_value) else {
            properties::missing_of(
                &mut self.scope,
                "the black body has no temperature",
                property.span,
                "write `blackbody 5800 K`",
            );
            return None;
        };
        properties::no_more(&mut self.scope, property, at + 1);
        let kelvin = self.scope.quantity(&value, expected)?;
        let text = crate::units::in_unit(kelvin, "K");
        assumed.push(format!(
            "black body of {text}: seen as the sun's disc is from one astronomical unit, unless scaled"
        ));
        Some(light::blackbody(kelvin, light::SUN_DILUTION))
    }

    /// `fluence 1e15 /cm2 of electrons 1 MeV`
    fn fluence(&mut self, property: &Property, assumed: &mut Vec<String>) -> Option<Fluence> {
        let expected = Expected::new("fluence", Dimension::PER_AREA, Role::NotNegative);
        let value = properties::first_value(&mut self.scope, property, expected)?;
        let per_m2 = self.scope.quantity(&value, expected)?;
        let mut fluence = Fluence { per_m2, particle: Particle::Electrons, energy_j: 1e6 * CHARGE };
        let mut rest = property.arguments[1..].iter().peekable();
        rest.next_if(|next| matches!(next, Argument::Word(word) if word.value == "of"));
        let Some(Argument::Word(word)) = rest.peek() else {
            assumed.push("particles of the fluence: electrons of 1 MeV, as none are stated".to_owned());
            properties::no_more(&mut self.scope, property, property.arguments.len() - rest.len());
            return Some(fluence);
        };
        match PARTICLES.into_iter().find(|particle| particle.word() == word.value) {
            Some(particle) => fluence.particle = particle,
            None => {
                let known = PARTICLES.iter().map(|particle| particle.word());
                let help = "write `of electrons 1 MeV` or `of protons 10 MeV`";
                self.scope.report(names::unknown("particle", word, known, help));
                return None;
            }
        }
        rest.next();
        let Some(energy) = rest.peek().and_then(|next| properties::as_value(next)) else {
            properties::missing_of(
                &mut self.scope,
                &format!("the {} of the fluence have no energy", word.value),
                word.span,
                "write it behind them, such as `of electrons 1 MeV`",
            );
            return None;
        };
        fluence.energy_j =
            self.scope.quantity(&energy, Expected::new("energy", Dimension::ENERGY, Role::Positive))?;
        rest.next();
        properties::no_more(&mut self.scope, property, property.arguments.len() - rest.len());
        Some(fluence)
    }
}

/// A reference light by any of its spellings: `AM0-G173`, `AM0_G173`, `AM1.5g`.
fn builtin(name: &str) -> Option<Arc<Spectrum>> {
    light::builtin(name).or_else(|| light::builtin(&name.replace(['-', ' '], "_")))
}
