//! Conditions side by side: cell, junctions, what joins them, the grid, what a kelvin does, what
//! life in orbit leaves.

use crate::numerics::constants::CHARGE;
use crate::report::context::Context;
use crate::report::figure::power::power_words;
use crate::report::number::{
    celsius, current, doping, fixed, percent, short, signed, significant, thickness, with_unit,
};
use crate::report::text::{Text, visible};
use crate::report::view::electrical::{by_condition, row, volts};
use crate::report::view::layers::{capital, joined};
use crate::report::view::{Section, Table};
use crate::results::{
    ConditionResult, JunctionResult, JunctionTemperature, TemperatureCoefficients, TunnelResult,
};

/// Every junction under every condition.
pub fn conditions(context: &Context<'_>) -> Section {
    let several = context.results.conditions.len() > 1;
    let mut section =
        Section::new("conditions", if several { "Conditions side by side" } else { "Junction by junction" });
    section.tables.push(side_by_side(context, several));
    section.tables.extend(tunnels(context));
    section.tables.extend(grid(context));
    section.tables.extend(per_kelvin(context));
    section.tables.extend(remaining(context));
    if several {
        let words: Vec<String> = context
            .results
            .conditions
            .iter()
            .skip(1)
            .map(|condition| {
                let points = (condition.efficiency - context.drawn.efficiency) * 100.0;
                format!("{} {} points", visible(&condition.name), signed(points, 2))
            })
            .collect();
        section.lede = Some(Text::of(format!(
            "Efficiency against {}: {}.",
            visible(&context.drawn.name),
            joined(&words)
        )));
    }
    section.notes.push(Text::of(format!(
        "{} are each junction’s by itself; the voltage at the greatest power is its share of the stack’s.",
        capital("open circuit, short circuit and fill factor")
    )));
    if context.results.conditions.iter().any(|c| c.temperature_coefficients.is_some()) {
        section.notes.push(Text::of("Per kelvin of cell temperature, the light kept: central differences."));
    }
    section
}

fn roomy(context: &Context<'_>) -> &'static str {
    if context.results.conditions.len() > 4 { "roomy" } else { "" }
}

fn side_by_side(context: &Context<'_>, several: bool) -> Table {
    let caption = if several { "The same stack under each condition" } else { "The stack and its junctions" };
    let mut table = by_condition(context, caption);
    table.kind = roomy(context);
    table.group(Text::of("cell"));
    row(&mut table, context, Text::of("light"), &|c| Some(visible(&c.light)));
    row(&mut table, context, Text::of("received"), &|c| Some(power_words(c.incident_w_per_m2)));
    row(&mut table, context, Text::of("temperature"), &|c| Some(celsius(c.temperature_k)));
    row(&mut table, context, Text::of("fluence"), &|c| fluence_words(context, c));
    row(&mut table, context, Text::of("reflected"), &|c| Some(current(c.reflected_ma_per_cm2)));
    for (index, junction) in context.drawn.junctions.iter().enumerate() {
        table.group(Text::of("junction ").p(junction.name.clone()));
        let mut add = |name: Text, of: &dyn Fn(&JunctionResult) -> Option<String>| {
            row(&mut table, context, name, &|c| c.junctions.get(index).and_then(of));
        };
        let dark = |value: f64| with_unit(&significant(value, 3), "A/cm²");
        let anywhere = |of: &dyn Fn(&JunctionResult) -> bool| {
            context.results.conditions.iter().filter_map(|c| c.junctions.get(index)).any(of)
        };
        let coupled = anywhere(&|j| j.coupled_ma_per_cm2.abs() > 1e-4 * j.photocurrent_ma_per_cm2);
        let reversed = anywhere(&|j| j.voltage_at_short_circuit_v < -0.005);
        add(Text::of("gap"), &|j| Some(with_unit(&fixed(j.gap_ev, 3), "eV")));
        add(Text::of("photocurrent"), &|j| Some(current(j.photocurrent_ma_per_cm2)));
        add(Text::of("collected of what it absorbs"), &|j| {
            j.collection_efficiency.map(|share| percent(share, 1))
        });
        if coupled {
            add(Text::of("from light of junctions above"), &|j| Some(current(j.coupled_ma_per_cm2)));
        }
        add(Text::new().symbol("J", "sc"), &|j| Some(current(j.jsc_ma_per_cm2)));
        add(Text::new().symbol("V", "oc"), &|j| Some(volts(j.voc_v)));
        add(Text::of("fill factor"), &|j| Some(percent(j.fill_factor, 2)));
        add(Text::of("voltage at the greatest power"), &|j| Some(volts(j.voltage_at_mpp_v)));
        if reversed {
            add(Text::of("voltage with the stack shorted"), &|j| Some(volts(j.voltage_at_short_circuit_v)));
        }
        add(Text::of("dark current, radiative"), &|j| Some(dark(j.dark_current_radiative_a_per_cm2)));
        add(Text::of("dark current, diffusion"), &|j| j.dark_current_diffusion_a_per_cm2.map(dark));
        add(Text::of("dark current, depletion"), &|j| j.dark_current_depletion_a_per_cm2.map(dark));
        add(Text::of("depletion width"), &|j| j.depletion_width_nm.map(thickness));
    }
    table
}

/// `1e15 /cm² of electrons of 1 MeV`
fn fluence_words(context: &Context<'_>, result: &ConditionResult) -> Option<String> {
    let fluence = context.condition(result)?.fluence.as_ref()?;
    let energy = with_unit(&short(fluence.energy_j / CHARGE * 1e-6), "MeV");
    let per_cm2 = with_unit(&doping(fluence.per_m2 * 1e-4), "/cm²");
    Some(format!("{per_cm2} of {} of {energy}", fluence.particle.word()))
}

/// What stands between the junctions; `None` where nothing does.
fn tunnels(context: &Context<'_>) -> Option<Table> {
    let names: Vec<&str> = context.drawn.tunnels.iter().map(|tunnel| tunnel.name.as_str()).collect();
    if names.is_empty() {
        return None;
    }
    let mut table = by_condition(context, "Between the junctions, at the greatest power");
    table.kind = roomy(context);
    for name in names {
        table.group(Text::of(name));
        let mut add = |words: &str, of: &dyn Fn(&TunnelResult) -> Option<String>| {
            let of = |c: &ConditionResult| c.tunnels.iter().find(|tunnel| tunnel.name == name).and_then(of);
            row(&mut table, context, Text::of(words), &of);
        };
        add("current asked of it", &|t| Some(current(t.demanded_ma_per_cm2)));
        add("peak", &|t| t.peak_ma_per_cm2.map(current));
        add("share of the peak", &|t| {
            let peak = t.peak_ma_per_cm2.filter(|peak| *peak > 0.0)?;
            Some(percent(t.demanded_ma_per_cm2 / peak, 2))
        });
        add("voltage lost", &|t| Some(with_unit(&significant(t.voltage_at_mpp_v * 1000.0, 3), "mV")));
        add("works", &|t| {
            t.peak_ma_per_cm2?;
            Some(if t.beyond_peak { "beyond its peak" } else { "below its peak" }.into())
        });
    }
    Some(table)
}

/// The front grid; `None` without one.
fn grid(context: &Context<'_>) -> Option<Table> {
    context.drawn.grid.as_ref()?;
    let mut table = by_condition(context, "The front grid");
    table.kind = roomy(context);
    let mut add = |words: &str, of: &dyn Fn(&crate::results::GridResult) -> Option<String>| {
        row(&mut table, context, Text::of(words), &|c| c.grid.as_ref().and_then(of));
    };
    let ohm = |value: f64| with_unit(&significant(value * 1000.0, 3), "mΩ cm²");
    add("area covered", &|g| Some(percent(g.shading, 2)));
    add("series resistance", &|g| Some(ohm(g.series_resistance_ohm_cm2)));
    add("of it, along the layers to a finger", &|g| g.lateral_ohm_cm2.map(ohm));
    add("of it, into the metal", &|g| g.contact_ohm_cm2.map(ohm));
    add("of it, along the fingers", &|g| g.metal_ohm_cm2.map(ohm));
    add("sheet resistance of the front layers", &|g| {
        g.sheet_ohm_per_square.map(|ohm| with_unit(&significant(ohm, 3), "Ω/sq"))
    });
    Some(table)
}

/// What a kelvin does; `None` where it was not worked out.
fn per_kelvin(context: &Context<'_>) -> Option<Table> {
    let any = context.results.conditions.iter().any(|c| c.temperature_coefficients.is_some());
    if !any {
        return None;
    }
    let mut table = by_condition(context, "For each kelvin the cell grows warmer");
    table.kind = roomy(context);
    table.group(Text::of("cell"));
    let mut add = |name: Text, of: &dyn Fn(&TemperatureCoefficients) -> Option<String>| {
        row(&mut table, context, name, &|c| c.temperature_coefficients.as_ref().and_then(of));
    };
    let relative = |value: f64| with_unit(&signed(value * 100.0, 4), "%");
    add(Text::of("efficiency, points"), &|t| Some(signed(t.efficiency_per_k * 100.0, 4)));
    add(Text::of("efficiency, of itself"), &|t| Some(relative(t.efficiency_relative_per_k)));
    add(Text::new().symbol("V", "oc"), &|t| t.voc_mv_per_k.map(|mv| with_unit(&signed(mv, 3), "mV")));
    add(Text::new().symbol("V", "oc").p(", of itself"), &|t| t.voc_relative_per_k.map(relative));
    add(Text::new().symbol("J", "sc"), &|t| t.jsc_ma_per_cm2_per_k.map(small_current));
    add(Text::new().symbol("J", "sc").p(", of itself"), &|t| t.jsc_relative_per_k.map(relative));
    add(Text::of("fill factor, points"), &|t| t.fill_factor_per_k.map(|ff| signed(ff * 100.0, 4)));
    for (index, junction) in context.drawn.junctions.iter().enumerate() {
        table.group(Text::of("junction ").p(junction.name.clone()));
        let mut add = |name: Text, of: &dyn Fn(&JunctionTemperature) -> String| {
            row(&mut table, context, name, &|c| {
                c.temperature_coefficients.as_ref()?.junctions.get(index).map(of)
            });
        };
        add(Text::of("gap"), &|j| with_unit(&signed(j.gap_mev_per_k, 3), "meV"));
        add(Text::new().symbol("V", "oc"), &|j| with_unit(&signed(j.voc_mv_per_k, 3), "mV"));
        add(Text::of("photocurrent"), &|j| small_current(j.photocurrent_ma_per_cm2_per_k));
    }
    Some(table)
}

fn small_current(ma: f64) -> String {
    match ma.abs() {
        x if x < 0.9995 => with_unit(&signed(ma * 1000.0, 2), "µA/cm²"),
        _ => with_unit(&signed(ma, 3), "mA/cm²"),
    }
}

/// What a fluence leaves, against the same condition without it; `None` where no two conditions
/// differ in their fluence alone.
fn remaining(context: &Context<'_>) -> Option<Table> {
    let fresh_of = |aged: &ConditionResult| -> Option<&ConditionResult> {
        let own = context.condition(aged)?;
        own.fluence.as_ref()?;
        context.results.conditions.iter().find(|other| {
            context.condition(other).is_some_and(|it| {
                it.fluence.is_none()
                    && it.light.name == own.light.name
                    && it.concentration == own.concentration
                    && it.temperature_k == own.temperature_k
                    && it.incidence_rad == own.incidence_rad
            })
        })
    };
    let pairs: Vec<(&ConditionResult, &ConditionResult)> =
        context.results.conditions.iter().filter_map(|aged| Some((aged, fresh_of(aged)?))).collect();
    if pairs.is_empty() {
        return None;
    }
    let mut table = Table::new(
        Text::of("Begin and end of life: what the fluence leaves"),
        &["figure", ">begin of life", ">end of life", ">remains"],
    );
    for (aged, fresh) in &pairs {
        let fluence = fluence_words(context, aged).unwrap_or_default();
        table.group(Text::of(format!("{} against {}: {fluence}", visible(&aged.name), visible(&fresh.name))));
        let mut add =
            |name: Text, of: &dyn Fn(&ConditionResult) -> Option<f64>, words: &dyn Fn(f64) -> String| {
                let Some((before, after)) = of(fresh).zip(of(aged)) else { return };
                let share = if before.abs() > 0.0 { percent(after / before, 1) } else { "–".into() };
                table.row(vec![name, Text::of(words(before)), Text::of(words(after)), Text::of(share)]);
            };
        add(Text::of("efficiency"), &|c| Some(c.efficiency), &|v| percent(v, 2));
        add(Text::of("power"), &|c| Some(c.power_w_per_m2), &power_words);
        add(Text::new().symbol("V", "oc"), &|c| c.voc_v, &volts);
        add(Text::new().symbol("J", "sc"), &|c| c.jsc_ma_per_cm2, &current);
        add(Text::of("fill factor"), &|c| c.fill_factor, &|v| percent(v, 2));
        for (index, junction) in fresh.junctions.iter().enumerate() {
            let name = |what: &str| Text::of(junction.name.clone()).p(format!(", {what}"));
            let of = |c: &ConditionResult| c.junctions.get(index).map(|j| j.photocurrent_ma_per_cm2);
            add(name("photocurrent"), &of, &current);
            add(name("open circuit"), &|c| c.junctions.get(index).map(|j| j.voc_v), &volts);
        }
    }
    Some(table)
}
