//! `index` groups of alloys: tables at some compositions, or one parent table that is moved.

use std::sync::Arc;

use crate::finding::Finding;
use crate::materials::ROOM_TEMPERATURE_K;
use crate::materials::alloy::blend::{Blend, EdgeForm, End, Sample, Shifted, Tail};
use crate::materials::alloy::transparent::Transparent;
use crate::materials::alloy::{Composition, Compound, Family, FamilyIndex};
use crate::materials::optics::{IndexTable, Optics};
use crate::resolve::materials::blocks::Reader;
use crate::resolve::materials::values::{Arguments, Kind, quantity, single};
use crate::source::Spanned;
use crate::syntax::Property;
use crate::units::{Dimension, ELEMENTARY_CHARGE};

/// `C` in `α = C (E − E_X)²`, kept in 1/m/eV².
fn indirect_kind() -> Kind {
    let per_square_energy = Dimension::PER_LENGTH / (Dimension::ENERGY * Dimension::ENERGY);
    Kind::of(per_square_energy, 1.0 / (ELEMENTARY_CHARGE * ELEMENTARY_CHARGE), "2e4 /cm/eV2")
}

impl Reader<'_> {
    pub(super) fn family_index(&mut self, group: &Property, family: &Family) -> FamilyIndex {
        let (mut samples, mut parent) = (Vec::new(), None);
        let mut tail = Tail { urbach_ev: 0.01, indirect_per_m_ev2: 0.0, form: None };
        let (mut along, mut moves_ev, mut scale) = (None, [(0.0, 0.0); 2], (0.0, 0.0));
        let mut end = None;
        for property in self.inside(group) {
            match property.name.value.as_str() {
                "sample" => samples.extend(self.sample(property, family)),
                "samples" => samples.extend(self.member_samples(property, family)),
                "parent" => parent = self.parent(property),
                "along" => along = self.along(property),
                "end" => end = self.end(property, family),
                "move_e1" => moves_ev[0] = self.pair(property, Kind::ENERGY).unwrap_or_default(),
                "move_e2" => moves_ev[1] = self.pair(property, Kind::ENERGY).unwrap_or_default(),
                "scale" => scale = self.pair(property, Kind::PLAIN).unwrap_or_default(),
                "urbach" => tail.urbach_ev = single(property, Kind::GAP, self.scope).unwrap_or(0.01),
                "indirect" => {
                    tail.indirect_per_m_ev2 = single(property, indirect_kind(), self.scope).unwrap_or(0.0);
                }
                "edge_form" => tail.form = self.edge_form(property, family),
                "cite" => {}
                _ => {
                    let known = [
                        "sample",
                        "samples",
                        "parent",
                        "along",
                        "move_e1",
                        "move_e2",
                        "scale",
                        "end",
                        "urbach",
                        "indirect",
                        "edge_form",
                    ];
                    self.unknown_in("index", property, &known);
                }
            }
        }
        self.origin(group, "index");
        if let (Some((table, parent_ev)), Some(along)) = (parent, along) {
            return FamilyIndex::Shifted(Shifted { table, parent_ev, along, moves_ev, scale, end, tail });
        }
        if samples.is_empty() {
            return FamilyIndex::None;
        }
        if family.freedom() == 1 {
            let site = usize::from(family.sites[0].len() == 1);
            samples.sort_by(|a, b| a.composition[site][0].total_cmp(&b.composition[site][0]));
        }
        FamilyIndex::Blend(Blend { samples, tail })
    }

    /// Sublattice and place of an element that one fraction of a family mixes with another.
    pub(super) fn mixed(&mut self, element: &Spanned<String>, family: &Family) -> Option<(usize, usize)> {
        let position = family.position(&element.value);
        let position = position.filter(|(site, _)| family.freedom() == 1 && family.sites[*site].len() == 2);
        if position.is_none() {
            self.scope.report(
                Finding::error(
                    "material.statement",
                    format!("`{}` is not mixed in this alloy", element.value),
                )
                .at(element.span, "one of the two mixed elements is due")
                .help(format!("name an element of `{}`", family.name)),
            );
        }
        position
    }

    /// `sample Al 0.198 "AlGaAs_198.csv" { gap 1.7 eV; e1 3.1 eV; e2 4.7 eV }`, or
    /// `sample Ga 1 GaP` for a material with a table and critical points of its own, or with the
    /// points of this family: `sample Si 0 Ge { gap 0.66 eV; e1 2.33 eV; e2 4.25 eV }`.
    fn sample(&mut self, property: &Property, family: &Family) -> Option<Sample> {
        let mut arguments = Arguments::of(property);
        let element = arguments.word()?;
        let fraction = quantity(&mut arguments, "sample", Kind::FRACTION, self.scope)?;
        let (site, at) = self.mixed(element, family)?;
        let mut composition = family.corner();
        composition[site] = vec![1.0 - fraction; 2];
        composition[site][at] = fraction;
        if let Some(name) = arguments.word() {
            let member = self.member(name)?;
            let sample = self.sample_of(&member, composition, property.block.is_none());
            if property.block.is_none() {
                return sample;
            }
            let (e0_ev, critical_ev) = self.points(property)?;
            return sample.map(|sample| Sample { e0_ev, critical_ev, ..sample });
        }
        let file = arguments.text()?;
        let mut table = self.table(file)?;
        let (e0_ev, critical_ev) = self.points(property)?;
        // Below its gap a table is read logarithmically.
        let bands = family.bands(&composition);
        let direct = bands.gamma.as_ref().map(|gamma| gamma.at(ROOM_TEMPERATURE_K));
        let lowest = bands.gap(ROOM_TEMPERATURE_K).map(|gap| gap.ev);
        table.gap_ev = e0_ev.or(direct).or(lowest);
        Some(Sample { composition, table: Arc::new(table), e0_ev, critical_ev, transparent: None })
    }

    /// `samples members`: the tables of all end members.
    fn member_samples(&mut self, property: &Property, family: &Family) -> Vec<Sample> {
        let mut arguments = Arguments::of(property);
        arguments.keyword("members");
        arguments.end(self.scope);
        let corner = |len: usize, at: usize| {
            let mut fractions = vec![0.0; len];
            if let Some(own) = fractions.get_mut(at) {
                *own = 1.0;
            }
            fractions
        };
        let mut samples = Vec::new();
        for (row, members) in family.members.iter().enumerate() {
            for (column, member) in members.iter().enumerate() {
                let composition = [corner(family.sites[0].len(), row), corner(family.sites[1].len(), column)];
                samples.extend(self.sample_of(member, composition, true));
            }
        }
        samples
    }

    /// The table of an end member, with its own critical points where `needs_points`.
    fn sample_of(
        &mut self,
        member: &Compound,
        composition: Composition,
        needs_points: bool,
    ) -> Option<Sample> {
        let material = &member.material;
        let critical_ev = member.critical_ev.or((!needs_points).then_some((0.0, 0.0)));
        if let (Optics::Table(table), Some(critical_ev)) = (&material.optics, critical_ev) {
            let e0_ev = table.gap_ev;
            let transparent = Transparent::of(&material.constants);
            return Some(Sample { composition, table: table.clone(), e0_ev, critical_ev, transparent });
        }
        self.scope.report(Finding::error(
            "material.incomplete",
            format!("`{}` has no index table with critical points to blend", material.name),
        ));
        None
    }

    /// `parent "GaInP.csv" { gap 1.88 eV; e1 3.40 eV; e2 4.80 eV }`
    fn parent(&mut self, property: &Property) -> Option<(Arc<IndexTable>, [f64; 3])> {
        let file = Arguments::of(property).text()?;
        let mut table = self.table(file)?;
        let (e0, (e1, e2)) = self.points(property)?;
        table.gap_ev = e0;
        Some((Arc::new(table), [e0?, e1, e2]))
    }

    /// The critical points of a sample: its gap where stated, E1 and E2.
    fn points(&mut self, property: &Property) -> Option<(Option<f64>, (f64, f64))> {
        let mut points = [None; 3];
        let words = ["gap", "e1", "e2"];
        for inner in self.inside(property) {
            match words.iter().position(|word| *word == inner.name.value) {
                Some(at) => points[at] = single(inner, Kind::GAP, self.scope),
                None => self.unknown_in("sample", inner, &words),
            }
        }
        let [gap, e1, e2] = points;
        if let (Some(e1), Some(e2)) = (e1, e2) {
            if gap.unwrap_or(0.0) < e1 && e1 < e2 {
                return Some((gap, (e1, e2)));
            }
            self.scope.report(
                Finding::error("material.statement", "critical points rise from the gap to `e1` to `e2`")
                    .at(property.span, "out of order")
                    .help("check them against the maxima of the absorption, such as `{ gap 1.88 eV; e1 3.40 eV; e2 4.80 eV }`"),
            );
            return None;
        }
        self.scope.report(
            Finding::error("material.incomplete", "a sample needs its critical points `e1` and `e2`")
                .at(property.span, "not both can be read")
                .help("add them, such as `{ e1 3.40 eV; e2 4.80 eV }`"),
        );
        None
    }

    /// `along Al of Ga`: aluminium as a share of aluminium and gallium.
    fn along(&mut self, property: &Property) -> Option<[String; 2]> {
        let mut arguments = Arguments::of(property);
        let first = arguments.word()?.value.clone();
        arguments.keyword("of");
        let second = arguments.word()?.value.clone();
        arguments.end(self.scope);
        Some([first, second])
    }

    /// `edge_form 5e3 /cm per 0.15 eV up_to 1.5 eV`, in a ternary.
    fn edge_form(&mut self, property: &Property, family: &Family) -> Option<EdgeForm> {
        let mut arguments = Arguments::of(property);
        let per_length = Kind::of(Dimension::PER_LENGTH, 1.0, "5e3 /cm per 0.15 eV up_to 1.5 eV");
        let per_m = quantity(&mut arguments, "edge_form", per_length, self.scope)?;
        arguments.keyword("per");
        let over_ev = quantity(&mut arguments, "per", Kind::GAP, self.scope)?;
        arguments.keyword("up_to");
        let to_ev = quantity(&mut arguments, "up_to", Kind::GAP, self.scope)?;
        arguments.end(self.scope);
        if family.freedom() == 1 {
            return Some(EdgeForm { per_m, over_ev, to_ev, weight: 0.0 });
        }
        self.scope.report(
            Finding::error("material.statement", "`edge_form` belongs to a ternary")
                .at(property.name.span, "this family mixes more than two elements")
                .help("delete it, or state it in the ternary"),
        );
        None
    }

    /// `end In 0.49 InP`: from that fraction of indium on InP takes over.
    fn end(&mut self, property: &Property, family: &Family) -> Option<Box<End>> {
        let mut arguments = Arguments::of(property);
        let (element, from, member) = (
            arguments.word(),
            quantity(&mut arguments, "end", Kind::FRACTION, self.scope)?,
            arguments.word(),
        );
        let (Some(element), Some(member), true) = (element, member, from < 1.0) else {
            self.scope.report(
                Finding::error("material.statement", "`end` names an element, a fraction and a compound")
                    .at(property.span, "not all three can be read")
                    .help("write it such as `end In 0.49 InP`, with a fraction below 1"),
            );
            return None;
        };
        arguments.end(self.scope);
        if family.position(&element.value).is_none() {
            let known = family.sites.concat().join(", ");
            self.scope.report(
                Finding::error(
                    "material.statement",
                    format!("`end` names {}, which is not in this alloy", element.value),
                )
                .at(element.span, format!("one of {known} is due"))
                .help(format!("name an element of `{}`", family.name)),
            );
            return None;
        }
        let member = self.member(member)?;
        let sample = self.sample_of(&member, family.corner(), true)?;
        Some(Box::new(End { element: element.value.clone(), from, sample }))
    }

    /// A linear and a quadratic coefficient.
    fn pair(&mut self, property: &Property, kind: Kind) -> Option<(f64, f64)> {
        let mut arguments = Arguments::of(property);
        let linear = quantity(&mut arguments, &property.name.value, kind, self.scope)?;
        let mut quadratic = 0.0;
        if arguments.has_more() {
            quadratic = quantity(&mut arguments, &property.name.value, kind, self.scope)?;
        }
        arguments.end(self.scope);
        Some((linear, quadratic))
    }
}
