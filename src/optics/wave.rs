//! Light as plane waves in a stack of layers: reflected, transmitted, and absorbed in each layer.
//!
//! Coherent films and layers too thick for interference stand in any order between a front medium
//! that does not absorb and a rear medium that may (a metal: what enters it is what it absorbs).
//! Index `n + ik`, `k ≥ 0`. Fluxes are shares of what falls on the front; light of mixed
//! polarisation is the mean of s and p. At every wavelength reflected, transmitted and absorbed
//! sum to 1.
//!
//! Sources: Macleod, Thin-Film Optical Filters (2010), for the admittances; Katsidis and Siapkas,
//! Appl. Opt. 41, 3978 (2002), for layers without interference.

#![expect(clippy::needless_range_loop, reason = "a lane is the same place in many arrays at once")]

use std::ops::Range;
use std::sync::Arc;

mod block;
mod change;
mod films;
mod growing;
mod lanes;
pub mod one_changed;
pub mod profile;
pub mod slopes;
mod thick;

use block::Block;
pub use lanes::LANES;
use lanes::Lane;

/// A complex index by wavelength, in blocks of [`LANES`].
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Index {
    n: Vec<Lane>,
    k: Vec<Lane>,
}

impl Index {
    /// `n` and `k` at the wavelengths of a stack, same order. Values no index can have are held at
    /// what is nearest: `n` above 1e-6, `k` not below 0.
    pub fn new(n: &[f64], k: &[f64]) -> Self {
        let held = |values: &[f64], least: f64| -> Vec<f64> {
            values.iter().map(|value| if *value > least { *value } else { least }).collect()
        };
        Self { n: blocks(&held(n, 1e-6)), k: blocks(&held(k, 0.0)) }
    }

    /// The same index at all of `count` wavelengths.
    pub fn constant(n: f64, k: f64, count: usize) -> Self {
        Self::new(&vec![n; count], &vec![k; count])
    }
}

/// Values in blocks, the last one filled with its last value.
fn blocks(values: &[f64]) -> Vec<Lane> {
    let block = |part: &[f64]| std::array::from_fn(|l| part[l.min(part.len() - 1)]);
    values.chunks(LANES).map(block).collect()
}

/// One layer.
#[derive(Clone, Debug, PartialEq)]
pub struct Sheet {
    /// At the wavelengths of the stack.
    pub index: Arc<Index>,
    /// m, ≥ 0.
    pub thickness_m: f64,
    /// Whether waves add in it; otherwise only fluxes do.
    pub coherent: bool,
}

/// Which way the electric field points against the plane of incidence.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Polarization {
    /// Across it.
    S,
    /// In it.
    P,
}

/// How the fields are worked out.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub enum Kernel {
    /// With the widest registers the machine has.
    #[default]
    Widest,
    /// With those of AVX2 at most; the same bits, to be measured and compared.
    Avx2,
    /// With those every machine has; the same bits.
    Baseline,
    /// Products and sums in one rounding: faster, and other last digits from machine to machine.
    /// For searches, never for a number that is shown.
    Fused,
}

impl Kernel {
    /// [`Kernel::Fused`] where the machine has the instruction, else [`Kernel::Widest`].
    pub fn fused() -> Self {
        #[cfg(target_arch = "x86_64")]
        let has = std::arch::is_x86_feature_detected!("fma") && std::arch::is_x86_feature_detected!("avx2");
        #[cfg(not(target_arch = "x86_64"))]
        let has = cfg!(target_arch = "aarch64");
        if has { Self::Fused } else { Self::Widest }
    }
}

/// A stack at a set of wavelengths and one angle.
#[derive(Clone, Debug)]
pub struct Stack {
    wavelength_m: Vec<f64>,
    /// `2π/λ`, 1/m.
    k0: Vec<Lane>,
    front_n: Vec<Lane>,
    /// `n sin θ`, the same in every medium; empty at normal incidence.
    along: Vec<Lane>,
    sheets: Vec<Sheet>,
    rear: Arc<Index>,
    /// Sheets of each run of films; between two runs stands one thick sheet.
    runs: Vec<Range<usize>>,
    kernel: Kernel,
}

/// Shares of the flux that falls on the front, by wavelength.
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Shares {
    /// Goes back out of the front.
    pub reflected: Vec<f64>,
    /// Enters the rear medium.
    pub transmitted: Vec<f64>,
    /// Absorbed, `[sheet][wavelength]`.
    pub absorbed: Vec<Vec<f64>>,
}

impl Stack {
    /// `sheets` from the front, light from a medium of index `front_n` at `incidence_rad` from the
    /// normal, 0 to π/2; vacuum wavelengths in m.
    pub fn new(
        wavelength_m: &[f64],
        (front_n, incidence_rad): (f64, f64),
        sheets: Vec<Sheet>,
        rear: Arc<Index>,
    ) -> Self {
        let count = wavelength_m.len();
        let along =
            if incidence_rad == 0.0 { Vec::new() } else { vec![front_n * incidence_rad.sin(); count] };
        Self::from_medium(wavelength_m, (&vec![front_n; count], &along), sheets, rear)
    }

    /// The same from a medium whose index `front_n` (> 0) changes with the wavelength, along the
    /// layers by `along = n sin θ`, 0 to `front_n`, at each; no `along` at all is normal incidence.
    pub fn from_medium(
        wavelength_m: &[f64],
        (front_n, along): (&[f64], &[f64]),
        sheets: Vec<Sheet>,
        rear: Arc<Index>,
    ) -> Self {
        let k0: Vec<f64> = wavelength_m.iter().map(|wavelength| std::f64::consts::TAU / wavelength).collect();
        let mut runs = Vec::new();
        let mut start = 0;
        for (at, _) in sheets.iter().enumerate().filter(|(_, sheet)| !sheet.coherent) {
            runs.push(start..at);
            start = at + 1;
        }
        runs.push(start..sheets.len());
        Self {
            wavelength_m: wavelength_m.to_vec(),
            k0: blocks(&k0),
            front_n: blocks(front_n),
            along: blocks(along),
            sheets,
            rear,
            runs,
            kernel: Kernel::Widest,
        }
    }

    /// The same stack worked out by `kernel`.
    pub fn with_kernel(self, kernel: Kernel) -> Self {
        Self { kernel, ..self }
    }

    /// m, as given.
    pub fn wavelength_m(&self) -> &[f64] {
        &self.wavelength_m
    }

    /// Whether the two polarisations differ.
    fn is_oblique(&self) -> bool {
        !self.along.is_empty()
    }

    /// From the front, as given.
    pub fn sheets(&self) -> &[Sheet] {
        &self.sheets
    }

    /// Light of no preferred polarisation: the mean of s and p.
    pub fn solve(&self) -> Shares {
        let mut shares = self.solve_polarized(Polarization::S);
        if self.is_oblique() {
            shares.add(&self.solve_polarized(Polarization::P));
            shares.halve();
        }
        shares
    }

    /// Light of one polarisation.
    pub fn solve_polarized(&self, polarization: Polarization) -> Shares {
        let mut shares = self.empty_shares();
        self.each_block((polarization, false), |block, part| shares.take(block, part));
        shares
    }

    fn empty_shares(&self) -> Shares {
        let count = self.wavelength_m.len();
        Shares {
            reflected: vec![0.0; count],
            transmitted: vec![0.0; count],
            absorbed: vec![vec![0.0; count]; self.sheets.len()],
        }
    }

    /// Calls `visit` with each solved block and the wavelengths it stands for, in order; fields are
    /// there where `keep`.
    fn each_block(
        &self,
        (polarization, keep): (Polarization, bool),
        mut visit: impl FnMut(&Block, Range<usize>),
    ) {
        let mut block = Block::default();
        for at in 0..self.k0.len() {
            block.solve(self, (polarization, keep), at);
            visit(&block, at * LANES..self.wavelength_m.len().min((at + 1) * LANES));
        }
    }
}

impl Shares {
    fn take(&mut self, block: &Block, part: Range<usize>) {
        let lanes = part.len();
        self.reflected[part.clone()].copy_from_slice(&block.reflected()[..lanes]);
        self.transmitted[part.clone()].copy_from_slice(&block.transmitted()[..lanes]);
        for (row, absorbed) in self.absorbed.iter_mut().zip(block.absorbed()) {
            row[part.clone()].copy_from_slice(&absorbed[..lanes]);
        }
    }

    fn add(&mut self, other: &Self) {
        let add = |sum: &mut Vec<f64>, part: &[f64]| {
            sum.iter_mut().zip(part).for_each(|(sum, part)| *sum += part);
        };
        add(&mut self.reflected, &other.reflected);
        add(&mut self.transmitted, &other.transmitted);
        self.absorbed.iter_mut().zip(&other.absorbed).for_each(|(sum, part)| add(sum, part));
    }

    fn halve(&mut self) {
        let rows = [&mut self.reflected, &mut self.transmitted].into_iter().chain(&mut self.absorbed);
        rows.flatten().for_each(|value| *value *= 0.5);
    }
}
