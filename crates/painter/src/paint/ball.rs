use super::bins::Bounds;
use super::row::{Cut, LANES, Lanes, Row, near_lanes};
use super::tile::{SIDE, Tile};
use super::view::{NEAR, Seen, View};
use crate::light::{LIGHT, ghost_opacity};
use crate::{Ball, srgb::Srgb};

/// Width of the dark rim of a section, as a fraction of the ball's radius and in samples.
const RIM: [f64; 2] = [0.05, 1.5];

/// A ball as the camera sees it.
///
/// A sight line `p = t (u, v, 1)` meets the ball about `c` where `a t² - 2 b t + k = 0` with
/// `a = u² + v² + 1`, `b = c · (u, v, 1)` and `k = c² - r²`; along a row of samples `a` and the
/// discriminant `b² - a k` are quadratic in `u`, and `b` is linear.
pub(super) struct Sphere {
    pub(super) centre: Seen,
    pub(super) colour: [u8; 4],
    pub(super) bounds: Bounds,
    /// Depth of the nearest point.
    pub(super) nearest: f32,
    pub(super) radius: f64,
    /// Square of the distance of its centre less square of its radius.
    pub(super) power: f64,
    /// Direction to the light over the radius.
    pub(super) light: Seen,
    /// If the plane cuts the ball: a point of the section is in its rim where its power (square
    /// of the radius less square of its distance from the centre) is below the reciprocal of this.
    rim: Option<f32>,
}

impl Sphere {
    /// `None` if it cannot be seen.
    pub(super) fn new(view: &View, cut: Option<&(Seen, f64)>, ball: &Ball) -> Option<Self> {
        let centre = view.place(&ball.centre)?;
        let radius = view.length(ball.radius);
        let power = centre.norm_squared() - radius * radius;
        if !(radius > 0.0 && power.is_finite() && centre.z + radius > NEAR) {
            return None;
        }
        let mut rim = None;
        if let Some((normal, offset)) = cut {
            let before = normal.dot(&centre) - offset;
            if before >= radius {
                return None;
            }
            if before > -radius {
                let section = (radius * radius - before * before).sqrt();
                let width = (RIM[0] * radius).max(RIM[1] * centre.z / view.focal()).min(section);
                rim = Some((1.0 / (2.0 * section * width)) as f32);
            }
        }
        let bounds = if centre.z - radius > NEAR {
            let [left, right] = tangents(centre.x, centre.z, radius);
            let [bottom, top] = tangents(centre.y, centre.z, radius);
            view.bounds(
                view.project(&Seen::new(left, top, 1.0)),
                view.project(&Seen::new(right, bottom, 1.0)),
            )?
        } else {
            view.everything()?
        };
        let colour = ball.colour.bytes();
        let nearest = (centre.z - radius) as f32;
        let light = Seen::new(LIGHT[0].into(), LIGHT[1].into(), (-LIGHT[2]).into()) / radius;
        Some(Self { centre, colour, bounds, nearest, radius, power, light, rim })
    }

    /// Paints it as an opaque ball.
    #[inline(always)]
    pub(super) fn paint(&self, view: &View, cut: Option<&(Seen, f64)>, tile: &mut Tile) {
        self.scan(
            view,
            cut,
            tile,
            #[inline(always)]
            |tile: &mut Tile, at: usize, lanes: &Lanes| {
                let depth: &mut [f32; LANES] =
                    (&mut tile.depth[at..at + LANES]).try_into().expect("eight samples");
                let base: &mut [[u8; 4]; LANES] =
                    (&mut tile.base[at..at + LANES]).try_into().expect("eight samples");
                let lit: &mut [f32; LANES] =
                    (&mut tile.lit[at..at + LANES]).try_into().expect("eight samples");
                for lane in 0..LANES {
                    let nearer = lanes.depth[lane] < depth[lane];
                    depth[lane] = if nearer { lanes.depth[lane] } else { depth[lane] };
                    base[lane] = if nearer { self.colour } else { base[lane] };
                    lit[lane] = if nearer { lanes.lit[lane] } else { lit[lane] };
                }
            },
        );
    }

    /// Lays it over the tile as a ghost.
    #[inline(always)]
    pub(super) fn paint_ghost(&self, view: &View, cut: Option<&(Seen, f64)>, tile: &mut Tile) {
        let srgb = Srgb::tables();
        let alpha = f32::from(self.colour[3]) / 255.0;
        let colour: [f32; 3] = std::array::from_fn(|channel| srgb.linear(self.colour[channel]));
        self.scan(
            view,
            cut,
            tile,
            #[inline(always)]
            |tile: &mut Tile, at: usize, lanes: &Lanes| {
                let mut opacity = [0.0; LANES];
                for lane in 0..LANES {
                    let over = alpha * ghost_opacity(lanes.facing[lane]);
                    opacity[lane] = if lanes.depth[lane] < tile.depth[at + lane] { over } else { 0.0 };
                }
                for channel in 0..4 {
                    let light: &mut [f32; LANES] =
                        (&mut tile.veils[channel][at..at + LANES]).try_into().expect("eight samples");
                    for lane in 0..LANES {
                        let own = if channel < 3 { lanes.lit[lane] * colour[channel] } else { 1.0 };
                        light[lane] += opacity[lane] * (own - light[lane]);
                    }
                }
            },
        );
    }

    /// Finds what each sample of a tile sees of the ball.
    #[inline(always)]
    fn scan(
        &self,
        view: &View,
        cut: Option<&(Seen, f64)>,
        tile: &mut Tile,
        put: impl Fn(&mut Tile, usize, &Lanes),
    ) {
        let cut = cut.zip(self.rim);
        for line in tile.rows(self.bounds.top, self.bounds.bottom + 1) {
            let up = view.up(tile.corner[1] + line as i32);
            if self.nearest > NEAR as f32 {
                let Some(row) = Row::new(view, self, tile.corner[0], up) else { continue };
                let cut = cut.map(|(plane, rim)| Cut::along(plane, rim, up));
                for block in row.blocks() {
                    let at = line * SIDE + block * LANES;
                    if !tile.hides::<LANES>(at, self.nearest) {
                        let slants = tile.slant[at..].first_chunk().expect("blocks end with the row");
                        let lanes = match &cut {
                            None => row.lanes(block, slants),
                            Some(cut) => row.cut_lanes(block, slants, cut),
                        };
                        put(tile, at, &lanes);
                    }
                }
            } else {
                for block in 0..SIDE / LANES {
                    let across = |lane: usize| view.across(tile.corner[0] + (block * LANES + lane) as i32);
                    let lanes = near_lanes(self, cut.map(|(plane, _)| plane), across, up);
                    put(tile, line * SIDE + block * LANES, &lanes);
                }
            }
        }
    }
}

/// Where sight lines touch a circle of a radius about (x, z), as offsets per depth, in order.
fn tangents(x: f64, z: f64, radius: f64) -> [f64; 2] {
    let (middle, half) = (x * z, radius * (x * x + z * z - radius * radius).max(0.0).sqrt());
    let scale = 1.0 / (z * z - radius * radius);
    [(middle - half) * scale, (middle + half) * scale]
}
