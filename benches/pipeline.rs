//! What a user waits for, each beside its target: `cargo bench`.
//!
//! Plain clocks, medians of repeated runs, whole processes where the user starts one. Times hold
//! for the machine they were taken on; the table says how many cores it has. Beside the clock
//! stands the processor time a run took (Linux only): on a busy machine the clock says more about
//! the others.

#![expect(
    clippy::print_stdout,
    clippy::disallowed_methods,
    clippy::unwrap_used,
    reason = "a bench prints, prepares its own files, and may stop at the first surprise"
)]

use std::hint::black_box;
use std::io::{BufRead, BufReader};
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::time::{Duration, Instant};

use bandloom::compile::{Options, compile};
use bandloom::design::VoltageModel;
use bandloom::evaluate::evaluate;
use bandloom::optics::model::LightModel;
use bandloom::parse::parse;
use bandloom::source::{Source, SourceId};
use bandloom::world::memory::Memory;

mod reading;

const TOOL: &str = env!("CARGO_BIN_EXE_bandloom");
const DEMO: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/stacks/kittiwake.stack");
const RUNS: usize = 15;

fn main() {
    // `cargo test --benches` only asks whether it runs.
    if std::env::args().any(|argument| argument == "--test") {
        return;
    }
    let mut table = Table::default();
    evaluation(&mut table);
    // `cargo bench --bench pipeline -- evaluation` stops here.
    if std::env::args().any(|argument| argument == "evaluation") {
        table.print();
        return;
    }
    let folder = tempfile::tempdir().unwrap();
    let long = long_file();
    let path = folder.path().join("long.stack");
    std::fs::write(&path, &long).unwrap();

    let source = Source::new(SourceId(0), "long.stack", &long);
    let parsed = time(RUNS, || {
        let outcome = parse(&source);
        assert!(outcome.findings.is_empty(), "{:?}", outcome.findings.iter().next());
    });
    table.time("parse 10,000 lines, in process", parsed, Some(22));
    let static_check = time(RUNS, || run(&["check", "--static"], &path, folder.path()));
    table.time("check --static 10,000 lines, whole process", static_check, Some(80));
    let wrong = folder.path().join("wrong.stack");
    std::fs::write(&wrong, wrong_file()).unwrap();
    let told = command(&["check", "--format", "json"], &wrong, folder.path())
        .stdout(Stdio::piped())
        .output()
        .unwrap();
    let document: serde_json::Value = serde_json::from_slice(&told.stdout).unwrap();
    assert_eq!(document["findings"].as_array().unwrap().len(), MISTAKES, "each mistake told once");
    let all = &["check", "--max-findings", "0"];
    let wrong_check = time(RUNS, || run(all, &wrong, folder.path()));
    table.time("check 10,000 layers with 500 mistakes, all told", wrong_check, Some(400));
    table.memory("check of the same, peak", peak(all, &wrong, folder.path()), 150);
    let check = time(3, || run(&["check"], &path, folder.path()));
    let stacks = long.matches("stack \"").count();
    table.time(&format!("check 10,000 lines, {stacks} stacks evaluated"), check, None);

    let demo = Path::new(DEMO);
    table.time("check of the three-junction demo", time(RUNS, || run(&["check"], demo, folder.path())), None);
    let mut into = 0;
    let build = time(RUNS, || {
        into += 1;
        run(&["build", "--into", &format!("out{into}")], demo, folder.path());
    });
    table.time("build of the three-junction demo, to files", build, Some(40));

    reading::library(&mut table);

    let (latency, memory) = watching(folder.path());
    table.time("watch, save to finished sheet", latency, Some(80));
    table.memory("watch of the three-junction demo, peak", memory, 60);
    table.memory("build of the three-junction demo, peak", peak(&["build"], demo, folder.path()), 60);
    table.memory(
        "check --static of 10,000 lines, peak",
        peak(&["check", "--static"], &path, folder.path()),
        60,
    );

    let size = std::fs::metadata(TOOL).unwrap().len();
    table.row("binary", &format!("{:.2} MB", size as f64 / 1e6), Some(("8 MB", size < 8_000_000)));
    table.print();
}

/// Three junctions in twenty lit layers by waves, over the whole grid of AM1.5G, in process on one
/// thread; then its parts, told apart by leaving one out.
const TRIPLE: &str = "stack \"Triple\" {
    light AM1.5G; temperature 25 degC; growth upright; optics interference
    fingers { shading 3 %; series_resistance 20 mohm cm2 }
    coat    MgF2  95 nm
    coat    ZnS   48 nm
    junction top {
        window  AlInP matched 20 nm n 2e18 /cm3 Si
        emitter GaInP matched 70 nm n 2e18 /cm3 Si
        base    GaInP matched 430 nm p 1e17 /cm3 Zn
        bsf     AlGaInP matched of gap 2.1 eV 50 nm p 1e18 /cm3 Zn
    }
    tunnel { layer Al0.3Ga0.7As 15 nm p 8e19 /cm3 C; layer GaInP matched 15 nm n 2e19 /cm3 Te }
    junction middle {
        window  GaInP matched 30 nm n 2e18 /cm3 Si
        emitter GaAs 100 nm n 2e18 /cm3 Si
        base    GaAs 3.2 um p 1e17 /cm3 Zn
        bsf     GaInP matched 80 nm p 2e18 /cm3 Zn
    }
    tunnel { layer Al0.3Ga0.7As 15 nm p 8e19 /cm3 C; layer GaInP matched 15 nm n 2e19 /cm3 Te }
    layer GaAs 200 nm n 2e18 /cm3 Si
    junction bottom {
        window  GaInP matched 50 nm n 2e18 /cm3 Si
        emitter diffused Ge 200 nm n 5e18 /cm3 P
        wafer   Ge 170 um p 1e18 /cm3 Ga
    }
    metal Au
}
";

fn evaluation(table: &mut Table) {
    let world = Memory::new().with("triple.stack", TRIPLE);
    let compiled = compile(&world, Path::new("triple.stack"), &Options::default());
    let design = compiled.stacks[0].design.clone();
    let grid = compiled.stacks[0].results.as_ref().unwrap().conditions[0].spectral.wavelength_nm.len();
    let mut limit = design.clone();
    limit.junctions.iter_mut().for_each(|junction| junction.voltage = VoltageModel::RadiativeLimit);
    let light = &design.conditions[0].light;
    let wavelength_m: Vec<f64> = light.wavelength_m.iter().copied().filter(|at| *at >= 280e-9).collect();
    let lit = design.lit_layers().count();
    table.time(
        &format!("evaluation, 3 junctions, {lit} layers ({grid} points shown)"),
        time(4 * RUNS, || drop(black_box(evaluate(&design, "triple")))),
        Some(3),
    );
    table.time(
        "  of it without carriers and light sent down",
        time(4 * RUNS, || drop(black_box(evaluate(&limit, "triple")))),
        None,
    );
    let model = LightModel::new(&design, 298.15, 0.0);
    table.time(
        "  light in every layer at the points of AM1.5G",
        time(4 * RUNS, || drop(black_box(model.shares(&wavelength_m)))),
        None,
    );
    let front: Vec<f64> = (0..600).map(|at| (500.0 + f64::from(at)) * 1e-9).collect();
    table.time(
        "  light out of the front, one junction, 600 points",
        time(4 * RUNS, || drop(black_box(model.emissivity(1, &front)))),
        None,
    );
    table.time(
        "  light sent down, one junction, 44 points",
        time(4 * RUNS, || drop(black_box(model.emissivity_down(1, &front[..44])))),
        None,
    );
    let rows: Vec<usize> = (0..model.rows().len()).filter(|&row| model.rows()[row].1.is_some()).collect();
    table.time(
        "  where light is absorbed in the layers that collect",
        time(4 * RUNS, || drop(black_box(model.profiles(&rows, &wavelength_m)))),
        None,
    );
}

/// Stacks of about thirty lines, all different, until there are 10,000 lines.
fn long_file() -> String {
    let mut text = String::from("// Many small designs over one wafer.\n\nlet coat = 95 nm\n\n");
    let mut number = 0;
    while text.lines().count() < 10_000 {
        number += 1;
        text.push_str(&one(number));
    }
    text
}

const MISTAKES: usize = 500;

/// As many stacks of twenty layers as there are mistakes, one in each, four kinds in turn.
fn wrong_file() -> String {
    const SLIPS: &[(&str, &str)] = &[
        ("20 nm   n 2e18", "20   n 2e18"),
        ("emitter  GaAs", "emitter  GaAS"),
        ("p 8e19 /cm3", "p 8e19 /cm2"),
        ("gap 2.1 eV", "gap 590 nm"),
    ];
    let zns = "    coat        ZnS   48 nm\n";
    let more = zns.to_owned() + &"    coat        SiO2  90 nm\n".repeat(7);
    let stack = |number| one(number).replace("MgF2  coat", "MgF2  95 nm").replace(zns, &more);
    let slip = |number: usize| SLIPS[number % SLIPS.len()];
    (0..MISTAKES).map(|number| stack(number).replacen(slip(number).0, slip(number).1, 1)).collect()
}

fn one(number: usize) -> String {
    let base = 400 + number;
    format!(
        "stack \"Design {number}\" {{
    note        \"Base of {base} nm; one of many.\"
    growth      upright
    light       AM1.5G
    temperature 25 degC
    optics      one_pass

    fingers     {{ shading 3 %; series_resistance 20 mohm cm2 }}
    coat        MgF2  coat
    coat        ZnS   48 nm

    junction top {{
        window   AlInP matched   20 nm   n 2e18 /cm3 Si
        emitter  GaInP matched   70 nm   n 2e18 /cm3 Si
        base     GaInP matched   {base} nm   p 1e17 /cm3 Zn
        bsf      AlGaInP matched of gap 2.1 eV   50 nm   p 1e18 /cm3 Zn
        voltage  from ere 2 %
    }}
    tunnel {{
        layer    Al0.3Ga0.7As   15 nm   p 8e19 /cm3 C
        layer    GaInP matched  15 nm   n 2e19 /cm3 Te
    }}
    junction bottom {{
        window   GaInP matched   50 nm    n 2e18 /cm3 Si
        emitter  GaAs            100 nm   n 2e18 /cm3 Si
        base     GaAs            3.5 um   p 1e17 /cm3 Zn
        bsf      GaInP matched   60 nm    p 1e18 /cm3 Zn
        voltage  from ere 2 %
    }}
    wafer    GaAs   350 um   p 1e18 /cm3 Zn
}}

"
    )
}

/// What one run took.
#[derive(Clone, Copy)]
struct Spent {
    /// By the clock, the median.
    clock: Duration,
    /// Of the processors, the mean; `None` where the system does not say.
    processor: Option<Duration>,
}

fn time(runs: usize, mut work: impl FnMut()) -> Spent {
    work();
    let before = processor_time();
    let mut times: Vec<Duration> = (0..runs)
        .map(|_| {
            let start = Instant::now();
            work();
            start.elapsed()
        })
        .collect();
    times.sort();
    let processor = before.zip(processor_time()).map(|(before, after)| (after - before) / runs as u32);
    Spent { clock: times[runs / 2], processor }
}

/// Of this process and of the children that have ended, in the system's ticks of 10 ms.
fn processor_time() -> Option<Duration> {
    let stat = std::fs::read_to_string("/proc/self/stat").ok()?;
    let fields = stat.rsplit_once(") ")?.1;
    // proc(5): utime, stime, cutime, cstime are fields 14 to 17; the first here is field 3.
    let ticks = fields.split(' ').skip(11).take(4).map(|field| field.parse::<u64>().ok());
    let ticks: u64 = ticks.collect::<Option<Vec<_>>>()?.iter().sum();
    Some(Duration::from_millis(ticks * 10))
}

fn command(arguments: &[&str], file: &Path, here: &Path) -> Command {
    let mut command = Command::new(TOOL);
    command.args(arguments).arg(file).current_dir(here);
    command.stdin(Stdio::null()).stdout(Stdio::null()).stderr(Stdio::null());
    command
}

/// Findings do not matter here, trouble does.
fn run(arguments: &[&str], file: &Path, here: &Path) {
    let status = command(arguments, file, here).status().unwrap();
    assert!(matches!(status.code(), Some(0 | 1)), "{arguments:?}: {status}");
}

/// The most memory a process had, bytes; 0 where the system does not say.
fn high_water(child: &Child) -> u64 {
    let status = std::fs::read_to_string(format!("/proc/{}/status", child.id())).unwrap_or_default();
    let line = status.lines().find_map(|line| line.strip_prefix("VmHWM:")).unwrap_or_default();
    line.trim().trim_end_matches(" kB").parse::<u64>().map_or(0, |kilobytes| kilobytes * 1024)
}

/// Asked over and over while it runs: the mark only rises.
fn peak(arguments: &[&str], file: &Path, here: &Path) -> u64 {
    let mut child = command(arguments, file, here).spawn().unwrap();
    let mut most = 0;
    while child.try_wait().unwrap().is_none() {
        most = most.max(high_water(&child));
        std::thread::sleep(Duration::from_micros(200));
    }
    most
}

/// Saves the demo again and again under `watch`; the time from before the save to the status
/// line, which is written after the files, and the memory the process ended with.
fn watching(here: &Path) -> (Spent, u64) {
    let file: PathBuf = here.join("demo.stack");
    let text = std::fs::read_to_string(DEMO).unwrap();
    std::fs::write(&file, &text).unwrap();
    let mut child =
        command(&["watch", "--into", "live"], &file, here).stderr(Stdio::piped()).spawn().unwrap();
    let mut lines = BufReader::new(child.stderr.take().unwrap()).lines();
    let mut next = || while !lines.next().unwrap().unwrap().starts_with('[') {};
    next();
    let mut number = 0;
    let latency = time(RUNS, || {
        number += 1;
        std::fs::write(&file, format!("{text}\n// {number}\n")).unwrap();
        next();
    });
    let memory = high_water(&child);
    child.kill().unwrap();
    child.wait().unwrap();
    // The processor time of a child that runs on is not ours to see.
    (Spent { processor: None, ..latency }, memory)
}

#[derive(Default)]
struct Table {
    rows: Vec<[String; 4]>,
}

impl Table {
    fn row(&mut self, what: &str, value: &str, target: Option<(&str, bool)>) {
        let (target, verdict) =
            target.map_or(("", ""), |(target, met)| (target, if met { "met" } else { "MISSED" }));
        self.rows.push([what, value, target, verdict].map(str::to_owned));
    }

    fn time(&mut self, what: &str, spent: Spent, target: Option<u64>) {
        let milliseconds = |time: Duration| time.as_secs_f64() * 1e3;
        let processor = spent.processor.map_or(String::new(), |time| format!("{:.0}", milliseconds(time)));
        let value = format!("{processor:>5} {:>8.1} ms", milliseconds(spent.clock));
        match target {
            Some(target) => {
                let met = spent.clock < Duration::from_millis(target);
                self.row(what, &value, Some((&format!("{target} ms"), met)));
            }
            None => self.row(what, &value, None),
        }
    }

    fn memory(&mut self, what: &str, bytes: u64, target: u64) {
        let value = if bytes == 0 { "unknown".to_owned() } else { format!("{:.1} MB", bytes as f64 / 1e6) };
        self.row(what, &value, Some((&format!("{target} MB"), bytes < target * 1_000_000)));
    }

    fn print(&self) {
        let cores = std::thread::available_parallelism().map_or(0, usize::from);
        let load = std::fs::read_to_string("/proc/loadavg").unwrap_or_default();
        let load = load.split(' ').next().unwrap_or("unknown");
        println!("\n{RUNS} runs each, {cores} cores, load {load}\n");
        println!("{:<48}{:>5}{:>12}", "", "cpu", "clock");
        for [what, value, target, verdict] in &self.rows {
            println!(
                "{what:<48}{value:>17}   under {target:>6}  {verdict}",
                target = if target.is_empty() { "-" } else { target }
            );
        }
    }
}
