//! Tables of numbers in a text file: which column is what, in which unit, and what is wrong in
//! which line.

use crate::finding::Finding;
use crate::resolve::Resolver;
use crate::resolve::properties;
use crate::resolve::quantities::{Expected, Role};
use crate::source::{SourceId, Span, Spanned};
use crate::syntax::{Argument, Property};
use crate::units::{Dimension, Unit, parse};

/// The statements that say which column is what.
pub(super) struct Columns<'s> {
    pub(super) wavelength: Option<&'s Property>,
    pub(super) value: Option<&'s Property>,
    /// Whether a statement of the block could not be read: then none is said to be missing.
    pub(super) broken: bool,
}

/// One column of a table.
pub(super) struct Column {
    /// What it holds, for wording.
    pub(super) what: String,
    pub(super) which: Which,
    pub(super) unit: Unit,
}

/// By number or by heading.
pub(super) enum Which {
    /// From 0.
    Number(usize),
    Heading(Spanned<String>),
}

/// Faults told of one table; a file with the wrong separator would give thousands.
const MOST_FAULTS: usize = 5;

impl<'s> Resolver<'_, 's> {
    /// Which column a property names, by number from 1 or by heading, the word `column` before it or
    /// not; and what follows. `example` is how it could be written.
    pub(super) fn which(&mut self, property: &'s Property, example: &str) -> Option<(Which, &'s [Argument])> {
        let mut arguments = property.arguments.as_slice();
        if let [Argument::Word(first), rest @ ..] = arguments
            && first.value == "column"
        {
            arguments = rest;
        }
        let Some((first, rest)) = arguments.split_first() else {
            properties::missing(&mut self.scope, property, &format!("write `{example}`"));
            return None;
        };
        let which = if let Argument::Text(heading) = first {
            Which::Heading(heading.clone())
        } else {
            let value = properties::as_value(first)?;
            let expected = Expected::new("column", Dimension::NONE, Role::Count);
            Which::Number(self.scope.quantity(&value, expected)? as usize - 1)
        };
        Some((which, rest))
    }

    /// `wavelength column 1 in nm`, `irradiance column "E" in W/m2/nm`; `what` is the statement's
    /// word with the dimensions it may have.
    pub(super) fn column(
        &mut self,
        property: Option<&'s Property>,
        table: &Spanned<String>,
        what: (&str, &[Dimension], bool),
    ) -> Option<Column> {
        let (word, dimensions, broken) = what;
        let (number, unit_text) = match word {
            "wavelength" => (1, "nm"),
            "transmittance" => (2, "percent"),
            "eqe" => (2, "percent"),
            "voltage" => (1, "V"),
            "current" => (2, "mA/cm2"),
            "hours" => (1, "h"),
            "temperature" => (2, "degC"),
            "irradiance" if dimensions == [Dimension::IRRADIANCE] => (3, "W/m2"),
            "concentration" => (3, "times"),
            "incidence" => (4, "deg"),
            _ => (2, "W/m2/nm"),
        };
        let example = format!("{word} column {number} in {unit_text}");
        let Some(property) = property else {
            if broken {
                return None;
            }
            self.scope.report(
                Finding::error(
                    "value.missing",
                    format!(
                        "nothing says which column of `{}` is the {word}, and in which unit",
                        table.value
                    ),
                )
                .at(table.span, format!("no `{word}` stated"))
                .help(format!("write `{example}`")),
            );
            return None;
        };
        let (which, arguments) = self.which(property, &example)?;
        let unit = self.column_unit(property, arguments, &example)?;
        let (text, unit) = (unit.0, unit.1);
        if !dimensions.contains(&unit.dimension) {
            self.scope.report(
                Finding::error(
                    "unit.dimension",
                    format!(
                        "`{word}` takes {}, and `{}` is {}",
                        dimensions[0].name(),
                        text.value,
                        unit.dimension.name()
                    ),
                )
                .at(text.span, unit.dimension.name())
                .help(format!("write `{example}`")),
            );
            return None;
        }
        Some(Column { what: word.to_owned(), which, unit })
    }

    /// `in W/m2/nm`: a unit by itself reads as an expression, so its text is what counts.
    fn column_unit(
        &mut self,
        property: &Property,
        arguments: &[Argument],
        example: &str,
    ) -> Option<(Spanned<String>, Unit)> {
        let [Argument::Word(word), first, ..] = arguments else {
            self.scope.report(
                Finding::error("unit.missing", format!("`{}` does not say its unit", property.name.value))
                    .at(property.span, "no unit")
                    .help(format!("write `{example}`")),
            );
            return None;
        };
        let last = arguments.last().map_or(first.span(), Argument::span);
        let span = first.span().to(last);
        let written = match first {
            Argument::Text(quoted) => quoted.value.clone(),
            Argument::Word(word) if word.value == "percent" => "%".to_owned(),
            _ => self.text(span),
        };
        let text = Spanned::new(written, span);
        if word.value != "in" {
            self.scope.report(
                Finding::error("unit.missing", format!("`{}` does not say its unit", property.name.value))
                    .at(word.span, "not `in`")
                    .help(format!("write `{example}`")),
            );
            return None;
        }
        match parse(&text.value) {
            Ok(unit) => Some((text, unit)),
            Err(wrong) => {
                self.scope.report(
                    Finding::error("unit.unknown", format!("`{}` is not a unit", wrong.part))
                        .at(span, "an unknown unit")
                        .help(format!("write `{}`", wrong.meant.unwrap_or_else(|| example.to_owned()))),
                );
                None
            }
        }
    }

    /// Two columns of a table in SI, wavelength strictly ascending, values not negative. Rows of
    /// heading before the first row of numbers, empty rows and rows that open with `#` or `//` are passed over.
    pub(super) fn table(
        &mut self,
        id: SourceId,
        path: &Spanned<String>,
        wavelength: &Column,
        value: &Column,
    ) -> Option<(Vec<f64>, Vec<f64>)> {
        let text = self.files.sources.get(id).text.clone();
        let mut rows = Rows::new(id, &text);
        let at = [self.position(&rows, wavelength)?, self.position(&rows, value)?];
        let (mut x, mut y): (Vec<f64>, Vec<f64>) = (Vec::new(), Vec::new());
        // Where the row of each point stands.
        let mut places: Vec<Span> = Vec::new();
        let mut faults = 0;
        while let Some(row) = rows.next_row() {
            let cells = [cell(&row, at[0]), cell(&row, at[1])];
            let numbers = cells.map(|cell| cell.and_then(|(_, text)| text.parse::<f64>().ok()));
            if x.is_empty() && faults == 0 && !row.iter().any(|(_, text)| text.parse::<f64>().is_ok()) {
                continue;
            }
            let whole = row.first().zip(row.last()).map_or(path.span, |(a, b)| a.0.to(b.0));
            let fault = match numbers {
                [Some(a), Some(b)] if a.is_finite() && b.is_finite() => {
                    let (a, b) = (a * wavelength.unit.factor, b * value.unit.factor);
                    if a <= 0.0 {
                        Some((
                            whole,
                            format!("a wavelength of {}", numbers[0].unwrap_or(0.0)),
                            "not above zero",
                        ))
                    } else if b < 0.0 {
                        Some((
                            cells[1].map_or(whole, |cell| cell.0),
                            format!("a negative {}", value.what),
                            "below zero",
                        ))
                    } else {
                        x.push(a);
                        y.push(b);
                        places.push(whole);
                        None
                    }
                }
                _ => {
                    let bad = usize::from(numbers[0].is_some_and(f64::is_finite));
                    let what = if bad == 0 { &wavelength.what } else { &value.what };
                    match cells[bad] {
                        Some((span, text)) => {
                            Some((span, format!("`{text}` is not a number"), "not a number"))
                        }
                        None => Some((whole, format!("the row has no {what}"), "a column is missing")),
                    }
                }
            };
            if let Some((span, message, label)) = fault {
                faults += 1;
                self.scope.report(
                    Finding::error("spectrum.table", message)
                        .at(span, label)
                        .beside(path.span, "read from here")
                        .help(help_for(label)),
                );
                if faults >= MOST_FAULTS {
                    return None;
                }
            }
        }
        let counts_down = x.first() > x.last();
        faults += self.order(path, (&x, &places), MOST_FAULTS - faults);
        if faults > 0 {
            return None;
        }
        if counts_down {
            self.scope.report(
                Finding::advice(
                    "spectrum.table",
                    format!("`{}` counts its wavelengths down, and is read backwards", path.value),
                )
                .at(places.first().copied().unwrap_or(path.span), "the longest comes first")
                .beside(path.span, "read from here")
                .help("sort the rows by rising wavelength"),
            );
            x.reverse();
            y.reverse();
        }
        if x.len() < 2 {
            self.scope.report(
                Finding::error(
                    "spectrum.table",
                    format!("the table `{}` holds {}", path.value, count(x.len())),
                )
                .at(path.span, "too few rows")
                .help("give at least 2 rows of numbers, such as `300, 0.5`"),
            );
            return None;
        }
        Some((x, y))
    }

    /// Reports rows that stand twice or out of order, at most so many; gives how many.
    fn order(&mut self, path: &Spanned<String>, (x, places): (&[f64], &[Span]), most: usize) -> usize {
        let counts_down = x.first() > x.last();
        let (mut last, mut faults) = (0, 0);
        for at in 1..x.len() {
            let twice = x[at] == x[last];
            if !twice && (x[last] > x[at]) == counts_down {
                last = at;
                continue;
            }
            if faults >= most {
                break;
            }
            faults += 1;
            let (message, label, help) = if twice {
                ("the wavelength stands twice", "the second row of it", "keep one of the two rows")
            } else {
                (
                    "the wavelength does not go on from row to row",
                    "out of order",
                    "sort the rows by rising wavelength, each once",
                )
            };
            self.scope.report(
                Finding::error("spectrum.table", message)
                    .at(places[at], label)
                    .beside(path.span, "read from here")
                    .help(help),
            );
        }
        faults
    }

    /// The column's position from 0.
    pub(super) fn position(&mut self, rows: &Rows<'_>, column: &Column) -> Option<usize> {
        match &column.which {
            Which::Number(at) => Some(*at),
            Which::Heading(heading) => {
                let headings = rows.headings();
                let found = headings.iter().position(|known| *known == heading.value);
                if found.is_none() {
                    let finding = crate::resolve::names::unknown(
                        "column",
                        heading,
                        headings.iter().map(String::as_str),
                        "give the column by number, such as `column 2`",
                    );
                    self.scope.report(finding);
                }
                found
            }
        }
    }
}

fn help_for(label: &str) -> &'static str {
    match label {
        "below zero" => "replace noise below zero by `0`",
        "not above zero" => "state the wavelength column, such as `wavelength column 1 in nm`",
        "a column is missing" => "fill the row, or name another column",
        _ => "write a number with a decimal point, or take the row out",
    }
}

fn count(rows: usize) -> String {
    match rows {
        0 => "no row of numbers".to_owned(),
        1 => "1 row of numbers".to_owned(),
        _ => format!("{rows} rows of numbers"),
    }
}

fn cell<'t>(row: &[(Span, &'t str)], at: usize) -> Option<(Span, &'t str)> {
    row.get(at).copied().filter(|(_, text)| !text.is_empty())
}

/// Rows of a text, cells split at comma, semicolon, tab or space, whichever the text uses.
pub(super) struct Rows<'t> {
    source: SourceId,
    text: &'t str,
    at: usize,
    separator: Option<char>,
}

impl<'t> Rows<'t> {
    pub(super) fn new(source: SourceId, text: &'t str) -> Self {
        let first = text.lines().find(|line| !skipped(line)).unwrap_or_default();
        let separator = ['\t', ';', ','].into_iter().find(|mark| first.contains(*mark));
        Self { source, text, at: 0, separator }
    }

    fn headings(&self) -> Vec<String> {
        let mut rows = Self { at: 0, ..*self };
        let row = rows.next_row().unwrap_or_default();
        row.iter().map(|(_, text)| text.trim_matches('"').to_owned()).collect()
    }

    pub(super) fn next_row(&mut self) -> Option<Vec<(Span, &'t str)>> {
        while self.at < self.text.len() {
            let start = self.at;
            let line = self.text[start..].split('\n').next().unwrap_or_default();
            self.at += line.len() + 1;
            if skipped(line) {
                continue;
            }
            return Some(self.cells(line, start));
        }
        None
    }

    fn cells(&self, line: &'t str, start: usize) -> Vec<(Span, &'t str)> {
        let place = |cell: &'t str| {
            let inner = cell.trim();
            let from = start + (inner.as_ptr() as usize - line.as_ptr() as usize);
            (Span::new(self.source, from, from + inner.len()), inner)
        };
        match self.separator {
            Some(mark) => line.split(mark).map(place).collect(),
            None => line.split_whitespace().map(place).collect(),
        }
    }
}

fn skipped(line: &str) -> bool {
    let line = line.trim();
    line.is_empty() || line.starts_with('#') || line.starts_with("//")
}
