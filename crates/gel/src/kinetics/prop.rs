use crate::contact::{Pressing, pull_nodes, skin_position};
use crate::lattice::Skin;
use bedswell_geometry::Vector;
use serde::{Deserialize, Serialize};

/// A skin point that presses on another bead. That bead stays where it is over a step, as
/// grains do: the point's force changes as it goes on into it.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Prop {
    /// The skin point.
    pub point: u32,
    /// Where it was at rest (m).
    pub place: Vector,
    /// Force on it there (N).
    pub force: Vector,
    /// Stiffness along that force (N/m).
    pub stiffness: f64,
}

impl Prop {
    /// Adds what its force changes by where the nodes are at `positions` (N), as the gradient
    /// of an energy; the force itself is among the loads that stay.
    pub(super) fn add_gradient(&self, skin: &Skin, positions: &[f64], out: &mut [f64]) {
        let normal = self.force.normalize();
        let on = normal.dot(&(skin_position(skin, positions, self.point as usize) - self.place));
        pull_nodes(out, skin.terms(self.point as usize), -normal * (self.stiffness * on));
    }

    /// Its stiffness.
    pub(super) fn pressing(&self) -> Pressing {
        let normal = self.force.normalize();
        Pressing { point: self.point, stiffness: normal * normal.transpose() * self.stiffness }
    }
}
