use super::skin::{combination, combination_of, host};
use super::{Lattice, NodeIndex, corner_places, number_nodes};
use std::collections::HashMap;

/// Finds places of the dry ball in its lattice.
pub struct Locator {
    half: [f64; 3],
    voxel_at: HashMap<[u16; 3], u32>,
    node_at: NodeIndex,
    /// Corners of the voxels beside cracks.
    beside_cracks: HashMap<u32, [usize; 8]>,
}

/// A place in a bead's gel, which moves with it.
#[derive(Clone, Debug, PartialEq)]
pub struct MaterialPoint {
    /// The voxel that carries the place.
    pub voxel: u32,
    /// Nodes and weights whose sum is where the place is.
    pub nodes: Vec<(u32, f32)>,
    /// Voxels and weights whose sum is the value there of a field known in each voxel:
    /// linear between voxel centres, level beyond the outermost.
    pub values: Vec<(u32, f32)>,
}

impl Locator {
    /// A locator for a lattice.
    pub fn new(lattice: &Lattice) -> Self {
        Self {
            half: lattice.shape.half(),
            voxel_at: lattice.voxels.iter().copied().zip(0..).collect(),
            node_at: number_nodes(&lattice.voxels).1,
            beside_cracks: lattice.corners_beside_cracks(),
        }
    }

    /// The material point at a place relative to the ball's centre (voxel edges), in the
    /// ball or just outside.
    pub fn find(&self, place: [f64; 3]) -> MaterialPoint {
        let place: [f64; 3] = std::array::from_fn(|axis| place[axis] + self.half[axis]);
        let around = place.map(|c| c as u16);
        let within = place.iter().all(|c| *c >= 0.0) && self.voxel_at.contains_key(&around);
        let voxel = if within { around } else { host(place, |voxel| self.voxel_at.contains_key(voxel)) };
        let number = self.voxel_at[&voxel];
        let nodes = match self.beside_cracks.get(&number) {
            None => combination(place, voxel, &self.node_at),
            Some(&corners) => {
                let local = std::array::from_fn(|axis| place[axis] - f64::from(voxel[axis]));
                combination_of(local, corners, |_, _, _| None)
            }
        };
        MaterialPoint {
            voxel: number,
            nodes: nodes.into_iter().map(|(node, weight)| (node as u32, weight as f32)).collect(),
            values: self.values(place, voxel),
        }
    }

    /// The material point at a place, carried by the voxel with its centre at `voxel` (both
    /// relative to the ball's centre, in voxel edges) alone, with that voxel's own values: for
    /// the two sides of a crack.
    ///
    /// # Panics
    /// When there is no such voxel.
    pub fn find_in(&self, voxel: [f64; 3], place: [f64; 3]) -> MaterialPoint {
        let low: [u16; 3] = std::array::from_fn(|axis| (voxel[axis] + self.half[axis] - 0.5).round() as u16);
        let number = self.voxel_at[&low];
        let corners = self.beside_cracks.get(&number).copied();
        let corners = corners.unwrap_or_else(|| corner_places(&low).map(|corner| self.node_at[&corner]));
        let local: [f64; 3] =
            std::array::from_fn(|axis| place[axis] + self.half[axis] - f64::from(low[axis]));
        let weight = |corner: usize| {
            let along = |axis: usize| if corner >> axis & 1 == 1 { local[axis] } else { 1.0 - local[axis] };
            along(0) * along(1) * along(2)
        };
        let nodes = corners.iter().enumerate().map(|(corner, &node)| (node as u32, weight(corner) as f32));
        MaterialPoint { voxel: number, nodes: nodes.collect(), values: vec![(number, 1.0)] }
    }

    fn values(&self, place: [f64; 3], host: [u16; 3]) -> Vec<(u32, f32)> {
        let low = place.map(|c| (c - 0.5).floor());
        let mut values: Vec<(u32, f32)> = Vec::with_capacity(8);
        for corner in 0..8 {
            let mut weight = 1.0;
            let mut voxel = [0; 3];
            for axis in 0..3 {
                let along = place[axis] - 0.5 - low[axis];
                let high = corner >> axis & 1 == 1;
                weight *= if high { along } else { 1.0 - along };
                // A place beyond the grid has no voxel; the cast saturates to one that is not kept.
                voxel[axis] = if low[axis] + f64::from(u8::from(high)) < 0.0 {
                    u16::MAX
                } else {
                    (low[axis] + f64::from(u8::from(high))) as u16
                };
            }
            if let Some(&voxel) = self.voxel_at.get(&voxel)
                && weight > 0.0
            {
                values.push((voxel, weight as f32));
            }
        }
        let total: f32 = values.iter().map(|(_, weight)| weight).sum();
        if total < 1e-3 {
            return vec![(self.voxel_at[&host], 1.0)];
        }
        values.iter_mut().for_each(|(_, weight)| *weight /= total);
        values
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    #[test]
    fn a_point_is_where_it_was_sought_and_takes_linear_fields_exactly() {
        let lattice = Lattice::new(12);
        let locator = Locator::new(&lattice);
        for place in [[0.0; 3], [1.3, -2.2, 0.7], [0.0, 0.0, 5.95], [3.4, 3.4, 3.4]] {
            let point = locator.find(place);
            for axis in 0..3 {
                let there: f64 = (point.nodes.iter())
                    .map(|&(node, weight)| f64::from(weight) * lattice.node_offset(node as usize)[axis])
                    .sum();
                assert_relative_eq!(there, place[axis], epsilon = 1e-5);
            }
            if place.iter().map(|c| c * c).sum::<f64>() < 16.0 {
                let value: f64 = (point.values.iter())
                    .map(|&(voxel, weight)| f64::from(weight) * lattice.voxel_offset(voxel as usize)[0])
                    .sum();
                assert_relative_eq!(value, place[0], epsilon = 1e-5);
            }
        }
    }
}
