//! Where grains and gel meet: the dry bed, the march to joint equilibrium, and what
//! is measured on the way.

mod avalanche;
mod bed;
mod bodies;
mod checkpoint;
mod contents;
mod course;
mod cycles;
mod in_time;
mod march;
mod measure;
mod neighbourhood;
mod pot;
mod records;
mod snapshot;
mod tearing;
mod tears_in_time;
mod touching;

pub(crate) use bed::DryBed;
pub use checkpoint::Checkpoint;
pub(crate) use in_time::march_in_time;
pub(crate) use march::march;
pub(crate) use records::spans;
