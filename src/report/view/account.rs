//! The ledger's lines in words, in hundredths that add up.

use crate::report::context::{Context, Style, under};
use crate::report::figure::Figure;
use crate::report::figure::ledger::{draw, hundredths};
use crate::report::figure::light::layer_words;
use crate::report::number::{counted, percent, round_to_sum};
use crate::report::text::{Text, visible};
use crate::report::view::further::folds;
use crate::report::view::{Beside, Section, Table};
use crate::results::{ConditionResult, LedgerLine};

/// What a line of the account is about.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
#[expect(missing_docs, reason = "each is a line of the ledger by its own name")]
pub enum Kind {
    Fingers,
    Reflected,
    Layer,
    Passing,
    Beyond,
    Heat,
    Tail,
    Coupling,
    NotCollected,
    Mismatch,
    Recombined,
    Voltage,
    Tunnel,
    Series,
    Other,
    Delivered,
}

impl Kind {
    fn of(line: &str) -> Self {
        match line {
            "fingers" => Self::Fingers,
            "reflected" => Self::Reflected,
            "absorbed" => Self::Layer,
            "passing" => Self::Passing,
            "beyond_data" => Self::Beyond,
            "heat" => Self::Heat,
            "tail" => Self::Tail,
            "coupling" => Self::Coupling,
            "not_collected" => Self::NotCollected,
            "mismatch" => Self::Mismatch,
            "recombined" => Self::Recombined,
            "voltage" => Self::Voltage,
            "tunnel" => Self::Tunnel,
            "series" => Self::Series,
            "delivered" => Self::Delivered,
            _ => Self::Other,
        }
    }

    /// Lines of one group stand together.
    pub fn group(self) -> u8 {
        match self {
            Self::Fingers | Self::Reflected => 0,
            Self::Layer | Self::Passing | Self::Beyond => 1,
            Self::Heat | Self::Tail | Self::Coupling => 2,
            Self::NotCollected => 3,
            Self::Mismatch | Self::Recombined | Self::Voltage | Self::Tunnel | Self::Series | Self::Other => {
                4
            }
            Self::Delivered => 5,
        }
    }
}

/// One line.
#[derive(Clone, Debug)]
pub struct Entry {
    /// What it is.
    pub kind: Kind,
    /// In words.
    pub words: String,
    /// Hundredths of a W/m2 under the condition that is drawn.
    pub value: i64,
    /// The same under the second condition.
    pub second: Option<i64>,
    /// The junction it belongs to.
    pub junction: Option<usize>,
    /// How its layer is drawn.
    pub style: Option<Style>,
    /// Exact, by condition of the results.
    exact: Vec<f64>,
}

/// The account of one condition, with a second one beside it.
#[derive(Clone, Debug)]
pub struct Account {
    /// Hundredths of a W/m2.
    pub total: i64,
    /// In order; the last is what is delivered.
    pub entries: Vec<Entry>,
    /// The second condition, where one is near enough to share a scale.
    pub second: Option<Second>,
}

/// The condition beside the first.
#[derive(Clone, Debug)]
pub struct Second {
    /// Its name.
    pub name: String,
    /// Hundredths of a W/m2.
    pub total: i64,
}

/// Layers with a line of their own at most.
const LAYERS_SHOWN: usize = 5;

type Key = (String, Option<String>, Option<String>);

fn key(line: &LedgerLine) -> Key {
    (line.line.clone(), line.junction.clone(), line.layer.clone())
}

/// The account; `None` where there is no ledger.
pub fn account(context: &Context<'_>) -> Option<Account> {
    let conditions = &context.results.conditions;
    let mut keys: Vec<Key> = Vec::new();
    for condition in conditions {
        for line in &condition.ledger_w_per_m2 {
            let key = key(line);
            if !keys.contains(&key) {
                keys.push(key);
            }
        }
    }
    let drawn = context.index;
    if context.drawn.ledger_w_per_m2.is_empty() {
        return None;
    }
    let value = |condition: &ConditionResult, wanted: &Key| -> f64 {
        condition.ledger_w_per_m2.iter().filter(|line| key(line) == *wanted).map(|line| line.value).sum()
    };
    let mut entries: Vec<Entry> = keys
        .iter()
        .map(|key| entry(context, key, conditions.iter().map(|c| value(c, key)).collect()))
        .collect();
    // A stable sort: within a kind the ledger's own order stays.
    entries.sort_by_key(|entry| (entry.kind.group(), entry.kind));
    let entries = merged(context, entries);
    let second = conditions.iter().enumerate().filter(|(index, _)| *index != drawn).find(|(_, condition)| {
        let ratio = condition.incident_w_per_m2 / context.drawn.incident_w_per_m2;
        (0.5..=2.0).contains(&ratio) && !condition.ledger_w_per_m2.is_empty()
    });
    let mut account = Account { total: 0, entries, second: None };
    let column = |index: usize, entries: &[Entry]| -> Vec<i64> {
        round_to_sum(
            &entries.iter().map(|e| e.exact.get(index).copied().unwrap_or(0.0)).collect::<Vec<_>>(),
            2,
        )
    };
    let first = column(drawn, &account.entries);
    account.total = first.iter().sum();
    for (entry, value) in account.entries.iter_mut().zip(first) {
        entry.value = value;
    }
    if let Some((index, condition)) = second {
        let values = column(index, &account.entries);
        account.second = Some(Second { name: condition.name.clone(), total: values.iter().sum() });
        for (entry, value) in account.entries.iter_mut().zip(values) {
            entry.second = Some(value);
        }
    }
    Some(account)
}

fn entry(context: &Context<'_>, key: &Key, exact: Vec<f64>) -> Entry {
    let (line, junction, layer) = key;
    let kind = Kind::of(line);
    let of = junction.as_deref().map(visible).unwrap_or_default();
    let row = layer.as_ref().and_then(|path| context.layers().find(|row| row.result.name == *path));
    let words = match kind {
        Kind::Fingers => "under the fingers".into(),
        Kind::Reflected => "reflected".into(),
        Kind::Layer => match (&row, layer) {
            (Some(row), _) => layer_words(context, row),
            (None, Some(path)) => visible(path),
            _ => "absorbed without current".into(),
        },
        Kind::Passing => "passing through".into(),
        Kind::Beyond => "outside the optical data".into(),
        Kind::Heat => format!("turned to heat in {of}"),
        Kind::Tail => format!("lifted from below the gap in {of}"),
        Kind::Coupling => format!("turned to heat with light sent down to {of}"),
        Kind::NotCollected => format!("absorbed in {of}, not collected"),
        Kind::Mismatch => format!("current of {of} above the smallest"),
        Kind::Recombined => format!("recombined while working in {of}"),
        Kind::Voltage => format!("voltage below the gap in {of}"),
        Kind::Tunnel if of.is_empty() => "tunnel resistance".into(),
        Kind::Tunnel => format!("tunnel resistance, {of}"),
        Kind::Series => "series resistance".into(),
        Kind::Delivered => "delivered".into(),
        Kind::Other => line.replace('_', " "),
    };
    Entry {
        kind,
        words,
        value: 0,
        second: None,
        junction: junction.as_ref().map(|name| context.junction_index(name)),
        style: row.map(|row| row.style()),
        exact,
    }
}

/// Small layers become one line; what is nothing under every condition has none.
fn merged(context: &Context<'_>, entries: Vec<Entry>) -> Vec<Entry> {
    let drawn = context.index;
    let small = 0.002 * context.drawn.incident_w_per_m2;
    let mut layers: Vec<f64> =
        entries.iter().filter(|e| e.kind == Kind::Layer).map(|e| e.exact[drawn]).collect();
    layers.sort_by(|a, b| b.total_cmp(a));
    let bound = layers.get(LAYERS_SHOWN - 1).copied().unwrap_or(0.0).max(small);
    let minor = |e: &Entry| e.kind == Kind::Layer && e.exact[drawn] < bound;
    let count = entries.iter().filter(|e| minor(e)).count();
    let mut out: Vec<Entry> = Vec::new();
    let mut together: Option<usize> = None;
    for mut entry in entries {
        if count > 1 && minor(&entry) {
            if let Some(at) = together {
                for (sum, more) in out[at].exact.iter_mut().zip(&entry.exact) {
                    *sum += more;
                }
                continue;
            }
            let others = if layers.len() == count { "" } else { " other" };
            entry.words = format!("in {count}{others} layers");
            entry.style = None;
            together = Some(out.len());
        }
        out.push(entry);
    }
    if let Some(at) = together {
        // The others come last among the layers.
        let end = out.iter().rposition(|e| e.kind == Kind::Layer).unwrap_or(at);
        out[at..=end].rotate_left(1);
    }
    let mut out = tails_merged(out);
    let nothing = |e: &Entry| e.kind != Kind::Delivered && e.exact.iter().all(|v| v.abs() < 0.005);
    let dropped: Vec<f64> = (0..context.results.conditions.len())
        .map(|index| out.iter().filter(|e| nothing(e)).map(|e| e.exact[index]).sum())
        .collect();
    out.retain(|entry| !nothing(entry));
    // What the dropped lines held goes to the largest, where it is far below what is printed.
    if let Some(largest) = out.iter_mut().max_by(|a, b| a.exact[drawn].total_cmp(&b.exact[drawn])) {
        for (sum, more) in largest.exact.iter_mut().zip(dropped) {
            *sum += more;
        }
    }
    out
}

/// What is lifted from below the gaps is small everywhere: one line.
fn tails_merged(entries: Vec<Entry>) -> Vec<Entry> {
    let mut out: Vec<Entry> = Vec::new();
    for entry in entries {
        if entry.kind == Kind::Tail
            && let Some(first) = out.iter_mut().find(|e| e.kind == Kind::Tail)
        {
            for (sum, more) in first.exact.iter_mut().zip(&entry.exact) {
                *sum += more;
            }
            first.words = "lifted from below the gaps".into();
            first.junction = None;
            continue;
        }
        out.push(entry);
    }
    out
}

/// The section.
pub fn section(context: &Context<'_>) -> Section {
    let mut section = Section::new("ledger", "The ledger");
    let Some(account) = account(context) else { return section };
    let delivered = account.entries.iter().find(|e| e.kind == Kind::Delivered).map_or(0, |e| e.value);
    let mut losses: Vec<&Entry> = account.entries.iter().filter(|e| e.kind != Kind::Delivered).collect();
    losses.sort_by_key(|entry| std::cmp::Reverse(entry.value));
    let mut lede = Text::of(format!(
        "Of {}\u{a0}W/m², {} are delivered.",
        hundredths(account.total),
        hundredths(delivered)
    ));
    if let [first, second, ..] = losses[..] {
        lede = lede.p(format!(
            " The largest losses: {} ({}) and {} ({}).",
            first.words,
            hundredths(first.value),
            second.words,
            hundredths(second.value)
        ));
    }
    section.lede = Some(lede);
    let all: Vec<usize> = (0..context.results.conditions.len()).collect();
    section.figures.push(figure(context, &account, &all));
    section.more = folds(context, &|_, _| false, &|context| {
        let figures = account_figure(context).into_iter().collect();
        Beside { figures, tables: Vec::new() }
    });
    section.notes = vec![
        Text::new()
            .b("left")
            .p(" is what remains after the line has been paid; after the last loss it equals ")
            .b("delivered")
            .p("."),
        Text::of(format!(
            "Delivered over light is the efficiency: {}.",
            percent(context.drawn.efficiency, 2)
        )),
        Text::of("Printed lines are rounded so that they add up to the printed sum."),
    ];
    section
}

fn account_figure(context: &Context<'_>) -> Option<Figure> {
    let account = account(context)?;
    Some(figure(context, &account, &[context.index]).folded(context.index))
}

/// The drawing, with the conditions of `shown` in its table.
fn figure(context: &Context<'_>, account: &Account, shown: &[usize]) -> Figure {
    let delivered = account.entries.iter().find(|e| e.kind == Kind::Delivered).map_or(0, |e| e.value);
    let (wide, slim) = draw(context, account);
    let mut figure = Figure::new(
        "ledger",
        "Ledger of the light's power",
        format!(
            "A ruled account in W/m2 {}: of {} on the cell {} are delivered. {} with a bar each; the numbers are in the table.",
            under(context.drawn),
            hundredths(account.total),
            hundredths(delivered),
            counted(account.entries.len(), "line")
        ),
    )
    .drawn(wide, Some(slim));
    let mut caption = Text::of(
        "Every bar starts at the same zero. Hatches in a junction’s colour belong to that junction.",
    );
    if let Some(second) = &account.second {
        caption = caption.p(" The upright tick is the same line under ").p(second.name.clone()).p(".");
    }
    figure.caption = caption;
    figure.data = table(context, account, shown);
    figure
}

/// The conditions of `shown`, each column adding up.
fn table(context: &Context<'_>, account: &Account, shown: &[usize]) -> Table {
    let conditions: Vec<&ConditionResult> =
        shown.iter().filter_map(|index| context.results.conditions.get(*index)).collect();
    let mut heads = vec!["line".to_string()];
    heads.extend(conditions.iter().map(|c| format!(">{}", visible(&c.name))));
    let heads: Vec<&str> = heads.iter().map(String::as_str).collect();
    let mut table = Table::new(Text::of("Power by condition, W/m²"), &heads);
    let columns: Vec<Vec<i64>> = shown
        .iter()
        .map(|&index| {
            round_to_sum(
                &account
                    .entries
                    .iter()
                    .map(|e| e.exact.get(index).copied().unwrap_or(0.0))
                    .collect::<Vec<_>>(),
                2,
            )
        })
        .collect();
    let mut left: Vec<i64> = columns.iter().map(|column| column.iter().sum()).collect();
    let sums = left.clone();
    let sum_row = |words: &str| {
        std::iter::once(Text::of(words))
            .chain(sums.iter().map(|sum| Text::of(hundredths(*sum))))
            .collect::<Vec<_>>()
    };
    table.row(sum_row("light on the cell"));
    for (index, entry) in account.entries.iter().enumerate() {
        let mut cells = vec![Text::of(entry.words.clone())];
        for (column, left) in columns.iter().zip(&mut left) {
            *left -= column[index];
            cells.push(Text::of(hundredths(column[index])));
        }
        table.row(cells);
    }
    table.row(sum_row("sum of the lines"));
    table
}
