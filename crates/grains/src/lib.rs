//! Gradings, random sphere packs and the motion of grains.

mod assembly;
mod contact_law;
mod force_statistics;
mod grading;
mod packing;
mod repose;

pub use assembly::{
    Assembly, AssemblyError, Boundary, Contact, GrainMemory, Lid, Partner, Rest, WorkAccount,
};
pub use contact_law::{ContactLaw, ContactLawError, Normal, mindlin_ratio};
pub use force_statistics::{FORCE_QUANTILES, ForceStatistics};
pub use grading::{Grading, GradingError, MassCurve, SizeNumbers};
pub use packing::{
    POROSITY_TOLERANCE, Pack, PackError, PackReport, PackRequest, Pot, Sides, beads_for_dose, pack,
    submerged_weight, wall_porosity_rise,
};
pub use repose::{REPOSE_TABLE, friction_for_repose};
