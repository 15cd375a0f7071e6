mod ball;
mod bins;
mod mesh;
mod rod;
mod row;
mod scene;
mod tile;
mod view;

use crate::{Camera, Drawing, Image};
use rayon::prelude::*;
use scene::Scene;
use tile::Tile;

/// How carefully a picture is drawn.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Quality {
    /// Samples per pixel along each axis, 1 or 2 (other numbers are taken as the nearer of these).
    pub samples: u32,
    /// Whether lit things get a thin darker line where something much farther lies beside them.
    pub outlines: bool,
}

impl Default for Quality {
    fn default() -> Self {
        Self { samples: 2, outlines: true }
    }
}

/// Draws a drawing as a camera sees it, the same bytes on any number of threads.
///
/// Opaque things hide one another exactly; ghosts and other see-through things are laid over
/// them from back to front and hide nothing. What is not finite or lies behind the eye is
/// left out.
pub fn paint(drawing: &Drawing, camera: &Camera, quality: Quality) -> Image {
    let mut image = Image::new(camera.size, drawing.background);
    let samples = quality.samples.clamp(1, 2) as usize;
    let scene = Scene::new(drawing, camera, samples);
    let patches: Vec<Vec<u8>> = (0..scene.grid.count())
        .into_par_iter()
        .map_init(Tile::default, |tile, place| {
            pulp::Arch::new().dispatch(
                #[inline(always)]
                || {
                    tile.start(&scene, place);
                    scene.paint_opaque(tile, place);
                    if quality.outlines {
                        tile.outline(&scene.view);
                    }
                    tile.develop();
                    scene.paint_veils(tile, place);
                    tile.average(samples)
                },
            )
        })
        .collect();
    let side = scene.grid.step() / samples;
    let (width, across) = (camera.size.width as usize, scene.grid.across());
    for (place, patch) in patches.iter().enumerate() {
        let (left, top) = (place % across * side, place / across * side);
        let columns = side.min(width - left);
        for (row, strip) in patch.chunks_exact(4 * side).enumerate().take(camera.size.height as usize - top) {
            let at = 4 * ((top + row) * width + left);
            image.pixels[at..at + 4 * columns].copy_from_slice(&strip[..4 * columns]);
        }
    }
    image
}
