//! Files on disk, below one folder.

use std::cell::RefCell;
use std::collections::BTreeMap;
use std::fs::File;
use std::io::{ErrorKind, Read};
use std::path::{Path, PathBuf};
use std::sync::Arc;

use crate::world::{Asked, ReadError, World, plain};

/// The most that is read of one file, bytes.
pub const SIZE_LIMIT: u64 = 8 * 1024 * 1024;

/// The disk below a project root. Each file is read once, so that one run sees one state of it.
pub struct Disk {
    /// As the system resolves it, free of links.
    root: PathBuf,
    /// Files the user named himself: these may lie anywhere.
    named: Vec<PathBuf>,
    read: RefCell<BTreeMap<PathBuf, Result<Arc<str>, ReadError>>>,
    asked: RefCell<Asked>,
}

impl Disk {
    /// Everything below `root`.
    pub fn below(root: &Path) -> Self {
        Self {
            root: root.canonicalize().unwrap_or_else(|_| root.to_path_buf()),
            named: Vec::new(),
            read: RefCell::default(),
            asked: RefCell::default(),
        }
    }

    /// `file` and everything below its project root: the nearest folder above it that holds
    /// `.git`, else the current folder if the file is in it, else the file's own folder.
    pub fn around(file: &Path) -> Self {
        let mut disk = Self::below(&project_root(file));
        disk.named.push(plain(file));
        disk
    }

    fn fetch(&self, path: &Path) -> Result<Arc<str>, ReadError> {
        let real = path.canonicalize().map_err(|why| self.refusal(path, &why))?;
        if !self.named.iter().any(|named| named == path) && !real.starts_with(&self.root) {
            return Err(ReadError::Outside);
        }
        read_text(&real)
    }

    /// A missing file beyond the root is outside, not missing: nothing is told of what is there.
    fn refusal(&self, path: &Path, why: &std::io::Error) -> ReadError {
        let folder = path.ancestors().skip(1).find_map(existing);
        let outside = folder.is_some_and(|folder| !folder.starts_with(&self.root));
        if outside && !self.named.iter().any(|named| named == path) {
            return ReadError::Outside;
        }
        worded(why)
    }
}

fn existing(folder: &Path) -> Option<PathBuf> {
    let folder = if folder.as_os_str().is_empty() { Path::new(".") } else { folder };
    folder.canonicalize().ok()
}

fn worded(why: &std::io::Error) -> ReadError {
    match why.kind() {
        ErrorKind::NotFound | ErrorKind::NotADirectory => ReadError::Missing,
        ErrorKind::IsADirectory => ReadError::Directory,
        ErrorKind::PermissionDenied => ReadError::Other("permission denied".to_owned()),
        _ => ReadError::Other(why.to_string()),
    }
}

fn read_text(path: &Path) -> Result<Arc<str>, ReadError> {
    let file = File::open(path).map_err(|why| worded(&why))?;
    let facts = file.metadata().map_err(|why| worded(&why))?;
    if facts.is_dir() {
        return Err(ReadError::Directory);
    }
    if facts.len() > SIZE_LIMIT {
        return Err(ReadError::TooLarge { size: facts.len(), limit: SIZE_LIMIT });
    }
    // A pipe or a device has no length: the limit is kept while reading.
    decode(file, facts.len())
}

/// Reads a whole text, of which `expected` bytes are foreseen, up to [`SIZE_LIMIT`].
///
/// # Errors
/// [`ReadError::TooLarge`], [`ReadError::NotUtf8`], or the system's words.
pub fn decode(from: impl Read, expected: u64) -> Result<Arc<str>, ReadError> {
    let mut bytes = Vec::with_capacity(usize::try_from(expected).unwrap_or(0) + 1);
    from.take(SIZE_LIMIT + 1).read_to_end(&mut bytes).map_err(|why| worded(&why))?;
    if bytes.len() as u64 > SIZE_LIMIT {
        return Err(ReadError::TooLarge { size: bytes.len() as u64, limit: SIZE_LIMIT });
    }
    match String::from_utf8(bytes) {
        Ok(text) => Ok(text.into()),
        Err(why) => Err(ReadError::NotUtf8 { at: why.utf8_error().valid_up_to() }),
    }
}

/// See [`Disk::around`].
pub fn project_root(file: &Path) -> PathBuf {
    let folder = file.parent().and_then(existing).unwrap_or_else(|| PathBuf::from("."));
    if let Some(root) = folder.ancestors().find(|above| above.join(".git").exists()) {
        return root.to_path_buf();
    }
    match std::env::current_dir().and_then(|here| here.canonicalize()) {
        Ok(here) if folder.starts_with(&here) => here,
        _ => folder,
    }
}

impl World for Disk {
    fn text(&self, path: &Path) -> Result<Arc<str>, ReadError> {
        let path = plain(path);
        self.asked.borrow_mut().note(&path);
        if let Some(known) = self.read.borrow().get(&path) {
            return known.clone();
        }
        let answer = self.fetch(&path);
        self.read.borrow_mut().insert(path, answer.clone());
        answer
    }

    fn asked(&self) -> Vec<PathBuf> {
        self.asked.borrow().paths()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn write(path: &Path, bytes: &[u8]) {
        std::fs::create_dir_all(path.parent().expect("has a folder")).expect("folder");
        #[expect(clippy::disallowed_methods, reason = "a test prepares its files")]
        std::fs::write(path, bytes).expect("file");
    }

    #[test]
    fn each_kind_of_trouble_has_its_own_answer() {
        let folder = tempfile::tempdir().expect("temporary folder");
        let root = folder.path().join("root");
        write(&root.join("good.stack"), "3 µm".as_bytes());
        write(&root.join("bytes.stack"), b"ab\xffcd");
        write(&folder.path().join("secret.stack"), b"x");
        let disk = Disk::below(&root);
        assert_eq!(disk.text(&root.join("good.stack")).as_deref(), Ok("3 µm"));
        assert_eq!(disk.text(&root.join("bytes.stack")), Err(ReadError::NotUtf8 { at: 2 }));
        assert_eq!(disk.text(&root), Err(ReadError::Directory));
        assert_eq!(disk.text(&root.join("gone.stack")), Err(ReadError::Missing));
        assert_eq!(disk.text(&root.join("../secret.stack")), Err(ReadError::Outside));
        assert_eq!(disk.text(&root.join("../gone.stack")), Err(ReadError::Outside));
        assert_eq!(disk.text(&root.join("good.stack/x")), Err(ReadError::Missing));
    }

    #[test]
    fn a_large_file_is_refused_without_being_read() {
        let folder = tempfile::tempdir().expect("temporary folder");
        let path = folder.path().join("large.stack");
        let size = 50 * 1024 * 1024;
        File::create(&path).and_then(|file| file.set_len(size)).expect("sparse file");
        let answer = Disk::below(folder.path()).text(&path);
        assert_eq!(answer, Err(ReadError::TooLarge { size, limit: SIZE_LIMIT }));
    }

    #[cfg(unix)]
    #[test]
    fn a_link_does_not_lead_outside() {
        let folder = tempfile::tempdir().expect("temporary folder");
        let root = folder.path().join("root");
        write(&folder.path().join("secret.stack"), b"x");
        write(&root.join("real.stack"), b"y");
        std::os::unix::fs::symlink("../secret.stack", root.join("out.stack")).expect("link");
        std::os::unix::fs::symlink("real.stack", root.join("in.stack")).expect("link");
        let disk = Disk::below(&root);
        assert_eq!(disk.text(&root.join("out.stack")), Err(ReadError::Outside));
        assert_eq!(disk.text(&root.join("in.stack")).as_deref(), Ok("y"));
        // The user may well name a link himself.
        let named = Disk::around(&root.join("out.stack"));
        assert_eq!(named.text(&root.join("out.stack")).as_deref(), Ok("x"));
    }

    #[test]
    fn one_run_sees_one_state_of_a_file() {
        let folder = tempfile::tempdir().expect("temporary folder");
        let path = folder.path().join("a.stack");
        write(&path, b"first");
        let disk = Disk::below(folder.path());
        assert_eq!(disk.text(&path).as_deref(), Ok("first"));
        write(&path, b"second");
        assert_eq!(disk.text(&path).as_deref(), Ok("first"));
        assert_eq!(Disk::below(folder.path()).text(&path).as_deref(), Ok("second"));
    }
}
