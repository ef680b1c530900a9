//! From the layers of a junction to its carriers: who is minority where, how far the field reaches,
//! what is collected and what recombines.

mod carriers;
mod findings;
mod places;

use crate::carriers::collection::Stretch;
use crate::carriers::dark::{Depleted, undoped_a_per_m2};
use crate::carriers::depletion::{Depletion, Doped};
use crate::carriers::drift::Drift;
use crate::carriers::region::{Region, Slab};
use crate::design::{Condition, Design, Face, Polarity};
use crate::materials::carriers::Carrier;
use crate::numerics::constants::thermal_voltage;

pub(super) use carriers::{LayerCarriers, minority_of};
use carriers::{Under, Undoped, layer_carriers, undoped};
pub(super) use findings::{findings, held_at_the_limit};
use places::{Core, Side, core};

/// Why a junction cannot be followed, with the layer to blame.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Lack {
    /// A gap without a chemistry.
    Model(usize),
    /// No doping where one decides.
    Doping(usize),
    /// Nowhere does p meet n, nor contacts of two kinds.
    Junction,
    /// No effective masses, so no intrinsic density.
    Intrinsic(usize),
    /// No static permittivity.
    Permittivity(usize),
    /// No mobility of that carrier.
    Mobility(usize, Carrier),
    /// Neither lifetime nor diffusion length of that carrier.
    Lifetime(usize, Carrier),
    /// No optical data by depth.
    Depth(usize),
}

/// How the carriers of one junction are taken.
#[derive(Clone, Debug)]
pub(super) enum Carrying {
    /// Every photon absorbed where it is collected gives one electron.
    Complete,
    /// As the layers say.
    Followed(Box<Transport>),
    /// Complete, since the layers do not say enough.
    Lacking(Lack),
}

/// A junction as its layers make it, at one temperature and fluence.
#[derive(Clone, Debug)]
pub(super) struct Transport {
    /// Layers with minority carriers, sunward first.
    pub(super) layers: Vec<LayerCarriers>,
    /// Collection probability in each layer that collects, index in [`Design::layers`].
    pub(super) collection: Vec<(usize, Vec<Stretch>)>,
    /// At zero bias.
    pub(super) depletion: Depletion,
    /// `J01` of emitter and base, non-radiative, A/m2.
    pub(super) diffusion_a_per_m2: f64,
    /// `J02`, A/m2.
    pub(super) depletion_a_per_m2: f64,
    /// Layers on either side of the field, sunward first; empty towards a contact.
    pub(super) sides: [Vec<usize>; 2],
}

/// How each junction's carriers are taken under `condition`: followed where its voltage is to come
/// from layers or any transport data are stated, else complete.
pub(super) fn carrying(design: &Design, condition: &Condition) -> Vec<Carrying> {
    let under = Under::new(design, condition);
    (0..design.junctions.len())
        .map(|junction| {
            if !design.follows_carriers(junction) {
                return Carrying::Complete;
            }
            match transport(design, junction, &under) {
                Ok(transport) => Carrying::Followed(Box::new(transport)),
                Err(lack) => Carrying::Lacking(lack),
            }
        })
        .collect()
}

fn transport(design: &Design, junction: usize, under: &Under<'_>) -> Result<Transport, Lack> {
    let condition = under.condition;
    let core = core(design, junction)?;
    let thermal_v = thermal_voltage(condition.temperature_k);
    let outward = |side: &Side| -> Result<Vec<LayerCarriers>, Lack> {
        let minority = minority_of(side.polarity);
        side.layers.iter().map(|&layer| layer_carriers(design, (layer, minority), under)).collect()
    };
    let (sunward, rear) = (outward(&core.sunward)?, outward(&core.rear)?);
    let between: Vec<Undoped> =
        core.between.iter().map(|&layer| undoped(design, layer, condition)).collect::<Result<_, _>>()?;

    let inner = [sunward.first(), rear.first()];
    let built_in_v = built_in(&core, inner, &between, thermal_v).ok_or(Lack::Junction)?;
    let doped =
        |layers: &[LayerCarriers]| -> Vec<Doped> { layers.iter().map(LayerCarriers::doped).collect() };
    let gaps: Vec<Doped> = between.iter().map(Undoped::doped).collect();
    let depletion = Depletion::new(&doped(&sunward), &gaps, &doped(&rear), built_in_v);

    let mut collection = Vec::new();
    let mut diffusion_a_per_m2 = 0.0;
    let mut layers = Vec::new();
    for (side, own, face, depleted_m) in [
        (&core.sunward, sunward, Face::Sunward, depletion.sunward_m),
        (&core.rear, rear, Face::Rear, depletion.rear_m),
    ] {
        let mut chain = own;
        let doped = chain.len();
        let minority = minority_of(side.polarity);
        for &layer in &side.further {
            chain.push(layer_carriers(design, (layer, minority), under)?);
        }
        let (stretches, dark) = followed(design, &chain, (face, depleted_m, doped));
        diffusion_a_per_m2 += dark;
        collection.extend(stretches);
        layers.extend(chain);
    }
    for (layer, it) in core.between.iter().zip(&between) {
        let drift = Drift {
            thickness_m: it.thickness_m,
            electron_m: it.drift_m(Carrier::Electron, depletion.field_v_per_m),
            hole_m: it.drift_m(Carrier::Hole, depletion.field_v_per_m),
            electrons_sunward: core.sunward.polarity == Polarity::N,
        };
        collection.push((*layer, vec![drift.stretch(0.0)]));
        layers.push(it.carriers(*layer));
    }
    collection.sort_by_key(|(layer, _)| *layer);
    layers.sort_by_key(|carriers| carriers.layer);
    let depletion_a_per_m2 = depleted(design, &core, (&layers, &between), (&depletion, condition));
    let mut sides = [core.sunward.layers, core.rear.layers];
    sides[0].reverse();
    Ok(Transport { layers, collection, depletion, diffusion_a_per_m2, depletion_a_per_m2, sides })
}

/// The built-in voltage between the two inner layers; a contact holds the Fermi level at the edge
/// of its band in the absorber it touches.
fn built_in(
    core: &Core,
    inner: [Option<&LayerCarriers>; 2],
    between: &[Undoped],
    thermal_v: f64,
) -> Option<f64> {
    let mut ln_sum = 0.0;
    for (side, own, other) in [(&core.sunward, inner[0], inner[1]), (&core.rear, inner[1], inner[0])] {
        ln_sum += match own {
            Some(carriers) => carriers.doping_per_m3.ln() - carriers.ln_intrinsic,
            None => {
                let (states, ln_intrinsic) = match (between.first(), other) {
                    (Some(undoped), _) => (undoped.states_per_m3, undoped.ln_intrinsic),
                    (None, Some(absorber)) => (absorber.states_per_m3, absorber.ln_intrinsic),
                    (None, None) => return None,
                };
                let band = if side.polarity == Polarity::N { states[0] } else { states[1] };
                band.ln() - ln_intrinsic
            }
        };
    }
    Some(thermal_v * ln_sum)
}

/// Collection in the layers of one side, from the field outwards, and its dark current: `chain` is
/// depleted to `depleted_m` within its first `doped` layers.
fn followed(
    design: &Design,
    chain: &[LayerCarriers],
    (face, depleted_m, doped): (Face, f64, usize),
) -> (Vec<(usize, Vec<Stretch>)>, f64) {
    let mut left = depleted_m;
    let mut slabs = Vec::new();
    let mut cuts = Vec::new();
    for (at, carriers) in chain.iter().enumerate() {
        let inside = if at < doped { left.min(carriers.thickness_m) } else { 0.0 };
        left -= inside;
        let neutral_m = carriers.thickness_m - inside;
        let last = at + 1 == chain.len();
        let followed = neutral_m > 0.0 || (last && slabs.is_empty());
        cuts.push((inside, followed.then_some(slabs.len())));
        if followed {
            slabs.push(Slab {
                thickness_m: neutral_m,
                diffusion_m2_per_s: carriers.diffusion_m2_per_s,
                length_m: carriers.length_m,
                ln_minority: carriers.ln_minority,
                far_velocity_m_per_s: velocity(design, chain, at, face),
            });
        }
    }
    let light = Region::solve(&slabs);
    // The dark current takes the length that non-radiative recombination alone leaves.
    let mut of_dark = slabs;
    for ((_, slab), carriers) in cuts.iter().zip(chain) {
        if let Some(slab) = slab {
            of_dark[*slab].length_m = carriers.dark_length_m;
        }
    }
    let dark = Region::solve(&of_dark).dark_a_per_m2;
    let stretches = chain.iter().zip(&cuts).map(|(carriers, (inside, slab))| {
        let mut parts = Vec::new();
        let whole = carriers.thickness_m;
        match face {
            Face::Sunward => {
                parts.extend(slab.map(|slab| light.pieces[slab].above_junction(0.0)));
                parts.push(Stretch::complete(whole - inside, whole));
            }
            Face::Rear => {
                parts.push(Stretch::complete(0.0, *inside));
                parts.extend(slab.map(|slab| light.pieces[slab].below_junction(*inside)));
            }
        }
        parts.retain(|part| part.to_m > part.from_m);
        (carriers.layer, parts)
    });
    (stretches.collect(), dark)
}

/// Recombination velocity at the outer face of layer `at` of a chain, m/s: as stated for that
/// face, by it or by the next of the chain, else by default.
fn velocity(design: &Design, chain: &[LayerCarriers], at: usize, face: Face) -> f64 {
    let own = &design.layers[chain[at].layer].transport;
    let next = chain.get(at + 1).map(|next| &design.layers[next.layer].transport);
    let (stated, facing) = match face {
        Face::Sunward => (own.sunward_velocity, next.and_then(|next| next.rear_velocity)),
        Face::Rear => (own.rear_velocity, next.and_then(|next| next.sunward_velocity)),
    };
    stated.or(facing).unwrap_or_else(|| design.default_velocity(chain[at].layer, face))
}

/// `J02`. In a field, of the layers next to it: the intrinsic density of the one that has most,
/// the lifetime of electrons on the p side and of holes on the n side. In an undoped absorber
/// between contacts, of its bulk and faces.
fn depleted(
    design: &Design,
    core: &Core,
    (layers, between): (&[LayerCarriers], &[Undoped]),
    (depletion, condition): (&Depletion, &Condition),
) -> f64 {
    if core.sunward.layers.is_empty() && core.rear.layers.is_empty() {
        let last = between.len().saturating_sub(1);
        return between
            .iter()
            .zip(&core.between)
            .enumerate()
            .map(|(at, (it, &layer))| {
                let own = &design.layers[layer].transport;
                let face = |outer: bool, stated: Option<f64>, face| {
                    let default = if outer { design.default_velocity(layer, face) } else { 0.0 };
                    stated.unwrap_or(default)
                };
                let faces = [
                    face(at == 0, own.sunward_velocity, Face::Sunward),
                    face(at == last, own.rear_velocity, Face::Rear),
                ];
                undoped_a_per_m2(it.ln_intrinsic.exp(), it.thickness_m, it.lifetimes_s, faces)
            })
            .sum();
    }
    let inner = |side: &Side| {
        let layer = side.layers.first()?;
        layers.iter().find(|carriers| carriers.layer == *layer)
    };
    let sides: Vec<&LayerCarriers> =
        [inner(&core.sunward), inner(&core.rear)].into_iter().flatten().collect();
    let of = |carrier: Carrier| {
        let own = sides.iter().find(|side| side.minority == carrier).map(|side| side.non_radiative_s);
        let at = if carrier == Carrier::Electron { 0 } else { 1 };
        let undoped = between.first().map(|it| it.lifetimes_s[at]);
        undoped.or(own).or_else(|| sides.first().map(|side| side.non_radiative_s)).unwrap_or(f64::INFINITY)
    };
    let most = sides
        .iter()
        .map(|side| side.ln_intrinsic)
        .chain(between.iter().map(|it| it.ln_intrinsic))
        .fold(f64::NEG_INFINITY, f64::max);
    Depleted {
        temperature_k: condition.temperature_k,
        intrinsic_per_m3: most.exp(),
        lifetimes_s: [of(Carrier::Electron), of(Carrier::Hole)],
        field_v_per_m: depletion.field_v_per_m,
        width_m: depletion.width_m(),
    }
    .dark_a_per_m2()
}
