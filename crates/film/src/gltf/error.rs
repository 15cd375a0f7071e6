use std::io;
use std::path::PathBuf;
use thiserror::Error;

/// Why a drawing could not be written as glTF.
#[derive(Debug, Error)]
pub enum GltfError {
    /// A coordinate, radius or normal is not a finite number.
    #[error("{path}: {what} {index} of the drawing is at no finite place", path = path.display())]
    NotFinite {
        /// The file.
        path: PathBuf,
        /// Ball, rod or mesh.
        what: &'static str,
        /// Which one, from 0.
        index: usize,
    },
    /// The format counts bytes with 32 bits.
    #[error(
        "{path}: the drawing is larger than the 4 GiB that the format can hold; leave out grains or bonds",
        path = path.display()
    )]
    TooLarge {
        /// The file.
        path: PathBuf,
    },
    /// The file cannot be written.
    #[error("cannot write {path}: {cause}", path = path.display())]
    Write {
        /// The file.
        path: PathBuf,
        /// What the system says.
        cause: io::Error,
    },
}
