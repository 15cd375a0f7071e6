//! A gel whose water is given: the chains alone pull, and each voxel bears a pressure of
//! its own that holds it at its volume. Slopes of φ, negative pressures over kT/Ω, take
//! the place of φ' in the forces; volume ratios come out beside them.

use super::{
    EDGES, Elastic, Linearisation, SPRING_SHARE, cofactors, edge_weights, edges_of, mean_gradient,
    tensions_of,
};
use crate::lanes::{self, Lanes};
use crate::lattice::Lattice;
use nalgebra::Matrix3;
use pulp::{Arch, Simd, WithSimd};

impl Elastic<'_> {
    /// kT/Ω times the volume of a dry voxel (J).
    pub(crate) fn voxel_energy(&self) -> f64 {
        self.gel.energy_density() * self.edge.powi(3)
    }

    /// Adds the forces (N) of the chains and of the `slopes` to `out`, as the energy's
    /// gradient, and writes the volume ratio of every voxel. Slopes and ratios lie in
    /// padded columns.
    pub(crate) fn add_mixed_gradient(
        &self,
        positions: &[f64],
        slopes: &[f64],
        out: &mut [f64],
        ratios: &mut [f64],
    ) {
        Arch::new().dispatch(Gradient { elastic: self, positions, slopes, out, ratios });
    }

    /// Adds the forces (N) of the chains and of what holds the voxels at their water to
    /// `out`, as the energy's gradient.
    pub(crate) fn add_held_gradient(&self, positions: &[f64], holding: &Holding, out: &mut [f64]) {
        Arch::new().dispatch(HeldGradient { elastic: self, positions, holding, out });
    }

    /// Records what `add_diagonal_blocks` needs about a state of such gel.
    pub(crate) fn linearise_held(&self, positions: &[f64], holding: &Holding, into: &mut Linearisation) {
        self.linearise_mixed(positions, &holding.slopes, into);
        into.curvature.copy_from_slice(&holding.stiffness);
    }

    /// Records what `add_mixed_stiffness_times` needs about a state.
    pub(crate) fn linearise_mixed(&self, positions: &[f64], slopes: &[f64], into: &mut Linearisation) {
        for column in into.gradient.iter_mut().chain([&mut into.slope, &mut into.curvature]) {
            column.resize(self.lattice.volume.len(), 0.0);
        }
        into.slope.copy_from_slice(slopes);
        into.curvature.fill(0.0);
        for group in &self.lattice.groups {
            let edges = edges_of(self.lattice, self.edge, positions, group);
            let f = mean_gradient(&edges, &edge_weights(self.lattice, group.slot));
            for d in 0..3 {
                for axis in 0..3 {
                    f[d][axis].store(&mut into.gradient[3 * d + axis], group.slot);
                }
            }
        }
    }

    /// Adds to `out` the change of forces (N) when nodes move along `direction` and slopes
    /// change by `slopes`, and to `volumes` that of the voxels' volumes, times kT/Ω (J):
    /// the two halves of one symmetric matrix.
    pub(crate) fn add_mixed_stiffness_times(
        &self,
        state: &Linearisation,
        (direction, slopes): (&[f64], &[f64]),
        (out, volumes): (&mut [f64], &mut [f64]),
    ) {
        Arch::new().dispatch(Stiffness { elastic: self, state, direction, slopes, out, volumes });
    }

    #[inline(always)]
    fn mixed_gradient_kernel(&self, positions: &[f64], slopes: &[f64], out: &mut [f64], ratios: &mut [f64]) {
        let mean = Lanes::splat(self.gel.numbers().crosslinks * (1.0 - SPRING_SHARE));
        for group in &self.lattice.groups {
            let slot = group.slot;
            let shape = self.shape(slot);
            let edges = edges_of(self.lattice, self.edge, positions, group);
            let f = mean_gradient(&edges, &shape.weights);
            let cof = cofactors(&f);
            lanes::dot(f[0], cof[0]).store(ratios, slot);
            let slope = Lanes::load(slopes, slot);
            self.scatter(&tensions_of(&f, mean, &cof, slope), &edges, &shape, group, out);
        }
    }

    #[inline(always)]
    fn held_gradient_kernel(&self, positions: &[f64], holding: &Holding, out: &mut [f64]) {
        let mean = Lanes::splat(self.gel.numbers().crosslinks * (1.0 - SPRING_SHARE));
        for group in &self.lattice.groups {
            let slot = group.slot;
            let shape = self.shape(slot);
            let edges = edges_of(self.lattice, self.edge, positions, group);
            let f = mean_gradient(&edges, &shape.weights);
            let cof = cofactors(&f);
            let excess = lanes::dot(f[0], cof[0]) - Lanes::load(&holding.water, slot);
            let slope = Lanes::load(&holding.slopes, slot) + Lanes::load(&holding.stiffness, slot) * excess;
            self.scatter(&tensions_of(&f, mean, &cof, slope), &edges, &shape, group, out);
        }
    }

    #[inline(always)]
    fn mixed_stiffness_kernel(
        &self,
        state: &Linearisation,
        (direction, slopes): (&[f64], &[f64]),
        (out, volumes): (&mut [f64], &mut [f64]),
    ) {
        let mean = Lanes::splat(self.gel.numbers().crosslinks * (1.0 - SPRING_SHARE));
        let edge = Lanes::splat(self.edge);
        for group in &self.lattice.groups {
            let slot = group.slot;
            let shape = self.shape(slot);
            let edges = edges_of(self.lattice, self.edge, direction, group);
            let df = mean_gradient(&edges, &shape.weights);
            let f = state.gradient_at(slot);
            let cof = cofactors(&f);
            let dj = lanes::dot(cof[0], df[0]) + lanes::dot(cof[1], df[1]) + lanes::dot(cof[2], df[2]);
            (dj * shape.scale * edge).add_to(volumes, slot);
            let (slope, change) = (Lanes::load(&state.slope, slot), Lanes::load(slopes, slot));
            let mut tensions = df;
            for d in 0..3 {
                let (next, last) = ((d + 1) % 3, (d + 2) % 3);
                let dcof = lanes::add(lanes::cross(df[next], f[last]), lanes::cross(f[next], df[last]));
                let pressed = lanes::add(lanes::scale(cof[d], change), lanes::scale(dcof, slope));
                tensions[d] = lanes::add(lanes::scale(df[d], mean), pressed);
            }
            self.scatter(&tensions, &edges, &shape, group, out);
        }
    }
}

/// Visits every spring along a voxel's edge: its two nodes and its share of the voxels' gel.
pub(crate) fn chain_links(lattice: &Lattice, mut visit: impl FnMut(usize, usize, f64)) {
    for group in &lattice.groups {
        let weights = edge_weights(lattice, group.slot);
        for lane in 0..group.len {
            let corners = lattice.corners_in(group, lane);
            for d in 0..3 {
                for (edge, &near) in EDGES[d].iter().enumerate() {
                    let strength = weights[d][edge].0[lane] * lattice.volume[group.slot + lane];
                    visit(corners[near], corners[near + (1 << d)], strength);
                }
            }
        }
    }
}

/// What holds voxels at the water they have: in the place of φ' in the forces,
/// slope + stiffness (J - water), by slot.
#[derive(Clone, Debug, Default)]
pub(crate) struct Holding {
    pub(crate) slopes: Vec<f64>,
    pub(crate) stiffness: Vec<f64>,
    /// Volume ratio to dry that each voxel's water gives it.
    pub(crate) water: Vec<f64>,
}

struct HeldGradient<'a> {
    elastic: &'a Elastic<'a>,
    positions: &'a [f64],
    holding: &'a Holding,
    out: &'a mut [f64],
}

impl WithSimd for HeldGradient<'_> {
    type Output = ();
    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) {
        self.elastic.held_gradient_kernel(self.positions, self.holding, self.out);
    }
}

struct Gradient<'a> {
    elastic: &'a Elastic<'a>,
    positions: &'a [f64],
    slopes: &'a [f64],
    out: &'a mut [f64],
    ratios: &'a mut [f64],
}

struct Stiffness<'a> {
    elastic: &'a Elastic<'a>,
    state: &'a Linearisation,
    direction: &'a [f64],
    slopes: &'a [f64],
    out: &'a mut [f64],
    volumes: &'a mut [f64],
}

impl WithSimd for Gradient<'_> {
    type Output = ();
    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) {
        self.elastic.mixed_gradient_kernel(self.positions, self.slopes, self.out, self.ratios);
    }
}

impl WithSimd for Stiffness<'_> {
    type Output = ();
    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) {
        let (from, to) = ((self.direction, self.slopes), (self.out, self.volumes));
        self.elastic.mixed_stiffness_kernel(self.state, from, to);
    }
}

impl Linearisation {
    /// Mean deformation gradient of the voxel in a slot.
    pub(crate) fn gradient_of(&self, slot: usize) -> Matrix3<f64> {
        Matrix3::from_fn(|axis, d| self.gradient[3 * d + axis][slot])
    }
}
