//! Ruptured bonds and the surfaces they leave.

use super::{Lattice, corner_places};
use serde::{Deserialize, Serialize};
use std::collections::HashMap;

/// The face that two voxels share, where their bond may rupture.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub struct Face {
    /// The voxel on the low side.
    pub low: u32,
    /// The axis across: 0, 1 or 2 for x, y or z.
    pub axis: u8,
}

/// A ruptured bond.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Crack {
    pub(crate) low: u32,
    pub(crate) high: u32,
    pub(crate) axis: usize,
}

impl Lattice {
    /// Faces of the ruptured bonds, in the order in which they broke.
    pub fn ruptured(&self) -> impl Iterator<Item = Face> + '_ {
        self.cracks.iter().map(|crack| Face { low: crack.low, axis: crack.axis as u8 })
    }

    pub(crate) fn cracks(&self) -> &[Crack] {
        &self.cracks
    }

    /// Area of one side of all cracks when dry (voxel edges squared).
    pub fn crack_area(&self) -> f64 {
        self.cracks.iter().fold(0.0, |area, crack| area + self.face_area(crack.low as usize, crack.axis))
    }

    /// Area when dry (voxel edges squared) that water from outside reaches: the outer skin, and
    /// both faces of cracks that open to it.
    pub fn wetted_area(&self) -> f64 {
        let cracks = self.cracks.iter().zip(self.exposed()).filter(|(_, exposed)| *exposed);
        let faces: f64 = cracks.map(|(crack, _)| 2.0 * self.face_area(crack.low as usize, crack.axis)).sum();
        self.skin.outer as f64 * self.skin.area + faces
    }

    /// Which of the ruptured bonds lie on cracks that reach the outer skin, so that water
    /// from outside is between their faces.
    pub fn exposed(&self) -> Vec<bool> {
        // Faces and edges of the grid: faces that share an edge are one crack; an edge that
        // has not four voxels around it is on the skin.
        let mut groups = Groups::new(self.cracks.len() + 1);
        let skin = self.cracks.len();
        let mut first_at: HashMap<([u16; 3], usize), usize> = HashMap::new();
        for (index, crack) in self.cracks.iter().enumerate() {
            for (place, along) in edges_of(self.voxels[crack.high as usize], crack.axis) {
                if self.is_outer_edge(place, along) {
                    groups.join(index, skin);
                }
                let first = *first_at.entry((place, along)).or_insert(index);
                groups.join(index, first);
            }
        }
        let outside = groups.root(skin);
        (0..self.cracks.len()).map(|index| groups.root(index) == outside).collect()
    }

    /// Places on the grid of a voxel's corners.
    pub(crate) fn vertices_of(&self, voxel: usize) -> [[u16; 3]; 8] {
        corner_places(&self.voxels[voxel])
    }

    /// The voxels round a vertex of the grid that lie on its low side along an axis.
    pub(crate) fn voxels_below(&self, vertex: [u16; 3], axis: usize) -> [Option<usize>; 4] {
        let (next, last) = ((axis + 1) % 3, (axis + 2) % 3);
        [[1, 1], [0, 1], [1, 0], [0, 0]].map(|back| {
            let mut place = vertex;
            place[axis] = place[axis].wrapping_sub(1);
            place[next] = place[next].wrapping_sub(back[0]);
            place[last] = place[last].wrapping_sub(back[1]);
            self.voxel_at(place)
        })
    }

    fn is_outer_edge(&self, place: [u16; 3], along: usize) -> bool {
        let (next, last) = ((along + 1) % 3, (along + 2) % 3);
        [[0, 0], [1, 0], [0, 1], [1, 1]].into_iter().any(|back| {
            let mut voxel = place;
            voxel[next] = voxel[next].wrapping_sub(back[0]);
            voxel[last] = voxel[last].wrapping_sub(back[1]);
            self.voxel_at(voxel).is_none()
        })
    }

    /// The bodies that intact bonds hold together: their voxels, the largest body first.
    pub fn bodies(&self) -> Vec<Vec<usize>> {
        let mut body_of = vec![usize::MAX; self.voxels.len()];
        let mut bodies: Vec<Vec<usize>> = Vec::new();
        for start in 0..self.voxels.len() {
            if body_of[start] != usize::MAX {
                continue;
            }
            body_of[start] = bodies.len();
            let mut body = vec![start];
            let mut seen = 0;
            while let Some(&voxel) = body.get(seen) {
                seen += 1;
                for next in (0..6).filter_map(|face| self.neighbour(voxel, face)) {
                    if body_of[next] == usize::MAX {
                        body_of[next] = bodies.len();
                        body.push(next);
                    }
                }
            }
            body.sort_unstable();
            bodies.push(body);
        }
        bodies.sort_by_key(|body| std::cmp::Reverse(body.len()));
        bodies
    }
}

/// The four edges of the low face along `axis` of a voxel: low end and direction.
fn edges_of(voxel: [u16; 3], axis: usize) -> [([u16; 3], usize); 4] {
    let (next, last) = ((axis + 1) % 3, (axis + 2) % 3);
    let shifted = |along: usize| {
        let mut place = voxel;
        place[along] += 1;
        place
    };
    [(voxel, next), (voxel, last), (shifted(last), next), (shifted(next), last)]
}

/// Disjoint sets.
pub(super) struct Groups(Vec<usize>);

impl Groups {
    pub(super) fn new(count: usize) -> Self {
        Self((0..count).collect())
    }

    /// The lowest member of a member's set.
    pub(super) fn root(&mut self, mut member: usize) -> usize {
        while self.0[member] != member {
            self.0[member] = self.0[self.0[member]];
            member = self.0[member];
        }
        member
    }

    pub(super) fn join(&mut self, a: usize, b: usize) {
        let (a, b) = (self.root(a), self.root(b));
        self.0[a.max(b)] = a.min(b);
    }
}
