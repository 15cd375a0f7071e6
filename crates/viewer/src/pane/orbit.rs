use bedswell_painter::{Camera, Point, Pose, Size};

/// Time of a flight to another pose (s).
const FLIGHT: f64 = 0.7;

/// Where one looks from, and how pointer and keys change it.
#[derive(Clone, Debug)]
pub(crate) struct Orbit {
    pose: Pose,
    flight: Option<Flight>,
}

/// A smooth way from one pose to another.
#[derive(Clone, Copy, Debug)]
struct Flight {
    from: Pose,
    to: Pose,
    start: f64,
}

impl Orbit {
    /// Looks from a pose.
    pub(crate) fn new(pose: Pose) -> Self {
        Self { pose, flight: None }
    }

    /// The pose now.
    pub(crate) fn pose(&self) -> Pose {
        self.pose
    }

    /// Looks from another pose at once.
    pub(crate) fn set(&mut self, pose: Pose) {
        *self = Self::new(pose);
    }

    /// Starts a flight to a pose at a time (s).
    pub(crate) fn fly(&mut self, to: Pose, now: f64) {
        self.flight = Some(Flight { from: self.pose, to, start: now });
    }

    /// Carries a flight on; returns whether it is still under way.
    pub(crate) fn advance(&mut self, now: f64) -> bool {
        let Some(flight) = self.flight else { return false };
        let done = ((now - flight.start) / FLIGHT).clamp(0.0, 1.0) as f32;
        self.pose = between(&flight.from, &flight.to, done * done * (3.0 - 2.0 * done));
        if done >= 1.0 {
            self.flight = None;
        }
        self.flight.is_some()
    }

    /// Turns about the target by angles (degrees): to the right and up.
    pub(crate) fn turn(&mut self, right: f32, up: f32) {
        self.flight = None;
        self.pose.azimuth = (self.pose.azimuth - right).rem_euclid(360.0);
        self.pose.elevation = (self.pose.elevation + up).clamp(-89.0, 89.0);
    }

    /// Shifts the target so that the picture moves by pixels, in a picture of a size.
    pub(crate) fn shift(&mut self, right: f32, down: f32, size: Size) {
        self.flight = None;
        let camera = Camera::new(&self.pose, size);
        let metres = self.pose.distance / camera.focal;
        let moved = (camera.axes[1] * down - camera.axes[0] * right) * metres;
        self.pose.target = (Point::from(self.pose.target) + moved).into();
    }

    /// Comes nearer by a factor (above one), keeping what is under a pixel where it is.
    pub(crate) fn approach(&mut self, factor: f32, at: [f32; 2], size: Size) {
        let from_middle = [at[0] - 0.5 * size.width as f32, at[1] - 0.5 * size.height as f32];
        let stays = 1.0 - 1.0 / factor;
        self.shift(-from_middle[0] * stays, -from_middle[1] * stays, size);
        self.pose.distance /= factor;
    }
}

/// A pose part of the way from one to another: the short way round, by ratios of distance.
fn between(from: &Pose, to: &Pose, part: f32) -> Pose {
    let mix = |a: f32, b: f32| a + (b - a) * part;
    let round = (to.azimuth - from.azimuth + 180.0).rem_euclid(360.0) - 180.0;
    Pose {
        target: [0, 1, 2].map(|axis| mix(from.target[axis], to.target[axis])),
        azimuth: (from.azimuth + round * part).rem_euclid(360.0),
        elevation: mix(from.elevation, to.elevation),
        distance: from.distance * (to.distance / from.distance).powf(part),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const SIZE: Size = Size { width: 640, height: 480 };

    fn start() -> Orbit {
        Orbit::new(Pose { target: [0.0; 3], azimuth: 350.0, elevation: 20.0, distance: 0.1 })
    }

    #[test]
    fn a_flight_takes_the_short_way_and_arrives_exactly() {
        let mut orbit = start();
        let goal = Pose { target: [1.0, 2.0, 3.0], azimuth: 10.0, elevation: -5.0, distance: 0.4 };
        orbit.fly(goal, 5.0);
        assert!(orbit.advance(5.0 + 0.5 * FLIGHT));
        assert!(orbit.pose().azimuth < 1e-3 || orbit.pose().azimuth > 359.9, "{:?}", orbit.pose());
        assert!((orbit.pose().distance - 0.2).abs() < 1e-6);
        assert!(!orbit.advance(6.0));
        let arrived = orbit.pose();
        assert!((arrived.azimuth - 10.0).abs() < 1e-3 && arrived.target == goal.target);
    }

    #[test]
    fn the_target_follows_the_pointer_when_shifted() {
        let mut orbit = start();
        let before = Camera::new(&orbit.pose(), SIZE);
        let old = Point::from(orbit.pose().target);
        orbit.shift(30.0, -12.0, SIZE);
        let (seen, _) = Camera::new(&orbit.pose(), SIZE).project(&old).unwrap();
        let (was, _) = before.project(&old).unwrap();
        assert!((seen.x - was.x - 30.0).abs() < 1e-2 && (seen.y - was.y + 12.0).abs() < 1e-2);
    }

    #[test]
    fn what_is_under_the_pointer_stays_there_when_coming_nearer() {
        let mut orbit = start();
        let camera = Camera::new(&orbit.pose(), SIZE);
        let under = camera.axes[0] * 0.01 + camera.axes[1] * 0.005;
        let (at, _) = camera.project(&under).unwrap();
        orbit.approach(1.5, [at.x, at.y], SIZE);
        let (seen, _) = Camera::new(&orbit.pose(), SIZE).project(&under).unwrap();
        assert!((seen - at).norm() < 1e-2, "{seen} {at}");
    }
}
