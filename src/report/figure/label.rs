//! Words on a drawing, and the ground they need.

use std::fmt::Write as _;

use crate::report::figure::unit;
use crate::report::palette;
use crate::report::text::{escape_html, formula, visible};
use crate::report::width::width;

/// Where a label begins.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Anchor {
    /// At its left end.
    Start,
    /// At its middle.
    Middle,
    /// At its right end.
    End,
}

/// Words on a drawing.
#[derive(Clone, Debug)]
pub struct Label {
    x: f64,
    y: f64,
    /// Words, whether bold, whether lowered.
    runs: Vec<(String, bool, bool)>,
    class: &'static str,
    junction: Option<(&'static str, usize)>,
    size: f64,
    bold: bool,
    anchor: Anchor,
    halo: bool,
}

impl Label {
    /// Words whose baseline begins at `x`, `y`.
    pub fn at(x: f64, y: f64, words: &str) -> Self {
        Self {
            x,
            y,
            runs: vec![(visible(words), false, false)],
            class: "",
            junction: None,
            size: 12.5,
            bold: false,
            anchor: Anchor::Start,
            halo: false,
        }
    }

    /// A material's label with its fractions lowered.
    pub fn material(x: f64, y: f64, label: &str) -> Self {
        let mut out = Self::at(x, y, "");
        out.runs = formula(&visible(label)).into_iter().map(|(low, piece)| (piece, false, low)).collect();
        out
    }

    /// Adds bold words.
    #[must_use]
    pub fn strong(mut self, words: &str) -> Self {
        self.runs.push((visible(words), true, false));
        self
    }

    /// Adds a lowered index.
    #[must_use]
    pub fn lowered(mut self, words: &str) -> Self {
        self.runs.push((visible(words), false, true));
        self
    }

    /// Adds plain words.
    #[must_use]
    pub fn and(mut self, words: &str) -> Self {
        self.runs.push((visible(words), false, false));
        self
    }

    /// A colour class: `q`, `bad`, `od`.
    #[must_use]
    pub fn class(mut self, class: &'static str) -> Self {
        self.class = class;
        self
    }

    /// In the colour of a junction: `i` on the ground, `o` on its area.
    #[must_use]
    pub fn junction(mut self, kind: &'static str, junction: usize) -> Self {
        self.junction = Some((kind, palette::style_number(junction)));
        self
    }

    /// One of the sizes 11.5, 12.5, 15, 24, 31; the two large ones are bold.
    #[must_use]
    pub fn size(mut self, size: f64) -> Self {
        self.size = size;
        self.bold |= size > 20.0;
        self
    }

    /// All of it bold.
    #[must_use]
    pub fn bold(mut self) -> Self {
        self.bold = true;
        self
    }

    /// Which end `x` is.
    #[must_use]
    pub fn anchor(mut self, anchor: Anchor) -> Self {
        self.anchor = anchor;
        self
    }

    /// `x` is its right end.
    #[must_use]
    pub fn end(self) -> Self {
        self.anchor(Anchor::End)
    }

    /// `x` is its middle.
    #[must_use]
    pub fn middle(self) -> Self {
        self.anchor(Anchor::Middle)
    }

    /// A rim in the colour of the ground, where curves may run behind.
    #[must_use]
    pub fn halo(mut self) -> Self {
        self.halo = true;
        self
    }

    /// The same words somewhere else.
    #[must_use]
    pub fn moved(self, x: f64, y: f64) -> Self {
        Self { x, y, ..self }
    }

    /// Whether there are no words.
    pub fn is_empty(&self) -> bool {
        self.runs.iter().all(|(words, _, _)| words.is_empty())
    }

    /// How wide it is at most.
    pub fn width(&self) -> f64 {
        self.runs
            .iter()
            .map(|(words, bold, low)| width(words, if *low { 9.5 } else { self.size }, *bold || self.bold))
            .sum()
    }

    /// The box it needs.
    pub fn bounds(&self) -> LabelBox {
        let w = self.width();
        let left = match self.anchor {
            Anchor::Start => self.x,
            Anchor::Middle => self.x - w / 2.0,
            Anchor::End => self.x - w,
        };
        let low = if self.runs.iter().any(|(_, _, low)| *low) { 0.36 } else { 0.24 };
        LabelBox {
            words: self.runs.iter().map(|(words, _, _)| words.as_str()).collect(),
            left,
            right: left + w,
            top: self.y - 0.8 * self.size,
            bottom: self.y + low * self.size,
        }
    }

    fn classes(&self) -> String {
        let mut classes: Vec<String> = Vec::new();
        let mut add = |class: &str| classes.push(class.to_string());
        match self.size {
            x if x < 12.0 => add("s"),
            x if x > 30.0 => add("huge"),
            x if x > 20.0 => add("big"),
            x if x > 14.0 => add("mid"),
            _ => {}
        }
        if !self.class.is_empty() {
            add(self.class);
        }
        if let Some((kind, number)) = self.junction {
            add(&format!("{kind}{number}"));
        }
        if self.bold && self.size < 20.0 {
            add("b");
        }
        match self.anchor {
            Anchor::Start => {}
            Anchor::Middle => add("m"),
            Anchor::End => add("e"),
        }
        if self.halo {
            add("halo");
        }
        classes.join(" ")
    }

    /// As an element.
    pub(super) fn svg(&self) -> String {
        let mut inner = String::new();
        let mut lowered = false;
        for (words, bold, low) in &self.runs {
            let words = escape_html(words);
            let shift = match (lowered, *low) {
                (false, true) => " dy=\"3\"",
                (true, false) => " dy=\"-3\"",
                _ => "",
            };
            lowered = *low;
            match (*low, *bold) {
                (true, _) => {
                    let _ = write!(inner, "<tspan class=\"sub\"{shift}>{words}</tspan>");
                }
                (false, true) => {
                    let _ = write!(inner, "<tspan class=\"b\"{shift}>{words}</tspan>");
                }
                (false, false) if !shift.is_empty() => {
                    let _ = write!(inner, "<tspan{shift}>{words}</tspan>");
                }
                (false, false) => inner.push_str(&words),
            }
        }
        let classes = self.classes();
        let class = if classes.is_empty() { String::new() } else { format!(" class=\"{classes}\"") };
        format!("<text x=\"{}\" y=\"{}\"{class}>{inner}</text>\n", unit(self.x), unit(self.y))
    }
}

/// The place of one label.
#[derive(Clone, Debug, PartialEq)]
pub struct LabelBox {
    /// What it says.
    pub words: String,
    /// Left edge.
    pub left: f64,
    /// Right edge.
    pub right: f64,
    /// Upper edge.
    pub top: f64,
    /// Lower edge.
    pub bottom: f64,
}

impl LabelBox {
    /// Whether two boxes share ground, with `gap` kept free between them sideways.
    pub fn meets(&self, other: &Self, gap: f64) -> bool {
        self.left < other.right + gap
            && other.left < self.right + gap
            && self.top < other.bottom
            && other.top < self.bottom
    }
}
