//! Drawings for other programs, as binary glTF 2.0.

mod document;
mod error;
mod geometry;
mod sphere;
mod write;

pub use error::GltfError;
pub use write::write_gltf;
