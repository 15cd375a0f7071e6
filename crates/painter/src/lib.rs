//! Draws spheres, rods, meshes and text on the CPU, the same pixels every time.

mod camera;
mod colour;
mod drawing;
mod image;
mod overlay;

pub use camera::{Camera, Pose};
pub use colour::Colour;
pub use drawing::{Ball, Drawing, Light, Mesh, Plane, Point, Rod};
pub use image::{Image, Size};
pub use overlay::{Align, Item, Overlay};
