//! From pest's matches to the tree of [`syntax`].
//!
//! The grammar has settled which form a text has; here each form is poured into its type. Nothing
//! recurses but blocks and brackets, whose depth is capped before pest runs.

use pest::iterators::{Pair, Pairs};

use crate::finding::Findings;
use crate::parse::expected;
use crate::parse::grammar::{Node, Rule};
use crate::parse::recover::{self, Scan};
use crate::source::{Source, Span, Spanned};
use crate::syntax::{Block, Item, Let, Named, Part, Stack, Statement, Use};

mod groups;
mod layers;
mod requests;
mod values;

/// Beyond so many findings nobody reads on, and the search for ways out would take most of the time.
const CURES: usize = 200;

/// What the builders share.
pub(super) struct Builder<'a> {
    source: &'a Source,
    /// Where the text that pest saw begins in the source.
    start: usize,
    scan: &'a Scan,
    findings: &'a mut Findings,
    /// Arithmetic signs met since the outermost value began.
    operators: usize,
    /// Set by a value that could not be made (already reported); makes its statement `Invalid`.
    broken: bool,
    /// Set where a block of the item at hand runs into the end of the file.
    unclosed: bool,
}

/// Builds the items of a text that begins at an offset of a source; what the grammar could not
/// place is reported here.
pub(super) fn items(
    (source, start): (&Source, usize),
    pairs: Pairs<'_, Rule>,
    scan: &Scan,
    findings: &mut Findings,
) -> Vec<Item> {
    let mut builder = Builder { source, start, scan, findings, operators: 0, broken: false, unclosed: false };
    let mut items = Vec::new();
    // Where the last item with a body ended: a `}` too many closes it early, and what follows up
    // to the stray `}` was meant to stand inside.
    let mut after_body = 0;
    for node in pairs.flat_map(Pair::into_inner) {
        match node.as_rule() {
            Rule::EOI => {}
            Rule::stray_close => {
                let span = builder.span(&node);
                builder.findings.push(recover::stray_close(span, scan));
                for item in items.iter_mut().skip(after_body) {
                    if let Item::Stray(statement) = item {
                        *item = Item::Invalid(statement.span());
                    }
                }
            }
            _ => {
                let item = builder.item(node);
                let has_body = !matches!(item, Item::Stray(_) | Item::Use(_) | Item::Let(_));
                items.push(item);
                if has_body {
                    after_body = items.len();
                }
            }
        }
    }
    items
}

impl<'a> Builder<'a> {
    fn span(&self, node: &Node<'_>) -> Span {
        let span = node.as_span();
        Span::new(self.source.id, self.start + span.start(), self.start + span.end())
    }

    fn word(&self, node: &Node<'_>) -> Spanned<String> {
        Spanned::new(node.as_str().to_owned(), self.span(node))
    }

    /// The text between the quotes, `\"` and `\\` read.
    fn text(&self, node: &Node<'_>) -> Spanned<String> {
        let quoted = node.as_str();
        let inside = quoted.get(1..quoted.len().saturating_sub(1)).unwrap_or_default();
        let value = if inside.contains('\\') { unescape(inside) } else { inside.to_owned() };
        Spanned::new(value, self.span(node))
    }

    fn item(&mut self, node: Node<'_>) -> Item {
        let span = self.span(&node);
        self.broken = false;
        self.unclosed = false;
        let item = self.whole_item(node);
        if self.broken || self.unclosed { Item::Invalid(span) } else { item }
    }

    fn whole_item(&mut self, node: Node<'_>) -> Item {
        let span = self.span(&node);
        match node.as_rule() {
            Rule::use_item => {
                let path = node.into_inner().next();
                path.map_or(Item::Invalid(span), |path| Item::Use(Use { path: self.text(&path), span }))
            }
            Rule::named_item => self.named(node),
            Rule::part_item => self.part(node),
            Rule::stack_item => self.stack(node),
            _ => match self.statement(node) {
                Statement::Let(it) => Item::Let(it),
                Statement::Invalid(span) => Item::Invalid(span),
                statement => Item::Stray(statement),
            },
        }
    }

    fn named(&mut self, node: Node<'_>) -> Item {
        let span = self.span(&node);
        let (mut kind, mut name, mut block, mut replaces) = ("", None, None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::named_kind => kind = part.as_str(),
                Rule::replaces => replaces = Some(self.span(&part)),
                Rule::block => block = Some(self.block(part)),
                _ => name = Some(self.word(&part)),
            }
        }
        let (Some(name), Some(block)) = (name, block) else { return Item::Invalid(span) };
        let named = Named { name, replaces, block, span };
        match kind {
            "condition" => Item::Condition(named),
            "spectrum" => Item::Spectrum(named),
            "material" => Item::Material(named),
            _ => Item::Alloy(named),
        }
    }

    fn part(&mut self, node: Node<'_>) -> Item {
        let span = self.span(&node);
        let (mut name, mut parameters, mut block) = (None, Vec::new(), None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::parameters => {
                    parameters = part.into_inner().filter_map(|one| self.parameter(one)).collect();
                }
                Rule::block => block = Some(self.block(part)),
                _ => name = Some(self.word(&part)),
            }
        }
        let (Some(name), Some(block)) = (name, block) else { return Item::Invalid(span) };
        Item::Part(Part { name, parameters, block, span })
    }

    fn parameter(&mut self, node: Node<'_>) -> Option<(Spanned<String>, Option<crate::syntax::Value>)> {
        let (mut name, mut value) = (None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::name => name = Some(self.word(&part)),
                Rule::inner_value => value = Some(self.value(part)),
                _ => {}
            }
        }
        Some((name?, value))
    }

    fn stack(&mut self, node: Node<'_>) -> Item {
        let span = self.span(&node);
        let (mut name, mut like, mut block) = (None, None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::string => name = Some(self.text(&part)),
                Rule::like => like = part.into_inner().next().map(|text| self.text(&text)),
                Rule::block => block = Some(self.block(part)),
                _ => {}
            }
        }
        let (Some(name), Some(block)) = (name, block) else { return Item::Invalid(span) };
        Item::Stack(Stack { name, like, block, span })
    }

    fn block(&mut self, node: Node<'_>) -> Block {
        let mut span = self.span(&node);
        let mut statements = Vec::new();
        for part in node.into_inner() {
            match part.as_rule() {
                // The `{` may stand on a later line than the head.
                Rule::open => span.start = self.span(&part).start,
                Rule::unclosed => {
                    self.unclosed = true;
                    self.findings.push(recover::unclosed(self.source, span.start as usize, self.scan));
                }
                _ => statements.push(self.statement(part)),
            }
        }
        Block { statements, span }
    }

    /// The block of a statement that has one.
    fn own_block(&mut self, node: Node<'_>) -> Option<Block> {
        let block = node.into_inner().find(|part| part.as_rule() == Rule::block)?;
        Some(self.block(block))
    }

    fn statement(&mut self, node: Node<'_>) -> Statement {
        let span = self.span(&node);
        let outer = std::mem::replace(&mut self.broken, false);
        let statement = self.whole_statement(node).filter(|_| !self.broken);
        self.broken = outer;
        statement.unwrap_or(Statement::Invalid(span))
    }

    fn whole_statement(&mut self, node: Node<'_>) -> Option<Statement> {
        // One call through a pointer keeps the frame small: blocks nest through here, and in an
        // unoptimised build each arm of a match would hold a statement of its own.
        let build: fn(&mut Self, Node<'_>) -> Option<Statement> = match node.as_rule() {
            Rule::layer => Self::layer,
            Rule::property => Self::property,
            Rule::group => Self::group,
            Rule::replace => Self::replace,
            Rule::let_item => Self::let_statement,
            Rule::place => Self::place,
            Rule::require => Self::require,
            Rule::seek => Self::seek,
            Rule::chart => Self::chart,
            Rule::vary => Self::vary,
            Rule::measured => Self::measured,
            Rule::accept => Self::accept,
            Rule::limit => Self::limit,
            Rule::remove => Self::remove,
            Rule::insert => Self::insert,
            Rule::bad_block => Self::bad_block,
            _ => Self::bad_statement,
        };
        build(self, node)
    }

    fn bad_statement(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        self.findings.push(expected::explain(self.source, span, self.findings.0.len() < CURES));
        None
    }

    /// Reports the head and, by building it, what is wrong inside the block.
    fn bad_block(&mut self, node: Node<'_>) -> Option<Statement> {
        let start = self.span(&node);
        let block = node.into_inner().find(|part| part.as_rule() == Rule::block)?;
        let open = block.clone().into_inner().next().map_or(start, |open| self.span(&open));
        let cured = self.findings.0.len() < CURES;
        self.findings.push(expected::explain(self.source, Span { end: open.end, ..start }, cured));
        self.block(block);
        None
    }

    fn let_statement(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut name, mut value) = (None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::name => name = Some(self.word(&part)),
                Rule::value => value = Some(self.value(part)),
                _ => {}
            }
        }
        Some(Statement::Let(Let { name: name?, value: value?, span }))
    }
}

fn unescape(inside: &str) -> String {
    let mut text = String::with_capacity(inside.len());
    let mut characters = inside.chars().peekable();
    while let Some(character) = characters.next() {
        match (character, characters.peek()) {
            ('\\', Some(&next @ ('"' | '\\'))) => {
                text.push(next);
                characters.next();
            }
            _ => text.push(character),
        }
    }
    text
}
