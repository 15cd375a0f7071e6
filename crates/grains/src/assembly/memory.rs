use super::contact_list::{Pair, PlatePair};
use super::{Assembly, LidState};
use bedswell_geometry::Vector;
use serde::{Deserialize, Serialize};

/// All that grains at rest remember: where they are and how their contacts are stretched.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub struct GrainMemory {
    /// Size of the cell (m).
    size: Vector,
    /// Centres (m).
    centres: Vec<Vector>,
    pairs: Vec<Pair>,
    /// Bends of the pairs' rolling springs (rad); empty where contacts do not resist rolling.
    bends: Vec<Vector>,
    plates: Vec<PlatePair>,
    /// Stiffness that last set the lid's mass (N/m).
    lid_stiffness: f64,
}

impl Assembly {
    /// What the grains remember, after a [`compute_contacts`](Self::compute_contacts).
    pub fn memory(&self) -> GrainMemory {
        let list = &self.contacts;
        let touching = |index: &usize| list.pairs[*index].contact.force > 0.0;
        let bends = (0..list.bends.len()).filter(touching).map(|index| list.bends[index]);
        GrainMemory {
            size: self.cell.size,
            centres: self.centres.clone(),
            pairs: list.pairs.iter().filter(|pair| pair.contact.force > 0.0).copied().collect(),
            bends: bends.collect(),
            plates: list.plates.clone(),
            lid_stiffness: self.lid_state.last_stiffness,
        }
    }

    /// Puts the same grains back to rest as they remember; an account of work ends.
    /// `false`, and nothing is changed, where the memory is of other grains.
    pub fn recall(&mut self, memory: GrainMemory) -> bool {
        let count = self.centres.len();
        let known = |grain: u32| (grain as usize) < count;
        let sound = memory.centres.len() == count
            && (memory.bends.is_empty() || memory.bends.len() == memory.pairs.len())
            && memory.pairs.iter().all(|pair| known(pair.a) && known(pair.b))
            && memory.plates.iter().all(|touch| known(touch.grain));
        if !sound {
            return false;
        }
        self.cell.size = memory.size;
        self.centres = memory.centres;
        self.velocities.fill(Vector::zeros());
        self.spins.fill(Vector::zeros());
        self.lid_state = LidState { last_stiffness: memory.lid_stiffness, ..LidState::default() };
        self.contacts.restore(memory.pairs, memory.bends, memory.plates);
        self.ledger = None;
        true
    }
}
