use super::{Event, Grip, Rupture, RuptureError};
use crate::contact::Pair;
use crate::lattice::Face;
use serde::{Deserialize, Serialize};

/// All that a tearing bead remembers: resumed from it, a run goes on to the same bits.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct RuptureSnapshot {
    /// Faces of the ruptured bonds, in the order in which they broke.
    pub ruptured: Vec<Face>,
    /// Where the nodes are (m): all x, all y, all z, each padded.
    pub positions: Vec<f64>,
    /// Skin point, obstacle and pressure (Pa) of what presses.
    pub pressures: Vec<(u32, u32, f64)>,
    /// Area that each skin point had when they last pressed (m²).
    pub point_area: f64,
    /// Pressures (Pa) between the faces of cracks.
    pub closed: Vec<f64>,
    /// What grips the bead.
    pub grips: Vec<Grip>,
    /// All ruptures so far.
    pub events: Vec<Event>,
}

impl Rupture {
    /// All that is needed to go on from here.
    pub fn snapshot(&self) -> RuptureSnapshot {
        let pressing = self.contacts.pairs.iter().filter(|pair| pair.multiplier > 0.0);
        RuptureSnapshot {
            ruptured: self.bead.lattice().ruptured().collect(),
            positions: self.bead.positions.clone(),
            pressures: pressing.map(|pair| (pair.point, pair.obstacle, pair.multiplier)).collect(),
            point_area: self.contacts.area,
            closed: self.contacts.crack_pressures(),
            grips: self.grips.clone(),
            events: self.events.clone(),
        }
    }

    /// Goes on from a snapshot of a bead with the same lattice when whole, size and toughness.
    ///
    /// # Errors
    /// When the snapshot is of another lattice.
    pub fn resume(mut self, snapshot: &RuptureSnapshot) -> Result<Self, RuptureError> {
        let count = self.bead.lattice().voxel_count();
        if let Some(face) = snapshot.ruptured.iter().find(|face| face.low as usize >= count || face.axis > 2)
        {
            return Err(RuptureError::OtherLattice {
                what: "a ruptured bond at voxel",
                found: face.low as usize,
                count,
            });
        }
        self.bead.split(&snapshot.ruptured);
        let (found, count) = (snapshot.positions.len(), self.bead.positions.len());
        if found != count {
            return Err(RuptureError::OtherLattice {
                what: "a snapshot of coordinates of number",
                found,
                count,
            });
        }
        self.bead.positions.copy_from_slice(&snapshot.positions);
        let pair = |&(point, obstacle, multiplier): &(u32, u32, f64)| Pair::new(point, obstacle, multiplier);
        self.contacts.pairs = snapshot.pressures.iter().map(pair).collect();
        self.contacts.area = snapshot.point_area;
        self.contacts.set_crack_pressures(&snapshot.closed);
        self.events.clone_from(&snapshot.events);
        self.grip(snapshot.grips.clone())?;
        Ok(self)
    }
}
