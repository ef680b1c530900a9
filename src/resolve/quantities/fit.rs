//! Whether a value suits its slot: dimension, range, and magnitude.

use crate::finding::Finding;
use crate::resolve::quantities::{Evaluated, Expected, Role, Scope};
use crate::source::Span;
use crate::syntax::{Expression, Number};
use crate::units::{Dimension, electronvolt_nanometre, in_unit, number, parse, trade};

impl Scope {
    /// The SI value, or a finding that says what the slot takes.
    pub(super) fn fit(
        &mut self,
        evaluated: Evaluated,
        expression: &Expression,
        expected: Expected<'_>,
    ) -> Option<f64> {
        let (si, used) = (evaluated.quantity.si, expression.span());
        let given = evaluated.quantity.dimension;
        if evaluated.bare && (!expected.dimension.is_none() || expected.role.needs_word()) {
            let (place, literal) = self.origin(expression);
            let finding = bare(si, place, literal, expected);
            let finding = if place == used { finding } else { finding.beside(used, "used here") };
            self.report(finding);
            return None;
        }
        let problem = |this: &mut Self, made: &dyn Fn(&Expression) -> Finding| {
            let blamed = this.blamed(expression);
            let finding = made(&blamed);
            let elsewhere = blamed.span() != used;
            this.report(if elsewhere { finding.beside(used, "used here") } else { finding });
        };
        if given != expected.dimension {
            problem(self, &|blamed| mismatch(si, given, blamed, expected));
            return None;
        }
        // A Celsius reading where a difference is due counts its degrees only.
        let si = if evaluated.celsius && expected.role == Role::Difference {
            si - crate::units::table::ZERO_CELSIUS
        } else {
            si
        };
        if !expected.role.possible(si) {
            problem(self, &|blamed| out_of_range(si, blamed, expected));
            return None;
        }
        if expected.role == Role::Count && si.fract() != 0.0 {
            problem(self, &|blamed| {
                Finding::error(
                    "value.range",
                    format!("{} takes a whole number, not {}", expected.called(), number(si)),
                )
                .at(blamed.span(), "not a whole number")
                .help(format!("write `{}`", number(si.round().max(1.0))))
            });
            return None;
        }
        if expected.role.likely().is_some_and(|(low, high)| !(low..=high).contains(&si)) {
            problem(self, &|blamed| unlikely(si, blamed, expected));
        }
        Some(si)
    }

    /// Where a bare number was written: through names, to the literal behind them.
    fn origin(&self, expression: &Expression) -> (Span, Option<Number>) {
        let behind = self.trace(expression);
        let last = behind.last().and_then(|binding| binding.value.expression.as_ref()).unwrap_or(expression);
        match last {
            Expression::Number(number) => (number.span, Some(number.clone())),
            _ => (expression.span(), None),
        }
    }

    /// What is to blame for a wrong value: the expression itself, but for a parameter of a placed
    /// part the value given there.
    fn blamed(&self, expression: &Expression) -> Expression {
        let behind = self.trace(expression);
        let given = behind.iter().take_while(|binding| binding.argument).last();
        given.and_then(|binding| binding.value.expression.as_ref()).unwrap_or(expression).clone()
    }
}

/// A number whose unit is missing, or a share or multiple that does not say so.
fn bare(value: f64, span: Span, literal: Option<Number>, expected: Expected<'_>) -> Finding {
    let digits = literal.map_or_else(|| number(value), |it| it.text.value.replace(',', "."));
    let slot = expected.called();
    match expected.role {
        Role::Share | Role::PositiveShare | Role::Loss | Role::Ratio if value > 0.0 && value <= 1.0 => {
            let percent = number(value * 100.0);
            Finding::error(
                "unit.unlikely",
                format!("{slot} of `{digits}` does not say whether it is {percent} % or {digits} %"),
            )
            .at(span, "a share without `%`")
            .help(format!("write `{percent} %`, or `{digits} %` if that is meant"))
            .fix(span, format!("{percent} %"), false)
        }
        Role::Concentration => {
            let kilowatts = number(value);
            Finding::error(
                "unit.unlikely",
                format!("{slot} of `{digits}` does not say whether it is {digits} times the light or {kilowatts} kW/m2"),
            )
            .at(span, "times, or kW/m2?")
            .help(format!("write `{digits} times`, or `irradiance {digits} kW/m2` instead"))
            .fix(span, format!("{digits} times"), false)
        }
        Role::Gap if (200.0..=20_000.0).contains(&value) => {
            let ev = in_unit(electronvolt_nanometre(value) * crate::units::ELEMENTARY_CHARGE, "eV");
            Finding::error("unit.missing", format!("{slot} has no unit: `{digits}`"))
                .at(span, "a bare number")
                .help(format!("write `{ev}` if {digits} nm was meant"))
                .fix(span, ev, false)
        }
        role => {
            let finding = Finding::error("unit.missing", format!("{slot} has no unit: `{digits}`"))
                .at(span, "a bare number");
            match role.unit_for(value, expected.dimension) {
                Some(unit) => finding.help(format!("write `{digits} {unit}`")).fix(
                    span,
                    format!("{digits} {unit}"),
                    false,
                ),
                None => finding.help(format!(
                    "give {}, in `{}`",
                    expected.dimension.name(),
                    expected.dimension.si_unit()
                )),
            }
        }
    }
}

/// A value of another dimension; the missing factor is worked out where there is one.
fn mismatch(si: f64, given: Dimension, expression: &Expression, expected: Expected<'_>) -> Finding {
    let (span, wanted, slot) = (expression.span(), expected.dimension, expected.called());
    let written = written(si, given, expression);
    let finding = Finding::error(
        "unit.dimension",
        format!("{slot} takes {}, and `{written}` is {}", expected.kind(), given.name()),
    )
    .at(span, given.name());
    let photon = |finding: Finding, text: String| {
        finding.help(format!("write `{text}`, the photon energy at that wavelength")).fix(span, text, false)
    };
    if wanted == Dimension::ENERGY && given == Dimension::LENGTH && si > 0.0 {
        let energy = electronvolt_nanometre(si * 1e9) * crate::units::ELEMENTARY_CHARGE;
        return photon(finding, in_unit(energy, "eV"));
    }
    if wanted == Dimension::LENGTH && given == Dimension::ENERGY && si > 0.0 {
        let nanometres = electronvolt_nanometre(si / crate::units::ELEMENTARY_CHARGE);
        let text = in_unit(nanometres * 1e-9, "nm");
        return finding.help(format!("write `{text}`, the wavelength at that photon energy"));
    }
    let replacement = match expression {
        Expression::Number(literal) => mended(literal, given, expected),
        _ => None,
    };
    // A percentage in disguise keeps its digits.
    let share = matches!(expected.role, Role::Share | Role::PositiveShare | Role::Loss);
    let replacement = replacement.or_else(|| match expression {
        Expression::Number(literal) if share && literal.value > 1.0 && literal.value <= 100.0 => {
            Some(format!("{} %", literal.text.value.replace(',', ".")))
        }
        _ => None,
    });
    if let Some(text) = replacement {
        return finding.help(format!("write `{text}`")).fix(span, text, false);
    }
    finding.help(format!("write {}, such as `{}`", expected.kind(), example(expected)))
}

/// The literal with the factor it lacks, or with the unit that was meant.
fn mended(literal: &Number, given: Dimension, expected: Expected<'_>) -> Option<String> {
    let (wanted, digits) = (expected.dimension, literal.text.value.replace(',', "."));
    let unit = literal.unit.as_ref()?.value.trim().to_owned();
    let lengths =
        [Dimension::LENGTH, Dimension::AREA, Dimension::VOLUME].map(|it| [it, it.inverse()]).concat();
    // Between /cm2 and /cm3 one unit was mistaken for the other; nothing is missing.
    if lengths.contains(&wanted) && lengths.contains(&given) {
        let unit = expected.role.unit_for(literal.value, wanted)?;
        return expected.role.plausible(literal.value, unit).then(|| format!("{digits} {unit}"));
    }
    if (wanted == Dimension::ENERGY && given == Dimension::VOLTAGE)
        || (wanted == Dimension::VOLTAGE && given == Dimension::ENERGY)
    {
        let other =
            if wanted == Dimension::ENERGY { unit.replace('V', "eV") } else { unit.replace("eV", "V") };
        return parse(&other).is_ok_and(|it| it.dimension == wanted).then(|| format!("{digits} {other}"));
    }
    // The unit one writes here may well begin with what was written: `um/h` for `um`.
    let longer = expected.role.units(wanted).iter().find(|known| known.starts_with(&unit) && **known != unit);
    if let Some(longer) = longer {
        return Some(format!("{digits} {longer}"));
    }
    // `A` for the ångström.
    if wanted == Dimension::LENGTH && unit == "A" {
        return Some(format!("{digits} Å"));
    }
    // Divided by an area where it should be multiplied.
    if wanted / given == Dimension::AREA * Dimension::AREA && unit.contains("/cm2") {
        return Some(format!("{digits} {}", unit.replace("/cm2", " cm2")));
    }
    let factor = match wanted / given {
        Dimension::AREA => " cm2",
        Dimension::PER_AREA => "/cm2",
        Dimension::LENGTH => " cm",
        Dimension::PER_LENGTH => "/cm",
        Dimension::PER_VOLUME => "/cm3",
        Dimension::PER_TEMPERATURE => "/K",
        ratio if ratio == Dimension::TIME.inverse() => "/s",
        ratio if ratio == Dimension::MOBILITY / Dimension::AREA => "/V/s",
        _ => return None,
    };
    (!given.is_none()).then(|| format!("{digits} {unit}{factor}"))
}

fn out_of_range(si: f64, expression: &Expression, expected: Expected<'_>) -> Finding {
    let span = expression.span();
    let (slot, text) = (expected.called(), written(si, expected.dimension, expression));
    let error = |message: String, label: &str, help: String| {
        Finding::error("value.range", message).at(span, label).help(help)
    };
    match expected.role {
        Role::CellTemperature | Role::GrowthTemperature | Role::SourceTemperature => error(
            format!("{slot} of `{text}` is not above absolute zero"),
            "absolute zero is -273.15 degC",
            format!("write {}", nearest_temperature(expression, expected)),
        ),
        Role::Loss if si == 1.0 => error(
            format!("{slot} is 100 %, so no light is left for the junctions"),
            "nothing is left",
            format!("write a smaller share, such as `{}`", example(expected)),
        ),
        Role::Share | Role::PositiveShare | Role::Loss | Role::Fraction => {
            let percent = |share: f64| format!("{} %", number(share * 100.0));
            let (given, most) = match expected.role {
                Role::Fraction => (number(si), "1".to_owned()),
                _ => (percent(si), "100 %".to_owned()),
            };
            let side = if si > 1.0 {
                format!("over {most}")
            } else if si < 0.0 {
                "negative".to_owned()
            } else {
                "zero".to_owned()
            };
            error(
                format!("{slot} is {given}, {side}"),
                &side,
                match expected.role {
                    Role::PositiveShare => {
                        format!("write a value above 0 and up to {most}, such as `{}`", example(expected))
                    }
                    _ => format!("write a value from 0 to {most}, such as `{}`", example(expected)),
                },
            )
        }
        Role::Count => error(
            format!("{slot} is {text}, and it takes a whole number from 1 to 10000"),
            "not from 1 to 10000",
            "write `1` or more".to_owned(),
        ),
        Role::Incidence => error(
            format!("{slot} of `{text}` is not between 0 and 90 deg"),
            "not from 0 to 90 deg",
            "write an angle such as `30 deg`".to_owned(),
        ),
        _ => {
            let side = if si < 0.0 { "negative" } else { "zero" };
            error(
                format!("{slot} is {side}: `{text}`"),
                side,
                format!("write a value above zero, such as `{}`", example(expected)),
            )
        }
    }
}

fn nearest_temperature(expression: &Expression, expected: Expected<'_>) -> String {
    let value = match expression {
        Expression::Number(number) => number.value,
        Expression::Negate(inner, _) => match &**inner {
            Expression::Number(number) => number.value,
            _ => f64::NAN,
        },
        _ => f64::NAN,
    };
    if value > 0.0 && expected.role.plausible(value, "K") {
        return format!("`{} K`", number(value));
    }
    format!("a temperature such as `{}`", example(expected))
}

fn unlikely(si: f64, expression: &Expression, expected: Expected<'_>) -> Finding {
    let span = expression.span();
    let (slot, text) = (expected.called(), written(si, expected.dimension, expression));
    let size = match expected.role.likely() {
        Some((_, high)) if si > high => "larger",
        _ => "smaller",
    };
    let finding =
        Finding::warning("unit.unlikely", format!("{slot} of {text} is far {size} than is met in practice"));
    let literal = match expression {
        Expression::Number(number) => Some(number),
        _ => None,
    };
    let other = literal.and_then(|literal| {
        expected
            .role
            .units(expected.dimension)
            .iter()
            .find(|unit| expected.role.plausible(literal.value, unit))
            .map(|unit| format!("{} {unit}", literal.text.value.replace(',', ".")))
    });
    match other {
        Some(other) => finding
            .at(span, format!("did you mean `{other}`?"))
            .help(format!("write `{other}`"))
            .fix(span, other, false),
        None => {
            let (low, high) = expected.role.likely().unwrap_or((0.0, 0.0));
            let (low, high) = (trade(low, expected.dimension), trade(high, expected.dimension));
            finding
                .at(span, format!("usual are {low} to {high}"))
                .help(format!("write a value such as `{}`", example(expected)))
        }
    }
}

/// The value as the user wrote it, or in trade units where it was worked out.
fn written(si: f64, dimension: Dimension, expression: &Expression) -> String {
    match expression {
        Expression::Number(number) => literal_text(number),
        Expression::Negate(inner, _) => match &**inner {
            Expression::Number(number) => format!("-{}", literal_text(number)),
            _ => trade(si, dimension),
        },
        _ => trade(si, dimension),
    }
}

fn literal_text(number: &Number) -> String {
    match &number.unit {
        Some(unit) => format!("{} {}", number.text.value, unit.value),
        None => number.text.value.clone(),
    }
}

impl Expected<'_> {
    /// A value nobody would stumble over in such a slot.
    pub(crate) fn example(&self) -> &'static str {
        example(*self)
    }
}

/// A value nobody would stumble over in such a slot.
fn example(expected: Expected<'_>) -> &'static str {
    // Some slots lie orders of magnitude from others of their dimension.
    match expected.slot {
        "j01" | "j02" => return "2e-12 A/cm2",
        "shunt" => return "1e6 ohm cm2",
        _ => {}
    }
    match (expected.role, expected.dimension) {
        (Role::ThinLayer, _) => "50 nm",
        (Role::ThickLayer, _) => "3.5 um",
        (Role::Coat, _) => "95 nm",
        (Role::Wafer, _) => "350 um",
        (Role::Doping, _) => "1e17 /cm3",
        (Role::Gap, _) => "1.42 eV",
        (Role::CellTemperature, _) => "25 degC",
        (Role::GrowthTemperature, _) => "650 degC",
        (Role::GrowthRate, _) => "2 um/h",
        (Role::SourceTemperature, _) => "5800 K",
        (Role::Share | Role::PositiveShare | Role::Loss | Role::Ratio, _) => "3 %",
        (Role::Fraction, _) => "0.49",
        (Role::Concentration, _) => "500 times",
        (Role::Count, _) => "8",
        (Role::Incidence, _) => "30 deg",
        (Role::Irradiance, _) | (_, Dimension::IRRADIANCE) => "1000 W/m2",
        (_, Dimension::LENGTH) => "20 um",
        (_, Dimension::TIME) => "10 ns",
        (_, Dimension::VELOCITY) => "1e3 cm/s",
        (_, Dimension::MOBILITY) => "3000 cm2/V/s",
        (_, Dimension::RESISTANCE_AREA) => "20 mohm cm2",
        (_, Dimension::RESISTANCE) => "50 ohm/sq",
        (_, Dimension::CURRENT_DENSITY) => "14 mA/cm2",
        (_, Dimension::VOLTAGE) => "2.3 V",
        (_, Dimension::ENERGY) => "1.42 eV",
        (_, Dimension::AREA) => "1 cm2",
        (_, Dimension::PER_AREA) => "1e15 /cm2",
        (_, Dimension::PER_VOLUME) => "1e17 /cm3",
        (_, Dimension::TEMPERATURE) => "25 degC",
        (_, Dimension::ANGLE) => "6 deg",
        (_, Dimension::PRESSURE) => "100 GPa",
        (_, Dimension::DENSITY) => "5.3 g/cm3",
        (_, Dimension::NONE) => "28 %",
        _ => "1",
    }
}
