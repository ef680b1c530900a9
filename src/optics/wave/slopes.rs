//! Derivatives of every share, or of one merit, by every thickness.
//!
//! Both come from the fields of one evaluation and one pass more down every run. The whole table
//! of derivatives is as large as the square of the layers; the gradient of a merit is worked out
//! without it and costs about as much as one evaluation more.

use std::ops::Range;

use crate::optics::wave::block::Block;
use crate::optics::wave::change::Sides;
use crate::optics::wave::films::{Film, Medium, Run};
use crate::optics::wave::growing::{Growing, grow};
use crate::optics::wave::lanes::{LANES, Lane};
use crate::optics::wave::{Polarization, Shares, Stack};

/// Derivatives by thickness, 1/m.
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Slopes {
    sheets: usize,
    /// `[block][by]`
    reflected: Vec<Lane>,
    transmitted: Vec<Lane>,
    /// `[block][by][of]`
    absorbed: Vec<Lane>,
}

impl Slopes {
    /// `dR/dd` by the thickness of sheet `by` at wavelength number `at`.
    pub fn reflected(&self, by: usize, at: usize) -> f64 {
        self.reflected[at / LANES * self.sheets + by][at % LANES]
    }

    /// `dT/dd`.
    pub fn transmitted(&self, by: usize, at: usize) -> f64 {
        self.transmitted[at / LANES * self.sheets + by][at % LANES]
    }

    /// `dA/dd` of the sheet `of` by the thickness of `by`.
    pub fn absorbed(&self, of: usize, by: usize, at: usize) -> f64 {
        self.absorbed[(at / LANES * self.sheets + by) * self.sheets + of][at % LANES]
    }

    /// Adds the next block: every derivative by the thickness of every sheet.
    fn push(&mut self, sides: &Sides<'_>) {
        for by in 0..self.sheets {
            if let Some(growing) = sides.only_run() {
                let fields = &sides.block.front_fields[0];
                self.reflected.push(growing.reflected[by]);
                self.transmitted.push(sides.transmitted_by_only(by));
                self.absorbed.extend((0..self.sheets).map(|of| growing.absorbed(fields, of, by)));
                continue;
            }
            let change = sides.change(by);
            self.reflected.push(change.reflectance);
            self.transmitted.push(sides.transmitted(&change));
            for (run, films) in sides.stack.runs.iter().enumerate() {
                self.absorbed.extend((0..films.len()).map(|of| sides.film(&change, (run, of))));
                if run + 1 < sides.stack.runs.len() {
                    self.absorbed.push(sides.thick(&change, run));
                }
            }
        }
    }

    fn mean(&mut self, other: &Self) {
        let mean = |own: &mut Vec<Lane>, other: &[Lane]| {
            let both = own.as_flattened_mut().iter_mut().zip(other.as_flattened());
            both.for_each(|(own, other)| *own = 0.5 * (*own + other));
        };
        mean(&mut self.reflected, &other.reflected);
        mean(&mut self.transmitted, &other.transmitted);
        mean(&mut self.absorbed, &other.absorbed);
    }
}

/// A sum over wavelengths `Σ light (reflected R + transmitted T + Σ absorbed_i A_i)`, such as the
/// photocurrent of a junction.
#[derive(Clone, Debug, PartialEq)]
pub struct Merit {
    /// Weight of each wavelength.
    pub light: Vec<f64>,
    /// Weight of what is reflected.
    pub reflected: f64,
    /// Weight of what enters the rear.
    pub transmitted: f64,
    /// Weight of what each sheet absorbs.
    pub absorbed: Vec<f64>,
}

impl Stack {
    /// Shares and their derivatives, light of no preferred polarisation.
    pub fn solve_with_slopes(&self) -> (Shares, Slopes) {
        let (mut shares, mut slopes) = self.slopes_polarized(Polarization::S);
        if self.is_oblique() {
            let (other, other_slopes) = self.slopes_polarized(Polarization::P);
            shares.add(&other);
            shares.halve();
            slopes.mean(&other_slopes);
        }
        (shares, slopes)
    }

    /// The same for one polarisation.
    pub fn slopes_polarized(&self, polarization: Polarization) -> (Shares, Slopes) {
        let mut shares = self.empty_shares();
        let (sheets, blocks) = (self.sheets.len(), self.k0.len());
        let mut slopes = Slopes {
            sheets,
            reflected: Vec::with_capacity(sheets * blocks),
            transmitted: Vec::with_capacity(sheets * blocks),
            absorbed: Vec::with_capacity(sheets * sheets * blocks),
        };
        self.each_grown(polarization, &mut shares, |sides, _| slopes.push(sides));
        (shares, slopes)
    }

    /// Shares and the gradient of `merit` by every thickness, 1/m times its unit; light of no
    /// preferred polarisation.
    pub fn solve_with_gradient(&self, merit: &Merit) -> (Shares, Vec<f64>) {
        let (mut shares, mut gradient) = self.gradient_polarized(Polarization::S, merit);
        if self.is_oblique() {
            let (other, other_gradient) = self.gradient_polarized(Polarization::P, merit);
            shares.add(&other);
            shares.halve();
            let both = gradient.iter_mut().zip(&other_gradient);
            both.for_each(|(own, other)| *own = 0.5 * (*own + other));
        }
        (shares, gradient)
    }

    fn gradient_polarized(&self, polarization: Polarization, merit: &Merit) -> (Shares, Vec<f64>) {
        let mut shares = self.empty_shares();
        let mut gradient = vec![[0.0; LANES]; self.sheets.len()];
        let mut own: Vec<Lane> = Vec::new();
        self.each_grown(polarization, &mut shares, |sides, part| {
            // Lanes without a wavelength get no light.
            let mut light = [0.0; LANES];
            light[..part.len()].copy_from_slice(&merit.light[part]);
            let mut add = |by: usize, slope: &Lane| {
                let sum: &mut Lane = &mut gradient[by];
                for l in 0..LANES {
                    sum[l] += slope[l] * light[l];
                }
            };
            for (run, films) in self.runs.iter().enumerate() {
                let weights = &merit.absorbed[films.clone()];
                sides.fronts[run].contract(&sides.block.front_fields[run], weights, &mut own);
                for (own, by) in own.iter_mut().zip(films.clone()) {
                    for l in 0..LANES {
                        own[l] *= sides.block.between.down[run][l];
                    }
                    add(by, own);
                }
                if sides.block.lit_from_rear[run] {
                    let turned: Vec<f64> = weights.iter().rev().copied().collect();
                    sides.rears[run].contract(&sides.block.rear_fields[run], &turned, &mut own);
                    for (own, by) in own.iter_mut().zip(films.clone().rev()) {
                        for l in 0..LANES {
                            own[l] *= sides.block.between.up[run][l];
                        }
                        add(by, own);
                    }
                }
            }
            for by in 0..self.sheets.len() {
                if let Some(growing) = sides.only_run() {
                    let (reflected, transmitted) = (&growing.reflected[by], sides.transmitted_by_only(by));
                    add(
                        by,
                        &std::array::from_fn(|l| {
                            merit.reflected * reflected[l] + merit.transmitted * transmitted[l]
                        }),
                    );
                    continue;
                }
                let change = sides.change(by);
                let transmitted = sides.transmitted(&change);
                let mut slope: Lane = std::array::from_fn(|l| {
                    merit.reflected * change.reflectance[l] + merit.transmitted * transmitted[l]
                });
                sides.add_between(&change, &merit.absorbed, &mut slope);
                add(by, &slope);
            }
        });
        (shares, gradient.iter().map(|lanes| lanes.iter().sum()).collect())
    }

    /// Calls `visit` with each solved block and the effect of its films.
    fn each_grown(
        &self,
        polarization: Polarization,
        shares: &mut Shares,
        mut visit: impl FnMut(&Sides<'_>, Range<usize>),
    ) {
        let (mut fronts, mut rears) = (Vec::new(), Vec::new());
        self.each_block((polarization, true), |block, part| {
            shares.take(block, part.clone());
            self.grow_runs(block, part.start / LANES, (&mut fronts, &mut rears));
            visit(&Sides { stack: self, block, fronts: &fronts, rears: &rears }, part);
        });
    }

    fn grow_runs(&self, block: &Block, at: usize, sides: (&mut Vec<Growing>, &mut Vec<Growing>)) {
        let media: Vec<Medium<'_>> = block.media(self, at);
        let (fronts, rears) = sides;
        fronts.resize(self.runs.len(), Growing::default());
        rears.resize(self.runs.len(), Growing::default());
        for (index, sheets) in self.runs.iter().enumerate() {
            let film =
                |sheet: usize| Film { medium: media[sheet + 1], thickness_m: self.sheets[sheet].thickness_m };
            let mut films: Vec<Film<'_>> = sheets.clone().map(film).collect();
            let (front, rear) = (media[sheets.start], media[sheets.end + 1]);
            let k0 = &self.k0[at];
            grow(Run { front, films: &films, rear, k0 }, &block.front_fields[index], &mut fronts[index]);
            if block.lit_from_rear[index] {
                films.reverse();
                let run = Run { front: rear, films: &films, rear: front, k0 };
                grow(run, &block.rear_fields[index], &mut rears[index]);
            }
        }
    }
}
