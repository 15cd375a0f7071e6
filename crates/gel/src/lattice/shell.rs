//! The voxels that were left out as slivers, as far as places in space are concerned:
//! with them the lattice's map covers the whole ball, once.

use super::{CutCell, NodeIndex, Shape, corner_places};
use bedswell_geometry::Vector;
use std::collections::HashMap;

/// Slivers and the corners of theirs that are not nodes.
#[derive(Clone, Debug, Default)]
pub(super) struct Shell {
    /// Corners of each sliver, x fastest: a node, or beyond those a corner of the shell.
    pub(super) slivers: Vec<[u32; 8]>,
    /// Place of each sliver on the grid.
    pub(super) places: Vec<[u16; 3]>,
    /// Corners of the shell, as nodes and weights whose sum is 1.
    pub(super) corners: Vec<Vec<(u32, f64)>>,
}

impl Shell {
    pub(super) fn new(slivers: &[[u16; 3]], node_at: &NodeIndex) -> Self {
        let mut shell = Self::default();
        let mut known: HashMap<[u16; 3], u32> = HashMap::new();
        for place in slivers {
            let corners = corner_places(place).map(|corner| match node_at.get(&corner) {
                Some(&node) => Some(node as u32),
                None => known.get(&corner).copied().or_else(|| {
                    let terms = extrapolated(corner, node_at)?;
                    let number = (node_at.len() + shell.corners.len()) as u32;
                    shell.corners.push(terms);
                    known.insert(corner, number);
                    Some(number)
                }),
            });
            if corners.iter().all(Option::is_some) {
                shell.slivers.push(corners.map(Option::unwrap_or_default));
                shell.places.push(*place);
            }
        }
        shell
    }
}

/// A corner as the mean of straight continuations of the rows of nodes that end next to
/// it; `None` where there are none.
fn extrapolated(corner: [u16; 3], node_at: &NodeIndex) -> Option<Vec<(u32, f64)>> {
    let along = |axis: usize, by: i32| {
        let mut place = corner;
        place[axis] = u16::try_from(i32::from(corner[axis]) + by).ok()?;
        node_at.get(&place).map(|&node| node as u32)
    };
    let rows: Vec<(u32, u32)> = (0..3)
        .flat_map(|axis| [-1, 1].map(|step| Some((along(axis, step)?, along(axis, 2 * step)?))))
        .flatten()
        .collect();
    let share = 1.0 / rows.len() as f64;
    let terms = rows.iter().flat_map(|&(near, far)| [(near, 2.0 * share), (far, -share)]).collect();
    (!rows.is_empty()).then_some(terms)
}

/// The voxels that reach into the shape and are not kept, in order.
pub(super) fn slivers(shape: Shape, kept: &HashMap<[u16; 3], CutCell>) -> Vec<[u16; 3]> {
    let half = shape.half();
    let mut slivers = Vec::new();
    super::for_each_place(shape.size(), |place| {
        let nearest = Vector::from_fn(|axis, _| {
            let low = f64::from(place[axis]) - half[axis];
            if low.abs() < (low + 1.0).abs() { low } else { low + 1.0 }
        });
        if !kept.contains_key(&place) && shape.depth(&nearest).0 > 0.0 {
            slivers.push(place);
        }
    });
    slivers
}
