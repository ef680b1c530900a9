//! Tables of records: which column is what by default, rows of several cells, and what is wrong in
//! which of them.

use crate::finding::Finding;
use crate::resolve::Resolver;
use crate::resolve::properties;
use crate::resolve::quantities::Role;
use crate::resolve::table::{Column, Rows, Which};
use crate::source::{SourceId, Span, Spanned};
use crate::syntax::Property;
use crate::units::{Dimension, parse, value_in};

/// A column that is wanted.
pub(super) struct Wanted<'s> {
    /// `hours`, `temperature`, …
    pub(super) word: &'static str,
    /// What was said of it.
    pub(super) property: Option<&'s Property>,
    /// `None` for words.
    pub(super) dimension: Option<Dimension>,
    /// What its values may be.
    pub(super) role: Role,
    /// Column from 0 and unit where nothing is said; `None` where it is then left out.
    pub(super) default: Option<(usize, &'static str)>,
}

/// One cell.
#[derive(Clone, Debug)]
pub(super) struct Cell {
    /// SI; 0 for words.
    pub(super) value: f64,
    /// As written.
    pub(super) text: String,
    pub(super) span: Span,
}

/// Faults told of one table.
const MOST_FAULTS: usize = 5;

/// Rows of a table at most: a year by five minutes.
const MOST_ROWS: usize = 110_000;

impl<'s> Resolver<'_, 's> {
    /// Rows of the table at `path`, a cell for each column wanted, `None` for those left out. No
    /// value where a column or a row is wrong, which is reported. `broken`: a statement about the
    /// columns could not be read, so that none is said to be missing.
    pub(super) fn records(
        &mut self,
        path: &Spanned<String>,
        from: SourceId,
        wanted: &[Wanted<'s>],
        broken: bool,
    ) -> Option<Vec<Vec<Option<Cell>>>> {
        let mut columns: Vec<Option<Column>> = Vec::new();
        let mut whole = !broken;
        for it in wanted {
            let column = match (it.property, it.default) {
                (Some(property), _) => {
                    let column = self.stated_column(property, path, it);
                    whole &= column.is_some();
                    column
                }
                (None, Some((at, unit))) => parse(unit).ok().map(|unit| Column {
                    what: it.word.to_owned(),
                    which: Which::Number(at),
                    unit,
                }),
                (None, None) => None,
            };
            columns.push(column);
        }
        let id = self.files.read(&mut self.scope, from, path, "table")?;
        if !whole {
            return None;
        }
        let text = self.files.sources.get(id).text.clone();
        let mut rows = Rows::new(id, &text);
        let mut places = Vec::new();
        for column in &columns {
            places.push(match column {
                Some(column) => Some(self.position(&rows, column)?),
                None => None,
            });
        }
        let mut records: Vec<Vec<Option<Cell>>> = Vec::new();
        let mut faults = 0;
        while let Some(row) = rows.next_row() {
            let is_heading = !row.iter().any(|(_, text)| text.parse::<f64>().is_ok());
            if records.is_empty() && faults == 0 && is_heading {
                continue;
            }
            let end = row.first().zip(row.last()).map_or(path.span, |(a, b)| a.0.to(b.0));
            let mut record = Vec::with_capacity(wanted.len());
            for ((it, column), place) in wanted.iter().zip(&columns).zip(&places) {
                let (Some(column), Some(place)) = (column, place) else {
                    record.push(None);
                    continue;
                };
                let cell = row.get(*place).copied().filter(|(_, text)| !text.is_empty());
                match read(it, column, cell) {
                    Ok(cell) => record.push(Some(cell)),
                    Err((message, label)) => {
                        faults += 1;
                        self.table_fault(path, (cell.map_or(end, |cell| cell.0), message), label);
                    }
                }
            }
            if faults >= MOST_FAULTS {
                return None;
            }
            records.push(record);
            if records.len() > MOST_ROWS {
                let message = format!("the table `{}` holds more than {MOST_ROWS} rows", path.value);
                self.table_fault(path, (path.span, message), "too many rows");
                return None;
            }
        }
        if faults > 0 {
            return None;
        }
        if records.is_empty() {
            let message = format!("the table `{}` holds no row of numbers", path.value);
            self.table_fault(path, (path.span, message), "nothing to read");
            return None;
        }
        Some(records)
    }

    /// Reports what is wrong at a place of a table.
    pub(super) fn table_fault(
        &mut self,
        path: &Spanned<String>,
        (span, message): (Span, String),
        label: &'static str,
    ) {
        let finding = Finding::error("data.table", message).at(span, label).help(help_for(label));
        let apart = span.source != path.span.source || !path.span.contains(span);
        self.scope.report(if apart { finding.beside(path.span, "read from here") } else { finding });
    }

    /// `hours column 1 in h`, `light column "sky"`.
    fn stated_column(
        &mut self,
        property: &'s Property,
        path: &Spanned<String>,
        it: &Wanted<'s>,
    ) -> Option<Column> {
        if let Some(dimension) = it.dimension {
            return self.column(Some(property), path, (it.word, &[dimension], false));
        }
        let (which, rest) = self.which(property, &format!("{} column 3", it.word))?;
        let taken = property.arguments.len() - rest.len();
        properties::no_more(&mut self.scope, property, taken);
        Some(Column { what: it.word.to_owned(), which, unit: parse("%").ok()? })
    }
}

fn read(
    it: &Wanted<'_>,
    column: &Column,
    cell: Option<(Span, &str)>,
) -> Result<Cell, (String, &'static str)> {
    let Some((span, text)) = cell else {
        return Err((format!("the row has no {}", it.word), "a column is missing"));
    };
    let plain = text.trim_matches('"').to_owned();
    if it.dimension.is_none() {
        return Ok(Cell { value: 0.0, text: plain, span });
    }
    let number = text.parse::<f64>().ok().filter(|number| number.is_finite());
    let Some(number) = number else {
        return Err((format!("`{text}` is not a number"), "not a number"));
    };
    let value = number * column.unit.factor + column.unit.offset;
    if it.role.possible(value) {
        return Ok(Cell { value, text: plain, span });
    }
    let unit = match it.role {
        Role::CellTemperature => "K",
        Role::Incidence => "deg",
        Role::Share => "%",
        _ => return Err((format!("{} of {text}", it.word), "below zero")),
    };
    Err((format!("{} of {} {unit}", it.word, crate::units::number(value_in(value, unit))), "out of range"))
}

fn help_for(label: &str) -> &'static str {
    match label {
        "not above the row before" => "sort the rows by rising values, each once",
        "below zero" => "replace what is below zero by `0`, or name another column",
        "out of range" => "correct the value, or state the column's own unit, such as `in percent`",
        "a column is missing" => "fill the row, or name another column",
        "too many rows" => "bring it down to hourly means",
        "nothing to read" => "give at least one row of numbers",
        "too few rows" => "give at least 2 rows of numbers",
        "an unknown light" => {
            "write the name of a `spectrum` of this file, or a built-in one such as `AM1.5G`"
        }
        _ => "write a number with a decimal point, or take the row out",
    }
}
