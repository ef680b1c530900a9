//! What every section is made of: figures, tables, lists, notes.

use serde::Serialize;

use crate::report::figure::Figure;
use crate::report::text::Text;

/// A section: heading, one sentence that states the result, then figures, tables, items, notes.
#[derive(Clone, Debug, Default, Serialize)]
pub struct Section {
    /// Anchor.
    pub id: &'static str,
    /// Nouns.
    pub heading: &'static str,
    /// The result, with values.
    pub lede: Option<Text>,
    /// In order.
    pub figures: Vec<Figure>,
    /// After the figures.
    pub beside: Beside,
    /// After these.
    pub tables: Vec<Table>,
    /// The same under further conditions, folded.
    pub more: Vec<Fold>,
    /// A list.
    pub items: Vec<Item>,
    /// Whether the list is numbered (the sources).
    pub numbered: bool,
    /// Beside or after.
    pub notes: Vec<Text>,
}

impl Section {
    pub(super) fn new(id: &'static str, heading: &'static str) -> Self {
        Self { id, heading, ..Self::default() }
    }

    /// Every figure, in reading order.
    pub fn drawings(&self) -> impl Iterator<Item = &Figure> {
        let folded = self.more.iter().flat_map(|fold| &fold.beside.figures);
        self.figures.iter().chain(&self.beside.figures).chain(folded)
    }

    pub(super) fn drawings_mut(&mut self) -> impl Iterator<Item = &mut Figure> {
        let folded = self.more.iter_mut().flat_map(|fold| &mut fold.beside.figures);
        self.figures.iter_mut().chain(&mut self.beside.figures).chain(folded)
    }

    pub(super) fn is_there(&self) -> bool {
        !(self.figures.is_empty()
            && self.tables.is_empty()
            && self.items.is_empty()
            && self.beside.is_empty())
    }
}

/// What stands two abreast where there is room: half figures, then tables.
#[derive(Clone, Debug, Default, Serialize)]
pub struct Beside {
    /// In order.
    pub figures: Vec<Figure>,
    /// After the figures.
    pub tables: Vec<Table>,
}

impl Beside {
    /// Whether there is nothing.
    pub fn is_empty(&self) -> bool {
        self.figures.is_empty() && self.tables.is_empty()
    }
}

/// What is shown on demand: a further condition.
#[derive(Clone, Debug, Serialize)]
pub struct Fold {
    /// `Under summer_roof: …`
    pub head: Text,
    /// What it holds.
    pub beside: Beside,
}

/// An entry of a list.
#[derive(Clone, Debug, Serialize)]
pub struct Item {
    /// What it is about; may be empty.
    pub head: Text,
    /// What there is to say.
    pub body: Text,
}

/// A table. The first cell of each row is its heading.
#[derive(Clone, Debug, Default, Serialize)]
pub struct Table {
    /// What it holds.
    pub caption: Text,
    /// Heads.
    pub columns: Vec<Column>,
    /// Rows, under a heading each where there are several groups.
    pub groups: Vec<Group>,
    /// `big` for headline figures, `roomy` where it needs width, `fold` where it may be folded.
    pub kind: &'static str,
}

impl Table {
    /// Heads as given; those that begin with `>` are set to the right, as numbers are.
    pub fn new(caption: Text, heads: &[&str]) -> Self {
        let columns = heads
            .iter()
            .map(|head| match head.strip_prefix('>') {
                Some(head) => Column { head: Text::of(head), right: true },
                None => Column { head: Text::of(*head), right: false },
            })
            .collect();
        Self { caption, columns, groups: vec![Group::default()], kind: "" }
    }

    /// Adds a row to the last group.
    pub fn row(&mut self, cells: Vec<Text>) {
        if let Some(group) = self.groups.last_mut() {
            group.rows.push(cells);
        }
    }

    /// Opens a group.
    pub fn group(&mut self, head: Text) {
        self.groups.retain(|group| !group.rows.is_empty());
        self.groups.push(Group { head: Some(head), rows: Vec::new() });
    }
}

/// The head of a column.
#[derive(Clone, Debug, Serialize)]
pub struct Column {
    /// Its words.
    pub head: Text,
    /// Whether its cells are set to the right.
    pub right: bool,
}

/// Rows that belong together.
#[derive(Clone, Debug, Default, Serialize)]
pub struct Group {
    /// What they share.
    pub head: Option<Text>,
    /// Cells.
    pub rows: Vec<Vec<Text>>,
}
