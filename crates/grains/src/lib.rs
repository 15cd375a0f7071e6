//! Gradings, random sphere packs and the motion of grains.

mod assembly;
mod contact_law;
mod grading;
mod packing;

pub use assembly::{Assembly, AssemblyError, Boundary, Contact, Lid, Partner, Rest};
pub use contact_law::{ContactLaw, ContactLawError, Normal, mindlin_ratio};
pub use grading::{Grading, GradingError, MassCurve, SizeNumbers};
pub use packing::{
    POROSITY_TOLERANCE, Pack, PackError, PackReport, PackRequest, Sides, beads_for_dose, pack,
};
