//! Index tables as text: a row a wavelength, what the columns hold said by a head.

use crate::materials::optics::{EV_M, IndexTable};
use crate::materials::table::head::Column;

pub mod doubts;
pub mod head;

/// What is wrong in a table and where, as bytes of the text.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TableError {
    /// First byte.
    pub start: usize,
    /// One past the last byte.
    pub end: usize,
    /// What is wrong.
    pub message: String,
    /// The way out.
    pub help: String,
}

/// A table and what was found while it was read.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// Ascending; `None` where anything is wrong.
    pub table: Option<IndexTable>,
    /// First and last byte of the row of each point of the table.
    pub rows: Vec<(usize, usize)>,
    /// Whether the wavelength column counts down and was read backwards. Photon energies counting up
    /// are not meant.
    pub reversed: bool,
    /// In the order of the text, at most [`MOST_FAULTS`].
    pub faults: Vec<TableError>,
}

/// Faults told of one table; a file with the wrong separator would give thousands.
pub const MOST_FAULTS: usize = 5;

/// No material refracts more below [`NEAR_M`]; a higher index is a slip of a column or a point.
const MOST_N: f64 = 15.0;
const MOST_K: f64 = 30.0;
const NEAR_M: f64 = 2e-6;
/// Wavelengths outside are in another unit than the head says, m.
const WAVELENGTHS_M: (f64, f64) = (1e-9, 1e-3);

/// The table, or what is wrong in it first; see [`read_all`].
///
/// # Errors
/// The first fault.
pub fn read(text: &str) -> Result<IndexTable, TableError> {
    let reading = read_all(text, None);
    match (reading.table, reading.faults.into_iter().next()) {
        (_, Some(fault)) => Err(fault),
        (Some(table), None) => Ok(table),
        (None, None) => Err(no_row(text)),
    }
}

/// Reads a table. `#` opens a comment line; one head line says what the columns hold (see
/// [`head::columns`]), without one they are nm, n and k. `k` may be left out. Cells are separated
/// by comma, semicolon, tab or, where none of them is there, by space. `n_stated` is n where the
/// table has none. Rows run up or down in wavelength, each wavelength once.
pub fn read_all(text: &str, n_stated: Option<f64>) -> Reading {
    let mut reader =
        Reader { points: Vec::new(), faults: Vec::new(), n_stated, columns: Vec::new(), is_headless: false };
    reader.rows(text);
    reader.finish(text)
}

/// One cell: its text and where it is.
type Cell<'t> = (usize, &'t str);

/// One row that could be read: wavelength in m, n, k, first and last byte.
struct Point {
    wavelength_m: f64,
    n: f64,
    k: f64,
    row: (usize, usize),
    /// The wavelength as written.
    text: String,
    line: usize,
}

struct Reader {
    points: Vec<Point>,
    faults: Vec<TableError>,
    n_stated: Option<f64>,
    columns: Vec<Column>,
    is_headless: bool,
}

impl Reader {
    fn rows(&mut self, text: &str) {
        let mut start = 0;
        let first = text.lines().find(|line| !is_passed_over(line)).unwrap_or_default();
        let separator = [';', '\t', ','].into_iter().find(|mark| first.contains(*mark));
        for (at, line) in text.split('\n').enumerate() {
            let (begin, number) = (start, at + 1);
            start += line.len() + 1;
            if is_passed_over(line) {
                continue;
            }
            let cells = cells(line, begin, separator);
            if self.columns.is_empty() && !self.head(&cells) {
                return;
            }
            if cells.iter().all(|(_, text)| text.parse::<f64>().is_err()) && self.is_head(&cells) {
                continue;
            }
            self.row(&cells, number);
            if self.faults.len() >= MOST_FAULTS {
                return;
            }
        }
    }

    /// Whether a row is the head that was read.
    fn is_head(&self, cells: &[Cell<'_>]) -> bool {
        self.points.is_empty() && cells.first().is_some_and(|(_, text)| starts_a_head(text))
    }

    /// Reads the head, or takes nm, n, k. False where nothing can be read without it.
    fn head(&mut self, cells: &[Cell<'_>]) -> bool {
        if !cells.first().is_some_and(|(_, text)| starts_a_head(text)) {
            self.columns = vec![Column::Wavelength(1e-9), Column::N, Column::K];
            self.is_headless = true;
            return true;
        }
        let names: Vec<&str> = cells.iter().map(|(_, text)| *text).collect();
        match head::columns(&names, self.n_stated.is_some()) {
            Ok(columns) => self.columns = columns,
            Err(error) => {
                let place = error.cell.map_or_else(|| whole(cells), |at| span(cells[at]));
                self.fault(place, &error.message, error.help);
            }
        }
        !self.columns.is_empty()
    }

    fn row(&mut self, cells: &[Cell<'_>], line: usize) {
        let row = whole(cells);
        if cells.len() > self.columns.len()
            && cells[self.columns.len()..].iter().any(|(_, text)| !text.is_empty())
        {
            let (own, due) = (cells.len(), self.columns.len());
            let help =
                "separate cells by `;` where the decimals have a comma, and name every column in the head";
            let message = format!("the row has {own} cells, and {due} are due");
            return self.fault_of_all(row, (&message, help));
        }
        let mut values = [None; 5];
        let mut wavelength = ("", 0.0);
        for (at, column) in self.columns.clone().into_iter().enumerate() {
            let (name, slot) = words(column);
            let Some((start, text)) = cells.get(at).copied().filter(|(_, text)| !text.is_empty()) else {
                // Without a head, a table of n alone is a table of n.
                if column == Column::K && self.is_headless {
                    continue;
                }
                let help = "fill the cell, or take the row out";
                return self.fault(row, &format!("{name} is missing"), help);
            };
            let Some(value) = text.parse::<f64>().ok().filter(|value| value.is_finite()) else {
                let help = "write numbers with a decimal point, such as `550,1.46,0`";
                return self.fault(span((start, text)), &format!("{name} is no number: `{text}`"), help);
            };
            if let Some((message, help)) = out_of_range(column, value) {
                return self.fault(span((start, text)), &format!("{name} is {text}{message}"), help);
            }
            match column {
                Column::Wavelength(unit) => wavelength = (text, value * unit),
                Column::Energy(unit) => wavelength = (text, EV_M / (value * unit)),
                Column::Absorption(unit) => values[slot] = Some(value * unit),
                _ => values[slot] = Some(value),
            }
        }
        let (text, wavelength_m) = wavelength;
        if !(WAVELENGTHS_M.0..=WAVELENGTHS_M.1).contains(&wavelength_m) {
            let message = format!("{text} cannot be a wavelength or energy in the unit of the head");
            let help = "correct the unit in the head: `nm`, `um` or `eV`";
            return self.fault_of_all(row, (&message, help));
        }
        let (n, k) = self.index(values, wavelength_m);
        if n <= 0.0 {
            let help = "a metal has an eps2 above 0: state it";
            return self.fault(row, "eps1 below 0 and eps2 of 0 make an n of 0", help);
        }
        if wavelength_m < NEAR_M && (n > MOST_N || k > MOST_K) {
            let (what, value) = if n > MOST_N { ("n", n) } else { ("k", k) };
            let message = format!("{what} is {}: no material has that", crate::units::number(value));
            return self.fault(row, &message, "check the columns named in the head and the decimal point");
        }
        self.points.push(Point { wavelength_m, n, k, row, text: text.to_owned(), line });
    }

    /// n and k of the columns n, k, ε1, ε2, α.
    fn index(&self, values: [Option<f64>; 5], wavelength_m: f64) -> (f64, f64) {
        let [n, k, real, imaginary, absorption] = values;
        if let (Some(real), Some(imaginary)) = (real, imaginary) {
            let modulus = real.hypot(imaginary);
            let n = ((modulus + real) / 2.0).max(0.0).sqrt();
            // ε2/2n rather than a difference of nearly equal numbers, but where n is 0.
            let k = if n > 1e-9 { imaginary / (2.0 * n) } else { ((modulus - real) / 2.0).sqrt() };
            return (n, k);
        }
        let of_absorption = absorption.map(|alpha| alpha * wavelength_m / (4.0 * std::f64::consts::PI));
        (n.or(self.n_stated).unwrap_or(1.0), k.or(of_absorption).unwrap_or(0.0))
    }

    /// A fault of the whole file rather than of its row: told of the first row alone.
    fn fault_of_all(&mut self, place: (usize, usize), (message, help): (&str, &'static str)) {
        if !self.faults.iter().any(|fault| fault.help == help) {
            self.fault(place, message, help);
        }
    }

    fn fault(&mut self, (start, end): (usize, usize), message: &str, help: &str) {
        self.faults.push(TableError { start, end, message: message.to_owned(), help: help.to_owned() });
    }

    /// Checks the order, and turns the table round where it counts down.
    fn finish(mut self, text: &str) -> Reading {
        let counts_down = match self.points.as_slice() {
            [first, .., last] => first.wavelength_m > last.wavelength_m,
            _ => false,
        };
        let points = std::mem::take(&mut self.points);
        let mut last: Option<&Point> = None;
        for point in &points {
            let Some(before) = last else {
                last = Some(point);
                continue;
            };
            let (a, b) = (before.wavelength_m, point.wavelength_m);
            if a == b {
                let message = format!("{} stands twice", point.text);
                let help = format!("keep the row of line {} or this one", before.line);
                self.fault(point.row, &message, &help);
            } else if (a > b) != counts_down {
                let message = format!("{} does not follow {}, the one before it", point.text, before.text);
                self.fault(point.row, &message, "sort the rows, each wavelength once");
            } else {
                last = Some(point);
            }
            if self.faults.len() >= MOST_FAULTS {
                break;
            }
        }
        if points.is_empty() && self.faults.is_empty() {
            self.faults.push(no_row(text));
        }
        self.faults.sort_by_key(|fault| fault.start);
        let by_energy = self.columns.iter().any(|column| matches!(column, Column::Energy(_)));
        let mut points = points;
        if counts_down {
            points.reverse();
        }
        let table = IndexTable {
            wavelength_m: points.iter().map(|point| point.wavelength_m).collect(),
            n: points.iter().map(|point| point.n).collect(),
            k: points.iter().map(|point| point.k).collect(),
            gap_ev: None,
            edge_is_direct: false,
        };
        Reading {
            table: self.faults.is_empty().then_some(table),
            rows: points.iter().map(|point| point.row).collect(),
            reversed: counts_down && !by_energy,
            faults: self.faults,
        }
    }
}

fn is_passed_over(line: &str) -> bool {
    let line = line.trim();
    line.is_empty() || line.starts_with('#') || line.starts_with("//")
}

/// Letters other than those of `nan` and `inf`, which are numbers to a parser.
fn starts_a_head(cell: &str) -> bool {
    cell.starts_with(|c: char| c.is_alphabetic() || c == '"') && cell.parse::<f64>().is_err()
}

fn cells(line: &str, begin: usize, separator: Option<char>) -> Vec<Cell<'_>> {
    let place = |cell: &'_ str| begin + (cell.as_ptr() as usize - line.as_ptr() as usize);
    let cell = |cell| {
        let inner: &str = str::trim(cell);
        (place(inner), inner)
    };
    match separator {
        Some(mark) => line.split(mark).map(cell).collect(),
        None => line.split_whitespace().map(cell).collect(),
    }
}

fn span((start, text): Cell<'_>) -> (usize, usize) {
    (start, start + text.len())
}

/// From the first to the last cell of a row.
fn whole(cells: &[Cell<'_>]) -> (usize, usize) {
    let last = cells.iter().rev().find(|(_, text)| !text.is_empty()).or(cells.last());
    match (cells.first(), last) {
        (Some((start, _)), Some(last)) => (*start, span(*last).1.max(*start)),
        _ => (0, 0),
    }
}

/// What a column is called, and its slot among n, k, ε1, ε2, α.
fn words(column: Column) -> (&'static str, usize) {
    match column {
        Column::Wavelength(_) => ("wavelength", 0),
        Column::Energy(_) => ("photon energy", 0),
        Column::N => ("n", 0),
        Column::K => ("k", 1),
        Column::RealPermittivity => ("eps1", 2),
        Column::ImaginaryPermittivity => ("eps2", 3),
        Column::Absorption(_) => ("the absorption", 4),
    }
}

/// What no material has: how the message goes on, and the way out.
fn out_of_range(column: Column, value: f64) -> Option<(&'static str, &'static str)> {
    match column {
        Column::Wavelength(_) if value <= 0.0 => Some(("", "a wavelength is above 0")),
        Column::Energy(_) if value <= 0.0 => Some(("", "a photon energy is above 0")),
        Column::N if value <= 0.0 => Some(("", "a refractive index is above 0")),
        Column::K if value < 0.0 => Some(("", "a k below 0 would be gain: write 0")),
        Column::ImaginaryPermittivity if value < 0.0 => Some(("", "an eps2 below 0 would be gain: write 0")),
        Column::Absorption(_) if value < 0.0 => Some(("", "an absorption below 0 would be gain: write 0")),
        _ => None,
    }
}

/// Points at the last line that says anything.
fn no_row(text: &str) -> TableError {
    let end = text.trim_end().len();
    let start = text[..end].rfind('\n').map_or(0, |at| at + 1);
    TableError {
        start,
        end,
        message: "there is no row".to_owned(),
        help: "write rows of wavelength in nm, n and k, such as `550,1.46,0`".to_owned(),
    }
}

/// A law `n, k` of the wavelength in nm, at the wavelengths given in nm, ascending.
pub fn of_law(law: impl Fn(f64) -> (f64, f64), nanometres: &[f64]) -> IndexTable {
    let values: Vec<(f64, f64)> = nanometres.iter().map(|&nm| law(nm)).collect();
    IndexTable {
        wavelength_m: nanometres.iter().map(|nm| nm * 1e-9).collect(),
        n: values.iter().map(|(n, _)| *n).collect(),
        k: values.iter().map(|(_, k)| *k).collect(),
        gap_ev: None,
        edge_is_direct: false,
    }
}

/// 250 to 2500 nm, close together where dispersion is strong: linear interpolation between the
/// points stays within 1e-4 of n for glasses and fluorides.
pub fn law_grid() -> Vec<f64> {
    let near = (0..30).map(|step| 250.0 + 10.0 * f64::from(step));
    let far = (0..=39).map(|step| 550.0 + 50.0 * f64::from(step));
    near.chain(far).collect()
}

#[cfg(test)]
mod tests;
