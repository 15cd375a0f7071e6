//! Draws spheres, rods, meshes and text on the CPU, the same pixels every time.
//!
//! [`paint`] draws a [`Drawing`] seen by a [`Camera`] into an [`Image`]: the picture is cut
//! into tiles, everything is sorted to the tiles that it touches, and each tile is painted
//! on its own, so that the bytes do not depend on the number of threads. [`paint_overlay`]
//! puts flat things on top, and [`encode_png`] makes a file of it.
//!
//! Light adds up and is averaged in linear light; colours go in and out as sRGB. What a
//! shader needs to draw the same picture is public: [`shade`], [`ghost_opacity`] and the
//! constants beside them.

mod camera;
mod colour;
mod drawing;
mod image;
mod light;
mod overlay;
mod overlay_paint;
mod paint;
mod png_file;
mod srgb;
mod text;

pub use camera::{Camera, Pose};
pub use colour::Colour;
pub use drawing::{Ball, Drawing, Light, Mesh, Plane, Point, Rod};
pub use image::{Image, Size};
pub use light::{AMBIENT, GHOST_MIDDLE, LIGHT, OUTLINE, SECTION, SECTION_RIM, ghost_opacity, shade};
pub use overlay::{Align, Item, Overlay};
pub use overlay_paint::paint_overlay;
pub use paint::{Quality, paint};
pub use png_file::encode_png;
pub use text::text_width;
