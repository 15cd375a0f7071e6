//! Where water may pass: the faces of every voxel when dry, and how the potential's
//! gradient in a voxel follows from the differences over its faces.

use crate::lattice::Lattice;
use bedswell_geometry::{Matrix, Vector};

/// A voxel has at most six neighbours or faces of cracks, and one piece of outer skin.
pub(super) const FACES: usize = 7;

/// In place of a neighbour: the skin.
pub(super) const SKIN: u32 = u32::MAX;

/// A skin that touches a voxel's middle would let water in without resistance.
const LEAST_DISTANCE: f64 = 0.05;

/// Reconstruction of the gradient in one voxel's gel (lengths in dry voxel edges).
///
/// Potentials stand for the middle of each voxel's gel. Over a face k the potential
/// differs from the voxel's own by δ_k, along r_k; then Σ a n δ = (Σ a n rᵀ) g for any
/// linear field, which gives its gradient g exactly. What the δ have beyond a linear field
/// is damped face by face, as in the hybrid finite volumes of Eymard, Gallouët & Herbin
/// 2010, IMA J. Numer. Anal. 30:1009 (from memory); between full voxels and without shear
/// that leaves the usual two-point fluxes.
#[derive(Clone, Debug)]
pub(super) struct Cell {
    /// Gel in the voxel (voxel volumes).
    pub(super) volume: f64,
    pub(super) count: usize,
    /// Slot of the voxel beyond each face, or `SKIN`.
    pub(super) others: [u32; FACES],
    /// Share of the way to the other potential at which the face lies.
    pub(super) shares: [f64; FACES],
    /// Area of each face over its distance.
    pub(super) widths: [f64; FACES],
    pub(super) normals: [Vector; FACES],
    /// g by the δ.
    pub(super) gradient: [Vector; FACES],
    /// What each δ has beyond g, by the δ.
    pub(super) beyond: [[f64; FACES]; FACES],
}

struct Face {
    other: u32,
    share: f64,
    area: f64,
    normal: Vector,
    /// From the voxel's middle to the face.
    reach: Vector,
}

/// The cells of all voxels; water passes the skin points that are `open`.
pub(super) fn cells(lattice: &Lattice, open: impl Fn(usize) -> bool) -> Vec<Cell> {
    let middles: Vec<Vector> = (0..lattice.voxel_count()).map(|voxel| middle(lattice, voxel)).collect();
    let mut faces: Vec<Vec<Face>> = middles.iter().map(|_| Vec::with_capacity(FACES)).collect();
    for (low, high, axis) in lattice.bonds() {
        let plane = lattice.voxel_offset(low)[axis] + 0.5;
        let way = middles[high] - middles[low];
        let share = ((plane - middles[low][axis]) / way[axis]).clamp(LEAST_DISTANCE, 1.0 - LEAST_DISTANCE);
        let area = lattice.face_area(low, axis);
        let normal = Vector::ith(axis, 1.0);
        let mut add = |from: usize, to: usize, share: f64, side: f64| {
            faces[from].push(Face {
                other: lattice.slots[to],
                share,
                area,
                normal: normal * side,
                reach: way * (side * share),
            });
        };
        add(low, high, share, 1.0);
        add(high, low, 1.0 - share, -1.0);
    }
    add_cracks(lattice, &middles, &mut faces);
    add_skin(lattice, &middles, open, &mut faces);
    faces.iter().enumerate().map(|(voxel, faces)| Cell::new(lattice.filled(voxel), faces)).collect()
}

impl Cell {
    fn new(volume: f64, faces: &[Face]) -> Self {
        let mut cell = Self {
            volume,
            count: faces.len(),
            others: [SKIN; FACES],
            shares: [0.0; FACES],
            widths: [0.0; FACES],
            normals: [Vector::zeros(); FACES],
            gradient: [Vector::zeros(); FACES],
            beyond: [[0.0; FACES]; FACES],
        };
        let moment: Matrix = faces.iter().map(|face| face.normal * face.reach.transpose() * face.area).sum();
        let inverse = moment.try_inverse().or_else(|| moment.pseudo_inverse(1e-9).ok());
        let inverse = inverse.unwrap_or_else(Matrix::zeros);
        for (k, face) in faces.iter().enumerate() {
            cell.others[k] = face.other;
            cell.shares[k] = face.share;
            cell.widths[k] = face.area / face.reach.dot(&face.normal).max(LEAST_DISTANCE);
            cell.normals[k] = face.normal;
            cell.gradient[k] = inverse * face.normal * face.area;
        }
        for (k, face) in faces.iter().enumerate() {
            for l in 0..faces.len() {
                let linear = face.reach.dot(&cell.gradient[l]);
                cell.beyond[k][l] = if k == l { 1.0 - linear } else { -linear };
            }
        }
        cell
    }
}

/// Middle of a voxel's gel, from the shape's centre.
fn middle(lattice: &Lattice, voxel: usize) -> Vector {
    let (centre, slot) = (lattice.voxel_offset(voxel), lattice.slots[voxel] as usize);
    Vector::from_fn(|axis, _| centre[axis] - 0.5 + lattice.first[axis][slot])
}

/// Gives the voxels beside cracks that water from outside reaches faces towards it; nothing
/// flows across a crack.
fn add_cracks(lattice: &Lattice, middles: &[Vector], faces: &mut [Vec<Face>]) {
    for (crack, _) in lattice.cracks().iter().zip(lattice.exposed()).filter(|(_, exposed)| *exposed) {
        let centre = Vector::from(lattice.voxel_offset(crack.low as usize));
        let normal = Vector::ith(crack.axis, 1.0);
        let area = lattice.face_area(crack.low as usize, crack.axis);
        for (voxel, side) in [(crack.low as usize, 1.0), (crack.high as usize, -1.0)] {
            let reach = centre + normal * 0.5 - middles[voxel];
            faces[voxel].push(Face { other: SKIN, share: 1.0, area, normal: normal * side, reach });
        }
    }
}

/// Gives every voxel with open skin points one face through them.
fn add_skin(lattice: &Lattice, middles: &[Vector], open: impl Fn(usize) -> bool, faces: &mut [Vec<Face>]) {
    let mut sums = vec![(0.0, Vector::zeros(), Vector::zeros()); middles.len()];
    for point in (0..lattice.skin.outer).filter(|&point| open(point)) {
        let place = Vector::from(lattice.skin.place[point]);
        let (count, normal, sum) = &mut sums[lattice.skin.host[point] as usize];
        *count += 1.0;
        *normal -= lattice.shape().depth(&place).1;
        *sum += place;
    }
    for (voxel, (count, normal, sum)) in sums.into_iter().enumerate() {
        let length = normal.norm();
        if length > 0.0 {
            faces[voxel].push(Face {
                other: SKIN,
                share: 1.0,
                area: length * lattice.skin.area,
                normal: normal / length,
                reach: sum / count - middles[voxel],
            });
        }
    }
}
