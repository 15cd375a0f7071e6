//! A soft spring between a bead's centre and where it was: among things that move as well,
//! what a step does to the place of a bead that hardly touches anything means little, and
//! what nothing holds flies far.

use bedswell_geometry::Vector;

/// A spring on the mean place of a bead's nodes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Anchor {
    /// Where the spring is slack (m).
    pub(super) centre: Vector,
    /// Its stiffness (N/m).
    pub(super) stiffness: f64,
    /// Nodes that it pulls at.
    pub(super) nodes: usize,
}

impl Anchor {
    /// Adds its forces where the nodes are at `positions` (N), as the gradient of an energy.
    pub(super) fn add_gradient(&self, positions: &[f64], out: &mut [f64]) {
        let away = self.mean(positions) - self.centre;
        self.spread(away, out);
    }

    /// Adds the change of its forces when the nodes move.
    pub(super) fn add_stiffness_times(&self, motion: &[f64], out: &mut [f64]) {
        self.spread(self.mean(motion), out);
    }

    fn mean(&self, values: &[f64]) -> Vector {
        let stride = values.len() / 3;
        let column = |axis: usize| &values[axis * stride..axis * stride + self.nodes];
        Vector::from_fn(|axis, _| column(axis).iter().sum::<f64>() / self.nodes as f64)
    }

    fn spread(&self, away: Vector, out: &mut [f64]) {
        let stride = out.len() / 3;
        for axis in 0..3 {
            let each = self.stiffness * away[axis] / self.nodes as f64;
            out[axis * stride..axis * stride + self.nodes].iter_mut().for_each(|force| *force += each);
        }
    }
}
