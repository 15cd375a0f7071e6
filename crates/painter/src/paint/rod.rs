use super::bins::Bounds;
use super::tile::{FLAT, SIDE, Tile};
use super::view::{NEAR, Seen, View};
use crate::{Rod, srgb::Srgb};

/// A rod as the camera sees it: a strip with round ends.
pub(super) struct Strip {
    pub(super) bounds: Bounds,
    /// Depth of its nearer end.
    pub(super) nearest: f32,
    from: [f64; 2],
    unit: [f64; 2],
    length: f64,
    /// Half its width at each end (samples).
    half: [f32; 2],
    /// Reciprocal depth at each end.
    closeness: [f32; 2],
    colours: [[u8; 4]; 2],
    /// Whether each end is where a plane cut it, and so has no round cap.
    blunt: [bool; 2],
}

impl Strip {
    /// `None` if it cannot be seen.
    #[inline(always)]
    pub(super) fn new(view: &View, cut: Option<&(Seen, f64)>, rod: &Rod) -> Option<Self> {
        let ends = [view.place(&rod.ends[0])?, view.place(&rod.ends[1])?];
        let radius = view.length(rod.radius);
        if !radius.is_finite() {
            return None;
        }
        let mut part = [0.0, 1.0];
        let mut keep = |before: [f64; 2]| {
            let crossing = || before[0] / (before[0] - before[1]);
            match before.map(|distance| distance > 0.0) {
                [true, true] => part = [1.0, 0.0],
                [true, false] => part[0] = crossing().max(part[0]),
                [false, true] => part[1] = crossing().min(part[1]),
                [false, false] => {}
            }
        };
        keep(ends.map(|end| NEAR - end.z));
        if let Some((normal, offset)) = cut {
            keep(ends.map(|end| normal.dot(&end) - offset));
        }
        if part[0] > part[1] {
            return None;
        }

        let colours = rod.colours.map(|colour| colour.bytes());
        let at = |fraction: f64| {
            let place = ends[0] + (ends[1] - ends[0]) * fraction;
            let closeness = 1.0 / place.z;
            let half = (radius * closeness * view.focal()).max(0.5 * view.samples as f64);
            (view.project_at(&place, closeness), closeness, half)
        };
        let tint = |fraction: f64| match fraction {
            0.0 => colours[0],
            1.0 => colours[1],
            _ => {
                let srgb = Srgb::tables();
                srgb.between(&colours.map(|colour| srgb.light(colour)), fraction as f32)
            }
        };
        let [(from, near, thick), (to, far, thin)] = part.map(at);
        let widest = thick.max(thin);
        let along = [to[0] - from[0], to[1] - from[1]];
        let length = (along[0] * along[0] + along[1] * along[1]).sqrt();
        if !length.is_finite() {
            return None;
        }
        Some(Self {
            bounds: view.bounds(
                std::array::from_fn(|axis| from[axis].min(to[axis]) - widest),
                std::array::from_fn(|axis| from[axis].max(to[axis]) + widest),
            )?,
            nearest: ends[0].z.min(ends[1].z).max(NEAR) as f32,
            from,
            unit: if length > 0.0 { along.map(|part| part / length) } else { [1.0, 0.0] },
            length,
            half: [thick as f32, thin as f32],
            closeness: [near as f32, far as f32],
            colours: part.map(tint),
            blunt: [part[0] > 0.0, part[1] < 1.0],
        })
    }

    /// Depth of its middle.
    pub(super) fn depth(&self) -> f64 {
        2.0 / f64::from(self.closeness[0] + self.closeness[1])
    }

    /// Passes on each sample of a tile where it is the nearest.
    #[inline(always)]
    pub(super) fn scan(&self, tile: &mut Tile, put: impl Fn(&mut Tile, usize, f32, [u8; 4], f32)) {
        let srgb = Srgb::tables();
        let even = self.colours[0] == self.colours[1];
        let lights = self.colours.map(|colour| srgb.light(colour));
        let closer = self.closeness[1] - self.closeness[0];
        let wider = self.half[1] - self.half[0];
        let shorten = if self.length > 0.0 { 1.0 / self.length } else { 0.0 };
        let widest = f64::from(self.half[0].max(self.half[1]));
        let (lean, spread) = if self.unit[1].abs() > 1e-6 {
            (self.unit[0] / self.unit[1], widest / self.unit[1].abs())
        } else {
            (0.0, f64::INFINITY)
        };
        for line in tile.rows(self.bounds.top, self.bounds.bottom + 1) {
            let y = f64::from(tile.corner[1] + line as i32) + 0.5 - self.from[1];
            let middle = self.from[0] + y * lean - 0.5;
            let left = self.bounds.left.max((middle - spread).ceil() as i32);
            let right = self.bounds.right.min((middle + spread).floor() as i32);
            for column in tile.columns(left, right + 1) {
                let x = f64::from(tile.corner[0] + column as i32) + 0.5 - self.from[0];
                let forward = x * self.unit[0] + y * self.unit[1];
                let aside = x * self.unit[1] - y * self.unit[0];
                let along = forward.clamp(0.0, self.length);
                let fraction = (along * shorten) as f32;
                let half = f64::from(self.half[0] + wider * fraction);
                let beyond = forward - along;
                let inside = if beyond == 0.0 {
                    -half < aside && aside <= half
                } else {
                    let blunt = self.blunt[usize::from(beyond > 0.0)];
                    !blunt && aside * aside + beyond * beyond < half * half
                };
                let depth = 1.0 / (self.closeness[0] + closer * fraction);
                let at = line * SIDE + column;
                if inside && depth < tile.depth[at] {
                    let colour = if even {
                        self.colours[0]
                    } else {
                        srgb.between(&lights, fraction * self.closeness[1] * depth)
                    };
                    put(tile, at, depth, colour, FLAT);
                }
            }
        }
    }
}

/// Where a rod may be seen: all that is kept of rods until a tile turns out to show them.
pub(super) struct Glimpse {
    pub(super) bounds: Bounds,
    /// Depth of its nearer end.
    pub(super) nearest: f32,
}

impl Glimpse {
    pub(super) fn new(view: &View, cut: Option<&(Seen, f64)>, rod: &Rod) -> Self {
        Strip::new(view, cut, rod).filter(|_| is_opaque(rod)).map_or(
            Self { bounds: Bounds::NOTHING, nearest: f32::INFINITY },
            |strip| Self { bounds: strip.bounds, nearest: strip.nearest },
        )
    }
}

/// Whether a rod hides what is behind it.
pub(super) fn is_opaque(rod: &Rod) -> bool {
    rod.colours.iter().all(|colour| colour.a == 255)
}
