use crate::Step;
use bedswell_gel::Face;
use serde::{Deserialize, Serialize};

/// Everything there is to see of a pack at one increment. Lengths in m, forces in N,
/// stresses in Pa (positive in tension), in single precision: meant for looking at, not
/// for computing on.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct State {
    /// Tells states of different scenes apart.
    pub fingerprint: String,
    /// Number of the pack.
    pub pack: u64,
    /// Increments from dry to the end.
    pub increments: usize,
    /// The figures of this increment; number 0 is the mixed dry bed, before any swelling.
    pub step: Step,
    /// Edges of the cell, or of the box round a pot; the last is the height of the lid above
    /// the floor, or that of the grains' mean surface under an open top.
    pub cell: [f32; 3],
    /// Which directions repeat.
    pub periodic: [bool; 3],
    /// Centre of every grain, inside the cell.
    pub centres: Vec<[f32; 3]>,
    /// Radius of every grain.
    pub radii: Vec<f32>,
    /// Contacts of the grains with each other, the floor and the lid.
    pub contacts: Vec<GrainContact>,
    /// Every bead.
    pub beads: Vec<BeadState>,
    /// Inner radius of the pot round the middle of the box, if the bed is in one.
    pub wall: Option<f32>,
    /// The pot has no lid.
    pub open: bool,
    /// Time (s), where the scene gives a history in time.
    pub time_s: Option<f64>,
    /// Faces of the ruptured bonds of each bead, in the order in which they broke; empty where
    /// no bead may tear. The lattice of a bead, its nodes and bonds are those of
    /// [`bedswell_gel::Lattice::split`].
    pub ruptured: Vec<Vec<Face>>,
}

/// A contact that carries force.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct GrainContact {
    /// The grain.
    pub grain: u32,
    /// What it touches.
    pub on: Touched,
    /// Normal force.
    pub force: f32,
}

/// What a grain or a bead touches.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Touched {
    /// A grain.
    Grain(u32),
    /// The floor.
    Floor,
    /// The lid.
    Lid,
    /// Another bead.
    Bead(u32),
    /// The pot's wall.
    Wall,
}

/// One bead. Nodes, voxels and bonds are numbered as in the [`bedswell_gel::Lattice`] with
/// as many voxels across.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct BeadState {
    /// Voxels over the dry diameter.
    pub across: u16,
    /// Radius when dry.
    pub dry_radius: f32,
    /// Place of every node; near the bead's grains, so it may lie outside the cell.
    pub nodes: Vec<[f32; 3]>,
    /// Stress in every voxel: xx, yy, zz, yz, zx, xy.
    pub stress: Vec<[f32; 6]>,
    /// Volume of every voxel's gel over its dry volume.
    pub swelling: Vec<f32>,
    /// Tension of every bond: normal traction on the face that two voxels share.
    pub bonds: Vec<f32>,
    /// What the bead presses on.
    pub touches: Vec<BeadContact>,
}

/// One thing that a bead presses on.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct BeadContact {
    /// The thing.
    pub on: Touched,
    /// Force of the bead on it.
    pub force: [f32; 3],
}

impl State {
    /// Whether the parts fit each other and all numbers are finite, so that nothing that
    /// shows it needs to look twice.
    pub(crate) fn is_sound(&self) -> bool {
        let grains = self.centres.len();
        let known = |touched: Touched| match touched {
            Touched::Grain(grain) => (grain as usize) < grains,
            Touched::Bead(bead) => (bead as usize) < self.beads.len(),
            Touched::Floor | Touched::Lid | Touched::Wall => true,
        };
        self.radii.len() == grains
            && self.time_s.is_none_or(f64::is_finite)
            && (self.ruptured.is_empty() || self.ruptured.len() == self.beads.len())
            && (self.ruptured.iter().zip(&self.beads)).all(|(faces, bead)| {
                faces.iter().all(|face| (face.low as usize) < bead.stress.len() && face.axis < 3)
            })
            && self.wall.is_none_or(|radius| radius.is_finite() && radius > 0.0)
            && self.cell.iter().all(|edge| edge.is_finite() && *edge > 0.0)
            && self.centres.as_flattened().iter().chain(&self.radii).all(|x| x.is_finite())
            && self.contacts.iter().all(|contact| (contact.grain as usize) < grains && known(contact.on))
            && self
                .beads
                .iter()
                .all(|bead| bead.is_sound() && bead.touches.iter().all(|touch| known(touch.on)))
    }
}

impl BeadState {
    fn is_sound(&self) -> bool {
        (4..=512).contains(&self.across)
            && self.stress.len() == self.swelling.len()
            && (self.nodes.as_flattened().iter())
                .chain(self.stress.as_flattened())
                .chain(&self.swelling)
                .chain(&self.bonds)
                .all(|x| x.is_finite())
    }
}
