//! Gel thermodynamics, bead lattices, their equilibrium and rupture, water in time.

mod bead;
mod contact;
mod datasheet;
mod elastic;
mod equilibrium;
mod fold;
mod gel_contact;
mod kinetics;
mod lanes;
mod lattice;
mod obstacle;
mod relaxation;
mod rigid;
mod rupture;
mod stress;
mod thermodynamics;

pub use bead::Bead;
pub use datasheet::{
    Calibration, Datasheet, DatasheetError, calibrate_datasheet, uptake_of_volume_ratio,
    volume_ratio_of_uptake,
};
pub use equilibrium::{Equilibrium, EquilibriumError, Tolerance, settle, swell};
pub use gel_contact::{BeadContact, Pushes};
pub use kinetics::{
    Change, History, HistoryError, Kinetics, KineticsError, Outside, Permeability, PermeabilityError, Prop,
    Settings, Snapshot, Step,
};
pub use lattice::{Face, Lattice, Locator, MaterialPoint, Shape};
pub use obstacle::Obstacle;
pub use relaxation::{Lead, Load, Motion, Relaxation};
pub use rupture::{
    Criterion, Event, Fragment, Grip, Rupture, RuptureError, RuptureSnapshot, Toughness, ToughnessError,
    fragments,
};
pub use stress::{Bond, StressField, asphericity};
pub use thermodynamics::{Gel, GelNumbers, Moduli, Surroundings, WATER_DENSITY};
