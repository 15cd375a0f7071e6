use crate::contact::skin_position;
use crate::elastic::{self, Elastic};
use crate::lattice::{Face, Lattice};
use crate::thermodynamics::Gel;
use bedswell_geometry::Vector;
use std::sync::Arc;

/// One bead: its lattice, its size when dry, and where its nodes are.
#[derive(Clone, Debug)]
pub struct Bead {
    lattice: Arc<Lattice>,
    dry_radius: f64,
    /// All x, all y, all z (m).
    pub(crate) positions: Vec<f64>,
}

impl Bead {
    /// A bead of `dry_radius` (m), or a block half that long along x when dry, uniformly swollen to the linear `stretch` about
    /// `centre` (m).
    pub fn new(lattice: Arc<Lattice>, dry_radius: f64, centre: Vector, stretch: f64) -> Self {
        let stride = lattice.stride();
        let mut bead = Self { lattice, dry_radius, positions: vec![0.0; 3 * stride] };
        let size = bead.voxel_edge() * stretch;
        for node in 0..bead.lattice.node_count() {
            let offset = bead.lattice.node_offset(node);
            for axis in 0..3 {
                bead.positions[axis * stride + node] = centre[axis] + size * offset[axis];
            }
        }
        bead
    }

    /// The bead's lattice.
    pub fn lattice(&self) -> &Lattice {
        &self.lattice
    }

    /// Radius when dry, or half the length of a block along x (m).
    pub fn dry_radius(&self) -> f64 {
        self.dry_radius
    }

    /// Edge of a voxel when dry (m).
    pub fn voxel_edge(&self) -> f64 {
        2.0 * self.dry_radius / self.lattice.across() as f64
    }

    /// Where a node is (m).
    pub fn node(&self, node: usize) -> Vector {
        let stride = self.lattice.stride();
        Vector::from_fn(|axis, _| self.positions[axis * stride + node])
    }

    /// Middle of a voxel's eight nodes (m).
    pub fn voxel_centre(&self, voxel: usize) -> Vector {
        self.lattice.corners_of(voxel).iter().map(|&node| self.node(node)).sum::<Vector>() / 8.0
    }

    /// Where a skin point is (m).
    pub fn skin_point(&self, point: usize) -> Vector {
        skin_position(&self.lattice.skin, &self.positions, point)
    }

    /// Centre of the nodes (m).
    pub fn centre(&self) -> Vector {
        let nodes = self.lattice.node_count();
        Vector::from_fn(|axis, _| {
            let start = axis * self.lattice.stride();
            self.positions[start..start + nodes].iter().sum::<f64>() / nodes as f64
        })
    }

    /// Largest distance of a skin point from the centre (m).
    pub fn extent(&self) -> f64 {
        let centre = self.centre();
        (0..self.lattice.skin.len()).map(|point| (self.skin_point(point) - centre).norm()).fold(0.0, f64::max)
    }

    /// Edge of a voxel that has its share of the bead's volume (m).
    pub fn swollen_edge(&self) -> f64 {
        self.voxel_edge() * (self.volume() / self.dry_volume()).cbrt()
    }

    /// Volume of the dry gel (m³).
    pub fn dry_volume(&self) -> f64 {
        let filled: f64 = (0..self.lattice.voxel_count()).map(|voxel| self.lattice.filled(voxel)).sum();
        filled * self.voxel_edge().powi(3)
    }

    /// Volume of the gel (m³).
    pub fn volume(&self) -> f64 {
        let gradients = self.gradients();
        let filled: f64 =
            gradients.iter().enumerate().map(|(voxel, f)| self.lattice.filled(voxel) * f.determinant()).sum();
        filled * self.voxel_edge().powi(3)
    }

    /// Ruptures the bonds at these faces.
    pub(crate) fn split(&mut self, faces: &[Face]) {
        let torn = self.lattice.split(faces);
        self.positions = torn.carry_nodes(&self.lattice, &self.positions);
        self.lattice = Arc::new(torn);
    }

    /// Mean deformation gradient of every voxel, from dry.
    pub(crate) fn gradients(&self) -> Vec<bedswell_geometry::Matrix> {
        elastic::gradients(&self.lattice, self.voxel_edge(), &self.positions)
    }

    pub(crate) fn shared_lattice(&self) -> Arc<Lattice> {
        Arc::clone(&self.lattice)
    }

    /// Grows the bead about its centre.
    pub(crate) fn scale(&mut self, by: f64) {
        let (nodes, stride) = (self.lattice.node_count(), self.lattice.stride());
        let centre = self.centre();
        for (axis, column) in self.positions.chunks_exact_mut(stride).enumerate() {
            column[..nodes].iter_mut().for_each(|x| *x = centre[axis] + by * (*x - centre[axis]));
        }
    }

    pub(crate) fn elastic_and_positions<'a>(&'a mut self, gel: &'a Gel) -> (Elastic<'a>, &'a mut Vec<f64>) {
        let edge = self.voxel_edge();
        (Elastic { lattice: &self.lattice, gel, edge }, &mut self.positions)
    }
}
