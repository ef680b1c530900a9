//! What a junction emits into the layers below it, by reciprocity.

use crate::numerics::quadrature::{GAUSS4, GAUSS8};

/// Light a junction sends down through its lowest face, by vacuum wavelength.
///
/// Everything is in units of black-body light from one hemisphere with index 1, the unit of
/// [`LightModel::emissivity`](crate::optics::model::LightModel::emissivity): a dark current is
/// `J₀ = q·2π/(h³c²) ∫ (emissivity + lost) E² exp(−E/kT) dE`.
///
/// The stack is cut under the lowest layer the junction collects from; at the cut light runs in
/// that layer's own refractive index `n`. By reciprocity the junction sends down at each angle what
/// it absorbs, `a`, of light that comes up there. Of that the layers below return `r`, the layers
/// above return `s`, so that
/// `lost = ∫₀^{n²} a (1 − r)/(1 − r s) du`, `u = n² sin²θ`,
/// and a junction below that absorbs `b` of light from the cut gets `∫ a b/(1 − r s) du`. With
/// nothing coming back this is `n²` times the hemisphere's mean absorptance; over an ideal mirror it
/// is 0; over a clear rear face to air it stays below 1.
///
/// Approximations: across the cut fluxes add, waves do not; `k` at the cut is left out of its
/// index; what the layers above the junction (other than the front) take of its light is not
/// counted as its loss, only as light that does not come back; modes bound to layers of higher
/// index than the junction are left out. Integrated over the angle by Gauss's rule, four points inside the front's
/// escape cone and eight beyond. Sources: Würfel, J. Phys. C 15, 3967 (1982); Rau, Phys.
/// Rev. B 76, 085303 (2007); Steiner and Geisz, Appl. Phys. Lett. 100, 251106 (2012).
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Downward {
    /// Goes down and does not come back: absorbed in layers below or out of the rear, 0..n².
    pub lost: Vec<f64>,
    /// Of that, absorbed where each junction collects, `[junction][wavelength]`; 0 for itself and
    /// those above.
    pub to: Vec<Vec<f64>>,
}

/// Light of one angle at the cut.
#[derive(Clone, Debug)]
pub(super) struct Ray {
    /// `n sin θ` by wavelength.
    pub(super) along: Vec<f64>,
    /// `cos θ` in the medium at the cut.
    pub(super) cos: Vec<f64>,
}

/// What one half of a stack does with unit flux from the cut.
#[derive(Clone, Debug)]
pub(super) struct Half {
    returned: Vec<f64>,
    by_junction: Vec<Vec<f64>>,
}

impl Half {
    /// `rows`: the junction that collects from each layer, and what the layer absorbs.
    pub(super) fn new(
        returned: Vec<f64>,
        rows: impl Iterator<Item = (Option<usize>, Vec<f64>)>,
        junctions: usize,
    ) -> Self {
        let mut by_junction = vec![vec![0.0; returned.len()]; junctions];
        for (junction, row) in rows {
            if let Some(sum) = junction.and_then(|junction| by_junction.get_mut(junction)) {
                sum.iter_mut().zip(&row).for_each(|(sum, part)| *sum += part.max(0.0));
            }
        }
        Self { returned, by_junction }
    }
}

/// Integrates over the angle. `n` is the index at the cut; `halves` answers for the layers above
/// (lit from below) and below the cut, once or for each polarisation.
pub(super) fn downward(
    n: &[f64],
    (from, junctions): (usize, usize),
    mut halves: impl FnMut(&Ray) -> Vec<[Half; 2]>,
) -> Downward {
    let mut sum = Downward { lost: vec![0.0; n.len()], to: vec![vec![0.0; n.len()]; junctions] };
    for (ray, shares) in rays(n) {
        let pairs = halves(&ray);
        for [upper, lower] in &pairs {
            for at in 0..n.len() {
                let share = shares[at] / pairs.len() as f64;
                let (r, s) = (lower.returned[at].min(1.0), upper.returned[at].min(1.0));
                let sent = share * upper.by_junction[from][at] / (1.0 - r * s).max(f64::EPSILON);
                sum.lost[at] += sent * (1.0 - r);
                for (row, below) in sum.to.iter_mut().zip(&lower.by_junction) {
                    row[at] += sent * below[at];
                }
            }
        }
    }
    sum
}

/// Rays over the hemisphere of a medium of index `n`, with their shares of `∫₀^{n²} du`,
/// `u = n² sin²θ`, by wavelength: inside the escape cone to a front with index 1 by the cosine
/// outside, where what leaves the front is smooth, beyond it by the cosine inside.
pub(super) fn rays(n: &[f64]) -> impl Iterator<Item = (Ray, Vec<f64>)> {
    let within = GAUSS4.iter().map(|node| (true, *node));
    let beyond = GAUSS8.iter().map(|node| (false, *node));
    within.chain(beyond).map(move |(inside, (node, weight))| {
        let ray = |n: f64| {
            let square = if inside { 1.0 } else { n * n };
            let (from, to) = match (inside, n > 1.0) {
                (true, true) => (0.0, 1.0),
                (true, false) => ((1.0 - n * n).sqrt(), 1.0),
                (false, true) => (0.0, (1.0 - n.powi(-2)).sqrt()),
                (false, false) => (0.0, 0.0),
            };
            let cosine = from + 0.5 * (1.0 + node) * (to - from);
            let u = square * (1.0 - cosine * cosine);
            // du = 2 square cosine d(cosine), over an interval of that width.
            (u.sqrt(), (1.0 - u / (n * n)).max(0.0).sqrt(), square * weight * cosine * (to - from))
        };
        let all: Vec<(f64, f64, f64)> = n.iter().map(|&n| ray(n)).collect();
        let column = |of: fn(&(f64, f64, f64)) -> f64| all.iter().map(of).collect::<Vec<f64>>();
        (Ray { along: column(|ray| ray.0), cos: column(|ray| ray.1) }, column(|ray| ray.2))
    })
}
