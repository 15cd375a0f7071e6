mod aperture;
mod crack;
mod crack_skin;
mod cut_cell;
mod embed;
mod group;
mod locate;
mod neighbourhood;
mod shape;
mod shell;
mod skin;
mod split;

use crate::lanes::WIDTH;
use bedswell_geometry::Vector;
pub(crate) use crack::Crack;
pub use crack::Face;
use cut_cell::CutCell;
#[cfg(test)]
pub(crate) use embed::BLENDED;
pub(crate) use embed::{Depth, Embedded};
pub(crate) use group::Group;
use group::{Loose, corners_of_rows, groups};
pub use locate::{Locator, MaterialPoint};
pub(crate) use neighbourhood::Neighbourhood;
pub use shape::Shape;
use shell::Shell;
pub(crate) use skin::{OPENINGS, POINT_WAY, Skin};
use std::collections::HashMap;

/// Voxels filled less than this are left out; their neighbours take their gel.
const SLIVER: f64 = 0.25;

/// The voxel lattice of a dry ball or block, in units of the voxel edge; beads with the
/// same number of voxels across share one.
///
/// Surface voxels are cut cells: they count with the volume inside the ball and
/// with the mean of their shape functions over it.
#[derive(Clone, Debug)]
pub struct Lattice {
    shape: Shape,
    /// Place of each node on the grid, from the low corner of the shape's box.
    nodes: Vec<[u16; 3]>,
    /// Node that each node beyond the first of its place was split from.
    origins: Vec<u32>,
    /// Rows of voxels that are neighbours along x.
    runs: Vec<Run>,
    /// Which of the rows each voxel is in.
    run_of: Vec<u32>,
    loose: Loose,
    pub(crate) groups: Vec<Group>,
    /// Ruptured bonds, in the order in which they broke.
    cracks: Vec<Crack>,
    /// Place of each voxel on the grid.
    voxels: Vec<[u16; 3]>,
    /// Neighbours of each voxel, and of each sliver of the shell after them, at the low
    /// and high face along x, y and z.
    neighbours: Vec<[u32; 6]>,
    shell: Shell,
    /// Where each voxel lies in the columns below, which pad every run with empty
    /// voxels to whole groups of lanes.
    pub(crate) slots: Vec<u32>,
    /// Gel in each voxel (voxel volumes).
    pub(crate) volume: Vec<f64>,
    /// Volume means of ξ, η, ζ over each voxel's gel.
    pub(crate) first: [Vec<f64>; 3],
    /// Volume means of ηζ, ζξ, ξη over each voxel's gel.
    pub(crate) mixed: [Vec<f64>; 3],
    /// Share of the gel that each node carries; they sum to 1.
    pub(crate) node_shares: Vec<f64>,
    pub(crate) skin: Skin,
}

/// A row of voxels along x; its four rows of nodes are contiguous too.
#[derive(Clone, Copy, Debug)]
struct Run {
    /// First voxel.
    voxel: usize,
    /// Slot of the first voxel in the padded columns.
    slot: usize,
    /// Voxels in the run.
    len: usize,
    /// First node of the rows at (low y, low z), (high, low), (low, high), (high, high).
    rows: [usize; 4],
}

const MEAN_FIRST: [fn(&CutCell) -> f64; 3] = [
    |cell| cell.first[0] / cell.volume,
    |cell| cell.first[1] / cell.volume,
    |cell| cell.first[2] / cell.volume,
];
const MEAN_MIXED: [fn(&CutCell) -> f64; 3] = [
    |cell| cell.mixed[0] / cell.volume,
    |cell| cell.mixed[1] / cell.volume,
    |cell| cell.mixed[2] / cell.volume,
];

impl Lattice {
    /// The lattice of a ball with `across` voxels over its diameter.
    ///
    /// # Panics
    /// With fewer than 4 or more than 512 voxels across.
    #[track_caller]
    pub fn new(across: usize) -> Self {
        assert!((4..=512).contains(&across), "{across} voxels across; 4 to 512 are possible");
        Self::filling(Shape::Ball(across), &kept_cells(across))
    }

    /// The lattice of a rectangular block of full voxels along x, y and z.
    ///
    /// # Panics
    /// With fewer than 1 or more than 512 voxels along an axis.
    #[track_caller]
    pub fn block(size: [usize; 3]) -> Self {
        assert!(size.iter().all(|n| (1..=512).contains(n)), "{size:?} voxels; 1 to 512 are possible");
        let mut cells = HashMap::new();
        for_each_place(size, |place| {
            cells.insert(place, CutCell::FULL);
        });
        Self::filling(Shape::Block(size), &cells)
    }

    /// The lattice of those full voxels of a block that are kept, for test pieces of any
    /// outline. Only what is left of the block's own faces has a skin that feels obstacles.
    ///
    /// # Panics
    /// As `block`.
    #[track_caller]
    pub fn carved(size: [usize; 3], keep: impl Fn([usize; 3]) -> bool) -> Self {
        let mut lattice = Self::block(size);
        let kept: Vec<[u16; 3]> =
            lattice.voxels.iter().copied().filter(|voxel| keep(voxel.map(usize::from))).collect();
        if kept.len() < lattice.voxels.len() {
            let cells = kept.into_iter().map(|voxel| (voxel, CutCell::FULL)).collect();
            lattice = Self::filling(Shape::Block(size), &cells);
        }
        lattice
    }

    fn filling(shape: Shape, cells: &HashMap<[u16; 3], CutCell>) -> Self {
        let mut voxels: Vec<[u16; 3]> = cells.keys().copied().collect();
        voxels.sort_unstable_by_key(|&[x, y, z]| (z, y, x));
        let (nodes, node_at) = number_nodes(&voxels);
        let runs = collect_runs(&voxels, &node_at);
        let slots: Vec<u32> =
            runs.iter().flat_map(|run| (run.slot..run.slot + run.len).map(|slot| slot as u32)).collect();
        let slot_count = runs.last().map_or(0, |run| run.slot + run.len.next_multiple_of(WIDTH));
        let column = |value: fn(&CutCell) -> f64| {
            let mut column = vec![0.0; slot_count];
            for (voxel, &slot) in voxels.iter().zip(&slots) {
                column[slot as usize] = value(&cells[voxel]);
            }
            column
        };
        let voxel_at: HashMap<[u16; 3], u32> = voxels.iter().copied().zip(0..).collect();
        let shell = Shell::new(&shell::slivers(shape, cells), &node_at);
        let covering: HashMap<[u16; 3], u32> = voxels.iter().chain(&shell.places).copied().zip(0..).collect();
        let neighbours =
            voxels.iter().chain(&shell.places).map(|voxel| neighbours_of(voxel, &covering)).collect();
        let skin = Skin::new(shape, cells, &voxel_at, &node_at);
        let node_shares = node_shares(&voxels, cells, &node_at);
        Self {
            shape,
            origins: Vec::new(),
            groups: groups(&runs, 0, slot_count),
            loose: Loose::default(),
            cracks: Vec::new(),
            run_of: (0..).zip(&runs).flat_map(|(index, run)| vec![index; run.len]).collect(),
            runs,
            volume: column(|cell| cell.volume),
            first: [0, 1, 2].map(|axis| column(MEAN_FIRST[axis])),
            mixed: [0, 1, 2].map(|axis| column(MEAN_MIXED[axis])),
            nodes,
            voxels,
            neighbours,
            shell,
            slots,
            node_shares,
            skin,
        }
    }

    /// What the dry lattice fills.
    pub fn shape(&self) -> Shape {
        self.shape
    }

    /// Voxels over the diameter of a ball, or over the length of a block along x.
    pub fn across(&self) -> usize {
        self.shape.size()[0]
    }

    /// Number of nodes.
    pub fn node_count(&self) -> usize {
        self.nodes.len()
    }

    /// Length of one axis in a vector of node values: the nodes, padded so that a
    /// group of lanes may read past the last row.
    pub(crate) fn stride(&self) -> usize {
        (self.nodes.len() + WIDTH).next_multiple_of(WIDTH)
    }

    /// Gel in a voxel when dry (voxel volumes).
    pub fn filled(&self, voxel: usize) -> f64 {
        self.volume[self.slots[voxel] as usize]
    }

    /// Number of voxels.
    pub fn voxel_count(&self) -> usize {
        self.voxels.len()
    }

    /// Number of contact points on the skin.
    pub fn skin_point_count(&self) -> usize {
        self.skin.len()
    }

    /// Dry area that each contact point stands for (voxel edges squared).
    pub fn skin_point_area(&self) -> f64 {
        self.skin.area
    }

    /// Place of a node relative to the shape's centre (voxel edges).
    pub fn node_offset(&self, node: usize) -> [f64; 3] {
        let half = self.shape.half();
        std::array::from_fn(|axis| f64::from(self.nodes[node][axis]) - half[axis])
    }

    /// Centre of a voxel relative to the shape's centre (voxel edges).
    pub fn voxel_offset(&self, voxel: usize) -> [f64; 3] {
        let half = self.shape.half();
        std::array::from_fn(|axis| f64::from(self.voxels[voxel][axis]) + 0.5 - half[axis])
    }

    /// Whether a voxel's centre lies at least three quarters of a voxel below the surface.
    pub fn is_inner(&self, voxel: usize) -> bool {
        self.shape.depth(&Vector::from(self.voxel_offset(voxel))).0 > skin::INNER_DEPTH
    }

    /// Pairs of voxels that share a face, with the axis of the face's normal:
    /// the intact bonds. The first voxel is on the low side.
    pub fn bonds(&self) -> Vec<(usize, usize, usize)> {
        let mut bonds = Vec::with_capacity(3 * self.voxels.len());
        for voxel in 0..self.voxels.len() {
            for axis in 0..3 {
                if let Some(next) = self.neighbour(voxel, 2 * axis + 1) {
                    bonds.push((voxel, next, axis));
                }
            }
        }
        bonds
    }

    /// The eight nodes of a voxel, x fastest.
    pub fn corners_of(&self, voxel: usize) -> [usize; 8] {
        self.loose.get(voxel).unwrap_or_else(|| {
            let run = &self.runs[self.run_of[voxel] as usize];
            corners_of_rows(run.rows, voxel - run.voxel)
        })
    }

    /// The voxel at a place on the grid.
    fn voxel_at(&self, place: [u16; 3]) -> Option<usize> {
        let [x, y, z] = place;
        self.voxels.binary_search_by_key(&(z, y, x), |&[x, y, z]| (z, y, x)).ok()
    }

    /// The voxel beyond a face, through an intact bond; faces are low and high along x, y, z.
    pub(crate) fn neighbour(&self, voxel: usize, face: usize) -> Option<usize> {
        let next = self.neighbours[voxel][face] as usize;
        (next < self.voxels.len()).then_some(next)
    }
}

/// The cut cells that stay, with the slivers' gel given to their neighbours.
fn kept_cells(across: usize) -> HashMap<[u16; 3], CutCell> {
    let half = 0.5 * across as f64;
    // Mirror symmetry: the upper octant is integrated, the rest is its image.
    let mut octant = HashMap::new();
    for_each_place([across; 3], |place| {
        if place.iter().all(|&c| 2 * usize::from(c) + 1 >= across) {
            octant.insert(place, CutCell::of_ball(place.map(|c| f64::from(c) - half), half));
        }
    });
    let mut kept = HashMap::new();
    let mut slivers = Vec::new();
    for_each_place([across; 3], |place| {
        let image = |c: u16| across as u16 - 1 - c;
        let low = place.map(|c| c < image(c));
        let folded = place.map(|c| c.max(image(c)));
        let cell = octant[&folded].mirrored(low);
        if cell.volume >= SLIVER {
            kept.insert(place, cell);
        } else if cell.volume > 0.0 {
            slivers.push((place, cell));
        }
    });
    for (place, sliver) in &slivers {
        let takers = nearest_kept(*place, &kept);
        let share = 1.0 / takers.len() as f64;
        for (taker, offset) in takers {
            if let Some(cell) = kept.get_mut(&taker) {
                cell.absorb(sliver, offset, share);
            }
        }
    }
    kept
}

fn for_each_place(size: [usize; 3], mut visit: impl FnMut([u16; 3])) {
    let [along_x, along_y, along_z] = size.map(|voxels| 0..voxels as u16);
    for z in along_z {
        for y in along_y.clone() {
            for x in along_x.clone() {
                visit([x, y, z]);
            }
        }
    }
}

/// The kept voxels nearest to a dropped one, with its offset seen from them.
fn nearest_kept(place: [u16; 3], kept: &HashMap<[u16; 3], CutCell>) -> Vec<([u16; 3], [i32; 3])> {
    let mut nearest = Vec::new();
    let mut least = i32::MAX;
    for z in -2..=2_i32 {
        for y in -2..=2_i32 {
            for x in -2..=2_i32 {
                let distance = x * x + y * y + z * z;
                let there = [i32::from(place[0]) + x, i32::from(place[1]) + y, i32::from(place[2]) + z];
                let Ok(there) =
                    <[u16; 3]>::try_from(there.map(|c| u16::try_from(c).unwrap_or(u16::MAX)).as_slice())
                else {
                    continue;
                };
                if distance > least || !kept.contains_key(&there) {
                    continue;
                }
                if distance < least {
                    nearest.clear();
                    least = distance;
                }
                nearest.push((there, [-x, -y, -z]));
            }
        }
    }
    nearest
}

fn neighbours_of(voxel: &[u16; 3], voxel_at: &HashMap<[u16; 3], u32>) -> [u32; 6] {
    std::array::from_fn(|face| {
        let mut there = *voxel;
        let axis = face / 2;
        there[axis] = if face % 2 == 0 { there[axis].wrapping_sub(1) } else { there[axis] + 1 };
        voxel_at.get(&there).copied().unwrap_or(embed::NO_VOXEL)
    })
}

/// Each voxel's gel on its nodes, by the mean place of the gel in the voxel.
fn node_shares(voxels: &[[u16; 3]], cells: &HashMap<[u16; 3], CutCell>, node_at: &NodeIndex) -> Vec<f64> {
    let mut shares = vec![0.0; node_at.len()];
    let total: f64 = voxels.iter().map(|voxel| cells[voxel].volume).sum();
    for voxel in voxels {
        let cell = &cells[voxel];
        for (corner, place) in corner_places(voxel).iter().enumerate() {
            let share = (0..3).map(|axis| {
                let along = cell.first[axis] / cell.volume;
                if corner >> axis & 1 == 1 { along } else { 1.0 - along }
            });
            shares[node_at[place]] += cell.volume / total * share.product::<f64>();
        }
    }
    shares
}

type NodeIndex = HashMap<[u16; 3], usize>;

fn number_nodes(voxels: &[[u16; 3]]) -> (Vec<[u16; 3]>, NodeIndex) {
    let mut nodes: Vec<[u16; 3]> = voxels.iter().flat_map(corner_places).collect();
    nodes.sort_unstable_by_key(|&[x, y, z]| (z, y, x));
    nodes.dedup();
    let index = nodes.iter().copied().zip(0..).collect();
    (nodes, index)
}

fn corner_places(&[x, y, z]: &[u16; 3]) -> [[u16; 3]; 8] {
    std::array::from_fn(|k| {
        let k = k as u16;
        [x + (k & 1), y + (k >> 1 & 1), z + (k >> 2)]
    })
}

fn collect_runs(voxels: &[[u16; 3]], node_at: &NodeIndex) -> Vec<Run> {
    let mut runs: Vec<Run> = Vec::new();
    for (voxel, place) in voxels.iter().enumerate() {
        if let Some(run) = runs.last_mut() {
            let [x, y, z] = voxels[run.voxel];
            if [x + run.len as u16, y, z] == *place {
                run.len += 1;
                continue;
            }
        }
        let corners = corner_places(place);
        let slot = runs.last().map_or(0, |run| run.slot + run.len.next_multiple_of(WIDTH));
        runs.push(Run { voxel, slot, len: 1, rows: [0, 2, 4, 6].map(|k| node_at[&corners[k]]) });
    }
    runs
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    #[test]
    fn the_lattice_holds_the_whole_ball() {
        for across in [8, 13, 24] {
            let lattice = Lattice::new(across);
            let ball = std::f64::consts::PI / 6.0 * (across as f64).powi(3);
            assert_relative_eq!(lattice.volume.iter().sum::<f64>(), ball, max_relative = 3e-4);
        }
    }

    #[test]
    fn nodes_of_a_run_lie_in_rows() {
        let lattice = Lattice::new(12);
        for voxel in 0..lattice.voxel_count() {
            let places = corner_places(&lattice.voxels[voxel]);
            assert_eq!(lattice.corners_of(voxel).map(|node| lattice.nodes[node]), places);
        }
    }
}
