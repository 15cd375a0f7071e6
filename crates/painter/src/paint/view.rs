use super::bins::Bounds;
use crate::{Camera, Plane, Point};
use nalgebra::Vector3;

/// A place or direction as the camera sees it: right, up, and depth in front of the eye, in
/// units of the distance between eye and target, so that nothing depends on the unit of length.
pub(super) type Seen = Vector3<f64>;

/// Nothing nearer to the eye than this is drawn.
pub(super) const NEAR: f64 = 1e-3;

/// The camera in units of its own distance and of samples.
pub(super) struct View {
    eye: Seen,
    axes: [Seen; 3],
    unit: f64,
    focal: f64,
    half: [f64; 2],
    /// Samples per pixel along each axis.
    pub(super) samples: usize,
}

impl View {
    pub(super) fn new(camera: &Camera, samples: usize) -> Self {
        let wide = |point: &Point| point.map(f64::from);
        let finer = samples as f64;
        let distance = f64::from(camera.distance);
        Self {
            eye: wide(&camera.eye),
            axes: [wide(&camera.axes[0]), wide(&camera.axes[1]), -wide(&camera.axes[2])],
            unit: if distance > 0.0 && distance.is_finite() { 1.0 / distance } else { 1.0 },
            focal: f64::from(camera.focal) * finer,
            half: [camera.size.width, camera.size.height].map(|size| 0.5 * f64::from(size) * finer),
            samples,
        }
    }

    /// A length.
    #[inline(always)]
    pub(super) fn length(&self, length: f32) -> f64 {
        f64::from(length) * self.unit
    }

    /// A place; `None` if it is not finite.
    #[inline(always)]
    pub(super) fn place(&self, place: &Point) -> Option<Seen> {
        let seen = self.direction(&(place.map(f64::from) - self.eye)) * self.unit;
        seen.iter().all(|part| part.is_finite()).then_some(seen)
    }

    /// A direction.
    #[inline(always)]
    pub(super) fn direction(&self, direction: &Seen) -> Seen {
        Seen::new(direction.dot(&self.axes[0]), direction.dot(&self.axes[1]), direction.dot(&self.axes[2]))
    }

    /// A plane: its normal, and its distance from the eye along it; `None` if it is not finite.
    pub(super) fn plane(&self, plane: &Plane) -> Option<(Seen, f64)> {
        let normal = plane.normal.map(f64::from);
        let offset = (f64::from(plane.offset) - normal.dot(&self.eye)) * self.unit;
        (offset.is_finite() && normal.norm().is_finite()).then(|| (self.direction(&normal), offset))
    }

    /// Samples per unit of (offset across / depth).
    #[inline(always)]
    pub(super) fn focal(&self) -> f64 {
        self.focal
    }

    /// Heights of the picture per unit of (offset across / depth).
    pub(super) fn heights(&self) -> f32 {
        (self.focal / (2.0 * self.half[1])) as f32
    }

    /// Offset to the right per depth of the sight lines through the middle of a column of samples.
    #[inline(always)]
    pub(super) fn across(&self, column: i32) -> f64 {
        (f64::from(column) + 0.5 - self.half[0]) / self.focal
    }

    /// Offset upwards per depth of the sight lines through the middle of a row of samples.
    #[inline(always)]
    pub(super) fn up(&self, row: i32) -> f64 {
        (self.half[1] - f64::from(row) - 0.5) / self.focal
    }

    /// The first column whose sight lines lie at or to the right of an offset per depth.
    #[inline(always)]
    pub(super) fn column(&self, across: f64) -> f64 {
        (across * self.focal + self.half[0] - 0.5).ceil()
    }

    /// Where a place appears (samples from the top left).
    #[inline(always)]
    pub(super) fn project(&self, seen: &Seen) -> [f64; 2] {
        self.project_at(seen, 1.0 / seen.z)
    }

    /// The same with its reciprocal depth at hand.
    #[inline(always)]
    pub(super) fn project_at(&self, seen: &Seen, closeness: f64) -> [f64; 2] {
        let scale = closeness * self.focal;
        [self.half[0] + seen.x * scale, self.half[1] - seen.y * scale]
    }

    /// The samples within a rectangle; `None` if there are none.
    #[inline(always)]
    pub(super) fn bounds(&self, low: [f64; 2], high: [f64; 2]) -> Option<Bounds> {
        const MARGIN: f64 = 64.0;
        let [width, height] = self.half.map(|half| 2.0 * half);
        let on =
            low[0] < width + MARGIN && low[1] < height + MARGIN && high[0] > -MARGIN && high[1] > -MARGIN;
        let within = |place: f64, size: f64| place.clamp(-MARGIN, size + MARGIN) as i32;
        on.then(|| Bounds {
            left: within(low[0].floor(), width),
            right: within(high[0].ceil(), width),
            top: within(low[1].floor(), height),
            bottom: within(high[1].ceil(), height),
        })
    }

    /// The whole picture.
    pub(super) fn everything(&self) -> Option<Bounds> {
        self.bounds([f64::MIN; 2], [f64::MAX; 2])
    }
}
