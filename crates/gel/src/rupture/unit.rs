//! The smallest pieces of a crack.
//!
//! Single bonds split nothing: a crack grows by all intact bonds across one axis round a
//! vertex. Averaged stress decides whether one gives way, its own stress which.

use super::Event;
use super::average::{Field, Neighbourhood, Tension};
use super::toughness::Criterion;
use crate::bead::Bead;
use crate::lattice::{Face, Lattice};
use bedswell_geometry::Vector;

/// Bonds give way whose faces lie within 47 degrees or so of the plane that tension pulls
/// apart: one of the three axes always does.
const ALIGNED: f64 = 0.56;
/// Share of its strength at which a unit's own tension makes it worth averaging round it:
/// averages are largest a little ahead of a crack's tip, where tension itself has fallen.
const WORTH_AVERAGING: f64 = 0.6;

/// The intact bonds across one axis round a vertex.
#[derive(Clone, Debug)]
struct Unit {
    faces: Vec<Face>,
    /// Middle of the faces (voxel edges from the centre).
    place: Vector,
}

impl Unit {
    fn axis(&self) -> usize {
        usize::from(self.faces[0].axis)
    }
}

/// A unit that is loaded.
#[derive(Clone, Debug)]
pub(crate) struct Loaded {
    unit: Unit,
    /// Averaged tension over strength.
    pub(super) ratio: f64,
}

impl Loaded {
    /// Faces of its bonds.
    pub(crate) fn faces(&self) -> &[Face] {
        &self.unit.faces
    }

    /// Its rupture.
    pub(crate) fn event(&self, bead: &Bead, criterion: &Criterion) -> Event {
        let (lattice, edge) = (bead.lattice(), bead.voxel_edge() * criterion.stretch);
        let area = |face: &Face| lattice.face_area(face.low as usize, usize::from(face.axis));
        Event {
            place: self.unit.place * edge,
            depth: lattice.shape().depth(&self.unit.place).0.max(0.0) * edge,
            area: self.faces().iter().map(area).sum::<f64>() * edge * edge,
            ratio: self.ratio,
            newton_steps: 0,
        }
    }
}

/// The units that tension tears hardest at among those loaded to at least `ratio` of their
/// strength, hardest first, further than `apart` (voxel edges) from each other.
pub(super) fn loaded(field: &Field, criterion: &Criterion, edge: f64, ratio: f64, apart: f64) -> Vec<Loaded> {
    let lattice = field.lattice;
    let mut neighbourhood = Neighbourhood::new(lattice, criterion.length / edge);
    let strength = |unit: &Unit| criterion.tension * criterion.strengths.at((unit.place * edge).into());
    let mut found: Vec<Loaded> = Vec::new();
    for Candidate { unit, voxels, own } in candidates(field, criterion, ratio) {
        let strength = strength(&unit);
        let near = |other: &Loaded| (other.unit.place - unit.place).norm() <= apart;
        if own < WORTH_AVERAGING * ratio * strength || found.iter().any(near) {
            continue;
        }
        let around = neighbourhood.find(lattice, voxels.iter().copied(), &unit.place);
        let Tension { size, normal } = field.mean(around.iter().copied()).tension(criterion.stretch);
        if size >= ratio * strength && normal[unit.axis()].abs() >= ALIGNED {
            found.push(Loaded { unit, ratio: size / strength });
        }
    }
    found
}

/// A unit whose own tension may overload it.
struct Candidate {
    unit: Unit,
    voxels: Vec<usize>,
    /// Its own tension (Pa).
    own: f64,
}

/// Units round the voxels whose tension comes near the least strength, hardest pulled first.
fn candidates(field: &Field, criterion: &Criterion, ratio: f64) -> Vec<Candidate> {
    let lattice = field.lattice;
    let enough = WORTH_AVERAGING * ratio * criterion.least * criterion.tension;
    let own = |voxels: &[usize]| {
        field.mean(voxels.iter().map(|&voxel| (voxel, 1.0))).tension(criterion.stretch).size
    };
    let hot: Vec<usize> = (0..lattice.voxel_count()).filter(|&voxel| own(&[voxel]) > enough).collect();
    let mut candidates = Vec::new();
    for vertex in vertices(lattice, &hot) {
        for axis in 0..3 {
            let Some((unit, voxels)) = unit_at(lattice, vertex, axis) else { continue };
            let own = own(&voxels);
            if own > enough {
                candidates.push(Candidate { unit, voxels, own });
            }
        }
    }
    candidates.sort_by(|a, b| b.own.total_cmp(&a.own));
    candidates
}

/// The vertices of voxels, in order.
fn vertices(lattice: &Lattice, voxels: &[usize]) -> Vec<[u16; 3]> {
    let mut vertices: Vec<[u16; 3]> = voxels.iter().flat_map(|&voxel| lattice.vertices_of(voxel)).collect();
    vertices.sort_unstable_by_key(|&[x, y, z]| (z, y, x));
    vertices.dedup();
    vertices
}

/// The unit across an axis round a vertex, if any of its bonds are intact, and the voxels
/// on both its sides.
fn unit_at(lattice: &Lattice, vertex: [u16; 3], axis: usize) -> Option<(Unit, Vec<usize>)> {
    let (mut faces, mut voxels, mut place) = (Vec::with_capacity(4), Vec::with_capacity(8), Vector::zeros());
    for low in lattice.voxels_below(vertex, axis).into_iter().flatten() {
        if let Some(high) = lattice.neighbour(low, 2 * axis + 1) {
            faces.push(Face { low: low as u32, axis: axis as u8 });
            voxels.extend([low, high]);
            place += Vector::from(lattice.voxel_offset(low)) + Vector::ith(axis, 0.5);
        }
    }
    let place = place / faces.len() as f64;
    (!faces.is_empty()).then_some((Unit { faces, place }, voxels))
}
