//! Energy, forces and stiffness of a bead's lattice.
//!
//! Each voxel of dry edge h and filled volume V stores
//! `V [ (n/2)(|F|² + β Σ_d var_d - 3) + φ(J) ]` in kT/Ω, where F is the mean
//! deformation gradient over its gel, J = det F, and var_d the weighted variance of
//! the voxel's four edges along d: chain-bundle springs along the edges with share β,
//! the mean gradient with the rest. For any affine deformation this is (n/2)(I1 - 3).

mod mixed;

use crate::lanes::{self, Lanes, Vector};
use crate::lattice::{Group, Lattice};
use crate::thermodynamics::Gel;
pub(crate) use mixed::{Holding, chain_links};
use nalgebra::{Matrix3, Vector3};
use pulp::{Arch, Simd, WithSimd};

/// Share of the chains' energy carried by the edge springs. The mean gradient alone
/// hourglasses; springs alone double the error of contact forces.
const SPRING_SHARE: f64 = 0.25;

/// The material and size of one bead's lattice.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Elastic<'a> {
    pub(crate) lattice: &'a Lattice,
    pub(crate) gel: &'a Gel,
    /// Dry edge of a voxel (m).
    pub(crate) edge: f64,
}

/// J is kept above this where a trial state would leave the mixing energy's range.
const LEAST_VOLUME_RATIO: f64 = 1.0 + 1e-12;

/// What the stiffness needs to know of a state: per voxel, the mean deformation
/// gradient (by columns) and the first two derivatives of φ.
#[derive(Clone, Debug, Default)]
pub(crate) struct Linearisation {
    gradient: [Vec<f64>; 9],
    slope: Vec<f64>,
    curvature: Vec<f64>,
}

/// The calls of the kernels, so that they are compiled for the vectors of the processor at
/// hand: a closure would be left outside, compiled for any.
struct Gradient<'a> {
    elastic: &'a Elastic<'a>,
    positions: &'a [f64],
    out: &'a mut [f64],
}

struct Linearise<'a> {
    elastic: &'a Elastic<'a>,
    positions: &'a [f64],
    convex: bool,
    into: &'a mut Linearisation,
}

struct Stiffness<'a> {
    elastic: &'a Elastic<'a>,
    state: &'a Linearisation,
    direction: &'a [f64],
    out: &'a mut [f64],
}

impl WithSimd for Gradient<'_> {
    type Output = f64;
    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) -> f64 {
        self.elastic.gradient_kernel(self.positions, self.out)
    }
}

impl WithSimd for Linearise<'_> {
    type Output = ();
    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) {
        self.elastic.linearisation_kernel(self.positions, self.convex, self.into);
    }
}

impl WithSimd for Stiffness<'_> {
    type Output = ();
    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) {
        self.elastic.stiffness_kernel(self.state, self.direction, self.out);
    }
}

/// Corner offsets of the four edges along each direction in a voxel, x fastest.
const EDGES: [[usize; 4]; 3] = [[0, 2, 4, 6], [0, 1, 4, 5], [0, 1, 2, 3]];
/// Which of the other two directions run over an edge's number: its low and high bit.
const OTHERS: [[usize; 2]; 3] = [[1, 2], [0, 2], [0, 1]];

impl Elastic<'_> {
    /// Adds the forces of the gel on its nodes (N), as the energy's gradient (so
    /// with the opposite sign), to `out`. Positions and `out` hold all x, all y, all z.
    /// Returns the smallest J; at or below 1 the result means nothing.
    pub(crate) fn add_gradient(&self, positions: &[f64], out: &mut [f64]) -> f64 {
        Arch::new().dispatch(Gradient { elastic: self, positions, out })
    }

    /// Records what `add_stiffness_times` needs about a state. With `convex` the
    /// geometric part is capped where compression would make it indefinite.
    pub(crate) fn linearise(&self, positions: &[f64], convex: bool, into: &mut Linearisation) {
        for column in into.gradient.iter_mut().chain([&mut into.slope, &mut into.curvature]) {
            column.resize(self.lattice.volume.len(), 0.0);
        }
        Arch::new().dispatch(Linearise { elastic: self, positions, convex, into });
    }

    /// Adds the stiffness at a linearised state times `direction` to `out`.
    pub(crate) fn add_stiffness_times(&self, state: &Linearisation, direction: &[f64], out: &mut [f64]) {
        Arch::new().dispatch(Stiffness { elastic: self, state, direction, out });
    }

    #[inline(always)]
    fn gradient_kernel(&self, positions: &[f64], out: &mut [f64]) -> f64 {
        let n = self.gel.numbers().crosslinks;
        let mut smallest = f64::INFINITY;
        for group in &self.lattice.groups {
            let shape = self.shape(group.slot);
            let edges = edges_of(self.lattice, self.edge, positions, group);
            let f = mean_gradient(&edges, &shape.weights);
            let cof = cofactors(&f);
            let j = lanes::dot(f[0], cof[0]);
            let mut slope = Lanes::splat(0.0);
            for lane in 0..group.len {
                // The slots that loose voxels have left hold no gel.
                if shape.scale.0[lane] > 0.0 {
                    smallest = smallest.min(j.0[lane]);
                }
                slope.0[lane] = self.gel.mixing_slope(j.0[lane].max(LEAST_VOLUME_RATIO));
            }
            let mean = Lanes::splat(n * (1.0 - SPRING_SHARE));
            self.scatter(&tensions_of(&f, mean, &cof, slope), &edges, &shape, group, out);
        }
        smallest
    }

    #[inline(always)]
    fn linearisation_kernel(&self, positions: &[f64], convex: bool, into: &mut Linearisation) {
        for group in &self.lattice.groups {
            let slot = group.slot;
            let edges = edges_of(self.lattice, self.edge, positions, group);
            let f = mean_gradient(&edges, &edge_weights(self.lattice, slot));
            let j = lanes::dot(f[0], cofactors(&f)[0]);
            for d in 0..3 {
                for axis in 0..3 {
                    f[d][axis].store(&mut into.gradient[3 * d + axis], slot);
                }
            }
            for lane in 0..group.len {
                let j = j.0[lane].max(LEAST_VOLUME_RATIO);
                let mut slope = self.gel.mixing_slope(j);
                if convex {
                    slope = slope.max(-self.gel.numbers().crosslinks / largest_stretch(&f, lane));
                }
                into.slope[slot + lane] = slope;
                into.curvature[slot + lane] = self.gel.mixing_curvature(j).max(0.0);
            }
        }
    }

    #[inline(always)]
    fn stiffness_kernel(&self, state: &Linearisation, direction: &[f64], out: &mut [f64]) {
        let mean = Lanes::splat(self.gel.numbers().crosslinks * (1.0 - SPRING_SHARE));
        for group in &self.lattice.groups {
            let slot = group.slot;
            let shape = self.shape(slot);
            let edges = edges_of(self.lattice, self.edge, direction, group);
            let df = mean_gradient(&edges, &shape.weights);
            let f = state.gradient_at(slot);
            let cof = cofactors(&f);
            let slope = Lanes::load(&state.slope, slot);
            let dj = lanes::dot(cof[0], df[0]) + lanes::dot(cof[1], df[1]) + lanes::dot(cof[2], df[2]);
            let pressure = Lanes::load(&state.curvature, slot) * dj;
            let mut tensions = df;
            for d in 0..3 {
                let (next, last) = ((d + 1) % 3, (d + 2) % 3);
                let dcof = lanes::add(lanes::cross(df[next], f[last]), lanes::cross(f[next], df[last]));
                let mixing = lanes::add(lanes::scale(cof[d], pressure), lanes::scale(dcof, slope));
                tensions[d] = lanes::add(lanes::scale(df[d], mean), mixing);
            }
            self.scatter(&tensions, &edges, &shape, group, out);
        }
    }

    /// Adds each node's own 3 x 3 block of the stiffness.
    pub(crate) fn add_diagonal_blocks(&self, state: &Linearisation, out: &mut [Matrix3<f64>]) {
        let n = self.gel.numbers().crosslinks;
        for group in &self.lattice.groups {
            let shape = self.shape(group.slot);
            let cof = cofactors(&state.gradient_at(group.slot));
            for lane in (0..group.len).filter(|&lane| shape.scale.0[lane] > 0.0) {
                let mut slopes = [[0.0; 3]; 8];
                let mut springs = [0.0; 8];
                for d in 0..3 {
                    for (edge, &near) in EDGES[d].iter().enumerate() {
                        let weight = shape.weights[d][edge].0[lane];
                        slopes[near][d] -= weight;
                        slopes[near + (1 << d)][d] += weight;
                        springs[near] += weight;
                        springs[near + (1 << d)] += weight;
                    }
                }
                let cof = Matrix3::from_fn(|axis, d| cof[d][axis].0[lane]);
                let curvature = state.curvature[group.slot + lane];
                let scale = shape.scale.0[lane] / self.edge;
                let corners = self.lattice.corners_in(group, lane);
                for (corner, node) in corners.into_iter().enumerate() {
                    let c = Vector3::from(slopes[corner]);
                    let q = cof * c;
                    let isotropic =
                        n * ((1.0 - SPRING_SHARE) * c.norm_squared() + SPRING_SHARE * springs[corner]);
                    out[node] +=
                        (Matrix3::from_diagonal_element(isotropic) + q * q.transpose() * curvature) * scale;
                }
            }
        }
    }

    /// Edge weights and force scale of the voxels in a group of slots.
    #[inline(always)]
    fn shape(&self, slot: usize) -> Shape {
        let scale = Lanes::splat(self.gel.energy_density() * self.edge * self.edge);
        Shape {
            weights: edge_weights(self.lattice, slot),
            scale: Lanes::load(&self.lattice.volume, slot) * scale,
        }
    }

    /// Adds the pull of every edge to the nodes at its ends.
    #[inline(always)]
    fn scatter(
        &self,
        tensions: &[Vector; 3],
        edges: &[[Vector; 4]; 3],
        shape: &Shape,
        group: &Group,
        out: &mut [f64],
    ) {
        let spring = Lanes::splat(self.gel.numbers().crosslinks * SPRING_SHARE);
        let mut forces = [[Lanes::splat(0.0); 8]; 3];
        for d in 0..3 {
            for edge in 0..4 {
                let near = EDGES[d][edge];
                let far = near + (1 << d);
                let weight = shape.weights[d][edge] * shape.scale;
                let pull =
                    lanes::scale(lanes::add(tensions[d], lanes::scale(edges[d][edge], spring)), weight);
                for axis in 0..3 {
                    forces[axis][near] = forces[axis][near] - pull[axis];
                    forces[axis][far] += pull[axis];
                }
            }
        }
        let stride = out.len() / 3;
        for axis in 0..3 {
            self.lattice.scatter(group, &forces[axis], &mut out[axis * stride..(axis + 1) * stride]);
        }
    }
}

impl Linearisation {
    #[inline(always)]
    fn gradient_at(&self, slot: usize) -> [Vector; 3] {
        let mut f = [[Lanes::splat(0.0); 3]; 3];
        for d in 0..3 {
            for axis in 0..3 {
                f[d][axis] = Lanes::load(&self.gradient[3 * d + axis], slot);
            }
        }
        f
    }
}

/// Edge weights, by direction, and V/h times kT/Ω of a group of voxels.
struct Shape {
    weights: [[Lanes; 4]; 3],
    scale: Lanes,
}

/// Mean deformation gradient of every voxel of a lattice with dry edge `edge` (m).
pub(crate) fn gradients(lattice: &Lattice, edge: f64, positions: &[f64]) -> Vec<Matrix3<f64>> {
    let mut all = vec![Matrix3::zeros(); lattice.voxel_count()];
    for group in &lattice.groups {
        let weights = edge_weights(lattice, group.slot);
        let f = mean_gradient(&edges_of(lattice, edge, positions, group), &weights);
        for lane in 0..group.len {
            // Loose voxels come last and are written over what their runs say.
            all[lattice.voxel_of(group, lane)] = Matrix3::from_fn(|axis, d| f[d][axis].0[lane]);
        }
    }
    all
}

/// Weights of the four edges along each direction: the volume means of their
/// bilinear functions over each voxel's gel.
#[inline(always)]
fn edge_weights(lattice: &Lattice, slot: usize) -> [[Lanes; 4]; 3] {
    let one = Lanes::splat(1.0);
    let mut weights = [[one; 4]; 3];
    for d in 0..3 {
        let [low, high] = OTHERS[d];
        let a = Lanes::load(&lattice.first[low], slot);
        let b = Lanes::load(&lattice.first[high], slot);
        let ab = Lanes::load(&lattice.mixed[d], slot);
        weights[d] = [one - a - b + ab, a - ab, b - ab, ab];
    }
    weights
}

/// The twelve edges of a group of voxels, by direction, over the dry edge.
#[inline(always)]
fn edges_of(lattice: &Lattice, edge: f64, values: &[f64], group: &Group) -> [[Vector; 4]; 3] {
    let inverse = Lanes::splat(1.0 / edge);
    let stride = values.len() / 3;
    let mut edges = [[[inverse; 3]; 4]; 3];
    for axis in 0..3 {
        let corners = lattice.gather(group, &values[axis * stride..(axis + 1) * stride]);
        for d in 0..3 {
            for edge in 0..4 {
                let near = EDGES[d][edge];
                edges[d][edge][axis] = corners[near + (1 << d)] * inverse - corners[near] * inverse;
            }
        }
    }
    edges
}

/// The weighted mean of each direction's edges: F by columns.
#[inline(always)]
fn mean_gradient(edges: &[[Vector; 4]; 3], weights: &[[Lanes; 4]; 3]) -> [Vector; 3] {
    let mut f = [edges[0][0]; 3];
    for d in 0..3 {
        f[d] = lanes::scale(edges[d][0], weights[d][0]);
        for edge in 1..4 {
            f[d] = lanes::add(f[d], lanes::scale(edges[d][edge], weights[d][edge]));
        }
    }
    f
}

#[inline(always)]
fn cofactors(f: &[Vector; 3]) -> [Vector; 3] {
    [lanes::cross(f[1], f[2]), lanes::cross(f[2], f[0]), lanes::cross(f[0], f[1])]
}

/// What each direction of a voxel is pulled with, over kT/Ω and an area: by chains of a
/// stiffness along F, and by a slope of φ along its cofactors.
#[inline(always)]
fn tensions_of(f: &[Vector; 3], chains: Lanes, cof: &[Vector; 3], slope: Lanes) -> [Vector; 3] {
    let mut tensions = *f;
    for d in 0..3 {
        tensions[d] = lanes::add(lanes::scale(f[d], chains), lanes::scale(cof[d], slope));
    }
    tensions
}

/// The largest principal stretch of one lane.
fn largest_stretch(f: &[Vector; 3], lane: usize) -> f64 {
    let matrix = Matrix3::from_fn(|axis, d| f[d][axis].0[lane]);
    (matrix.transpose() * matrix).symmetric_eigenvalues().max().sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::lattice::Face;
    use crate::thermodynamics::{GelNumbers, Surroundings};
    use approx::assert_relative_eq;

    fn distorted(lattice: &Lattice, edge: f64) -> Vec<f64> {
        let nodes = lattice.stride();
        let mut positions = vec![0.0; 3 * nodes];
        for node in 0..lattice.node_count() {
            let [x, y, z] = lattice.node_offset(node);
            positions[node] = edge * (5.0 * x + 0.3 * (0.7 * y).sin());
            positions[nodes + node] = edge * (4.0 * y + 0.2 * (0.9 * z + x).cos());
            positions[2 * nodes + node] = edge * (6.0 * z - 0.1 * x * y);
        }
        positions
    }

    /// The energy of the header, written plainly (J).
    fn energy(elastic: &Elastic, positions: &[f64]) -> f64 {
        let lattice = elastic.lattice;
        let n = elastic.gel.numbers().crosslinks;
        let place = |node: usize| Vector3::from_fn(|axis, _| positions[axis * lattice.stride() + node]);
        let mut total = 0.0;
        for voxel in 0..lattice.voxel_count() {
            let slot = lattice.slots[voxel] as usize;
            let corners = lattice.corners_of(voxel);
            let mut f = Matrix3::zeros();
            let mut springs = 0.0;
            for d in 0..3 {
                let (a, b) = (lattice.first[OTHERS[d][0]][slot], lattice.first[OTHERS[d][1]][slot]);
                let ab = lattice.mixed[d][slot];
                for (near, weight) in EDGES[d].into_iter().zip([1.0 - a - b + ab, a - ab, b - ab, ab]) {
                    let edge = (place(corners[near + (1 << d)]) - place(corners[near])) / elastic.edge;
                    f.set_column(d, &(f.column(d) + edge * weight));
                    springs += weight * edge.norm_squared();
                }
            }
            let chains = (1.0 - SPRING_SHARE) * f.norm_squared() + SPRING_SHARE * springs;
            let density = 0.5 * n * (chains - 3.0) + elastic.gel.mixing(f.determinant());
            total += lattice.volume[slot] * density;
        }
        total * elastic.gel.energy_density() * elastic.edge.powi(3)
    }

    #[test]
    fn forces_and_stiffness_are_derivatives_of_the_energy() {
        check_derivatives(&Lattice::new(6));
    }

    #[test]
    fn so_they_are_beside_cracks() {
        let (whole, mut cracks) = (Lattice::new(6), vec![]);
        for (low, _, axis) in whole.bonds() {
            let [x, y, z] = whole.voxel_offset(low);
            if (axis == 2 && x < 0.0 && z == -0.5) || (axis == 1 && y == 0.5 && x > z) {
                cracks.push(Face { low: low as u32, axis: axis as u8 });
            }
        }
        let torn = whole.split(&cracks);
        assert!(torn.node_count() > whole.node_count() + 10);
        check_derivatives(&torn);
    }

    fn check_derivatives(lattice: &Lattice) {
        let gel = Gel::new(GelNumbers { crosslinks: 1e-4, chi: 0.4, charges: 0.01 }, Surroundings::default());
        let elastic = Elastic { lattice, gel: &gel, edge: 1e-4 };
        let positions = distorted(lattice, elastic.edge);
        let gradient_at = |positions: &[f64]| {
            let mut gradient = vec![0.0; positions.len()];
            elastic.add_gradient(positions, &mut gradient);
            gradient
        };
        let direction: Vec<f64> = (0..positions.len()).map(|i| 1e-4 * (i as f64 * 0.7).sin()).collect();
        let moved = |by: f64| positions.iter().zip(&direction).map(|(x, d)| x + by * d).collect::<Vec<_>>();
        let step = 1e-5;

        let along: f64 = gradient_at(&positions).iter().zip(&direction).map(|(g, d)| g * d).sum();
        let difference = (energy(&elastic, &moved(step)) - energy(&elastic, &moved(-step))) / (2.0 * step);
        assert_relative_eq!(along, difference, max_relative = 1e-5);

        let mut state = Linearisation::default();
        elastic.linearise(&positions, false, &mut state);
        let mut product = vec![0.0; positions.len()];
        elastic.add_stiffness_times(&state, &direction, &mut product);
        let (ahead, behind) = (gradient_at(&moved(step)), gradient_at(&moved(-step)));
        let largest = product.iter().fold(0.0_f64, |m, p| m.max(p.abs()));
        for i in 0..product.len() {
            assert_relative_eq!(product[i], (ahead[i] - behind[i]) / (2.0 * step), epsilon = 1e-5 * largest);
        }

        let mut blocks = vec![Matrix3::zeros(); lattice.stride()];
        elastic.add_diagonal_blocks(&state, &mut blocks);
        let node = lattice.node_count() / 3;
        let mut unit = vec![0.0; positions.len()];
        unit[lattice.stride() + node] = 1.0;
        let mut column = vec![0.0; positions.len()];
        elastic.add_stiffness_times(&state, &unit, &mut column);
        for axis in 0..3 {
            assert_relative_eq!(
                column[axis * lattice.stride() + node],
                blocks[node][(axis, 1)],
                max_relative = 1e-9,
                epsilon = 1e-12 * blocks[node][(1, 1)]
            );
        }
    }
}
