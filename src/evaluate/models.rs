//! Which models were used, and what they do not see.

use crate::design::{Design, Duty, OpticsModel, Terminals, VoltageModel};
use crate::evaluate::coupling;
use crate::evaluate::lit::Lit;
use crate::evaluate::transport::{Carrying, held_at_the_limit};
use crate::evaluate::wiring::strings;
use crate::materials::optics::Optics;
use crate::optics::model::layers_without_index;
use crate::results::ModelNote;

/// The models behind the numbers of `design`, in the order of the calculation.
pub(super) fn model_notes(design: &Design, lit: &Lit) -> Vec<ModelNote> {
    let mut notes = vec![light()];
    if design.conditions.iter().any(|condition| condition.light.name == "AM0") {
        notes.push(note(
            "light AM0",
            "Efficiency is over the whole 1366.09 W/m2; currents start at 280 nm, where material data start.",
            "The 0.6 % of the power at shorter wavelengths, which is a line of its own in the ledger.",
            "ASTM E490-00a",
        ));
    }
    if design.conditions.iter().any(|condition| condition.incidence_rad > 0.0) {
        notes.push(note(
            "oblique light",
            "The cell receives cos θ of the irradiance across the beam, and efficiency is over what it receives.",
            if by_waves(design) {
                "Light from other directions at the same time."
            } else {
                "The change of reflectance and of the path inside with the angle."
            },
            "Lambert's cosine law",
        ));
    }
    notes.push(optics(design));
    notes.extend(texture(design));
    if has(design, |optics| matches!(optics, Optics::Table(_))) {
        notes.push(note(
            "optical tables",
            "k is linear in wavelength above the gap and ln k linear in photon energy below it; the table moves \
             with the gap from its own temperature to the condition's; outside a table its end value is held.",
            "Changes of the shape of the spectrum with temperature, doping and order.",
            "",
        ));
    }
    notes.extend(collection(design, lit));
    notes.extend(voltage(design, lit));
    let strings = strings(design, 0.0);
    if strings.iter().any(|string| string.junctions.len() > 1) {
        notes.push(note(
            "series string",
            "At each current the junction voltages are summed, negative ones included, less the drop over lumped \
             resistances of fingers and tunnels; the voltage of a saturated junction is what the others leave; the fill factor is over the \
             string's own short-circuit current.",
            "Lateral current: every junction carries the same current density everywhere.",
            "Kirchhoff's laws",
        ));
    }
    if strings.iter().any(|string| !string.tunnels.is_empty()) {
        notes.push(note(
            "tunnel junctions",
            "Up to its peak the tunnelling current (V/V_p) exp(1 − V/V_p), with the stated resistance at no current; \
             beyond it the excess current through the stated valley; the curve is that met on the way from open \
             circuit down, with the dip where the current passes a peak.",
            "Temperature, light in the tunnel layers, spreading of the current; the way up from short circuit may differ.",
            "Sze and Ng, Physics of Semiconductor Devices (2007), chapter 8; Esaki, Phys. Rev. 109, 603 (1958)",
        ));
    }
    if coupling::is_on(design) {
        notes.push(note(
            "luminescent coupling",
            "Light that a junction sends down by its radiative recombination at its own voltage makes current where \
             junctions below absorb it, at every point of the curve; left out of the photocurrents and the \
             mismatch told.",
            "Light sent up, and what junctions below send back.",
            "Steiner, Geisz et al., Opt. Express 21, A163 (2013)",
        ));
    }
    if design.junctions.iter().any(|junction| junction.breakdown_v.is_some()) {
        notes.push(note(
            "reverse breakdown",
            "A tenth of the leakage, multiplied by (1 + V/V_b)^−3.4 in reverse, with the stated voltage V_b.",
            "Change of the voltage with temperature, microplasmas, heating where it breaks down.",
            "Bishop, Solar Cells 25, 73 (1988)",
        ));
    }
    if strings.len() > 1 {
        notes.push(note(
            "separate terminals",
            if design.terminals == Terminals::Three {
                "Two strings between front, middle and rear, each with a load of its own at its maximum power point; \
                 the powers add, and the middle contact carries the difference of the currents without loss; the \
                 grid's resistance lies in the first string."
            } else {
                "Each string works at its own maximum power point and the powers add; the grid's resistance lies in the first string."
            },
            "The cost of the wiring and of the further power conversion.",
            "Kirchhoff's laws",
        ));
    }
    if design.fingers.is_some() {
        notes.push(note(
            "fingers",
            "Their shading scales all light that enters; their series resistance is one lumped resistor.",
            "Light that the metal sends back into the cell, and current crowding under it.",
            "",
        ));
    }
    notes
}

fn light() -> ModelNote {
    note(
        "light",
        "Photon flux is linear between the points of the spectrum and the optical data, cut exactly at every gap, on \
         a grid whose halving moves no current by more than 0.01 %; efficiency is over the spectrum's own integral \
         times concentration.",
        "Spectral change over the day, angle of the diffuse part, clouds.",
        "CODATA 2018 constants: Tiesinga et al., Rev. Mod. Phys. 93, 025010 (2021)",
    )
}

fn by_waves(design: &Design) -> bool {
    matches!(design.optics, OpticsModel::Interference { .. }) && layers_without_index(design).is_empty()
}

fn interference(design: &Design) -> ModelNote {
    let ends = design
        .lit_layers()
        .find(|(_, layer)| matches!(layer.duty, Duty::Metal | Duty::Mirror) && layer.thickness_m.is_none());
    let rear = match ends {
        Some((_, layer)) => format!("behind the last layer stands `{}` without end", layer.path),
        None => "behind the last layer is air".to_owned(),
    };
    ModelNote {
        name: "optics interference".to_owned(),
        does: format!(
            "Plane waves through all lit layers between faces that are flat, s and p in equal parts; the wafer and \
             layers over 10 um add fluxes instead of waves; {rear}; each layer absorbs what enters its faces less \
             what leaves them."
        ),
        blind_to:
            "Rough faces, scattering (but for a texture stated), light that the front metal sends back, layers whose \
                   thickness varies across the cell."
                .to_owned(),
        cite: "Macleod, Thin-Film Optical Filters (2010); Katsidis and Siapkas, Appl. Opt. 41, 3978 (2002)"
            .to_owned(),
    }
}

fn texture(design: &Design) -> Option<ModelNote> {
    let texture = design.texture.filter(|_| by_waves(design))?;
    let name = match (texture.pyramids, texture.lambertian_rear) {
        (true, true) => "texture pyramids lambertian_rear: an estimate",
        (true, false) => "texture pyramids: an estimate",
        _ => "texture lambertian_rear: an estimate",
    };
    let mut does = String::new();
    if texture.pyramids {
        does.push_str(
            "Light meets two facets at 54.74° to the face in turn and is reflected by both by the waves in the films \
             at its angle there, and runs obliquely through the wafer. ",
        );
    }
    does.push_str(
        "After its first return from the rear light fills all directions of the wafer (without one: of the thickest \
         layer that collects) alike, fades by 2E3 from face to face, and 1/n² of it is inside the front's escape cone.",
    );
    Some(note(
        name,
        &does,
        "Third facets, facets seen from oblique planes, films of another thickness on a facet, emission into the \
         layers below by rays that scatter.",
        "Campbell and Green, J. Appl. Phys. 62, 243 (1987); Tiedje et al., IEEE Trans. Electron Devices 31, 711 \
         (1984); Green, Prog. Photovolt. 10, 235 (2002)",
    ))
}

fn optics(design: &Design) -> ModelNote {
    if by_waves(design) {
        return interference(design);
    }
    let front = match design.optics {
        OpticsModel::OnePass { front_reflectance, stated: true } => {
            format!("{} % of the light is reflected at the front, as stated", percent(front_reflectance))
        }
        _ => "no reflectance is stated, so none is taken".to_owned(),
    };
    let instead = match design.optics {
        OpticsModel::Interference { .. } => {
            let without = layers_without_index(design);
            let first = without.first().map_or("a layer", |&index| design.layers[index].path.as_str());
            format!("Stands in for interference, as `{first}` has no refractive index. ")
        }
        OpticsModel::OnePass { .. } => String::new(),
    };
    let mirror = design.lit_layers().any(|(_, layer)| layer.duty == Duty::Mirror);
    let rear = if mirror {
        "the mirror sends it back once, with its Fresnel reflectance where it is a metal with an index, else wholly"
    } else {
        "nothing returns from the rear"
    };
    ModelNote {
        name: "optics one_pass".to_owned(),
        does: format!(
            "{instead}Beer–Lambert straight down through the lit layers in order; {front}; coats and other layers without \
             absorption do nothing; {rear}."
        ),
        blind_to: "Interference, reflection between layers, the colour of the coat, scattering.".to_owned(),
        cite: "Bouguer–Lambert–Beer law".to_owned(),
    }
}

fn percent(share: f64) -> String {
    crate::units::number(100.0 * share)
}

fn collection(design: &Design, lit: &Lit) -> Vec<ModelNote> {
    let is_followed = |carrying: &&Carrying| matches!(carrying, Carrying::Followed(_));
    let mut notes = Vec::new();
    if lit.carrying.iter().any(|carrying| !is_followed(&carrying)) {
        notes.push(note(
            "collection ideal",
            "Every photon absorbed in emitter, base, intrinsic, absorber or a wafer inside a junction gives one \
             electron, where no voltage from layers is asked for and no transport data are stated.",
            "Diffusion lengths, interface velocities, depletion: real currents are lower.",
            "Shockley and Queisser, J. Appl. Phys. 32, 510 (1961)",
        ));
    }
    if lit.carrying.iter().any(|carrying| is_followed(&carrying)) {
        notes.push(note(
            "collection by transport",
            "A carrier is collected with the probability that solves the diffusion of minority carriers in emitter and \
             base, 1 in the depleted layers (abrupt, at zero bias), integrated over where the light is absorbed; \
             non-radiative lifetimes, radiative recombination and Auger together give the diffusion length; windows and \
             BSF give nothing unless they are said to be collecting; low injection, full ionisation, Boltzmann \
             statistics.",
            "Fields of graded layers and of doping profiles, high injection, traps that fill, currents along the layers, \
             collection that changes with the voltage.",
            "Donolato, Appl. Phys. Lett. 46, 270 (1985); Hovel, Semiconductors and Semimetals 11 (1975)",
        ));
    }
    let undoped = lit.carrying.iter().any(|carrying| match carrying {
        Carrying::Followed(transport) => transport.layers.iter().any(|own| own.doping_per_m3 == 0.0),
        _ => false,
    });
    if undoped {
        notes.push(note(
            "undoped absorber",
            "Electrons and holes drift in an even field at zero bias, each over its own mobility times lifetime times \
             field; contacts hold the Fermi level at the band edges; in the dark n = p throughout, recombining in the bulk \
             and at both faces.",
            "Mobile ions, fields that space charge bends, collection that falls towards open circuit.",
            "Hecht, Z. Phys. 77, 235 (1932); Shockley and Read, Phys. Rev. 87, 835 (1952)",
        ));
    }
    if design.conditions.iter().any(|condition| condition.fluence.is_some()) {
        notes.push(note(
            "damage",
            "Particles add K_L times their fluence to 1/L² of the minority carriers in every layer whose material has a \
             constant for them; J01 and J02 follow; the remaining factor is over the same condition without them.",
            "Carrier removal, annealing, damage of covers and coats, other energies and angles than the constant's.",
            "Hovel, Semiconductors and Semimetals 11 (1975), chapter 8",
        ));
    }
    notes
}

fn voltage(design: &Design, lit: &Lit) -> Vec<ModelNote> {
    let uses = |wanted: fn(&VoltageModel) -> bool| design.junctions.iter().any(|j| wanted(&j.voltage));
    let mut notes = Vec::new();
    if uses(|model| matches!(model, VoltageModel::RadiativeLimit | VoltageModel::Ere(_))) {
        notes.push(note(
            "voltage from radiative_limit",
            if by_waves(design) {
                "Each junction emits through the front hemisphere only, index 1, with its absorptance from every \
                 direction of it by the optics of the stack; direct edges with exact Bose–Einstein statistics at the \
                 junction's voltage, tables and tails in the diode form."
            } else {
                "Each junction emits through the front hemisphere only, index 1, with the share it absorbs of light entering \
                 the front; ideal and direct edges with exact Bose–Einstein statistics at the junction's voltage, tables \
                 and tails in the diode form."
            },
            "Emission into the layers below, re-absorption, and all recombination without light: an upper bound.",
            "Shockley and Queisser, J. Appl. Phys. 32, 510 (1961); Rau, Phys. Rev. B 76, 085303 (2007)",
        ));
    }
    if uses(|model| matches!(model, VoltageModel::Ere(_))) {
        notes.push(note(
            "voltage from ere",
            "The radiative dark current divided by the stated external radiative efficiency, at every voltage and \
             temperature.",
            "A second slope of the curve, and the change of the efficiency with current and temperature.",
            "Rau, Phys. Rev. B 76, 085303 (2007)",
        ));
    }
    if uses(|model| matches!(model, VoltageModel::Fit(_))) {
        notes.push(note(
            "voltage from fit",
            "Two diodes as measured; J01 follows T³ exp(−E_g/kT) and J02 T^1.5 exp(−E_g/2kT) from the temperature of \
             the fit; a shunt stays as it is.",
            "What the fit does not hold: light-dependent recombination, breakdown, edges of another size.",
            "Sze and Ng, Physics of Semiconductor Devices (2007), chapter 2",
        ));
    }
    if uses(|model| matches!(model, VoltageModel::Layers)) {
        notes.push(note(
            "voltage from layers",
            "J01 of minority carriers that diffuse in emitter and base with their surface velocities and non-radiative \
             lifetimes; J02 of recombination centres at mid-gap in the field at zero bias; the radiative part by \
             reciprocity with what the junction collects, through the front and into the layers below with their index \
             (where the lowest layer has none, the front only).",
            "The field's weakening under bias, recombination along edges, shunts that are not stated, traps in other \
             places.",
            "Shockley, Bell Syst. Tech. J. 28, 435 (1949); Sah, Noyce and Shockley, Proc. IRE 45, 1228 (1957); Rau, \
             Phys. Rev. B 76, 085303 (2007)",
        ));
        if design.switches.photon_recycling == Some(true) {
            notes.push(note(
                "photon recycling",
                "Of the light a layer makes, the share that it absorbs again itself counts as not lost in its diffusion length.",
                "Light that other layers absorb, and what mirrors send back.",
                "Asbeck, J. Appl. Phys. 48, 820 (1977)",
            ));
        }
        if design.switches.gap_narrowing == Some(true) {
            notes.push(note(
                "gap narrowing",
                "Doping narrows the gap and so raises the minority density in emitter and base; a degenerate majority \
                 lowers it.",
                "The edge of absorption, which stays where the table has it.",
                "Jain and Roulston, Solid-State Electron. 34, 453 (1991); Joyce and Dixon, Appl. Phys. Lett. 31, 354 (1977)",
            ));
        }
    }
    let held = held_at_the_limit(design, lit);
    if !held.is_empty() && uses(|model| matches!(model, VoltageModel::Layers)) {
        let names: Vec<String> = held.iter().map(|name| format!("`{name}`")).collect();
        notes.push(ModelNote {
            name: "voltage from layers: not enough is known".to_owned(),
            does: format!("The radiative limit stands in for the carriers of {}.", names.join(", ")),
            blind_to: "Every loss in its layers: current and voltage shown are upper bounds.".to_owned(),
            cite: "Shockley and Queisser, J. Appl. Phys. 32, 510 (1961)".to_owned(),
        });
    }
    notes
}

fn has(design: &Design, wanted: fn(&Optics) -> bool) -> bool {
    design.lit_layers().any(|(_, layer)| layer.material.as_ref().is_some_and(|m| wanted(&m.optics)))
}

fn note(name: &str, does: &str, blind_to: &str, cite: &str) -> ModelNote {
    ModelNote {
        name: name.to_owned(),
        does: does.to_owned(),
        blind_to: blind_to.to_owned(),
        cite: cite.to_owned(),
    }
}
