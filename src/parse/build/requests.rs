//! What is asked for: requirements, goals, charts, measurements, exceptions.

use crate::parse::build::Builder;
use crate::parse::grammar::{Node, Rule};
use crate::source::Spanned;
use crate::syntax::{
    Accept, Chart, ChartAxis, Comparison, Limit, Measured, Require, Seek, SeekTarget, Statement, Value, Vary,
};

impl Builder<'_> {
    pub(super) fn require(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut metric, mut comparison, mut bound, mut at_yield) = (None, None, None, None);
        let mut under = Vec::new();
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::path => metric = Some(self.word(&part)),
                Rule::comparison => {
                    let sign = match part.as_str() {
                        ">=" | "≥" => Comparison::AtLeast,
                        "<=" | "≤" => Comparison::AtMost,
                        ">" => Comparison::Above,
                        _ => Comparison::Below,
                    };
                    comparison = Some(Spanned::new(sign, self.span(&part)));
                }
                Rule::value => bound = Some(self.value(part)),
                Rule::at_yield => at_yield = part.into_inner().nth(1).map(|it| self.value(it)),
                _ => under.extend(part.into_inner().map(|name| self.word(&name))),
            }
        }
        let (metric, comparison, bound) = (metric?, comparison?, bound?);
        Some(Statement::Require(Box::new(Require { metric, comparison, bound, under, at_yield, span })))
    }

    pub(super) fn seek(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut metric, mut target) = (None, None);
        let (mut under, mut weighing) = (Vec::new(), Vec::new());
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::path => metric = Some(self.word(&part)),
                Rule::extreme if part.as_str() == "highest" => target = Some(SeekTarget::Highest),
                Rule::extreme => target = Some(SeekTarget::Least),
                Rule::equal => {
                    target = part.into_inner().next().map(|it| SeekTarget::Equal(self.value(it)));
                }
                Rule::under => under.extend(part.into_inner().map(|name| self.word(&name))),
                _ => weighing.extend(part.into_inner().filter_map(|weight| self.weight(weight))),
            }
        }
        Some(Statement::Seek(Box::new(Seek { metric: metric?, target: target?, under, weighing, span })))
    }

    fn weight(&mut self, node: Node<'_>) -> Option<(Spanned<String>, Value)> {
        let mut parts = node.into_inner();
        let name = parts.next().map(|it| self.word(&it))?;
        Some((name, parts.next().map(|it| self.value(it))?))
    }

    pub(super) fn chart(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut metric, mut axes, mut under) = (None, Vec::new(), Vec::new());
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::path => metric = Some(self.word(&part)),
                Rule::axis => axes.extend(self.axis(part)),
                _ => under.extend(part.into_inner().map(|name| self.word(&name))),
            }
        }
        Some(Statement::Chart(Chart { metric: metric?, axes, under, span }))
    }

    fn axis(&mut self, node: Node<'_>) -> Option<ChartAxis> {
        let (mut path, mut over, mut points) = (None, None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::path => path = Some(self.word(&part)),
                Rule::over => over = part.into_inner().next().map(|it| self.value(it)),
                _ => points = part.into_inner().next().map(|it| self.count(&it)),
            }
        }
        Some(ChartAxis { path: path?, over: over?, points })
    }

    pub(super) fn vary(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut paths, mut tolerance) = (Vec::new(), None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::path => paths.push(self.word(&part)),
                Rule::together => {}
                _ => {
                    self.operators = 0;
                    tolerance = self.tolerance(part);
                }
            }
        }
        Some(Statement::Vary(Box::new(Vary { paths, tolerance: tolerance?, span })))
    }

    pub(super) fn measured(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut what, mut file, mut of, mut under, mut block) = (None, None, None, None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::name => what = Some(self.word(&part)),
                Rule::string => file = Some(self.text(&part)),
                Rule::of_path => of = self.only_word(part),
                Rule::block => block = Some(self.block(part)),
                _ => under = self.only_word(part),
            }
        }
        Some(Statement::Measured(Box::new(Measured { what: what?, file: file?, of, under, block, span })))
    }

    pub(super) fn accept(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut code, mut on, mut because) = (None, None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::code => code = Some(self.word(&part)),
                Rule::on_path => on = self.only_word(part),
                _ => because = part.into_inner().next().map(|text| self.text(&text)),
            }
        }
        Some(Statement::Accept(Accept { code: code?, on, because, span }))
    }

    pub(super) fn limit(&mut self, node: Node<'_>) -> Option<Statement> {
        let span = self.span(&node);
        let (mut code, mut value) = (None, None);
        for part in node.into_inner() {
            match part.as_rule() {
                Rule::code => code = Some(self.word(&part)),
                _ => value = Some(self.value(part)),
            }
        }
        Some(Statement::Limit(Limit { code: code?, value: value?, span }))
    }
}
