//! Contact of the two faces of a crack.
//!
//! Where a bond has ruptured, its faces may part and slide but not pass through each other:
//! a penalty on the overlap along their common normal, with a multiplier as for obstacles.
//! Normals are those of the state at which contacts were last prepared.

use super::{Contacts, skin_position, turning};
use crate::lattice::{OPENINGS, Skin};
use bedswell_geometry::{Matrix, Vector};

/// Faces that have slid further apart than this do not face each other any more (edges of
/// a voxel's swollen face).
const REACH: f64 = 1.0;

/// Bound on the stiffness that a node sees over what is lumped on it: both sides move.
const MARGIN: f64 = 2.0;

/// The two sides of a place on a crack.
#[derive(Clone, Copy, Debug, Default)]
pub(crate) struct Closing {
    /// Unit normal, from the low to the high side.
    normal: Vector,
    /// Area that the place stands for (m²); none where the faces are far apart.
    area: f64,
    /// Pressure that acts without overlap (Pa).
    multiplier: f64,
}

impl Contacts {
    /// Fits the closings to the cracks and to how they lie now; pressures are kept.
    pub(crate) fn face_cracks(&mut self, skin: &Skin, positions: &[f64]) {
        self.closings.resize(OPENINGS * skin.facing.len(), Closing::default());
        let stride = positions.len() / 3;
        let place = |&node: &u32| {
            let node = node as usize;
            Vector::new(positions[node], positions[stride + node], positions[2 * stride + node])
        };
        for (crack, facing) in skin.facing.iter().enumerate() {
            let normal = |face: &[u32]| {
                let corners: Vec<Vector> = face.iter().map(place).collect();
                0.5 * (corners[2] - corners[0]).cross(&(corners[3] - corners[1]))
            };
            let normal = 0.5 * (normal(&facing.below) + normal(&facing.above));
            let area = normal.norm().max(f64::MIN_POSITIVE);
            for k in 0..OPENINGS {
                let apart = skin_position(skin, positions, skin.opening(crack, k)).norm();
                let meets = apart < REACH * area.sqrt();
                let closing = &mut self.closings[OPENINGS * crack + k];
                closing.normal = normal / area;
                closing.area = if meets { area * facing.share / OPENINGS as f64 } else { 0.0 };
                closing.multiplier = if meets { closing.multiplier } else { 0.0 };
            }
        }
    }

    /// Visits the places where cracks are closed: the point that is the opening, the force
    /// (N) that parts the faces, and its stiffness (N/m).
    pub(super) fn for_each_closed(
        &self,
        skin: &Skin,
        positions: &[f64],
        mut visit: impl FnMut(usize, Vector, Matrix),
    ) {
        for (index, closing) in self.closings.iter().enumerate().filter(|(_, closing)| closing.area > 0.0) {
            let point = skin.opening(0, index);
            let opening = skin_position(skin, positions, point).dot(&closing.normal);
            let pressure = closing.multiplier - self.penalty * opening;
            if pressure > 0.0 {
                let along = closing.normal * closing.normal.transpose();
                let stiffness = along * (self.penalty * closing.area);
                visit(point, closing.normal * (pressure * closing.area), stiffness);
            }
        }
    }

    /// Moves each closed place's pressure into its multiplier.
    pub(super) fn correct_closings(&mut self, skin: &Skin, positions: &[f64]) {
        let penalty = self.penalty;
        for (index, closing) in self.closings.iter_mut().enumerate().filter(|(_, c)| c.area > 0.0) {
            let opening = skin_position(skin, positions, skin.opening(0, index)).dot(&closing.normal);
            closing.multiplier = (closing.multiplier - penalty * opening).max(0.0);
        }
    }

    /// Adds each node's share of the stiffness as if all cracks were closed, lumped.
    pub(super) fn add_possible_closings(&self, skin: &Skin, out: &mut [Matrix]) {
        for (index, closing) in self.closings.iter().enumerate() {
            let stiffness = turning(&closing.normal) * (MARGIN * self.penalty * closing.area);
            for (node, weight) in skin.terms(skin.opening(0, index)) {
                out[node] += stiffness * weight.abs();
            }
        }
    }

    /// Pressures (Pa) of all closings.
    pub(crate) fn crack_pressures(&self) -> Vec<f64> {
        self.closings.iter().map(|closing| closing.multiplier).collect()
    }

    /// Takes up pressures (Pa) of closings.
    pub(crate) fn set_crack_pressures(&mut self, pressures: &[f64]) {
        let closing = |&multiplier: &f64| Closing { multiplier, ..Closing::default() };
        self.closings = pressures.iter().map(closing).collect();
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bead::Bead;
    use crate::lattice::{Face, Lattice};
    use std::sync::Arc;

    /// Two halves of a block, one moved by a way from where they would just touch.
    fn halves(way: Vector) -> (Bead, Contacts) {
        let whole = Lattice::block([4, 4, 4]);
        let middle = whole
            .bonds()
            .into_iter()
            .filter(|&(low, _, axis)| axis == 0 && whole.voxel_offset(low)[0] == -0.5);
        let faces: Vec<Face> =
            middle.map(|(low, _, axis)| Face { low: low as u32, axis: axis as u8 }).collect();
        let mut bead = Bead::new(Arc::new(whole.split(&faces)), 2.0, Vector::zeros(), 3.0);
        let mut contacts = Contacts { penalty: 7.0, ..Contacts::default() };
        let (lattice, stride) = (bead.shared_lattice(), bead.lattice().stride());
        for voxel in (0..lattice.voxel_count()).filter(|&voxel| lattice.voxel_offset(voxel)[0] > 0.0) {
            for node in lattice.corners_of(voxel) {
                let [x, y, z] = lattice.node_offset(node);
                for (axis, at) in [x, y, z].into_iter().enumerate() {
                    bead.positions[axis * stride + node] = 3.0 * at + way[axis];
                }
            }
        }
        contacts.face_cracks(&lattice.skin, &bead.positions);
        (bead, contacts)
    }

    fn forces(bead: &Bead, contacts: &Contacts) -> Vec<f64> {
        let mut forces = vec![0.0; bead.positions.len()];
        contacts.add_gradient(&bead.lattice().skin, &bead.positions, &[], &mut forces);
        forces
    }

    #[test]
    fn faces_that_part_or_slide_feel_nothing_and_those_that_overlap_are_pushed_apart_evenly() {
        for way in [Vector::new(0.1, 0.0, 0.0), Vector::new(1e-9, 0.7, -0.4)] {
            let (bead, contacts) = halves(way);
            assert!(forces(&bead, &contacts).iter().all(|&force| force == 0.0), "{way}");
        }
        let (bead, contacts) = halves(Vector::new(-0.1, 0.2, 0.0));
        let forces = forces(&bead, &contacts);
        let column = &forces[..bead.lattice().node_count()];
        let pushed: f64 = column.iter().filter(|&&force| force < 0.0).sum();
        // Penalty times overlap times the area of 4 x 4 voxels of edge 3.
        assert!((pushed / (-7.0 * 0.1 * 144.0) - 1.0).abs() < 1e-12, "{pushed}");
        assert!(column.iter().sum::<f64>().abs() < 1e-12 * pushed.abs());
        assert!(forces[bead.lattice().stride()..].iter().all(|force| force.abs() < 1e-12));
    }
}
