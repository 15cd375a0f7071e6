use super::course::Course;
use super::neighbourhood::Image;
use super::tearing::Told;
use crate::folder::fingerprint;
use crate::{Scene, Step};
use bedswell_gel::Snapshot;
use bedswell_grains::GrainMemory;
use serde::{Deserialize, Serialize};

/// Where a pack stands in the middle of its history in time: all that the march needs to go
/// on to the same bits.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub struct Checkpoint {
    /// Tells packs of different scenes apart.
    pub(super) fingerprint: String,
    pub(super) pack: u64,
    pub(super) grains: GrainMemory,
    /// The grains that each bead has met, in the order of its obstacles.
    pub(super) around: Vec<Vec<Image>>,
    pub(super) beads: Vec<Snapshot>,
    /// Growth of the beads' stretch (1/s) in the last step.
    pub(super) rate: Option<f64>,
    pub(super) course: Course,
    pub(super) told: Told,
    /// The increments so far.
    pub(super) history: Vec<Step>,
}

impl Checkpoint {
    /// Increments that are done.
    pub fn increment(&self) -> usize {
        self.history.len()
    }

    /// Whether it is of this pack of this scene, before the last of `count` increments.
    pub(super) fn is_of(&self, scene: &Scene, pack: u64, count: usize) -> bool {
        self.history.len() < count
            && self.pack == pack
            && self.fingerprint == fingerprint([scene].into_iter())
    }
}
