//! `spectrum` items: a table or a black body, filtered and scaled.

use std::sync::Arc;

use crate::finding::Finding;
use crate::light::Spectrum;
use crate::resolve::Resolver;
use crate::resolve::properties::{self, conflict, is_broken};
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::table::{Column, Columns};
use crate::source::Spanned;
use crate::syntax::{Argument, Named, Property};
use crate::units::Dimension;

const OF_SPECTRUM: &[&str] =
    &["file", "wavelength", "irradiance", "blackbody", "scaled", "filtered", "cite", "note"];

impl<'s> Resolver<'_, 's> {
    /// A `spectrum` item, resolved once; `None` where it is wrong, which is reported.
    pub(super) fn spectrum(&mut self, item: &'s Named) -> Option<Arc<Spectrum>> {
        if let Some(known) = self.spectra.get(item.name.value.as_str()) {
            return known.clone();
        }
        let outer = self.scope.open();
        let spectrum = self.stated_spectrum(item).map(Arc::new);
        self.scope.close(outer);
        self.spectra.insert(&item.name.value, spectrum.clone());
        spectrum
    }

    fn stated_spectrum(&mut self, item: &'s Named) -> Option<Spectrum> {
        let name = &item.name.value;
        let place = format!("spectrum `{name}`");
        let stated = properties::of_block(&mut self.scope, &item.block, &place, OF_SPECTRUM);
        let find = |word: &str| stated.iter().copied().find(|property| property.name.value == word);
        let cite = find("cite").and_then(|property| properties::text(&mut self.scope, property));
        let cite = cite.map_or_else(|| "stated in the file".to_owned(), |text| text.value.clone());

        let mut spectrum = match (find("file"), find("blackbody")) {
            (Some(file), Some(body)) => {
                conflict(
                    &mut self.scope,
                    format!("spectrum `{name}` is a table and a black body"),
                    body.name.span,
                    file.name.span,
                    "keep one of the two",
                );
                return None;
            }
            (Some(file), None) => {
                let columns = Columns {
                    wavelength: find("wavelength"),
                    value: find("irradiance"),
                    broken: is_broken(&item.block),
                };
                let (wavelength, irradiance) = self.spectral_table(
                    file,
                    columns,
                    &item.name,
                    ("irradiance", &[Dimension::SPECTRAL_IRRADIANCE]),
                )?;
                Spectrum::from_table(name, wavelength, irradiance, cite)
            }
            (None, Some(body)) => {
                let mut spectrum = self.blackbody(body, 0, &mut Vec::new())?;
                spectrum.name.clone_from(name);
                spectrum
            }
            (None, None) if is_broken(&item.block) => return None,
            (None, None) => {
                self.scope.report(
                    Finding::error("value.missing", format!("spectrum `{name}` has no light in it"))
                        .at(item.name.span, "neither a file nor a black body")
                        .help("write `blackbody 5800 K`, or `file \"lamp.csv\"` with its columns"),
                );
                return None;
            }
        };
        if let Some(property) = find("filtered") {
            spectrum = self.filtered(spectrum, property, &item.name)?;
        }
        if let Some(property) = find("scaled") {
            let power = self.scaled_to(property)?;
            spectrum = spectrum.scaled_to(power);
        }
        if spectrum.total_w_per_m2 > 0.0 && spectrum.total_w_per_m2.is_finite() {
            return Some(spectrum);
        }
        self.scope.report(
            Finding::error("value.range", format!("spectrum `{name}` holds no light"))
                .at(item.name.span, "its whole irradiance is zero")
                .help("give a table with values above zero"),
        );
        None
    }

    /// `scaled to 1000 W/m2`
    fn scaled_to(&mut self, property: &Property) -> Option<f64> {
        let at = usize::from(
            matches!(property.arguments.first(), Some(Argument::Word(word)) if word.value == "to"),
        );
        let Some(value) = property.arguments.get(at).and_then(properties::as_value) else {
            properties::missing(&mut self.scope, property, "write `scaled to 1000 W/m2`");
            return None;
        };
        properties::no_more(&mut self.scope, property, at + 1);
        self.scope.quantity(&value, Expected::new("scaled to", Dimension::IRRADIANCE, Role::Irradiance))
    }

    /// `filtered by "glass.csv" { wavelength column 1 in nm; transmittance column 2 in percent }`
    fn filtered(
        &mut self,
        mut spectrum: Spectrum,
        property: &'s Property,
        name: &Spanned<String>,
    ) -> Option<Spectrum> {
        let stated = match &property.block {
            Some(block) => {
                properties::of_block(&mut self.scope, block, "a filter", &["wavelength", "transmittance"])
            }
            None => Vec::new(),
        };
        let find = |word: &str| stated.iter().copied().find(|property| property.name.value == word);
        let columns = Columns {
            wavelength: find("wavelength"),
            value: find("transmittance"),
            broken: property.block.as_ref().is_some_and(is_broken),
        };
        let (wavelength, share) =
            self.spectral_table(property, columns, name, ("transmittance", &[Dimension::NONE]))?;
        if let Some(at) = share.iter().position(|share| *share > 1.0) {
            let nanometres = crate::units::in_unit(wavelength[at], "nm");
            self.scope.report(
                Finding::error("value.range", format!("the filter passes more than 100 % at {nanometres}"))
                    .at(property.span, "more than it receives")
                    .help("state the column `in percent` where the table holds percent"),
            );
            return None;
        }
        for (at, power) in spectrum.wavelength_m.iter().zip(&mut spectrum.irradiance) {
            *power *= crate::numerics::quadrature::linear_at(&wavelength, &share, *at);
        }
        let cite = spectrum.cite.clone();
        let from = spectrum.drives_from_m;
        let mut filtered =
            Spectrum::from_table(spectrum.name, spectrum.wavelength_m, spectrum.irradiance, cite);
        filtered.drives_from_m = from;
        Some(filtered)
    }

    /// A table named by the text among the arguments of `property`, in SI.
    fn spectral_table(
        &mut self,
        property: &'s Property,
        columns: Columns<'s>,
        name: &Spanned<String>,
        value: (&str, &[Dimension]),
    ) -> Option<(Vec<f64>, Vec<f64>)> {
        let path = property.arguments.iter().find_map(|argument| match argument {
            Argument::Text(text) => Some(text),
            _ => None,
        });
        let Some(path) = path else {
            properties::missing(
                &mut self.scope,
                property,
                &format!("write `{} \"lamp.csv\"`", property.name.value),
            );
            return None;
        };
        let wavelength =
            self.column(columns.wavelength, path, ("wavelength", &[Dimension::LENGTH], columns.broken));
        let value = self.column(columns.value, path, (value.0, value.1, columns.broken));
        let id = self.files.read(&mut self.scope, name.span.source, path, "table")?;
        let (wavelength, value): (Column, Column) = (wavelength?, value?);
        self.table(id, path, &wavelength, &value)
    }
}
