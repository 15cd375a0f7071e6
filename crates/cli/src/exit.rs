use bedswell_sim::{FolderError, RunError, SceneError};
use std::process::ExitCode;

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
        if error.is::<SceneError>() {
            Self::Input
        } else if error.is::<FolderError>() || error.is::<std::io::Error>() {
            Self::Output
        } else {
            match error.downcast_ref::<RunError>() {
                Some(RunError::Packing(_)) => Self::Input,
                _ => Self::Failed,
            }
        }
    }
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        Self::from(exit as u8)
    }
}
