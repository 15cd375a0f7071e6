//! Where grains and gel meet: the dry bed, the march to joint equilibrium, and what
//! is measured on the way.

mod bed;
mod bodies;
mod contents;
mod march;
mod measure;
mod neighbourhood;
mod pot;
mod snapshot;
mod touching;

pub(crate) use bed::DryBed;
pub(crate) use march::march;
