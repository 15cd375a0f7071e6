//! Contact of a bead's skin with obstacles: per skin point a penalty on penetration
//! that is corrected by a multiplier (augmented Lagrangian; Hestenes 1969, Powell
//! 1969, from memory), so that the pressure does not need the penetration.

mod closing;
mod tie;

use crate::lattice::Skin;
use crate::obstacle::{Gap, Obstacle};
use bedswell_geometry::{Matrix, Vector};
use closing::Closing;
pub(crate) use tie::Tie;

/// A skin point near an obstacle.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Pair {
    pub(crate) point: u32,
    pub(crate) obstacle: u32,
    /// Pressure that acts without penetration (Pa).
    pub(crate) multiplier: f64,
    /// What point and obstacle may come nearer by before they can touch (m).
    clearance: f64,
}

impl Pair {
    pub(crate) fn new(point: u32, obstacle: u32, multiplier: f64) -> Self {
        Self { point, obstacle, multiplier, clearance: 0.0 }
    }
}

/// All pairs of one bead, and what a pressure needs.
#[derive(Clone, Debug, Default)]
pub(crate) struct Contacts {
    pub(crate) pairs: Vec<Pair>,
    /// Pressure per penetration (Pa/m).
    pub(crate) penalty: f64,
    /// Area that each point stands for (m²).
    pub(crate) area: f64,
    /// Where the faces of cracks may meet.
    pub(crate) closings: Vec<Closing>,
    /// Nodes that are held or slowed.
    pub(crate) ties: Vec<Tie>,
}

/// A pair that presses, at a linearised state.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Pressing {
    pub(crate) point: u32,
    /// Stiffness of the point (N/m).
    pub(crate) stiffness: Matrix,
}

impl Contacts {
    /// Collects the points within `reach` (m) of an obstacle, the first `points` of the
    /// skin's; multipliers of pairs that stay are kept.
    pub(crate) fn collect(
        &mut self,
        skin: &Skin,
        points: usize,
        positions: &[f64],
        obstacles: &[Obstacle],
        reach: f64,
    ) {
        let old = std::mem::take(&mut self.pairs);
        let mut known = old.iter().filter(|pair| pair.multiplier > 0.0).peekable();
        for point in 0..points {
            let place = skin_position(skin, positions, point);
            for (obstacle, shape) in obstacles.iter().enumerate() {
                let near = shape.is_within(&place, reach);
                if !near && old.is_empty() {
                    continue;
                }
                let key = (point as u32, obstacle as u32);
                let mut multiplier = 0.0;
                while let Some(pair) = known.next_if(|pair| (pair.point, pair.obstacle) <= key) {
                    if (pair.point, pair.obstacle) == key {
                        multiplier = pair.multiplier;
                    }
                }
                if multiplier > 0.0 || near {
                    self.pairs.push(Pair::new(key.0, key.1, multiplier));
                }
            }
        }
    }

    /// Adds the contact forces' share of the energy gradient (N).
    pub(crate) fn add_gradient(
        &self,
        skin: &Skin,
        positions: &[f64],
        obstacles: &[Obstacle],
        out: &mut [f64],
    ) {
        self.for_each_pressing(skin, positions, obstacles, |pair, force, _| {
            pull_nodes(out, skin.terms(pair.point as usize), force);
        });
        self.pull_cracks_and_ties(skin, positions, out);
    }

    /// Adds the forces of closed cracks and of ties to the energy's gradient (N).
    fn pull_cracks_and_ties(&self, skin: &Skin, positions: &[f64], out: &mut [f64]) {
        self.for_each_closed(skin, positions, |point, force, _| {
            pull_nodes(out, skin.terms(point), force);
        });
        for tie in &self.ties {
            let point = skin.node_point(tie.node as usize);
            pull_nodes(out, skin.terms(point), tie.force(&skin_position(skin, positions, point)));
        }
    }

    /// Adds the contact forces' share of the energy gradient (N), and visits the
    /// points that press: obstacle, force (N) on the skin. Since the last call, or since
    /// pairs were collected, point and obstacle have come nearer by at most the
    /// obstacle's entry in `moved` (m).
    pub(crate) fn push(
        &mut self,
        skin: &Skin,
        positions: &[f64],
        obstacles: &[Obstacle],
        moved: &[f64],
        out: &mut [f64],
        mut visit: impl FnMut(usize, Vector),
    ) {
        for pair in &mut self.pairs {
            let obstacle = pair.obstacle as usize;
            pair.clearance -= moved[obstacle];
            if pair.clearance > 0.0 {
                continue;
            }
            let place = skin_position(skin, positions, pair.point as usize);
            let gap = obstacles[obstacle].gap(&place);
            let pressure = pair.multiplier - self.penalty * gap.distance;
            // A pressure without penetration ends some way off the obstacle.
            pair.clearance = -pressure / self.penalty;
            if pressure > 0.0 {
                let force = gap.normal * (pressure * self.area);
                pull_nodes(out, skin.terms(pair.point as usize), force);
                visit(obstacle, force);
            }
        }
        self.pull_cracks_and_ties(skin, positions, out);
    }

    /// The stiffness of all points that press. Without `curved`, the loss of
    /// stiffness by the obstacles' curvature is left out.
    pub(crate) fn linearise(
        &self,
        skin: &Skin,
        positions: &[f64],
        obstacles: &[Obstacle],
        curved: bool,
    ) -> Vec<Pressing> {
        let mut pressing = Vec::new();
        self.for_each_pressing(skin, positions, obstacles, |pair, force, gap| {
            let normal = gap.normal;
            let along = normal * normal.transpose();
            let mut stiffness = along * (self.penalty * self.area);
            if curved {
                stiffness -= (Matrix::identity() - along) * (force.norm() * gap.curvature);
            }
            pressing.push(Pressing { point: pair.point, stiffness });
        });
        self.for_each_closed(skin, positions, |point, _, stiffness| {
            pressing.push(Pressing { point: point as u32, stiffness });
        });
        let held = |tie: &Tie| Pressing {
            point: skin.node_point(tie.node as usize) as u32,
            stiffness: Matrix::from_diagonal(&tie.stiffness),
        };
        pressing.extend(self.ties.iter().map(held));
        pressing
    }

    /// Moves each pair's pressure into its multiplier.
    pub(crate) fn update_multipliers(&mut self, skin: &Skin, positions: &[f64], obstacles: &[Obstacle]) {
        for pair in &mut self.pairs {
            let place = skin_position(skin, positions, pair.point as usize);
            let distance = obstacles[pair.obstacle as usize].gap(&place).distance;
            pair.multiplier = (pair.multiplier - self.penalty * distance).max(0.0);
        }
        self.correct_closings(skin, positions);
    }

    /// The force (N) on each obstacle.
    pub(crate) fn forces(&self, skin: &Skin, positions: &[f64], obstacles: &[Obstacle]) -> Vec<Vector> {
        let mut forces = vec![Vector::zeros(); obstacles.len()];
        self.for_each_pressing(skin, positions, obstacles, |pair, force, _| {
            forces[pair.obstacle as usize] -= force;
        });
        forces
    }

    /// What counts as a large force (N): the largest on an obstacle or from grips, and a share
    /// of `rest` where nothing touches.
    pub(crate) fn force_scale(
        &self,
        skin: &Skin,
        positions: &[f64],
        obstacles: &[Obstacle],
        rest: f64,
    ) -> f64 {
        let least = (1e-3 * rest).max(self.grip_force(positions));
        self.forces(skin, positions, obstacles).iter().map(Vector::norm).fold(least, f64::max)
    }

    /// Visits the pairs that press: the force (N) on the skin point and its gap.
    #[inline]
    fn for_each_pressing(
        &self,
        skin: &Skin,
        positions: &[f64],
        obstacles: &[Obstacle],
        mut visit: impl FnMut(&Pair, Vector, Gap),
    ) {
        for pair in &self.pairs {
            let place = skin_position(skin, positions, pair.point as usize);
            let gap = obstacles[pair.obstacle as usize].gap(&place);
            let pressure = pair.multiplier - self.penalty * gap.distance;
            if pressure > 0.0 {
                visit(pair, gap.normal * (pressure * self.area), gap);
            }
        }
    }
}

/// Adds a force (N) on nodes to the energy's gradient.
#[inline]
pub(crate) fn pull_nodes(gradient: &mut [f64], terms: impl Iterator<Item = (usize, f64)>, force: Vector) {
    let stride = gradient.len() / 3;
    for (node, weight) in terms {
        for axis in 0..3 {
            gradient[axis * stride + node] -= weight * force[axis];
        }
    }
}

/// Adds the pressing points' stiffness times `direction` to `out`.
pub(crate) fn add_stiffness_times(pressing: &[Pressing], skin: &Skin, direction: &[f64], out: &mut [f64]) {
    let stride = direction.len() / 3;
    for Pressing { point, stiffness } in pressing {
        let force = stiffness * skin_position(skin, direction, *point as usize);
        for (node, weight) in skin.terms(*point as usize) {
            for axis in 0..3 {
                out[axis * stride + node] += weight * force[axis];
            }
        }
    }
}

/// Adds each node's own block of the pressing points' stiffness.
pub(crate) fn add_diagonal_blocks(pressing: &[Pressing], skin: &Skin, out: &mut [Matrix]) {
    for Pressing { point, stiffness } in pressing {
        for (node, weight) in skin.terms(*point as usize) {
            out[node] += stiffness * (weight * weight);
        }
    }
}

/// Adds each node's share of the stiffness as if every pair within `near` (m) pressed, lumped
/// so that it bounds what the pairs do together.
pub(crate) fn add_possible_blocks(
    contacts: &Contacts,
    skin: &Skin,
    positions: &[f64],
    obstacles: &[Obstacle],
    near: f64,
    out: &mut [Matrix],
) {
    for pair in &contacts.pairs {
        if pair.clearance > near {
            continue;
        }
        let place = skin_position(skin, positions, pair.point as usize);
        let Gap { distance, normal, .. } = obstacles[pair.obstacle as usize].gap(&place);
        if distance > near && pair.multiplier <= 0.0 {
            continue;
        }
        let stiffness = turning(&normal) * (contacts.penalty * contacts.area);
        for (node, weight) in skin.terms(pair.point as usize) {
            out[node] += stiffness * weight.abs();
        }
    }
    contacts.add_possible_closings(skin, out);
}

/// A contact's stiffness along its normal, with a share across it: the normal turns a
/// little before contacts are looked for again.
pub(crate) fn turning(normal: &Vector) -> Matrix {
    const SHARE: f64 = 0.1;
    normal * normal.transpose() + Matrix::from_diagonal_element(SHARE)
}

/// Where a skin point is (m), or moves.
#[inline]
pub(crate) fn skin_position(skin: &Skin, positions: &[f64], point: usize) -> Vector {
    let stride = positions.len() / 3;
    let mut place = Vector::zeros();
    for (node, weight) in skin.terms(point) {
        place +=
            Vector::new(positions[node], positions[stride + node], positions[2 * stride + node]) * weight;
    }
    place
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bead::Bead;
    use crate::lattice::Lattice;
    use std::sync::Arc;

    /// A grain smaller than the gaps between the points of stretched skin passes between
    /// them unseen: below the skin it must meet inner points.
    #[test]
    fn a_grain_of_a_voxels_size_below_the_skin_feels_the_gel() {
        let edge = 6.0;
        let bead = Bead::new(Arc::new(Lattice::new(8)), 4.0, Vector::zeros(), edge);
        let skin = &bead.lattice().skin;
        for way in [Vector::new(1.0, 0.3, 0.2), Vector::new(0.5, -0.7, 0.6), Vector::new(-0.2, 0.1, 0.9)] {
            for depth in [1.7, 2.6, 3.1] {
                let centre = way.normalize() * (edge * (4.0 - depth));
                let grain = [Obstacle::Sphere { centre, radius: 0.9 * edge }];
                let pressing = |points: usize| {
                    let mut contacts = Contacts { penalty: 1.0, area: 1.0, ..Contacts::default() };
                    contacts.collect(skin, points, &bead.positions, &grain, 0.0);
                    contacts.linearise(skin, &bead.positions, &grain, false).len()
                };
                assert_eq!(pressing(skin.len()), 0, "skin points {depth} voxels deep");
                assert!(pressing(skin.len_with_inner()) > 0, "no inner point {depth} voxels deep");
            }
        }
    }
}
