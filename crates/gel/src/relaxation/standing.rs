//! How far a bead and what is around it have moved.

use crate::bead::Bead;
use crate::lattice::POINT_WAY;
use crate::obstacle::Obstacle;
use bedswell_geometry::Vector;

/// Nodes and obstacles where they once were.
#[derive(Clone, Debug, Default)]
pub(super) struct Standing {
    pub(super) positions: Vec<f64>,
    pub(super) centre: Vector,
    pub(super) obstacles: Vec<Obstacle>,
    /// How much further away each obstacle was than what counted as near (m).
    pub(super) slack: Vec<f64>,
}

impl Standing {
    /// How the bead has moved since; nothing when this is of another bead.
    pub(super) fn motion(&self, bead: &Bead) -> Option<Motion> {
        if self.positions.len() != bead.positions.len() {
            return None;
        }
        let drift = bead.centre() - self.centre;
        let stride = self.positions.len() / 3;
        let square = |node: usize| -> f64 {
            let way = |axis: usize| {
                let place = axis * stride + node;
                bead.positions[place] - self.positions[place] - drift[axis]
            };
            (0..3).map(|axis| way(axis).powi(2)).sum()
        };
        let way = (0..bead.lattice().node_count()).map(square).fold(0.0, f64::max).sqrt();
        Some(Motion { drift, way: POINT_WAY * way })
    }

    /// Distance (m) by which a skin point and an obstacle may have come nearer since, what was
    /// further away than near not counted; without end when this is of another bead.
    pub(super) fn approach(&self, motion: Option<&Motion>, obstacles: &[Obstacle]) -> f64 {
        let Some(Motion { drift, way }) = motion.filter(|_| self.obstacles.len() == obstacles.len()) else {
            return f64::INFINITY;
        };
        let ways = self.obstacles.iter().zip(&self.slack).zip(obstacles);
        let obstacles = ways.map(|((before, slack), now)| before.way(now, drift) - slack);
        way + obstacles.fold(0.0, f64::max)
    }
}

/// How a bead has moved.
#[derive(Clone, Copy, Debug)]
pub struct Motion {
    /// As a whole (m).
    pub drift: Vector,
    /// Besides that: a bound on the way of its skin (m).
    pub way: f64,
}
