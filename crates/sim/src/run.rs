use crate::coupling::{Checkpoint, DryBed, march, march_in_time};
use crate::{PackOutcome, Scene, State, Step};
use std::ops::ControlFlow;
use thiserror::Error;

/// Watches a pack on its way from dry to equilibrium, and may stop it.
pub trait Observer: Send {
    /// Called after each increment reached joint equilibrium.
    fn step(&mut self, step: &Step, of: usize) -> ControlFlow<()>;

    /// Whether this observer wants to be shown states; they cost a little to make.
    fn looks(&self) -> bool {
        false
    }

    /// Shown the mixed dry bed first, and then the state after each increment.
    fn look(&mut self, _: State) -> ControlFlow<()> {
        ControlFlow::Continue(())
    }

    /// Where a pack with a history in time was stopped, for it to go on from there. One that
    /// does not fit is not used.
    fn resume(&mut self) -> Option<Checkpoint> {
        None
    }

    /// Given what a pack with a history in time needs to go on after an increment.
    fn keep(&mut self, _: &Checkpoint) -> ControlFlow<()> {
        ControlFlow::Continue(())
    }
}

/// An observer that looks away.
impl Observer for () {
    fn step(&mut self, _: &Step, _: usize) -> ControlFlow<()> {
        ControlFlow::Continue(())
    }
}

/// Why a pack did not reach its end.
#[derive(Debug, Error)]
pub enum RunError {
    /// The soil cannot be packed as asked.
    #[error("{0}")]
    Packing(String),
    /// No joint equilibrium was found, or the state is outside the model.
    #[error("increment {increment}: {reason}")]
    March {
        /// The increment that failed.
        increment: usize,
        /// What happened and how to mend it.
        reason: String,
    },
    /// The observer stopped it.
    #[error("stopped after increment {increment}")]
    Stopped {
        /// The last increment that was reached.
        increment: usize,
    },
}

/// Takes pack number `pack` of `scene` from dry to equilibrium, or through the history in
/// time that the scene gives.
///
/// The result depends on the scene (with its seed) and the pack number alone.
///
/// # Errors
/// When the soil cannot be packed as asked, a state leaves the model, or the observer
/// stops the run.
pub fn run_pack(scene: &Scene, pack: u64, observer: &mut dyn Observer) -> Result<PackOutcome, RunError> {
    let gel = scene.swelling_gel();
    // Grains bear the lid's stress and, next to a bead, some of the gel's.
    let stress = scene.bed.lid_stress.max(0.05 * gel.moduli().shear);
    // On a worker of the pool from the start, so that no step has to wake one.
    rayon::scope(|_| {
        let bed = DryBed::build(scene, pack, stress)?;
        match &scene.time {
            None => march(scene, &gel, bed, pack, observer),
            Some(time) => march_in_time(scene, time, bed, pack, observer),
        }
    })
}
