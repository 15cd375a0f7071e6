//! Scenes, coupled swelling marches, studies and run folders.

mod calibrate;
mod check;
mod coupling;
pub mod figures;
mod folder;
mod outcome;
mod run;
mod scene;
mod state;
mod statistics;
mod study;
mod tears;

pub use bedswell_grains::{Grading, SizeNumbers};
pub use calibrate::{
    BenchArray, BenchCount, BenchGrade, BenchOutcomes, FitError, LoadCase, StrengthFit, fit_strength,
    gel_table, read_bench_outcomes,
};
pub use check::{CheckLine, checks};
pub use coupling::Checkpoint;
pub use folder::{
    FolderError, ReadError, RunFolder, RunSummary, StateRecorder, prepare_run_folder, read_run_folder,
    remove_run_files, write_run_folder,
};
pub use outcome::{
    BeadOutcome, BeadTiming, CoursePoint, ForceOutcome, GrainRecord, PackOutcome, Quality, Step, Timing,
};
pub use run::{Observer, RunError, run_pack};
pub use scene::{
    BeadAmount, Beads, Bed, Concern, Gel, March, Place, SPHERES_FILE, Scene, SceneError, SceneEstimate, Soil,
    SoilGrading, Strength, Time, Toughness, Water, nearest_word, read_scene,
};
pub use state::{BeadContact, BeadState, GrainContact, State, Touched};
pub use statistics::{
    Agreement, AgreementBin, AgreementError, Clustered, Estimate, GroupCount, Interval, Lifetime, Lifetimes,
    LogRank, Measure, SurvivalCurve, SurvivalError, SurvivalMedian, SurvivalStep, TensionField, agreement,
    bootstrap_mean, clopper_pearson, clustered_fraction, kaplan_meier, log_rank, mean_strength,
    strength_ratio, tear_probability, wilson,
};
pub use study::{
    Effects, Factor, FactorEffect, FactorSurvival, FailedPack, GroupComparison, Interaction, JudgedBin,
    Level, LevelEffect, LevelSummary, PackRunner, RESPONSES, Response, Study, StudyObserver, StudyOptions,
    StudySummary, StudySurvival, SurvivalGroup, TIMES, Variation, WeakestLinkAgreement, combination_in_words,
    read_study, run_study,
};
pub use tears::{BeadTears, Cracks, CyclePoint, FirstRupture, Moment, PackTears, Region, RuptureEvent};
