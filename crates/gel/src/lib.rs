//! Gel thermodynamics, bead lattices and their equilibrium.

mod datasheet;
mod elastic;
mod lanes;
mod lattice;
mod thermodynamics;

pub use datasheet::{
    Calibration, Datasheet, DatasheetError, calibrate_datasheet, uptake_of_volume_ratio,
    volume_ratio_of_uptake,
};
pub use lattice::Lattice;
pub use thermodynamics::{Gel, GelNumbers, Moduli, Surroundings, WATER_DENSITY};
