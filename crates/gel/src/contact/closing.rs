//! Contact of the two faces of a crack.
//!
//! Where a bond has ruptured, its faces may part and slide but not pass through each other:
//! a penalty on the overlap along their common normal, with a multiplier as for obstacles.
//! Normals are those of the state at which contacts were last prepared.

use super::{Contacts, skin_position};
use crate::lattice::{OPENINGS, Skin};
use bedswell_geometry::{Matrix, Vector};

/// Faces that have slid further apart than this do not face each other any more (edges of
/// a voxel's swollen face).
const REACH: f64 = 1.0;

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
        for (crack, nodes) in skin.facing.iter().enumerate() {
            let normal = |face: &[u32]| {
                let corners: Vec<Vector> = face.iter().map(place).collect();
                0.5 * (corners[2] - corners[0]).cross(&(corners[3] - corners[1]))
            };
            let (below, above) = nodes.split_at(4);
            let normal = 0.5 * (normal(below) + normal(above));
            let area = normal.norm().max(f64::MIN_POSITIVE);
            for k in 0..OPENINGS {
                let apart = skin_position(skin, positions, skin.opening(crack, k)).norm();
                let facing = apart < REACH * area.sqrt();
                let closing = &mut self.closings[OPENINGS * crack + k];
                closing.normal = normal / area;
                closing.area = if facing { area / OPENINGS as f64 } else { 0.0 };
                closing.multiplier = if facing { closing.multiplier } else { 0.0 };
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

    /// Pressures (Pa) of all closings.
    pub(crate) fn crack_pressures(&self) -> Vec<f64> {
        self.closings.iter().map(|closing| closing.multiplier).collect()
    }

    /// Takes up pressures (Pa) of closings.
    pub(crate) fn set_crack_pressures(&mut self, pressures: &[f64]) {
        let closing = |&multiplier: &f64| Closing { multiplier, ..Closing::default() };
        self.closings = pressures.iter().map(closing).collect();
    }

    /// Deepest overlap of the faces of a crack (m).
    pub(crate) fn deepest_overlap(&self, skin: &Skin, positions: &[f64]) -> f64 {
        let overlap = |(index, closing): (usize, &Closing)| {
            -skin_position(skin, positions, skin.opening(0, index)).dot(&closing.normal)
        };
        let facing = self.closings.iter().enumerate().filter(|(_, closing)| closing.area > 0.0);
        facing.map(overlap).fold(0.0, f64::max)
    }
}
