//! From what a shot asks for to where the camera is.

use super::ease::through;
use super::{Bounds, HotSpot, Key, Move, Shot, ShotError, Stage, Target};
use bedswell_painter::{Camera, Pose, Size};

/// Room left round a target that fits the picture.
const MARGIN: f64 = 1.08;
/// Share of a hot spot's shot after which the camera has arrived.
const ARRIVAL: f64 = 0.6;
/// Height of the eye above the horizon where a hot spot's shot starts (degrees).
const DEPARTURE_ELEVATION: f64 = 20.0;
/// Lowest and highest view of a hot spot (degrees), so that up stays up.
const SPOT_ELEVATIONS: [f64; 2] = [-50.0, 60.0];

impl Shot {
    /// Where the camera is at a share of the shot (0 to 1), for a picture of this size.
    ///
    /// Between keys the distance changes by equal factors in equal times, and the target
    /// moves with it in such a way that a place flown to keeps its place in the picture.
    /// Where no place is stressed, a hot spot is the first bead, or else the bed.
    ///
    /// # Errors
    ///
    /// A bead or a hot spot that the run does not have.
    pub fn pose(&self, progress: f64, stage: &Stage, size: Size) -> Result<Pose, ShotError> {
        Ok(fly(&self.views(stage, size)?, progress))
    }

    fn views(&self, stage: &Stage, size: Size) -> Result<Vec<View>, ShotError> {
        match &self.camera {
            Move::Orbit { start, turn } => {
                let start = View::of(start, stage, size)?;
                let end = View { at: 1.0, azimuth: start.azimuth + turn, ..start };
                Ok(vec![start, end])
            }
            Move::Path(keys) => keys.iter().map(|key| View::of(key, stage, size)).collect(),
            Move::HotSpot { rank, turn } => {
                let spot = match stage.hot_spots.get(rank.number - 1) {
                    Some(spot) => *spot,
                    None if stage.hot_spots.is_empty() => fallback(stage),
                    None => {
                        let most = stage.hot_spots.len();
                        return Err(
                            rank.refuse(format!("this run has {most} such places; choose 1 to {most}"))
                        );
                    }
                };
                Ok(approach(&spot, *turn, stage, size))
            }
        }
    }
}

/// A key with its place and distance worked out.
#[derive(Clone, Copy)]
struct View {
    at: f64,
    azimuth: f64,
    elevation: f64,
    distance: f64,
    target: [f64; 3],
}

impl View {
    fn of(key: &Key, stage: &Stage, size: Size) -> Result<Self, ShotError> {
        let Bounds { centre, radius } = match &key.target {
            Target::Bed => stage.bed,
            Target::Bead(pick) => *stage.beads.get(pick.number).ok_or_else(|| {
                pick.refuse(match stage.beads.len() {
                    0 => "this run has no beads".to_owned(),
                    beads => format!("this run has no such bead; choose 0 to {}", beads - 1),
                })
            })?,
            Target::Place(place) => Bounds { centre: place.map(|along| along as f32), ..stage.bed },
        };
        Ok(Self {
            at: key.at,
            azimuth: key.azimuth,
            elevation: key.elevation,
            distance: fitting(radius, size) / key.zoom,
            target: centre.map(f64::from),
        })
    }
}

/// Distance from which a ball just fits the picture (m).
pub(crate) fn fitting(radius: f32, size: Size) -> f64 {
    let half = (0.5 * f64::from(Camera::FIELD_OF_VIEW)).to_radians();
    let across = half.tan() * f64::from(size.width) / f64::from(size.height);
    MARGIN * f64::from(radius) / half.min(across.atan()).sin()
}

impl HotSpot {
    /// Azimuth and elevation of the eye that sees it best (degrees).
    pub(crate) fn seen_from(&self) -> (f64, f64) {
        let [x, y, z] = self.outward.map(f64::from);
        let [lowest, highest] = SPOT_ELEVATIONS;
        (y.atan2(x).to_degrees(), z.atan2(x.hypot(y)).to_degrees().clamp(lowest, highest))
    }
}

/// From the whole bed to the side of the spot that can be seen, then slowly round it.
fn approach(spot: &HotSpot, turn: f64, stage: &Stage, size: Size) -> Vec<View> {
    let (azimuth, elevation) = spot.seen_from();
    let bed = View {
        at: 0.0,
        azimuth: azimuth - ARRIVAL * turn,
        elevation: DEPARTURE_ELEVATION,
        distance: fitting(stage.bed.radius, size),
        target: stage.bed.centre.map(f64::from),
    };
    let arrived = View {
        at: ARRIVAL,
        azimuth,
        elevation,
        distance: fitting(spot.bounds.radius, size),
        target: spot.bounds.centre.map(f64::from),
    };
    vec![bed, arrived, View { at: 1.0, azimuth: azimuth + (1.0 - ARRIVAL) * turn, ..arrived }]
}

fn fallback(stage: &Stage) -> HotSpot {
    HotSpot { bounds: stage.beads.first().copied().unwrap_or(stage.bed), outward: [1.0, 0.0, 0.3] }
}

fn fly(views: &[View], progress: f64) -> Pose {
    let along = |value: &dyn Fn(&View) -> f64| {
        let keys: Vec<(f64, f64)> = views.iter().map(|view| (view.at, value(view))).collect();
        through(&keys, progress)
    };
    let distance = along(&|view| view.distance.ln()).exp();
    let next = views.iter().position(|view| progress < view.at).unwrap_or(views.len() - 1).max(1);
    let (from, to) = (views[next - 1], views[next]);
    let share = if (to.distance / from.distance).ln().abs() > 1e-3 {
        (distance - from.distance) / (to.distance - from.distance)
    } else {
        through(&[(from.at, 0.0), (to.at, 1.0)], progress)
    };
    let target =
        [0, 1, 2].map(|axis| (from.target[axis] + share * (to.target[axis] - from.target[axis])) as f32);
    Pose {
        target,
        azimuth: along(&|view| view.azimuth) as f32,
        elevation: along(&|view| view.elevation) as f32,
        distance: distance as f32,
    }
}

#[cfg(test)]
mod tests {
    use super::super::ShotList;
    use super::*;
    use bedswell_painter::Point;
    use std::path::Path;

    const SIZE: Size = Size { width: 1280, height: 720 };

    fn stage() -> Stage {
        let bead = Bounds { centre: [0.004, 0.006, 0.003], radius: 0.001 };
        let spot = Bounds { centre: [0.0045, 0.006, 0.003], radius: 0.0004 };
        Stage {
            bed: Bounds { centre: [0.005, 0.005, 0.007], radius: 0.01 },
            beads: vec![bead],
            hot_spots: vec![HotSpot { bounds: spot, outward: [1.0, 0.0, 0.0] }],
        }
    }

    fn shot(keys: &str) -> Shot {
        let text = format!("[[shot]]\nseconds = 4\n{keys}");
        ShotList::parse(&text, Path::new("film.toml")).unwrap().shots.remove(0)
    }

    /// Distance of a bead's outline from the middle of the picture, in half heights.
    fn outline(pose: &Pose, size: Size, bounds: &Bounds) -> f32 {
        let camera = Camera::new(pose, size);
        let away = (Point::from(bounds.centre) - camera.eye).norm();
        (bounds.radius / away).asin().tan() * camera.focal / (0.5 * size.height as f32)
    }

    #[test]
    fn an_orbit_turns_round_what_fits_the_picture() {
        let shot = shot("turn = 90\nstart = 10\nelevation = 25\n");
        let pose = |progress| shot.pose(progress, &stage(), SIZE).unwrap();
        assert_eq!((pose(0.0).azimuth, pose(0.5).azimuth, pose(1.0).azimuth), (10.0, 55.0, 100.0));
        assert_eq!((pose(0.3).elevation, pose(0.3).target), (25.0, stage().bed.centre));
        assert!((outline(&pose(0.7), SIZE, &stage().bed) - 1.0 / MARGIN as f32).abs() < 0.01);
        // A picture higher than wide limits across.
        let upright = Size { width: 360, height: 720 };
        let narrow = shot.pose(0.7, &stage(), upright).unwrap();
        assert!((outline(&narrow, upright, &stage().bed) - 0.5 / MARGIN as f32).abs() < 0.01);
    }

    #[test]
    fn a_flight_keeps_the_hot_spot_in_sight_and_ends_in_front_of_it() {
        let shot = shot("camera = \"hot spot\"\nturn = 40\n");
        let spot = stage().hot_spots[0];
        let mut nearest = f32::INFINITY;
        for step in 0..=100 {
            let pose = shot.pose(f64::from(step) / 100.0, &stage(), SIZE).unwrap();
            assert!(pose.distance <= nearest * 1.000_01, "the flight turns back at {step}");
            nearest = pose.distance;
            let (seen, _) = Camera::new(&pose, SIZE).project(&Point::from(spot.bounds.centre)).unwrap();
            let off = (seen.x - 640.0).abs().max((seen.y - 360.0).abs());
            assert!(off < 330.0, "the spot is {off} pixels from the middle at {step}");
        }
        let arrived = shot.pose(ARRIVAL, &stage(), SIZE).unwrap();
        assert_eq!((arrived.azimuth, arrived.elevation, arrived.target), (0.0, 0.0, spot.bounds.centre));
        assert_eq!(shot.pose(1.0, &stage(), SIZE).unwrap().azimuth, 16.0);
    }

    #[test]
    fn a_path_meets_its_keys_and_is_smooth() {
        let shot = shot(
            "camera = \"path\"\n[[shot.key]]\nat = 0\nazimuth = 0\n[[shot.key]]\nat = 0.4\nazimuth = 50\n\
             zoom = 2\ntarget = \"bead 0\"\n[[shot.key]]\nat = 1\nazimuth = 60\nzoom = 1.5\n\
             target = [\"1 mm\", \"2 mm\", \"3 mm\"]\n",
        );
        let pose = |progress| shot.pose(progress, &stage(), SIZE).unwrap();
        assert_eq!(pose(0.4).target, stage().beads[0].centre);
        let fits = super::fitting(stage().beads[0].radius, SIZE) as f32;
        assert!((pose(0.4).distance - 0.5 * fits).abs() < 1e-6 * fits, "zoom 2 is twice as close");
        assert_eq!(pose(1.0).target, [0.001, 0.002, 0.003]);
        for step in 1..=1000 {
            let (before, after) = (pose(f64::from(step - 1) / 1000.0), pose(f64::from(step) / 1000.0));
            let moved = (Point::from(after.target) - Point::from(before.target)).norm();
            assert!(moved < 0.02 * before.distance, "a jump of {moved} m at {step}");
            assert!((after.azimuth - before.azimuth).abs() < 0.5);
        }
    }

    #[test]
    fn what_the_run_does_not_have_is_told_with_its_line() {
        let told = |keys: &str| shot(keys).pose(0.0, &stage(), SIZE).unwrap_err().to_string();
        assert!(
            told("target = \"bead 4\"\n")
                .contains("film.toml, line 3: shot[1].target = 4: this run has no such bead")
        );
        assert!(
            told("camera = \"hot spot\"\nrank = 3\n")
                .contains("line 4: shot[1].rank = 3: this run has 1 such")
        );
        let calm = Stage { hot_spots: Vec::new(), ..stage() };
        let pose = shot("camera = \"hot spot\"\n").pose(1.0, &calm, SIZE).unwrap();
        assert_eq!(pose.target, calm.beads[0].centre);
    }
}
