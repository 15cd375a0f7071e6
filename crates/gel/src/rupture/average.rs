//! Stress as one over a length.

use crate::lattice::Lattice;
use bedswell_geometry::{Matrix, Vector};

/// Mean stress and deformation of the gel round a place.
#[derive(Clone, Copy, Debug)]
pub(super) struct Mean {
    pub(super) stress: Matrix,
    pub(super) gradient: Matrix,
}

/// The largest principal tension somewhere.
#[derive(Clone, Copy, Debug)]
pub(super) struct Tension {
    /// Geometric mean of the force over the area that it acts on now, and over that area's
    /// size at a reference stretch (Pa). In a neo-Hookean gel in pure shear that is √(2 E' W)
    /// within 12 % up to a stretch of 2, so that what it says of the energy W for a crack
    /// does not depend on how far the gel is stretched; the nominal tension alone falls 40 %
    /// short.
    pub(super) size: f64,
    /// Unit normal of the area when dry.
    pub(super) normal: Vector,
}

impl Mean {
    /// An area with the normal n in space had the direction Fᵀn when dry, and 1/J |Fᵀn|
    /// of its size (Nanson).
    pub(super) fn tension(&self, stretch: f64) -> Tension {
        let eigen = self.stress.symmetric_eigen();
        let largest = eigen.eigenvalues.imax();
        let normal = self.gradient.transpose() * eigen.eigenvectors.column(largest);
        let length = normal.norm();
        let area = self.gradient.determinant() / (length * stretch * stretch);
        Tension { size: eigen.eigenvalues[largest] * area.sqrt(), normal: normal / length }
    }
}

/// The stress (Pa) and deformation gradient of every voxel.
#[derive(Clone, Copy)]
pub(super) struct Field<'a> {
    pub(super) lattice: &'a Lattice,
    pub(super) stress: &'a [Matrix],
    pub(super) gradients: &'a [Matrix],
}

impl Field<'_> {
    /// The mean over voxels, weighed by their gel when dry and by more.
    pub(super) fn mean(&self, voxels: impl Iterator<Item = (usize, f64)>) -> Mean {
        let (mut sum, mut total) = (Mean { stress: Matrix::zeros(), gradient: Matrix::zeros() }, 0.0);
        for (voxel, weight) in voxels {
            let weight = weight * self.lattice.filled(voxel);
            sum.stress += self.stress[voxel] * weight;
            sum.gradient += self.gradients[voxel] * weight;
            total += weight;
        }
        Mean { stress: sum.stress / total, gradient: sum.gradient / total }
    }
}

/// Finds the voxels that are still connected within a reach.
pub(super) struct Neighbourhood {
    /// Voxel edges.
    reach: f64,
    seen: Vec<u32>,
    round: u32,
    queue: Vec<(usize, f64)>,
}

impl Neighbourhood {
    pub(super) fn new(lattice: &Lattice, reach: f64) -> Self {
        Self { reach, seen: vec![0; lattice.voxel_count()], round: 0, queue: Vec::new() }
    }

    /// The voxels within reach of a place (voxel edges from the centre) that intact bonds
    /// connect to one of `seeds` without leaving it, each with the weight 1 - r²/ℓ².
    pub(super) fn find(
        &mut self,
        lattice: &Lattice,
        seeds: impl Iterator<Item = usize>,
        place: &Vector,
    ) -> &[(usize, f64)] {
        self.round += 1;
        self.queue.clear();
        let square = self.reach * self.reach;
        let weight =
            |voxel: usize| 1.0 - (Vector::from(lattice.voxel_offset(voxel)) - place).norm_squared() / square;
        for voxel in seeds {
            if self.seen[voxel] != self.round {
                self.seen[voxel] = self.round;
                self.queue.push((voxel, weight(voxel).max(f64::MIN_POSITIVE)));
            }
        }
        let mut at = 0;
        while let Some(&(voxel, _)) = self.queue.get(at) {
            at += 1;
            for next in (0..6).filter_map(|face| lattice.neighbour(voxel, face)) {
                if self.seen[next] != self.round {
                    self.seen[next] = self.round;
                    let weight = weight(next);
                    if weight > 0.0 {
                        self.queue.push((next, weight));
                    }
                }
            }
        }
        &self.queue
    }
}
