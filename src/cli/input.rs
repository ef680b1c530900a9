//! Files named on the command line, standard input, and values set from outside.

use std::io::IsTerminal;
use std::path::{Path, PathBuf};

use clap::Args;

use crate::cli::console::Console;
use crate::compile::{Compiled, Options, compile};
use crate::resolve::Overrides;
use crate::world::World;
use crate::world::disk::{Disk, decode};
use crate::world::memory::Memory;

/// What is read.
#[derive(Args, Clone, Debug)]
pub(crate) struct Input {
    /// Stack files; `-` is standard input
    #[arg(required = true, value_name = "FILE")]
    pub(crate) files: Vec<PathBuf>,
    /// The path that standard input stands for, in messages and for what it uses
    #[arg(long, value_name = "PATH")]
    pub(crate) read_as: Option<PathBuf>,
    /// Give another value to a `let`; repeatable
    #[arg(long, value_name = "NAME=VALUE", value_parser = assignment)]
    pub(crate) set: Vec<(String, String)>,
}

fn assignment(text: &str) -> Result<(String, String), String> {
    let wanted = || "write NAME=VALUE, as in `d=650nm`".to_owned();
    let (name, value) = text.split_once('=').ok_or_else(wanted)?;
    let (name, value) = (name.trim(), value.trim());
    if name.is_empty() || value.is_empty() { Err(wanted()) } else { Ok((name.into(), value.into())) }
}

/// One file, ready to be read.
pub(crate) struct Entry {
    /// As shown and as resolved against.
    pub(crate) path: PathBuf,
    pub(crate) world: Box<dyn World>,
}

impl Entry {
    /// A file on disk.
    pub(crate) fn on_disk(path: &Path) -> Self {
        Self { path: path.to_path_buf(), world: Box::new(Disk::around(path)) }
    }

    pub(crate) fn compile(&self, options: &Options) -> Compiled {
        compile(self.world.as_ref(), &self.path, options)
    }
}

impl Input {
    /// What the pipeline is told.
    pub(crate) fn options(&self) -> Options {
        Options { overrides: Overrides { set: self.set.clone() }, ..Options::default() }
    }

    /// What does not go together, for a usage error.
    pub(crate) fn misuse(&self) -> Option<&'static str> {
        let piped = self.files.iter().any(|file| file.as_os_str() == "-");
        (self.read_as.is_some() && !piped)
            .then_some("`--read-as` says what `-` stands for, and `-` is not among the files")
    }

    /// Opens every file, each once.
    pub(crate) fn open(&self, console: &Console) -> Vec<Entry> {
        let mut seen: Vec<&Path> = Vec::new();
        let mut entries = Vec::new();
        for file in &self.files {
            if seen.contains(&file.as_path()) {
                continue;
            }
            seen.push(file);
            entries.push(if file.as_os_str() == "-" {
                self.standard_input(console)
            } else {
                Entry::on_disk(file)
            });
        }
        entries
    }

    fn standard_input(&self, console: &Console) -> Entry {
        let stdin = std::io::stdin();
        if stdin.is_terminal() {
            console.message("reading from the keyboard; end with Ctrl-D\n");
        }
        let path = self.read_as.clone().unwrap_or_else(|| PathBuf::from("<stdin>"));
        let text = decode(stdin.lock(), 0);
        let world = Memory::over(Disk::around(&path)).with_answer(&path, text);
        Entry { path, world: Box::new(world) }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_setting_wants_a_name_and_a_value() {
        assert_eq!(assignment("d = 650 nm"), Ok(("d".into(), "650 nm".into())));
        assert_eq!(assignment("a=b=c"), Ok(("a".into(), "b=c".into())));
        for bad in ["d", "=1", "d=", ""] {
            assert!(assignment(bad).is_err(), "{bad}");
        }
    }
}
