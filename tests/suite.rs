//! Everything written in the stack language, one named trial each: fixtures with their expected
//! findings and numbers, the pages behind the codes, the demo stacks, the fences of the README.
//!
//! `BANDLOOM_UPDATE=1` rewrites the `//~` lines of fixtures, and nothing else.

#![expect(clippy::disallowed_methods, reason = "the harness reads and rewrites fixtures itself")]

#[path = "suite/expect.rs"]
mod expect;
#[path = "suite/files.rs"]
mod files;
#[path = "suite/harness.rs"]
mod harness;
#[path = "suite/numbers.rs"]
mod numbers;
#[path = "suite/pages.rs"]
mod pages;
#[path = "suite/run.rs"]
mod run;

fn main() -> std::process::ExitCode {
    let arguments = libtest_mimic::Arguments::from_args();
    let mut trials = files::trials();
    trials.extend(pages::trials());
    trials.extend(harness::trials());
    libtest_mimic::run(&arguments, trials).exit_code()
}
