//! The vocabulary shared by the engines: vectors, spheres, the box a bed lives
//! in, its close pairs of spheres, and seeded random streams. SI units throughout.

mod cell;
mod neighbours;
mod random;
mod sphere;

pub use cell::Cell;
pub use neighbours::{ClosePair, close_pairs, offset, visit_close_points};
pub use random::{Stream, stream};
pub use sphere::{Sphere, volume_of_radius};

/// A point, displacement or force in three dimensions (m or N).
pub type Vector = nalgebra::Vector3<f64>;
/// A second-order tensor in three dimensions.
pub type Matrix = nalgebra::Matrix3<f64>;
