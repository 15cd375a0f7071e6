use super::FolderError;
use super::checkpoint::{read_checkpoint, write_checkpoint};
use super::states::write_state;
use crate::{Checkpoint, Observer, State, Step};
use std::ops::ControlFlow;
use std::path::Path;

/// Writes every state of a run into its folder, and lets another observer watch as well.
/// Where a state cannot be written it stops the run.
pub struct StateRecorder<'a> {
    folder: &'a Path,
    watching: &'a mut dyn Observer,
    failure: Option<FolderError>,
}

impl<'a> StateRecorder<'a> {
    /// A recorder into a folder that [`super::prepare_run_folder`] made ready.
    pub fn new(folder: &'a Path, watching: &'a mut dyn Observer) -> Self {
        Self { folder, watching, failure: None }
    }

    /// Why a state could not be written, if that happened.
    ///
    /// # Errors
    /// The error of the first state that could not be written.
    pub fn finish(self) -> Result<(), FolderError> {
        self.failure.map_or(Ok(()), Err)
    }
}

impl Observer for StateRecorder<'_> {
    fn step(&mut self, step: &Step, of: usize) -> ControlFlow<()> {
        self.watching.step(step, of)
    }

    fn looks(&self) -> bool {
        true
    }

    fn look(&mut self, state: State) -> ControlFlow<()> {
        if let Err(error) = write_state(self.folder, &state) {
            self.failure = Some(error);
            return ControlFlow::Break(());
        }
        self.watching.look(state)
    }

    fn resume(&mut self) -> Option<Checkpoint> {
        read_checkpoint(self.folder)
    }

    fn keep(&mut self, checkpoint: &Checkpoint) -> ControlFlow<()> {
        if let Err(error) = write_checkpoint(self.folder, checkpoint) {
            self.failure = Some(error);
            return ControlFlow::Break(());
        }
        ControlFlow::Continue(())
    }
}
