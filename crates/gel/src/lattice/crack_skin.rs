//! The skin of a torn lattice: points on the faces of its cracks, and those of the outer
//! skin that lean on nodes which have come apart.

use super::skin::{Facing, OPENINGS, combination_of, is_deep};
use super::{Lattice, Skin};
use bedswell_geometry::Vector;

/// Where the points of a face lie on it: the middles of its quarters, as on blocks.
const QUARTERS: [[f64; 2]; OPENINGS] = [[0.25, 0.25], [0.75, 0.25], [0.25, 0.75], [0.75, 0.75]];

impl Lattice {
    /// The skin, as that of a lattice which has since been split.
    pub(super) fn skin_with_cracks(&self, old: &Skin) -> Skin {
        let is_split = self.split_nodes();
        let half = self.shape.half();
        let mut skin = Skin::empty(old.area);
        skin.outer = old.outer;
        skin.place.extend_from_slice(&old.place[..old.outer]);
        skin.host.extend_from_slice(&old.host[..old.outer]);
        for point in 0..old.outer {
            let torn = old.terms(point).any(|(node, _)| is_split[node]);
            if torn {
                let (place, voxel) = (old.place[point], old.host[point] as usize);
                let low = self.voxels[voxel];
                let local = std::array::from_fn(|axis| place[axis] + half[axis] - f64::from(low[axis]));
                skin.push(self.combination_in(voxel, local));
            } else {
                skin.push(old.terms(point));
            }
        }
        for crack in &self.cracks {
            for (voxel, high) in [(crack.low as usize, true), (crack.high as usize, false)] {
                let low = self.voxels[voxel];
                for quarter in QUARTERS {
                    let local = on_face(quarter, crack.axis, high);
                    let place: [f64; 3] =
                        std::array::from_fn(|axis| f64::from(low[axis]) + local[axis] - half[axis]);
                    // Corners of cut voxels lie outside the gel.
                    if self.shape.depth(&Vector::from(place)).0 <= 0.0 {
                        continue;
                    }
                    skin.place.push(place);
                    skin.host.push(voxel as u32);
                    skin.push(self.trilinear(voxel, local));
                }
            }
        }
        for (node, place) in self.nodes.iter().enumerate() {
            if is_deep(self.shape, place.map(f64::from)) {
                skin.push([(node, 1.0)]);
            }
        }
        for (voxel, place) in self.voxels.iter().enumerate() {
            if is_deep(self.shape, place.map(|c| f64::from(c) + 0.5)) {
                skin.push(self.corners_of(voxel).map(|node| (node, 0.125)));
            }
        }
        skin.end_inner();
        for crack in &self.cracks {
            let (low, high) = (crack.low as usize, crack.high as usize);
            for quarter in QUARTERS {
                let above = self.trilinear(high, on_face(quarter, crack.axis, false));
                let below = self.trilinear(low, on_face(quarter, crack.axis, true));
                skin.push(above.chain(below.map(|(node, weight)| (node, -weight))));
            }
            let of_face = |voxel: usize, side: usize| {
                let corners = self.corners_of(voxel);
                let (next, last) = (1 << ((crack.axis + 1) % 3), 1 << ((crack.axis + 2) % 3));
                [0, next, next | last, last].map(|corner| corners[corner | side << crack.axis] as u32)
            };
            let share = self.face_area(low, crack.axis);
            skin.facing.push(Facing { below: of_face(low, 1), above: of_face(high, 0), share });
        }
        (0..self.nodes.len()).for_each(|node| skin.push([(node, 1.0)]));
        skin
    }

    /// As `combination_of`, with what intact bonds connect to the voxel.
    fn combination_in(&self, voxel: usize, local: [f64; 3]) -> Vec<(usize, f64)> {
        let corners = self.corners_of(voxel);
        combination_of(local, corners, |corner, axis, up| {
            let beyond = self.corners_of(self.neighbour(voxel, 2 * axis + usize::from(up))?);
            let (near, far) = if up { (corner | 1 << axis, corner) } else { (corner, corner | 1 << axis) };
            let there = if up { corner | 1 << axis } else { corner };
            (beyond[far] == corners[near]).then_some(beyond[there])
        })
    }

    fn trilinear(&self, voxel: usize, local: [f64; 3]) -> impl Iterator<Item = (usize, f64)> + use<> {
        self.corners_of(voxel).into_iter().enumerate().filter_map(move |(corner, node)| {
            let along = |axis: usize| if corner >> axis & 1 == 1 { local[axis] } else { 1.0 - local[axis] };
            let weight = along(0) * along(1) * along(2);
            (weight != 0.0).then_some((node, weight))
        })
    }
}

/// A place on the low or high face along an axis, from the voxel's low corner.
fn on_face(quarter: [f64; 2], axis: usize, high: bool) -> [f64; 3] {
    let mut local = [0.0; 3];
    local[axis] = f64::from(u8::from(high));
    (local[(axis + 1) % 3], local[(axis + 2) % 3]) = (quarter[0], quarter[1]);
    local
}
