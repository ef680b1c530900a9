//! `index` groups of materials: a table, a constant or a published law.

use std::sync::Arc;

use crate::finding::Finding;
use crate::materials::optics::{IndexTable, Optics};
use crate::materials::table;
use crate::materials::{Bands, ROOM_TEMPERATURE_K};
use crate::resolve::materials::blocks::Reader;
use crate::resolve::materials::values::{Arguments, Kind, quantity, single};
use crate::source::Spanned;
use crate::syntax::Property;

/// What gives n and k.
const LAWS: &[&str] = &["table", "constant", "sellmeier", "cauchy"];

const WORDS: &[&str] = &["table", "constant", "sellmeier", "cauchy", "range", "edge", "at", "n"];

impl Reader<'_> {
    /// The optics of a material with these bands.
    ///
    /// The edge of a table moves with the gap: from the gap the law gives at the temperature the
    /// table holds at (`at 300 K` unless stated), or from a stated `edge 1.88 eV`.
    pub(super) fn index(&mut self, group: &Property, bands: Option<&Bands>) -> Optics {
        let (mut table, mut edge, mut at_k, mut range) = (None, None, ROOM_TEMPERATURE_K, None);
        let (mut file, mut n, mut rows): (Option<&Spanned<String>>, _, _) = (None, None, Vec::new());
        let mut stated: Option<&Property> = None;
        for property in self.inside(group) {
            if LAWS.contains(&property.name.value.as_str()) {
                if let Some(first) = stated {
                    let (one, other) = (&first.name.value, &property.name.value);
                    self.scope.report(
                        Finding::error(
                            "material.statement",
                            format!("`{one}` and `{other}` both state the index"),
                        )
                        .at(property.span, "one too many")
                        .beside(first.span, "stated here already")
                        .help("keep one of them"),
                    );
                    continue;
                }
                stated = Some(property);
            }
            match property.name.value.as_str() {
                "table" => {
                    let mut arguments = Arguments::of(property);
                    file = arguments.text();
                    if file.is_none() {
                        self.no_file(property.span);
                    }
                    arguments.end(self.scope);
                }
                "constant" => table = self.constant_index(property),
                "sellmeier" => table = self.sellmeier(property),
                "cauchy" => table = self.cauchy(property),
                "range" => range = self.range(property),
                "edge" => edge = single(property, Kind::GAP, self.scope),
                "n" => {
                    n = single(property, Kind::NOT_NEGATIVE, self.scope).map(|value| (value, property.span))
                }
                "at" => at_k = single(property, Kind::KELVIN, self.scope).unwrap_or(at_k),
                "cite" => {}
                _ => self.unknown_in("index", property, WORDS),
            }
        }
        self.origin(group, "index");
        if let Some(file) = file {
            if let Some(own) = self.table_beside(file, n.map(|(value, _)| value)) {
                (table, rows) = (Some(own.0), own.1);
            }
        } else if let Some((_, span)) = n {
            self.n_alone(span);
        }
        let Some(mut table) = table else {
            // What is stated and wrong was reported where it stands.
            if stated.is_none() && n.is_none() {
                self.nothing_said(group);
            }
            return Optics::None;
        };
        if let Some(file) = file {
            let gap = edge.or_else(|| bands.and_then(|bands| bands.gap(at_k)).map(|gap| gap.ev));
            self.doubts(file, &table, (gap, &rows));
        }
        if let Some((low, high)) = range {
            table.clip(low, high);
        }
        table.edge_is_direct = edge.is_some() || bands.is_some_and(|bands| bands.gamma.is_some());
        table.gap_ev = edge.or_else(|| {
            let bands = bands?;
            let gamma = bands.gamma.as_ref().map(|gamma| gamma.at(at_k));
            gamma.or_else(|| bands.gap(at_k).map(|gap| gap.ev))
        });
        Optics::Table(Arc::new(table))
    }

    /// `range 310 .. 5504 nm`: where a law was fitted, m.
    fn range(&mut self, property: &Property) -> Option<(f64, f64)> {
        let value = Arguments::of(property).value()?;
        let slot = self.scope.slot(&value, Kind::METRE.expected("range"));
        slot.value.zip(slot.up_to)
    }

    fn nothing_said(&mut self, group: &Property) {
        if group.block.is_some() {
            self.scope.report(
                Finding::error("material.incomplete", "`index` states no index")
                    .at(group.name.span, "no table, constant or law")
                    .help("state one, such as `constant 1.9` or `table \"film.csv\"`"),
            );
        }
    }

    /// `constant 1.9`, `constant 1.9 0.001`: n and k at every wavelength.
    fn constant_index(&mut self, property: &Property) -> Option<IndexTable> {
        let mut arguments = Arguments::of(property);
        let n = quantity(&mut arguments, "constant", Kind::NOT_NEGATIVE, self.scope)?;
        let k = if arguments.has_more() {
            quantity(&mut arguments, "constant", Kind::NOT_NEGATIVE, self.scope)?
        } else {
            0.0
        };
        arguments.end(self.scope);
        // From the vacuum ultraviolet to the far infrared: a constant has no range.
        Some(table::of_law(|_| (n, k), &[100.0, 1e6]))
    }

    /// `sellmeier 0.4876 0.0434 um  0.3988 0.0946 um …`: `n² = 1 + Σ B λ²/(λ² − λ0²)`.
    fn sellmeier(&mut self, property: &Property) -> Option<IndexTable> {
        let mut arguments = Arguments::of(property);
        let mut terms = Vec::new();
        while arguments.has_more() {
            let strength = quantity(&mut arguments, "sellmeier", Kind::PLAIN, self.scope)?;
            let resonance = quantity(&mut arguments, "sellmeier", Kind::METRE, self.scope)?;
            terms.push((strength, resonance * 1e9));
        }
        let law = |nm: f64| {
            let squared = 1.0 + terms.iter().map(|(b, at)| b * nm * nm / (nm * nm - at * at)).sum::<f64>();
            (squared.sqrt(), 0.0)
        };
        self.law(property, law)
    }

    /// `cauchy 1.38 0.0032 um2`: `n = A + B/λ²`, and `C/λ⁴` where a third is given.
    fn cauchy(&mut self, property: &Property) -> Option<IndexTable> {
        let mut arguments = Arguments::of(property);
        let constant = quantity(&mut arguments, "cauchy", Kind::PLAIN, self.scope)?;
        let mut second = 0.0;
        if arguments.has_more() {
            second = quantity(&mut arguments, "cauchy", Kind::SQUARE_METRE, self.scope)? * 1e18;
        }
        arguments.end(self.scope);
        self.law(property, |nm| (constant + second / (nm * nm), 0.0))
    }

    fn law(&mut self, property: &Property, law: impl Fn(f64) -> (f64, f64)) -> Option<IndexTable> {
        let table = table::of_law(law, &table::law_grid());
        if table.n.iter().all(|n| n.is_finite() && *n > 0.0) {
            return Some(table);
        }
        let name = &property.name.value;
        self.scope.report(
            Finding::error("material.table", format!("`{name}` gives no index between 250 and 2500 nm"))
                .at(property.span, "a resonance lies inside, or n² falls below 0")
                .help("check the coefficients, or state a table"),
        );
        None
    }
}
