use super::{Rupture, RuptureError};
use crate::contact::Tie;
use bedswell_geometry::Vector;
use serde::{Deserialize, Serialize};

/// Something that holds a node at a place, as a clamp or glue would.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Grip {
    /// The node.
    pub node: u32,
    /// Where it is held (m).
    pub place: Vector,
    /// Along which of x, y and z it is; it slides along the others.
    pub along: [bool; 3],
}

/// Stiffness of a grip over that of chains along an edge of a voxel.
const STIFFNESS: f64 = 1e4;

/// The grips as springs, for chains of a stiffness (N/m).
pub(super) fn ties(grips: &[Grip], chains: f64) -> Vec<Tie> {
    let tie = |grip: &Grip| Tie {
        node: grip.node,
        stiffness: Vector::from(grip.along.map(|held| if held { STIFFNESS * chains } else { 0.0 })),
        place: grip.place,
        follows: false,
    };
    grips.iter().map(tie).collect()
}

impl Rupture {
    /// Replaces what grips the bead. Nodes that come apart from a gripped one are free.
    ///
    /// # Errors
    /// When there is no such node.
    pub fn grip(&mut self, grips: Vec<Grip>) -> Result<(), RuptureError> {
        let count = self.bead.lattice().node_count();
        if let Some(grip) = grips.iter().find(|grip| grip.node as usize >= count) {
            return Err(RuptureError::OtherLattice {
                what: "a grip on node",
                found: grip.node as usize,
                count,
            });
        }
        self.grips = grips;
        Ok(())
    }

    /// Force of every grip on its node in the state last settled (N).
    pub fn grip_forces(&self) -> Vec<Vector> {
        let grips = self.contacts.ties.iter().take(self.grips.len());
        grips.map(|tie| tie.force(&self.bead.node(tie.node as usize))).collect()
    }
}
