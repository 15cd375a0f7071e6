use super::ball::Sphere;
use super::tile::SIDE;
use super::view::{NEAR, Seen, View};
use crate::light::{LIGHT, SECTION, SECTION_RIM, lit};
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
    a: f32,
    b: [f32; 2],
    /// Cosine between normal and light: depth times (first + second × across) less third.
    cosine: [f32; 3],
    radius: f32,
}

/// The cutting plane along a row: `depth (slope[0] + slope[1] across) = offset`.
pub(super) struct Cut {
    slope: [f32; 2],
    offset: f32,
    rim: f32,
}

impl Cut {
    pub(super) fn along(plane: &(Seen, f64), rim: f32, up: f64) -> Self {
        let (normal, offset) = plane;
        Self { slope: [(normal.y * up + normal.z) as f32, normal.x as f32], offset: *offset as f32, rim }
    }
}

impl Row {
    /// `None` if the row misses the ball.
    #[inline(always)]
    pub(super) fn new(view: &View, ball: &Sphere, corner: i32, up: f64) -> Option<Self> {
        let c = &ball.centre;
        let a = 1.0 + up * up;
        let b = up * c.y + c.z;
        let curve = ball.power - c.x * c.x;
        let middle = c.x * b / curve;
        let half = (b * b - a * ball.power + middle * c.x * b) / curve;
        if half <= 0.0 {
            return None;
        }
        let half = half.sqrt();
        let column = |across: f64| (view.column(across) - f64::from(corner)).clamp(0.0, SIDE as f64) as usize;
        let (first, end) = (column(middle - half), column(middle + half));
        let across = view.across(corner);
        let [x, y, z] = LIGHT.map(|part| f64::from(part) / ball.radius);
        (first < end).then(|| Self {
            first,
            end,
            step: (1.0 / view.focal()) as f32,
            across: [across as f32, (across - middle) as f32],
            curve: curve as f32,
            half: half as f32,
            a: a as f32,
            b: [b as f32, c.x as f32],
            cosine: [(y * up - z) as f32, x as f32, (x * c.x + y * c.y - z * c.z) as f32],
            radius: ball.radius as f32,
        })
    }

    /// The groups of samples that it crosses.
    pub(super) fn blocks(&self) -> Range<usize> {
        self.first / LANES..self.end.div_ceil(LANES)
    }

    /// A group of samples of a ball that is whole.
    #[inline(always)]
    pub(super) fn lanes(&self, block: usize) -> Lanes {
        let mut lanes = Lanes::miss();
        for lane in 0..LANES {
            let chord = self.chord((block * LANES) as f32 + lane as f32);
            lanes.depth[lane] = if chord.root > 0.0 { chord.depths[0] } else { f32::INFINITY };
            lanes.lit[lane] = self.lit(&chord);
            lanes.facing[lane] = chord.root / (self.radius * chord.a.sqrt());
        }
        lanes
    }

    /// A group of samples of a ball that the plane cuts.
    #[inline(always)]
    pub(super) fn cut_lanes(&self, block: usize, cut: &Cut) -> Lanes {
        let mut lanes = Lanes::miss();
        for lane in 0..LANES {
            let chord = self.chord((block * LANES) as f32 + lane as f32);
            let [near, far] = chord.depths;
            let slope = cut.slope[0] + cut.slope[1] * chord.across;
            let plane = cut.offset / slope;
            let away = slope * near > cut.offset;
            let section = if plane > near && plane < far { plane } else { f32::INFINITY };
            let seen = if away { section } else { near };
            lanes.depth[lane] = if chord.root > 0.0 { seen } else { f32::INFINITY };
            // The product of the parts of the chord is the power of the point in the ball.
            let power = chord.a * (plane - near) * (far - plane) * cut.rim;
            let rim = if power < 1.0 { power } else { 1.0 };
            let section_lit = SECTION * (SECTION_RIM + (1.0 - SECTION_RIM) * rim);
            lanes.lit[lane] = if away { section_lit } else { self.lit(&chord) };
            let facing = chord.root / (self.radius * chord.a.sqrt());
            lanes.facing[lane] = if away { SECTION_FACING } else { facing };
        }
        lanes
    }

    #[inline(always)]
    fn chord(&self, column: f32) -> Chord {
        let across = self.across[0] + column * self.step;
        let off = self.across[1] + column * self.step;
        let discriminant = self.curve * (self.half - off) * (self.half + off);
        let root = if discriminant > 0.0 { discriminant } else { 0.0 }.sqrt();
        let a = self.a + across * across;
        let b = self.b[0] + self.b[1] * across;
        let share = 1.0 / a;
        Chord { across, a, root, depths: [(b - root) * share, (b + root) * share] }
    }

    #[inline(always)]
    fn lit(&self, chord: &Chord) -> f32 {
        lit(chord.depths[0] * (self.cosine[0] + self.cosine[1] * chord.across) - self.cosine[2])
    }
}

/// The part of a sight line inside a ball.
struct Chord {
    across: f32,
    a: f32,
    root: f32,
    depths: [f32; 2],
}

/// The same for a ball that reaches behind the plane of the eye, one sample at a time.
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
        let discriminant = b * b - a * ball.power;
        if discriminant <= 0.0 {
            continue;
        }
        let (near, far) = ((b - discriminant.sqrt()) / a, (b + discriminant.sqrt()) / a);
        let section = cut
            .filter(|(normal, offset)| normal.dot(&sight) * near > *offset)
            .map(|(normal, offset)| offset / normal.dot(&sight));
        let depth = match section {
            Some(depth) if !(near..far).contains(&depth) => continue,
            Some(depth) => depth,
            None => near,
        };
        if depth > NEAR {
            let normal = (sight * depth - ball.centre) / ball.radius;
            let light = Seen::new(LIGHT[0].into(), LIGHT[1].into(), (-LIGHT[2]).into());
            let surface = section.is_none();
            lanes.depth[lane] = depth as f32;
            lanes.lit[lane] = if surface { lit(normal.dot(&light) as f32) } else { SECTION };
            lanes.facing[lane] =
                if surface { -(normal.dot(&sight) / a.sqrt()) as f32 } else { SECTION_FACING };
        }
    }
    lanes
}
