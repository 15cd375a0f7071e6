use super::{CutCell, NodeIndex, Shape, corner_places};
use bedswell_geometry::Vector;
use std::collections::HashMap;
use std::f64::consts::{FRAC_PI_2, PI};

/// Distance of neighbouring skin points (voxel edges).
const SPACING: f64 = 0.4;

/// Places on the face of a ruptured bond where its two sides may meet.
pub(crate) const OPENINGS: usize = 4;

/// Inner points lie at least this deep below the dry surface (voxel edges).
pub(super) const INNER_DEPTH: f64 = 0.75;

/// Share of the second differences that is added to the trilinear positions.
///
/// A trilinear voxel keeps the dry curvature of the skin inside it and meets a flat
/// or hollow counterface at its middle first, which biases contact forces by +1 to
/// +3 % at 16 to 32 across; the full second differences overshoot to -2 to -7 %,
/// because the voxels' own error has the other sign. With this share the forces of
/// the reference scenes (finite elements, see the tests) err both ways.
const FLATTENING: f64 = 0.2;

/// A skin point's way over that of the nodes that carry it, at most: the sum of the
/// magnitudes of its weights.
pub(crate) const POINT_WAY: f64 = 1.8;

/// Two faces that a crack has parted.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Facing {
    /// Nodes of the low and of the high voxel's face, each turned about the axis.
    pub(crate) below: [u32; 4],
    pub(crate) above: [u32; 4],
    /// Share of the face that is gel.
    pub(crate) share: f64,
}

/// Contact points on the true surface of the dry shape, each a fixed combination of
/// node positions. Points inside the gel follow them: where a grain that is small
/// against the voxels pushes the skin's points aside, they keep it out.
#[derive(Clone, Debug)]
pub(crate) struct Skin {
    /// Where each point is when dry, from the shape's centre (voxel edges).
    pub(crate) place: Vec<[f64; 3]>,
    /// Dry area of every point (voxel edges squared).
    pub(crate) area: f64,
    /// The voxel that carries each point.
    pub(crate) host: Vec<u32>,
    /// Points on the dry shape's own surface; those on the faces of cracks come after them.
    pub(crate) outer: usize,
    /// Points on the skin and inside; then come the openings of cracks, then the nodes.
    with_inner: usize,
    /// The faces of each crack.
    pub(crate) facing: Vec<Facing>,
    /// Where the terms of each point begin.
    start: Vec<u32>,
    node: Vec<u32>,
    weight: Vec<f64>,
}

impl Skin {
    pub(super) fn new(
        shape: Shape,
        cells: &HashMap<[u16; 3], CutCell>,
        voxel_at: &HashMap<[u16; 3], u32>,
        node_at: &NodeIndex,
    ) -> Self {
        let half = shape.half();
        let (mut places, area) = match shape {
            Shape::Ball(across) => ball_points(across),
            Shape::Block(size) => block_points(size),
        };
        if let Shape::Block(size) = shape {
            places.retain(|place| {
                let inside = |axis: usize| ((place[axis] + half[axis]) as usize).min(size[axis] - 1) as u16;
                cells.contains_key(&[inside(0), inside(1), inside(2)])
            });
        }
        let mut skin = Self::empty(area);
        skin.outer = places.len();
        skin.place.clone_from(&places);
        for place in places {
            let place = std::array::from_fn(|axis| place[axis] + half[axis]);
            let voxel = host(place, |voxel| cells.contains_key(voxel));
            skin.host.push(voxel_at[&voxel]);
            skin.push(combination(place, voxel, node_at));
        }
        let deep = |place: [f64; 3]| is_deep(shape, place);
        let mut nodes: Vec<_> = node_at.iter().filter(|(place, _)| deep(place.map(f64::from))).collect();
        nodes.sort_unstable_by_key(|(_, node)| **node);
        nodes.into_iter().for_each(|(_, &node)| skin.push([(node, 1.0)]));
        let mut voxels: Vec<_> =
            cells.keys().filter(|place| deep(place.map(|c| f64::from(c) + 0.5))).collect();
        voxels.sort_unstable_by_key(|&&[x, y, z]| (z, y, x));
        for voxel in voxels {
            skin.push(corner_places(voxel).map(|corner| (node_at[&corner], 0.125)));
        }
        skin.end_inner();
        (0..node_at.len()).for_each(|node| skin.push([(node, 1.0)]));
        skin
    }

    pub(super) fn empty(area: f64) -> Self {
        Self {
            place: Vec::new(),
            area,
            host: Vec::new(),
            outer: 0,
            with_inner: 0,
            facing: Vec::new(),
            start: vec![0],
            node: Vec::new(),
            weight: Vec::new(),
        }
    }

    pub(super) fn push(&mut self, terms: impl IntoIterator<Item = (usize, f64)>) {
        for (node, weight) in terms {
            self.node.push(node as u32);
            self.weight.push(weight);
        }
        self.start.push(self.node.len() as u32);
    }

    pub(super) fn end_inner(&mut self) {
        self.with_inner = self.start.len() - 1;
    }

    /// Number of points on the skin.
    pub(crate) fn len(&self) -> usize {
        self.place.len()
    }

    /// Number of points on the skin and inside.
    pub(crate) fn len_with_inner(&self) -> usize {
        self.with_inner
    }

    /// The point that stands for the k-th opening of a crack: its place is the way from the
    /// low to the high face.
    pub(crate) fn opening(&self, crack: usize, k: usize) -> usize {
        self.with_inner + OPENINGS * crack + k
    }

    /// The point that is a node.
    pub(crate) fn node_point(&self, node: usize) -> usize {
        self.opening(self.facing.len(), 0) + node
    }

    /// Distance of two points when dry (voxel edges).
    pub(crate) fn apart_when_dry(&self, a: usize, b: usize) -> f64 {
        (Vector::from(self.place[a]) - Vector::from(self.place[b])).norm()
    }

    /// Nodes and weights of a point, on the skin or inside.
    #[inline]
    pub(crate) fn terms(&self, point: usize) -> impl Iterator<Item = (usize, f64)> + '_ {
        let range = self.start[point] as usize..self.start[point + 1] as usize;
        self.node[range.clone()]
            .iter()
            .zip(&self.weight[range])
            .map(|(&node, &weight)| (node as usize, weight))
    }
}

/// Whether a place on the grid lies deep enough for inner points.
pub(super) fn is_deep(shape: Shape, place: [f64; 3]) -> bool {
    shape.depth(&(Vector::from(place) - Vector::from(shape.half()))).0 > INNER_DEPTH
}

/// Points on a ball and the area that each stands for.
fn ball_points(across: usize) -> (Vec<[f64; 3]>, f64) {
    let half = 0.5 * across as f64;
    let directions = directions(across);
    let area = 4.0 * PI * half * half / directions.len() as f64;
    (directions.iter().map(|direction| direction.map(|c| half * c)).collect(), area)
}

/// Points on a block, in the middles of the quarters of its voxels' faces, and the area
/// that each stands for. A uniform pressure so falls on the nodes of faces, edges and
/// corners in the shares of the voxels' own stresses.
fn block_points(size: [usize; 3]) -> (Vec<[f64; 3]>, f64) {
    let half = size.map(|voxels| 0.5 * voxels as f64);
    let quarter = |index: usize| 0.5 * index as f64 + 0.25;
    let mut points = Vec::new();
    for axis in 0..3 {
        let (next, last) = ((axis + 1) % 3, (axis + 2) % 3);
        for side in [-1.0, 1.0] {
            for i in 0..2 * size[next] {
                for j in 0..2 * size[last] {
                    let mut point = [side * half[axis]; 3];
                    (point[next], point[last]) = (quarter(i) - half[next], quarter(j) - half[last]);
                    points.push(point);
                }
            }
        }
    }
    (points, 0.25)
}

/// Directions that share the sphere in equal areas, the same in every octant.
///
/// Each octant's triangle u + v < 1 maps onto the sphere without changing areas by
/// z = 1 - r², longitude = (π/2) v/r, with r = u + v (an equal-area octahedral map,
/// from memory).
fn directions(across: usize) -> Vec<[f64; 3]> {
    let rows = (across as f64 * (PI / 8.0).sqrt() / SPACING).ceil() as usize;
    let mut octant = Vec::with_capacity(rows * rows);
    for i in 0..rows {
        for j in 0..rows - i {
            octant.push((i as f64 + 1.0 / 3.0, j as f64 + 1.0 / 3.0));
            if i + j + 1 < rows {
                octant.push((i as f64 + 2.0 / 3.0, j as f64 + 2.0 / 3.0));
            }
        }
    }
    let onto_sphere = |(i, j): (f64, f64)| {
        let r = (i + j) / rows as f64;
        let longitude = FRAC_PI_2 * j / (i + j);
        let across = r * (2.0 - r * r).sqrt();
        [across * longitude.cos(), across * longitude.sin(), 1.0 - r * r]
    };
    let octant: Vec<_> = octant.into_iter().map(onto_sphere).collect();
    (0..8)
        .flat_map(|image: u8| {
            octant.iter().map(move |p| {
                std::array::from_fn(|axis| if image >> axis & 1 == 1 { -p[axis] } else { p[axis] })
            })
        })
        .collect()
}

/// The kept voxel that carries a point: the one that contains it, or else the nearest.
pub(super) fn host(place: [f64; 3], is_kept: impl Fn(&[u16; 3]) -> bool) -> [u16; 3] {
    let mut best = ([0; 3], f64::INFINITY);
    let around = place.map(|c| c.floor() as i32);
    for k in 0..125 {
        let candidate = [around[0] + k % 5 - 2, around[1] + k / 5 % 5 - 2, around[2] + k / 25 - 2];
        let Ok(voxel) =
            <[u16; 3]>::try_from(candidate.map(|c| u16::try_from(c).unwrap_or(u16::MAX)).as_slice())
        else {
            continue;
        };
        if !is_kept(&voxel) {
            continue;
        }
        let distance: f64 = (0..3)
            .map(|axis| {
                let local = place[axis] - f64::from(voxel[axis]);
                (local - local.clamp(0.0, 1.0)).powi(2)
            })
            .sum();
        if distance < best.1 {
            best = (voxel, distance);
        }
    }
    best.0
}

/// The nodes and weights that give a point in (or just outside) a voxel.
pub(super) fn combination(place: [f64; 3], voxel: [u16; 3], node_at: &NodeIndex) -> Vec<(usize, f64)> {
    let corners = corner_places(&voxel);
    let beyond = |corner: usize, axis: usize, up: bool| {
        let mut there = corners[corner];
        there[axis] = u16::try_from(i32::from(there[axis]) + if up { 2 } else { -1 }).ok()?;
        node_at.get(&there).copied()
    };
    let local = std::array::from_fn(|axis| place[axis] - f64::from(voxel[axis]));
    combination_of(local, corners.map(|corner| node_at[&corner]), beyond)
}

/// The nodes and weights of a place in a voxel with these corners: trilinear, less
/// ½ ξ(1 - ξ) times a share of the second difference along each axis. `beyond` knows the
/// nodes that follow an edge, seen from its low corner, along its axis, downwards and up.
pub(super) fn combination_of(
    local: [f64; 3],
    corners: [usize; 8],
    beyond: impl Fn(usize, usize, bool) -> Option<usize>,
) -> Vec<(usize, f64)> {
    let mut terms: Vec<(usize, f64)> = Vec::with_capacity(32);
    let mut add = |node: usize, weight: f64| match terms.iter_mut().find(|term| term.0 == node) {
        Some(term) => term.1 += weight,
        None => terms.push((node, weight)),
    };
    let shape =
        |corner: usize, axis: usize| if corner >> axis & 1 == 1 { local[axis] } else { 1.0 - local[axis] };
    for (corner, &node) in corners.iter().enumerate() {
        add(node, shape(corner, 0) * shape(corner, 1) * shape(corner, 2));
    }
    for axis in 0..3 {
        let bubble = FLATTENING * 0.5 * local[axis] * (1.0 - local[axis]);
        for corner in (0..8).filter(|corner| corner >> axis & 1 == 0) {
            let weight = bubble * shape(corner, (axis + 1) % 3) * shape(corner, (axis + 2) % 3);
            let [low, high] = [corner, corner | 1 << axis].map(|corner| corners[corner]);
            let before = beyond(corner, axis, false);
            let after = beyond(corner, axis, true);
            // Second differences centred on the low and on the high node.
            let centred: Vec<[usize; 3]> =
                before.map(|n| [n, low, high]).into_iter().chain(after.map(|n| [low, high, n])).collect();
            for [first, middle, last] in &centred {
                let weight = weight / centred.len() as f64;
                add(*first, -weight);
                add(*middle, 2.0 * weight);
                add(*last, -weight);
            }
        }
    }
    terms
}

#[cfg(test)]
mod tests {
    use super::super::Lattice;
    use approx::assert_relative_eq;

    #[test]
    fn skin_points_lie_on_the_sphere_and_move_with_any_affine_deformation() {
        let lattice = Lattice::new(16);
        for point in 0..lattice.skin.len() {
            let mut place = [0.0; 3];
            for (node, weight) in lattice.skin.terms(point) {
                let offset = lattice.node_offset(node);
                for axis in 0..3 {
                    place[axis] += weight * (offset[axis] + 1.0);
                }
            }
            for axis in 0..3 {
                let there = lattice.skin.place[point][axis] + 1.0;
                assert_relative_eq!(place[axis], there, epsilon = 1e-12);
            }
        }
    }
}
