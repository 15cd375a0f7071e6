use super::Contacts;
use bedswell_geometry::Vector;

/// A spring from a node to a place: stiff where something grips the node, weak where it
/// only slows down gel that nothing holds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Tie {
    pub(crate) node: u32,
    /// Along x, y and z (N/m).
    pub(crate) stiffness: Vector,
    /// Where it pulls to (m).
    pub(crate) place: Vector,
    /// The place follows the node from solve to solve.
    pub(crate) follows: bool,
}

impl Tie {
    /// Force on the node (N).
    pub(crate) fn force(&self, at: &Vector) -> Vector {
        self.stiffness.component_mul(&(self.place - at))
    }
}

impl Contacts {
    /// Whether something grips nodes.
    pub(crate) fn is_gripped(&self) -> bool {
        self.ties.iter().any(|tie| !tie.follows)
    }

    /// Sum of the forces of what grips nodes (N), of either sign along each axis.
    pub(crate) fn grip_force(&self, positions: &[f64]) -> f64 {
        let grips = self.ties.iter().filter(|tie| !tie.follows);
        0.5 * grips.map(|tie| tie.force(&place_of(positions, tie.node)).abs()).sum::<Vector>().norm()
    }

    /// Lets the places of ties that follow their nodes catch up.
    pub(crate) fn follow(&mut self, positions: &[f64]) {
        for tie in self.ties.iter_mut().filter(|tie| tie.follows) {
            tie.place = place_of(positions, tie.node);
        }
    }
}

fn place_of(positions: &[f64], node: u32) -> Vector {
    let (stride, node) = (positions.len() / 3, node as usize);
    Vector::new(positions[node], positions[stride + node], positions[2 * stride + node])
}
