//! The reference spectra that come with the program.

use std::sync::{Arc, OnceLock};

use crate::light::Spectrum;

const G173: &str = include_str!("spectra/g173.csv");
const E490: &str = include_str!("spectra/e490.csv");

const G173_CITE: &str = "ASTM G173-03, Standard Tables for Reference Solar Spectral Irradiances";
const E490_CITE: &str =
    "ASTM E490-00a, Standard Solar Constant and Zero Air Mass Solar Spectral Irradiance Tables";

/// Every name [`builtin`] knows, with what it is.
pub const BUILTIN: &[(&str, &str)] = &[
    ("AM1.5G", "global on a 37 degree tilt, ASTM G173-03, 1000.37 W/m2"),
    ("AM1.5D", "direct normal with circumsolar, ASTM G173-03, 900.14 W/m2"),
    ("AM0", "above the atmosphere, ASTM E490-00a, 1366.09 W/m2"),
    ("AM0_G173", "above the atmosphere, the extraterrestrial column of ASTM G173-03, 1347.93 W/m2"),
];

struct Table {
    text: &'static str,
    /// Column of the irradiance; the wavelength stands in column 0.
    column: usize,
    metres_per_wavelength: f64,
    cite: &'static str,
}

/// The reference spectrum of that name; names as in [`BUILTIN`], read once.
pub fn builtin(name: &str) -> Option<Arc<Spectrum>> {
    static READ: [OnceLock<Arc<Spectrum>>; 4] = [const { OnceLock::new() }; 4];
    let index = BUILTIN.iter().position(|(known, _)| *known == name)?;
    let spectrum = READ[index].get_or_init(|| {
        let table = match index {
            0 => Table { text: G173, column: 2, metres_per_wavelength: 1e-9, cite: G173_CITE },
            1 => Table { text: G173, column: 3, metres_per_wavelength: 1e-9, cite: G173_CITE },
            2 => Table { text: E490, column: 1, metres_per_wavelength: 1e-6, cite: E490_CITE },
            _ => Table { text: G173, column: 1, metres_per_wavelength: 1e-9, cite: G173_CITE },
        };
        Arc::new(read(name, &table))
    });
    Some(Arc::clone(spectrum))
}

/// Reads one column. Rows that are not numbers are the two lines of heading; the tables are
/// part of the program and the tests hold their integrals, so nothing else can be skipped.
fn read(name: &str, table: &Table) -> Spectrum {
    let mut wavelength_m = Vec::with_capacity(2048);
    let mut irradiance = Vec::with_capacity(2048);
    for line in table.text.lines() {
        let mut cells = line.split(',');
        let wavelength = cells.next().and_then(|cell| cell.parse::<f64>().ok());
        let power = cells.nth(table.column - 1).and_then(|cell| cell.parse::<f64>().ok());
        if let (Some(wavelength), Some(power)) = (wavelength, power) {
            wavelength_m.push(wavelength * table.metres_per_wavelength);
            irradiance.push(power / table.metres_per_wavelength);
        }
    }
    Spectrum::from_table(name, wavelength_m, irradiance, table.cite)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_name_is_known_and_no_other() {
        for (name, _) in BUILTIN {
            let spectrum = builtin(name).expect("listed");
            assert_eq!(spectrum.name, *name);
            assert!(spectrum.wavelength_m.windows(2).all(|pair| pair[0] < pair[1]));
            assert!(spectrum.irradiance.iter().all(|power| *power >= 0.0));
        }
        assert!(builtin("AM1.5").is_none());
    }

    #[test]
    fn tables_are_whole() {
        // Rows of the published tables.
        assert_eq!(builtin("AM1.5G").expect("listed").wavelength_m.len(), 2002);
        assert_eq!(builtin("AM0").expect("listed").wavelength_m.len(), 1697);
    }
}
