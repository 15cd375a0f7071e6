use super::ball::Sphere;
use super::tile::SIDE;
use super::view::{NEAR, Seen, View};
use crate::light::{SECTION, SECTION_RIM, lit};
use std::ops::Range;

/// Samples that are worked out together.
pub(super) const LANES: usize = 8;

/// Taken for the cosine between normal and line of sight on the section of a ghost.
const SECTION_FACING: f32 = 0.4;

/// What samples side by side see of a ball.
pub(super) struct Lanes {
    /// Depth of the nearest point, infinite where the ball is missed.
    pub(super) depth: [f32; LANES],
    /// Factor on its linear light.
    pub(super) lit: [f32; LANES],
    /// Cosine between normal and line of sight.
    pub(super) facing: [f32; LANES],
}

impl Lanes {
    fn miss() -> Self {
        Self { depth: [f32::INFINITY; LANES], lit: [0.0; LANES], facing: [0.0; LANES] }
    }
}

/// A row of samples of a tile that crosses a ball.
///
/// A sight line `p = t (u, v, 1)` meets the ball about `c` where `a t² - 2 b t + k = 0` with
/// `a = u² + v² + 1`, `b = c · (u, v, 1)` and `k = c² - r²`. Along a row the discriminant
/// `b² - a k` is `curve (half² - (u - middle)²)`, and `b` is linear.
pub(super) struct Row {
    first: usize,
    end: usize,
    step: f32,
    /// Offset per depth of column 0, from the middle of the picture and from that of the row.
    across: [f32; 2],
    curve: f32,
    half: f32,
    b: [f32; 2],
    /// Cosine between normal and light: depth times (first + second × across) less third.
    cosine: [f32; 3],
    /// Reciprocal radius.
    steepness: f32,
}

/// The cutting plane along a row: `depth (slope[0] + slope[1] across) = offset`.
pub(super) struct Cut {
    slope: [f32; 2],
    offset: f32,
    rim: f32,
}

impl Cut {
    #[inline(always)]
    pub(super) fn along(plane: &(Seen, f64), rim: f32, up: f64) -> Self {
        let (normal, offset) = plane;
        Self { slope: [(normal.y * up + normal.z) as f32, normal.x as f32], offset: *offset as f32, rim }
    }
}

impl Row {
    /// `None` if the row misses the ball.
    #[inline(always)]
    pub(super) fn new(view: &View, ball: &Sphere, corner: i32, up: f64) -> Option<Self> {
        let (c, light) = (&ball.centre, &ball.light);
        let b = up * c.y + c.z;
        let curve = ball.power - c.x * c.x;
        let share = 1.0 / curve;
        let middle = c.x * b * share;
        let square = (b * b - (1.0 + up * up) * ball.power + middle * c.x * b) * share;
        if square <= 0.0 {
            return None;
        }
        let half = square.sqrt();
        let column = |across: f64| (view.column(across) - f64::from(corner)).clamp(0.0, SIDE as f64) as usize;
        let (first, end) = (column(middle - half), column(middle + half));
        let across = view.across(corner);
        (first < end).then(|| Self {
            first,
            end,
            step: (1.0 / view.focal()) as f32,
            across: [across as f32, (across - middle) as f32],
            curve: curve as f32,
            half: half as f32,
            b: [b as f32, c.x as f32],
            cosine: [(light.y * up + light.z) as f32, light.x as f32, light.dot(c) as f32],
            steepness: (1.0 / ball.radius) as f32,
        })
    }

    /// The groups of samples that it crosses.
    #[inline(always)]
    pub(super) fn blocks(&self) -> Range<usize> {
        self.first / LANES..self.end.div_ceil(LANES)
    }

    /// A group of samples of a ball that is whole.
    #[inline(always)]
    pub(super) fn lanes(&self, block: usize, slants: &[f32; LANES]) -> Lanes {
        let mut lanes = Lanes::miss();
        for lane in 0..LANES {
            let chord = self.chord((block * LANES) as f32 + lane as f32, slants[lane]);
            lanes.depth[lane] = if chord.root > 0.0 { chord.near } else { f32::INFINITY };
            lanes.lit[lane] = self.lit(&chord);
            lanes.facing[lane] = chord.root * slants[lane] * self.steepness;
        }
        lanes
    }

    /// A group of samples of a ball that the plane cuts.
    #[inline(always)]
    pub(super) fn cut_lanes(&self, block: usize, slants: &[f32; LANES], cut: &Cut) -> Lanes {
        let mut lanes = Lanes::miss();
        for lane in 0..LANES {
            let chord = self.chord((block * LANES) as f32 + lane as f32, slants[lane]);
            let slope = cut.slope[0] + cut.slope[1] * chord.across;
            let plane = cut.offset / slope;
            let away = slope * chord.near > cut.offset;
            let inside = plane > chord.near && plane < chord.far;
            let section = if inside { plane } else { f32::INFINITY };
            let seen = if away { section } else { chord.near };
            lanes.depth[lane] = if chord.root > 0.0 { seen } else { f32::INFINITY };
            // The product of the parts of the chord is the power of the point in the ball.
            let parts = (plane - chord.near) * (chord.far - plane);
            let rim = parts * cut.rim / (slants[lane] * slants[lane]);
            let rim = if rim < 1.0 { rim } else { 1.0 };
            let section_lit = SECTION * (SECTION_RIM + (1.0 - SECTION_RIM) * rim);
            lanes.lit[lane] = if away { section_lit } else { self.lit(&chord) };
            let facing = chord.root * slants[lane] * self.steepness;
            lanes.facing[lane] = if away { SECTION_FACING } else { facing };
        }
        lanes
    }

    #[inline(always)]
    fn chord(&self, column: f32, slant: f32) -> Chord {
        let across = self.across[0] + column * self.step;
        let off = self.across[1] + column * self.step;
        let square = self.curve * (self.half - off) * (self.half + off);
        let root = if square > 0.0 { square } else { 0.0 }.sqrt();
        let b = self.b[0] + self.b[1] * across;
        let share = slant * slant;
        Chord { across, root, near: (b - root) * share, far: (b + root) * share }
    }

    #[inline(always)]
    fn lit(&self, chord: &Chord) -> f32 {
        lit(chord.near * (self.cosine[0] + self.cosine[1] * chord.across) - self.cosine[2])
    }
}

/// The part of a sight line inside a ball.
struct Chord {
    across: f32,
    /// Root of the discriminant.
    root: f32,
    /// Depth where it enters.
    near: f32,
    /// Depth where it leaves.
    far: f32,
}

/// The same for a ball that reaches behind the plane of the eye, one sample at a time. The eye
/// may be in the part of a ball that the plane removes, and then sees its section.
pub(super) fn near_lanes(
    ball: &Sphere,
    cut: Option<&(Seen, f64)>,
    across: impl Fn(usize) -> f64,
    up: f64,
) -> Lanes {
    let mut lanes = Lanes::miss();
    for lane in 0..LANES {
        let sight = Seen::new(across(lane), up, 1.0);
        let (a, b) = (sight.norm_squared(), sight.dot(&ball.centre));
        let root = (b * b - a * ball.power).max(0.0).sqrt();
        let (near, far) = ((b - root) / a, (b + root) / a);
        let start = near.max(NEAR);
        let cut = cut.filter(|(normal, offset)| normal.dot(&sight) * start > *offset);
        if let Some((normal, offset)) = cut {
            let plane = offset / normal.dot(&sight);
            if plane > start && plane < far {
                lanes.depth[lane] = plane as f32;
                lanes.lit[lane] = SECTION;
                lanes.facing[lane] = SECTION_FACING;
            }
        } else if near > NEAR && root > 0.0 {
            lanes.depth[lane] = near as f32;
            lanes.lit[lane] = lit(ball.light.dot(&(sight * near - ball.centre)) as f32);
            lanes.facing[lane] = (root / (a.sqrt() * ball.radius)) as f32;
        }
    }
    lanes
}
