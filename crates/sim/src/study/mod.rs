mod choices;
mod conduct;
mod design;
mod effects;
mod factor;
mod journal;
mod latin_hypercube;
mod model;
mod outcomes;
mod plan;
mod quantity;
mod range;
mod read;
mod read_factor;
mod response;
mod summary;
mod survival;
mod tables;

pub use conduct::{PackRunner, StudyObserver, StudyOptions, run_study};
pub use effects::{Effects, FactorEffect, Interaction, LevelEffect};
pub use factor::{Factor, Variation, combination_in_words};
pub use model::{Level, Study};
pub use read::read_study;
pub use response::{RESPONSES, Response, TIMES};
pub use summary::{FailedPack, LevelSummary, StudySummary};
pub use survival::{
    FactorSurvival, GroupComparison, JudgedBin, StudySurvival, SurvivalGroup, WeakestLinkAgreement,
};
