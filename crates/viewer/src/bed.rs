use bedswell_painter::{Drawing, Pose, Size};
use bedswell_picture::{Frame, LikelyPlace, Look, Pick, Run, draw, likely_places, pick};
use bedswell_painter::{Camera, Point};
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

    /// Makes ready what a look shows of the time.
    pub(crate) fn prepare(&mut self, look: &Look) {
        let (frame, moved) = match self.moment.take() {
            Some(moment) if moment.time == self.time && moment.look == *look => {
                self.moment = Some(moment);
                return;
            }
            Some(moment) if moment.time == self.time => (Some(moment.frame), false),
            _ => (self.run.frame(self.time), true),
        };
        let Some(frame) = frame else { return };
        if moved {
            self.places = likely_places(&frame, PLACES);
            self.place = self.place.filter(|place| *place < self.places.len());
        }
        let drawing = Arc::new(draw(&self.run, &frame, look));
        self.moment = Some(Moment { time: self.time, look: look.clone(), frame, drawing });
    }

    /// What there is to see now, once it is ready.
    pub(crate) fn frame(&self) -> Option<&Frame> {
        self.moment.as_ref().map(|moment| &moment.frame)
    }

    /// How the look draws it.
    pub(crate) fn drawing(&self) -> Option<&Arc<Drawing>> {
        self.moment.as_ref().map(|moment| &moment.drawing)
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
    pub(crate) fn near(&self, place: &LikelyPlace, size: Size) -> Option<Pose> {
        let bead = self.frame()?.beads.get(place.bead)?;
        let centre = bead.centre();
        let radius = bead.nodes.iter().map(|node| (node - centre).norm()).fold(0.0, f32::max);
        let out: Point = place.place - centre;
        Some(Pose {
            target: place.place.into(),
            azimuth: out.y.atan2(out.x).to_degrees(),
            elevation: out.z.atan2(out.x.hypot(out.y)).to_degrees().clamp(-70.0, 70.0),
            distance: distance(0.8 * radius, size),
        })
    }
}

/// Distance from which a ball of a radius fits into a picture.
fn distance(radius: f32, size: Size) -> f32 {
    let half = 0.5 * Camera::FIELD_OF_VIEW.to_radians();
    let wide = size.width as f32 / size.height.max(1) as f32;
    radius / (half.tan() * wide.min(1.0)).atan().sin()
}
