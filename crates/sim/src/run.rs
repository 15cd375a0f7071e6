use crate::coupling::{DryBed, march};
use crate::{PackOutcome, Scene};
use thiserror::Error;

/// Watches a pack on its way from dry to equilibrium.
pub trait Observer {
    /// Called after each increment reached joint equilibrium.
    fn step(&mut self, step: &crate::Step, of: usize);
}

/// An observer that looks away.
impl Observer for () {
    fn step(&mut self, _: &crate::Step, _: usize) {}
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
}

/// Takes pack number `pack` of `scene` from dry to equilibrium.
///
/// The result depends on the scene (with its seed) and the pack number alone.
///
/// # Errors
/// When the soil cannot be packed as asked or a state leaves the model.
pub fn run_pack(scene: &Scene, pack: u64, observer: &mut dyn Observer) -> Result<PackOutcome, RunError> {
    let gel = scene.swelling_gel();
    // Grains bear the lid's stress and, next to a bead, some of the gel's.
    let stress = scene.bed.lid_stress.max(0.05 * gel.moduli().shear);
    let bed = DryBed::build(scene, pack, stress)?;
    march(scene, &gel, bed, pack, observer)
}
