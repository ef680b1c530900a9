//! Figures: drawings in SVG, written by our own code so that every label is known to fit.
//!
//! A [`Drawing`] keeps the box of each of its labels, worked out from [`crate::report::width`];
//! tests hold them against each other and against the edges. Coordinates are CSS pixels at full
//! size. Two drawings a wide figure, 840 and 400 units, so that words never shrink.

use std::fmt::Write as _;

use serde::Serialize;
use serde::ser::{SerializeStruct, Serializer};

use crate::report::palette;
use crate::report::text::{Text, escape_html, visible};
use crate::report::view::Table;

pub use label::{Anchor, Label, LabelBox};

pub mod bands;
pub mod chart;
pub mod curves;
pub mod dark;
pub mod eqe;
pub mod gap;
pub mod hatch;
pub mod label;
pub mod ledger;
pub mod light;
pub mod measured;
pub mod plot;
pub mod power;
pub mod section;
pub mod staircase;

/// Units across of a drawing that fills the column.
pub const WIDE: f64 = 840.0;
/// Units across of the same figure on a telephone.
pub const SLIM: f64 = 400.0;

/// One figure of a sheet, with everything that goes with it.
#[derive(Clone, Debug)]
pub struct Figure {
    /// Prefix of its ids, `fig-light-2`; no user's word is in it.
    pub id: String,
    /// What it draws, `light`; the same under every condition.
    pub kind: &'static str,
    /// Index of the condition, where it is not the first.
    pub further: Option<usize>,
    /// `3`, or `3.2` for the same under the second condition; given when all are known.
    pub number: String,
    /// What it shows, in a few words.
    pub title: String,
    /// What can be read from it, for those who do not see it.
    pub desc: String,
    /// Beneath it.
    pub caption: Text,
    /// Its numbers.
    pub data: Table,
    /// The full drawing.
    pub wide: Drawing,
    /// For narrow screens; where it is `None` the full one serves.
    pub slim: Option<Drawing>,
    /// Whether it takes half a column.
    pub half: bool,
    /// `figure-stack.svg`
    pub file: String,
}

impl Figure {
    /// A figure of some kind without its drawings; the sheet numbers it.
    pub fn new(kind: &'static str, title: &str, desc: String) -> Self {
        Self {
            id: format!("fig-{kind}"),
            kind,
            further: None,
            number: String::new(),
            title: title.into(),
            desc: visible(&desc),
            caption: Text::new(),
            data: Table::default(),
            wide: Drawing::new(0.0, 0.0),
            slim: None,
            half: false,
            file: format!("figure-{kind}.svg"),
        }
    }

    /// The full drawing as a file of its own.
    pub fn standalone(&self) -> String {
        self.wide.standalone(self)
    }

    /// One of several of its kind, from 1.
    #[must_use]
    pub fn counted(mut self, nth: usize) -> Self {
        self.id = format!("fig-{}-{nth}", self.kind);
        self.file = format!("figure-{}-{nth}.svg", self.kind);
        self
    }

    /// The same under the condition of that index, small enough to stand two abreast.
    #[must_use]
    pub fn folded(mut self, condition: usize) -> Self {
        self.id = format!("fig-{}-{}", self.kind, condition + 1);
        self.file = format!("figure-{}-{}.svg", self.kind, condition + 1);
        self.further = Some(condition);
        if let Some(slim) = self.slim.take() {
            self.wide = slim;
        }
        self.half = true;
        self
    }

    /// Sets the drawings.
    #[must_use]
    pub fn drawn(mut self, wide: Drawing, slim: Option<Drawing>) -> Self {
        self.wide = wide;
        self.slim = slim;
        self
    }
}

impl Serialize for Figure {
    /// What a template needs: the drawings as SVG elements.
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        let mut map = serializer.serialize_struct("Figure", 10)?;
        map.serialize_field("id", &self.id)?;
        map.serialize_field("number", &self.number)?;
        map.serialize_field("title", &self.title)?;
        map.serialize_field("desc", &Text::of(self.desc.clone()))?;
        map.serialize_field("caption", &self.caption)?;
        map.serialize_field("data", &self.data)?;
        map.serialize_field("half", &self.half)?;
        map.serialize_field("file", &self.file)?;
        let class = match (self.half, &self.slim) {
            (true, _) => "fig half",
            (false, Some(_)) => "fig wide",
            (false, None) => "fig",
        };
        map.serialize_field("wide", &self.wide.element(self, class, ""))?;
        map.serialize_field("slim", &self.slim.as_ref().map(|slim| slim.element(self, "fig slim", "s")))?;
        map.end()
    }
}

/// Both ends of a straight line.
pub type Segment = ((f64, f64), (f64, f64));

/// One drawing.
#[derive(Clone, Debug, Default)]
pub struct Drawing {
    /// Units across.
    pub width: f64,
    /// Units down.
    pub height: f64,
    body: String,
    /// Every label with its place.
    pub labels: Vec<LabelBox>,
}

impl Drawing {
    /// An empty one.
    pub fn new(width: f64, height: f64) -> Self {
        Self { width, height, body: String::new(), labels: Vec::new() }
    }

    /// Adds a label.
    pub fn text(&mut self, label: Label) {
        if label.is_empty() {
            return;
        }
        self.labels.push(label.bounds());
        self.body.push_str(&label.svg());
    }

    /// Adds the first of `labels` that meets no label so far and stays inside; whether one did.
    pub fn text_where_free(&mut self, labels: impl IntoIterator<Item = Label>) -> bool {
        for label in labels {
            let bounds = label.bounds();
            let inside = bounds.left >= 0.0
                && bounds.right <= self.width
                && bounds.top >= 0.0
                // A drawing that still grows downwards has no height yet.
                && (self.height == 0.0 || bounds.bottom <= self.height);
            if inside && !self.labels.iter().any(|other| other.meets(&bounds, 4.0)) {
                self.text(label);
                return true;
            }
        }
        false
    }

    /// A filled rectangle; its upper left corner, width, height.
    pub fn rect(&mut self, class: &str, at: (f64, f64), size: (f64, f64)) {
        let _ = writeln!(
            self.body,
            "<rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" class=\"{class}\"/>",
            unit(at.0),
            unit(at.1),
            unit(size.0.max(0.0)),
            unit(size.1.max(0.0))
        );
    }

    /// A straight line.
    pub fn line(&mut self, class: &str, from: (f64, f64), to: (f64, f64)) {
        let _ = writeln!(
            self.body,
            "<line x1=\"{}\" y1=\"{}\" x2=\"{}\" y2=\"{}\" class=\"{class}\"/>",
            unit(from.0),
            unit(from.1),
            unit(to.0),
            unit(to.1)
        );
    }

    /// Straight lines of one class in one element.
    pub fn lines(&mut self, class: &str, segments: &[Segment]) {
        self.path(class, &hatch::path(segments));
    }

    /// An open line through points.
    pub fn polyline(&mut self, class: &str, points: &[(f64, f64)]) {
        if points.len() > 1 {
            let _ = writeln!(self.body, "<polyline class=\"{class}\" points=\"{}\"/>", coordinates(points));
        }
    }

    /// A closed area.
    pub fn polygon(&mut self, class: &str, points: &[(f64, f64)]) {
        if points.len() > 2 {
            let _ = writeln!(self.body, "<polygon class=\"{class}\" points=\"{}\"/>", coordinates(points));
        }
    }

    /// A path; nothing where `data` is empty.
    pub fn path(&mut self, class: &str, data: &str) {
        if !data.is_empty() {
            let _ = writeln!(self.body, "<path class=\"{class}\" d=\"{data}\"/>");
        }
    }

    /// Where the next element would go, for [`Self::path_under`].
    pub fn mark(&self) -> usize {
        self.body.len()
    }

    /// A path beneath everything added since `mark`.
    pub fn path_under(&mut self, mark: usize, class: &str, data: &str) {
        if !data.is_empty() && self.body.is_char_boundary(mark) {
            self.body.insert_str(mark, &format!("<path class=\"{class}\" d=\"{data}\"/>\n"));
        }
    }

    /// A dot.
    pub fn dot(&mut self, class: &str, at: (f64, f64), radius: f64) {
        let _ = writeln!(
            self.body,
            "<circle cx=\"{}\" cy=\"{}\" r=\"{}\" class=\"{class}\"/>",
            unit(at.0),
            unit(at.1),
            unit(radius)
        );
    }

    /// As an element of a page, with its own title and description. `suffix` keeps the ids of two
    /// drawings of one figure apart.
    fn element(&self, figure: &Figure, class: &str, suffix: &str) -> String {
        let id = format!("{}{suffix}", figure.id);
        format!(
            "<svg class=\"{class}\" viewBox=\"0 0 {} {}\" role=\"img\" aria-labelledby=\"{id}-t {id}-d\" xmlns=\"http://www.w3.org/2000/svg\">\n\
             <title id=\"{id}-t\">{}</title>\n<desc id=\"{id}-d\">{}</desc>\n{}</svg>",
            unit(self.width),
            unit(self.height),
            escape_html(&figure.title),
            escape_html(&figure.desc),
            self.body
        )
    }

    /// As decoration: no name, not read out.
    pub fn decoration(&self, class: &str) -> String {
        format!(
            "<svg class=\"{class}\" viewBox=\"0 0 {} {}\" preserveAspectRatio=\"none\" aria-hidden=\"true\" focusable=\"false\" xmlns=\"http://www.w3.org/2000/svg\">\n{}</svg>",
            unit(self.width),
            unit(self.height),
            self.body
        )
    }

    /// As a file: with the classes it uses and a ground of its own, since nobody knows what it
    /// will be laid on.
    fn standalone(&self, figure: &Figure) -> String {
        let margin = 10.0;
        let (w, h) = (self.width + 2.0 * margin, self.height + 2.0 * margin);
        let ground = format!(
            "<rect x=\"-{margin}\" y=\"-{margin}\" width=\"{}\" height=\"{}\" class=\"paper\"/>\n",
            unit(w),
            unit(h)
        );
        let body = format!("{ground}{}", self.body);
        format!(
            "<svg class=\"fig\" viewBox=\"-{margin} -{margin} {w} {h}\" width=\"{w}\" height=\"{h}\" role=\"img\" aria-labelledby=\"{id}-t {id}-d\" xmlns=\"http://www.w3.org/2000/svg\">\n\
             <title id=\"{id}-t\">{}</title>\n<desc id=\"{id}-d\">{}</desc>\n<style>\n{}</style>\n{body}</svg>\n",
            escape_html(&figure.title),
            escape_html(&figure.desc),
            palette::figure_css(Some(&body)),
            w = unit(w),
            h = unit(h),
            id = figure.id,
        )
    }
}

/// A coordinate: one decimal, no sign on zero. What is not finite becomes 0; evaluation rules it
/// out, and a broken coordinate must not reach a file.
pub fn unit(value: f64) -> String {
    let tenths = if value.is_finite() { (value * 10.0).round() } else { 0.0 };
    let tenths = if tenths == 0.0 { 0.0 } else { tenths };
    format!("{}", tenths / 10.0)
}

/// Eight points a line, so that a change shows as a few lines of a diff.
fn coordinates(points: &[(f64, f64)]) -> String {
    let mut out = String::new();
    for (index, (x, y)) in points.iter().enumerate() {
        if index > 0 {
            out.push(if index % 8 == 0 { '\n' } else { ' ' });
        }
        let _ = write!(out, "{},{}", unit(*x), unit(*y));
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn coordinates_are_short_and_finite() {
        assert_eq!(unit(-0.01), "0");
        assert_eq!(unit(12.34), "12.3");
        assert_eq!(unit(f64::NAN), "0");
    }

    #[test]
    fn a_label_finds_the_first_free_place() {
        let mut drawing = Drawing::new(200.0, 40.0);
        drawing.text(Label::at(0.0, 12.0, "taken"));
        assert!(drawing.text_where_free([Label::at(10.0, 14.0, "meets"), Label::at(100.0, 12.0, "free")]));
        assert_eq!(drawing.labels[1].words, "free");
        assert!(!drawing.text_where_free([Label::at(190.0, 12.0, "over the edge")]));
    }
}
