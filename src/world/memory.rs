//! Files in memory, for tests and for standard input.

use std::cell::RefCell;
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use crate::world::{Asked, ReadError, World, plain};

/// Files in memory, and where one is missing there, perhaps another world beneath.
#[derive(Default)]
pub struct Memory {
    files: BTreeMap<PathBuf, Result<Arc<str>, ReadError>>,
    beneath: Option<Box<dyn World>>,
    asked: RefCell<Asked>,
}

impl Memory {
    /// No files.
    pub fn new() -> Self {
        Self::default()
    }

    /// Over another world, which answers for every path that is not in memory.
    pub fn over(beneath: impl World + 'static) -> Self {
        Self { beneath: Some(Box::new(beneath)), ..Self::default() }
    }

    /// Adds a file.
    #[must_use]
    pub fn with(mut self, path: impl AsRef<Path>, text: impl Into<Arc<str>>) -> Self {
        self.files.insert(plain(path.as_ref()), Ok(text.into()));
        self
    }

    /// Adds what a path answers, trouble included.
    #[must_use]
    pub fn with_answer(mut self, path: impl AsRef<Path>, answer: Result<Arc<str>, ReadError>) -> Self {
        self.files.insert(plain(path.as_ref()), answer);
        self
    }
}

impl World for Memory {
    fn text(&self, path: &Path) -> Result<Arc<str>, ReadError> {
        let path = plain(path);
        self.asked.borrow_mut().note(&path);
        if let Some(answer) = self.files.get(&path) {
            return answer.clone();
        }
        if let Some(beneath) = &self.beneath {
            return beneath.text(&path);
        }
        if path.is_absolute() || path.starts_with("..") {
            return Err(ReadError::Outside);
        }
        if self.files.keys().any(|file| file.starts_with(&path)) {
            return Err(ReadError::Directory);
        }
        Err(ReadError::Missing)
    }

    fn asked(&self) -> Vec<PathBuf> {
        self.asked.borrow().paths()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_was_asked_for_is_known_also_when_missing() {
        let world = Memory::new().with("a/b.stack", "x");
        assert_eq!(world.text(Path::new("a/./c/../b.stack")).as_deref(), Ok("x"));
        assert_eq!(world.text(Path::new("gone.stack")), Err(ReadError::Missing));
        assert_eq!(world.text(Path::new("a")), Err(ReadError::Directory));
        assert_eq!(world.text(Path::new("a/../../b.stack")), Err(ReadError::Outside));
        assert_eq!(world.text(Path::new("gone.stack")), Err(ReadError::Missing));
        let asked: Vec<_> = ["a/b.stack", "gone.stack", "a", "../b.stack"].map(PathBuf::from).into();
        assert_eq!(world.asked(), asked);
    }
}
