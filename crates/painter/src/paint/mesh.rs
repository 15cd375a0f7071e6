use super::bins::Bounds;
use super::tile::{FLAT, SIDE, Tile};
use super::view::{NEAR, Seen, View};
use crate::{Light, Mesh, shade, srgb::Srgb};
use rayon::prelude::*;

/// A section lies in the cutting plane; it stays if it is no farther in front than this.
const SECTION_SLACK: f64 = 1e-4;

/// A mesh as the camera sees it.
pub(super) struct Surface<'a> {
    mesh: &'a Mesh,
    /// `None` where a point is not finite.
    points: Vec<Option<Seen>>,
    normals: Vec<Seen>,
}

/// A triangle of a surface.
///
/// With corners `v0, v1, v2` a sight line `d = (u, v, 1)` meets its plane at the depth `1 / s`,
/// where corner `i` has the weight `e_i / s` with `e_i = d · (v_j × v_k) / |v0 · (v1 × v2)|`
/// and `s = e_0 + e_1 + e_2`. All are linear along a row of samples, depth and weights are
/// right in perspective, and what lies behind the eye takes care of itself because the line
/// meets the triangle only where all three are positive (Olano and Greer, 1997).
pub(super) struct Facet {
    pub(super) bounds: Bounds,
    /// Which surface it is part of.
    pub(super) surface: usize,
    corners: [usize; 3],
    edges: [Seen; 3],
    scale: f64,
    depth: f64,
    normal: Seen,
}

impl<'a> Surface<'a> {
    pub(super) fn new(view: &View, mesh: &'a Mesh) -> Self {
        let normal = |normal: &crate::Point| view.direction(&normal.map(f64::from));
        Self {
            mesh,
            points: mesh.points.par_iter().map(|point| view.place(point)).collect(),
            normals: mesh.normals.par_iter().map(normal).collect(),
        }
    }

    pub(super) fn is_opaque(&self) -> bool {
        self.mesh.colours.iter().all(|colour| colour.a == 255)
    }

    /// Depth of the mean of its points.
    pub(super) fn depth(&self) -> f64 {
        let depths = || self.points.iter().flatten().map(|point| point.z);
        depths().sum::<f64>() / depths().count().max(1) as f64
    }
}

/// The triangles of a surface that can be seen; those with missing points or colours are left out.
pub(super) fn facets(view: &View, number: usize, surface: &Surface<'_>) -> Vec<Facet> {
    let triangles = surface.mesh.triangles.par_iter();
    triangles.filter_map(|triangle| Facet::new(view, number, surface, triangle)).collect()
}

/// Triangles sorted from the farthest to the nearest.
pub(super) fn from_behind(mut facets: Vec<Facet>) -> impl Iterator<Item = Facet> {
    facets.sort_by(|a, b| b.depth.total_cmp(&a.depth));
    facets.into_iter()
}

impl Facet {
    fn new(view: &View, number: usize, surface: &Surface<'_>, triangle: &[u32; 3]) -> Option<Self> {
        let corners = triangle.map(|corner| corner as usize);
        let mut points = [Seen::zeros(); 3];
        for (point, &corner) in points.iter_mut().zip(&corners) {
            *point = (*surface.points.get(corner)?)?;
            surface.mesh.colours.get(corner)?;
        }
        let [p, q, r] = &points;
        let volume = p.dot(&q.cross(r));
        let sign = volume.signum();
        let scale = 1.0 / volume.abs();
        if !scale.is_finite() {
            return None;
        }
        let bounds = if points.iter().all(|point| point.z > NEAR) {
            let on_screen = points.map(|point| view.project(&point));
            let extreme = |pick: fn(f64, f64) -> f64| {
                std::array::from_fn(|axis| {
                    on_screen.iter().map(|place| place[axis]).reduce(pick).unwrap_or(0.0)
                })
            };
            view.bounds(extreme(f64::min), extreme(f64::max))
        } else if points.iter().any(|point| point.z > NEAR) {
            view.everything()
        } else {
            None
        };
        Some(Self {
            bounds: bounds?,
            surface: number,
            corners,
            edges: [q.cross(r) * sign, r.cross(p) * sign, p.cross(q) * sign],
            scale,
            depth: (p.z + q.z + r.z) / 3.0,
            normal: (q - p).cross(&(r - p)),
        })
    }

    /// Passes on each sample of a tile where it is the nearest.
    #[inline(always)]
    pub(super) fn scan(
        &self,
        view: &View,
        cut: Option<&(Seen, f64)>,
        surface: &Surface<'_>,
        tile: &mut Tile,
        put: impl Fn(&mut Tile, usize, f32, [u8; 4], f32),
    ) {
        let cut = cut.filter(|_| surface.mesh.cut);
        let srgb = Srgb::tables();
        let colours = self.corners.map(|corner| surface.mesh.colours[corner].bytes());
        let lights = colours.map(|colour| srgb.light(colour));
        let even = colours[0] == colours[1] && colours[1] == colours[2];
        for line in tile.rows(self.bounds.top, self.bounds.bottom + 1) {
            let up = view.up(tile.corner[1] + line as i32);
            for column in self.columns(view, tile, up) {
                let sight = Seen::new(view.across(tile.corner[0] + column as i32), up, 1.0);
                let weights = self.edges.map(|edge| edge.dot(&sight) * self.scale);
                let depth = 1.0 / weights.iter().sum::<f64>();
                let at = line * SIDE + column;
                let cut_away =
                    cut.is_some_and(|(normal, offset)| normal.dot(&sight) * depth > offset + SECTION_SLACK);
                if depth > NEAR && (depth as f32) < tile.depth[at] && !cut_away {
                    let weights = weights.map(|weight| (weight * depth).clamp(0.0, 1.0));
                    let lit = match surface.mesh.light {
                        Light::Flat => FLAT,
                        Light::Lit => self.lit(surface, &sight, weights),
                    };
                    let colour = match even {
                        true => colours[0],
                        false => srgb.mean(&lights, weights.map(|weight| weight as f32)),
                    };
                    put(tile, at, depth as f32, colour, lit);
                }
            }
        }
    }

    /// The columns of the tile in one row where all edges are positive. A sample on the edge
    /// between two triangles belongs to exactly one of them.
    #[inline(always)]
    fn columns(&self, view: &View, tile: &Tile, up: f64) -> std::ops::Range<usize> {
        let (mut first, mut end) = (f64::from(self.bounds.left), f64::from(self.bounds.right) + 1.0);
        for edge in &self.edges {
            let start = edge.y * up + edge.z;
            if edge.x > 0.0 {
                first = first.max(view.column(-start / edge.x));
            } else if edge.x < 0.0 {
                end = end.min(view.column(-start / edge.x));
            } else if start < 0.0 || (start == 0.0 && edge.y < 0.0) {
                return 0..0;
            }
        }
        tile.columns(first as i32, end as i32)
    }

    #[inline(always)]
    fn lit(&self, surface: &Surface<'_>, sight: &Seen, weights: [f64; 3]) -> f32 {
        let smooth: Option<Seen> = (0..3)
            .map(|corner| surface.normals.get(self.corners[corner]).map(|normal| normal * weights[corner]))
            .sum();
        let normal = smooth.unwrap_or(self.normal).normalize();
        let normal = if normal.dot(sight) > 0.0 { -normal } else { normal };
        if normal.iter().all(|part| part.is_finite()) {
            shade([normal.x as f32, normal.y as f32, -normal.z as f32])
        } else {
            shade([0.0, 0.0, 1.0])
        }
    }
}
