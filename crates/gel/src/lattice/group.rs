//! Voxels that the kernels work on together.

use super::{Lattice, Run};
use crate::lanes::{Lanes, WIDTH};

/// Up to `WIDTH` voxels in neighbouring slots.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Group {
    /// Slot of the first.
    pub(crate) slot: usize,
    pub(crate) len: usize,
    nodes: Nodes,
}

/// Where the corners of a group's voxels are.
#[derive(Clone, Copy, Debug)]
enum Nodes {
    /// In four rows along x; the first voxel, and the first node of each row.
    Rows(usize, [usize; 4]),
    /// Anywhere: the first among the loose voxels.
    Loose(usize),
}

/// Voxels with corners that a crack has taken out of the rows of their run, in the order
/// in which they came loose.
#[derive(Clone, Debug, Default)]
pub(crate) struct Loose {
    pub(super) voxels: Vec<u32>,
    pub(super) corners: Vec<[u32; 8]>,
    /// Which of the loose voxels each voxel is; empty where none is.
    index: Vec<u32>,
}

const NOT_LOOSE: u32 = u32::MAX;

impl Loose {
    pub(super) fn get(&self, voxel: usize) -> Option<[usize; 8]> {
        match self.index.get(voxel) {
            None | Some(&NOT_LOOSE) => None,
            Some(&at) => Some(self.corners[at as usize].map(|node| node as usize)),
        }
    }

    /// The corners of a voxel of a lattice of `count` to be changed; they start as `corners`.
    pub(super) fn entry(&mut self, voxel: usize, count: usize, corners: [usize; 8]) -> &mut [u32; 8] {
        self.index.resize(count, NOT_LOOSE);
        if self.index[voxel] == NOT_LOOSE {
            self.index[voxel] = self.voxels.len() as u32;
            self.voxels.push(voxel as u32);
            self.corners.push(corners.map(|node| node as u32));
        }
        &mut self.corners[self.index[voxel] as usize]
    }
}

/// The groups of the runs, and those of so many loose voxels from `slot` on.
pub(super) fn groups(runs: &[Run], loose: usize, slot: usize) -> Vec<Group> {
    let of_run = |run: &Run| {
        let Run { voxel, slot, len, rows } = *run;
        (0..len).step_by(WIDTH).map(move |along| Group {
            slot: slot + along,
            len: WIDTH.min(len - along),
            nodes: Nodes::Rows(voxel + along, rows.map(|row| row + along)),
        })
    };
    let of_loose = (0..loose).step_by(WIDTH).map(|first| Group {
        slot: slot + first,
        len: WIDTH.min(loose - first),
        nodes: Nodes::Loose(first),
    });
    runs.iter().flat_map(of_run).chain(of_loose).collect()
}

/// The eight nodes of the voxel that lies `along` four rows, x fastest.
pub(super) fn corners_of_rows(rows: [usize; 4], along: usize) -> [usize; 8] {
    let [a, b, c, d] = rows.map(|row| row + along);
    [a, a + 1, b, b + 1, c, c + 1, d, d + 1]
}

impl Lattice {
    /// The voxel in a lane of a group.
    pub(crate) fn voxel_of(&self, group: &Group, lane: usize) -> usize {
        match group.nodes {
            Nodes::Rows(voxel, _) => voxel + lane,
            Nodes::Loose(first) => self.loose.voxels[first + lane] as usize,
        }
    }

    /// The eight nodes of the voxel in a lane of a group, x fastest.
    pub(crate) fn corners_in(&self, group: &Group, lane: usize) -> [usize; 8] {
        match group.nodes {
            Nodes::Rows(_, rows) => corners_of_rows(rows, lane),
            Nodes::Loose(first) => self.loose.corners[first + lane].map(|node| node as usize),
        }
    }

    /// Node values of a group's corners, from one axis' column.
    #[inline(always)]
    pub(crate) fn gather(&self, group: &Group, column: &[f64]) -> [Lanes; 8] {
        let mut corners = [Lanes::splat(0.0); 8];
        match group.nodes {
            Nodes::Rows(_, rows) => {
                for (row, &start) in rows.iter().enumerate() {
                    corners[2 * row] = Lanes::load(column, start);
                    corners[2 * row + 1] = Lanes::load(column, start + 1);
                }
            }
            Nodes::Loose(first) => {
                for (lane, nodes) in self.loose.corners[first..first + group.len].iter().enumerate() {
                    for corner in 0..8 {
                        corners[corner].0[lane] = column[nodes[corner] as usize];
                    }
                }
            }
        }
        corners
    }

    /// Adds values at a group's corners to one axis' column.
    #[inline(always)]
    pub(crate) fn scatter(&self, group: &Group, values: &[Lanes; 8], column: &mut [f64]) {
        match group.nodes {
            Nodes::Rows(_, rows) => {
                for (row, &start) in rows.iter().enumerate() {
                    crate::lanes::add_pairs(column, start, values[2 * row], values[2 * row + 1]);
                }
            }
            Nodes::Loose(first) => {
                for (lane, nodes) in self.loose.corners[first..first + group.len].iter().enumerate() {
                    for corner in 0..8 {
                        column[nodes[corner] as usize] += values[corner].0[lane];
                    }
                }
            }
        }
    }
}
