//! How the light between the runs, and each share with it, answers to the thickness of one sheet.

use crate::optics::wave::Stack;
use crate::optics::wave::block::Block;
use crate::optics::wave::growing::Growing;
use crate::optics::wave::lanes::{LANES, Lane};

/// What a change of one sheet does to the light between the runs.
pub(super) struct Change {
    /// The sheet's own run, or the run above a thick sheet.
    pub(super) run: usize,
    /// Its film in that run; `None` for the thick sheet below the run.
    pub(super) film: Option<usize>,
    pub(super) reflectance: Lane,
    pub(super) down: Vec<Lane>,
    pub(super) up: Vec<Lane>,
}

/// A solved block with the effect of every film in its own run.
pub(super) struct Sides<'a> {
    pub(super) stack: &'a Stack,
    pub(super) block: &'a Block,
    pub(super) fronts: &'a [Growing],
    pub(super) rears: &'a [Growing],
}

impl Sides<'_> {
    /// The run, where there is no thick sheet and so no light between runs.
    pub(super) fn only_run(&self) -> Option<&Growing> {
        self.fronts.first().filter(|_| self.stack.runs.len() == 1)
    }

    /// `dT` where there is but one run.
    pub(super) fn transmitted_by_only(&self, film: usize) -> Lane {
        let (below, face) = (&self.fronts[0].below[film], &self.block.fronts[0]);
        std::array::from_fn(|l| below[l] * face.transmitted[l])
    }

    /// How the light between the runs answers to the thickness of `by`.
    pub(super) fn change(&self, by: usize) -> Change {
        let (stack, block, between) = (self.stack, self.block, &self.block.between);
        let count = stack.runs.len();
        let run = stack.runs.iter().filter(|run| run.end < by).count();
        let film = stack.sheets[by].coherent.then(|| by - stack.runs[run].start);
        let mut change = Change {
            run,
            film,
            reflectance: [0.0; LANES],
            down: vec![[0.0; LANES]; count],
            up: vec![[0.0; LANES]; count],
        };
        // Share let through by the thick sheet, if it is the one.
        let passes = |l: usize| match film {
            None => -self.thick_decay(by, l) * block.pass[run][l],
            Some(_) => 0.0,
        };
        let (mut below, mut echoes) = (vec![0.0; count + 1], vec![0.0; count]);
        for l in 0..LANES {
            // Of what lies below each run, and of each echo, from the run itself up.
            below.fill(0.0);
            echoes.fill(0.0);
            for r in (0..=run).rev() {
                let (front, rear, echo) = (&block.fronts[r], &block.rears[r], between.echo[r][l]);
                let (mut g, mut dg) = (0.0, 0.0);
                if r + 1 < count {
                    let (pass, lower) = (block.pass[r][l], between.reflectance[r + 1][l]);
                    g = pass * pass * lower;
                    dg = pass * pass * below[r + 1];
                    if r == run {
                        dg += 2.0 * pass * passes(l) * lower;
                    }
                }
                let through = front.transmitted[l] * rear.transmitted[l];
                let (mut own, mut d_rear) = (0.0, 0.0);
                if r == run && film.is_some() {
                    d_rear = self.reflected_rear(&change, r, l);
                    own = self.reflected_front(&change, r, l)
                        + g * echo
                            * (self.transmitted_front(&change, r, l) * rear.transmitted[l]
                                + front.transmitted[l] * self.transmitted_rear(&change, r, l));
                }
                echoes[r] = echo * echo * (rear.reflected[l] * dg + d_rear * g);
                below[r] = own + through * (dg * echo + g * echoes[r]);
            }
            change.reflectance[l] = below[0];
            let mut down = 0.0;
            for r in 0..count - 1 {
                let (front, echo, pass) = (&block.fronts[r], between.echo[r][l], block.pass[r][l]);
                let lit = between.down[r][l];
                let enters = lit * front.transmitted[l] * echo;
                let d_enters = down * front.transmitted[l] * echo
                    + lit * (self.transmitted_front(&change, r, l) * echo + front.transmitted[l] * echoes[r]);
                let lower = between.reflectance[r + 1][l];
                let d_pass = if r == run { passes(l) } else { 0.0 };
                change.up[r][l] = d_enters * pass * pass * lower
                    + enters * (2.0 * pass * d_pass * lower + pass * pass * below[r + 1]);
                down = d_enters * pass + enters * d_pass;
                change.down[r + 1][l] = down;
            }
        }
        change
    }

    /// `α` of a thick sheet, 1/m: its pass is `exp(−αd)`.
    fn thick_decay(&self, sheet: usize, l: usize) -> f64 {
        let run = self.stack.runs.iter().filter(|run| run.end < sheet).count();
        self.block.thick_decay[run][l]
    }

    fn reflected_front(&self, change: &Change, run: usize, l: usize) -> f64 {
        own_film(change, run).map_or(0.0, |film| self.fronts[run].reflected[film][l])
    }

    fn transmitted_front(&self, change: &Change, run: usize, l: usize) -> f64 {
        let flux = |film: usize| self.fronts[run].below[film][l] * self.block.fronts[run].transmitted[l];
        own_film(change, run).map_or(0.0, flux)
    }

    fn entering_front(&self, change: &Change, run: usize, l: usize) -> f64 {
        own_film(change, run).map_or(0.0, |film| self.fronts[run].entering(film, l))
    }

    /// The film counted from the rear, where light comes from there.
    fn mirrored(&self, change: &Change, run: usize) -> Option<usize> {
        let films = self.stack.runs[run].len();
        own_film(change, run).filter(|_| self.block.lit_from_rear[run]).map(|film| films - 1 - film)
    }

    fn reflected_rear(&self, change: &Change, run: usize, l: usize) -> f64 {
        self.mirrored(change, run).map_or(0.0, |film| self.rears[run].reflected[film][l])
    }

    fn transmitted_rear(&self, change: &Change, run: usize, l: usize) -> f64 {
        let flux = |film: usize| self.rears[run].below[film][l] * self.block.rears[run].transmitted[l];
        self.mirrored(change, run).map_or(0.0, flux)
    }

    fn entering_rear(&self, change: &Change, run: usize, l: usize) -> f64 {
        self.mirrored(change, run).map_or(0.0, |film| self.rears[run].entering(film, l))
    }

    pub(super) fn film(&self, change: &Change, (run, of): (usize, usize)) -> Lane {
        let (block, between) = (self.block, &self.block.between);
        let mut row = [0.0; LANES];
        let own = own_film(change, run);
        if let Some(film) = own {
            let slope = self.fronts[run].absorbed(&block.front_fields[run], of, film);
            for l in 0..LANES {
                row[l] = between.down[run][l] * slope[l];
            }
        }
        for l in 0..LANES {
            row[l] += change.down[run][l] * block.front_fields[run].absorbed[of][l];
        }
        if block.lit_from_rear[run] {
            let (fields, last) = (&block.rear_fields[run], self.stack.runs[run].len() - 1);
            for l in 0..LANES {
                row[l] += change.up[run][l] * fields.absorbed[last - of][l];
            }
            if let Some(film) = own {
                let slope = self.rears[run].absorbed(fields, last - of, last - film);
                for l in 0..LANES {
                    row[l] += between.up[run][l] * slope[l];
                }
            }
        }
        row
    }

    /// Adds the change of `Σ weight_i A_i` that comes with the light between the runs: what the
    /// films of each absorb of it, and the thick sheets.
    pub(super) fn add_between(&self, change: &Change, weights: &[f64], slope: &mut Lane) {
        let last = self.stack.runs.len() - 1;
        for (run, films) in self.stack.runs.iter().enumerate() {
            for (film, sheet) in films.clone().enumerate() {
                let mirrored = films.len() - 1 - film;
                for l in 0..LANES {
                    let mut row = change.down[run][l] * self.block.front_fields[run].absorbed[film][l];
                    if self.block.lit_from_rear[run] {
                        row += change.up[run][l] * self.block.rear_fields[run].absorbed[mirrored][l];
                    }
                    slope[l] += weights[sheet] * row;
                }
            }
            if run < last {
                let row = self.thick(change, run);
                for l in 0..LANES {
                    slope[l] += weights[films.end] * row[l];
                }
            }
        }
    }

    /// `dT` into the rear medium.
    pub(super) fn transmitted(&self, change: &Change) -> Lane {
        let last = self.stack.runs.len() - 1;
        std::array::from_fn(|l| {
            change.down[last][l] * self.block.fronts[last].transmitted[l]
                + self.block.between.down[last][l] * self.transmitted_front(change, last, l)
        })
    }

    /// The thick sheet below `run`.
    pub(super) fn thick(&self, change: &Change, run: usize) -> Lane {
        let (block, between, next) = (self.block, &self.block.between, run + 1);
        std::array::from_fn(|l| {
            let enters = change.down[run][l] * block.fronts[run].transmitted[l]
                + between.down[run][l] * self.transmitted_front(change, run, l)
                - change.up[run][l] * block.rears[run].entering[l]
                - between.up[run][l] * self.entering_rear(change, run, l);
            let leaves = change.down[next][l] * block.fronts[next].entering[l]
                + between.down[next][l] * self.entering_front(change, next, l)
                - change.up[next][l] * block.rears[next].transmitted[l]
                - between.up[next][l] * self.transmitted_rear(change, next, l);
            enters - leaves
        })
    }
}

pub(super) fn own_film(change: &Change, run: usize) -> Option<usize> {
    change.film.filter(|_| change.run == run)
}
