mod conduct;
mod journal;
mod model;
mod outcomes;
mod plan;
mod read;
mod summary;

pub use conduct::{PackRunner, StudyObserver, StudyOptions, run_study};
pub use model::{Level, Study};
pub use read::read_study;
pub use summary::{FailedPack, LevelSummary, StudySummary};
