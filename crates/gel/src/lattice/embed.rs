//! Where in the gel a place in space is.

use super::Lattice;
use bedswell_geometry::{Matrix, Vector};

/// A place in a voxel, or in a sliver (numbered after the voxels): trilinear coordinates
/// from 0 to 1, beyond them outside the ball.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Embedded {
    pub(crate) voxel: u32,
    pub(crate) local: [f64; 3],
}

/// How a place lies to the surface of the gel it is in.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Depth {
    /// Distance to the dry surface (voxel edges), positive inside.
    pub(crate) depth: f64,
    /// Its gradient over the dry place.
    pub(crate) inward: Vector,
    /// Carries gradients over the dry place to gradients over the place (voxel edges per
    /// m): the inverse transpose of the deformation gradient.
    pub(crate) carry: Matrix,
}

impl Depth {
    /// Distance to the surface (m), positive inside, to first order.
    pub(crate) fn distance(&self) -> f64 {
        self.depth / (self.carry * self.inward).norm()
    }
}

/// Voxels walked through before a place counts as outside.
const LONGEST_WALK: usize = 32;
/// Newton steps for the trilinear coordinates within one voxel.
const NEWTON_STEPS: usize = 12;
/// The last of them is shorter than this (voxel edges): what it leaves is of its square.
const LAST_STEP: f64 = 1e-6;
/// How far outside the ball a place is still followed (voxel edges).
const BEYOND: f64 = 1.0;
/// How far a place may slide before contacts are looked for again (voxel edges).
const SLIDE: f64 = 0.5;
/// The map's gradient passes over from voxel to voxel within this distance of their face (voxel
/// edges).
pub(crate) const BLENDED: f64 = 0.1;
/// Accepted error of a place (voxel edges).
const ROUNDING: f64 = 1e-11;

impl Lattice {
    /// The place of the gel that lies at `place` (m), sought from a place near it,
    /// with the map's gradient (m per voxel edge); `None` where there is no gel.
    pub(crate) fn embed(
        &self,
        positions: &[f64],
        place: &Vector,
        from: Embedded,
    ) -> Option<(Embedded, Matrix)> {
        let mut at = from;
        for _ in 0..LONGEST_WALK {
            let corners = self.corner_positions(positions, at.voxel);
            let gradient = invert(&corners, place, &mut at.local)?;
            match self.way_out(&at) {
                Some((neighbour, axis, up)) => {
                    at.voxel = neighbour;
                    at.local[axis] = (at.local[axis] + if up { -1.0 } else { 1.0 }).clamp(0.0, 1.0);
                }
                None if at.local.iter().all(|c| (-BEYOND..=1.0 + BEYOND).contains(c)) => {
                    return Some((at, gradient));
                }
                None => return None,
            }
        }
        None
    }

    /// The map's gradient at a place (m per voxel edge), which is `gradient` in its own voxel,
    /// without the steps that it has at the faces: a surface has no kinks there. `None` away
    /// from faces, where it is the same.
    pub(crate) fn smooth_gradient(
        &self,
        positions: &[f64],
        at: &Embedded,
        gradient: &Matrix,
    ) -> Option<Matrix> {
        let across = at.local.map(|c| {
            let (face, inside) = if c < 0.5 { (0, c) } else { (1, 1.0 - c) };
            (face, (0.5 * (1.0 - inside.max(0.0) / BLENDED)).max(0.0))
        });
        if across.iter().all(|&(_, share)| share == 0.0) {
            return None;
        }
        let mut sum = Matrix::zeros();
        for crossed in 0..8_u32 {
            let (mut there, mut weight) = (*at, 1.0);
            for (axis, &(face, share)) in across.iter().enumerate() {
                if crossed >> axis & 1 == 0 {
                    weight *= 1.0 - share;
                    continue;
                }
                weight *= share;
                let neighbour = self.neighbours[there.voxel as usize][2 * axis + face];
                if neighbour != NO_VOXEL {
                    there.voxel = neighbour;
                    there.local[axis] += if face == 0 { 1.0 } else { -1.0 };
                }
            }
            if weight > 0.0 {
                let own = there.voxel == at.voxel;
                sum += weight
                    * if own {
                        *gradient
                    } else {
                        map(&self.corner_positions(positions, there.voxel), there.local).1
                    };
            }
        }
        Some(sum)
    }

    /// Where a skin point lies in the voxel that carries it.
    pub(crate) fn skin_point_in_voxel(&self, point: usize) -> Embedded {
        let voxel = self.skin.host[point];
        let half = self.shape.half();
        let low = self.voxels[voxel as usize];
        let place = self.skin.place[point];
        Embedded { voxel, local: std::array::from_fn(|axis| place[axis] + half[axis] - f64::from(low[axis])) }
    }

    /// How an embedded place lies to the surface of the gel.
    pub(crate) fn depth(&self, at: &Embedded, gradient: &Matrix) -> Option<Depth> {
        let low = self.place_of(at.voxel);
        let half = self.shape.half();
        let dry = Vector::from_fn(|axis, _| f64::from(low[axis]) + at.local[axis] - half[axis]);
        let (depth, inward) = self.shape.depth(&dry);
        Some(Depth { depth, inward, carry: gradient.try_inverse()?.transpose() })
    }

    /// Visits the nodes of an embedded place, with weights whose sum is 1.
    pub(crate) fn for_each_term(&self, at: &Embedded, mut visit: impl FnMut(usize, f64)) {
        let [x, y, z] = at.local;
        let share = |c: f64, high: bool| if high { c } else { 1.0 - c };
        for (corner, node) in self.covering_corners(at.voxel).into_iter().enumerate() {
            let weight = share(x, corner & 1 > 0) * share(y, corner & 2 > 0) * share(z, corner & 4 > 0);
            match node.checked_sub(self.nodes.len()) {
                None => visit(node, weight),
                Some(beyond) => {
                    self.shell.corners[beyond].iter().for_each(|&(n, w)| visit(n as usize, w * weight));
                }
            }
        }
    }

    /// These nodes and weights.
    pub(crate) fn embedded_terms(&self, at: &Embedded) -> Vec<(usize, f64)> {
        let mut terms = Vec::with_capacity(8);
        self.for_each_term(at, |node, weight| terms.push((node, weight)));
        terms
    }

    /// The nodes that an embedded place may come to lean on when it slides by a part of a
    /// voxel, with weights that bound theirs.
    pub(crate) fn possible_terms(&self, at: &Embedded) -> Vec<(usize, f64)> {
        let mut terms = self.embedded_terms(at);
        for axis in 0..3 {
            for up in [false, true] {
                let inside = if up { 1.0 - at.local[axis] } else { at.local[axis] };
                let neighbour = self.neighbours[at.voxel as usize][2 * axis + usize::from(up)];
                if inside < SLIDE && neighbour != NO_VOXEL {
                    let mut slid = Embedded { voxel: neighbour, ..*at };
                    slid.local[axis] = if up { SLIDE - inside } else { 1.0 - (SLIDE - inside) };
                    terms.extend(self.embedded_terms(&slid));
                }
            }
        }
        terms
    }

    /// The neighbour through the face that a place lies furthest beyond.
    fn way_out(&self, at: &Embedded) -> Option<(u32, usize, bool)> {
        let mut best = None;
        let mut furthest = ROUNDING;
        for axis in 0..3 {
            for up in [false, true] {
                let beyond = if up { at.local[axis] - 1.0 } else { -at.local[axis] };
                let neighbour = self.neighbours[at.voxel as usize][2 * axis + usize::from(up)];
                if beyond > furthest && neighbour != NO_VOXEL {
                    furthest = beyond;
                    best = Some((neighbour, axis, up));
                }
            }
        }
        best
    }

    /// Corners of a voxel or sliver, x fastest.
    fn covering_corners(&self, voxel: u32) -> [usize; 8] {
        match (voxel as usize).checked_sub(self.voxels.len()) {
            None => self.corners_of(voxel as usize),
            Some(sliver) => self.shell.slivers[sliver].map(|corner| corner as usize),
        }
    }

    fn place_of(&self, voxel: u32) -> [u16; 3] {
        match (voxel as usize).checked_sub(self.voxels.len()) {
            None => self.voxels[voxel as usize],
            Some(sliver) => self.shell.places[sliver],
        }
    }

    fn corner_positions(&self, positions: &[f64], voxel: u32) -> [Vector; 8] {
        let stride = positions.len() / 3;
        let place = |node: usize| {
            Vector::new(positions[node], positions[stride + node], positions[2 * stride + node])
        };
        self.covering_corners(voxel).map(|corner| match corner.checked_sub(self.nodes.len()) {
            None => place(corner),
            Some(beyond) => {
                self.shell.corners[beyond].iter().map(|&(node, weight)| place(node as usize) * weight).sum()
            }
        })
    }
}

/// Stands for a neighbour that is not there.
pub(super) const NO_VOXEL: u32 = u32::MAX;

/// The place (m) at trilinear coordinates, and the gradient there (m per voxel edge).
fn map(corners: &[Vector; 8], [x, y, z]: [f64; 3]) -> (Vector, Matrix) {
    // Along x, then y, then z.
    let ends: [Vector; 4] = std::array::from_fn(|k| corners[2 * k].lerp(&corners[2 * k + 1], x));
    let slopes: [Vector; 4] = std::array::from_fn(|k| corners[2 * k + 1] - corners[2 * k]);
    let (near, far) = (ends[0].lerp(&ends[1], y), ends[2].lerp(&ends[3], y));
    let along_x = slopes[0].lerp(&slopes[1], y).lerp(&slopes[2].lerp(&slopes[3], y), z);
    let along_y = (ends[1] - ends[0]).lerp(&(ends[3] - ends[2]), z);
    (near.lerp(&far, z), Matrix::from_columns(&[along_x, along_y, far - near]))
}

/// Finds the trilinear coordinates of a place, from those given; returns the gradient
/// there. `None` where the map cannot be inverted.
fn invert(corners: &[Vector; 8], place: &Vector, local: &mut [f64; 3]) -> Option<Matrix> {
    for step in 0..NEWTON_STEPS {
        let (found, gradient) = map(corners, *local);
        let way = gradient.try_inverse()? * (place - found);
        for axis in 0..3 {
            local[axis] = (local[axis] + way[axis].clamp(-1.0, 1.0)).clamp(-2.0, 3.0);
        }
        // A place far off has no coordinates here, but the way to it is known.
        let far = local.iter().any(|c| !(-1.0..=2.0).contains(c));
        if way.amax() < LAST_STEP || (far && step > 1) {
            return (gradient.determinant() > 0.0).then_some(gradient);
        }
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bead::Bead;
    use approx::assert_relative_eq;
    use std::sync::Arc;

    #[test]
    fn a_place_is_found_from_afar_in_a_distorted_bead() {
        let lattice = Arc::new(Lattice::new(12));
        let mut bead = Bead::new(Arc::clone(&lattice), 6.0, Vector::zeros(), 2.0);
        let stride = lattice.stride();
        for node in 0..lattice.node_count() {
            let [x, y, z] = lattice.node_offset(node);
            bead.positions[node] += 0.4 * (0.5 * y).sin();
            bead.positions[stride + node] += 0.05 * x * z;
        }
        let far = Embedded { voxel: 0, local: [0.5; 3] };
        for voxel in [lattice.voxel_count() / 2, lattice.voxel_count() / 3, 40] {
            let terms = lattice.embedded_terms(&Embedded { voxel: voxel as u32, local: [0.3, 0.6, 0.9] });
            let place: Vector = terms.iter().map(|&(node, weight)| bead.node(node) * weight).sum();
            let (at, _) = lattice.embed(&bead.positions, &place, far).expect("the place is in the gel");
            assert_eq!(at.voxel as usize, voxel);
            for (found, sought) in at.local.into_iter().zip([0.3, 0.6, 0.9]) {
                assert_relative_eq!(found, sought, epsilon = 1e-9);
            }
        }
    }

    #[test]
    fn the_smooth_gradient_has_no_steps_at_the_faces_of_voxels() {
        let lattice = Arc::new(Lattice::new(12));
        let mut bead = Bead::new(Arc::clone(&lattice), 6.0, Vector::zeros(), 2.0);
        for node in 0..lattice.node_count() {
            let [x, y, _] = lattice.node_offset(node);
            bead.positions[node] += 0.3 * (1.5 * x).sin() + 0.2 * (1.1 * y).cos();
        }
        let voxel = (lattice.voxel_count() / 2) as u32;
        let next = lattice.neighbours[voxel as usize][1];
        let gradients = |voxel: u32, local: [f64; 3]| {
            let at = Embedded { voxel, local };
            let own = map(&lattice.corner_positions(&bead.positions, voxel), local).1;
            (own, lattice.smooth_gradient(&bead.positions, &at, &own).unwrap_or(own))
        };
        for (y, z) in [(0.5, 0.3), (0.02, 0.4), (0.97, 0.01)] {
            let (before, smooth_before) = gradients(voxel, [1.0, y, z]);
            let (after, smooth_after) = gradients(next, [0.0, y, z]);
            assert!((before - after).norm() > 0.01);
            assert_relative_eq!(smooth_before, smooth_after, epsilon = 1e-12);
        }
        let (own, smooth) = gradients(voxel, [0.3, 0.5, 0.8]);
        assert_relative_eq!(own, smooth);
    }

    #[test]
    fn depth_of_a_uniformly_swollen_bead_is_that_of_a_sphere() {
        let lattice = Arc::new(Lattice::new(12));
        let bead = Bead::new(Arc::clone(&lattice), 6.0, Vector::zeros(), 3.0);
        let far = Embedded { voxel: 0, local: [0.5; 3] };
        for (place, depth) in
            [(Vector::new(17.5, 0.0, 0.0), 0.5), (Vector::new(9.0, 9.0, 9.0), 18.0 - 243_f64.sqrt())]
        {
            let (at, gradient) =
                lattice.embed(&bead.positions, &place, far).expect("the place is in the gel");
            let found = lattice.depth(&at, &gradient).expect("the map is regular");
            assert_relative_eq!(found.distance(), depth, epsilon = 1e-9);
            let inward = (found.carry * found.inward).normalize();
            assert_relative_eq!(inward, -place.normalize(), epsilon = 1e-9);
        }
        assert!(lattice.embed(&bead.positions, &Vector::new(30.0, 0.0, 0.0), far).is_none());
    }
}
