//! Measurements laid over the prediction: `measured eqe "run-17.csv" of top under noon { … }`.

use crate::design::{Design, Measured, MeasuredKind};
use crate::resolve::properties;
use crate::resolve::quantities::Role;
use crate::resolve::records::{Cell, Wanted};
use crate::resolve::{Resolver, names};
use crate::source::{SourceId, Spanned};
use crate::syntax::{self, Argument, Property};
use crate::units::Dimension;

/// Reads the table, and what it belongs to.
pub(super) fn measured<'s>(
    resolver: &mut Resolver<'_, 's>,
    design: &mut Design,
    it: &'s syntax::Measured,
    under: Option<usize>,
) {
    const KINDS: &[&str] = &["eqe", "jv"];
    let kind = match it.what.value.as_str() {
        "eqe" => Some(MeasuredKind::Eqe),
        "jv" => Some(MeasuredKind::Jv),
        _ => {
            let known = KINDS.iter().copied();
            let finding = names::unknown("kind of measurement", &it.what, known, "write `eqe` or `jv`");
            resolver.scope.report(finding);
            None
        }
    };
    let junction = junction(resolver, design, it, kind);
    let broken = it.block.as_ref().is_some_and(properties::is_broken);
    let outer = resolver.scope.open();
    let allowed: &[&str] = match kind {
        Some(MeasuredKind::Jv) => &["voltage", "current"],
        Some(MeasuredKind::Eqe) => &["wavelength", "eqe", "reference"],
        None => &["voltage", "current", "wavelength", "eqe", "reference"],
    };
    let stated = match &it.block {
        Some(block) => properties::of_block(&mut resolver.scope, block, "a measurement", allowed),
        None => Vec::new(),
    };
    let find = |word: &str| stated.iter().copied().find(|inner| inner.name.value == word);
    let Some(kind) = kind else {
        resolver.files.read(&mut resolver.scope, it.span.source, &it.file, "table");
        resolver.scope.close(outer);
        return;
    };
    let wanted = wanted(kind, &find);
    let table = two_columns(resolver, &it.file, it.span.source, (&wanted, broken));
    let reference = match find("reference") {
        Some(property) => match reference(resolver, property) {
            Some(found) => Some(Some(found)),
            None => Some(None),
        },
        None => None,
    };
    resolver.scope.close(outer);
    if !broken && wanted.iter().any(|it| it.property.is_none()) {
        let what = match kind {
            MeasuredKind::Eqe => {
                "wavelength in nm from column 1, quantum efficiency as a share from column 2"
            }
            MeasuredKind::Jv => "voltage in V from column 1, current in mA/cm2 from column 2",
        };
        let sentence = format!("`{}`: {what}, where nothing else is stated", it.file.value);
        design.assumptions.push(sentence);
    }
    if it.under.is_none() && design.conditions.len() > 1 {
        let first = &design.conditions[0].name;
        design.assumptions.push(format!("`{}` is laid over `{first}`, as nothing is stated", it.file.value));
    }
    let (Some((at, values)), Some(junction), Some(condition)) = (table, junction, under) else { return };
    if reference == Some(None) {
        return;
    }
    design.measured.push(Measured {
        kind,
        file: it.file.value.clone(),
        junction,
        condition,
        at,
        values,
        reference: reference.flatten(),
        text: resolver.text(it.span),
        span: it.span,
    });
}

fn wanted<'s>(kind: MeasuredKind, find: &dyn Fn(&str) -> Option<&'s Property>) -> [Wanted<'s>; 2] {
    let column = |word: &'static str, dimension, role, default| Wanted {
        word,
        property: find(word),
        dimension: Some(dimension),
        role,
        default: Some(default),
    };
    match kind {
        MeasuredKind::Eqe => [
            column("wavelength", Dimension::LENGTH, Role::Positive, (0, "nm")),
            column("eqe", Dimension::NONE, Role::Share, (1, "times")),
        ],
        MeasuredKind::Jv => [
            column("voltage", Dimension::VOLTAGE, Role::Any, (0, "V")),
            column("current", Dimension::CURRENT_DENSITY, Role::Any, (1, "mA/cm2")),
        ],
    }
}

/// The junction a measurement is of; the outer `None` where that is wrong, which is reported.
fn junction(
    resolver: &mut Resolver<'_, '_>,
    design: &Design,
    it: &syntax::Measured,
    kind: Option<MeasuredKind>,
) -> Option<Option<usize>> {
    match &it.of {
        Some(of) => match design.junction(&of.value) {
            Some((index, _)) => Some(Some(index)),
            None => {
                let known = design.junctions.iter().map(|junction| junction.name.value.as_str());
                let finding = names::unknown("junction", of, known, "name a junction of this stack");
                resolver.scope.report(finding);
                None
            }
        },
        None if kind == Some(MeasuredKind::Eqe) && design.junctions.len() == 1 => Some(Some(0)),
        None if kind == Some(MeasuredKind::Eqe) => {
            let first = design.junctions.first().map_or("top", |junction| junction.name.value.as_str());
            let help = format!("write `measured eqe \"{}\" of {first}`", it.file.value);
            properties::missing_of(
                &mut resolver.scope,
                "a quantum efficiency belongs to one junction, and none is named",
                it.file.span,
                &help,
            );
            None
        }
        None => Some(None),
    }
}

/// `reference "reference-cell.csv"`: the response of the reference device, columns as those of the
/// measurement by default.
fn reference<'s>(resolver: &mut Resolver<'_, 's>, property: &'s Property) -> Option<(Vec<f64>, Vec<f64>)> {
    let Some(Argument::Text(path)) = property.arguments.first() else {
        properties::missing(&mut resolver.scope, property, "write `reference \"reference-cell.csv\"`");
        return None;
    };
    properties::no_more(&mut resolver.scope, property, 1);
    let stated = match &property.block {
        Some(block) => {
            properties::of_block(&mut resolver.scope, block, "a `reference`", &["wavelength", "eqe"])
        }
        None => Vec::new(),
    };
    let find = |word: &str| stated.iter().copied().find(|inner| inner.name.value == word);
    let broken = property.block.as_ref().is_some_and(properties::is_broken);
    let wanted = wanted(MeasuredKind::Eqe, &find);
    two_columns(resolver, path, property.span.source, (&wanted, broken))
}

/// Two columns in SI, the first brought to rise; rows at the same place are a fault.
fn two_columns<'s>(
    resolver: &mut Resolver<'_, 's>,
    path: &Spanned<String>,
    from: SourceId,
    (wanted, broken): (&[Wanted<'s>; 2], bool),
) -> Option<(Vec<f64>, Vec<f64>)> {
    let records = resolver.records(path, from, wanted, broken)?;
    let mut cells: Vec<(Cell, Cell)> = records
        .into_iter()
        .filter_map(|record| match <[Option<Cell>; 2]>::try_from(record) {
            Ok([Some(at), Some(value)]) => Some((at, value)),
            _ => None,
        })
        .collect();
    // Sweeps are taken upwards and downwards.
    if cells.first().zip(cells.last()).is_some_and(|(first, last)| first.0.value > last.0.value) {
        cells.reverse();
    }
    let fallen = cells.windows(2).find(|pair| pair[1].0.value <= pair[0].0.value);
    if let Some([_, (at, _)]) = fallen {
        let message = format!("the {} does not rise from row to row", wanted[0].word);
        resolver.table_fault(path, (at.span, message), "not above the row before");
        return None;
    }
    if cells.len() < 2 {
        let message = format!("the table `{}` holds 1 row of numbers", path.value);
        resolver.table_fault(path, (path.span, message), "too few rows");
        return None;
    }
    Some(cells.into_iter().map(|(at, value)| (at.value, value.value)).unzip())
}
