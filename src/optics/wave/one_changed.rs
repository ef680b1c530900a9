//! One sheet changed, all else as it was: what is reflected, and what that sheet absorbs.
//!
//! Everything on top of a film is a linear function of the fields on top of it, and the fields
//! below it do not know its thickness: both are kept, and a change costs one film and two such
//! functions at each wavelength, however many sheets there are.

use crate::optics::wave::block::{Block, pass_through};
use crate::optics::wave::films::{Faces, Fields, Film, Medium, Run, is_scaled, turns};
use crate::optics::wave::lanes::{LANES, Lane, Pair};
use crate::optics::wave::thick::Between;
use crate::optics::wave::{Polarization, Stack};

/// A stack of which one sheet may take any thickness.
#[derive(Clone, Debug)]
pub struct OneChanged {
    wavelengths: usize,
    k0: Vec<Lane>,
    run: usize,
    /// One polarisation after the other, each by block.
    parts: Vec<Vec<Part>>,
}

/// One block under one polarisation.
#[derive(Clone, Debug)]
struct Part {
    /// `None` where the sheet is a thick one.
    front: Option<Around>,
    /// The film lit from the rear of its run, where light comes from there.
    rear: Option<Around>,
    /// Of every run where there are several.
    fronts: Vec<Faces>,
    rears: Vec<Faces>,
    pass: Vec<Lane>,
    /// `α` of the sheet where it is thick, 1/m.
    decay: Lane,
}

/// What stands around one film of a run lit from one side.
#[derive(Clone, Debug)]
struct Around {
    y: [Lane; 2],
    q: [Lane; 2],
    /// The incident wave on top of the run is `a·(E, H)`, the reflected one `b·(E, H)`, with the
    /// fields on top of the film before they are scaled.
    a: [[Lane; 2]; 2],
    b: [[Lane; 2]; 2],
    /// `E` and `H` below the film, and `Re(E H*)`.
    e: [Lane; 2],
    h: [Lane; 2],
    flux: Lane,
    /// Weight of the fields on top of the film times `|a|²`.
    top: Lane,
    /// Flux into the medium behind the run over the weight of the fields below the film.
    passes: Lane,
}

impl Stack {
    /// Everything but the thickness of `sheet`, worked out once.
    pub fn change_of(&self, sheet: usize) -> OneChanged {
        let both = [Polarization::S, Polarization::P];
        let count = if self.is_oblique() { 2 } else { 1 };
        let run = self.runs.iter().filter(|run| run.end < sheet).count();
        let parts = both[..count].iter().map(|&polarization| {
            let mut parts = Vec::with_capacity(self.k0.len());
            self.each_block((polarization, true), |block, part| {
                parts.push(self.part(block, part.start / LANES, (run, sheet)));
            });
            parts
        });
        OneChanged { wavelengths: self.wavelength_m.len(), k0: self.k0.clone(), run, parts: parts.collect() }
    }

    fn part(&self, block: &Block, at: usize, (run, sheet): (usize, usize)) -> Part {
        let media = block.media(self, at);
        let sheets = self.runs[run].clone();
        let coherent = self.sheets[sheet].coherent;
        let film =
            |sheet: usize| Film { medium: media[sheet + 1], thickness_m: self.sheets[sheet].thickness_m };
        let mut films: Vec<Film<'_>> = sheets.clone().map(film).collect();
        let (front, rear) = (media[sheets.start], media[sheets.end + 1]);
        let k0 = &self.k0[at];
        let mut around = [None, None];
        if coherent {
            let film = sheet - sheets.start;
            let run_front = Run { front, films: &films, rear, k0 };
            around[0] = Some(Around::new(run_front, &block.front_fields[run], film));
            if block.lit_from_rear[run] {
                films.reverse();
                let turned = Run { front: rear, films: &films, rear: front, k0 };
                around[1] = Some(Around::new(turned, &block.rear_fields[run], sheets.len() - 1 - film));
            }
        }
        let [front, rear] = around;
        let several = self.runs.len() > 1;
        Part {
            front,
            rear,
            fronts: if several { block.fronts.clone() } else { Vec::new() },
            rears: if several { block.rears.clone() } else { Vec::new() },
            pass: block.pass.clone(),
            decay: if coherent { [0.0; LANES] } else { block.thick_decay[run] },
        }
    }
}

impl OneChanged {
    /// Reflected and absorbed in the sheet, by wavelength, when it is `thickness_m` (≥ 0) thick;
    /// light of no preferred polarisation.
    pub fn solve(&self, thickness_m: f64) -> (Vec<f64>, Vec<f64>) {
        let mut sums = [vec![0.0; self.wavelengths], vec![0.0; self.wavelengths]];
        let share = 1.0 / self.parts.len() as f64;
        for parts in &self.parts {
            for (at, part) in parts.iter().enumerate() {
                let from = at * LANES;
                let to = self.wavelengths.min(from + LANES);
                let found = part.solve((&self.k0[at], thickness_m), self.run);
                for (sum, lanes) in sums.iter_mut().zip(&found) {
                    for (sum, value) in sum[from..to].iter_mut().zip(lanes) {
                        *sum += share * value;
                    }
                }
            }
        }
        let [reflected, absorbed] = sums;
        (reflected, absorbed)
    }
}

impl Part {
    /// Reflected and absorbed.
    fn solve(&self, (k0, thickness_m): (&Lane, f64), run: usize) -> [Lane; 2] {
        let mut own = [[0.0; LANES]; 3];
        if let Some(front) = &self.front {
            changed(front, (k0, thickness_m), &mut own);
        }
        if self.fronts.is_empty() {
            return [own[0], own[2]];
        }
        let (mut fronts, mut rears, mut pass) = (self.fronts.clone(), self.rears.clone(), self.pass.clone());
        if self.front.is_none() {
            pass_through(&self.decay, thickness_m, &mut pass[run]);
            let mut between = Between::default();
            between.fill((&fronts, &rears), &pass);
            return [between.reflectance[0], between.absorbed((&fronts, &rears), run)];
        }
        (fronts[run].reflected, fronts[run].transmitted) = (own[0], own[1]);
        let mut behind = [[0.0; LANES]; 3];
        if let Some(rear) = &self.rear {
            changed(rear, (k0, thickness_m), &mut behind);
            (rears[run].reflected, rears[run].transmitted) = (behind[0], behind[1]);
        }
        let mut between = Between::default();
        between.fill((&fronts, &rears), &pass);
        let (down, up) = (&between.down[run], &between.up[run]);
        let absorbed = std::array::from_fn(|l| down[l] * own[2][l] + up[l] * behind[2][l]);
        [between.reflectance[0], absorbed]
    }
}

type Complex = (f64, f64);

#[inline(always)]
fn times(a: Complex, b: Complex) -> Complex {
    (a.0 * b.0 - a.1 * b.1, a.0 * b.1 + a.1 * b.0)
}

impl Around {
    fn new(run: Run<'_>, fields: &Fields, film: usize) -> Self {
        let films = run.films.len();
        let front = run.front.y;
        let one = [[1.0; LANES], [0.0; LANES]];
        let mut a = [[*front.re, *front.im], one];
        let mut b = [[front.re.map(|y| -y), front.im.map(|y| -y)], one];
        for at in 0..film {
            let turn = (&fields.turn_re[at], &fields.turn_im[at]);
            let ones = [1.0; LANES];
            let scale = if is_scaled(films, at) { fields.scale(films, at) } else { &ones };
            descend(&mut a, (&run.films[at].medium, turn), scale);
            descend(&mut b, (&run.films[at].medium, turn), scale);
        }
        let mut top: Lane = std::array::from_fn(|l| {
            let e = (fields.e_re[film][l], fields.e_im[film][l]);
            let h = (fields.h_re[film][l], fields.h_im[film][l]);
            let incident = wave(&a, (e, h), l);
            fields.weight[film][l] * (incident.0 * incident.0 + incident.1 * incident.1)
        });
        if is_scaled(films, film) {
            let scale = fields.scale(films, film);
            for lanes in a.iter_mut().chain(&mut b).flatten() {
                lanes.iter_mut().zip(scale).for_each(|(value, scale)| *value *= scale);
            }
            top.iter_mut().zip(scale).for_each(|(value, scale)| *value *= scale * scale);
        }
        let Medium { y, q } = run.films[film].medium;
        let below = film + 1;
        let (e, h) = ([fields.e_re[below], fields.e_im[below]], [fields.h_re[below], fields.h_im[below]]);
        Self {
            y: [*y.re, *y.im],
            q: [*q.re, *q.im],
            a,
            b,
            flux: std::array::from_fn(|l| e[0][l] * h[0][l] + e[1][l] * h[1][l]),
            e,
            h,
            top,
            passes: std::array::from_fn(|l| {
                let gains = fields.gain[below..films].iter().map(|gain| gain[l]);
                run.rear.y.re[l] * gains.product::<f64>()
            }),
        }
    }
}

#[inline(always)]
fn wave(of: &[[Lane; 2]; 2], (e, h): (Complex, Complex), l: usize) -> Complex {
    let [of_e, of_h] = of;
    let (first, second) = (times((of_e[0][l], of_e[1][l]), e), times((of_h[0][l], of_h[1][l]), h));
    (first.0 + second.0, first.1 + second.1)
}

/// A wave on top of the run as a function of the fields one film further down: with
/// `E = c(a − b)`, `H = cY(a + b)`, `a = H' + YE'` and `b = exp(2iδ)(H' − YE')`.
fn descend(of: &mut [[Lane; 2]; 2], (medium, turn): (&Medium<'_>, (&Lane, &Lane)), scale: &Lane) {
    let [of_e, of_h] = of;
    for l in 0..LANES {
        let y = (medium.y.re[l], medium.y.im[l]);
        let (e, yh) = ((of_e[0][l], of_e[1][l]), times(y, (of_h[0][l], of_h[1][l])));
        let down = (e.0 + yh.0, e.1 + yh.1);
        let up = times((turn.0[l], turn.1[l]), (yh.0 - e.0, yh.1 - e.1));
        let c = scale[l];
        (of_h[0][l], of_h[1][l]) = (c * (down.0 + up.0), c * (down.1 + up.1));
        (of_e[0][l], of_e[1][l]) = times(y, (c * (down.0 - up.0), c * (down.1 - up.1)));
    }
}

/// Reflected and transmitted by the run, and absorbed in the film.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2",
    "x86_64+avx2"
))]
fn changed(around: &Around, (k0, thickness_m): (&Lane, f64), out: &mut [Lane; 3]) {
    let [y_re, y_im] = &around.y;
    let [q_re, q_im] = &around.q;
    let pair = |re, im| Pair { re, im };
    let film = Film { medium: Medium { y: pair(y_re, y_im), q: pair(q_re, q_im) }, thickness_m };
    let (mut size, mut re, mut im) = ([0.0; LANES], [0.0; LANES], [0.0; LANES]);
    turns::<false>((k0, &film), &mut size, (&mut re, &mut im));
    let [reflected, transmitted, absorbed] = out;
    for l in 0..LANES {
        let y = (y_re[l], y_im[l]);
        let (h, ye) = ((around.h[0][l], around.h[1][l]), times(y, (around.e[0][l], around.e[1][l])));
        let down = (h.0 + ye.0, h.1 + ye.1);
        let up = times((re[l], im[l]), (h.0 - ye.0, h.1 - ye.1));
        let e = (down.0 - up.0, down.1 - up.1);
        let h = times(y, (down.0 + up.0, down.1 + up.1));
        let (a, b) = (wave(&around.a, (e, h), l), wave(&around.b, (e, h), l));
        let inverse = 1.0 / (a.0 * a.0 + a.1 * a.1);
        let weight = around.top[l] * inverse;
        let below = weight * (4.0 * size[l] * (y.0 * y.0 + y.1 * y.1));
        reflected[l] = (b.0 * b.0 + b.1 * b.1) * inverse;
        transmitted[l] = below * around.passes[l];
        absorbed[l] = weight * (e.0 * h.0 + e.1 * h.1) - below * around.flux[l];
    }
}
