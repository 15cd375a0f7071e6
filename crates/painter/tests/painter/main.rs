//! What a picture must show, checked against geometry and against a slow twin.

mod balls;
mod meshes;
mod overlay;
mod rods;
mod rubbish;
mod sameness;

use bedswell_painter::{Ball, Camera, Colour, Drawing, Image, Point, Pose, Quality, Size, paint};

/// Samples on a grid of pixels, no outlines: what geometry alone gives.
const PLAIN: Quality = Quality { samples: 1, outlines: false };
/// The same with four samples per pixel.
const FINE: Quality = Quality { samples: 2, outlines: false };

/// An eye on the x axis, a metre from the origin: right is y, up is z.
fn front(width: u32, height: u32) -> Camera {
    let pose = Pose { target: [0.0; 3], azimuth: 0.0, elevation: 0.0, distance: 1.0 };
    Camera::new(&pose, Size { width, height })
}

fn ball(centre: [f32; 3], radius: f32, colour: Colour) -> Drawing {
    Drawing { balls: vec![Ball { centre: Point::from(centre), radius, colour }], ..Drawing::default() }
}

/// Sum of opacity over the picture (pixels).
fn area(image: &Image) -> f64 {
    image.pixels.chunks_exact(4).map(|pixel| f64::from(pixel[3]) / 255.0).sum()
}

/// The pixel where a place appears.
fn seen(image: &Image, camera: &Camera, place: [f32; 3]) -> Colour {
    let (at, _) = camera.project(&Point::from(place)).expect("in front of the eye");
    image.pixel(at.x as u32, at.y as u32)
}

fn assert_near(is: f64, should: f64, relative: f64) {
    assert!((is - should).abs() <= relative * should.abs(), "{is} is not {should} to within {relative}");
}

fn white() -> Colour {
    Colour::new(255, 255, 255)
}

fn picture(drawing: &Drawing, camera: &Camera) -> Image {
    paint(drawing, camera, PLAIN)
}
