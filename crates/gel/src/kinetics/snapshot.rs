use super::history::Outside;
use super::prop::Prop;
use crate::lattice::Face;
use crate::rupture::Event;
use serde::{Deserialize, Serialize};

/// All that a bead's kinetics remember: resumed from it, a run goes on to the same bits.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Snapshot {
    /// Time (s).
    pub time: f64,
    /// Where the nodes are (m): all x, all y, all z, each padded.
    pub positions: Vec<f64>,
    /// How fast they move (m/s).
    pub velocities: Vec<f64>,
    /// Volume ratio to dry that each voxel's water gives it, padded.
    pub water: Vec<f64>,
    /// Stress that the chains do not bear, as a tension over kT/Ω, padded.
    pub slopes: Vec<f64>,
    /// Skin point, obstacle and pressure (Pa) of what presses.
    pub pressures: Vec<(u32, u32, f64)>,
    /// Area that each skin point had when they last pressed (m²).
    pub point_area: f64,
    /// Faces of the ruptured bonds, in the order in which they broke.
    #[serde(default)]
    pub ruptured: Vec<Face>,
    /// Pressures (Pa) between the faces of cracks.
    #[serde(default)]
    pub closed: Vec<f64>,
    /// All ruptures so far.
    #[serde(default)]
    pub ruptures: Vec<Event>,
    /// Forces on the nodes that stay over a step (N), with the opposite sign: weight, other
    /// beads and the bead's own folds. Empty where there are none.
    pub loads: Vec<f64>,
    /// Skin points that press on other beads.
    pub props: Vec<Prop>,
    /// Water that has come in since the start (m³).
    pub came_in: f64,
    /// Length of the next step, if nothing hinders it (s).
    pub next: f64,
    /// What was outside in the last step.
    pub outside: Option<Outside>,
    /// When the outside last changed (s).
    pub changed: f64,
    /// By how long the chains lagged behind in the last step (s).
    pub retardation: f64,
}
