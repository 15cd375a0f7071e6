use crate::torn::{Bonded, crack_faces};
use bedswell_gel::{Face, Lattice, Locator, MaterialPoint};
use std::collections::HashMap;
use std::sync::OnceLock;

/// What all beads with the same number of voxels across and the same cracks have in common.
pub(crate) struct BeadModel {
    pub(crate) lattice: Lattice,
    /// Voxels at the low and the high side of every bond.
    pub(crate) bonds: Vec<[u32; 2]>,
    /// Nodes of every voxel.
    pub(crate) corners: Vec<[u32; 8]>,
    /// Share of the dry gel in every voxel.
    pub(crate) gel: Vec<f32>,
    /// Points of the skin, evenly spread.
    pub(crate) skin: Vec<MaterialPoint>,
    /// Triangles of the skin, seen anticlockwise from outside.
    pub(crate) triangles: Vec<[u32; 3]>,
    grid: OnceLock<Grid>,
}

/// Places in the ball half a voxel apart, for sections.
#[derive(Default)]
pub(crate) struct Grid {
    pub(crate) points: Vec<MaterialPoint>,
    /// Distance of each from the centre over the ball's radius, when dry.
    pub(crate) radii: Vec<f32>,
    /// Cells between eight places each, x fastest, with the voxel that carries their middle.
    pub(crate) cells: Vec<(u32, [u32; 8])>,
}

/// Divisions of the skin's octahedron edges beyond which a voxel is not divided further.
const FINEST: usize = 32;

impl BeadModel {
    pub(crate) fn new(across: usize, ruptured: &[Face]) -> Self {
        let whole = Lattice::new(across);
        let lattice = if ruptured.is_empty() { whole } else { whole.split(ruptured) };
        let locator = Locator::new(&lattice);
        let half = 0.5 * across as f64;
        let (directions, mut triangles) = sphere((2 * across).clamp(across, FINEST.max(across)));
        let mut skin: Vec<MaterialPoint> =
            directions.iter().map(|d| locator.find(d.map(|c| c * half))).collect();
        let bonded = Bonded::new(&lattice);
        triangles.retain(|&[a, b, c]| {
            let [a, b, c] = [a, b, c].map(|point| skin[point as usize].voxel);
            bonded.hang_together(a, b) && bonded.hang_together(b, c) && bonded.hang_together(c, a)
        });
        let (points, faces) = crack_faces(&lattice, &locator, skin.len() as u32);
        skin.extend(points);
        triangles.extend(faces);
        let gel: Vec<f64> = (0..lattice.voxel_count()).map(|voxel| lattice.filled(voxel)).collect();
        let all: f64 = gel.iter().sum();
        Self {
            bonds: lattice.bonds().iter().map(|&(low, high, _)| [low as u32, high as u32]).collect(),
            corners: (0..lattice.voxel_count()).map(|v| lattice.corners_of(v).map(|n| n as u32)).collect(),
            gel: gel.into_iter().map(|gel| (gel / all) as f32).collect(),
            skin,
            triangles,
            grid: OnceLock::new(),
            lattice,
        }
    }

    /// Made when a section is first asked for.
    pub(crate) fn grid(&self) -> &Grid {
        self.grid.get_or_init(|| Grid::new(&self.lattice))
    }
}

impl Grid {
    fn new(lattice: &Lattice) -> Self {
        let locator = Locator::new(lattice);
        let bonded = Bonded::new(lattice);
        let mut grid = Self::default();
        let across = lattice.across() as i32;
        let place = |[x, y, z]: [i32; 3]| [x, y, z].map(|c| 0.5 * f64::from(c - across));
        let radius =
            |at: [i32; 3]| place(at).iter().map(|c| c * c).sum::<f64>().sqrt() * 2.0 / f64::from(across);
        let mut index: HashMap<[i32; 3], u32> = HashMap::new();
        for z in 0..2 * across {
            for y in 0..2 * across {
                for x in 0..2 * across {
                    let corners: [[i32; 3]; 8] = std::array::from_fn(|k| {
                        [x + (k & 1) as i32, y + (k >> 1 & 1) as i32, z + (k >> 2) as i32]
                    });
                    if corners.iter().all(|&corner| radius(corner) > 1.0) {
                        continue;
                    }
                    let corners = corners.map(|corner| {
                        *index.entry(corner).or_insert_with(|| {
                            grid.points.push(locator.find(place(corner)));
                            grid.radii.push(radius(corner) as f32);
                            grid.points.len() as u32 - 1
                        })
                    });
                    let middle = locator.find(place([x, y, z]).map(|c| c + 0.25));
                    let is_whole = corners.iter().all(|&corner| {
                        bonded.hang_together(middle.voxel, grid.points[corner as usize].voxel)
                    });
                    if is_whole {
                        grid.cells.push((middle.voxel, corners));
                    }
                }
            }
        }
        grid
    }
}

/// Directions and triangles that cover the unit sphere: an octahedron whose edges are
/// divided into `rows`, mapped so that areas stay nearly equal.
fn sphere(rows: usize) -> (Vec<[f64; 3]>, Vec<[u32; 3]>) {
    let n = rows as i32;
    let mut index: HashMap<[i32; 3], u32> = HashMap::new();
    let mut directions = Vec::new();
    let mut triangles = Vec::new();
    for octant in 0..8 {
        let sign: [i32; 3] = std::array::from_fn(|axis| if octant >> axis & 1 == 1 { -1 } else { 1 });
        let mut at = |i: i32, j: i32| {
            let place = [sign[0] * i, sign[1] * j, sign[2] * (n - i - j)];
            *index.entry(place).or_insert_with(|| {
                directions.push(direction(place.map(|c| f64::from(c) / f64::from(n))));
                directions.len() as u32 - 1
            })
        };
        let flipped = sign[0] * sign[1] * sign[2] < 0;
        for i in 0..n {
            for j in 0..n - i {
                let mut add =
                    |[a, b, c]: [u32; 3]| triangles.push(if flipped { [a, c, b] } else { [a, b, c] });
                add([at(i, j), at(i + 1, j), at(i, j + 1)]);
                if i + j + 1 < n {
                    add([at(i + 1, j), at(i + 1, j + 1), at(i, j + 1)]);
                }
            }
        }
    }
    (directions, triangles)
}

/// A place on the octahedron |x| + |y| + |z| = 1, pushed out onto the sphere; the sine
/// spreads the places that would crowd at the corners.
fn direction(place: [f64; 3]) -> [f64; 3] {
    let spread = place.map(|c| (std::f64::consts::FRAC_PI_2 * c).sin());
    let length = spread.iter().map(|c| c * c).sum::<f64>().sqrt();
    spread.map(|c| c / length)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_skin_is_closed_and_looks_outwards() {
        let (directions, triangles) = sphere(12);
        assert_eq!(directions.len(), 4 * 12 * 12 + 2);
        assert_eq!(triangles.len(), 8 * 12 * 12);
        let mut volume = 0.0;
        for triangle in &triangles {
            let [a, b, c] = triangle.map(|point| nalgebra::Vector3::from(directions[point as usize]));
            let six_volumes = a.dot(&b.cross(&c));
            assert!(six_volumes > 0.0);
            volume += six_volumes / 6.0;
        }
        let ball = 4.0 / 3.0 * std::f64::consts::PI;
        assert!((0.97 * ball..ball).contains(&volume), "{volume}");
    }
}
