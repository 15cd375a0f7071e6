//! How much of a voxel's face lies in the gel.

use super::{Lattice, Shape};

/// Strips of the quadrature over a face.
const STRIPS: usize = 32;

impl Lattice {
    /// Share of the high face of a voxel along `axis` that lies inside the dry shape.
    pub(crate) fn face_area(&self, voxel: usize, axis: usize) -> f64 {
        match self.shape() {
            Shape::Block(_) => 1.0,
            Shape::Ball(across) => {
                let centre = self.voxel_offset(voxel);
                let (next, last) = ((axis + 1) % 3, (axis + 2) % 3);
                let half = 0.5 * across as f64;
                let square = half * half - (centre[axis] + 0.5).powi(2);
                in_disc([centre[next] - 0.5, centre[last] - 0.5], square)
            }
        }
    }
}

/// Area of the unit square from a corner that lies within a disc about the origin, whose
/// radius squared is given: exact along one side, by midpoints along the other.
fn in_disc([x, y]: [f64; 2], radius_squared: f64) -> f64 {
    let strip = |index: usize| {
        let across = x + (index as f64 + 0.5) / STRIPS as f64;
        let half = (radius_squared - across * across).max(0.0).sqrt();
        (half.min(y + 1.0) - (-half).max(y)).max(0.0)
    };
    (0..STRIPS).map(strip).sum::<f64>() / STRIPS as f64
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn squares_of_a_grid_cover_a_disc_once() {
        let grid = || (-3..3).map(f64::from);
        let covered: f64 = grid().flat_map(|x| grid().map(move |y| in_disc([x, y], 6.25))).sum();
        assert!((covered / (std::f64::consts::PI * 6.25) - 1.0).abs() < 1e-3, "{covered}");
    }
}
