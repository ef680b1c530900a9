//! Gap against mismatch to this wafer: the layers, and the families they are taken from.

use std::collections::BTreeSet;
use std::sync::Arc;

use crate::design::{Design, Duty};
use crate::growth::critical::{Cover, critical_mismatch};
use crate::growth::{ROOM_K, lattice_states, poisson_ratio, wafer};
use crate::materials::alloy::{Composition, Family};
use crate::materials::{GapKind, Material};
use crate::results::{EndMember, FamilyCurve, GapMap, GapMark};

/// Steps along one ternary; at the crossing of two valleys there is one point more.
const STEPS: usize = 24;

/// Poisson ratio of a (001) layer without elastic constants: the III–V lie between 0.30 and 0.37.
const USUAL_POISSON: f64 = 1.0 / 3.0;

/// `None` without a wafer that has a lattice.
pub(super) fn gap_map(design: &Design) -> Option<GapMap> {
    let wafer_at = wafer(design)?;
    let ground = design.layers[wafer_at].material.as_ref()?;
    let lattice = ground.lattice_constant(ROOM_K)?;
    let mut map = GapMap {
        wafer: ground.label.clone(),
        lattice_constant_angstrom: lattice,
        families: Vec::new(),
        compounds: Vec::new(),
        layers: marks(design, wafer_at, lattice),
    };
    let mut families: Vec<&Family> = Vec::new();
    for layer in &design.layers {
        let family = layer.material.as_ref().and_then(|material| material.family.as_deref());
        families.extend(family.filter(|family| !families.iter().any(|known| known.name == family.name)));
    }
    map.draw(families.into_iter(), ROOM_K);
    Some(map)
}

/// The map of some families against a wafer at a temperature in K, without layers. `None` where
/// the wafer has no lattice.
pub fn of_families(families: &[Arc<Family>], wafer: &Material, temperature_k: f64) -> Option<GapMap> {
    let lattice = wafer.lattice_constant(temperature_k)?;
    let mut map = GapMap {
        wafer: wafer.label.clone(),
        lattice_constant_angstrom: lattice,
        families: Vec::new(),
        compounds: Vec::new(),
        layers: Vec::new(),
    };
    map.draw(families.iter().map(Arc::as_ref), temperature_k);
    Some(map)
}

impl GapMap {
    /// Adds the ternaries around each family, every one once.
    fn draw<'f>(&mut self, families: impl Iterator<Item = &'f Family>, temperature_k: f64) {
        let mut drawn: BTreeSet<Vec<String>> = BTreeSet::new();
        for family in families {
            for (ends, elements) in edges(family) {
                let mut sorted: Vec<String> = elements.iter().map(|&element| element.to_owned()).collect();
                sorted.sort_unstable();
                if drawn.insert(sorted) {
                    self.add(family, &ends, &elements, temperature_k);
                }
            }
        }
    }

    fn add(&mut self, family: &Family, ends: &[Composition; 2], elements: &[&str], temperature_k: f64) {
        let lattice = self.lattice_constant_angstrom;
        let point = |share: f64| {
            let mixed = mix(ends, share);
            let gap = family.bands(&mixed).gap(temperature_k)?;
            Some((family.lattice_constant(&mixed, temperature_k)? / lattice - 1.0, gap))
        };
        let mut shares: Vec<f64> = (0..=STEPS).map(|step| step as f64 / STEPS as f64).collect();
        let kind = |share: f64| point(share).map(|(_, gap)| gap.kind);
        let crossings: Vec<f64> = shares
            .windows(2)
            .filter(|pair| kind(pair[0]) != kind(pair[1]))
            .map(|pair| crossing(pair[0], pair[1], &kind))
            .collect();
        shares.extend(crossings);
        shares.sort_by(f64::total_cmp);
        let points: Option<Vec<_>> = shares.into_iter().map(point).collect();
        let Some(points) = points else { return };
        self.families.push(FamilyCurve {
            name: elements.concat(),
            mismatch: points.iter().map(|(mismatch, _)| *mismatch).collect(),
            gap_ev: points.iter().map(|(_, gap)| gap.ev).collect(),
            direct: points.iter().map(|(_, gap)| gap.kind.is_direct()).collect(),
        });
        for (end, (mismatch, gap)) in ends.iter().zip([points.first(), points.last()].into_iter().flatten()) {
            let name = family.label(end);
            if !self.compounds.iter().any(|known| known.name == name) {
                let (mismatch, gap_ev) = (*mismatch, gap.ev);
                self.compounds.push(EndMember { name, mismatch, gap_ev });
            }
        }
    }
}

/// Where the lowest valley changes, between two shares.
fn crossing(mut low: f64, mut high: f64, kind: &impl Fn(f64) -> Option<GapKind>) -> f64 {
    let below = kind(low);
    for _ in 0..30 {
        let middle = 0.5 * (low + high);
        if kind(middle) == below { low = middle } else { high = middle }
    }
    0.5 * (low + high)
}

/// The ternaries around a family: both ends, and the elements in the order of the label.
fn edges(family: &Family) -> Vec<([Composition; 2], Vec<&str>)> {
    let mut out = Vec::new();
    for site in 0..2 {
        let (own, others) = (&family.sites[site], &family.sites[1 - site]);
        for first in 0..own.len() {
            for second in first + 1..own.len() {
                for other in 0..others.len() {
                    let end = |element: usize| {
                        let mut end: Composition =
                            [vec![0.0; family.sites[0].len()], vec![0.0; family.sites[1].len()]];
                        end[site][element] = 1.0;
                        end[1 - site][other] = 1.0;
                        end
                    };
                    let pair = [own[first].as_str(), own[second].as_str()];
                    let elements = match site {
                        0 => vec![pair[0], pair[1], others[other].as_str()],
                        _ => vec![others[other].as_str(), pair[0], pair[1]],
                    };
                    out.push(([end(first), end(second)], elements));
                }
            }
        }
    }
    out
}

fn mix(ends: &[Composition; 2], share: f64) -> Composition {
    [0, 1].map(|site| {
        ends[0][site].iter().zip(&ends[1][site]).map(|(a, b)| a * (1.0 - share) + b * share).collect()
    })
}

fn marks(design: &Design, wafer_at: usize, lattice: f64) -> Vec<GapMark> {
    let states = lattice_states(design);
    design
        .layers
        .iter()
        .zip(states)
        .enumerate()
        .filter_map(|(index, (layer, state))| {
            let (state, material) = (state?, layer.material.as_ref()?);
            let gap = material.gap(ROOM_K)?;
            let strained = state.beneath == Some(wafer_at) && layer.duty != Duty::Wafer;
            Some(GapMark {
                name: layer.path.clone(),
                mismatch: material.lattice_constant(ROOM_K)? / lattice - 1.0,
                gap_ev: gap.ev,
                critical_mismatch: layer
                    .thickness_m
                    .filter(|_| strained)
                    .and_then(|thickness| critical(material, thickness, lattice)),
            })
            .filter(|_| index == wafer_at || state.beneath.is_some())
        })
        .collect()
}

fn critical(material: &Material, thickness_m: f64, lattice_angstrom: f64) -> Option<f64> {
    let poisson = material.elastic.map_or(USUAL_POISSON, poisson_ratio);
    let burgers_m = lattice_angstrom * 1e-10 / std::f64::consts::SQRT_2;
    critical_mismatch(thickness_m, poisson, burgers_m, Cover::Free)
}
