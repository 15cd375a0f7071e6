//! Gel thermodynamics, bead lattices and their equilibrium.

mod bead;
mod bead_contact;
mod contact;
mod datasheet;
mod elastic;
mod equilibrium;
mod lanes;
mod lattice;
mod obstacle;
mod relaxation;
mod rigid;
mod self_contact;
mod stress;
mod thermodynamics;

pub use bead::Bead;
pub use bead_contact::BeadContact;
pub use datasheet::{
    Calibration, Datasheet, DatasheetError, calibrate_datasheet, uptake_of_volume_ratio,
    volume_ratio_of_uptake,
};
pub use equilibrium::{Equilibrium, EquilibriumError, Tolerance, settle, swell};
pub use lattice::{Lattice, Locator, MaterialPoint};
pub use obstacle::Obstacle;
pub use relaxation::{Push, Relaxation};
pub use stress::{Bond, StressField, asphericity};
pub use thermodynamics::{Gel, GelNumbers, Moduli, Surroundings, WATER_DENSITY};
