//! Scenes, coupled swelling marches, studies and run folders.

mod outcome;
mod run;
mod scene;

pub use outcome::{BeadOutcome, GrainRecord, PackOutcome, Quality, Step};
pub use run::{Observer, RunError, run_pack};
pub use scene::{BeadAmount, Beads, Bed, Gel, March, Scene, Soil, SoilGrading, Strength, Water};
