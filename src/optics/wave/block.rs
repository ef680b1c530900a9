//! One block of wavelengths under one polarisation: every run of films, and the light between.

use crate::optics::wave::films::{Faces, Fields, Film, Medium, Run, solve, tilt};
use crate::optics::wave::lanes::{LANES, Lane, Pair, decay_all};
use crate::optics::wave::thick::Between;
use crate::optics::wave::{Index, Polarization, Stack};

/// Where less than this of the flux gets through a thick layer and back, what the run above would do
/// with it is not worked out: it is below the last digit of 1.
const NOTHING_RETURNS: f64 = 1e-17;

/// Share a thick sheet lets through once.
pub(super) fn pass_through(decay_per_m: &Lane, thickness_m: f64, pass: &mut Lane) {
    decay_all::<false>(|l| decay_per_m[l] * thickness_m, pass);
}

/// What one block leaves.
#[derive(Clone, Debug, Default)]
pub(super) struct Block {
    /// `q` and `Y` of front, sheets and rear; empty at normal incidence, where both are the index.
    tilted: Vec<[[Lane; 2]; 2]>,
    front: [Lane; 2],
    polarization: Option<Polarization>,
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
    (stack, polarization): (&'a Stack, Polarization),
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
    let y = |[q, y]: &'a [[Lane; 2]; 2]| of(if polarization == Polarization::S { q } else { y });
    tilted.iter().map(|pair| Medium { y: y(pair), q: of(&pair[0]) }).collect()
}

impl Block {
    /// Solves the block `at` of `stack`.
    pub(super) fn solve(&mut self, stack: &Stack, (polarization, keep): (Polarization, bool), at: usize) {
        self.front = [stack.front_n[at], [0.0; LANES]];
        let mut tilted = std::mem::take(&mut self.tilted);
        fill_tilted(stack, (at, &self.front), &mut tilted);
        let front = self.front;
        let media = media((stack, polarization), at, &front, &tilted);
        self.polarization = Some(polarization);
        self.solve_runs((stack, keep), &stack.k0[at], &media);
        self.tilted = tilted;
        self.gather(stack);
    }

    fn solve_runs(&mut self, (stack, keep): (&Stack, bool), k0: &Lane, media: &[Medium<'_>]) {
        let count = stack.runs.len();
        self.fronts.resize(count, Faces::default());
        self.front_fields.resize(count, Fields::default());
        self.rears.resize(count, Faces::default());
        self.rear_fields.resize(count, Fields::default());
        self.lit_from_rear.clear();
        self.lit_from_rear.resize(count, false);
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
            let own = Run { front, films: &films, rear, k0 };
            solve(own, (&mut self.front_fields[at], &mut self.fronts[at]), (stack.kernel, keep));
            if at + 1 == count {
                continue;
            }
            self.rears[at] = Faces::default();
            let thick = film(sheets.end);
            for l in 0..LANES {
                self.thick_decay[at][l] = 2.0 * k0[l] * thick.medium.q.im[l];
            }
            pass_through(&self.thick_decay[at], thick.thickness_m, &mut self.pass[at]);
            if self.pass[at].iter().any(|pass| pass * pass > NOTHING_RETURNS) {
                films.reverse();
                let run = Run { front: rear, films: &films, rear: front, k0 };
                solve(run, (&mut self.rear_fields[at], &mut self.rears[at]), (stack.kernel, keep));
                self.lit_from_rear[at] = true;
            }
        }
        self.between.fill((&self.fronts, &self.rears), &self.pass);
    }

    /// Shares absorbed: fluxes at the faces of each sheet, less each other.
    fn gather(&mut self, stack: &Stack) {
        if stack.runs.len() == 1 {
            return;
        }
        self.absorbed.resize(stack.sheets.len(), [0.0; LANES]);
        for (at, sheets) in stack.runs.iter().enumerate() {
            let (down, up) = (&self.between.down[at], &self.between.up[at]);
            for (film, sheet) in sheets.clone().enumerate() {
                let row = &mut self.absorbed[sheet];
                let fields = &self.front_fields[at];
                for l in 0..LANES {
                    row[l] = down[l] * fields.absorbed[film][l];
                }
                if self.lit_from_rear[at] {
                    let (fields, mirrored) = (&self.rear_fields[at], sheets.len() - 1 - film);
                    for l in 0..LANES {
                        row[l] += up[l] * fields.absorbed[mirrored][l];
                    }
                }
            }
            if at + 1 < stack.runs.len() {
                self.absorbed[sheets.end] = self.between.absorbed((&self.fronts, &self.rears), at);
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

    /// Of each sheet.
    pub(super) fn absorbed(&self) -> &[Lane] {
        match self.front_fields.as_slice() {
            [only] => &only.absorbed,
            _ => &self.absorbed,
        }
    }

    /// Front (0), sheets (1…) and rear as they were solved.
    pub(super) fn media<'a>(&'a self, stack: &'a Stack, at: usize) -> Vec<Medium<'a>> {
        media((stack, self.polarization.unwrap_or(Polarization::S)), at, &self.front, &self.tilted)
    }
}

/// `q` and `Y` of every medium of a block away from normal incidence.
fn fill_tilted(stack: &Stack, (at, front): (usize, &[Lane; 2]), tilted: &mut Vec<[[Lane; 2]; 2]>) {
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
    }
}
