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
