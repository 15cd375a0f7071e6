//! A lattice whose bonds rupture.
//!
//! Copies of the node at a vertex stay one only for voxels that intact bonds round the
//! vertex connect: what comes apart shares nothing any more, and no gel is lost.

use super::crack::Groups;
use super::embed::NO_VOXEL;
use super::{Crack, Face, Lattice, WIDTH, corner_places, groups};
use std::collections::HashMap;

impl Lattice {
    /// The lattice with the bonds at these faces ruptured as well; faces without an intact
    /// bond are passed over. Voxels, nodes and skin points keep their numbers, new nodes
    /// follow in the order of the faces.
    pub fn split(&self, faces: &[Face]) -> Self {
        let mut lattice = self.clone();
        let mut parted = Vec::new();
        for face in faces {
            lattice.rupture(*face, &mut parted);
        }
        lattice.renew_slots(self);
        lattice.detach_slivers(&parted);
        lattice.node_shares = lattice.shares();
        lattice.skin = lattice.skin_with_cracks(&self.skin);
        lattice
    }

    /// Node values carried over from the lattice that this one was split from.
    pub(crate) fn carry_nodes(&self, from: &Lattice, values: &[f64]) -> Vec<f64> {
        let (old, new) = (from.stride(), self.stride());
        let mut carried = vec![0.0; 3 * new];
        for axis in 0..3 {
            let column = &mut carried[axis * new..(axis + 1) * new];
            column[..from.nodes.len()].copy_from_slice(&values[axis * old..axis * old + from.nodes.len()]);
            for node in from.nodes.len()..self.nodes.len() {
                column[node] = column[self.origin_of(node)];
            }
        }
        carried
    }

    /// The node that a node was split from; itself for one of the whole lattice.
    pub(crate) fn origin_of(&self, node: usize) -> usize {
        let whole = self.nodes.len() - self.origins.len();
        node.checked_sub(whole).map_or(node, |copy| self.origins[copy] as usize)
    }

    /// Voxel values in slots carried over from the lattice that this one was split from;
    /// slots without a voxel take `empty`.
    pub(crate) fn carry_slots(&self, from: &Lattice, values: &[f64], empty: f64) -> Vec<f64> {
        let mut carried = vec![empty; self.volume.len()];
        for (old, new) in from.slots.iter().zip(&self.slots) {
            carried[*new as usize] = values[*old as usize];
        }
        carried
    }

    /// Corners of all voxels that have a node of which there are copies.
    pub(super) fn corners_beside_cracks(&self) -> HashMap<u32, [usize; 8]> {
        let is_split = self.split_nodes();
        (0..self.voxels.len())
            .map(|voxel| (voxel as u32, self.corners_of(voxel)))
            .filter(|(_, corners)| corners.iter().any(|&node| is_split[node]))
            .collect()
    }

    /// Whether there are other copies of each node.
    pub(super) fn split_nodes(&self) -> Vec<bool> {
        let mut is_split = vec![false; self.nodes.len()];
        let first = self.nodes.len() - self.origins.len();
        for (copy, &origin) in self.origins.iter().enumerate() {
            is_split[first + copy] = true;
            is_split[origin as usize] = true;
        }
        is_split
    }

    fn rupture(&mut self, face: Face, parted: &mut Vec<[u16; 3]>) {
        let (low, axis) = (face.low as usize, usize::from(face.axis));
        let Some(high) = self.neighbour(low, 2 * axis + 1) else { return };
        self.neighbours[low][2 * axis + 1] = NO_VOXEL;
        self.neighbours[high][2 * axis] = NO_VOXEL;
        self.cracks.push(Crack { low: face.low, high: high as u32, axis });
        let (next, last) = ((axis + 1) % 3, (axis + 2) % 3);
        for [a, b] in [[0, 0], [1, 0], [0, 1], [1, 1]] {
            let mut vertex = self.voxels[high];
            vertex[next] += a;
            vertex[last] += b;
            if self.part(vertex) {
                parted.push(vertex);
            }
        }
    }

    /// Gives every group of voxels that intact bonds connect round a vertex a node of its
    /// own. Whether that took new nodes.
    fn part(&mut self, vertex: [u16; 3]) -> bool {
        let around: [Option<usize>; 8] = std::array::from_fn(|k| {
            self.voxel_at(std::array::from_fn(|axis| vertex[axis].wrapping_sub(1 - (k >> axis & 1) as u16)))
        });
        let mut groups = Groups::new(8);
        for k in 0..8 {
            let Some(voxel) = around[k] else { continue };
            for axis in (0..3).filter(|axis| k >> axis & 1 == 0) {
                let other = k | 1 << axis;
                if around[other].is_some() && self.neighbour(voxel, 2 * axis + 1) == around[other] {
                    groups.join(k, other);
                }
            }
        }
        // Who kept a node, and who got which new one.
        let mut owners: Vec<(usize, usize, usize)> = Vec::with_capacity(8);
        let before = self.nodes.len();
        for k in 0..8 {
            let Some(voxel) = around[k] else { continue };
            let (corner, root) = (7 - k, groups.root(k));
            let corners = self.corners_of(voxel);
            let node = corners[corner];
            if let Some(&(_, _, own)) = owners.iter().find(|(old, group, _)| (*old, *group) == (node, root)) {
                if own != node {
                    self.set_corner(voxel, corners, corner, own);
                }
            } else if owners.iter().any(|(old, _, _)| *old == node) {
                let own = self.nodes.len();
                self.nodes.push(vertex);
                self.origins.push(node as u32);
                self.set_corner(voxel, corners, corner, own);
                owners.push((node, root, own));
            } else {
                owners.push((node, root, node));
            }
        }
        self.nodes.len() > before
    }

    fn set_corner(&mut self, voxel: usize, corners: [usize; 8], corner: usize, node: usize) {
        self.loose.entry(voxel, self.voxels.len(), corners)[corner] = node as u32;
    }

    /// Moves the gel of loose voxels to slots of their own, after those of the runs.
    fn renew_slots(&mut self, from: &Lattice) {
        let runs = self.runs.last().map_or(0, |run| run.slot + run.len.next_multiple_of(WIDTH));
        let loose = self.loose.voxels.len();
        let count = runs + loose.next_multiple_of(WIDTH);
        for (index, &voxel) in self.loose.voxels.iter().enumerate() {
            self.slots[voxel as usize] = (runs + index) as u32;
        }
        let columns = [&mut self.volume].into_iter().chain(&mut self.first).chain(&mut self.mixed);
        let old = [&from.volume].into_iter().chain(&from.first).chain(&from.mixed);
        for (column, old) in columns.zip(old) {
            column.resize(count, 0.0);
            for (&slot, &before) in self.slots.iter().zip(&from.slots).filter(|(now, then)| now != then) {
                column[before as usize] = 0.0;
                column[slot as usize] = old[before as usize];
            }
        }
        self.groups = groups(&self.runs, loose, runs);
    }

    /// Takes slivers beside a crack out of the map of places: they cannot follow both sides.
    fn detach_slivers(&mut self, parted: &[[u16; 3]]) {
        let voxels = self.voxels.len();
        for (sliver, place) in self.shell.places.clone().iter().enumerate() {
            if corner_places(place).iter().any(|corner| parted.contains(corner)) {
                for face in 0..6 {
                    let other = std::mem::replace(&mut self.neighbours[voxels + sliver][face], NO_VOXEL);
                    if other != NO_VOXEL {
                        self.neighbours[other as usize][face ^ 1] = NO_VOXEL;
                    }
                }
            }
        }
    }

    /// Each voxel's gel on its nodes, as shares of all gel.
    fn shares(&self) -> Vec<f64> {
        let mut shares = vec![0.0; self.nodes.len()];
        let total: f64 = self.volume.iter().sum();
        for voxel in 0..self.voxels.len() {
            let slot = self.slots[voxel] as usize;
            for (corner, node) in self.corners_of(voxel).into_iter().enumerate() {
                let share = (0..3).map(|axis| {
                    let along = self.first[axis][slot];
                    if corner >> axis & 1 == 1 { along } else { 1.0 - along }
                });
                shares[node] += self.volume[slot] / total * share.product::<f64>();
            }
        }
        shares
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;
    use bedswell_geometry::Vector;

    /// Faces across `axis` below the voxels at `level` (from the low side) of a lattice.
    fn plane(lattice: &Lattice, axis: usize, level: u16) -> Vec<Face> {
        let faces = lattice
            .bonds()
            .into_iter()
            .filter(|&(low, _, a)| a == axis && lattice.voxels[low][axis] + 1 == level);
        faces.map(|(low, _, axis)| Face { low: low as u32, axis: axis as u8 }).collect()
    }

    #[test]
    fn a_cut_through_a_block_leaves_two_bodies_that_share_no_node_and_all_the_gel() {
        let whole = Lattice::block([6, 5, 4]);
        let cut = whole.split(&plane(&whole, 0, 2));
        assert_eq!(cut.bodies().iter().map(Vec::len).collect::<Vec<_>>(), [80, 40]);
        assert_eq!(cut.node_count(), whole.node_count() + 6 * 5);
        assert_eq!(cut.volume.iter().sum::<f64>(), whole.volume.iter().sum::<f64>());
        assert_relative_eq!(cut.node_shares.iter().sum::<f64>(), 1.0, epsilon = 1e-12);
        assert_eq!(cut.crack_area(), 20.0);
        let mut owner = vec![None; cut.node_count()];
        for (body, voxels) in cut.bodies().iter().enumerate() {
            for node in voxels.iter().flat_map(|&voxel| cut.corners_of(voxel)) {
                assert_eq!(*owner[node].get_or_insert(body), body, "node {node}");
            }
        }
        assert!(owner.iter().all(Option::is_some));
        assert!(cut.exposed().iter().all(|&exposed| exposed));
    }

    #[test]
    fn a_crack_inside_opens_within_its_rim_and_is_not_exposed() {
        let whole = Lattice::block([6, 6, 6]);
        let inside = |c: u16| (1..5).contains(&c);
        let faces: Vec<Face> = plane(&whole, 2, 3)
            .into_iter()
            .filter(|face| whole.voxels[face.low as usize][..2].iter().all(|&c| inside(c)))
            .collect();
        let cracked = whole.split(&faces);
        assert_eq!(faces.len(), 16);
        assert_eq!(cracked.node_count(), whole.node_count() + 9, "the vertices within the rim");
        assert_eq!(cracked.bodies().len(), 1);
        assert!(cracked.exposed().iter().all(|exposed| !exposed));
    }

    #[test]
    fn a_ball_cut_through_its_middle_shows_its_mid_section_and_keeps_its_gel() {
        for across in [12, 17, 24] {
            let whole = Lattice::new(across);
            let halves = whole.split(&plane(&whole, 1, across.div_ceil(2) as u16));
            let off_centre = 0.5 * (across % 2) as f64;
            let radius = 0.5 * across as f64;
            let section = std::f64::consts::PI * (radius * radius - off_centre * off_centre);
            assert!((halves.crack_area() / section - 1.0).abs() < 0.02, "{across} across");
            assert_eq!(halves.bodies().len(), 2);
            let gel = |lattice: &Lattice| lattice.volume.iter().sum::<f64>();
            assert_relative_eq!(gel(&halves), gel(&whole), max_relative = 1e-14);
        }
    }

    #[test]
    fn the_order_of_events_does_not_matter_to_what_holds_together() {
        let whole = Lattice::new(8);
        let (first, second) = (plane(&whole, 0, 4), plane(&whole, 2, 3));
        let at_once = whole.split(&[&first[..], &second[..]].concat());
        let one_by_one = whole.split(&first).split(&second);
        assert_eq!(at_once.node_count(), one_by_one.node_count());
        for voxel in 0..whole.voxel_count() {
            assert_eq!(at_once.corners_of(voxel), one_by_one.corners_of(voxel));
        }
        let swapped = whole.split(&second).split(&first);
        assert_eq!(swapped.node_count(), at_once.node_count());
        assert_eq!(swapped.bodies(), at_once.bodies());
    }

    #[test]
    fn values_follow_their_nodes_and_voxels() {
        let whole = Lattice::new(8);
        let cut = whole.split(&plane(&whole, 0, 4)).split(&plane(&whole, 1, 5));
        let mut values = vec![0.0; 3 * whole.stride()];
        for node in 0..whole.node_count() {
            let place = whole.node_offset(node);
            (0..3).for_each(|axis| values[axis * whole.stride() + node] = place[axis]);
        }
        let carried = cut.carry_nodes(&whole, &values);
        for node in 0..cut.node_count() {
            let place = cut.node_offset(node);
            (0..3).for_each(|axis| assert_eq!(carried[axis * cut.stride() + node], place[axis]));
        }
        let mut numbers = vec![-1.0; whole.volume.len()];
        whole.slots.iter().enumerate().for_each(|(voxel, &slot)| numbers[slot as usize] = voxel as f64);
        let carried = cut.carry_slots(&whole, &numbers, -1.0);
        for (voxel, &slot) in cut.slots.iter().enumerate() {
            assert_eq!(carried[slot as usize], voxel as f64);
            assert_eq!(cut.filled(voxel), whole.filled(voxel));
        }
    }

    #[test]
    fn the_skin_of_a_torn_ball_follows_each_half_alone() {
        let whole = Lattice::new(12);
        let halves = whole.split(&plane(&whole, 2, 6));
        let bodies = halves.bodies();
        let mut body_of = vec![0; halves.node_count()];
        for (body, voxels) in bodies.iter().enumerate() {
            voxels.iter().flat_map(|&v| halves.corners_of(v)).for_each(|node| body_of[node] = body);
        }
        let skin = &halves.skin;
        assert_eq!(skin.outer, whole.skin.len());
        assert!(skin.len() > skin.outer + 6 * halves.cracks().len());
        assert!(skin.place[skin.outer..].iter().all(|&place| Vector::from(place).norm() < 6.0));
        for point in 0..skin.len_with_inner() {
            let bodies: Vec<usize> = skin.terms(point).map(|(node, _)| body_of[node]).collect();
            assert!(bodies.iter().all(|&body| body == bodies[0]), "point {point}: {bodies:?}");
            let weights: f64 = skin.terms(point).map(|(_, weight)| weight).sum();
            assert_relative_eq!(weights, 1.0, epsilon = 1e-12);
        }
        for point in 0..skin.len() {
            for axis in 0..3 {
                let place: f64 = skin.terms(point).map(|(n, w)| w * halves.node_offset(n)[axis]).sum();
                assert_relative_eq!(place, skin.place[point][axis], epsilon = 1e-12);
            }
        }
    }
}
