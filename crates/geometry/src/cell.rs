use crate::Vector;
use serde::{Deserialize, Serialize};

/// The box a bed lives in: it spans from the origin to `size`. Sides that are
/// not periodic are flat walls; the lower z side is the floor and the upper one
/// the lid.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Cell {
    /// Edge lengths (m); `size.z` is the height of the lid above the floor.
    pub size: Vector,
    /// Which directions repeat periodically.
    pub periodic: [bool; 3],
}

impl Cell {
    /// A representative element of a bed: periodic in x and y, with floor and lid.
    pub fn with_floor_and_lid(size: Vector) -> Self {
        Self { size, periodic: [true, true, false] }
    }

    /// A box that repeats in all three directions: the inside of an endless bed.
    pub fn periodic(size: Vector) -> Self {
        Self { size, periodic: [true; 3] }
    }

    /// Volume (m³).
    pub fn volume(&self) -> f64 {
        self.size.x * self.size.y * self.size.z
    }

    /// The vector from `from` to the nearest periodic image of `to` (m).
    #[inline]
    pub fn separation(&self, from: &Vector, to: &Vector) -> Vector {
        let mut d = to - from;
        for axis in 0..3 {
            if self.periodic[axis] {
                d[axis] -= self.size[axis] * (d[axis] / self.size[axis]).round();
            }
        }
        d
    }

    /// Visits the vectors (m) from `from` to all periodic images of `to` that are within `reach`
    /// (m) along every axis.
    #[inline]
    pub fn for_each_image(&self, from: &Vector, to: &Vector, reach: f64, mut visit: impl FnMut(Vector)) {
        let apart = to - from;
        let repeats = |axis: usize| {
            if !self.periodic[axis] {
                return 0..=if apart[axis].abs() <= reach { 0 } else { -1 };
            }
            let (from, to) = (-reach - apart[axis], reach - apart[axis]);
            (from / self.size[axis]).ceil() as i64..=(to / self.size[axis]).floor() as i64
        };
        for x in repeats(0) {
            for y in repeats(1) {
                for z in repeats(2) {
                    visit(apart + Vector::new(x as f64, y as f64, z as f64).component_mul(&self.size));
                }
            }
        }
    }

    /// The image of `point` inside the box, along its periodic directions.
    #[inline]
    pub fn wrap(&self, point: &Vector) -> Vector {
        let mut p = *point;
        for axis in 0..3 {
            if self.periodic[axis] {
                p[axis] -= self.size[axis] * (p[axis] / self.size[axis]).floor();
            }
        }
        p
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    #[test]
    fn every_image_within_reach_is_visited_once() {
        let cell = Cell::with_floor_and_lid(Vector::new(4.0, 10.0, 3.0));
        let (from, to) = (Vector::new(0.5, 1.0, 1.0), Vector::new(2.4, 9.5, 2.0));
        let images = |reach: f64| {
            let mut seen = Vec::new();
            cell.for_each_image(&from, &to, reach, |apart| seen.push(apart));
            seen
        };
        assert!(images(1.0).is_empty());
        assert_eq!(images(2.0), [cell.separation(&from, &to)]);
        let both = images(2.2);
        assert_eq!(both.len(), 2);
        assert_relative_eq!(both[0], Vector::new(-2.1, -1.5, 1.0), epsilon = 1e-12);
        assert_relative_eq!(both[1], Vector::new(1.9, -1.5, 1.0), epsilon = 1e-12);
        // -6.1, -2.1, 1.9 and 5.9 along x, -1.5 and 8.5 along y; nothing beyond floor and lid.
        assert_eq!(images(9.8).len(), 4 * 2);
    }
}
