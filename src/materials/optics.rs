//! Optical data: measured tables whose edge can move, and the two models without a chemistry.

use std::sync::Arc;

/// `h·c/q` in eV m: photon energy in eV is this over the vacuum wavelength in m (exact, SI 2019).
pub const EV_M: f64 = 6.626_070_15e-34 * 299_792_458.0 / 1.602_176_634e-19;

/// Photon energy in eV of a vacuum wavelength in m.
pub fn photon_ev(wavelength_m: f64) -> f64 {
    EV_M / wavelength_m
}

/// How a material answers to light.
#[derive(Clone, Debug, PartialEq)]
pub enum Optics {
    /// Nobody published data and nothing stands in for it.
    None,
    /// `n` and `k` against wavelength.
    Table(Arc<IndexTable>),
    /// Absorbs nothing below its gap and a stated share above it.
    Ideal(IdealEdge),
    /// A direct gap with a square-root law and an Urbach tail.
    Direct(DirectEdge),
}

/// Measured or modelled index against vacuum wavelength, ascending.
#[derive(Clone, Debug, PartialEq)]
pub struct IndexTable {
    /// m, strictly ascending, at least one.
    pub wavelength_m: Vec<f64>,
    /// Real part.
    pub n: Vec<f64>,
    /// Imaginary part, ≥ 0.
    pub k: Vec<f64>,
    /// The gap of the sample at the table's temperature, eV; `None` where no edge is to move.
    pub gap_ev: Option<f64>,
    /// Whether the edge that moves is the direct one (Γ) even where it is not the lowest.
    pub edge_is_direct: bool,
}

/// Above the gap `absorbs` of the light that reaches it, below nothing.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct IdealEdge {
    /// eV.
    pub gap_ev: f64,
    /// Share absorbed above the gap, 0..=1.
    pub absorbs: f64,
}

/// `α = a·√(E − E_g)` above, an Urbach tail below, joined with equal value and slope at
/// `E_g + E_U/2`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DirectEdge {
    /// eV.
    pub gap_ev: f64,
    /// `a`, 1/m/eV^0.5.
    pub coefficient_per_m: f64,
    /// `E_U`, eV; 0 for a sharp edge.
    pub urbach_ev: f64,
    /// Refractive index, if one was given.
    pub index: Option<f64>,
}

impl DirectEdge {
    /// Absorption coefficient in 1/m at a photon energy in eV. Below `E_g + E_U/2` the tail
    /// `a·√(E_U/2)·exp((E − E_g)/E_U − 1/2)` has the value and the slope of the law it meets.
    pub fn absorption(&self, energy_ev: f64) -> f64 {
        let above = energy_ev - self.gap_ev;
        let joint = self.urbach_ev / 2.0;
        if above > joint {
            return self.coefficient_per_m * above.sqrt();
        }
        if self.urbach_ev <= 0.0 {
            return 0.0;
        }
        self.coefficient_per_m * joint.sqrt() * ((above - joint) / self.urbach_ev).exp()
    }
}

impl IndexTable {
    /// `(n, k)` at a vacuum wavelength in m with the edge moved up by `shift_ev`: the value of the
    /// table at the photon energy less the shift.
    ///
    /// `n` is linear in wavelength. `k` is linear in wavelength above the table's own gap; between
    /// two points at or below the gap that are both positive, `ln k` is linear in photon energy.
    /// Beyond the ends the end value is held.
    pub fn at(&self, wavelength_m: f64, shift_ev: f64) -> (f64, f64) {
        let own = self.own_wavelength(wavelength_m, shift_ev);
        self.before(own, self.wavelength_m.partition_point(|&point| point <= own))
    }

    /// `(n, k)` at a wavelength of the table, `above` being the first point beyond it.
    fn before(&self, own: f64, above: usize) -> (f64, f64) {
        let grid = &self.wavelength_m;
        let last = grid.len() - 1;
        if above == 0 {
            return (self.n[0], self.k[0]);
        }
        if above > last {
            return (self.n[last], self.k[last]);
        }
        let (left, right) = (above - 1, above);
        let share = (own - grid[left]) / (grid[right] - grid[left]);
        let n = self.n[left] + share * (self.n[right] - self.n[left]);
        let (k0, k1) = (self.k[left], self.k[right]);
        let below_gap = self.gap_ev.is_some_and(|gap| photon_ev(grid[left]) <= gap);
        if below_gap && k0 > 0.0 && k1 > 0.0 {
            let energy = |wavelength: f64| 1.0 / wavelength;
            let along = (energy(grid[left]) - energy(own)) / (energy(grid[left]) - energy(grid[right]));
            return (n, k0 * (k1 / k0).powf(along));
        }
        (n, k0 + share * (k1 - k0))
    }

    /// [`IndexTable::at`] at many wavelengths, the same to the bit: `n`, then `k`. Fastest where
    /// neighbours lie close to each other: each search starts where the last one ended.
    pub fn along(&self, wavelength_m: &[f64], shift_ev: f64) -> (Vec<f64>, Vec<f64>) {
        let grid = &self.wavelength_m;
        let mut above = 0;
        wavelength_m
            .iter()
            .map(|&wavelength| {
                let own = self.own_wavelength(wavelength, shift_ev);
                while above < grid.len() && grid[above] <= own {
                    above += 1;
                }
                while above > 0 && grid[above - 1] > own {
                    above -= 1;
                }
                self.before(own, above)
            })
            .unzip()
    }

    /// Drops the points outside `low..=high` m, unless none would be left.
    pub fn clip(&mut self, low: f64, high: f64) {
        let inside = |wavelength: &f64| (low * (1.0 - 1e-9)..=high * (1.0 + 1e-9)).contains(wavelength);
        let from = self.wavelength_m.iter().position(inside);
        let to = self.wavelength_m.iter().rposition(inside);
        let (Some(from), Some(to)) = (from, to) else { return };
        for column in [&mut self.wavelength_m, &mut self.n, &mut self.k] {
            column.truncate(to + 1);
            column.drain(..from);
        }
    }

    /// The wavelength in the table that answers for `wavelength_m` with the edge moved.
    fn own_wavelength(&self, wavelength_m: f64, shift_ev: f64) -> f64 {
        if shift_ev == 0.0 {
            return wavelength_m;
        }
        let energy = photon_ev(wavelength_m) - shift_ev;
        if energy > 0.0 { EV_M / energy } else { f64::INFINITY }
    }

    /// Where the points of the table stand once the edge is moved, m, ascending. Points whose
    /// photon energy would fall to 0 or below are left out.
    pub fn wavelengths(&self, shift_ev: f64) -> Vec<f64> {
        if shift_ev == 0.0 {
            return self.wavelength_m.clone();
        }
        let moved = self.wavelength_m.iter().map(|&own| photon_ev(own) + shift_ev);
        moved.filter(|&energy| energy > 0.0).map(|energy| EV_M / energy).collect()
    }
}

impl Optics {
    /// Absorption coefficient `4πk/λ`, 1/m, at a vacuum wavelength in m, with the edge moved up by
    /// `shift_ev`. 0 for [`Optics::None`] and [`Optics::Ideal`].
    pub fn absorption(&self, wavelength_m: f64, shift_ev: f64) -> f64 {
        match self {
            Self::None | Self::Ideal(_) => 0.0,
            Self::Table(table) => {
                4.0 * std::f64::consts::PI * table.at(wavelength_m, shift_ev).1 / wavelength_m
            }
            Self::Direct(edge) => edge.absorption(photon_ev(wavelength_m) - shift_ev),
        }
    }

    /// [`Optics::absorption`] at many wavelengths, 1/m, the same to the bit.
    pub fn absorption_along(&self, wavelength_m: &[f64], shift_ev: f64) -> Vec<f64> {
        match self {
            Self::Table(table) => {
                let (_, k) = table.along(wavelength_m, shift_ev);
                let each = k.iter().zip(wavelength_m);
                each.map(|(k, wavelength)| 4.0 * std::f64::consts::PI * k / wavelength).collect()
            }
            _ => wavelength_m.iter().map(|&wavelength| self.absorption(wavelength, shift_ev)).collect(),
        }
    }

    /// `(n, k)` with the edge moved up by `shift_ev`; `None` without data.
    pub fn index(&self, wavelength_m: f64, shift_ev: f64) -> Option<(f64, f64)> {
        match self {
            Self::None | Self::Ideal(_) => None,
            Self::Table(table) => Some(table.at(wavelength_m, shift_ev)),
            Self::Direct(edge) => {
                let alpha = edge.absorption(photon_ev(wavelength_m) - shift_ev);
                edge.index.map(|n| (n, alpha * wavelength_m / (4.0 * std::f64::consts::PI)))
            }
        }
    }

    /// [`Optics::index`] at many wavelengths, the same to the bit: `n`, then `k`; `None` without
    /// data.
    pub fn index_along(&self, wavelength_m: &[f64], shift_ev: f64) -> Option<(Vec<f64>, Vec<f64>)> {
        match self {
            Self::Table(table) => Some(table.along(wavelength_m, shift_ev)),
            _ => wavelength_m.iter().map(|&wavelength| self.index(wavelength, shift_ev)).collect(),
        }
    }

    /// The share of the light reaching it that an [`Optics::Ideal`] absorbs: its stated share at
    /// and above the gap, 0 below; `None` for everything else.
    pub fn share_absorbed(&self, wavelength_m: f64, shift_ev: f64) -> Option<f64> {
        match self {
            Self::Ideal(edge) => {
                let above = photon_ev(wavelength_m) - shift_ev >= edge.gap_ev;
                Some(if above { edge.absorbs } else { 0.0 })
            }
            _ => None,
        }
    }

    /// First and last wavelength there is data for, m, with the edge moved; `None` where there is
    /// no table (the models hold everywhere).
    pub fn range(&self, shift_ev: f64) -> Option<(f64, f64)> {
        let points = self.wavelengths(shift_ev);
        match self {
            Self::Table(_) => Some((*points.first()?, *points.last()?)),
            _ => None,
        }
    }

    /// Wavelengths in m at which the data bends, ascending: the points of a table with the edge
    /// moved, the edge of a model. An evaluation grid takes the union of them.
    pub fn wavelengths(&self, shift_ev: f64) -> Vec<f64> {
        match self {
            Self::None => Vec::new(),
            Self::Table(table) => table.wavelengths(shift_ev),
            Self::Ideal(edge) => vec![EV_M / (edge.gap_ev + shift_ev)],
            Self::Direct(edge) => {
                // The tail over five decades and the root's steep start.
                let steps = [2.0, 1.0, 0.5, 0.2, 0.1, 0.05, 0.02, 0.01, 0.005, 0.002];
                let above = steps.iter().map(|&step| edge.gap_ev + edge.urbach_ev / 2.0 + step);
                let below = (0..=24).map(|step| edge.gap_ev + edge.urbach_ev * (0.5 - 0.5 * f64::from(step)));
                let energies = above.chain(below.take(if edge.urbach_ev > 0.0 { 25 } else { 1 }));
                energies
                    .map(|energy| energy + shift_ev)
                    .filter(|&energy| energy > 0.0)
                    .map(|energy| EV_M / energy)
                    .collect()
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn table() -> IndexTable {
        IndexTable {
            wavelength_m: vec![400e-9, 600e-9, 800e-9, 900e-9, 1000e-9],
            n: vec![4.0, 3.8, 3.6, 3.5, 3.4],
            k: vec![0.4, 0.2, 1e-2, 1e-4, 0.0],
            gap_ev: Some(photon_ev(800e-9)),
            edge_is_direct: true,
        }
    }

    #[test]
    fn interpolation_follows_its_conventions() {
        let table = table();
        assert_eq!(table.at(500e-9, 0.0), (3.9, 0.30000000000000004));
        // Halfway in energy between 800 and 900 nm, ln k is the mean of its ends.
        let halfway = 2.0 / (1.0 / 800e-9 + 1.0 / 900e-9);
        assert!((table.at(halfway, 0.0).1 / 1e-3 - 1.0).abs() < 1e-9);
        // One end is 0: linear in wavelength.
        assert!((table.at(950e-9, 0.0).1 - 0.5e-4).abs() < 1e-12);
        assert_eq!(table.at(100e-9, 0.0), (4.0, 0.4));
        assert_eq!(table.at(3e-6, 0.0), (3.4, 0.0));
    }

    #[test]
    fn the_edge_moves_by_exactly_the_shift() {
        let table = table();
        for energy in [1.3, 1.5, 1.9, 2.6] {
            for shift in [-0.05, 0.03, 0.2] {
                let (n, k) = table.at(EV_M / energy, 0.0);
                let (moved_n, moved_k) = table.at(EV_M / (energy + shift), shift);
                assert!((n - moved_n).abs() < 1e-12 && (k - moved_k).abs() < 1e-12, "{energy} {shift}");
            }
        }
        let moved = table.wavelengths(0.1);
        assert!((photon_ev(moved[2]) - photon_ev(800e-9) - 0.1).abs() < 1e-12);
        assert!(moved.windows(2).all(|pair| pair[0] < pair[1]));
    }

    #[test]
    fn a_direct_edge_joins_its_tail_with_value_and_slope() {
        let edge = DirectEdge { gap_ev: 1.4, coefficient_per_m: 3e6, urbach_ev: 0.01, index: None };
        let (joint, step) = (1.405, 1e-7);
        let slope = |from: f64| (edge.absorption(from + step) - edge.absorption(from)) / step;
        assert!((edge.absorption(joint - 1e-9) / edge.absorption(joint + 1e-9) - 1.0).abs() < 1e-6);
        assert!((slope(joint - 2.0 * step) / slope(joint + step) - 1.0).abs() < 1e-3);
        // One Urbach energy is a factor e.
        let ratio = edge.absorption(1.38) / edge.absorption(1.37);
        assert!((ratio - std::f64::consts::E).abs() < 1e-9);
        let sharp = DirectEdge { urbach_ev: 0.0, ..edge };
        assert_eq!(sharp.absorption(1.3999), 0.0);
        assert!(Optics::Direct(edge).wavelengths(0.0).windows(2).all(|pair| pair[0] < pair[1]));
    }

    #[test]
    fn an_ideal_edge_absorbs_its_share_above_the_gap_only() {
        let ideal = Optics::Ideal(IdealEdge { gap_ev: 1.42, absorbs: 0.9 });
        assert_eq!(ideal.share_absorbed(EV_M / 1.43, 0.0), Some(0.9));
        assert_eq!(ideal.share_absorbed(EV_M / 1.41, 0.0), Some(0.0));
        assert_eq!(ideal.absorption(400e-9, 0.0), 0.0);
        assert_eq!(ideal.index(400e-9, 0.0), None);
    }
}
