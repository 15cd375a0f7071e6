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
