use bedswell_geometry::Vector;

/// What a dry lattice fills, about its centre.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Shape {
    /// A ball of so many voxels across.
    Ball(usize),
    /// A rectangular block of so many voxels along x, y and z.
    Block([usize; 3]),
}

impl Shape {
    /// Voxels along x, y and z of the box that holds the shape.
    pub fn size(&self) -> [usize; 3] {
        match *self {
            Shape::Ball(across) => [across; 3],
            Shape::Block(size) => size,
        }
    }

    /// Half of the size (voxel edges).
    pub(crate) fn half(&self) -> [f64; 3] {
        self.size().map(|voxels| 0.5 * voxels as f64)
    }

    /// Distance of a place, seen from the centre, to the surface (voxel edges, positive
    /// inside), and its gradient.
    pub(crate) fn depth(&self, place: &Vector) -> (f64, Vector) {
        let half = self.half();
        match self {
            Shape::Ball(_) => {
                let radius = place.norm().max(f64::MIN_POSITIVE);
                (half[0] - radius, -place / radius)
            }
            Shape::Block(_) => {
                let outside = Vector::from_fn(|axis, _| (place[axis].abs() - half[axis]).max(0.0));
                let away = Vector::from_fn(|axis, _| place[axis].signum());
                let distance = outside.norm();
                if distance > 0.0 {
                    return (-distance, -outside.component_mul(&away) / distance);
                }
                let below = |axis: usize| half[axis] - place[axis].abs();
                let nearest =
                    (1..3).fold(0, |best, axis| if below(axis) < below(best) { axis } else { best });
                (below(nearest), Vector::ith(nearest, -away[nearest]))
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_depth_in_a_block_is_that_of_its_nearest_face_edge_or_corner() {
        let block = Shape::Block([4, 6, 8]);
        assert_eq!(block.depth(&Vector::new(-1.5, 0.0, 1.0)), (0.5, Vector::x()));
        assert_eq!(block.depth(&Vector::new(5.0, 7.0, 0.0)), (-5.0, Vector::new(-0.6, -0.8, 0.0)));
    }
}
