//! The files index groups name: what is wrong in them, and what is doubtful, at the row.

use crate::finding::Finding;
use crate::materials::library;
use crate::materials::optics::IndexTable;
use crate::materials::table::{self, TableError, doubts};
use crate::resolve::materials::blocks::{Reader, Texts};
use crate::source::{Span, Spanned};

impl Reader<'_> {
    pub(super) fn no_file(&mut self, place: Span) {
        self.scope.report(
            Finding::error("material.incomplete", "`table` names no file")
                .at(place, "a file name in quotes is due")
                .help("write `table \"film.csv\"`, with columns `nm,n,k`"),
        );
    }

    /// `n 2.5` without a table to complete.
    pub(super) fn n_alone(&mut self, place: Span) {
        self.scope.report(
            Finding::error("material.statement", "`n` completes a table, and none is named")
                .at(place, "no `table` in this group")
                .help("write `constant 2.5` for an index without dispersion"),
        );
    }

    /// Reads an index table that has n in itself.
    pub(super) fn table(&mut self, file: &Spanned<String>) -> Option<IndexTable> {
        self.table_beside(file, None).map(|(table, _)| table)
    }

    /// Reads an index table, with n from beside it where one is stated, and where the row of each of
    /// its points stands; nowhere in a built-in one.
    pub(super) fn table_beside(
        &mut self,
        file: &Spanned<String>,
        n_stated: Option<f64>,
    ) -> Option<(IndexTable, Vec<Span>)> {
        let name = file.value.as_str();
        match self.texts {
            Texts::BuiltIn => {
                let found = library::table(name).map(table::read);
                if !matches!(found, Some(Ok(_))) {
                    // Kept out of a release by the test that reads the whole library.
                    let message = format!("the library has no sound table `{name}`");
                    self.scope.report(Finding::error("material.table", message).at(file.span, "named here"));
                }
                found?.ok().map(|table| (table, Vec::new()))
            }
            // A file that is not there was reported when the item was added.
            Texts::User(texts) => {
                let (source, text) = texts.get(name)?;
                let reading = table::read_all(text, n_stated);
                for TableError { start, end, message, help } in reading.faults {
                    self.scope.report(
                        Finding::error("material.table", format!("`{name}`: {message}"))
                            .at(Span::new(*source, start, end), "here")
                            .beside(file.span, "the table is named here")
                            .help(help),
                    );
                }
                let at = |row: &(usize, usize)| Span::new(*source, row.0, row.1);
                let rows: Vec<Span> = reading.rows.iter().map(at).collect();
                if let (true, Some(_), Some(last)) = (reading.reversed, &reading.table, rows.last()) {
                    self.scope.report(
                        Finding::advice(
                            "material.table",
                            format!("`{name}` counts its wavelengths down, and is read backwards"),
                        )
                        .at(*last, "the longest comes first")
                        .beside(file.span, "the table is named here")
                        .help("sort the rows by rising wavelength"),
                    );
                }
                reading.table.map(|table| (table, rows))
            }
        }
    }

    /// Says what is doubtful in a user's table; `rows` are where its points stand.
    pub(super) fn doubts(
        &mut self,
        file: &Spanned<String>,
        table: &IndexTable,
        (gap_ev, rows): (Option<f64>, &[Span]),
    ) {
        if rows.is_empty() {
            return;
        }
        for doubt in doubts::doubts(table, gap_ev) {
            let place = rows.get(doubt.row).copied().unwrap_or(file.span);
            self.scope.report(
                Finding::warning("material.implausible", format!("`{}`: {}", file.value, doubt.message))
                    .at(place, "this row")
                    .beside(file.span, "the table is named here")
                    .help(doubt.help),
            );
        }
    }
}
