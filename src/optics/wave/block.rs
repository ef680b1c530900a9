//! One block of wavelengths under one polarisation: every run of films, and the light between.

use crate::optics::wave::films::{Faces, Fields, Film, Medium, Run, solve, tilt};
use crate::optics::wave::lanes::{LANES, Lane, Pair, decay};
use crate::optics::wave::thick::{Between, added, returned};
use crate::optics::wave::{Index, Polarization, Stack};

/// Where less than this of the flux comes back through a thick layer, what the run above would do
/// with it is not worked out: it is below the last digit of 1.
const NOTHING_RETURNS: f64 = 1e-17;

/// What one block leaves.
#[derive(Clone, Debug, Default)]
pub(super) struct Block {
    /// `q` and `Y` of front, sheets and rear; empty at normal incidence, where both are the index.
    tilted: Vec<[[Lane; 2]; 2]>,
    front: [Lane; 2],
    /// Of each run, lit from its front.
    pub(super) fronts: Vec<Faces>,
    pub(super) front_fields: Vec<Fields>,
    /// Of each run, lit from its rear; films in reverse.
    pub(super) rears: Vec<Faces>,
    pub(super) rear_fields: Vec<Fields>,
    /// Whether the run was solved from its rear.
    pub(super) lit_from_rear: Vec<bool>,
    /// Share each thick sheet lets through once.
    pub(super) pass: Vec<Lane>,
    /// `α` of each thick sheet, 1/m.
    pub(super) thick_decay: Vec<Lane>,
    pub(super) between: Between,
    absorbed: Vec<Lane>,
}

fn pair(index: &Index, at: usize) -> Pair<'_> {
    Pair { re: &index.n[at], im: &index.k[at] }
}

/// Front (0), sheets (1…) and rear of the stack as media.
fn media<'a>(
    stack: &'a Stack,
    at: usize,
    front: &'a [Lane; 2],
    tilted: &'a [[[Lane; 2]; 2]],
) -> Vec<Medium<'a>> {
    if tilted.is_empty() {
        let plain = |y: Pair<'a>| Medium { y, q: y };
        let sheets = stack.sheets.iter().map(|sheet| plain(pair(&sheet.index, at)));
        let ends = (plain(Pair { re: &front[0], im: &front[1] }), plain(pair(&stack.rear, at)));
        return std::iter::once(ends.0).chain(sheets).chain([ends.1]).collect();
    }
    let of = |lanes: &'a [Lane; 2]| Pair { re: &lanes[0], im: &lanes[1] };
    tilted.iter().map(|[q, y]| Medium { y: of(y), q: of(q) }).collect()
}

impl Block {
    /// Solves the block `at` of `stack`.
    pub(super) fn solve(&mut self, stack: &Stack, polarization: Polarization, at: usize) {
        self.front = [stack.front_n[at], [0.0; LANES]];
        let mut tilted = std::mem::take(&mut self.tilted);
        fill_tilted(stack, polarization, (at, &self.front), &mut tilted);
        let front = self.front;
        let media = media(stack, at, &front, &tilted);
        self.solve_runs(stack, &stack.k0[at], &media);
        self.tilted = tilted;
        self.gather(stack);
    }

    fn solve_runs(&mut self, stack: &Stack, k0: &Lane, media: &[Medium<'_>]) {
        let count = stack.runs.len();
        self.fronts.resize(count, Faces::default());
        self.front_fields.resize(count, Fields::default());
        self.rears.resize(count, Faces::default());
        self.rear_fields.resize(count, Fields::default());
        self.lit_from_rear.clear();
        self.lit_from_rear.resize(count, false);
        self.between.reflectance.resize(count, [0.0; LANES]);
        self.between.echo.resize(count, [1.0; LANES]);
        self.pass.resize(count - 1, [0.0; LANES]);
        self.thick_decay.resize(count - 1, [0.0; LANES]);
        let film =
            |sheet: usize| Film { medium: media[sheet + 1], thickness_m: stack.sheets[sheet].thickness_m };
        let mut films: Vec<Film<'_>> = Vec::with_capacity(stack.sheets.len());
        for (at, sheets) in stack.runs.iter().enumerate().rev() {
            films.clear();
            films.extend(sheets.clone().map(film));
            // The media around a run are the sheets before and after it, counted with the front.
            let (front, rear) = (media[sheets.start], media[sheets.end + 1]);
            self.fronts[at] = solve(Run { front, films: &films, rear, k0 }, &mut self.front_fields[at]);
            self.between.echo[at] = [1.0; LANES];
            self.between.reflectance[at] = self.fronts[at].reflected;
            self.rears[at] = Faces::default();
            if at + 1 == count {
                continue;
            }
            let thick = film(sheets.end);
            for l in 0..LANES {
                self.thick_decay[at][l] = 2.0 * k0[l] * thick.medium.q.im[l];
                self.pass[at][l] = decay(self.thick_decay[at][l] * thick.thickness_m);
            }
            let back = returned(&self.pass[at], &self.between.reflectance[at + 1]);
            if back.iter().any(|back| *back > NOTHING_RETURNS) {
                films.reverse();
                let run = Run { front: rear, films: &films, rear: front, k0 };
                self.rears[at] = solve(run, &mut self.rear_fields[at]);
                self.lit_from_rear[at] = true;
                let (sum, echo) = added(&self.fronts[at], &self.rears[at], &back);
                (self.between.reflectance[at], self.between.echo[at]) = (sum, echo);
            }
        }
        self.between.descend(&self.fronts, &self.pass);
    }

    /// Shares absorbed: fluxes at the faces of each sheet, less each other.
    fn gather(&mut self, stack: &Stack) {
        self.absorbed.resize(stack.sheets.len(), [0.0; LANES]);
        for (at, sheets) in stack.runs.iter().enumerate() {
            let (down, up) = (&self.between.down[at], &self.between.up[at]);
            for (film, sheet) in sheets.clone().enumerate() {
                let row = &mut self.absorbed[sheet];
                let fields = &self.front_fields[at];
                for l in 0..LANES {
                    row[l] = down[l] * fields.absorbed(film, l);
                }
                if self.lit_from_rear[at] {
                    let (fields, mirrored) = (&self.rear_fields[at], sheets.len() - 1 - film);
                    for l in 0..LANES {
                        row[l] += up[l] * fields.absorbed(mirrored, l);
                    }
                }
            }
            if at + 1 < stack.runs.len() {
                let (next_down, next_up) = (&self.between.down[at + 1], &self.between.up[at + 1]);
                let (above, below) = (&self.fronts[at], &self.fronts[at + 1]);
                for l in 0..LANES {
                    let enters = down[l] * above.transmitted[l] - up[l] * self.rears[at].entering[l];
                    let leaves =
                        next_down[l] * below.entering[l] - next_up[l] * self.rears[at + 1].transmitted[l];
                    self.absorbed[sheets.end][l] = enters - leaves;
                }
            }
        }
    }

    pub(super) fn reflected(&self) -> &Lane {
        &self.between.reflectance[0]
    }

    pub(super) fn transmitted(&self) -> Lane {
        let last = self.fronts.len() - 1;
        let (down, face) = (&self.between.down[last], &self.fronts[last]);
        std::array::from_fn(|l| down[l] * face.transmitted[l])
    }

    pub(super) fn absorbed(&self) -> &[Lane] {
        &self.absorbed
    }

    /// Front (0), sheets (1…) and rear as they were solved.
    pub(super) fn media<'a>(&'a self, stack: &'a Stack, at: usize) -> Vec<Medium<'a>> {
        media(stack, at, &self.front, &self.tilted)
    }
}

/// `q` and `Y` of every medium of a block away from normal incidence.
fn fill_tilted(
    stack: &Stack,
    polarization: Polarization,
    (at, front): (usize, &[Lane; 2]),
    tilted: &mut Vec<[[Lane; 2]; 2]>,
) {
    let Some(along) = stack.along.get(at) else {
        tilted.clear();
        return;
    };
    tilted.resize(stack.sheets.len() + 2, [[[0.0; LANES]; 2]; 2]);
    let front = Pair { re: &front[0], im: &front[1] };
    let sheets = stack.sheets.iter().map(|sheet| pair(&sheet.index, at));
    let indices = std::iter::once(front).chain(sheets).chain([pair(&stack.rear, at)]);
    for ([q, y], index) in tilted.iter_mut().zip(indices) {
        tilt(index, along, q, y);
        if polarization == Polarization::S {
            *y = *q;
        }
    }
}
