/// How closely time is followed, and what contact does to the skin.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Settings {
    /// Error of the voxels' volumes that one step may make, over themselves (root of the
    /// mean square; default 0.02). It is that of a first-order method and so an upper bound:
    /// the bead's uptake is followed to about a tenth of it.
    pub step_error: f64,
    /// Correction that Newton's method may leave, over the bead's own stretch (default
    /// 1e-5).
    pub residual: f64,
    /// Times per step that contact pressures are corrected for the penetration they took
    /// (default 1). They are corrected further with every step.
    pub corrections: usize,
    /// Time by which the chains lag behind their force right after a change outside, over R²/D
    /// of the reference state (default 3e-4): a viscosity that slows what is faster. A dry
    /// bead's skin swells so much more than its core that it creases, finer than any lattice
    /// and in ever more steps; this keeps it smooth. Swollen beads need none.
    pub retardation: f64,
    /// What that may rise to as half the time since the change (default 1e-2). Held to
    /// the least, a bead of 20 across pulls at its core as much at first and about a tenth less
    /// later, until it creases. It does not rise in a bead with ruptures, which are fast.
    pub most_retardation: f64,
    /// Pressed skin passes no water (default).
    pub contact_seals: bool,
    /// A soft spring holds the bead's centre near where it was when a step began: for beads
    /// that come to rest with what moves around them between steps.
    pub anchored: bool,
    /// The bead's centre and orientation are held, for obstacles that would let it slip out
    /// sideways.
    pub held: bool,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            step_error: 2e-2,
            residual: 1e-5,
            corrections: 1,
            retardation: 3e-4,
            most_retardation: 1e-2,
            contact_seals: true,
            anchored: false,
            held: false,
        }
    }
}
