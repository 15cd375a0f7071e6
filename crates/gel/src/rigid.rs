//! The six rigid motions of a bead, which local preconditioners cannot see.

use crate::equilibrium::dot;
use bedswell_geometry::Vector;
use nalgebra::{DMatrix, SymmetricEigen};

/// Which rigid motions of a bead are held.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Held {
    /// None.
    Nothing,
    /// Its orientation: a frictionless round bead has no preferred one, only its
    /// lattice has.
    Rotation,
    /// Its orientation and the mean place of its nodes.
    Everything,
}

impl Held {
    /// How many of the motions, translations first, are left.
    fn kept(self) -> usize {
        match self {
            Held::Everything => 0,
            Held::Rotation => 3,
            Held::Nothing => 6,
        }
    }
}

/// Rigid motions of a bead, turned so that the stiffness couples none with another.
pub(crate) struct RigidModes {
    /// Motions with stiffness, orthonormal, and their stiffness.
    coarse: Vec<(Vec<f64>, f64)>,
    /// Motions with none, or with a negative one, and its size.
    free: Vec<(Vec<f64>, f64)>,
}

/// Stiffness below this share of the largest counts as none.
const NONE: f64 = 1e-9;

/// Share of a vector below which a part counts as rounding.
const ROUNDING: f64 = 1e-3;

impl RigidModes {
    /// The motions of the first `nodes` nodes at a state; those that are held count
    /// as free of stiffness.
    pub(crate) fn new(
        nodes: usize,
        positions: &[f64],
        held: Held,
        stiffness: impl Fn(&[f64]) -> Vec<f64>,
    ) -> Self {
        let mut modes = orthonormal_motions(nodes, positions);
        let kept = held.kept();
        if kept == 0 {
            return Self::held(nodes, positions, held);
        }
        let free = modes.drain(kept..).map(|mode| (mode, 0.0)).collect();
        let mut sorted = Self { coarse: Vec::new(), free };
        let products: Vec<Vec<f64>> = modes.iter().map(|mode| stiffness(mode)).collect();
        let coarse = DMatrix::from_fn(kept, kept, |i, j| {
            0.5 * (dot(&modes[i], &products[j]) + dot(&modes[j], &products[i]))
        });
        let eigen = SymmetricEigen::new(coarse);
        let largest = eigen.eigenvalues.amax();
        for (k, &value) in eigen.eigenvalues.iter().enumerate() {
            let mut mode = vec![0.0; positions.len()];
            for (i, part) in modes.iter().enumerate() {
                let share = eigen.eigenvectors[(i, k)];
                mode.iter_mut().zip(part).for_each(|(m, p)| *m += share * p);
            }
            if value > NONE * largest {
                sorted.coarse.push((mode, value));
            } else {
                sorted.free.push((mode, if value < -NONE * largest { -value } else { 0.0 }));
            }
        }
        sorted
    }

    /// The held motions alone.
    pub(crate) fn held(nodes: usize, positions: &[f64], held: Held) -> Self {
        let motions = orthonormal_motions(nodes, positions).into_iter().skip(held.kept());
        Self { coarse: Vec::new(), free: motions.map(|mode| (mode, 0.0)).collect() }
    }

    /// Removes the free motions from `vector`. Returns the move that follows the
    /// removed part downhill where the stiffness is negative; a part that is mere
    /// rounding stays unanswered, so that a bead balanced by symmetry stays so.
    pub(crate) fn project(&self, vector: &mut [f64]) -> Vec<f64> {
        let mut escape = Vec::new();
        let least = ROUNDING * dot(vector, vector).sqrt();
        for (mode, size) in &self.free {
            let share = dot(mode, vector);
            vector.iter_mut().zip(mode).for_each(|(v, m)| *v -= share * m);
            if *size > 0.0 && share.abs() > least {
                escape.resize(vector.len(), 0.0);
                escape.iter_mut().zip(mode).for_each(|(e, m)| *e += share / size * m);
            }
        }
        escape
    }

    /// Adds what the stiff rigid motions alone would answer to `residual`.
    pub(crate) fn add_coarse(&self, residual: &[f64], out: &mut [f64]) {
        for (mode, stiffness) in &self.coarse {
            let share = dot(mode, residual) / stiffness;
            out.iter_mut().zip(mode).for_each(|(o, m)| *o += share * m);
        }
    }
}

/// Three translations and three rotations about the centre, by Gram-Schmidt.
fn orthonormal_motions(nodes: usize, positions: &[f64]) -> Vec<Vec<f64>> {
    let stride = positions.len() / 3;
    let column = |axis: usize| &positions[axis * stride..axis * stride + nodes];
    let centre = Vector::from_fn(|axis, _| column(axis).iter().sum::<f64>() / nodes as f64);
    let place = |node: usize| Vector::from_fn(|axis, _| column(axis)[node]) - centre;
    let mut modes: Vec<Vec<f64>> = Vec::with_capacity(6);
    for k in 0..6 {
        let axis = Vector::ith(k % 3, 1.0);
        let mut mode = vec![0.0; positions.len()];
        for node in 0..nodes {
            let motion = if k < 3 { axis } else { axis.cross(&place(node)) };
            (0..3).for_each(|axis| mode[axis * stride + node] = motion[axis]);
        }
        for earlier in &modes {
            let share = dot(earlier, &mode);
            mode.iter_mut().zip(earlier).for_each(|(m, e)| *m -= share * e);
        }
        let length = dot(&mode, &mode).sqrt();
        mode.iter_mut().for_each(|m| *m /= length);
        modes.push(mode);
    }
    modes
}
