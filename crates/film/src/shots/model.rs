use super::{Place, ShotError, Word};
use bedswell_painter::Size;

/// What a film shows, shot by shot.
#[derive(Clone, Debug, PartialEq)]
pub struct ShotList {
    /// Title; left to the run if `None`.
    pub title: Option<String>,
    /// Size of the pictures.
    pub size: Size,
    /// Pictures per second, 1 to 60.
    pub frames_per_second: u32,
    /// Colours of background, text and lines; the drawer's choice if `None`.
    pub theme: Option<Word>,
    /// The shots in their order, at least one.
    pub shots: Vec<Shot>,
}

/// A piece of film without a cut.
#[derive(Clone, Debug, PartialEq)]
pub struct Shot {
    /// How long it lasts (s).
    pub seconds: f64,
    /// What is written over it.
    pub caption: Option<String>,
    /// Part of the run it shows: start and end, each 0 (the run's start) to 1 (its end).
    pub span: [f64; 2],
    /// How the camera moves.
    pub camera: Move,
    /// How grains are shown.
    pub grains: Option<Word>,
    /// What the colours of grains mean.
    pub shade: Option<Word>,
    /// How beads are shown; empty for the drawer's choice.
    pub beads: Vec<Word>,
    /// The field whose values colour the beads.
    pub field: Option<Word>,
    /// A cut through the bed.
    pub cut: Option<Cut>,
    /// Whether the bed is cut open at the place that the camera flies to, towards the eye.
    pub opened: bool,
    /// Where its heading stands.
    pub place: Place,
}

/// How the camera moves during a shot.
#[derive(Clone, Debug, PartialEq)]
pub enum Move {
    /// Round a target at one height.
    Orbit {
        /// Where it starts and what it looks at; its `at` is 0.
        start: Key,
        /// Degrees, anticlockwise seen from above.
        turn: f64,
    },
    /// From key to key; the first is at 0 and the last at 1.
    Path(Vec<Key>),
    /// From the whole bed to a place where rupture is likely.
    HotSpot {
        /// 1 for the likeliest place.
        rank: Pick,
        /// Degrees turned on the way and round the place.
        turn: f64,
    },
}

/// A view to pass through.
#[derive(Clone, Debug, PartialEq)]
pub struct Key {
    /// When, as a share of the shot.
    pub at: f64,
    /// Compass direction of the eye seen from the target (degrees, anticlockwise from x).
    pub azimuth: f64,
    /// Height of the eye above the horizon (degrees).
    pub elevation: f64,
    /// 1 where the target just fits the picture; 2 is twice as close.
    pub zoom: f64,
    /// What is in the middle of the picture.
    pub target: Target,
}

/// What the camera looks at.
#[derive(Clone, Debug, PartialEq)]
pub enum Target {
    /// The whole bed.
    Bed,
    /// One bead, counted from 0.
    Bead(Pick),
    /// A fixed place (m), seen from as far as the bed.
    Place([f64; 3]),
}

/// One of several things of a run, with its line for the message if there are not as many.
#[derive(Clone, Debug, PartialEq)]
pub struct Pick {
    /// Which one.
    pub number: usize,
    /// The key that says so, with its table.
    pub key: String,
    /// Where it stands.
    pub place: Place,
}

impl Pick {
    /// An error about the number that names its line.
    pub fn refuse(&self, problem: impl Into<String>) -> ShotError {
        ShotError::Value {
            place: self.place.clone(),
            key: self.key.clone(),
            value: self.number.to_string(),
            problem: problem.into(),
        }
    }
}

/// A plane that removes what lies on its normal's side.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Cut {
    /// Unit normal.
    pub normal: [f64; 3],
    /// Distance from the middle of the beads along the normal, at the start and at the end of
    /// the shot (m).
    pub offset: [f64; 2],
}

impl Cut {
    /// Its distance from the middle of the beads at a share of the shot (m).
    pub fn offset(&self, progress: f64) -> f64 {
        let [start, end] = self.offset;
        super::ease::through(&[(0.0, start), (1.0, end)], progress)
    }
}
