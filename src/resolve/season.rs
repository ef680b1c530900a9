//! Weighted conditions out of a table: `season "mast-site.csv" under noon { … }`.

use std::collections::HashMap;
use std::sync::Arc;

use crate::design::{Design, Season, SeasonRow};
use crate::finding::Finding;
use crate::light::{self, Spectrum};
use crate::resolve::Resolver;
use crate::resolve::properties::{self, conflict};
use crate::resolve::quantities::Role;
use crate::resolve::records::{Cell, Wanted};
use crate::source::Spanned;
use crate::syntax::{Argument, Property};
use crate::units::Dimension;

const COLUMNS: &[&str] = &["hours", "temperature", "irradiance", "concentration", "incidence", "light"];

/// Reads the table and what its rows start from.
pub(super) fn season<'s>(resolver: &mut Resolver<'_, 's>, design: &mut Design, property: &'s Property) {
    let Some(Argument::Text(path)) = property.arguments.first() else {
        properties::missing(&mut resolver.scope, property, "write `season \"mast-site.csv\" { … }`");
        return;
    };
    let base = base(resolver, design, property);
    let broken = property.block.as_ref().is_some_and(properties::is_broken);
    let outer = resolver.scope.open();
    let stated = match &property.block {
        Some(block) => properties::of_block(&mut resolver.scope, block, "a `season`", COLUMNS),
        None => Vec::new(),
    };
    let find = |word: &str| stated.iter().copied().find(|inner| inner.name.value == word);
    if let (Some(first), Some(second)) = (find("irradiance"), find("concentration")) {
        conflict(
            &mut resolver.scope,
            "`irradiance` and `concentration` both set how strong the light of a row is".to_owned(),
            second.name.span,
            first.name.span,
            "keep one of the two",
        );
    }
    let column = |word: &'static str, dimension, role, default| Wanted {
        word,
        property: find(word),
        dimension,
        role,
        default,
    };
    let wanted = [
        column("hours", Some(Dimension::TIME), Role::NotNegative, Some((0, "h"))),
        column("temperature", Some(Dimension::TEMPERATURE), Role::CellTemperature, None),
        column("irradiance", Some(Dimension::IRRADIANCE), Role::NotNegative, None),
        column("concentration", Some(Dimension::NONE), Role::NotNegative, None),
        column("incidence", Some(Dimension::ANGLE), Role::Incidence, None),
        column("light", None, Role::Any, None),
    ];
    let records = resolver.records(path, property.span.source, &wanted, broken);
    resolver.scope.close(outer);
    if wanted[0].property.is_none() && !broken {
        let sentence = format!("`{}`: hours from column 1, as nothing is stated", path.value);
        design.assumptions.push(sentence);
    }
    let (Some(records), Some(base)) = (records, base) else { return };
    let condition = design.conditions[base].clone();
    let mut lights: HashMap<String, Option<Arc<Spectrum>>> = HashMap::new();
    let mut rows = Vec::with_capacity(records.len());
    for record in records {
        let at = |index: usize| record.get(index).and_then(Option::as_ref);
        let mut own = condition.clone();
        if let Some(cell) = at(5) {
            let Some(light) = light_of(resolver, path, cell, &mut lights) else { continue };
            own.light = light;
        }
        let value = |index: usize| at(index).map(|cell: &Cell| cell.value);
        own.temperature_k = value(1).unwrap_or(own.temperature_k);
        own.incidence_rad = value(4).unwrap_or(own.incidence_rad);
        if let Some(power) = value(2) {
            own.concentration = power / own.light.total_w_per_m2;
        }
        own.concentration = value(3).unwrap_or(own.concentration);
        rows.push(SeasonRow { seconds: value(0).unwrap_or(0.0), condition: own });
    }
    if rows.iter().all(|row| row.seconds * row.condition.concentration <= 0.0) {
        let message = format!("the table `{}` holds no hour of light", path.value);
        resolver.table_fault(path, (path.span, message), "nothing to read");
        return;
    }
    design.season = Some(Season { file: path.value.clone(), condition: base, rows, span: property.span });
}

/// The condition after `under`, or the first.
fn base(resolver: &mut Resolver<'_, '_>, design: &mut Design, property: &Property) -> Option<usize> {
    match property.arguments.get(1..).unwrap_or(&[]) {
        [] => {
            let first = design.conditions.first()?;
            if design.conditions.len() > 1 {
                let sentence =
                    format!("the rows of the season start from `{}`, as nothing is stated", first.name);
                design.assumptions.push(sentence);
            }
            Some(0)
        }
        [Argument::Word(under), Argument::Word(name), rest @ ..] if under.value == "under" => {
            properties::no_more(&mut resolver.scope, property, property.arguments.len() - rest.len());
            let found = design.conditions.iter().position(|condition| condition.name == name.value);
            if found.is_none() && resolver.conditions_whole {
                let known = design.conditions.iter().map(|condition| condition.name.as_str());
                let finding = crate::resolve::names::unknown(
                    "condition",
                    name,
                    known,
                    "name one of the stack's conditions",
                );
                resolver.scope.report(finding);
            }
            found
        }
        [other, ..] => {
            resolver.scope.report(
                Finding::error("value.missing", "`season` does not say under which condition")
                    .at(other.span(), "not `under` and a name")
                    .help("write `under noon` behind the file"),
            );
            None
        }
    }
}

/// The light a cell names, looked up once.
fn light_of(
    resolver: &mut Resolver<'_, '_>,
    path: &Spanned<String>,
    cell: &Cell,
    known: &mut HashMap<String, Option<Arc<Spectrum>>>,
) -> Option<Arc<Spectrum>> {
    if let Some(light) = known.get(&cell.text) {
        return light.clone();
    }
    let light = match resolver.items.spectra.get(&cell.text) {
        Some(item) => resolver.spectrum(item),
        None => {
            let found = light::builtin(&cell.text);
            if found.is_none() {
                let message = format!("no light is called `{}`", cell.text);
                resolver.table_fault(path, (cell.span, message), "an unknown light");
            }
            found
        }
    };
    known.insert(cell.text.clone(), light.clone());
    light
}
