//! Times to an event that some never meet: survival curves and how groups compare.

mod kaplan_meier;
mod lifetimes;
mod log_rank;
mod remission;

pub use kaplan_meier::{SurvivalCurve, SurvivalMedian, SurvivalStep, kaplan_meier};
pub use lifetimes::{Lifetime, Lifetimes, SurvivalError};
pub use log_rank::{GroupCount, LogRank, log_rank};

pub(crate) use remission::{treated, untreated};
