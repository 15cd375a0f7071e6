//! The smallest pieces of a crack.
//!
//! Single bonds split nothing: a crack grows by all intact bonds across one axis round a
//! vertex, and what lies beside them on the plane of tension. Averaged stress decides
//! whether one gives way, its own stress which.

use super::Event;
use super::average::{Field, Tension};
use super::toughness::Criterion;
use crate::bead::Bead;
use crate::lattice::{Face, Lattice, Neighbourhood};
use bedswell_geometry::Vector;

/// Bonds give way whose faces lie within 47 degrees or so of the plane that tension pulls
/// apart: one of the three axes always does.
const ALIGNED: f64 = 0.56;
/// Share of its strength at which a unit's own tension makes it worth averaging round it:
/// averages are largest a little ahead of a crack's tip, where tension itself has fallen.
const WORTH_AVERAGING: f64 = 0.6;

/// Share of a unit's own tension at which bonds beside it break with it.
const AS_HARD: f64 = 0.8;
/// Distances below this are rounding (voxel edges).
const ROUNDING: f64 = 1e-9;

/// The intact bonds across one axis round a vertex, or more.
#[derive(Clone, Debug)]
struct Unit {
    faces: Vec<Face>,
    /// Middle of those round the vertex (voxel edges from the centre).
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
        let voxels = self.faces().iter().flat_map(|face| {
            let low = face.low as usize;
            [Some(low), lattice.neighbour(low, 2 * usize::from(face.axis) + 1)]
        });
        let middles: Vec<Vector> = voxels.flatten().map(|voxel| bead.voxel_centre(voxel)).collect();
        Event {
            place: self.unit.place * edge,
            lay: middles.iter().sum::<Vector>() / middles.len() as f64,
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
    for Candidate { unit, voxels, own, .. } in candidates(field, criterion, ratio) {
        let strength = strength(&unit);
        let near = |other: &Loaded| (other.unit.place - unit.place).norm() <= apart;
        if own < WORTH_AVERAGING * ratio * strength || found.iter().any(near) {
            continue;
        }
        let around = neighbourhood.find(lattice, voxels.iter().copied(), &unit.place);
        let Tension { size, normal } = field.mean(around.iter().copied()).tension(criterion.stretch);
        if size >= ratio * strength && normal[unit.axis()].abs() >= ALIGNED {
            let unit = patch(field, criterion.stretch, (unit, own), &normal, around);
            found.push(Loaded { unit, ratio: size / strength });
        }
    }
    found
}

/// The unit, with its own tension, together with those bonds of the gel round it that the
/// plane of the averaged tension crosses and that are pulled about as hard. Fronts so stay
/// even, and cracks on their plane, at any angle to the lattice and however fine it is;
/// units alone leave jagged fronts and bridges, which stop cracks that release enough energy.
fn patch(
    field: &Field,
    stretch: f64,
    (mut unit, own): (Unit, f64),
    normal: &Vector,
    around: &[(usize, f64)],
) -> Unit {
    let lattice = field.lattice;
    let is_above =
        |voxel: usize| (Vector::from(lattice.voxel_offset(voxel)) - unit.place).dot(normal) > ROUNDING;
    for &(low, _) in around {
        for axis in 0..3 {
            let face = Face { low: low as u32, axis: axis as u8 };
            let crossed = |&high: &usize| is_above(low) != is_above(high) && !unit.faces.contains(&face);
            let Some(high) = lattice.neighbour(low, 2 * axis + 1).filter(crossed) else { continue };
            let pair = field.mean([low, high].into_iter().map(|voxel| (voxel, 1.0)));
            if pair.tension(stretch).size >= AS_HARD * own {
                unit.faces.push(face);
            }
        }
    }
    unit
}

/// A unit whose own tension may overload it.
struct Candidate {
    unit: Unit,
    voxels: Vec<usize>,
    /// Its own tension (Pa), and what of it pulls across its faces.
    own: f64,
    pull: f64,
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
            let Tension { size, normal } =
                field.mean(voxels.iter().map(|&voxel| (voxel, 1.0))).tension(criterion.stretch);
            if size > enough {
                let pull = size * normal[axis].powi(2);
                candidates.push(Candidate { unit, voxels, own: size, pull });
            }
        }
    }
    candidates.sort_by(|a, b| b.pull.total_cmp(&a.pull));
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
