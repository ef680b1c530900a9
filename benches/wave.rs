//! The wave-optics kernel: time by layer and wavelength, against the machine and against Python.
//!
//! `cargo bench --bench wave`. Medians of repeated runs on one thread; the other programs on the
//! machine show in the load printed with them. With a Python that has `numpy` and `tmm` the same
//! stack is timed there by `benches/reference/thin_films.py` and the ratios are printed.

#![expect(
    clippy::print_stdout,
    clippy::disallowed_methods,
    reason = "a bench prints, and asks the machine how busy it is"
)]

use std::hint::black_box;
use std::process::Command;
use std::sync::Arc;
use std::time::Instant;

use bandloom::optics::wave::slopes::Merit;
use bandloom::optics::wave::{Index, Sheet, Stack};

const LAYERS: usize = 15;
const WAVELENGTHS: usize = 2000;

/// Additions and multiplications per layer and wavelength, counted in the source: sine and cosine
/// 42, decay 33, fields 35, flux and gain up 8, down 3.
const OPERATIONS: f64 = 121.0;

fn main() {
    if std::env::args().any(|argument| argument == "--test") {
        return;
    }
    println!("load average before: {}", load());
    let cells = (LAYERS * WAVELENGTHS) as f64;
    let films = stack(LAYERS, WAVELENGTHS, 0.0);
    let evaluation = median(41, || drop(black_box(films.solve())));
    let peak = peak_operations();
    println!("{LAYERS} layers x {WAVELENGTHS} wavelengths, one thread, R, T and every A");
    let nanoseconds = 1e9 * evaluation / cells;
    println!("evaluation        {nanoseconds:8.2} ns per layer and wavelength");
    println!("peak              {:8.1} GFLOP/s (multiply, then add; not fused)", peak * 1e-9);
    println!("efficiency        {:8.3}", OPERATIONS / (nanoseconds * 1e-9 * peak));
    let oblique = stack(LAYERS, WAVELENGTHS, 0.7);
    let both = median(21, || drop(black_box(oblique.solve())));
    println!("40 degrees, s + p {:8.2} ns per layer and wavelength", 1e9 * both / cells);
    let merit = Merit {
        light: vec![1.0; WAVELENGTHS],
        reflected: 1.0,
        transmitted: 0.5,
        absorbed: (0..LAYERS).map(|layer| layer as f64).collect(),
    };
    let gradient = median(21, || drop(black_box(films.solve_with_gradient(&merit))));
    println!("gradient          {:8.2} evaluations", gradient / evaluation);
    let slopes = median(21, || drop(black_box(films.solve_with_slopes())));
    println!("every slope       {:8.2} evaluations", slopes / evaluation);
    exponents();
    python(nanoseconds);
    println!("load average after: {}", load());
}

/// Growth of time with layers and with wavelengths, as the exponent between a small and a large case.
fn exponents() {
    let time = |layers, wavelengths| {
        let stack = stack(layers, wavelengths, 0.0);
        median(21, || drop(black_box(stack.solve())))
    };
    let base = time(10, 1600);
    println!("exponent, layers  {:8.2}", (time(40, 1600) / base).ln() / 4f64.ln());
    println!("exponent, waves   {:8.2}", (time(10, 6400) / base).ln() / 4f64.ln());
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

/// Seconds.
fn median(runs: usize, mut work: impl FnMut()) -> f64 {
    let mut times: Vec<f64> = (0..runs)
        .map(|_| {
            let start = Instant::now();
            work();
            start.elapsed().as_secs_f64()
        })
        .collect();
    times.sort_by(f64::total_cmp);
    times[runs / 2]
}

/// Additions and multiplications a second of independent chains in registers, best of several.
fn peak_operations() -> f64 {
    const STEPS: usize = 1_000_000;
    (0..30)
        .map(|_| {
            let start = Instant::now();
            black_box(chains(black_box(STEPS)));
            (2 * CHAINS * WIDTH * STEPS) as f64 / start.elapsed().as_secs_f64()
        })
        .fold(0.0, f64::max)
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

fn python(own_nanoseconds: f64) {
    let script = concat!(env!("CARGO_MANIFEST_DIR"), "/benches/reference/thin_films.py");
    let Ok(output) = Command::new("python3").arg(script).output() else {
        println!("no python3: ratios left out");
        return;
    };
    let text = String::from_utf8_lossy(&output.stdout);
    for line in text.lines() {
        let Some((name, value)) = line.rsplit_once(' ') else { continue };
        let Ok(nanoseconds) = value.parse::<f64>() else { continue };
        println!("{name:17} {:8.1} times slower ({nanoseconds:.0} ns)", nanoseconds / own_nanoseconds);
    }
    if !output.status.success() {
        println!("numpy or tmm is not there: ratios left out");
    }
}

fn load() -> String {
    std::fs::read_to_string("/proc/loadavg").unwrap_or_else(|_| "unknown".to_owned()).trim().to_owned()
}
