//! What became of beads that may tear.

use serde::{Deserialize, Serialize};

/// When something happened on a bead's way.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Moment {
    /// Number of the increment, from 1.
    pub increment: usize,
    /// Free stretch from dry of the gel in what was outside then; on the way from dry to
    /// equilibrium, that to which it had been raised.
    pub free_stretch: f64,
    /// Time (s); 0 on the way from dry to equilibrium, which knows none.
    pub time_s: f64,
}

/// Bonds that ruptured together, and what the bead had come to with them.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct RuptureEvent {
    /// The bead.
    pub bead: usize,
    /// When.
    pub at: Moment,
    /// Where: middle of the new crack surface, from the centre of the free-swollen bead (m).
    pub place_m: [f64; 3],
    /// How far below the free-swollen bead's surface (m).
    pub depth_m: f64,
    /// Its distance then from the surface of the nearest thing that the bead pressed on (m).
    pub to_contact_m: Option<f64>,
    /// Angle (degrees), seen from the bead's centre, between the place and the axis of the
    /// nearest contact.
    pub off_axis_deg: Option<f64>,
    /// Area of one side of the new crack surface when free-swollen (m²).
    pub area_m2: f64,
    /// Averaged tension over the strength there, before.
    pub ratio: f64,
    /// Area of one side of all the bead's cracks with it (m²).
    pub crack_area_m2: f64,
}

/// Angle (degrees) within which a place counts as on the axis of a contact.
const ON_AXIS_DEG: f64 = 25.0;

impl RuptureEvent {
    /// Where it came, in a word: on a contact's axis or on the flank between contacts, or free
    /// of any contact.
    pub fn region(&self) -> Region {
        match self.off_axis_deg {
            None => Region::Free,
            Some(angle) if angle <= ON_AXIS_DEG => Region::Axis,
            Some(_) => Region::Flank,
        }
    }
}

/// Where in a bead something is, seen from its contacts.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Region {
    /// Within 25 degrees of the axis of the nearest contact.
    Axis,
    /// Further from it.
    Flank,
    /// The bead touched nothing.
    Free,
}

impl Region {
    /// The word for it in tables.
    pub fn word(self) -> &'static str {
        match self {
            Self::Axis => "axis",
            Self::Flank => "flank",
            Self::Free => "free",
        }
    }
}

/// What a bead has come to by its cracks.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Cracks {
    /// Area of one side of all cracks when free-swollen (m²).
    pub area_m2: f64,
    /// Bodies into which the bead has come apart; 1 where it has not.
    pub fragments: usize,
    /// Share of the bead's gel in the largest body that came off the rest.
    pub split_off: f64,
    /// Surface that water from outside reaches (m²): the skin as it is, and both faces of the
    /// cracks that open to it.
    pub wetted_m2: f64,
}

/// What became of a bead that might tear.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct BeadTears {
    /// Ruptures, each of bonds that broke together.
    pub ruptures: usize,
    /// Its cracks at the end.
    pub cracks: Cracks,
    /// Area of its cracks over its mid-section when free-swollen.
    pub crack_share: f64,
    /// Where and when it first ruptured, if it did.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub first: Option<FirstRupture>,
    /// When it was torn, if it was: its cracks or a piece that came off exceeded what the scene
    /// allows.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub torn_at: Option<Moment>,
    /// When it was last looked at.
    pub watched_until: Moment,
}

/// The first rupture of a bead.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct FirstRupture {
    /// When.
    pub at: Moment,
    /// How far below the free-swollen bead's surface (m).
    pub depth_m: f64,
    /// Distance from the surface of the nearest thing that the bead pressed on (m).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub to_contact_m: Option<f64>,
    /// Angle (degrees), seen from the bead's centre, to the axis of the nearest contact.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub off_axis_deg: Option<f64>,
    /// The same in a word.
    pub region: Region,
}

impl From<&RuptureEvent> for FirstRupture {
    fn from(event: &RuptureEvent) -> Self {
        let RuptureEvent { at, depth_m, to_contact_m, off_axis_deg, .. } = *event;
        Self { at, depth_m, to_contact_m, off_axis_deg, region: event.region() }
    }
}

/// The cracks of a pack, where the scene gives the gel a toughness; kept by a single run, left
/// out of a study's journal.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PackTears {
    /// All ruptures, as they came.
    pub events: Vec<RuptureEvent>,
    /// The cracks of every bead after each increment.
    pub cracks: Vec<Vec<Cracks>>,
    /// Where the water of each bead turned, if the scene gives a history in time.
    pub cycles: Vec<CyclePoint>,
}

/// A bead where its water was most or least between turns from wetting to drying and back, or
/// at the end of the history.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CyclePoint {
    /// The bead.
    pub bead: usize,
    /// Number of the cycle, from 1; each begins with a wetting.
    pub cycle: usize,
    /// Whether its water was most rather than least.
    pub is_most: bool,
    /// When (s).
    pub time_s: f64,
    /// Water taken up per mass of dry gel (g/g).
    pub uptake_g_per_g: f64,
    /// Its cracks then.
    pub cracks: Cracks,
}
