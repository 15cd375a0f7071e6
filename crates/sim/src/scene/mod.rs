mod model;

pub use model::{BeadAmount, Beads, Bed, Gel, March, Scene, Soil, SoilGrading, Strength, Water};
