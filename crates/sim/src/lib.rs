//! Scenes, coupled swelling marches, studies and run folders.

mod check;
mod coupling;
mod folder;
mod outcome;
mod run;
mod scene;
mod statistics;
mod study;

pub use bedswell_grains::{Grading, SizeNumbers};
pub use check::{CheckLine, checks};
pub use folder::{FolderError, RunSummary, prepare_run_folder, write_run_folder};
pub use outcome::{BeadOutcome, GrainRecord, PackOutcome, Quality, Step};
pub use run::{Observer, RunError, run_pack};
pub use scene::{
    BeadAmount, Beads, Bed, Gel, March, Place, SPHERES_FILE, Scene, SceneError, SceneEstimate, Soil,
    SoilGrading, Strength, Water, read_scene,
};
pub use statistics::{
    Clustered, Estimate, Interval, bootstrap_mean, clopper_pearson, clustered_fraction, mean_strength,
    strength_ratio, tear_probability, wilson,
};
pub use study::{
    FailedPack, Level, LevelSummary, PackRunner, Study, StudyObserver, StudyOptions, StudySummary,
    read_study, run_study,
};
