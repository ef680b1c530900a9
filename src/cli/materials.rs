//! `bandloom materials`: what the library holds.

use std::path::PathBuf;

use clap::{Args, ValueEnum};

use crate::cli::Exit;
use crate::cli::console::{Console, Stream};
use crate::cli::materials::detail::Detail;
use crate::materials::{Material, ROOM_TEMPERATURE_K, SharedMaterial, library};
use crate::resolve::materials::{Wish, entries, look_up, search};

mod arguments;
mod detail;
mod family;
mod found;
mod list;
mod map;
mod table;

const EXAMPLES: &str = "\
Examples:
  bandloom materials                        the whole library, a line each
  bandloom materials GaAs Ga0.51In0.49P     gap, index, transport, sources
  bandloom materials GaAs --at 350K,650nm,850nm --doping 1e18/cm3
  bandloom materials GaInP                  what a family reaches
  bandloom materials GaInP --definition     how it is written, to copy
  bandloom materials \"AlGaInP matched of gap 2.1 eV\" --on GaAs
  bandloom materials --over gap 1.7..1.9 --on GaAs --figure gaps.svg";

/// Show what the material library holds
#[derive(Args, Clone, Debug)]
#[command(before_help = EXAMPLES, help_template = super::TEMPLATE)]
pub(crate) struct Materials {
    /// Materials as they would stand in a layer; nothing for the whole list
    #[arg(value_name = "MATERIAL")]
    phrases: Vec<String>,
    /// The wafer: what `matched` is to, and what a mismatch is against
    #[arg(long, value_name = "WAFER")]
    on: Option<String>,
    /// Search for what has a gap in this range, in eV, and fits the wafer of `--on`
    #[arg(long, num_args = 2, value_names = ["gap", "LOW..HIGH"], conflicts_with = "phrases")]
    over: Option<Vec<String>>,
    /// How far off the wafer's lattice still fits
    #[arg(long, value_name = "SHARE", default_value = "0.1%", value_parser = arguments::share, requires = "over")]
    within: f64,
    /// Wavelengths of the index and a temperature, each with its unit: `650nm`, `350K`
    #[arg(long, value_name = "VALUE", value_delimiter = ',', value_parser = arguments::at)]
    at: Vec<arguments::At>,
    /// The doping at which transport is shown
    #[arg(long, value_name = "DOPING", default_value = "1e17/cm3", value_parser = arguments::doping)]
    doping: f64,
    /// Print materials and families as the library writes them, to copy into a file
    #[arg(long, requires = "phrases", conflicts_with_all = ["over", "figure"])]
    definition: bool,
    /// human or json
    #[arg(long, value_enum, default_value_t, value_name = "human|json", hide_possible_values = true)]
    format: Format,
    /// Write gap against mismatch to the wafer of `--on` as an SVG file, `-` for standard output
    #[arg(long, value_name = "FILE", requires = "on")]
    figure: Option<PathBuf>,
}

/// How it is written.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
enum Format {
    /// For people.
    #[default]
    Human,
    /// For programs.
    Json,
}

/// Where and at what materials are shown.
#[derive(Clone, Debug)]
struct Setting {
    /// K.
    temperature_k: f64,
    /// m.
    wavelengths_m: Vec<f64>,
    /// 1/m3.
    doping_per_m3: f64,
    /// What a mismatch is against.
    wafer: Option<SharedMaterial>,
}

/// The refractive index of handbooks: the sodium D line, m.
const SODIUM_M: f64 = 589.3e-9;

/// Runs the command: the list, the search or the sheets on standard output.
pub(crate) fn run(command: &Materials, console: &Console) -> Exit {
    let wafer = match command.on.as_deref().map(|phrase| wafer(phrase, console)) {
        Some(None) => return Exit::Trouble,
        Some(found) => found,
        None => None,
    };
    let mut setting = Setting {
        temperature_k: ROOM_TEMPERATURE_K,
        wavelengths_m: Vec::new(),
        doping_per_m3: command.doping,
        wafer,
    };
    for at in &command.at {
        match at {
            arguments::At::Temperature(kelvin) => setting.temperature_k = *kelvin,
            arguments::At::Wavelength(metres) => setting.wavelengths_m.push(*metres),
        }
    }
    if setting.wavelengths_m.is_empty() {
        setting.wavelengths_m.push(SODIUM_M);
    }
    if command.definition {
        return definitions(command, console);
    }
    match &command.over {
        Some(over) => over_range(command, over, &setting, console),
        None if command.phrases.is_empty() => {
            let entries = entries();
            let shown = match command.format {
                Format::Human => list::table(&entries),
                Format::Json => list::json(&entries),
            };
            console.result(&shown).max(figure(command, &setting, Vec::new(), &[], console))
        }
        None => details(command, &setting, console),
    }
}

/// `--definition`: the text of the library.
fn definitions(command: &Materials, console: &Console) -> Exit {
    let (mut exit, mut texts) = (Exit::Fine, Vec::new());
    for phrase in &command.phrases {
        // `InGaAs` is written under `GaInAs`, a formula under its family or its compound.
        let name = match crate::resolve::materials::family(phrase) {
            Some(family) => Some(family.name.clone()),
            None => found(phrase, command.on.as_deref(), console).map(|material| material.name.clone()),
        };
        let text = name.as_deref().and_then(|name| library::FILES.iter().find(|(known, _)| *known == name));
        match (text, name) {
            (Some((_, text)), _) => texts.push(text.trim_end()),
            (None, Some(name)) => {
                exit = console.trouble(&format!("`{name}` is no material of the library"), &[]);
            }
            (None, None) => exit = Exit::Trouble,
        }
    }
    let shown: String = texts.iter().map(|text| format!("{text}\n")).collect();
    exit.max(console.result(&shown))
}

/// `--over gap LOW..HIGH`
fn over_range(command: &Materials, over: &[String], setting: &Setting, console: &Console) -> Exit {
    let gap_ev = match over {
        [what, range] if what == "gap" => arguments::range(range),
        [what, _] => Err((format!("`--over {what}` is no search"), "write `--over gap 1.7..1.9`".to_owned())),
        _ => Err(("`--over` needs a word and a range".to_owned(), "write `--over gap 1.7..1.9`".to_owned())),
    };
    let gap_ev = match gap_ev {
        Ok(gap_ev) => gap_ev,
        Err((message, help)) => return console.trouble(&message, &[&help]),
    };
    let wish = Wish {
        gap_ev,
        wafer: setting.wafer.as_deref(),
        mismatch: command.within,
        temperature_k: setting.temperature_k,
    };
    let found = search(&wish);
    let shown = match command.format {
        Format::Human => found::table(&found, &wish, console.look(Stream::Out).width),
        Format::Json => found::json(&found, &wish),
    };
    if found.fits.is_empty() && command.format == Format::Human {
        let nearest = found::nearest(&found, &wish);
        let helps: Vec<&str> = nearest.iter().map(String::as_str).collect();
        return console.trouble(&found::nothing(&wish), &helps);
    }
    let mut families = Vec::new();
    for fit in &found.fits {
        families.extend(crate::resolve::materials::family(&fit.material.name));
    }
    let drawn = figure(command, setting, families, &found.fits, console);
    if writes_figure_to_out(command) { drawn } else { console.result(&shown).max(drawn) }
}

/// The materials and families named, one after the other.
fn details(command: &Materials, setting: &Setting, console: &Console) -> Exit {
    let width = console.look(Stream::Out).width;
    let (mut exit, mut texts, mut documents) = (Exit::Fine, Vec::new(), Vec::new());
    let (mut families, mut fits) = (Vec::new(), Vec::new());
    for phrase in &command.phrases {
        if let Some(family) = crate::resolve::materials::family(phrase) {
            texts.push(family::sheet(&family, setting.wafer.as_deref(), width));
            documents.push(family::document(&family));
            families.push(family);
        } else if let Some(material) = found(phrase, command.on.as_deref(), console) {
            let detail = Detail::of(&material, setting);
            texts.push(detail.sheet(&material, width));
            documents.push(table::value(&detail));
            families.extend(crate::resolve::materials::family(&material.name));
            fits.extend(found::fit(material, setting));
        } else {
            exit = Exit::Trouble;
        }
    }
    let drawn =
        if texts.is_empty() { Exit::Fine } else { figure(command, setting, families, &fits, console) };
    let shown = match command.format {
        Format::Human => texts.join("\n"),
        Format::Json => table::document(serde_json::json!({ "materials": documents })),
    };
    if writes_figure_to_out(command) {
        return exit.max(drawn);
    }
    exit.max(drawn).max(console.result(&shown))
}

fn writes_figure_to_out(command: &Materials) -> bool {
    command.figure.as_ref().is_some_and(|path| path.as_os_str() == "-")
}

/// Writes the figure if one was asked for.
fn figure(
    command: &Materials,
    setting: &Setting,
    families: Vec<std::sync::Arc<crate::materials::alloy::Family>>,
    fits: &[crate::resolve::materials::Fit],
    console: &Console,
) -> Exit {
    let (Some(path), Some(wafer)) = (&command.figure, &setting.wafer) else { return Exit::Fine };
    let Some(svg) = map::svg(families, fits, wafer, setting.temperature_k) else {
        return console.trouble("nothing here has a lattice to draw", &["name a family, such as `GaInP`"]);
    };
    if writes_figure_to_out(command) {
        return console.result(&svg);
    }
    match crate::cli::output::write(path, svg.as_bytes()) {
        Ok(_) => Exit::Fine,
        Err(why) => console.trouble(
            &format!("cannot write `{}`: {}", why.path.display(), why.message),
            &["name another file"],
        ),
    }
}

/// The material of `--on`, which needs a lattice.
fn wafer(phrase: &str, console: &Console) -> Option<SharedMaterial> {
    let material = found(phrase, None, console)?;
    if material.lattice_constant(ROOM_TEMPERATURE_K).is_none() {
        console.trouble(
            &format!("`{}` has no lattice constant to match", material.label),
            &["name a wafer such as GaAs, Ge, InP or Si"],
        );
        return None;
    }
    Some(material)
}

/// The material of a phrase; what is wrong with it is told.
fn found(phrase: &str, on: Option<&str>, console: &Console) -> Option<SharedMaterial> {
    let (outcome, _) = look_up(phrase, on);
    for finding in outcome.findings.iter() {
        let helps: Vec<&str> = finding.helps.iter().map(String::as_str).collect();
        console.trouble(&finding.message, &helps);
    }
    if outcome.value.is_none() && outcome.findings.is_empty() {
        console.trouble(&format!("`{phrase}` is no material"), &["`bandloom materials` lists the library"]);
    }
    outcome.value.filter(|_| !outcome.findings.has_errors())
}

/// Relaxed, against the wafer, at a temperature in K.
fn mismatch(material: &Material, wafer: Option<&Material>, temperature_k: f64) -> Option<f64> {
    let own = material.lattice_constant(temperature_k)?;
    Some(own / wafer?.lattice_constant(temperature_k)? - 1.0)
}
