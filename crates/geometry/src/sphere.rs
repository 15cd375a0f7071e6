use crate::Vector;
use serde::{Deserialize, Serialize};

/// A sphere: a grain, or a bead before it swells.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Sphere {
    /// Centre (m).
    pub centre: Vector,
    /// Radius (m).
    pub radius: f64,
}

impl Sphere {
    /// Volume (m³).
    pub fn volume(&self) -> f64 {
        volume_of_radius(self.radius)
    }
}

/// Volume (m³) of a sphere of the given radius (m).
pub fn volume_of_radius(radius: f64) -> f64 {
    4.0 / 3.0 * std::f64::consts::PI * radius.powi(3)
}
