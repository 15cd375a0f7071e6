use bedswell_painter::{Camera, Drawing, Image, Quality, paint};
use thiserror::Error;

/// Draws what is in space; words and legends come on top.
pub trait Renderer {
    /// The picture of a drawing.
    ///
    /// # Errors
    /// What the renderer says when it cannot draw.
    fn render(&mut self, drawing: &Drawing, camera: &Camera) -> Result<Image, RenderError>;
}

/// Why nothing was drawn.
#[derive(Debug, Error)]
#[error("cannot draw: {0}")]
pub struct RenderError(pub String);

/// Draws on the CPU, four samples per pixel: the same bytes on any machine with the same
/// arithmetic and with any number of threads.
#[derive(Clone, Copy, Debug, Default)]
pub struct Painter;

impl Renderer for Painter {
    fn render(&mut self, drawing: &Drawing, camera: &Camera) -> Result<Image, RenderError> {
        Ok(paint(drawing, camera, Quality { samples: 2, outlines: true }))
    }
}
