use bedswell_film::{ClipError, FilmError, GltfError, ShotError};
use bedswell_sim::{FitError, FolderError, ReadError, RunError, SceneError};
use std::process::ExitCode;
use thiserror::Error;

/// How a command ended; the numbers are what scripts may rely on.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Exit {
    /// Everything asked for was done.
    Done = 0,
    /// A pack found no equilibrium, or a check failed.
    Failed = 1,
    /// The command line, scene or study cannot be used.
    Input = 2,
    /// The output cannot be written, or belongs to something else.
    Output = 3,
}

impl Exit {
    /// What an error means for the exit code.
    pub(crate) fn of(error: &anyhow::Error) -> Self {
        let input = error.is::<SceneError>()
            || error.is::<ReadError>()
            || error.is::<FitError>()
            || error.is::<ShotError>()
            || error.is::<Usage>();
        if input {
            return Self::Input;
        }
        if error.is::<FolderError>() || error.is::<std::io::Error>() {
            return Self::Output;
        }
        if let Some(clip) = error.downcast_ref::<ClipError>() {
            return Self::of_clip(clip);
        }
        match (error.downcast_ref(), error.downcast_ref(), error.downcast_ref()) {
            (Some(RunError::Packing(_)), ..) => Self::Input,
            (_, Some(FilmError::Clip(clip)), _) => Self::of_clip(clip),
            (_, Some(FilmError::Nothing | FilmError::Shots(_) | FilmError::Absent { .. }), _) => Self::Input,
            (_, _, Some(GltfError::Write { .. })) => Self::Output,
            _ => Self::Failed,
        }
    }

    fn of_clip(error: &ClipError) -> Self {
        match error {
            ClipError::Write { .. } | ClipError::Occupied { .. } => Self::Output,
            ClipError::UnknownFormat { .. } | ClipError::Size { .. } | ClipError::Rate { .. } => Self::Input,
            _ => Self::Failed,
        }
    }
}

/// Arguments that cannot be used together or for this.
#[derive(Debug, Error)]
#[error("{0}")]
pub(crate) struct Usage(pub(crate) String);

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        Self::from(exit as u8)
    }
}
