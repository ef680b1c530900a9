//! Expressions to quantities, checked by dimension.

use crate::finding::Finding;
use crate::resolve::names;
use crate::resolve::quantities::{Evaluated, Scope, State};
use crate::source::{Span, Spanned};
use crate::syntax::{Expression, Number, Operator};
use crate::units::{Dimension, Quantity, Unit, UnknownUnit, parse};

const FUNCTIONS: &[&str] = &["max", "min", "sqrt"];

impl Scope {
    /// Evaluates an expression; `lent` is the unit a bare number takes from the other bound of
    /// its range. `None` where it is wrong, which is reported.
    pub(super) fn evaluate(
        &mut self,
        expression: &Expression,
        lent: Option<&Spanned<String>>,
    ) -> Option<Evaluated> {
        match expression {
            Expression::Number(number) => self.literal(number, lent, 1.0),
            Expression::Name(name) => {
                let value = self.name_value(name);
                if value.is_none() {
                    self.report_unsettled(name);
                }
                value
            }
            Expression::Negate(inner, _) => match &**inner {
                // `-5 degC` is five degrees below zero, not the negative of 278.15 K.
                Expression::Number(number) => self.literal(number, lent, -1.0),
                _ => {
                    let mut evaluated = self.evaluate(inner, lent)?;
                    evaluated.quantity.si = -evaluated.quantity.si;
                    Some(evaluated)
                }
            },
            Expression::Binary { operator, left, right, span } => {
                let (left_value, right_value) = (self.evaluate(left, lent), self.evaluate(right, lent));
                let sides = [(left_value?, left.span()), (right_value?, right.span())];
                self.binary(operator, sides, *span)
            }
            Expression::Call { function, arguments, span } => {
                let values: Vec<_> =
                    arguments.iter().map(|it| (self.evaluate(it, lent), it.span())).collect();
                let values: Option<Vec<_>> =
                    values.into_iter().map(|(value, at)| value.map(|value| (value, at))).collect();
                self.call(function, &values?, *span)
            }
        }
    }

    fn literal(&mut self, number: &Number, lent: Option<&Spanned<String>>, sign: f64) -> Option<Evaluated> {
        if number.decimal_comma {
            let point = number.text.value.replace(',', ".");
            self.report(
                Finding::error(
                    "number.decimal-comma",
                    format!("`{}` is written with a decimal comma", number.text.value),
                )
                .at(number.text.span, "a decimal comma")
                .help(format!("write `{point}`"))
                .fix(number.text.span, point, true),
            );
        }
        if !number.value.is_finite() {
            self.report(
                Finding::error("value.range", format!("`{}` is too large a number", number.text.value))
                    .at(number.text.span, "beyond 1.8e308")
                    .help("write a number below 1e308"),
            );
            return None;
        }
        let written = number.unit.as_ref().or(lent);
        let unit = match written {
            Some(text) => self.unit(text)?,
            None => Unit::ONE,
        };
        let celsius = unit.offset != 0.0;
        let quantity = Quantity::of(sign * number.value, &unit);
        self.finite(Evaluated { quantity, bare: written.is_none(), celsius }, number.span)
    }

    fn unit(&mut self, text: &Spanned<String>) -> Option<Unit> {
        if !self.units.contains_key(&text.value) {
            self.units.insert(text.value.clone(), parse(&text.value));
        }
        match self.units.get(&text.value) {
            Some(Ok(unit)) => Some(*unit),
            Some(Err(wrong)) => {
                let finding = unknown_unit(text, &wrong.clone());
                self.report(finding);
                None
            }
            None => None,
        }
    }

    /// The value of a name in sight, evaluated once.
    pub(super) fn name_value(&mut self, name: &Spanned<String>) -> Option<Evaluated> {
        let Some(frame) = self.find(&name.value) else {
            let finding = self.unknown_name(name);
            self.report(finding);
            return None;
        };
        let key = &name.value;
        let binding = self.frames[frame].bindings.get_mut(key)?;
        match binding.state {
            State::Done(value) => return value,
            State::Working => {
                self.report_cycle(frame, name);
                return None;
            }
            State::Waiting => binding.state = State::Working,
        }
        let (home, value) = (binding.home, binding.value.clone());
        let outer = std::mem::replace(&mut self.current, home);
        self.trail.push((frame, key.clone()));
        let evaluated = match &value.expression {
            Some(expression) => {
                self.evaluate(expression, value.up_to.as_ref().and_then(super::unit_text).as_ref())
            }
            None => None,
        };
        self.trail.pop();
        self.current = outer;
        if let Some(binding) = self.frames[frame].bindings.get_mut(key) {
            binding.state = State::Done(evaluated);
        }
        evaluated
    }

    /// A name that stands for a free value without a number cannot be reckoned with.
    fn report_unsettled(&mut self, name: &Spanned<String>) {
        if self.binding(&name.value).is_none_or(|it| it.value.expression.is_some()) {
            return;
        }
        let called = &name.value;
        self.report(
            Finding::error("value.missing", format!("`{called}` is left free and has no value"))
                .at(name.span, "no number yet")
                .help(format!(
                    "write a number before `free`, such as `let {called} = 700 nm free 300 .. 1200 nm`"
                )),
        );
    }

    fn report_cycle(&mut self, frame: usize, name: &Spanned<String>) {
        let from = self.trail.iter().position(|(at, key)| *at == frame && *key == name.value).unwrap_or(0);
        let mut way: Vec<String> = self.trail[from..].iter().map(|(_, key)| format!("`{key}`")).collect();
        way.push(format!("`{}`", name.value));
        let first = self.frames[frame].bindings[&name.value].name.span;
        self.report(
            Finding::error("name.cycle", format!("`{}` depends on itself: {}", name.value, way.join(" → ")))
                .at(name.span, "leads back here")
                .beside(first, "stated here")
                .help(format!(
                    "give `{}` a value of its own, such as `let {} = 700 nm`",
                    name.value, name.value
                )),
        );
    }

    fn unknown_name(&self, name: &Spanned<String>) -> Finding {
        let mut known: Vec<&str> = Vec::new();
        let mut frame = Some(self.current);
        while let Some(at) = frame {
            known.extend(self.frames[at].bindings.keys().map(String::as_str));
            frame = self.frames[at].parent;
        }
        known.sort_unstable();
        if name.value.contains('.') {
            return Finding::error("name.unknown", format!("`{}` cannot stand in an expression", name.value))
                .at(name.span, "a path to a layer, not a `let`")
                .help("name the quantity once, such as `let d = 700 nm`, and use `d` in both places");
        }
        names::unknown(
            "quantity",
            name,
            known.into_iter(),
            "write a number with its unit, such as `700 nm`, or state `let` for it",
        )
    }

    fn binary(
        &mut self,
        operator: &Spanned<Operator>,
        sides: [(Evaluated, Span); 2],
        span: Span,
    ) -> Option<Evaluated> {
        let [(left, left_span), (right, right_span)] = sides;
        let (l, r) = (left.quantity, right.quantity);
        let bare = left.bare && right.bare;
        match operator.value {
            Operator::Add | Operator::Subtract => {
                self.same(sides, "added or subtracted")?;
                let minus = operator.value == Operator::Subtract;
                // Between two Celsius readings a difference is a span of temperature; a sum takes
                // the second as one.
                let right_si = if left.celsius && right.celsius && !minus {
                    r.si - crate::units::table::ZERO_CELSIUS
                } else {
                    r.si
                };
                let si = if minus { l.si - right_si } else { l.si + right_si };
                let quantity = Quantity { si, dimension: l.dimension };
                self.finite(Evaluated { quantity, bare, celsius: false }, span)
            }
            Operator::Multiply | Operator::Divide => {
                self.no_celsius(left, left_span)?;
                self.no_celsius(right, right_span)?;
                let quantity = if operator.value == Operator::Multiply {
                    Quantity { si: l.si * r.si, dimension: l.dimension * r.dimension }
                } else {
                    if r.si == 0.0 {
                        self.report(
                            Finding::error("value.range", "a division by zero")
                                .at(right_span, "zero")
                                .help("divide by a value other than zero"),
                        );
                        return None;
                    }
                    Quantity { si: l.si / r.si, dimension: l.dimension / r.dimension }
                };
                self.finite(Evaluated { quantity, bare, celsius: false }, span)
            }
            Operator::Power => {
                self.no_celsius(left, left_span)?;
                if !r.dimension.is_none() {
                    self.report(
                        Finding::error(
                            "unit.dimension",
                            format!("an exponent takes a plain number, not {}", r.dimension.name()),
                        )
                        .at(right_span, r.dimension.name())
                        .help("write the exponent without a unit, such as `^2`"),
                    );
                    return None;
                }
                let Some(dimension) = l.dimension.power(r.si) else {
                    self.report(
                        Finding::error(
                            "unit.dimension",
                            format!("{} to the power {} has no unit", l.dimension.name(), r.si),
                        )
                        .at(right_span, "the exponent")
                        .help("use a whole exponent or a half, such as `^0.5`"),
                    );
                    return None;
                };
                let quantity = Quantity { si: l.si.powf(r.si), dimension };
                self.finite(Evaluated { quantity, bare, celsius: false }, span)
            }
        }
    }

    fn call(
        &mut self,
        function: &Spanned<String>,
        arguments: &[(Evaluated, Span)],
        span: Span,
    ) -> Option<Evaluated> {
        let takes = match function.value.as_str() {
            "sqrt" => arguments.len() == 1,
            "min" | "max" => arguments.len() >= 2,
            _ => {
                let finding = names::unknown(
                    "function",
                    function,
                    FUNCTIONS.iter().copied(),
                    "use one of `min`, `max`, `sqrt`",
                );
                self.report(finding);
                return None;
            }
        };
        let [first, rest @ ..] = arguments else {
            self.wrong_count(function, 0, span);
            return None;
        };
        if !takes {
            self.wrong_count(function, arguments.len(), span);
            return None;
        }
        if function.value == "sqrt" {
            let (value, at) = *first;
            let root = Spanned::new(Operator::Power, function.span);
            let half = Quantity { si: 0.5, dimension: Dimension::NONE };
            if value.quantity.si < 0.0 {
                self.report(
                    Finding::error("value.range", "the root of a negative value")
                        .at(at, "negative")
                        .help("write `sqrt` of a value that is zero or more"),
                );
                return None;
            }
            let half = Evaluated { quantity: half, bare: true, celsius: false };
            let mut evaluated = self.binary(&root, [(value, at), (half, at)], span)?;
            evaluated.bare = value.bare;
            return Some(evaluated);
        }
        let mut best = first.0;
        for other in rest {
            self.same([*first, *other], "compared")?;
            let better = if function.value == "min" {
                other.0.quantity.si < best.quantity.si
            } else {
                other.0.quantity.si > best.quantity.si
            };
            if better {
                best = other.0;
            }
        }
        Some(Evaluated { celsius: false, ..best })
    }

    fn wrong_count(&mut self, function: &Spanned<String>, given: usize, span: Span) {
        let takes = if function.value == "sqrt" { "1 value" } else { "2 values or more" };
        self.report(
            Finding::error("value.range", format!("`{}` takes {takes}, not {given}", function.value))
                .at(span, format!("{given} given"))
                .help(format!("write `{}`", if function.value == "sqrt" { "sqrt(d)" } else { "min(a, b)" })),
        );
    }

    /// Both sides of a sum or a comparison must measure the same.
    fn same(&mut self, sides: [(Evaluated, Span); 2], verb: &str) -> Option<()> {
        let [(left, left_span), (right, right_span)] = sides;
        let (l, r) = (left.quantity.dimension, right.quantity.dimension);
        if l == r {
            return Some(());
        }
        let (code, message) = match (left.bare, right.bare) {
            (true, _) | (_, true) => (
                "unit.missing",
                format!(
                    "a number without a unit and {} cannot be {verb}",
                    if left.bare { r } else { l }.name()
                ),
            ),
            _ => ("unit.dimension", format!("{} and {} cannot be {verb}", l.name(), r.name())),
        };
        let (at, other) = if left.bare { (left_span, right_span) } else { (right_span, left_span) };
        let (here, there) = if left.bare { (l, r) } else { (r, l) };
        let unit = crate::units::format::usual(there).unwrap_or("a unit");
        self.report(
            Finding::error(code, message)
                .at(at, here.name())
                .beside(other, there.name())
                .help(format!("give this side as {} too, in `{unit}`", there.name())),
        );
        None
    }

    fn no_celsius(&mut self, side: Evaluated, span: Span) -> Option<()> {
        if !side.celsius {
            return Some(());
        }
        let kelvin = crate::units::in_unit(side.quantity.si, "K");
        self.report(
            Finding::error(
                "unit.dimension",
                "a reading on the Celsius scale cannot be multiplied or divided",
            )
            .at(span, "its zero is not absolute zero")
            .help(format!("write `{kelvin}`, or take a difference of two readings first")),
        );
        None
    }

    fn finite(&mut self, evaluated: Evaluated, span: Span) -> Option<Evaluated> {
        if evaluated.quantity.si.is_finite() {
            return Some(evaluated);
        }
        self.report(
            Finding::error("value.range", "the value is not a finite number")
                .at(span, "too large, or the root of a negative value")
                .help("check the exponents: values from 1e-300 to 1e300 can be worked with"),
        );
        None
    }
}

fn unknown_unit(text: &Spanned<String>, wrong: &UnknownUnit) -> Finding {
    let finding = Finding::error("unit.unknown", format!("`{}` is not a unit", wrong.part))
        .at(text.span, "an unknown unit");
    match &wrong.meant {
        Some(meant) => finding.help(format!("write `{meant}`")).fix(text.span, meant.clone(), false),
        None => {
            finding.help("write a unit such as `nm`, `um`, `eV`, `degC`, `/cm3`, `mA/cm2`, `ohm cm2` or `%`")
        }
    }
}
