//! What every part of a sheet looks at: the input, joined row by row.

use crate::design::{Condition, Design, Duty, Extent, InterconnectKind, Layer, Place, Polarity, Terminals};
use crate::report::ReportInput;
use crate::report::figure::hatch::Hatch;
use crate::report::number::CurrentScale;
use crate::report::palette::style_number;
use crate::report::text::visible;
use crate::results::{ConditionResult, LayerLight, LayerResult, Results};

/// The input and the condition that is drawn: the first, unless [`Context::under`] says otherwise.
#[derive(Clone, Copy, Debug)]
pub struct Context<'a> {
    /// All of it.
    pub input: &'a ReportInput<'a>,
    /// What the stack means.
    pub design: &'a Design,
    /// What came out.
    pub results: &'a Results,
    /// The condition that is drawn.
    pub drawn: &'a ConditionResult,
    /// Its index in [`Results::conditions`].
    pub index: usize,
    /// Its current densities share one scale.
    pub scale: CurrentScale,
}

impl<'a> Context<'a> {
    /// `None` where no condition was evaluated: then there is nothing to put on a sheet.
    pub fn new(input: &'a ReportInput<'a>) -> Option<Self> {
        let drawn = input.results.conditions.first()?;
        let (design, results) = (input.design, input.results);
        Some(Self { input, design, results, drawn, index: 0, scale: scale_of(drawn) })
    }

    /// The same under another condition; as it is where there is no such condition.
    #[must_use]
    pub fn under(&self, index: usize) -> Self {
        match self.results.conditions.get(index) {
            Some(drawn) => Self { drawn, index, scale: scale_of(drawn), ..*self },
            None => *self,
        }
    }

    /// Every layer with what came out for it, sunward first, numbered from 1.
    pub fn layers(&self) -> impl Iterator<Item = Row<'a>> {
        let light = &self.drawn.layers;
        self.design.layers.iter().zip(&self.results.layers).enumerate().map(|(index, (layer, result))| Row {
            index,
            layer,
            result,
            light: light.get(index),
        })
    }

    /// Whether each junction has terminals of its own.
    pub fn separate(&self) -> bool {
        self.drawn.voc_v.is_none() || self.design.terminals != Terminals::Two
    }

    /// The condition of the design behind a result.
    pub fn condition(&self, result: &ConditionResult) -> Option<&'a Condition> {
        self.design.conditions.iter().find(|condition| condition.name == result.name)
    }

    /// The index of a junction by name.
    pub fn junction_index(&self, name: &str) -> usize {
        self.drawn.junctions.iter().position(|j| j.name == name).unwrap_or(0)
    }

    /// The limiting junction's index, where one limits.
    pub fn limiting(&self) -> Option<usize> {
        let name = self.drawn.limiting_junction.as_ref()?;
        self.drawn.junctions.iter().position(|j| j.name == *name)
    }

    /// The share of the area under the fingers.
    pub fn shading(&self) -> f64 {
        self.design.fingers.as_ref().map_or(0.0, |fingers| fingers.shading)
    }
}

fn scale_of(condition: &ConditionResult) -> CurrentScale {
    let largest = condition.junctions.iter().map(|j| j.photocurrent_ma_per_cm2).fold(0.0, f64::max);
    CurrentScale::for_largest(largest)
}

/// `under noon`; a stack's own condition has no name of the user's.
pub fn under(condition: &ConditionResult) -> String {
    if condition.name == "stated" {
        "under the stated condition".into()
    } else {
        format!("under {}", visible(&condition.name))
    }
}

/// One layer: as designed, as resolved, and in the light of the condition that is drawn.
#[derive(Clone, Copy, Debug)]
pub struct Row<'a> {
    /// In [`Design::layers`].
    pub index: usize,
    /// As designed.
    pub layer: &'a Layer,
    /// As resolved.
    pub result: &'a LayerResult,
    /// What it does with light.
    pub light: Option<&'a LayerLight>,
}

impl<'a> Row<'a> {
    /// The number it has on the whole sheet.
    pub fn number(&self) -> usize {
        self.index + 1
    }

    /// Its material as shown.
    pub fn material(&self) -> &'a str {
        &self.result.material
    }

    /// The current it makes, mA/cm2; 0 where it makes none.
    pub fn collected(&self) -> f64 {
        self.light.map_or(0.0, |light| light.collected_ma_per_cm2)
    }

    /// Whether it makes current: drawn solid.
    pub fn makes_current(&self) -> bool {
        matches!(self.layer.place, Place::Junction(_)) && (self.layer.collects() || self.collected() > 0.0)
    }

    /// The junction it belongs to.
    pub fn junction(&self) -> Option<usize> {
        match self.layer.place {
            Place::Junction(index) => Some(index),
            _ => None,
        }
    }

    /// What it is called on the sheet: the trade's word, `tunnel` between junctions.
    pub fn duty(&self, design: &Design) -> &'static str {
        if let Place::Interconnect(index) = self.layer.place {
            return match design.interconnects.get(index).map(|interconnect| interconnect.kind) {
                Some(InterconnectKind::Recombination) => "recombination",
                _ => "tunnel",
            };
        }
        duty_word(self.layer.duty)
    }

    /// How it is drawn.
    pub fn style(&self) -> Style {
        if self.makes_current() {
            let n = self.junction().map_or(1, style_number);
            let hatch = match self.layer.duty {
                Duty::Emitter => Some((format!("g{n}"), Hatch::Lines(0.0, 4.0))),
                Duty::Intrinsic => Some((format!("g{n}"), Hatch::Lines(90.0, 9.0))),
                _ => None,
            };
            return Style { class: format!("f{n}"), hatch, key: None };
        }
        let polarity = self.layer.doping.as_ref().map(|doping| doping.polarity);
        if matches!(self.layer.place, Place::Interconnect(_)) {
            return match polarity {
                Some(Polarity::P) => Style::hatched(Hatch::Lines(-45.0, 5.0), "tunnel p"),
                Some(Polarity::N) => Style::hatched(Hatch::Lines(45.0, 5.0), "tunnel n"),
                None => Style::hatched(Hatch::Cross(7.0), "between junctions"),
            };
        }
        match self.layer.duty {
            Duty::Metal => Style { class: "fm".into(), hatch: None, key: None },
            Duty::Mirror => Style::hatched(Hatch::Lines(0.0, 2.4), "mirror"),
            Duty::Air => Style { class: "lay".into(), hatch: None, key: None },
            // Neighbouring coats differ in the distance of their dots.
            Duty::Coat => {
                let distance = if self.index.is_multiple_of(2) { 5.4 } else { 8.0 };
                Style {
                    hatch: Some(("hd".into(), Hatch::Dots(distance))),
                    ..Style::hatched(Hatch::Dots(8.0), "coat")
                }
            }
            Duty::Window => Style::hatched(Hatch::Lines(0.0, 4.0), "window"),
            Duty::Bsf => Style::hatched(Hatch::Lines(90.0, 4.0), "BSF"),
            Duty::Cap => Style::hatched(Hatch::Cross(6.0), "cap"),
            Duty::Wafer => Style::hatched(Hatch::Dashes(7.0), "wafer"),
            Duty::Buffer => Style::hatched(Hatch::Lines(-20.0, 5.0), "buffer"),
            Duty::Cover | Duty::Adhesive => Style::hatched(Hatch::Lines(-65.0, 11.0), "cover, adhesive"),
            Duty::Handle => Style::hatched(Hatch::Dashes(10.0), "handle"),
            Duty::Contact | Duty::ElectronContact | Duty::HoleContact => {
                Style::hatched(Hatch::Lines(90.0, 7.0), "contact")
            }
            Duty::Passivation => Style::hatched(Hatch::Lines(0.0, 6.0), "passivation"),
            Duty::EtchStop => Style::hatched(Hatch::Cross(4.0), "etch stop"),
            _ => Style::hatched(Hatch::Lines(20.0, 6.0), "other layer"),
        }
    }

    /// Whether it stands in the finished cell over the whole area.
    pub fn is_lit(&self) -> bool {
        self.layer.extent == Extent::Everywhere
    }
}

/// How an area is filled.
#[derive(Clone, Debug, PartialEq)]
pub struct Style {
    /// Class of the area.
    pub class: String,
    /// Class and kind of the strokes on it.
    pub hatch: Option<(String, Hatch)>,
    /// Its words in the key; `None` where it needs none.
    pub key: Option<&'static str>,
}

impl Style {
    /// Strokes on the ground.
    pub fn hatched(hatch: Hatch, key: &'static str) -> Self {
        Self { class: "lay".into(), hatch: Some(("h".into(), hatch)), key: Some(key) }
    }
}

/// The trade's word.
pub fn duty_word(duty: Duty) -> &'static str {
    match duty {
        Duty::Bsf => "BSF",
        Duty::EtchStop => "etch stop",
        Duty::ElectronContact => "electron contact",
        Duty::HoleContact => "hole contact",
        other => other.word(),
    }
}
