use super::Rupture;
use crate::bead::Bead;
use crate::contact::Tie;
use crate::lattice::Lattice;
use bedswell_geometry::Vector;
use serde::{Deserialize, Serialize};

/// A body of gel that no intact bonds connect with others.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Fragment {
    /// How many voxels it has.
    pub voxels: usize,
    /// Its gel when dry, over all of the bead's.
    pub share: f64,
    /// Its volume (m³).
    pub volume: f64,
    /// Its middle (m).
    pub place: Vector,
}

/// The bodies into which a bead has come apart, largest first; one where it has not.
pub fn fragments(bead: &Bead) -> Vec<Fragment> {
    let lattice = bead.lattice();
    let gradients = bead.gradients();
    let voxel = bead.voxel_edge().powi(3);
    let fragment = |body: &Vec<usize>| {
        let volume = |&v: &usize| lattice.filled(v) * gradients[v].determinant() * voxel;
        let total: f64 = body.iter().map(volume).sum();
        let moment: Vector = body.iter().map(|v| bead.voxel_centre(*v) * volume(v)).sum();
        let dry: f64 = body.iter().map(|&v| lattice.filled(v)).sum::<f64>() * voxel;
        Fragment { voxels: body.len(), share: dry / bead.dry_volume(), volume: total, place: moment / total }
    };
    let mut fragments: Vec<Fragment> = lattice.bodies().iter().map(fragment).collect();
    fragments.sort_by(|a, b| b.share.total_cmp(&a.share));
    fragments
}

impl Rupture {
    /// The bodies into which the bead has come apart, largest first; one where it has not.
    pub fn fragments(&self) -> Vec<Fragment> {
        fragments(&self.bead)
    }
}

/// Stiffness of the drag on a fragment's nodes over that of chains along an edge of a voxel.
const DRAG: f64 = 1e-2;

/// Weak springs from the nodes of all bodies but the largest to where they are: nothing
/// else may hold a fragment, and its state must still be one.
pub(crate) fn drags(lattice: &Lattice, chains: f64) -> Vec<Tie> {
    let bodies = lattice.bodies();
    let voxels = bodies.iter().skip(1).flatten();
    let mut nodes: Vec<usize> = voxels.flat_map(|&voxel| lattice.corners_of(voxel)).collect();
    nodes.sort_unstable();
    nodes.dedup();
    drags_on(nodes, DRAG * chains)
}

/// Springs of a stiffness (N/m) from nodes to where they are.
pub(crate) fn drags_on(nodes: impl IntoIterator<Item = usize>, stiffness: f64) -> Vec<Tie> {
    let stiffness = Vector::from_element(stiffness);
    let tie = |node| Tie { node: node as u32, stiffness, place: Vector::zeros(), follows: true };
    nodes.into_iter().map(tie).collect()
}
