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

#[cfg(test)]
mod tests {
    use crate::model::BeadModel;
    use bedswell_gel::{Face, Lattice};

    /// A ball of 12 voxels across, cut through its middle.
    fn halves() -> BeadModel {
        let whole = Lattice::new(12);
        let middle = |&(low, _, axis): &(usize, usize, usize)| {
            axis == 2 && (whole.voxel_offset(low)[2] + 0.5).abs() < 1e-9
        };
        let face = |(low, _, axis): (usize, usize, usize)| Face { low: low as u32, axis: axis as u8 };
        let faces: Vec<Face> = whole.bonds().into_iter().filter(middle).map(face).collect();
        BeadModel::new(12, &faces)
    }

    #[test]
    fn both_faces_of_a_cut_are_skin_and_cover_the_mid_section() {
        let (model, whole) = (halves(), BeadModel::new(12, &[]));
        let first = whole.skin.len() as u32;
        let place = |point: u32| {
            let nodes = model.skin[point as usize].nodes.iter();
            nodes.fold([0.0; 3], |sum, &(node, weight)| {
                let at = model.lattice.node_offset(node as usize);
                [0, 1, 2].map(|axis| sum[axis] + f64::from(weight) * at[axis])
            })
        };
        let (mut up, mut down) = (0.0, 0.0);
        for triangle in model.triangles.iter().filter(|triangle| triangle[0] >= first) {
            let [a, b, c] = triangle.map(place);
            let twice = (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]);
            if twice > 0.0 { up += 0.5 * twice } else { down -= 0.5 * twice }
        }
        let section = std::f64::consts::PI * 36.0;
        assert!((up / section - 1.0).abs() < 0.05 && (up - down).abs() < 1e-6 * up, "{up} {down} {section}");
    }

    #[test]
    fn no_triangle_of_the_outer_skin_spans_a_cut() {
        let (model, whole) = (halves(), BeadModel::new(12, &[]));
        let side =
            |point: u32| model.lattice.voxel_offset(model.skin[point as usize].voxel as usize)[2] > 0.0;
        let outer: Vec<_> =
            model.triangles.iter().filter(|triangle| (triangle[0] as usize) < whole.skin.len()).collect();
        assert!(outer.len() < whole.triangles.len() && outer.len() > whole.triangles.len() * 9 / 10);
        assert!(outer.iter().all(|[a, b, c]| side(*a) == side(*b) && side(*b) == side(*c)));
        assert!(model.grid().cells.len() < whole.grid().cells.len());
    }
}
