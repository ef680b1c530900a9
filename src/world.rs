//! The compiler's only way to files: a trait, so that tests, watch mode and the editor can stand
//! in for the disk, and so that what was read is known.

use std::path::{Path, PathBuf};
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
