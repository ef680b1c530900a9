//! Reading the built-in library: all of it, and what one stack needs.

use bandloom::materials::library;
use bandloom::resolve::materials::Library;
use bandloom::resolve::quantities::Scope;

use super::{RUNS, Table, time};

pub(super) fn library(table: &mut Table) {
    let all: Vec<&str> = library::FILES.iter().map(|(name, _)| *name).collect();
    table.time(&format!("library, all {} read", all.len()), time(RUNS, || read(&all)), Some(60));
    let needed = ["GaAs", "GaInP", "AlInP", "AlGaInP", "AlGaAs", "MgF2", "ZnS", "Au"];
    table.time("library, what the two-junction demo needs", time(RUNS, || read(&needed)), Some(5));
    let tables = library::table_names().filter_map(library::table);
    let embedded: usize = library::FILES.iter().map(|(_, text)| text.len()).chain(tables.map(str::len)).sum();
    let size = format!("{:.2} MB", embedded as f64 / 1e6);
    table.row("library, embedded", &size, Some(("1.5 MB", embedded < 1_500_000)));
}

/// Reads definitions, none of them read before.
fn read(names: &[&str]) {
    let (mut library, mut scope) = (Library::new(), Scope::new());
    for name in names {
        assert!(library.find(name, &mut scope).is_some(), "{name}");
    }
}
