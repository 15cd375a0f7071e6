//! What cracks change in the model of a bead: its skin parts where they cut it, and their faces
//! are skin too.

use bedswell_gel::{Face, Lattice, Locator, MaterialPoint};

/// Bonds from one voxel to another by which gel still hangs together round a crack's tip.
const ROUND_A_TIP: usize = 3;

/// Which voxels hang together close by.
pub(crate) struct Bonded {
    neighbours: Vec<Vec<u32>>,
    is_torn: bool,
}

impl Bonded {
    pub(crate) fn new(lattice: &Lattice) -> Self {
        let is_torn = lattice.ruptured().next().is_some();
        let mut neighbours = vec![Vec::new(); if is_torn { lattice.voxel_count() } else { 0 }];
        if is_torn {
            for (low, high, _) in lattice.bonds() {
                neighbours[low].push(high as u32);
                neighbours[high].push(low as u32);
            }
        }
        Self { neighbours, is_torn }
    }

    /// Whether a few intact bonds lead from one voxel to another.
    pub(crate) fn hang_together(&self, from: u32, to: u32) -> bool {
        self.within(from, to, ROUND_A_TIP)
    }

    fn within(&self, from: u32, to: u32, bonds: usize) -> bool {
        !self.is_torn
            || from == to
            || (bonds > 0
                && self.neighbours[from as usize].iter().any(|&next| self.within(next, to, bonds - 1)))
    }
}

/// Points and triangles of the faces of all cracks, seen anticlockwise from outside the gel;
/// points are numbered from `first` on.
pub(crate) fn crack_faces(
    lattice: &Lattice,
    locator: &Locator,
    first: u32,
) -> (Vec<MaterialPoint>, Vec<[u32; 3]>) {
    let half = 0.5 * lattice.across() as f64;
    let (mut points, mut triangles) = (Vec::new(), Vec::new());
    for Face { low, axis } in lattice.ruptured() {
        let axis = usize::from(axis);
        let (next, last) = ((axis + 1) % 3, (axis + 2) % 3);
        let centre = lattice.voxel_offset(low as usize);
        let mut above = centre;
        above[axis] += 1.0;
        let plane = centre[axis] + 0.5;
        // Corners of cut voxels lie outside the ball: they are drawn in along the plane.
        let reach = (half * half - plane * plane).max(0.0).sqrt();
        let corner = |[a, b]: [f64; 2]| {
            let (mut a, mut b) = (centre[next] + a, centre[last] + b);
            let out = a.hypot(b);
            if out > reach {
                (a, b) = (a * reach / out, b * reach / out);
            }
            let mut place = [0.0; 3];
            (place[axis], place[next], place[last]) = (plane, a, b);
            place
        };
        let corners = [[-0.5, -0.5], [0.5, -0.5], [0.5, 0.5], [-0.5, 0.5]].map(corner);
        for (voxel, is_low) in [(centre, true), (above, false)] {
            let start = first + points.len() as u32;
            points.extend(corners.iter().map(|&place| locator.find_in(voxel, place)));
            let [a, b, c, d] = [0, 1, 2, 3].map(|corner| start + corner);
            // The low side looks up along the axis.
            triangles.extend(if is_low { [[a, b, c], [a, c, d]] } else { [[a, c, b], [a, d, c]] });
        }
    }
    (points, triangles)
}
