//! Energy, forces and stiffness of a bead's lattice.
//!
//! Each voxel of dry edge h and filled volume V stores
//! `V [ (n/2)(|F|² + β Σ_d var_d - 3) + φ(J) ]` in kT/Ω, where F is the mean
//! deformation gradient over its gel, J = det F, and var_d the weighted variance of
//! the voxel's four edges along d: chain-bundle springs along the edges with share β,
//! the mean gradient with the rest. For any affine deformation this is (n/2)(I1 - 3).

use crate::lanes::{self, Lanes, Vector, WIDTH};
use crate::lattice::{Lattice, Run};
use crate::thermodynamics::Gel;

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

/// What the stiffness needs to know of a state: per voxel, the mean deformation
/// gradient (by columns) and the first two derivatives of φ.
#[derive(Clone, Debug, Default)]
pub(crate) struct Linearisation {
    gradient: [Vec<f64>; 9],
    slope: Vec<f64>,
    curvature: Vec<f64>,
}

/// Corner offsets of the four edges along each direction in a voxel, x fastest.
const EDGES: [[usize; 4]; 3] = [[0, 2, 4, 6], [0, 1, 4, 5], [0, 1, 2, 3]];
/// Which of the other two directions run over an edge's number: its low and high bit.
const OTHERS: [[usize; 2]; 3] = [[1, 2], [0, 2], [0, 1]];

impl<'a> Elastic<'a> {
    /// Adds the forces of the gel on its nodes (N), as the energy's gradient (so
    /// with the opposite sign), to `out`. Positions and `out` hold all x, all y, all z.
    /// Returns the smallest J; at or below 1 the result means nothing.
    pub(crate) fn add_gradient(&self, positions: &[f64], out: &mut [f64]) -> f64 {
        pulp::Arch::new().dispatch(|| {
            let mut smallest = f64::INFINITY;
            self.for_each_chunk(|run, along, len| {
                let shape = self.shape(run.voxel + along, len);
                let corners = load_corners(positions, run, along, len);
                let (edges, f) = self.mean_gradient(&corners, &shape);
                let cof = cofactors(&f);
                let j = lanes::dot(f[0], cof[0]);
                let mut slope = Lanes::splat(0.0);
                for lane in 0..len {
                    smallest = smallest.min(j.0[lane]);
                    slope.0[lane] = self.gel.mixing_slope(j.0[lane].max(1.0 + 1e-12));
                }
                let n = self.gel.numbers().crosslinks;
                let tensions = std::array::from_fn(|d| {
                    lanes::add(
                        lanes::scale(f[d], Lanes::splat(n * (1.0 - SPRING_SHARE))),
                        lanes::scale(cof[d], slope),
                    )
                });
                self.scatter(&tensions, &edges, n * SPRING_SHARE, &shape, (run, along, len), out);
            });
            smallest
        })
    }

    /// Records what `add_stiffness_times` needs about a state. With `convex` the
    /// geometric part is capped where compression would make it indefinite.
    pub(crate) fn linearise(&self, positions: &[f64], convex: bool, into: &mut Linearisation) {
        let voxels = self.lattice.voxel_count();
        for column in into.gradient.iter_mut().chain([&mut into.slope, &mut into.curvature]) {
            column.resize(voxels, 0.0);
        }
        pulp::Arch::new().dispatch(|| {
            self.for_each_chunk(|run, along, len| {
                let first = run.voxel + along;
                let shape = self.shape(first, len);
                let (_, f) = self.mean_gradient(&load_corners(positions, run, along, len), &shape);
                let j = lanes::dot(f[0], cofactors(&f)[0]);
                for (component, column) in into.gradient.iter_mut().enumerate() {
                    f[component / 3][component % 3].store(column, first, len);
                }
                for lane in 0..len {
                    let j = j.0[lane].max(1.0 + 1e-12);
                    let mut slope = self.gel.mixing_slope(j);
                    if convex {
                        slope = slope.max(-self.gel.numbers().crosslinks / largest_stretch(&f, lane));
                    }
                    into.slope[first + lane] = slope;
                    into.curvature[first + lane] = self.gel.mixing_curvature(j).max(0.0);
                }
            });
        });
    }

    /// Adds the stiffness at a linearised state times `direction` to `out`.
    pub(crate) fn add_stiffness_times(&self, state: &Linearisation, direction: &[f64], out: &mut [f64]) {
        pulp::Arch::new().dispatch(|| {
            self.for_each_chunk(|run, along, len| {
                let first = run.voxel + along;
                let shape = self.shape(first, len);
                let (edges, df) = self.mean_gradient(&load_corners(direction, run, along, len), &shape);
                let f: [Vector; 3] = std::array::from_fn(|d| {
                    std::array::from_fn(|axis| Lanes::load(&state.gradient[3 * d + axis], first, len))
                });
                let slope = Lanes::load(&state.slope, first, len);
                let curvature = Lanes::load(&state.curvature, first, len);
                let cof = cofactors(&f);
                let dj = lanes::dot(cof[0], df[0]) + lanes::dot(cof[1], df[1]) + lanes::dot(cof[2], df[2]);
                let n = self.gel.numbers().crosslinks;
                let tensions = std::array::from_fn(|d| {
                    let (next, last) = ((d + 1) % 3, (d + 2) % 3);
                    let dcof = lanes::add(lanes::cross(df[next], f[last]), lanes::cross(f[next], df[last]));
                    lanes::add(
                        lanes::scale(df[d], Lanes::splat(n * (1.0 - SPRING_SHARE))),
                        lanes::add(lanes::scale(cof[d], curvature * dj), lanes::scale(dcof, slope)),
                    )
                });
                self.scatter(&tensions, &edges, n * SPRING_SHARE, &shape, (run, along, len), out);
            });
        });
    }

    /// Adds each node's own 3 x 3 block of the stiffness.
    pub(crate) fn add_diagonal_blocks(&self, state: &Linearisation, out: &mut [nalgebra::Matrix3<f64>]) {
        let n = self.gel.numbers().crosslinks;
        for run in &self.lattice.runs {
            for along in 0..run.len {
                let voxel = run.voxel + along;
                let shape = self.shape(voxel, 1);
                let f: [Vector; 3] = std::array::from_fn(|d| {
                    std::array::from_fn(|axis| Lanes::splat(state.gradient[3 * d + axis][voxel]))
                });
                let cof = cofactors(&f);
                let mut slopes = [[0.0; 3]; 8];
                let mut springs = [0.0; 8];
                for d in 0..3 {
                    for (edge, &near) in EDGES[d].iter().enumerate() {
                        let weight = shape.weights[d][edge].0[0];
                        slopes[near][d] -= weight;
                        slopes[near + (1 << d)][d] += weight;
                        springs[near] += weight;
                        springs[near + (1 << d)] += weight;
                    }
                }
                let scale = shape.scale.0[0];
                for (corner, node) in Lattice::corners(run, along).into_iter().enumerate() {
                    let c = slopes[corner];
                    let q = nalgebra::Vector3::from_fn(|axis, _| {
                        (0..3).map(|d| c[d] * cof[d][axis].0[0]).sum::<f64>()
                    });
                    let square: f64 = c.iter().map(|c| c * c).sum();
                    let isotropic = n * ((1.0 - SPRING_SHARE) * square + SPRING_SHARE * springs[corner]);
                    out[node] += (nalgebra::Matrix3::from_diagonal_element(isotropic)
                        + q * q.transpose() * state.curvature[voxel])
                        * (scale / self.edge);
                }
            }
        }
    }

    /// Mean deformation gradient of every voxel, by columns.
    pub(crate) fn gradients(&self, positions: &[f64]) -> Vec<nalgebra::Matrix3<f64>> {
        let mut all = Vec::with_capacity(self.lattice.voxel_count());
        self.for_each_chunk(|run, along, len| {
            let shape = self.shape(run.voxel + along, len);
            let (_, f) = self.mean_gradient(&load_corners(positions, run, along, len), &shape);
            for lane in 0..len {
                all.push(nalgebra::Matrix3::from_fn(|axis, d| f[d][axis].0[lane]));
            }
        });
        all
    }

    /// Energy of the gel less that of the dry bead's chains (J).
    pub(crate) fn energy(&self, positions: &[f64]) -> f64 {
        let n = self.gel.numbers().crosslinks;
        let mut total = 0.0;
        self.for_each_chunk(|run, along, len| {
            let first = run.voxel + along;
            let shape = self.shape(first, len);
            let (edges, f) = self.mean_gradient(&load_corners(positions, run, along, len), &shape);
            let j = lanes::dot(f[0], cofactors(&f)[0]);
            let mut chains = Lanes::splat(0.0);
            for d in 0..3 {
                chains += lanes::dot(f[d], f[d]) * Lanes::splat(1.0 - SPRING_SHARE);
                for edge in 0..4 {
                    let square = lanes::dot(edges[d][edge], edges[d][edge]);
                    chains += square * shape.weights[d][edge] * Lanes::splat(SPRING_SHARE);
                }
            }
            for lane in 0..len {
                let density = 0.5 * n * (chains.0[lane] - 3.0) + self.gel.mixing(j.0[lane].max(1.0 + 1e-12));
                total += self.lattice.volume[first + lane] * density;
            }
        });
        total * self.gel.energy_density() * self.edge.powi(3)
    }

    #[inline(always)]
    fn for_each_chunk(&self, mut visit: impl FnMut(&Run, usize, usize)) {
        for run in &self.lattice.runs {
            let mut along = 0;
            while along < run.len {
                let len = WIDTH.min(run.len - along);
                visit(run, along, len);
                along += len;
            }
        }
    }

    /// Edge weights and force scale of `len` voxels from `first` on.
    #[inline(always)]
    fn shape(&self, first: usize, len: usize) -> Shape {
        let moment = |column: &[f64]| Lanes::load(column, first, len);
        let weights = std::array::from_fn(|d| {
            let [low, high] = OTHERS[d];
            let (a, b) = (moment(&self.lattice.first[low]), moment(&self.lattice.first[high]));
            let ab = moment(&self.lattice.mixed[d]);
            [Lanes::splat(1.0) - a - b + ab, a - ab, b - ab, ab]
        });
        let scale = self.gel.energy_density() * self.edge * self.edge;
        Shape { weights, scale: moment(&self.lattice.volume) * Lanes::splat(scale) }
    }

    /// The twelve edges over h, by direction, and their weighted means: F by columns.
    #[inline(always)]
    fn mean_gradient(&self, corners: &[Vector; 8], shape: &Shape) -> ([[Vector; 4]; 3], [Vector; 3]) {
        let inverse = Lanes::splat(1.0 / self.edge);
        let edges: [[Vector; 4]; 3] = std::array::from_fn(|d| {
            EDGES[d].map(|near| lanes::scale(lanes::sub(corners[near + (1 << d)], corners[near]), inverse))
        });
        let f = std::array::from_fn(|d| {
            let mut mean = lanes::scale(edges[d][0], shape.weights[d][0]);
            for edge in 1..4 {
                mean = lanes::add(mean, lanes::scale(edges[d][edge], shape.weights[d][edge]));
            }
            mean
        });
        (edges, f)
    }

    /// Adds the pull of every edge to the nodes at its ends.
    #[inline(always)]
    fn scatter(
        &self,
        tensions: &[Vector; 3],
        edges: &[[Vector; 4]; 3],
        spring: f64,
        shape: &Shape,
        (run, along, len): (&Run, usize, usize),
        out: &mut [f64],
    ) {
        let mut forces = [[Lanes::splat(0.0); 3]; 8];
        for d in 0..3 {
            for (edge, &near) in EDGES[d].iter().enumerate() {
                let weight = shape.weights[d][edge] * shape.scale;
                let pull = lanes::scale(
                    lanes::add(tensions[d], lanes::scale(edges[d][edge], Lanes::splat(spring))),
                    weight,
                );
                let far = near + (1 << d);
                forces[near] = lanes::sub(forces[near], pull);
                forces[far] = lanes::add(forces[far], pull);
            }
        }
        let nodes = self.lattice.node_count();
        for (axis, out) in out.chunks_exact_mut(nodes).enumerate() {
            for (row, &start) in run.rows.iter().enumerate() {
                forces[2 * row][axis].add_to(out, start + along, len);
                forces[2 * row + 1][axis].add_to(out, start + along + 1, len);
            }
        }
    }
}

/// Edge weights, by direction, and V/h times kT/Ω of a group of voxels.
struct Shape {
    weights: [[Lanes; 4]; 3],
    scale: Lanes,
}

#[inline(always)]
fn load_corners(values: &[f64], run: &Run, along: usize, len: usize) -> [Vector; 8] {
    let nodes = values.len() / 3;
    let (x, rest) = values.split_at(nodes);
    let (y, z) = rest.split_at(nodes);
    std::array::from_fn(|corner| {
        let at = run.rows[corner / 2] + along + corner % 2;
        [Lanes::load(x, at, len), Lanes::load(y, at, len), Lanes::load(z, at, len)]
    })
}

#[inline(always)]
fn cofactors(f: &[Vector; 3]) -> [Vector; 3] {
    [lanes::cross(f[1], f[2]), lanes::cross(f[2], f[0]), lanes::cross(f[0], f[1])]
}

/// An upper bound of the largest principal stretch: the Frobenius norm less what
/// the other two stretches must hold, here simply the largest column with margin.
fn largest_stretch(f: &[Vector; 3], lane: usize) -> f64 {
    let matrix = nalgebra::Matrix3::from_fn(|axis, d| f[d][axis].0[lane]);
    (matrix.transpose() * matrix).symmetric_eigenvalues().max().sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::thermodynamics::{GelNumbers, Surroundings};
    use approx::assert_relative_eq;

    fn distorted(lattice: &Lattice, edge: f64) -> Vec<f64> {
        let nodes = lattice.node_count();
        let mut positions = vec![0.0; 3 * nodes];
        for node in 0..nodes {
            let [x, y, z] = lattice.node_offset(node);
            positions[node] = edge * (5.0 * x + 0.3 * (0.7 * y).sin());
            positions[nodes + node] = edge * (4.0 * y + 0.2 * (0.9 * z + x).cos());
            positions[2 * nodes + node] = edge * (6.0 * z - 0.1 * x * y);
        }
        positions
    }

    #[test]
    fn forces_and_stiffness_are_derivatives_of_the_energy() {
        let lattice = Lattice::new(6);
        let gel = Gel::new(GelNumbers { crosslinks: 1e-4, chi: 0.4, charges: 0.01 }, Surroundings::default());
        let elastic = Elastic { lattice: &lattice, gel: &gel, edge: 1e-4 };
        let positions = distorted(&lattice, elastic.edge);
        let gradient_at = |positions: &[f64]| {
            let mut gradient = vec![0.0; positions.len()];
            elastic.add_gradient(positions, &mut gradient);
            gradient
        };
        let direction: Vec<f64> = (0..positions.len()).map(|i| 1e-4 * (i as f64 * 0.7).sin()).collect();
        let moved = |by: f64| positions.iter().zip(&direction).map(|(x, d)| x + by * d).collect::<Vec<_>>();
        let step = 1e-5;

        let along: f64 = gradient_at(&positions).iter().zip(&direction).map(|(g, d)| g * d).sum();
        let difference = (elastic.energy(&moved(step)) - elastic.energy(&moved(-step))) / (2.0 * step);
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

        let mut blocks = vec![nalgebra::Matrix3::zeros(); lattice.node_count()];
        elastic.add_diagonal_blocks(&state, &mut blocks);
        let node = lattice.node_count() / 3;
        let mut unit = vec![0.0; positions.len()];
        unit[lattice.node_count() + node] = 1.0;
        let mut column = vec![0.0; positions.len()];
        elastic.add_stiffness_times(&state, &unit, &mut column);
        for axis in 0..3 {
            assert_relative_eq!(
                column[axis * lattice.node_count() + node],
                blocks[node][(axis, 1)],
                max_relative = 1e-9,
                epsilon = 1e-12 * blocks[node][(1, 1)]
            );
        }
    }
}
