use crate::driver::NoWindow;
use crate::study::StudyReadError;
use bedswell_sim::{FolderError, ReadError, SceneError};
use thiserror::Error;

/// Why there is nothing to look at.
#[derive(Debug, Error)]
pub enum ViewError {
    /// No window can be opened.
    #[error(transparent)]
    Window(#[from] NoWindow),
    /// The folder's run cannot be read.
    #[error(transparent)]
    Run(#[from] ReadError),
    /// The folder's study cannot be read.
    #[error(transparent)]
    Study(#[from] StudyReadError),
    /// The scene or study file cannot be used.
    #[error(transparent)]
    Scene(#[from] SceneError),
    /// The folder for a run cannot be used.
    #[error(transparent)]
    Folder(#[from] FolderError),
    /// Requests for pictures cannot be read, or pictures not be handed back.
    #[error("cannot talk to the program that asked for pictures: {0}")]
    Talk(#[from] std::io::Error),
}

impl ViewError {
    /// The exit code: 2 for what was asked, 3 for where it was to be written.
    pub(crate) fn code(&self) -> u8 {
        match self {
            Self::Folder(_) | Self::Talk(_) => 3,
            _ => 2,
        }
    }
}
