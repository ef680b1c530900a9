//! Layers too thick for interference: intensities between the runs of films.
//!
//! Between two thick media a run reflects and passes shares of the flux, from either side;
//! across a thick layer flux only fades. Katsidis and Siapkas, Appl. Opt. 41, 3978 (2002), here
//! as reflectances added from the rear up, which cannot overflow, instead of a product of
//! intensity matrices, which can.

use crate::optics::wave::films::Faces;
use crate::optics::wave::lanes::{LANES, Lane};

/// Light between the runs, for unit flux on the first.
#[derive(Clone, Debug, Default)]
pub(super) struct Between {
    /// Flux that falls on each run from its front.
    pub(super) down: Vec<Lane>,
    /// Flux that falls on each run from its rear.
    pub(super) up: Vec<Lane>,
    /// Of each run and all that lies below it.
    pub(super) reflectance: Vec<Lane>,
    /// `1/(1 − r g)` of each run, `r` its reflectance from the rear, `g` that of what lies below.
    pub(super) echo: Vec<Lane>,
}

/// What returns to the rear of a run: through the thick layer below it and back.
fn returned(pass: &Lane, below: &Lane) -> Lane {
    std::array::from_fn(|l| pass[l] * pass[l] * below[l])
}

/// Reflectance of a run over something that sends `g` back, and `1/(1 − r g)`.
fn added(front: &Faces, rear: &Faces, g: &Lane) -> (Lane, Lane) {
    let echo: Lane = std::array::from_fn(|l| 1.0 / (1.0 - rear.reflected[l] * g[l]).max(f64::EPSILON));
    let sum = std::array::from_fn(|l| {
        front.reflected[l] + front.transmitted[l] * g[l] * rear.transmitted[l] * echo[l]
    });
    (sum, echo)
}

impl Between {
    /// Of runs with these faces, lit from the front and from the rear (nothing where no light can
    /// come back), `pass` being the share each thick layer between lets through.
    pub(super) fn fill(&mut self, (fronts, rears): (&[Faces], &[Faces]), pass: &[Lane]) {
        let last = pass.len();
        self.reflectance.resize(last + 1, [0.0; LANES]);
        self.echo.resize(last + 1, [1.0; LANES]);
        self.reflectance[last] = fronts[last].reflected;
        for at in (0..last).rev() {
            let back = returned(&pass[at], &self.reflectance[at + 1]);
            (self.reflectance[at], self.echo[at]) = added(&fronts[at], &rears[at], &back);
        }
        self.descend(fronts, pass);
    }

    /// Share absorbed in the thick layer below run `at`: fluxes at its faces, less each other.
    pub(super) fn absorbed(&self, (fronts, rears): (&[Faces], &[Faces]), at: usize) -> Lane {
        let (above, below) = (at, at + 1);
        std::array::from_fn(|l| {
            let enters = self.down[above][l] * fronts[above].transmitted[l]
                - self.up[above][l] * rears[above].entering[l];
            let leaves = self.down[below][l] * fronts[below].entering[l]
                - self.up[below][l] * rears[below].transmitted[l];
            enters - leaves
        })
    }

    /// From the front down, once `reflectance` and `echo` of every run are known.
    fn descend(&mut self, fronts: &[Faces], pass: &[Lane]) {
        let mut down = [1.0; LANES];
        self.down.clear();
        self.up.clear();
        for (run, front) in fronts.iter().enumerate() {
            self.down.push(down);
            let Some(pass) = pass.get(run) else {
                self.up.push([0.0; LANES]);
                break;
            };
            let below = &self.reflectance[run + 1];
            let mut up = [0.0; LANES];
            for l in 0..LANES {
                let enters = down[l] * front.transmitted[l] * self.echo[run][l];
                up[l] = enters * pass[l] * pass[l] * below[l];
                down[l] = enters * pass[l];
            }
            self.up.push(up);
        }
    }
}
