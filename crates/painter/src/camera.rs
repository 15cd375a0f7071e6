use crate::{Point, Size};
use nalgebra::Vector2;
use serde::{Deserialize, Serialize};

/// Where one looks from: an orbit about a target with z up.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Pose {
    /// What is in the middle of the picture (m).
    pub target: [f32; 3],
    /// Compass direction of the eye seen from the target (degrees, anticlockwise from x).
    pub azimuth: f32,
    /// Height of the eye above the horizon (degrees, -89 to 89).
    pub elevation: f32,
    /// Distance of the eye from the target (m).
    pub distance: f32,
}

/// A perspective camera for a picture of a given size.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Camera {
    /// Place of the eye (m).
    pub eye: Point,
    /// Unit vectors: right, up, and backwards (from the target to the eye).
    pub axes: [Point; 3],
    /// Distance of the eye from the target (m).
    pub distance: f32,
    /// Pixels per unit of (offset across / depth).
    pub focal: f32,
    /// Size of the picture.
    pub size: Size,
}

impl Camera {
    /// Vertical angle of view (degrees).
    pub const FIELD_OF_VIEW: f32 = 30.0;

    /// The camera at a pose.
    pub fn new(pose: &Pose, size: Size) -> Self {
        let (azimuth, elevation) =
            (pose.azimuth.to_radians(), pose.elevation.clamp(-89.0, 89.0).to_radians());
        let back =
            Point::new(elevation.cos() * azimuth.cos(), elevation.cos() * azimuth.sin(), elevation.sin());
        let right = Point::new(-azimuth.sin(), azimuth.cos(), 0.0);
        let up = back.cross(&right);
        let focal = 0.5 * size.height as f32 / (0.5 * Self::FIELD_OF_VIEW.to_radians()).tan();
        Self {
            eye: Point::from(pose.target) + back * pose.distance,
            axes: [right, up, back],
            distance: pose.distance,
            focal,
            size,
        }
    }

    /// A place as the camera sees it: across, up, and depth in front of the eye (m).
    pub fn view(&self, place: &Point) -> Point {
        let offset = place - self.eye;
        Point::new(offset.dot(&self.axes[0]), offset.dot(&self.axes[1]), -offset.dot(&self.axes[2]))
    }

    /// Where a place appears (pixels from the top left) and its depth (m); `None` behind the eye.
    pub fn project(&self, place: &Point) -> Option<(Vector2<f32>, f32)> {
        let seen = self.view(place);
        (seen.z > 0.0).then(|| {
            let middle = Vector2::new(0.5 * self.size.width as f32, 0.5 * self.size.height as f32);
            (middle + Vector2::new(seen.x, -seen.y) * (self.focal / seen.z), seen.z)
        })
    }

    /// Direction (unit vector) of the line of sight through a place in the picture (pixels).
    pub fn sight(&self, x: f32, y: f32) -> Point {
        let across = (x - 0.5 * self.size.width as f32) / self.focal;
        let up = (0.5 * self.size.height as f32 - y) / self.focal;
        (self.axes[0] * across + self.axes[1] * up - self.axes[2]).normalize()
    }
}
