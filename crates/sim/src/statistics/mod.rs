mod bootstrap;
mod clustered;
mod intervals;
mod weakest_link;

pub use bootstrap::{Estimate, bootstrap_mean};
pub use clustered::{Clustered, clustered_fraction};
pub use intervals::{Interval, clopper_pearson, wilson};
pub use weakest_link::{mean_strength, strength_ratio, tear_probability};
