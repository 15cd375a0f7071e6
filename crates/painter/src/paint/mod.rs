mod ball;
mod bins;
mod mesh;
mod rod;
mod row;
mod scene;
mod tile;
mod view;

use crate::{Camera, Drawing, Image};
use pulp::{Arch, Simd, WithSimd};
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
    paint_with(Arch::new(), drawing, camera, quality)
}

fn paint_with(arch: Arch, drawing: &Drawing, camera: &Camera, quality: Quality) -> Image {
    let mut image = Image::new(camera.size, drawing.background);
    let samples = quality.samples.clamp(1, 2) as usize;
    let scene = Scene::new(drawing, camera, samples);
    let outlines = quality.outlines;
    let side = scene.grid.step() / samples;
    let (across, width) = (scene.grid.across(), camera.size.width as usize);
    let band_bytes = (4 * width * side).max(1);
    image.pixels.par_chunks_mut(band_bytes).enumerate().for_each(|(row, band)| {
        let patches: Vec<Vec<u8>> = (row * across..(row + 1) * across)
            .into_par_iter()
            .map_init(Tile::default, |tile, place| {
                arch.dispatch(Patch { scene: &scene, outlines, tile, place })
            })
            .collect();
        for (line, pixels) in band.chunks_exact_mut(4 * width).enumerate() {
            for (patch, pixels) in patches.iter().zip(pixels.chunks_mut(4 * side)) {
                pixels.copy_from_slice(&patch[4 * side * line..][..pixels.len()]);
            }
        }
    });
    image
}

/// A tile to be painted with the widest instructions that the processor has.
struct Patch<'a> {
    scene: &'a Scene<'a>,
    outlines: bool,
    tile: &'a mut Tile,
    place: usize,
}

impl WithSimd for Patch<'_> {
    type Output = Vec<u8>;

    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) -> Vec<u8> {
        let Self { scene, outlines, tile, place } = self;
        tile.start(scene, place);
        scene.paint_opaque(tile, place);
        if outlines {
            tile.outline(&scene.view);
        }
        scene.paint_veils(tile, place);
        tile.average(scene.view.samples)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Ball, Colour, Plane, Point, Pose, Rod, Size};

    /// Wide instructions do the same sums, so that pictures from different processors agree.
    #[test]
    fn same_bytes_with_and_without_wide_instructions() {
        let place = |number: u32, step: f32| {
            Point::from_fn(|axis, _| (step * (axis + 1) as f32 * number as f32).sin())
        };
        let tint = |number: u32| {
            Colour::new((37 * number) as u8, 90, 200).with_alpha(if number.is_multiple_of(3) {
                80
            } else {
                255
            })
        };
        let drawing = Drawing {
            balls: (0..90)
                .map(|number| Ball { centre: place(number, 0.7), radius: 0.2, colour: tint(number) })
                .collect(),
            rods: (0..90)
                .map(|number| Rod {
                    ends: [place(number, 0.7), place(number + 1, 0.9)],
                    radius: 0.01,
                    colours: [tint(number), tint(number + 1)],
                })
                .collect(),
            cut: Some(Plane { normal: Point::x(), offset: 0.4 }),
            ..Drawing::default()
        };
        let pose = Pose { target: [0.0; 3], azimuth: 25.0, elevation: 15.0, distance: 5.0 };
        let camera = Camera::new(&pose, Size { width: 210, height: 150 });
        let [wide, plain] =
            [Arch::new(), Arch::Scalar].map(|arch| paint_with(arch, &drawing, &camera, Quality::default()));
        assert!(wide == plain);
    }
}
