use bedswell_painter::Size;
use std::io;
use std::path::{Path, PathBuf};
use thiserror::Error;

/// Why a clip could not be written.
#[derive(Debug, Error)]
pub enum ClipError {
    /// The name does not tell the format.
    #[error(
        "{path}: films are written as .mp4 (H.264), .gif, or a folder of PNG frames (a name without an ending, or \
         with a slash after it); change the name to one of these",
        path = path.display()
    )]
    UnknownFormat {
        /// The name.
        path: PathBuf,
    },
    /// A file or folder cannot be written.
    #[error("cannot write {path}: {cause}", path = path.display())]
    Write {
        /// The file or folder.
        path: PathBuf,
        /// What the system says.
        cause: io::Error,
    },
    /// The folder for frames holds other things.
    #[error(
        "{path} holds {found}; frames need a new or an empty folder, or one with the frames of an earlier film only",
        path = path.display()
    )]
    Occupied {
        /// The folder.
        path: PathBuf,
        /// Something in it that is no frame.
        found: String,
    },
    /// The format cannot hold pictures of this size.
    #[error(
        "{path}: {width}x{height} pixels do not fit this format; it takes {least} to {most} pixels either way",
        path = path.display(), width = size.width, height = size.height
    )]
    Size {
        /// The file.
        path: PathBuf,
        /// Size asked for.
        size: Size,
        /// Fewest pixels across and down.
        least: u32,
        /// Most pixels across and down.
        most: u32,
    },
    /// An impossible number of frames per second.
    #[error("{path}: {rate} frames per second cannot be written; choose 1 to 60", path = path.display())]
    Rate {
        /// The file.
        path: PathBuf,
        /// Frames per second asked for.
        rate: u32,
    },
    /// A frame of another size than the clip was started with.
    #[error(
        "{path}: a frame of {}x{} pixels in a film of {}x{}",
        found.width, found.height, expected.width, expected.height, path = path.display()
    )]
    Uneven {
        /// The file.
        path: PathBuf,
        /// Size of the frame.
        found: Size,
        /// Size the clip was started with.
        expected: Size,
    },
    /// Finished without a frame.
    #[error("{path}: a film needs at least one frame", path = path.display())]
    Empty {
        /// The file.
        path: PathBuf,
    },
    /// The encoder gave up.
    #[error("cannot encode {path}: {message}", path = path.display())]
    Encoder {
        /// The file.
        path: PathBuf,
        /// What it says.
        message: String,
    },
    /// Written to after an error.
    #[error("{path} was given up after an earlier error", path = path.display())]
    GivenUp {
        /// The file.
        path: PathBuf,
    },
}

impl ClipError {
    pub(super) fn write(path: &Path) -> impl FnOnce(io::Error) -> Self {
        let path = path.to_owned();
        move |cause| Self::Write { path, cause }
    }

    pub(super) fn encoder(path: &Path, message: impl ToString) -> Self {
        Self::Encoder { path: path.to_owned(), message: message.to_string() }
    }
}
