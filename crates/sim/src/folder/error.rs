use std::path::{Path, PathBuf};
use thiserror::Error;

/// Why an output folder could not be used.
#[derive(Debug, Error)]
pub enum FolderError {
    /// A file or the folder itself cannot be written.
    #[error("cannot write {path}: {cause}", path = path.display())]
    Write {
        /// The file or folder.
        path: PathBuf,
        /// What the system says.
        cause: std::io::Error,
    },
    /// A study could not write any further.
    #[error(
        "cannot write {path}: {cause}; {kept} finished packs are kept: make room and run the same command again",
        path = path.display()
    )]
    Interrupted {
        /// The file.
        path: PathBuf,
        /// What the system says.
        cause: std::io::Error,
        /// Packs that are safe in the journal.
        kept: u64,
    },
    /// The folder is somebody else's.
    #[error("{path} holds {what}; choose a new or an empty folder with --out", path = path.display())]
    Occupied {
        /// The folder.
        path: PathBuf,
        /// What is in it.
        what: String,
    },
    /// Another program is writing the same study.
    #[error("another bedswell is writing to {path}; wait for it, or choose another folder", path = path.display())]
    InUse {
        /// The folder.
        path: PathBuf,
    },
    /// A line of the journal was altered after it was written.
    #[error(
        "{path}, line {line}: the checksum does not match, so the file was altered or the disk is failing; cut the \
         file before that line to compute the later packs anew",
        path = path.display()
    )]
    Damaged {
        /// The journal.
        path: PathBuf,
        /// The line.
        line: usize,
    },
}

impl FolderError {
    pub(crate) fn write(path: &Path) -> impl FnOnce(std::io::Error) -> Self {
        let path = path.to_owned();
        move |cause| Self::Write { path, cause }
    }

    /// The same, once a study has packs to lose.
    pub(crate) fn keeping(self, kept: u64) -> Self {
        match self {
            Self::Write { path, cause } => Self::Interrupted { path, cause, kept },
            other => other,
        }
    }
}
