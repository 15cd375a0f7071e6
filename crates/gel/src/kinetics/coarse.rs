//! Slow deformations of a whole bead, which local guesses at a solution cannot see.

use crate::elastic::chain_links;
use crate::lattice::Lattice;
use nalgebra::{DMatrix, SymmetricEigen};

/// Coarse voxels across the longest axis.
const ACROSS: usize = 6;
/// Stiffness below this share of the largest counts as none.
const NONE: f64 = 1e-9;

/// Displacements that are trilinear in coarse voxels, and the inverse of the chains' stiffness
/// among them, less the translations.
#[derive(Clone, Debug)]
pub(super) struct Coarse {
    /// Where the terms of each node begin, coarse nodes and weights.
    start: Vec<u32>,
    terms: Vec<(u32, f64)>,
    /// For springs of unit strength.
    inverse: DMatrix<f64>,
}

impl Coarse {
    pub(super) fn new(lattice: &Lattice) -> Self {
        let size = lattice.shape().size();
        let step = size.iter().max().map_or(1, |longest| longest.div_ceil(ACROSS)) as f64;
        let counts = size.map(|voxels| (voxels as f64 / step).ceil() as usize + 1);
        let mut numbers = vec![u32::MAX; counts.iter().product()];
        let mut count = 0;
        let (mut start, mut terms) = (vec![0], Vec::new());
        for node in 0..lattice.node_count() {
            let offset = lattice.node_offset(node);
            let place: [f64; 3] = std::array::from_fn(|axis| (offset[axis] + 0.5 * size[axis] as f64) / step);
            for corner in 0..8 {
                let (mut weight, mut index) = (1.0, [0; 3]);
                for axis in 0..3 {
                    let low = (place[axis] as usize).min(counts[axis] - 2);
                    let (far, along) = (corner >> axis & 1, place[axis] - low as f64);
                    weight *= if far == 1 { along } else { 1.0 - along };
                    index[axis] = low + far;
                }
                if weight > 0.0 {
                    let number = &mut numbers[(index[2] * counts[1] + index[1]) * counts[0] + index[0]];
                    if *number == u32::MAX {
                        *number = count;
                        count += 1;
                    }
                    terms.push((*number, weight));
                }
            }
            start.push(terms.len() as u32);
        }
        let of = |node: usize| &terms[start[node] as usize..start[node + 1] as usize];
        let mut stiffness = DMatrix::zeros(count as usize, count as usize);
        chain_links(lattice, |near, far, strength| {
            let ends = || {
                let near = of(near).iter().map(|&(coarse, weight)| (coarse as usize, -weight));
                near.chain(of(far).iter().map(|&(coarse, weight)| (coarse as usize, weight)))
            };
            for (row, a) in ends() {
                for (column, b) in ends() {
                    stiffness[(row, column)] += strength * a * b;
                }
            }
        });
        Self { start, terms, inverse: pseudo_inverse(stiffness) }
    }

    /// The same displacements for a lattice that has since been split: a guess knows no cracks.
    pub(super) fn follow(&mut self, lattice: &Lattice) {
        for node in self.start.len() - 1..lattice.node_count() {
            let origin = lattice.origin_of(node);
            self.terms.extend_from_within(self.start[origin] as usize..self.start[origin + 1] as usize);
            self.start.push(self.terms.len() as u32);
        }
    }

    /// Adds what the coarse displacements answer to `forces`, for springs of a strength
    /// (N/m), to `motion`.
    pub(super) fn add_answer(&self, forces: &[f64], strength: f64, motion: &mut [f64]) {
        let stride = forces.len() / 3;
        let mut pulls = vec![[0.0; LANES]; self.inverse.nrows()];
        for (node, terms) in self.terms().enumerate() {
            let force = [forces[node], forces[stride + node], forces[2 * stride + node], 0.0];
            terms.for_each(|(coarse, weight)| add(&mut pulls[coarse], weight, &force));
        }
        let rows = self.inverse.as_slice().chunks_exact(pulls.len());
        let ways: Vec<[f64; LANES]> = rows
            .map(|row| {
                let mut way = [0.0; LANES];
                row.iter().zip(&pulls).for_each(|(share, pull)| add(&mut way, *share, pull));
                way.map(|way| way / strength)
            })
            .collect();
        for (node, terms) in self.terms().enumerate() {
            let mut way = [0.0; LANES];
            terms.for_each(|(coarse, weight)| add(&mut way, weight, &ways[coarse]));
            (0..3).for_each(|axis| motion[axis * stride + node] += way[axis]);
        }
    }

    /// Coarse nodes and weights of every node.
    fn terms(&self) -> impl Iterator<Item = impl Iterator<Item = (usize, f64)>> {
        let ranges = self.start.windows(2).map(|ends| ends[0] as usize..ends[1] as usize);
        ranges.map(|range| self.terms[range].iter().map(|&(coarse, weight)| (coarse as usize, weight)))
    }
}

/// The three axes and one that fills the vector registers.
const LANES: usize = 4;

#[inline(always)]
fn add(to: &mut [f64; LANES], share: f64, of: &[f64; LANES]) {
    (0..LANES).for_each(|lane| to[lane] += share * of[lane]);
}

fn pseudo_inverse(matrix: DMatrix<f64>) -> DMatrix<f64> {
    let eigen = SymmetricEigen::new(matrix);
    let least = NONE * eigen.eigenvalues.amax();
    let inverse = eigen.eigenvalues.map(|value| if value > least { 1.0 / value } else { 0.0 });
    &eigen.eigenvectors * DMatrix::from_diagonal(&inverse) * eigen.eigenvectors.transpose()
}
