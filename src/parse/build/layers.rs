//! Layers and what is said of them.

use crate::parse::build::Builder;
use crate::parse::build::values::bare_name;
use crate::parse::grammar::{Node, Rule};
use crate::source::{Span, Spanned};
use crate::syntax::{
    Attribute, Expression, LayerStatement, MaterialPhrase, Polarity, Qualifier, Replace, Statement, Value,
};

impl Builder<'_> {
    pub(super) fn layer(&mut self, node: Node<'_>) -> Option<Statement> {
        let mut layer = self.layer_head(node.clone())?;
        layer.block = self.own_block(node);
        Some(Statement::Layer(layer))
    }

    /// All but the block: a frame that is gone before blocks nest.
    fn layer_head(&mut self, node: Node<'_>) -> Option<Box<LayerStatement>> {
        let span = self.span(&node);
        let (mut duty, mut material, mut alias) = (None, None, None);
        let mut attributes = Vec::new();
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::duty => duty = Some(self.word(&part)),
                Rule::phrase => material = self.phrase(part),
                Rule::alias => alias = self.only_word(part),
                Rule::block => {}
                _ => attributes.extend(self.attribute(part)),
            }
        }
        let duty = duty?;
        if duty.value == "air" {
            demote(&mut material, &mut attributes);
        }
        settle_names(&mut attributes);
        Some(Box::new(LayerStatement { duty, material, attributes, alias, block: None, span }))
    }

    pub(super) fn replace(&mut self, node: Node<'_>) -> Option<Statement> {
        let mut replace = self.replace_head(node.clone())?;
        replace.block = self.own_block(node);
        Some(Statement::Replace(replace))
    }

    fn replace_head(&mut self, node: Node<'_>) -> Option<Box<Replace>> {
        let span = self.span(&node);
        let (mut path, mut material) = (None, None);
        let mut attributes = Vec::new();
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::dotted => path = Some(self.word(&part)),
                Rule::phrase => material = self.phrase(part),
                Rule::block | Rule::alias => {}
                _ => attributes.extend(self.attribute(part)),
            }
        }
        demote(&mut material, &mut attributes);
        settle_names(&mut attributes);
        Some(Box::new(Replace { path: path?, material, attributes, block: None, span }))
    }

    fn phrase(&mut self, node: Node<'_>) -> Option<MaterialPhrase> {
        let span = self.span(&node);
        let (mut graded, mut diffused, mut name) = (None, None, None);
        let mut qualifiers = Vec::new();
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::graded => graded = Some(self.span(&part)),
                Rule::diffused => diffused = Some(self.span(&part)),
                Rule::formula => name = Some(self.word(&part)),
                _ => qualifiers.extend(self.qualifier(part)),
            }
        }
        let unnamed = |span: Span| Spanned::new(String::new(), span.after());
        let name = name.or_else(|| diffused.map(unnamed))?;
        Some(MaterialPhrase { graded, diffused, name, qualifiers, span })
    }

    fn qualifier(&mut self, node: Node<'_>) -> Option<Qualifier> {
        let span = self.span(&node);
        let rule = node.as_rule();
        let (mut word, mut value) = (None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::value => value = Some(self.value(part)),
                Rule::gap_word | Rule::to_word => {}
                _ => word = Some(self.word(&part)),
            }
        }
        Some(match rule {
            Rule::matched => Qualifier::Matched { to: word, span },
            Rule::of_gap => Qualifier::OfGap { value: value?, span },
            Rule::ordered => Qualifier::OrderedTo { value: value?, span },
            _ => Qualifier::With { element: word?, value: value?, span },
        })
    }

    fn attribute(&mut self, node: Node<'_>) -> Option<Attribute> {
        let span = self.span(&node);
        Some(match node.as_rule() {
            Rule::value => Attribute::Value(self.value(node)),
            Rule::doping => self.doping(node)?,
            Rule::removed => Attribute::Removed(span),
            Rule::only_under_fingers => Attribute::OnlyUnderFingers(span),
            Rule::relaxed => Attribute::Relaxed(span),
            Rule::pseudomorphic => Attribute::Pseudomorphic(span),
            Rule::collecting => Attribute::Collecting(span),
            Rule::steps => {
                let mut values = node.into_inner().filter(|part| part.as_rule() == Rule::value);
                let count = values.next().map(|it| self.value(it))?;
                Attribute::Steps { count, of: values.next().map(|it| self.value(it)), span }
            }
            Rule::absorbs => {
                let argument = node.into_inner().next().map(|it| self.argument(it))?;
                Attribute::Absorbs { argument, span }
            }
            Rule::offcut => {
                Attribute::Offcut { value: node.into_inner().next().map(|it| self.value(it))?, span }
            }
            _ => Attribute::Text(self.text(&node)),
        })
    }

    fn doping(&mut self, node: Node<'_>) -> Option<Attribute> {
        let span = self.span(&node);
        let (mut polarity, mut value, mut species) = (None, None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::polarity => {
                    let sign = if part.as_str() == "n" { Polarity::N } else { Polarity::P };
                    polarity = Some(Spanned::new(sign, self.span(&part)));
                }
                Rule::value => value = Some(self.value(part)),
                _ => species = Some(self.word(&part)),
            }
        }
        Some(Attribute::Doping { polarity: polarity?, value: value?, species, span })
    }
}

/// `air d`, `top.base d`: a lone lower-case word where no thickness is said is one, not a material.
fn demote(material: &mut Option<MaterialPhrase>, attributes: &mut Vec<Attribute>) {
    let lone = |phrase: &mut MaterialPhrase| {
        phrase.graded.is_none()
            && phrase.diffused.is_none()
            && phrase.qualifiers.is_empty()
            && phrase.name.value.starts_with(|c: char| c.is_ascii_lowercase() || c == '_')
    };
    if attributes.iter().any(|it| matches!(it, Attribute::Value(_))) {
        return;
    }
    if let Some(phrase) = material.take_if(lone) {
        let span = phrase.span;
        let expression = Some(Expression::Name(phrase.name));
        let value = Value { expression, up_to: None, free: None, tolerance: None, span };
        attributes.insert(0, Attribute::Value(value));
    }
}

/// A name alone is the thickness where nothing else is; beside a thickness it is a mere word.
fn settle_names(attributes: &mut [Attribute]) {
    let said = |it: &Attribute| matches!(it, Attribute::Value(value) if bare_name(value).is_none());
    let mut thick = attributes.iter().any(said);
    for attribute in attributes {
        if let Attribute::Value(value) = attribute
            && let Some(name) = bare_name(value)
        {
            if thick {
                *attribute = Attribute::Word(name.clone());
            }
            thick = true;
        }
    }
}
