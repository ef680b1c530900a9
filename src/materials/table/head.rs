//! Which column of an index table holds what, read from its head.

/// What a column holds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Column {
    /// Vacuum wavelength, in this many m.
    Wavelength(f64),
    /// Photon energy, in this many eV.
    Energy(f64),
    /// Real part of the index.
    N,
    /// Imaginary part of the index.
    K,
    /// Real part of the dielectric function.
    RealPermittivity,
    /// Imaginary part of the dielectric function.
    ImaginaryPermittivity,
    /// Absorption coefficient, in this many 1/m.
    Absorption(f64),
}

/// Why a head cannot be used.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct HeadError {
    /// The cell it is about, from 0; `None` for the whole head.
    pub cell: Option<usize>,
    /// What is wrong.
    pub message: String,
    /// The way out.
    pub help: &'static str,
}

const KNOWN: &str = "write `nm`, `um` or `eV`, then `n`, `k`, or `eps1`, `eps2`, or `n`, `alpha_per_cm`";

/// The columns of a head: `nm,n,k`, `wavelength (um);eps1;eps2`, `eV  n  alpha_per_cm`.
///
/// # Errors
/// A cell that names no column, a column named twice, an absorption without its unit, columns that
/// do not make an index. `n_stated` says that n comes from elsewhere.
pub fn columns(cells: &[&str], n_stated: bool) -> Result<Vec<Column>, HeadError> {
    let mut found: Vec<Column> = Vec::new();
    for (at, cell) in cells.iter().enumerate() {
        let column = column(cell).ok_or_else(|| unknown(at, cell))?;
        let same = |known: &Column| std::mem::discriminant(known) == std::mem::discriminant(&column);
        let axis = |it: &Column| matches!(it, Column::Wavelength(_) | Column::Energy(_));
        if found.iter().any(|known| same(known) || (axis(known) && axis(&column))) {
            let message = format!("`{cell}` is a second column of its kind");
            return Err(HeadError { cell: Some(at), message, help: "keep one of the two" });
        }
        found.push(column);
    }
    let has = |wanted: fn(&Column) -> bool| found.iter().any(wanted);
    let whole = |message: &str, help| Err(HeadError { cell: None, message: message.to_owned(), help });
    if !has(|it| matches!(it, Column::Wavelength(_) | Column::Energy(_))) {
        return whole("no column holds the wavelength", "name one column `nm`, `um` or `eV`");
    }
    let index = has(|it| matches!(it, Column::N | Column::K | Column::Absorption(_)));
    let real = has(|it| *it == Column::RealPermittivity);
    let imaginary = has(|it| *it == Column::ImaginaryPermittivity);
    if real != imaginary {
        return whole("a dielectric function has two parts", "name both columns: `eps1` and `eps2`");
    }
    if real && index {
        return whole(
            "the index is given twice, by n and k and by a dielectric function",
            "keep one of the two",
        );
    }
    if has(|it| *it == Column::K) && has(|it| matches!(it, Column::Absorption(_))) {
        return whole("the absorption is given twice, by k and by a coefficient", "keep one of the two");
    }
    if real {
        return Ok(found);
    }
    match (has(|it| *it == Column::N), n_stated) {
        (true, true) => {
            whole("n stands in the table and beside it", "delete `n …` from the group, or the column")
        }
        (false, false) => whole("no column holds n", "name a column `n`, or state `n 2.5` beside the table"),
        _ => Ok(found),
    }
}

fn unknown(at: usize, cell: &str) -> HeadError {
    let word = cell.to_lowercase();
    if word.contains("alpha") || word.contains("absorption") {
        return HeadError {
            cell: Some(at),
            message: format!("`{cell}` does not say its unit"),
            help: "write `alpha_per_cm` or `alpha_per_m`",
        };
    }
    let message = if at == 0 {
        format!("`{cell}` is no unit of wavelength")
    } else {
        format!("`{cell}` names no column of an index table")
    };
    HeadError { cell: Some(at), message, help: KNOWN }
}

/// `wavelength_nm`, `wavelength (nm)`, `Energy [eV]`, `n`, `alpha (1/cm)`.
fn column(cell: &str) -> Option<Column> {
    let text = cell.trim_matches('"').to_lowercase().replace(['\u{b5}', '\u{3bc}'], "u");
    let words: Vec<&str> =
        text.split(|c: char| !c.is_alphanumeric()).filter(|word| !word.is_empty()).collect();
    let (name, unit) = match words.as_slice() {
        [only] => (*only, None),
        [name, rest @ ..] => (*name, Some(rest)),
        [] => return None,
    };
    let axis = |unit: &str| match unit {
        "nm" => Some(Column::Wavelength(1e-9)),
        "um" | "micron" | "microns" => Some(Column::Wavelength(1e-6)),
        "angstrom" => Some(Column::Wavelength(1e-10)),
        "ev" => Some(Column::Energy(1.0)),
        "mev" => Some(Column::Energy(1e-3)),
        _ => None,
    };
    match (name, unit) {
        ("wavelength" | "lambda" | "wl" | "energy" | "photon", Some(rest)) => axis(rest.last()?),
        ("n", None) => Some(Column::N),
        ("k" | "kappa", None) => Some(Column::K),
        ("eps1" | "e1" | "epsilon1", None) => Some(Column::RealPermittivity),
        ("eps2" | "e2" | "epsilon2", None) => Some(Column::ImaginaryPermittivity),
        // `alpha_per_cm`, `alpha (1/cm)`, `alpha [cm-1]`, `alpha (/cm)`
        ("alpha" | "absorption", Some(rest)) => {
            let unit = rest.iter().find(|word| matches!(**word, "cm" | "m" | "um" | "nm"))?;
            Some(Column::Absorption(match *unit {
                "cm" => 1e2,
                "m" => 1.0,
                "um" => 1e6,
                _ => 1e9,
            }))
        }
        (unit, None) => axis(unit),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn heads_of_the_trade_are_read() {
        let read = |head: &str| columns(&head.split(',').collect::<Vec<_>>(), false);
        assert_eq!(read("nm,n,k"), Ok(vec![Column::Wavelength(1e-9), Column::N, Column::K]));
        assert_eq!(
            read("Energy [eV],eps1,eps2"),
            Ok(vec![Column::Energy(1.0), Column::RealPermittivity, Column::ImaginaryPermittivity])
        );
        assert_eq!(
            read("wavelength (µm),n,alpha (1/cm)"),
            Ok(vec![Column::Wavelength(1e-6), Column::N, Column::Absorption(1e2)])
        );
        assert_eq!(columns(&["nm", "k"], true), Ok(vec![Column::Wavelength(1e-9), Column::K]));
    }

    #[test]
    fn heads_that_make_no_index_say_why() {
        let wrong = |head: &str| columns(&head.split(',').collect::<Vec<_>>(), false).expect_err("unsound");
        assert_eq!(wrong("nm,n,alpha").message, "`alpha` does not say its unit");
        assert_eq!(wrong("inch,n,k").message, "`inch` is no unit of wavelength");
        assert_eq!(wrong("nm,n,R").cell, Some(2));
        assert_eq!(wrong("nm,um,n").message, "`um` is a second column of its kind");
        assert_eq!(wrong("n,k").message, "no column holds the wavelength");
        assert_eq!(wrong("nm,k").message, "no column holds n");
        assert_eq!(wrong("nm,eps1").message, "a dielectric function has two parts");
        assert!(wrong("nm,n,eps1,eps2").message.starts_with("the index is given twice"));
        assert!(wrong("nm,n,k,alpha_per_cm").message.starts_with("the absorption is given twice"));
    }
}
