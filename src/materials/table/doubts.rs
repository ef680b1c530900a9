//! What a table of an index can hardly mean, though every row of it is sound by itself.
//!
//! n and k of any material are tied to each other by causality (Kramers and Kronig): what absorbs
//! at an edge refracts there, and what does not absorb refracts less and less towards longer
//! wavelengths. A table cut or pasted by hand shows where it breaks these.

use std::f64::consts::PI;

use crate::materials::optics::{IndexTable, photon_ev};
use crate::units::number;

/// Something doubtful at a row of a table.
#[derive(Clone, Debug, PartialEq)]
pub struct Doubt {
    /// Which row, by ascending wavelength from 0.
    pub row: usize,
    /// What is doubtful.
    pub message: String,
    /// The way out.
    pub help: String,
}

/// Absorption below a stated gap that a film of some µm would show, 1/m: 3 µm take 9 %.
const MUCH_PER_M: f64 = 3e4;
/// How far below the gap a tail may reach: ten Urbach energies of a good film, four of a poor one, eV.
const TAIL_EV: f64 = 0.15;
/// A smaller step of k leaves no mark in n that could be missed.
const STEP_K: f64 = 0.05;
/// Rows with which an edge can be drawn.
const FEW: usize = 5;

/// Everything doubtful in a table whose gap, where one is known, is `gap_ev`; each kind once, where it
/// shows most.
pub fn doubts(table: &IndexTable, gap_ev: Option<f64>) -> Vec<Doubt> {
    let found = [gap_ev.and_then(|gap| below_gap(table, gap)), step(table), rising(table), few(table)];
    let mut found: Vec<Doubt> = found.into_iter().flatten().collect();
    found.sort_by_key(|doubt| doubt.row);
    found
}

/// Strong absorption where the stated gap lets light pass.
fn below_gap(table: &IndexTable, gap_ev: f64) -> Option<Doubt> {
    let alpha = |row: usize| 4.0 * PI * table.k[row] / table.wavelength_m[row];
    let far = |row: &usize| photon_ev(table.wavelength_m[*row]) < gap_ev - TAIL_EV;
    let row = (0..table.k.len()).filter(far).find(|row| alpha(*row) > MUCH_PER_M)?;
    let energy = photon_ev(table.wavelength_m[row]);
    let [k, below, gap] = [rounded(table.k[row], 4), rounded(gap_ev - energy, 2), rounded(gap_ev, 3)];
    Some(Doubt {
        row,
        message: format!("k of {k} stands {below} eV below the stated gap of {gap} eV"),
        help: format!(
            "let k fall to 0 below {gap} eV, or state the gap the table shows, such as `edge {} eV`",
            rounded(energy, 2)
        ),
    })
}

/// k that ends from one row to the next while n passes by: a step Δk in the photon energy raises n at
/// it by Δk/π · ln(2D/δ) over what it is D away, δ the width of the step.
fn step(table: &IndexTable) -> Option<Doubt> {
    let (grid, k) = (&table.wavelength_m, &table.k);
    (0..grid.len().saturating_sub(1)).find_map(|row| {
        let (high, low) = (k[row].max(k[row + 1]), k[row].min(k[row + 1]));
        let width = grid[row + 1] - grid[row];
        let middle = (grid[row] + grid[row + 1]) / 2.0;
        let away = 8.0 * width;
        let inside = middle - away >= grid[0] && middle + away <= grid[grid.len() - 1];
        if high - low < STEP_K || low > 0.02 * high || width > 0.05 * middle || !inside {
            return None;
        }
        let at = |wavelength: f64| table.at(wavelength, 0.0).0;
        let raised = at(middle) - (at(middle - away) + at(middle + away)) / 2.0;
        let due = (high - low) / PI * (2.0 * away / width).ln();
        if raised > 0.15 * due {
            return None;
        }
        let nm = |wavelength: f64| number(rounded(wavelength * 1e9, 1));
        let at_row = if k[row] < k[row + 1] { row } else { row + 1 };
        Some(Doubt {
            row: at_row,
            message: format!(
                "k goes from {} to {} between {} and {} nm, and n shows nothing of it",
                number(rounded(k[row], 4)),
                number(rounded(k[row + 1], 4)),
                nm(grid[row]),
                nm(grid[row + 1])
            ),
            help: format!(
                "n has to peak by about {} there: take n and k from one source, or let k fall over a tail",
                number(rounded(due, 2))
            ),
        })
    })
}

/// n that grows with wavelength where nothing is absorbed.
fn rising(table: &IndexTable) -> Option<Doubt> {
    let (n, k) = (&table.n, &table.k);
    let mut start = 0;
    for row in 1..n.len() {
        if k[row] > 0.0 || k[row - 1] > 0.0 || n[row] <= n[row - 1] {
            start = row;
            continue;
        }
        if n[row] - n[start] > 0.03 {
            let nm = |row: usize| number(rounded(table.wavelength_m[row] * 1e9, 1));
            return Some(Doubt {
                row,
                message: format!(
                    "n rises from {} to {} between {} and {} nm where k is 0",
                    number(rounded(n[start], 3)),
                    number(rounded(n[row], 3)),
                    nm(start),
                    nm(row)
                ),
                help: "add the absorption that makes it rise, or correct n: it falls with wavelength where \
                       nothing is absorbed"
                    .to_owned(),
            });
        }
    }
    None
}

/// An edge drawn with too few rows.
fn few(table: &IndexTable) -> Option<Doubt> {
    let rows = table.k.len();
    if rows >= FEW || table.k.iter().all(|k| *k == 0.0) {
        return None;
    }
    let noun = if rows == 1 { "row" } else { "rows" };
    let (first, last) = (table.wavelength_m[0], table.wavelength_m[rows - 1]);
    let range = format!("{} to {} nm", number(rounded(first * 1e9, 1)), number(rounded(last * 1e9, 1)));
    Some(Doubt {
        row: 0,
        message: format!("{rows} {noun} from {range} cannot draw how an absorbing material absorbs"),
        help: "give a row each 20 nm, each 5 nm around the edge; or state `constant 1.9 0.01`".to_owned(),
    })
}

fn rounded(value: f64, digits: i32) -> f64 {
    let scale = 10f64.powi(digits);
    (value * scale).round() / scale
}

#[cfg(test)]
mod tests {
    use super::*;

    fn table(rows: &[(f64, f64, f64)]) -> IndexTable {
        IndexTable {
            wavelength_m: rows.iter().map(|row| row.0 * 1e-9).collect(),
            n: rows.iter().map(|row| row.1).collect(),
            k: rows.iter().map(|row| row.2).collect(),
            gap_ev: None,
            edge_is_direct: false,
        }
    }

    /// A step of k at 2 eV and the n that belongs to it: the Kramers-Kronig integral of a box from 2 to
    /// 4 eV of height `k`, `n = 1.5 + k/π · ln|(16 − E²)/(4 − E²)|`, k rounded off over `width_ev`.
    fn causal(k: f64, width_ev: f64) -> Vec<(f64, f64, f64)> {
        let nms = (0..=100).map(|step| 400.0 + 6.0 * f64::from(step));
        nms.map(|nm| {
            let energy = photon_ev(nm * 1e-9);
            let near = ((4.0 - energy * energy).abs()).max(4.0 * width_ev);
            let n = 1.5 + k / PI * ((16.0 - energy * energy).abs() / near).ln();
            (nm, n, if energy > 2.0 { k } else { 0.0 })
        })
        .collect()
    }

    #[test]
    fn an_edge_with_its_mark_in_n_is_sound_and_without_it_is_not() {
        let sound = causal(0.3, 0.01);
        assert_eq!(doubts(&table(&sound), None), []);
        let flat: Vec<_> = sound.iter().map(|&(nm, _, k)| (nm, 1.8 - (nm - 400.0) * 1e-4, k)).collect();
        let found = doubts(&table(&flat), None);
        assert_eq!(found.len(), 1);
        assert!(found[0].message.starts_with("k goes from 0.3 to 0 between 616 and 622 nm"), "{found:?}");
        assert_eq!(flat[found[0].row].0, 622.0);
    }

    #[test]
    fn strong_absorption_below_a_stated_gap_is_doubted() {
        let rows = [
            (500.0, 3.6, 0.3),
            (700.0, 3.5, 0.2),
            (900.0, 3.4, 0.1),
            (1016.0, 3.3, 0.08),
            (1200.0, 3.2, 0.05),
        ];
        let found = doubts(&table(&rows), Some(1.42));
        assert_eq!(found.len(), 1);
        assert_eq!(found[0].row, 3);
        assert!(
            found[0].message.starts_with("k of 0.08 stands 0.2 eV below the stated gap of 1.42 eV"),
            "{found:?}"
        );
        assert_eq!(doubts(&table(&rows), None), []);
        assert_eq!(doubts(&table(&rows), Some(1.0)), []);
    }

    #[test]
    fn transparent_matter_does_not_refract_more_in_the_red() {
        let found = doubts(
            &table(&[(400.0, 1.5, 0.0), (600.0, 1.48, 0.0), (700.0, 1.5, 0.0), (800.0, 1.56, 0.0)]),
            None,
        );
        assert_eq!(found.len(), 1);
        assert!(found[0].message.starts_with("n rises from 1.48 to 1.56"), "{found:?}");
        // Rounding of a flat index is no doubt.
        assert_eq!(doubts(&table(&[(400.0, 1.50, 0.0), (600.0, 1.51, 0.0), (800.0, 1.50, 0.0)]), None), []);
    }

    #[test]
    fn few_rows_draw_no_edge() {
        assert_eq!(doubts(&table(&[(400.0, 2.0, 0.1), (900.0, 1.9, 0.0)]), None).len(), 1);
        assert_eq!(doubts(&table(&[(400.0, 2.0, 0.0), (900.0, 1.9, 0.0)]), None), []);
    }
}
