//! Groups of layers, parts placed, properties, and what changes a stack made like another.

use crate::parse::build::Builder;
use crate::parse::grammar::{Node, Rule};
use crate::source::{Span, Spanned};
use crate::syntax::{Argument, Block, Group, GroupKind, Insert, Place, Property, Remove, Statement, Value};

impl Builder<'_> {
    /// The only word inside: `as name`, `of top`, `under noon`.
    pub(super) fn only_word(&mut self, node: Node<'_>) -> Option<Spanned<String>> {
        node.into_inner().next().map(|name| self.word(&name))
    }

    pub(super) fn group(&mut self, node: Node<'_>) -> Option<Statement> {
        let mut group = self.group_head(node.clone())?;
        group.block = self.own_block(node)?;
        Some(Statement::Group(group))
    }

    /// All but the block: a frame that is gone before blocks nest.
    fn group_head(&mut self, node: Node<'_>) -> Option<Box<Group>> {
        let span = self.span(&node);
        let (mut kind, mut name, mut count) = (None, None, None);
        let mut words = Vec::new();
        for part in node.into_inner() {
            let at = self.span(&part);
            match part.as_rule() {
                Rule::junction_word => kind = Some(Spanned::new(GroupKind::Junction, at)),
                Rule::tunnel_word => kind = Some(Spanned::new(GroupKind::Tunnel, at)),
                Rule::recombination_word => kind = Some(Spanned::new(GroupKind::Recombination, at)),
                Rule::repeat_word => kind = Some(Spanned::new(GroupKind::Repeat, at)),
                Rule::name => name = Some(self.word(&part)),
                Rule::alias => name = self.only_word(part),
                Rule::value => count = Some(self.value(part)),
                Rule::group_word => words.push(self.word(&part)),
                _ => {}
            }
        }
        let block = Block { statements: Vec::new(), span };
        Some(Box::new(Group { kind: kind?, name, count, words, block, span }))
    }

    pub(super) fn property(&mut self, node: Node<'_>) -> Option<Statement> {
        let mut property = self.property_head(node.clone())?;
        property.block = self.own_block(node);
        Some(Statement::Property(property))
    }

    fn property_head(&mut self, node: Node<'_>) -> Option<Property> {
        let span = self.span(&node);
        let mut name = None;
        let mut arguments = Vec::new();
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::property_name => name = Some(self.word(&part)),
                Rule::block => {}
                Rule::alias => {
                    // A property has no name of its own to give: the words stay words.
                    let at = self.span(&part);
                    let word = Span { end: at.start + 2, ..at };
                    arguments.push(Argument::Word(Spanned::new("as".to_owned(), word)));
                    arguments.extend(self.only_word(part).map(Argument::Word));
                }
                _ => arguments.push(self.argument(part)),
            }
        }
        Some(Property { name: name?, arguments, block: None, span })
    }

    pub(super) fn place(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut part_name, mut arguments, mut alias) = (None, Vec::new(), None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::name => part_name = Some(self.word(&part)),
                Rule::alias => alias = self.only_word(part),
                _ => arguments = part.into_inner().filter_map(|it| self.place_argument(it)).collect(),
            }
        }
        Some(Statement::Place(Place { part: part_name?, arguments, alias, span }))
    }

    fn place_argument(&mut self, node: Node<'_>) -> Option<(Option<Spanned<String>>, Value)> {
        let (mut name, mut value) = (None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::name => name = Some(self.word(&part)),
                Rule::inner_value => value = Some(self.value(part)),
                _ => {}
            }
        }
        Some((name, value?))
    }

    pub(super) fn remove(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        Some(Statement::Remove(Remove { path: self.only_word(node)?, span }))
    }

    pub(super) fn insert(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut after, mut path) = (true, None);
        for part in node.clone().into_inner() {
            match part.as_rule() {
                Rule::side => after = part.as_str() == "after",
                Rule::path => path = Some(self.word(&part)),
                _ => {}
            }
        }
        let block = self.own_block(node)?;
        Some(Statement::Insert(Insert { after, path: path?, block, span }))
    }
}
