//! The real binary, run in a folder of its own with an environment of its own.

use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Output, Stdio};

/// The limit study of two gaps: short, complete, and without a finding.
pub(crate) const PAIR: &str = "\
stack \"Pair\" {
    light    AM1.5G
    junction top    { absorber ideal of gap 1.70 eV   absorbs all_above_gap }
    junction bottom { absorber ideal of gap 1.10 eV   absorbs all_above_gap }
}
";

/// One unknown name at line 3, columns 31 to 36.
pub(crate) const SLIP: &str = "\
stack \"Slip µ\" {
    light    AM1.5G
    junction top { absorber   GaAss 3 um   p 1e17 /cm3; voltage from radiative_limit }
}
";

pub(crate) struct Ran {
    pub(crate) code: Option<i32>,
    pub(crate) out: String,
    pub(crate) err: String,
}

impl Ran {
    fn of(output: &Output) -> Self {
        let text = |bytes: &[u8]| String::from_utf8_lossy(bytes).into_owned();
        Self { code: output.status.code(), out: text(&output.stdout), err: text(&output.stderr) }
    }

    /// Ends with `code`, and never in a panic.
    #[track_caller]
    pub(crate) fn ends(self, code: i32) -> Self {
        assert!(!self.err.contains("panicked"), "{}", self.err);
        assert_eq!(self.code, Some(code), "out:\n{}\nerr:\n{}", self.out, self.err);
        self
    }
}

/// A temporary folder with files in it.
pub(crate) struct Place {
    folder: tempfile::TempDir,
}

impl Place {
    pub(crate) fn new() -> Self {
        Self { folder: tempfile::tempdir().expect("temporary folder") }
    }

    pub(crate) fn with(files: &[(&str, &str)]) -> Self {
        let place = Self::new();
        for (name, text) in files {
            place.write(name, text);
        }
        place
    }

    pub(crate) fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    pub(crate) fn write(&self, name: &str, bytes: impl AsRef<[u8]>) {
        let path = self.path(name);
        std::fs::create_dir_all(path.parent().expect("has a folder")).expect("folder");
        std::fs::write(path, bytes).expect("file");
    }

    pub(crate) fn read(&self, name: &str) -> String {
        std::fs::read_to_string(self.path(name)).unwrap_or_else(|why| panic!("{name}: {why}"))
    }

    /// Names below a folder, with `/`, sorted.
    pub(crate) fn list(&self, name: &str) -> Vec<String> {
        let mut names = Vec::new();
        walk(&self.path(name), &mut |path| {
            let path = path.strip_prefix(self.folder.path()).expect("below").to_string_lossy();
            names.push(path.replace('\\', "/"));
        });
        names.sort();
        names
    }

    /// `bandloom` here, without the variables that change its output.
    pub(crate) fn command(&self, arguments: &[&str]) -> Command {
        let mut command = Command::new(env!("CARGO_BIN_EXE_bandloom"));
        command.args(arguments).current_dir(self.folder.path());
        for name in
            ["NO_COLOR", "CLICOLOR", "CLICOLOR_FORCE", "TERM", "RAYON_NUM_THREADS", "SOURCE_DATE_EPOCH"]
        {
            command.env_remove(name);
        }
        command
    }

    pub(crate) fn run(&self, arguments: &[&str]) -> Ran {
        let output = self.command(arguments).stdin(Stdio::null()).output().expect("starts");
        Ran::of(&output)
    }

    pub(crate) fn run_with_input(&self, arguments: &[&str], input: &[u8]) -> Ran {
        let mut command = self.command(arguments);
        command.stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::piped());
        let mut child = command.spawn().expect("starts");
        // A run that stops early closes its input.
        let _ = child.stdin.take().expect("piped").write_all(input);
        Ran::of(&child.wait_with_output().expect("ends"))
    }
}

/// A child that is ended with its test.
pub(crate) struct Running(pub(crate) Child);

impl Drop for Running {
    fn drop(&mut self) {
        let _ = self.0.kill();
        let _ = self.0.wait();
    }
}

/// Calls `visit` for every file below `folder`.
pub(crate) fn walk(folder: &Path, visit: &mut dyn FnMut(&Path)) {
    let Ok(entries) = std::fs::read_dir(folder) else { return };
    let mut paths: Vec<PathBuf> = entries.filter_map(|entry| Some(entry.ok()?.path())).collect();
    paths.sort();
    for path in paths {
        if path.is_dir() {
            walk(&path, visit);
        } else {
            visit(&path);
        }
    }
}
