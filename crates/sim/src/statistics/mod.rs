mod agreement;
mod bootstrap;
mod chi_squared;
mod clustered;
mod factorial;
mod interaction;
mod intervals;
mod least_squares;
mod linear_effects;
mod main_effects;
mod rank_correlation;
mod survival;
mod tension_field;
mod weakest_link;

pub use agreement::{Agreement, AgreementBin, AgreementError, agreement};
pub use bootstrap::{Estimate, Measure, bootstrap_mean};
pub use clustered::{Clustered, clustered_fraction};
pub use intervals::{Interval, clopper_pearson, wilson};
pub use survival::{
    GroupCount, Lifetime, Lifetimes, LogRank, SurvivalCurve, SurvivalError, SurvivalMedian, SurvivalStep,
    kaplan_meier, log_rank,
};
pub use tension_field::TensionField;
pub use weakest_link::{mean_strength, strength_ratio, tear_probability};

pub(crate) use factorial::Combination;
pub(crate) use interaction::{Deviation, largest_deviations};
pub(crate) use linear_effects::linear_effects;
pub(crate) use main_effects::{MainEffect, main_effects};
pub(crate) use rank_correlation::bootstrap_rank_correlation;
pub(crate) use survival::{treated, untreated};
