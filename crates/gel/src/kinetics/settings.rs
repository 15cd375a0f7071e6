/// How closely time is followed, and what contact does to the skin.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Settings {
    /// Error of the voxels' volumes that one step may make, over themselves (root of the
    /// mean square).
    pub step_error: f64,
    /// Correction that Newton's method may leave, over the bead's own stretch.
    pub residual: f64,
    /// Times per step that contact pressures are corrected for the penetration they took.
    pub corrections: usize,
    /// Time by which the chains lag behind their force (s).
    pub retardation: f64,
    /// Pressed skin passes no water.
    pub contact_seals: bool,
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
            contact_seals: true,
            held: false,
        }
    }
}
