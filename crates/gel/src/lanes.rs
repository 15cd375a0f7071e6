use std::ops::{Add, AddAssign, Mul, Neg, Sub};

/// Voxels that are worked on together.
pub(crate) const WIDTH: usize = 8;

/// One number for each of `WIDTH` neighbouring voxels of a row. The operations are
/// plain loops that the compiler turns into vector instructions.
#[derive(Clone, Copy, Debug)]
#[repr(align(64))]
pub(crate) struct Lanes(pub(crate) [f64; WIDTH]);

impl Lanes {
    #[inline(always)]
    pub(crate) fn splat(value: f64) -> Self {
        Self([value; WIDTH])
    }

    /// The values of a slice from `at` on.
    #[inline(always)]
    pub(crate) fn load(slice: &[f64], at: usize) -> Self {
        let mut lanes = [0.0; WIDTH];
        lanes.copy_from_slice(&slice[at..at + WIDTH]);
        Self(lanes)
    }

    /// Writes the values into a slice from `at` on.
    #[inline(always)]
    pub(crate) fn store(&self, slice: &mut [f64], at: usize) {
        slice[at..at + WIDTH].copy_from_slice(&self.0);
    }

    /// Adds the values to a slice from `at` on.
    #[inline(always)]
    pub(crate) fn add_to(&self, slice: &mut [f64], at: usize) {
        let sum = Self::load(slice, at) + *self;
        sum.store(slice, at);
    }
}

/// Adds `near` to a slice from `at` on, and `far` from one further on: what neighbouring
/// voxels do to the nodes between them, in one pass over the slice.
#[inline(always)]
pub(crate) fn add_pairs(slice: &mut [f64], at: usize, near: Lanes, far: Lanes) {
    let slice = &mut slice[at..=at + WIDTH];
    let mut sum = [0.0; WIDTH];
    sum.copy_from_slice(&slice[..WIDTH]);
    for lane in 0..WIDTH {
        sum[lane] += near.0[lane];
    }
    for lane in 1..WIDTH {
        sum[lane] += far.0[lane - 1];
    }
    slice[..WIDTH].copy_from_slice(&sum);
    slice[WIDTH] += far.0[WIDTH - 1];
}

macro_rules! elementwise {
    ($trait:ident, $method:ident, $operator:tt) => {
        impl $trait for Lanes {
            type Output = Lanes;
            #[inline(always)]
            fn $method(self, other: Lanes) -> Lanes {
                let mut result = [0.0; WIDTH];
                for lane in 0..WIDTH {
                    result[lane] = self.0[lane] $operator other.0[lane];
                }
                Lanes(result)
            }
        }
    };
}

elementwise!(Add, add, +);
elementwise!(Sub, sub, -);
elementwise!(Mul, mul, *);

impl Neg for Lanes {
    type Output = Lanes;
    #[inline(always)]
    fn neg(self) -> Lanes {
        Lanes::splat(0.0) - self
    }
}

impl AddAssign for Lanes {
    #[inline(always)]
    fn add_assign(&mut self, other: Lanes) {
        *self = *self + other;
    }
}

/// A vector in each lane.
pub(crate) type Vector = [Lanes; 3];

#[inline(always)]
pub(crate) fn add(a: Vector, b: Vector) -> Vector {
    [a[0] + b[0], a[1] + b[1], a[2] + b[2]]
}

#[inline(always)]
pub(crate) fn scale(a: Vector, by: Lanes) -> Vector {
    [a[0] * by, a[1] * by, a[2] * by]
}

#[inline(always)]
pub(crate) fn dot(a: Vector, b: Vector) -> Lanes {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

#[inline(always)]
pub(crate) fn cross(a: Vector, b: Vector) -> Vector {
    [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
}
