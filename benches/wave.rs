//! The wave-optics kernel: time by layer and wavelength, against the machine and against Python.
//!
//! `cargo bench --bench wave`, on one thread. What is compared is measured in turns, so that other
//! work on the machine falls on all alike (its load is printed), and the least of the turns is
//! given. With a Python that has `numpy` and `tmm` the same stack is timed there, in the same
//! turns, by `benches/reference/thin_films.py`.

#![expect(
    clippy::print_stdout,
    clippy::disallowed_methods,
    reason = "a bench prints, and asks the machine how busy it is"
)]

use std::hint::black_box;
use std::io::{BufRead, BufReader, Write};
use std::process::{Child, Command, Stdio};
use std::sync::Arc;
use std::time::Instant;

use bandloom::optics::wave::slopes::Merit;
use bandloom::optics::wave::{Index, Kernel, Sheet, Stack};

const LAYERS: usize = 15;
const WAVELENGTHS: usize = 2000;

/// Turns; the least of each row over them is printed.
const TURNS: usize = 41;

/// Additions and multiplications per layer and wavelength, counted in the source, a fused one as
/// two: decay 25, sine and cosine 34, their arguments and product 6, fields 26, flux and gain up
/// 8, down 3.
const OPERATIONS: f64 = 102.0;

const KERNELS: [(&str, Kernel); 4] = [
    ("widest registers", Kernel::Widest),
    ("AVX2", Kernel::Avx2),
    ("baseline (SSE2)", Kernel::Baseline),
    ("fused", Kernel::Fused),
];

/// Least ratio to the Python library and to numpy, and least efficiency, of each kernel on a
/// machine with AVX-512.
const TARGETS: [Option<(f64, f64, f64)>; 4] =
    [Some((3300.0, 12.0, 0.25)), Some((2000.0, 8.0, 0.25)), None, Some((5500.0, 20.0, 0.40))];

fn main() {
    if std::env::args().any(|argument| argument == "--test") {
        return;
    }
    println!("load average before: {}", load());
    println!(
        "registers: {}; {LAYERS} layers x {WAVELENGTHS} wavelengths, one thread, R, T and every A",
        widest()
    );
    let films = stack(LAYERS, WAVELENGTHS, 0.0);
    let by_kernel = KERNELS.map(|(_, kernel)| films.clone().with_kernel(usable(kernel)));
    let oblique = stack(LAYERS, WAVELENGTHS, 0.7);
    let merit = Merit {
        light: vec![1.0; WAVELENGTHS],
        reflected: 1.0,
        transmitted: 0.5,
        absorbed: (0..LAYERS).map(|layer| layer as f64).collect(),
    };
    let one = films.change_of(7);
    let mut python = Python::start();
    let (mut times, mut peaks) = (vec![Vec::new(); 11], [0.0f64; 2]);
    for _ in 0..TURNS {
        for (row, stack) in by_kernel.iter().enumerate() {
            times[row].push(seconds(|| drop(black_box(stack.solve()))));
        }
        times[4].push(seconds(|| drop(black_box(oblique.solve()))));
        times[5].push(seconds(|| drop(black_box(films.solve_with_gradient(&merit)))));
        times[6].push(seconds(|| drop(black_box(films.solve_with_slopes()))));
        times[7].push(seconds(|| drop(black_box(one.solve(black_box(251e-9))))));
        if let Some(python) = python.as_mut().and_then(Python::turn) {
            times[8..].iter_mut().zip(python).for_each(|(times, time)| times.push(time));
        }
        for (peak, chains) in peaks.iter_mut().zip([chains as fn(usize) -> f64, fused_chains]) {
            *peak = peak.max(operations_a_second(chains));
        }
    }
    let times: Vec<f64> = times.into_iter().map(least).collect();
    let cells = (LAYERS * WAVELENGTHS) as f64;
    println!(
        "peak                {:8.1} GFLOP/s multiply, then add; {:.1} fused",
        1e-9 * peaks[0],
        1e-9 * peaks[1]
    );
    for (row, (name, kernel)) in KERNELS.iter().enumerate() {
        let nanoseconds = 1e9 * times[row] / cells;
        let peak = peaks[usize::from(*kernel == Kernel::Fused)];
        let efficiency = OPERATIONS / (nanoseconds * 1e-9 * peak);
        print!("{name:19} {nanoseconds:8.2} ns per layer and wavelength, efficiency {efficiency:.2}");
        if times[8] > 0.0 {
            // Those from Python are per layer and wavelength.
            let [plain, reusing, tmm] = [8, 9, 10].map(|row| times[row] / nanoseconds);
            print!(", {tmm:.0} times tmm, {plain:.1} times numpy ({reusing:.1} where it reuses arrays)");
        }
        if let Some((tmm, numpy, least)) = TARGETS[row] {
            print!(" (at least {tmm:.0}, {numpy:.0}, efficiency {least:.2})");
        }
        println!();
    }
    if times[8] > 0.0 {
        println!(
            "numpy, tmm          {:8.1} ({:.1} where it reuses arrays), {:.0} ns per layer and wavelength",
            times[8], times[9], times[10]
        );
    }
    println!("40 degrees, s + p   {:8.2} ns per layer and wavelength", 1e9 * times[4] / cells);
    println!("gradient            {:8.2} evaluations (at most 3)", times[5] / times[0]);
    println!("every slope         {:8.2} evaluations", times[6] / times[0]);
    println!("one layer changed   {:8.2} times cheaper than an evaluation (at least 6)", times[0] / times[7]);
    exponents();
    println!("load average after: {}", load());
}

/// The kernel, or what stands in for it on a machine that has no fused operations.
fn usable(kernel: Kernel) -> Kernel {
    if kernel == Kernel::Fused { Kernel::fused() } else { kernel }
}

/// Growth of time with layers and with wavelengths: slope of `ln t` fitted by least squares.
fn exponents() {
    let layers = [5, 10, 20, 40, 80].map(|layers| (layers as f64, stack(layers, 1600, 0.0)));
    let waves = [400, 800, 1600, 3200, 6400].map(|waves| (waves as f64, stack(15, waves, 0.0)));
    for (name, cases) in [("layers", &layers), ("wavelengths", &waves)] {
        let mut times = vec![Vec::new(); cases.len()];
        for _ in 0..TURNS {
            for (times, (_, stack)) in times.iter_mut().zip(cases) {
                times.push(seconds(|| drop(black_box(stack.solve()))));
            }
        }
        let points: Vec<(f64, f64)> =
            cases.iter().zip(times).map(|((size, _), times)| (size.ln(), least(times).ln())).collect();
        let count = points.len() as f64;
        let mean = |of: fn(&(f64, f64)) -> f64| points.iter().map(of).sum::<f64>() / count;
        let (x, y) = (mean(|point| point.0), mean(|point| point.1));
        let slope = points.iter().map(|point| (point.0 - x) * (point.1 - y)).sum::<f64>()
            / points.iter().map(|point| (point.0 - x).powi(2)).sum::<f64>();
        println!("exponent            {slope:8.3} of the time in {name}");
    }
}

/// Layers of high and low index in turn, all absorbing a little, as the script in Python has them.
fn stack(layers: usize, wavelengths: usize, incidence_rad: f64) -> Stack {
    let wavelength_m: Vec<f64> =
        (0..wavelengths).map(|i| 300e-9 + 1500e-9 * i as f64 / (wavelengths - 1) as f64).collect();
    let index = |n: f64, k: f64| {
        let n: Vec<f64> = wavelength_m.iter().map(|wavelength| n + 0.02e-12 / wavelength.powi(2)).collect();
        let k: Vec<f64> = wavelength_m.iter().map(|wavelength| k * 600e-9 / wavelength).collect();
        Arc::new(Index::new(&n, &k))
    };
    let sheets = (0..layers)
        .map(|layer| Sheet {
            index: index([1.5, 3.4][layer % 2], 1e-3 * (layer + 1) as f64),
            thickness_m: (40.0 + 30.0 * layer as f64) * 1e-9,
            coherent: true,
        })
        .collect();
    Stack::new(&wavelength_m, (1.0, incidence_rad), sheets, index(3.6, 0.05))
}

/// The better of two runs after one to warm up.
fn seconds(mut work: impl FnMut()) -> f64 {
    work();
    let mut once = || {
        let start = Instant::now();
        work();
        start.elapsed().as_secs_f64()
    };
    once().min(once())
}

/// 0 of none.
fn least(times: Vec<f64>) -> f64 {
    times.into_iter().reduce(f64::min).unwrap_or(0.0)
}

/// Additions and multiplications a second of independent chains in registers.
fn operations_a_second(chains: fn(usize) -> f64) -> f64 {
    const STEPS: usize = 200_000;
    let time = seconds(|| {
        black_box(chains(black_box(STEPS)));
    });
    (2 * CHAINS * WIDTH * STEPS) as f64 / time
}

const CHAINS: usize = 10;
const WIDTH: usize = 8;

/// Ten chains of one wide register (two or four of narrower ones), enough to hide the latency.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2",
    "x86_64+avx2"
))]
fn chains(steps: usize) -> f64 {
    let [mut a, mut b, mut c, mut d, mut e] = [[1.0f64; WIDTH]; 5];
    let [mut f, mut g, mut h, mut i, mut j] = [[2.0f64; WIDTH]; 5];
    for _ in 0..steps {
        for l in 0..WIDTH {
            a[l] = a[l] * 0.999_999 + 1e-7;
            b[l] = b[l] * 0.999_999 + 1e-7;
            c[l] = c[l] * 0.999_999 + 1e-7;
            d[l] = d[l] * 0.999_999 + 1e-7;
            e[l] = e[l] * 0.999_999 + 1e-7;
            f[l] = f[l] * 0.999_999 + 1e-7;
            g[l] = g[l] * 0.999_999 + 1e-7;
            h[l] = h[l] * 0.999_999 + 1e-7;
            i[l] = i[l] * 0.999_999 + 1e-7;
            j[l] = j[l] * 0.999_999 + 1e-7;
        }
    }
    [a, b, c, d, e, f, g, h, i, j].iter().flatten().sum()
}

/// The same chains with fused operations.
#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512bw+avx512cd+avx512dq+avx512vl+avx2+fma",
    "x86_64+avx2+fma"
))]
fn fused_chains(steps: usize) -> f64 {
    if Kernel::fused() != Kernel::Fused {
        return chains(steps);
    }
    // One chain of 32 a lane: as many lanes as the machine has room for run side by side.
    let mut lanes = [1.0f64; CHAINS * WIDTH];
    for _ in 0..steps / 32 {
        for lane in &mut lanes {
            let mut x = *lane;
            for _ in 0..32 {
                x = x.mul_add(0.999_999, 1e-7);
            }
            *lane = x;
        }
    }
    lanes.iter().sum()
}

/// A Python that measures one turn for each line it is sent.
struct Python(Child, BufReader<std::process::ChildStdout>);

impl Python {
    fn start() -> Option<Self> {
        let script = concat!(env!("CARGO_MANIFEST_DIR"), "/benches/reference/thin_films.py");
        let mut command = Command::new("python3");
        command.arg(script).stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::null());
        let mut child = command.spawn().ok()?;
        let mut lines = BufReader::new(child.stdout.take()?);
        let mut versions = String::new();
        lines.read_line(&mut versions).ok().filter(|read| *read > 0)?;
        println!("compared with {}", versions.trim());
        Some(Self(child, lines))
    }

    /// ns per layer and wavelength of numpy as usually written, numpy with reused arrays, and tmm.
    fn turn(&mut self) -> Option<[f64; 3]> {
        self.0.stdin.as_mut()?.write_all(b"turn\n").ok()?;
        let mut line = String::new();
        self.1.read_line(&mut line).ok()?;
        let times: Vec<f64> = line.split_whitespace().map_while(|time| time.parse().ok()).collect();
        times.try_into().ok()
    }
}

impl Drop for Python {
    fn drop(&mut self) {
        // With its input closed it ends by itself.
        drop(self.0.stdin.take());
        let _ = self.0.wait();
    }
}

fn widest() -> &'static str {
    #[cfg(target_arch = "x86_64")]
    {
        if std::arch::is_x86_feature_detected!("avx512f") {
            return "AVX-512";
        }
        if std::arch::is_x86_feature_detected!("avx2") {
            return "AVX2";
        }
    }
    "baseline"
}

fn load() -> String {
    std::fs::read_to_string("/proc/loadavg").unwrap_or_else(|_| "unknown".to_owned()).trim().to_owned()
}
