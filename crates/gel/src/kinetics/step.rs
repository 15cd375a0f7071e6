use bedswell_geometry::Vector;
use thiserror::Error;

/// What a step did.
#[derive(Clone, Debug, PartialEq)]
pub struct Step {
    /// Time at its end (s).
    pub time: f64,
    /// Its length (s).
    pub duration: f64,
    /// Water in the bead at its end (m³).
    pub water: f64,
    /// Water that has come in through the skin since the start (m³).
    pub came_in: f64,
    /// The bead's force on each obstacle (N).
    pub forces: Vec<Vector>,
    /// Deepest penetration of a skin point (m).
    pub penetration: f64,
    /// Correction that Newton's method left, over the bead's own stretch.
    pub residual: f64,
    /// Error of the voxels' volumes that the step made, over themselves.
    pub error: f64,
    /// Newton steps taken, with those of tries that were too long.
    pub newton_steps: usize,
    /// Iterations of linear solves taken.
    pub iterations: usize,
    /// Ruptures at its end.
    pub ruptures: usize,
}

/// Why a bead cannot go on in time.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum KineticsError {
    /// A voxel holds no water.
    #[error("voxel {voxel} holds no water (volume ratio {ratio}); start from a stretch above 1, as 1.05")]
    Dry {
        /// The voxel.
        voxel: usize,
        /// Its volume ratio to dry.
        ratio: f64,
    },
    /// A snapshot of another lattice.
    #[error("the snapshot has {found} values per field where this lattice has {expected}")]
    OtherLattice {
        /// Values found.
        found: usize,
        /// Values expected.
        expected: usize,
    },
    /// No equilibrium follows a rupture.
    #[error("no equilibrium follows the {ruptures}th rupture, at {time} s; try more voxels across")]
    Torn {
        /// When (s).
        time: f64,
        /// Ruptures so far.
        ruptures: usize,
    },
    /// No step is short enough.
    #[error(
        "no state follows {time} s, not even after {duration:.1e} s; look for obstacles deep in the bead"
    )]
    Stalled {
        /// Where time stopped (s).
        time: f64,
        /// The shortest step that was tried (s).
        duration: f64,
    },
}
