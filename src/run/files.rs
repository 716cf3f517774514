//! Files and folders that appear whole or not at all.
//!
//! A file is written under a temporary name in the folder where it will stay, flushed to disk and renamed.
//! A result folder is filled under a temporary name next to its place and renamed when it is complete.

use std::fs;
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};
use tempfile::{NamedTempFile, TempDir};
use thiserror::Error;

/// Why output could not be written.
#[derive(Debug, Error)]
pub enum OutputFault {
    /// The operating system refused.
    #[error("cannot write {}: {source}", path.display())]
    System {
        /// What was to be written.
        path: PathBuf,
        /// The system's reason.
        source: io::Error,
    },
    /// The folder is there and is not an earlier result.
    #[error("{} is there already and is not a folder that this command made; choose another --out or remove it", path.display())]
    Occupied {
        /// The folder.
        path: PathBuf,
    },
    /// A file was asked for where a folder is.
    #[error("{} is a folder; choose the name of a file for --out", path.display())]
    IsFolder {
        /// The folder.
        path: PathBuf,
    },
    /// The place for the output does not exist.
    #[error("there is no folder {}; make it first or choose another --out", path.display())]
    NoParent {
        /// The missing folder.
        path: PathBuf,
    },
}

fn parent(path: &Path) -> Result<PathBuf, OutputFault> {
    let parent = match path.parent() {
        Some(parent) if !parent.as_os_str().is_empty() => parent.to_path_buf(),
        _ => PathBuf::from("."),
    };
    if parent.is_dir() {
        Ok(parent)
    } else {
        Err(OutputFault::NoParent { path: parent })
    }
}

/// Refuses a place for a file before the work is done that would fill it: its folder is missing, or it is a folder
/// itself.
///
/// # Errors
/// When [`write_whole`] would refuse.
pub fn check_place(path: &Path) -> Result<(), OutputFault> {
    parent(path)?;
    if path.is_dir() {
        return Err(OutputFault::IsFolder { path: path.into() });
    }
    Ok(())
}

/// Writes a file through a temporary one in the same folder.
///
/// # Errors
/// When the folder does not exist or the system refuses; the old file, if any, is then untouched.
pub fn write_whole(
    path: &Path,
    fill: impl FnOnce(&mut dyn Write) -> io::Result<()>,
) -> Result<(), OutputFault> {
    check_place(path)?;
    let folder = parent(path)?;
    let fault = |source| OutputFault::System {
        path: path.into(),
        source,
    };
    let mut file = NamedTempFile::new_in(folder).map_err(fault)?;
    let mut buffered = BufWriter::new(&mut file);
    fill(&mut buffered)
        .and_then(|()| buffered.flush())
        .map_err(fault)?;
    drop(buffered);
    file.as_file().sync_all().map_err(fault)?;
    make_readable(file.path()).map_err(fault)?;
    file.persist(path).map_err(|e| fault(e.error))?;
    Ok(())
}

/// Temporary files are private to their owner; results should have the usual permissions.
fn make_readable(path: &Path) -> io::Result<()> {
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        let mode = if path.is_dir() { 0o755 } else { 0o644 };
        fs::set_permissions(path, fs::Permissions::from_mode(mode))?;
    }
    #[cfg(not(unix))]
    let _ = path;
    Ok(())
}

/// A result folder being filled.
#[derive(Debug)]
pub struct ResultFolder {
    target: PathBuf,
    /// A file whose presence tells an earlier result of the same kind.
    mark: &'static str,
    filling: TempDir,
}

impl ResultFolder {
    /// Starts to fill a folder that will replace `target`. `mark` is the file that every result of this kind
    /// holds: a folder without it is left alone.
    ///
    /// # Errors
    /// When `target` is something else than an earlier result or an empty folder, or its parent is missing.
    pub fn new(target: &Path, mark: &'static str) -> Result<ResultFolder, OutputFault> {
        check_free(target, mark)?;
        let folder = parent(target)?;
        let filling = tempfile::Builder::new()
            .prefix(".reboundary-")
            .tempdir_in(folder)
            .map_err(|source| OutputFault::System {
                path: target.into(),
                source,
            })?;
        Ok(ResultFolder {
            target: target.into(),
            mark,
            filling,
        })
    }

    /// Writes one file of the result.
    ///
    /// # Errors
    /// When the system refuses.
    pub fn write(
        &self,
        name: &str,
        fill: impl FnOnce(&mut dyn Write) -> io::Result<()>,
    ) -> Result<(), OutputFault> {
        let path = self.filling.path().join(name);
        let fault = |source| OutputFault::System {
            path: self.target.join(name),
            source,
        };
        if let Some(folder) = path.parent() {
            fs::create_dir_all(folder).map_err(fault)?;
        }
        let mut file = BufWriter::new(fs::File::create(&path).map_err(fault)?);
        fill(&mut file).and_then(|()| file.flush()).map_err(fault)
    }

    /// Puts the folder in its place. An earlier result is removed only now.
    ///
    /// # Errors
    /// When the system refuses.
    pub fn finish(self) -> Result<(), OutputFault> {
        check_free(&self.target, self.mark)?;
        let fault = |source| OutputFault::System {
            path: self.target.clone(),
            source,
        };
        make_readable(self.filling.path()).map_err(fault)?;
        if self.target.exists() {
            fs::remove_dir_all(&self.target).map_err(fault)?;
        }
        let filled = self.filling.keep();
        fs::rename(filled, &self.target).map_err(fault)
    }
}

/// Refuses a target that holds something else.
fn check_free(target: &Path, mark: &str) -> Result<(), OutputFault> {
    if !target.exists() {
        return Ok(());
    }
    let empty =
        target.is_dir() && fs::read_dir(target).is_ok_and(|mut entries| entries.next().is_none());
    if empty || target.join(mark).is_file() {
        Ok(())
    } else {
        Err(OutputFault::Occupied {
            path: target.into(),
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_file_appears_whole_or_not_at_all() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("words.txt");
        write_whole(&path, |out| out.write_all(b"old")).unwrap();
        let broken = write_whole(&path, |out| {
            out.write_all(b"half")?;
            Err(io::Error::other("enough"))
        });
        assert!(matches!(broken, Err(OutputFault::System { .. })));
        assert_eq!(fs::read(&path).unwrap(), b"old");
        assert_eq!(
            fs::read_dir(folder.path()).unwrap().count(),
            1,
            "no leftovers"
        );
        assert!(check_place(&path).is_ok());
        assert!(matches!(
            check_place(folder.path()),
            Err(OutputFault::IsFolder { .. })
        ));
        let nowhere = write_whole(&folder.path().join("no/file"), |_| Ok(()));
        assert!(matches!(nowhere, Err(OutputFault::NoParent { .. })));
    }

    #[test]
    fn a_result_folder_replaces_only_its_own_kind() {
        let place = tempfile::tempdir().unwrap();
        let target = place.path().join("result");
        for text in ["first", "second"] {
            let folder = ResultFolder::new(&target, "mark").unwrap();
            folder
                .write("mark", |out| out.write_all(text.as_bytes()))
                .unwrap();
            folder
                .write("deep/file", |out| out.write_all(b"x"))
                .unwrap();
            folder.finish().unwrap();
            assert_eq!(fs::read_to_string(target.join("mark")).unwrap(), text);
        }
        let abandoned = ResultFolder::new(&target, "mark").unwrap();
        abandoned
            .write("mark", |out| out.write_all(b"third"))
            .unwrap();
        drop(abandoned);
        assert_eq!(fs::read_to_string(target.join("mark")).unwrap(), "second");
        assert_eq!(
            fs::read_dir(place.path()).unwrap().count(),
            1,
            "no leftovers"
        );
        assert!(matches!(
            ResultFolder::new(&target, "other mark"),
            Err(OutputFault::Occupied { .. })
        ));
    }
}
