//! Files that appear whole or not at all.

use std::fs::{self, File};
use std::io;
use std::path::{Path, PathBuf};

use tempfile::NamedTempFile;

/// A file being made: it is written under another name beside its target and takes its name in [`WholeFile::finish`]. Dropped before
/// that, nothing appears.
#[derive(Debug)]
pub struct WholeFile {
    beside: NamedTempFile,
    target: PathBuf,
}

/// Why a file cannot be made.
#[derive(Debug)]
pub enum Refusal {
    /// The path is wrong, in words.
    Path(String),
    /// The machine failed.
    Machine(io::Error),
}

impl WholeFile {
    /// Starts the file `path`, and gives it as it is to be written.
    ///
    /// # Errors
    /// A target that exists and is no regular file or may not be written, a folder that is missing, or a machine that fails.
    pub fn create(path: &Path) -> Result<(Self, File), Refusal> {
        let target = target(path)?;
        let start = || {
            let beside = temporary_beside(&target)?;
            let file = beside.reopen()?;
            Ok((beside, file))
        };
        let (beside, file) = start().map_err(Refusal::Machine)?;
        Ok((Self { beside, target }, file))
    }

    /// Brings the written `file` to the disk and gives it its name in one step.
    ///
    /// # Errors
    /// A machine that fails.
    pub fn finish(self, file: File) -> io::Result<()> {
        file.sync_all()?;
        drop(file);
        self.beside.persist(&self.target).map_err(|e| e.error)?;
        sync_folder(&self.target)
    }

    /// As [`WholeFile::finish`], but replaces nothing: a file of the name, even one made meanwhile, is an error of the kind `AlreadyExists`.
    ///
    /// # Errors
    /// A file that exists, or a machine that fails.
    pub fn finish_new(self, file: File) -> io::Result<()> {
        file.sync_all()?;
        drop(file);
        let kept = self.beside.persist_noclobber(&self.target);
        kept.map_err(|e| e.error)?;
        sync_folder(&self.target)
    }
}

/// Whether two paths name one file (through links as well). False where either does not exist, and for `-`.
pub fn same_file(a: impl AsRef<Path>, b: impl AsRef<Path>) -> bool {
    let (a, b) = (a.as_ref(), b.as_ref());
    if a.as_os_str() == "-" || b.as_os_str() == "-" {
        return false;
    }
    let (Ok(one), Ok(other)) = (fs::canonicalize(a), fs::canonicalize(b)) else {
        return false;
    };
    one == other || same_inode(&one, &other)
}

/// Whether two paths name one file, or would once it is made.
pub fn same_target(a: &Path, b: &Path) -> bool {
    let place = |p: &Path| {
        let folder = fs::canonicalize(folder(p)).ok()?;
        Some((folder, p.file_name()?.to_owned()))
    };
    same_file(a, b) || place(a).is_some_and(|one| Some(one) == place(b))
}

#[cfg(unix)]
fn same_inode(a: &Path, b: &Path) -> bool {
    use std::os::unix::fs::MetadataExt;
    match (fs::metadata(a), fs::metadata(b)) {
        (Ok(a), Ok(b)) => a.dev() == b.dev() && a.ino() == b.ino(),
        _ => false,
    }
}

#[cfg(not(unix))]
fn same_inode(_: &Path, _: &Path) -> bool {
    false
}

/// The folder that a path's last name stands in.
fn folder(path: &Path) -> &Path {
    match path.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    }
}

/// The file that will be replaced or made: links are followed, so that a link stays a link.
fn target(path: &Path) -> Result<PathBuf, Refusal> {
    let refuse = |reason: &str| Err(Refusal::Path(reason.to_owned()));
    if path.symlink_metadata().is_ok() {
        return match fs::metadata(path) {
            Ok(m) if m.is_file() && !m.permissions().readonly() => {
                fs::canonicalize(path).map_err(Refusal::Machine)
            }
            Ok(m) if m.is_file() => refuse("a file of that name exists and is read-only"),
            Ok(m) if m.is_dir() => refuse("it is a folder"),
            Ok(_) => refuse("it exists and is no regular file"),
            Err(_) => refuse("it is a link that leads nowhere"),
        };
    }
    match path.file_name() {
        Some(_) if folder(path).is_dir() => Ok(path.to_owned()),
        Some(_) => refuse(&format!("there is no folder {}", folder(path).display())),
        None => refuse("the path names no file"),
    }
}

/// A temporary file in the target's folder, with the permissions a new file gets.
fn temporary_beside(target: &Path) -> io::Result<NamedTempFile> {
    let mut builder = tempfile::Builder::new();
    builder.prefix(".harklight-").suffix(".part");
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        builder.permissions(fs::Permissions::from_mode(0o666));
    }
    builder.tempfile_in(folder(target))
}

/// On Unix a rename is on the disk only once its folder is.
#[cfg(unix)]
fn sync_folder(target: &Path) -> io::Result<()> {
    // A folder that may be written to and not read cannot be opened; the file is whole all the same.
    match File::open(folder(target)) {
        Ok(folder) => folder.sync_all(),
        Err(_) => Ok(()),
    }
}

#[cfg(not(unix))]
fn sync_folder(_: &Path) -> io::Result<()> {
    Ok(())
}
