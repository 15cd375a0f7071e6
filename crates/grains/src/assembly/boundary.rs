use super::Assembly;
use bedswell_geometry::{Cell, Vector};

/// What grains and added loads do to the plates around them.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Boundary {
    /// Force on the floor (N); its z is negative where the floor carries weight.
    pub floor: Vector,
    /// Force on the lid (N), without what the lid is loaded with.
    pub lid: Vector,
    /// Force on the wall (N). Pushes are level, so that its z is friction alone:
    /// negative where the wall carries weight.
    pub wall: Vector,
    /// Sum of the outward pushes on the wall (N).
    pub wall_push: f64,
}

impl Assembly {
    /// Forces on floor, lid and wall since the last
    /// [`compute_contacts`](Self::compute_contacts).
    pub fn boundary(&self) -> Boundary {
        self.boundary
    }

    /// Adds an upward load (N) from elsewhere on the lid, with its stiffness (N/m),
    /// until the next `compute_contacts`.
    #[inline]
    pub fn add_lid_load(&mut self, force_z: f64, stiffness: f64) {
        self.lid_state.force += force_z;
        self.lid_state.stiffness += stiffness;
        self.boundary.lid.z += force_z;
        if let Some(ledger) = &mut self.ledger {
            ledger.lid_force += force_z;
        }
    }

    /// Adds a load (N) from elsewhere on the floor until the next `compute_contacts`.
    #[inline]
    pub fn add_floor_load(&mut self, force: Vector) {
        self.boundary.floor += force;
    }

    /// Adds a load (N) from elsewhere that acts on the wall at `place` (m), until the
    /// next `compute_contacts`.
    #[inline]
    pub fn add_wall_load(&mut self, place: &Vector, force: Vector) {
        self.boundary.wall += force;
        self.boundary.wall_push += force.dot(&outward(&self.cell, place).0);
    }
}

/// Level direction from the axis of a pot in the middle of the cell to a place, and
/// the distance (m) between them; any level direction on the axis itself.
#[inline]
pub(super) fn outward(cell: &Cell, place: &Vector) -> (Vector, f64) {
    let (x, y) = (place.x - 0.5 * cell.size.x, place.y - 0.5 * cell.size.y);
    let distance = (x * x + y * y).sqrt();
    if distance > 0.0 { (Vector::new(x / distance, y / distance, 0.0), distance) } else { (Vector::x(), 0.0) }
}
