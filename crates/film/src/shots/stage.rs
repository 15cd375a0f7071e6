/// A ball around something.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Bounds {
    /// Its centre (m).
    pub centre: [f32; 3],
    /// Its radius (m), above zero.
    pub radius: f32,
}

/// A place where rupture is likely.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct HotSpot {
    /// What a close view should show.
    pub bounds: Bounds,
    /// From where it is seen best: out of its bead (need not be a unit vector).
    pub outward: [f32; 3],
}

/// What the camera can look at, at one time of the run.
#[derive(Clone, Debug, PartialEq)]
pub struct Stage {
    /// The whole bed.
    pub bed: Bounds,
    /// The beads, in their order.
    pub beads: Vec<Bounds>,
    /// Places where rupture is likely, the likeliest first.
    pub hot_spots: Vec<HotSpot>,
}
