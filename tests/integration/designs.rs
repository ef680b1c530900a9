//! Designs built by hand, so that the physics is tested without the language.

use std::sync::Arc;

use bandloom::design::*;
use bandloom::light::{Spectrum, builtin};
use bandloom::materials::optics::{IdealEdge, Optics};
use bandloom::materials::{Bands, GapLaw, Material, MaterialClass, SharedMaterial, Valley};
use bandloom::source::{Span, Spanned};

pub(crate) fn named(name: &str) -> Spanned<String> {
    Spanned::new(name.to_owned(), Span::default())
}

/// A material that absorbs `share` of what reaches it above `gap_ev`, whatever the temperature.
pub(crate) fn ideal(gap_ev: f64, share: f64) -> SharedMaterial {
    material(gap_ev, Optics::Ideal(IdealEdge { gap_ev, absorbs: share }))
}

/// A gap model with any optics.
pub(crate) fn material(gap_ev: f64, optics: Optics) -> SharedMaterial {
    let valley = Valley { members: vec![(1.0, GapLaw::constant(gap_ev))], offset_ev: 0.0 };
    Arc::new(Material {
        family: None,
        label: format!("model {gap_ev} eV"),
        name: "model".to_owned(),
        class: MaterialClass::GapModel,
        composition: Vec::new(),
        lattice: None,
        bands: Some(Bands { gamma: Some(valley), x: None, l: None }),
        elastic: None,
        density_g_per_cm3: None,
        constants: Default::default(),
        carriers: Default::default(),
        optics,
        origins: Vec::new(),
        cautions: Vec::new(),
    })
}

pub(crate) fn layer(
    path: &str,
    duty: Duty,
    place: Place,
    material: SharedMaterial,
    thickness_m: Option<f64>,
) -> Layer {
    Layer {
        path: path.to_owned(),
        duty,
        place,
        material: Some(material),
        thickness_m,
        doping: None,
        extent: Extent::Everywhere,
        strain: Strain::Unstated,
        collecting: false,
        transport: Transport::default(),
        growth_temperature_k: None,
        rate_m_per_s: None,
        offcut_rad: None,
        sheet_resistance_ohm: None,
        spans: LayerSpans::default(),
    }
}

pub(crate) fn junction(name: &str, layers: std::ops::Range<usize>, voltage: VoltageModel) -> Junction {
    Junction {
        name: named(name),
        layers,
        voltage,
        voltage_span: None,
        shunt_ohm_m2: None,
        breakdown_v: None,
        separate: false,
        span: Span::default(),
    }
}

pub(crate) fn condition(name: &str, light: Arc<Spectrum>, temperature_k: f64) -> Condition {
    Condition {
        name: name.to_owned(),
        light,
        concentration: 1.0,
        temperature_k,
        incidence_rad: 0.0,
        fluence: None,
        distance_au: None,
        span: Span::default(),
    }
}

/// An empty stack under AM1.5G at 25 degC.
pub(crate) fn empty() -> Design {
    let light = builtin("AM1.5G").expect("built in");
    Design {
        name: named("by hand"),
        note: None,
        growth: Growth::Upright,
        terminals: Terminals::Two,
        optics: OpticsModel::OnePass { front_reflectance: 0.0, stated: false },
        texture: None,
        layers: Vec::new(),
        junctions: Vec::new(),
        interconnects: Vec::new(),
        fingers: None,
        area_m2: None,
        switches: Switches::default(),
        conditions: vec![condition("stated", light, 298.15)],
        requirements: Vec::new(),
        free_values: Vec::new(),
        seek: Vec::new(),
        charts: Vec::new(),
        tolerances: Vec::new(),
        vary_together: Vec::new(),
        season: None,
        measured: Vec::new(),
        accepts: Vec::new(),
        file_accepts: Vec::new(),
        limits: Vec::new(),
        assumptions: Vec::new(),
        span: Span::default(),
    }
}

/// Junctions `j0`, `j1`, … sunward first, each one ideal absorber of gap and share given.
pub(crate) fn ideal_stack(absorbers: &[(f64, f64)], voltage: &VoltageModel) -> Design {
    let mut design = empty();
    for (index, &(gap_ev, share)) in absorbers.iter().enumerate() {
        let name = format!("j{index}");
        let path = format!("{name}.absorber");
        design.layers.push(layer(&path, Duty::Absorber, Place::Junction(index), ideal(gap_ev, share), None));
        design.junctions.push(junction(&name, index..index + 1, voltage.clone()));
    }
    design
}

/// The stack of [`ideal_stack`] with everything above each gap absorbed, radiative limit only.
pub(crate) fn limit_stack(gaps_ev: &[f64]) -> Design {
    let absorbers: Vec<(f64, f64)> = gaps_ev.iter().map(|&gap| (gap, 1.0)).collect();
    ideal_stack(&absorbers, &VoltageModel::RadiativeLimit)
}

/// The stack under another light.
pub(crate) fn under(mut design: Design, light: Spectrum, concentration: f64, temperature_k: f64) -> Design {
    let mut condition = condition("other", Arc::new(light), temperature_k);
    condition.concentration = concentration;
    design.conditions = vec![condition];
    design
}
