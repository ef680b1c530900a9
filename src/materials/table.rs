//! n,k tables as text: `nm,n,k` a line, ascending wavelength.

use crate::materials::optics::IndexTable;

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

/// Reads `nm,n,k` lines. `#` opens a comment line; one head line is allowed and has to be
/// `nm,n,k` or `um,n,k`, without one the wavelengths are nm. `k` may be left out.
///
/// # Errors
/// The first line that is no sound row: no number, n not above 0, k below 0, a wavelength that is
/// not above the one before it.
pub fn read(text: &str) -> Result<IndexTable, TableError> {
    let mut table = IndexTable {
        wavelength_m: Vec::new(),
        n: Vec::new(),
        k: Vec::new(),
        gap_ev: None,
        edge_is_direct: false,
    };
    let (mut start, mut unit, mut head) = (0, 1e-9, false);
    for (number, line) in text.split('\n').enumerate() {
        let begin = start;
        start += line.len() + 1;
        let row = line.trim();
        if row.is_empty() || row.starts_with('#') {
            continue;
        }
        let wrong = |message: String, help: &str| TableError {
            start: begin,
            end: begin + line.trim_end().len(),
            message: format!("line {}: {message}", number + 1),
            help: help.to_owned(),
        };
        let cells: Vec<&str> = row.split([',', ';', '\t']).map(str::trim).collect();
        if !head && table.wavelength_m.is_empty() && cells[0].starts_with(|c: char| c.is_ascii_alphabetic()) {
            head = true;
            unit = match cells[0].to_ascii_lowercase().as_str() {
                "nm" | "wavelength_nm" => 1e-9,
                "um" | "wavelength_um" => 1e-6,
                other => {
                    return Err(wrong(
                        format!("`{other}` is no unit of wavelength"),
                        "let the first line read `nm,n,k` or `um,n,k`",
                    ));
                }
            };
            continue;
        }
        let mut numbers = [0.0; 3];
        for (slot, name) in ["wavelength", "n", "k"].into_iter().enumerate() {
            numbers[slot] = match cells.get(slot).copied().unwrap_or_default() {
                "" if slot == 2 => 0.0,
                cell => cell.parse().ok().filter(|value: &f64| value.is_finite()).ok_or_else(|| {
                    wrong(
                        format!("{name} is no number: `{cell}`"),
                        "write numbers with a decimal point, such as `550,1.46,0`",
                    )
                })?,
            };
        }
        let [wavelength, n, k] = [numbers[0] * unit, numbers[1], numbers[2]];
        if wavelength <= table.wavelength_m.last().copied().unwrap_or(0.0) {
            return Err(wrong(
                format!("the wavelength {} does not follow the one before it", cells[0]),
                "sort the rows by rising wavelength and name each once",
            ));
        }
        if n <= 0.0 {
            return Err(wrong(format!("n is {n}"), "a refractive index is above 0"));
        }
        if k < 0.0 {
            return Err(wrong(format!("k is {k}"), "a k below 0 would be gain: write 0"));
        }
        table.wavelength_m.push(wavelength);
        table.n.push(n);
        table.k.push(k);
    }
    if table.wavelength_m.is_empty() {
        return Err(TableError {
            start: 0,
            end: text.len().min(1),
            message: "there is no row".to_owned(),
            help: "write rows of wavelength in nm, n and k, such as `550,1.46,0`".to_owned(),
        });
    }
    Ok(table)
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
mod tests {
    use super::*;

    #[test]
    fn tables_are_read_with_and_without_head_and_k() {
        let table = read("nm,n,k\n400,2.5,0.1\n500,2.4,0\n").expect("a table");
        assert_eq!((table.wavelength_m[0], table.k[0]), (400.0 * 1e-9, 0.1));
        let table = read("# film\r\num;n\r\n0.4;1.5\r\n").expect("a table");
        assert_eq!((table.wavelength_m[0], table.n[0], table.k[0]), (0.4 * 1e-6, 1.5, 0.0));
    }

    #[test]
    fn unsound_tables_say_where() {
        let wrong = |text: &str| read(text).expect_err("unsound");
        let error = wrong("nm,n,k\n400,2.5,0\n390,2.4,0\n");
        assert_eq!((error.start, error.end), (17, 26));
        assert!(error.message.starts_with("line 3: the wavelength 390 does not follow"));
        assert!(wrong("nm,n,k\n400,abc,0\n").message.contains("n is no number: `abc`"));
        assert!(wrong("nm,n,k\n400,1.5,-0.1\n").message.contains("k is -0.1"));
        assert!(wrong("inch,n,k\n1,1.5,0\n").message.contains("`inch` is no unit"));
        assert!(wrong("400,1.5,nan\n").message.contains("k is no number"));
        assert!(wrong("").message.contains("no row"));
    }
}
