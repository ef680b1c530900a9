//! Facts about a junction that several rules share: what absorbs, its gap, which side is which.

use crate::design::{Design, Duty, Extent, Junction, Layer, Place, Polarity};
use crate::growth::ROOM_K;
use crate::materials::{Gap, MaterialClass};

/// One junction with its layers in the finished cell.
pub(crate) struct JunctionFacts<'a> {
    /// The junction.
    pub(crate) junction: &'a Junction,
    /// Its layers that are there everywhere, sunward first, with their index in the design.
    pub(crate) layers: Vec<(usize, &'a Layer)>,
    /// Worked out once: a rule may ask for it at every layer.
    gap: Option<Gap>,
}

impl<'a> JunctionFacts<'a> {
    pub(super) fn new(design: &'a Design, index: usize) -> Self {
        let junction = &design.junctions[index];
        let range = junction.layers.clone();
        let all = design.layers.get(range.clone()).unwrap_or_default();
        let layers = range.zip(all).filter(|(_, layer)| layer.extent == Extent::Everywhere).collect();
        let mut facts = Self { junction, layers, gap: None };
        facts.gap = facts.absorber_gap();
        facts
    }

    /// As the user calls it.
    pub(crate) fn name(&self) -> &'a str {
        &self.junction.name.value
    }

    /// The layers that turn light into current; a wafer within a junction is its base.
    pub(crate) fn absorbers(&self) -> impl DoubleEndedIterator<Item = (usize, &'a Layer)> + '_ {
        self.layers.iter().copied().filter(|(_, layer)| layer.collects() || layer.duty == Duty::Wafer)
    }

    /// The layer that does most of it: the thickest, the first where none has a thickness.
    pub(crate) fn main_absorber(&self) -> Option<(usize, &'a Layer)> {
        let thickness = |layer: &Layer| layer.thickness_m.unwrap_or(0.0);
        self.absorbers().reduce(|best, next| if thickness(next.1) > thickness(best.1) { next } else { best })
    }

    /// The gap of its main absorber at 25 °C; `None` where an absorber could not be resolved.
    pub(crate) fn gap(&self) -> Option<Gap> {
        self.gap
    }

    fn absorber_gap(&self) -> Option<Gap> {
        if self.absorbers().any(|(_, layer)| layer.material.is_none()) {
            return None;
        }
        self.main_absorber()?.1.material.as_ref()?.gap(ROOM_K)
    }

    /// Whether it is a bare gap without a chemistry: a limit study, not a thing to grow.
    pub(crate) fn is_gap_model(&self) -> bool {
        self.absorbers().all(|(_, layer)| {
            layer.material.as_ref().is_some_and(|material| material.class == MaterialClass::GapModel)
        })
    }

    /// The sign of its sunward side, where the two sides differ: `N` for n on p.
    ///
    /// Read from the doped absorbers; where they do not tell, from the outermost layers with a
    /// sign (a window on an absorber, contacts on an undoped one).
    pub(crate) fn sunward_sign(&self) -> Option<Polarity> {
        let absorbing: Vec<Polarity> = self.absorbers().filter_map(|(_, layer)| sign(layer)).collect();
        let all: Vec<Polarity> = self.layers.iter().filter_map(|(_, layer)| sign(layer)).collect();
        [absorbing, all].iter().find_map(|signs| match (signs.first(), signs.last()) {
            (Some(first), Some(last)) if first != last => Some(*first),
            _ => None,
        })
    }

    /// The sign of its rear side.
    pub(crate) fn rear_sign(&self) -> Option<Polarity> {
        self.sunward_sign().map(opposite)
    }
}

/// The sign of a layer by its doping, else by its duty.
pub(crate) fn sign(layer: &Layer) -> Option<Polarity> {
    match (&layer.doping, layer.duty) {
        (Some(doping), _) => Some(doping.polarity),
        (None, Duty::ElectronContact) => Some(Polarity::N),
        (None, Duty::HoleContact) => Some(Polarity::P),
        _ => None,
    }
}

/// The other sign.
pub(crate) fn opposite(polarity: Polarity) -> Polarity {
    match polarity {
        Polarity::N => Polarity::P,
        Polarity::P => Polarity::N,
    }
}

/// `n`, `p`
pub(crate) fn letter(polarity: Polarity) -> &'static str {
    match polarity {
        Polarity::N => "n",
        Polarity::P => "p",
    }
}

/// `` `GaAs` base of `bottom` ``, `` `GaAs` wafer ``: a layer as a sentence names it.
pub(crate) fn describe(design: &Design, layer: &Layer) -> String {
    let material = layer.material.as_ref().map_or_else(String::new, |it| format!("`{}` ", it.label));
    let owner = match layer.place {
        Place::Junction(index) => design.junctions.get(index).map(|it| &it.name.value),
        Place::Interconnect(index) => design.interconnects.get(index).map(|it| &it.name.value),
        _ => None,
    };
    let owner = owner.map_or_else(String::new, |name| format!(" of `{name}`"));
    format!("{material}{}{owner}", layer.duty.word())
}

/// Whether a layer stays in the finished cell, if only in places.
pub(crate) fn stays(layer: &Layer) -> bool {
    layer.extent != Extent::Removed
}
