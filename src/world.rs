//! The compiler's only way to files: a trait, so that tests, watch mode and the editor can stand
//! in for the disk, and so that what was read is known.

use std::path::{Component, Path, PathBuf};
use std::sync::Arc;

pub mod disk;
pub mod memory;

/// Why a file could not be had.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum ReadError {
    /// There is no such file.
    Missing,
    /// It is a folder.
    Directory,
    /// It lies outside the project root.
    Outside,
    /// It is larger than the limit, in bytes.
    TooLarge {
        /// Its size.
        size: u64,
        /// The most that is read.
        limit: u64,
    },
    /// Its bytes are not UTF-8; the offset of the first bad byte.
    NotUtf8 {
        /// Offset of the first byte that is not UTF-8.
        at: usize,
    },
    /// Anything else, in the system's words.
    Other(String),
}

impl ReadError {
    /// What is wrong, for a sentence after "cannot read `x`: ".
    pub fn worded(&self) -> String {
        let megabytes = |bytes: &u64| *bytes as f64 / 1e6;
        match self {
            Self::Missing => "there is no such file".to_owned(),
            Self::Directory => "it is a folder".to_owned(),
            Self::Outside => "it lies outside the project".to_owned(),
            Self::TooLarge { size, limit } => {
                format!("it has {:.1} MB, at most {:.1} MB are read", megabytes(size), megabytes(limit))
            }
            Self::NotUtf8 { at } => format!("it is not UTF-8, byte {} is the first bad one", at + 1),
            Self::Other(words) => words.clone(),
        }
    }
}

/// Where a compilation gets its files. Paths are as written in the source, relative to the
/// folder of the file that names them, already joined by the caller.
pub trait World {
    /// The text of a file.
    ///
    /// # Errors
    /// As [`ReadError`] says; nothing is guessed.
    fn text(&self, path: &Path) -> Result<Arc<str>, ReadError>;

    /// Every path asked for so far, found or not, in order and once each.
    fn asked(&self) -> Vec<PathBuf>;
}

/// A path with `.` taken out and `..` worked in where there is a folder to leave.
pub fn plain(path: &Path) -> PathBuf {
    let mut plain = PathBuf::new();
    for part in path.components() {
        match part {
            Component::CurDir => {}
            Component::ParentDir if matches!(plain.components().next_back(), Some(Component::Normal(_))) => {
                plain.pop();
            }
            Component::ParentDir if plain.has_root() => {}
            part => plain.push(part),
        }
    }
    plain
}

/// Paths in the order first asked for.
#[derive(Clone, Debug, Default)]
struct Asked(Vec<PathBuf>);

impl Asked {
    fn note(&mut self, path: &Path) {
        if !self.0.iter().any(|known| known == path) {
            self.0.push(path.to_path_buf());
        }
    }

    fn paths(&self) -> Vec<PathBuf> {
        self.0.clone()
    }
}
