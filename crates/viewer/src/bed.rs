use bedswell_painter::{Camera, Drawing, Point, Pose, Size};
use bedswell_picture::{Cut, Frame, LikelyPlace, Look, Pick, Picked, Run, draw, likely_places, pick};
use bedswell_sim::State;
use std::path::PathBuf;
use std::sync::Arc;

/// How many likely places of rupture are listed.
const PLACES: usize = 6;

/// Where one stands at first: azimuth and elevation (degrees).
const START: [f32; 2] = [-62.0, 22.0];

/// A run, and the moment of it that is looked at.
pub(crate) struct Bed {
    /// The run.
    pub(crate) run: Run,
    /// Its folder.
    pub(crate) folder: PathBuf,
    /// The likely places of rupture at the moment, the likeliest first.
    pub(crate) places: Vec<LikelyPlace>,
    /// Which of them is marked.
    pub(crate) place: Option<usize>,
    time: f64,
    moment: Option<Moment>,
}

/// What there is to see at a time, as a look shows it.
struct Moment {
    time: f64,
    look: Look,
    frame: Frame,
    drawing: Arc<Drawing>,
}

impl Bed {
    /// A run seen at its end.
    pub(crate) fn new(run: Run, folder: PathBuf) -> Self {
        let time = run.end().unwrap_or(0.0);
        Self { run, folder, places: Vec::new(), place: None, time, moment: None }
    }

    /// The time that is looked at (increments).
    pub(crate) fn time(&self) -> f64 {
        self.time
    }

    /// Goes to a time (increments), as far as the run has come.
    pub(crate) fn go(&mut self, time: f64) {
        self.time = time.clamp(0.0, self.run.end().unwrap_or(0.0));
    }

    /// Takes the next state; who looked at the latest one goes on to it.
    pub(crate) fn push(&mut self, state: State) {
        let at_end = self.run.end().is_none_or(|end| self.time >= end);
        self.run.push(state);
        // The colour scales may span more now.
        self.moment = None;
        if at_end {
            self.time = self.run.end().unwrap_or(0.0);
        }
    }

    /// Makes ready what a look shows of the time; returns whether that is another time.
    pub(crate) fn prepare(&mut self, look: &Look) -> bool {
        let (frame, moved) = match self.moment.take() {
            Some(moment) if moment.time == self.time && moment.look == *look => {
                self.moment = Some(moment);
                return false;
            }
            Some(moment) if moment.time == self.time => (Some(moment.frame), false),
            _ => (self.run.frame(self.time), true),
        };
        let Some(frame) = frame else { return false };
        if moved {
            self.find_places(&frame);
        }
        let drawing = Arc::new(draw(&self.run, &frame, look));
        self.moment = Some(Moment { time: self.time, look: look.clone(), frame, drawing });
        moved
    }

    /// Finds the likely places of rupture; the mark stays with the one nearest to where it was,
    /// if that is the same place.
    fn find_places(&mut self, frame: &Frame) {
        let marked = self.place.and_then(|place| self.places.get(place)).copied();
        self.places = likely_places(frame, PLACES);
        self.place = marked.and_then(|marked| {
            let reach = 2.5 * frame.beads.get(marked.bead)?.voxel_edge();
            let apart = |place: &LikelyPlace| (place.place - marked.place).norm();
            let same = |place: &LikelyPlace| place.bead == marked.bead && apart(place) < reach;
            let near = self.places.iter().enumerate().filter(|(_, place)| same(place));
            near.min_by(|a, b| apart(a.1).total_cmp(&apart(b.1))).map(|(number, _)| number)
        });
    }

    /// What there is to see now, once it is ready.
    pub(crate) fn frame(&self) -> Option<&Frame> {
        self.moment.as_ref().map(|moment| &moment.frame)
    }

    /// How the look draws it.
    pub(crate) fn drawing(&self) -> Option<&Arc<Drawing>> {
        self.moment.as_ref().map(|moment| &moment.drawing)
    }

    /// The same thing at the present time, where it is now.
    pub(crate) fn follow(&self, mut pick: Pick) -> Option<Pick> {
        let frame = self.frame()?;
        pick.place = match pick.what {
            Picked::Grain(grain) => frame.grains.get(grain)?.centre,
            Picked::Gel { bead, voxel } => *frame.beads.get(bead)?.middles.get(voxel)?,
            Picked::Bond { bead, bond } => {
                let bead = frame.beads.get(bead)?;
                let ends = bead.bond_voxels().get(bond)?.map(|voxel| bead.middles[voxel as usize]);
                0.5 * (ends[0] + ends[1])
            }
        };
        Some(pick)
    }

    /// A pick that can be followed: of a grain's periodic images, the grain itself.
    pub(crate) fn hold(&self, mut pick: Pick) -> Pick {
        if let (Picked::Grain(index), Some(frame)) = (pick.what, self.frame()) {
            pick.what = Picked::Grain(frame.grains[index].grain);
        }
        pick
    }

    /// What lies under a pixel.
    pub(crate) fn pick(&self, camera: &Camera, [x, y]: [f32; 2]) -> Option<Pick> {
        let moment = self.moment.as_ref()?;
        pick(&moment.frame, &moment.look, camera, x, y)
    }

    /// The pose from which the whole bed is seen.
    pub(crate) fn whole(&self, size: Size) -> Option<Pose> {
        let [(centre, radius), _] = self.run.bounds()?;
        Some(Pose {
            target: centre.into(),
            azimuth: START[0],
            elevation: START[1],
            distance: 0.95 * distance(radius, size),
        })
    }

    /// The pose from which a likely place is seen: from outside, straight over the bead.
    pub(crate) fn over(&self, place: &LikelyPlace, size: Size) -> Option<Pose> {
        let (out, radius) = self.outwards(place)?;
        Some(looking_from(&out, &place.place, distance(0.9 * radius, size)))
    }

    /// A cut through the bead's middle and a likely place, and the pose that faces it.
    pub(crate) fn opened(&self, place: &LikelyPlace, size: Size) -> Option<(Cut, Pose)> {
        let (out, radius) = self.outwards(place)?;
        let across = out.cross(&Point::z());
        let normal = if across.norm() > 1e-3 * out.norm() { across.normalize() } else { Point::x() };
        let pose = looking_from(&normal, &(place.place - 0.4 * out), distance(0.9 * radius, size));
        let offset = normal.dot(&(place.place - self.frame()?.middle()));
        Some((Cut { azimuth: pose.azimuth, elevation: 0.0, offset }, pose))
    }

    /// The way from the middle of its bead to a place, and the bead's largest radius (m).
    fn outwards(&self, place: &LikelyPlace) -> Option<(Point, f32)> {
        let bead = self.frame()?.beads.get(place.bead)?;
        let centre = bead.centre();
        let radius = bead.nodes.iter().map(|node| (node - centre).norm()).fold(0.0, f32::max);
        Some((place.place - centre, radius))
    }
}

/// The pose that sees a place from a direction.
fn looking_from(direction: &Point, place: &Point, distance: f32) -> Pose {
    Pose {
        target: (*place).into(),
        azimuth: direction.y.atan2(direction.x).to_degrees().rem_euclid(360.0),
        elevation: direction.z.atan2(direction.x.hypot(direction.y)).to_degrees().clamp(-70.0, 70.0),
        distance,
    }
}

/// Distance from which a ball of a radius fits into a picture.
fn distance(radius: f32, size: Size) -> f32 {
    let half = 0.5 * Camera::FIELD_OF_VIEW.to_radians();
    let wide = size.width as f32 / size.height.max(1) as f32;
    radius / (half.tan() * wide.min(1.0)).atan().sin()
}
