//! The linear system of one Newton step: nodes move, pressures and potentials change.

use super::anchor::Anchor;
use super::coarse::Coarse;
use super::conductance::Conductance;
use super::minres::System;
use super::stencil::Cell;
use crate::contact::{self, Pressing};
use crate::elastic::{Elastic, Linearisation};
use crate::rigid::RigidModes;
use bedswell_geometry::{Matrix, Vector};
use nalgebra::{Matrix2, Vector2};

/// With u the nodes' way, p the change of the slopes and m that of the potentials (both over
/// kT/Ω), c = kT/Ω h³ and V the gel in a voxel:
/// ```text
/// [ K   Bᵀ        0               ] [u]
/// [ B  -c V/φ''  -c V/φ''         ] [p]
/// [ 0  -c V/φ''  -c V/φ'' - c τ L ] [m]
/// ```
/// K is the stiffness of the chains and contacts, B the volumes' change with u, and V/φ''
/// what a voxel takes up per potential. Keeping p and m apart from u makes the nearly
/// incompressible dry gel, and the undrained gel of short steps, as easy as the swollen one.
pub(super) struct Saddle<'a> {
    pub(super) elastic: &'a Elastic<'a>,
    pub(super) state: &'a Linearisation,
    pub(super) pressing: &'a [Pressing],
    pub(super) cells: &'a [Cell],
    pub(super) conductance: &'a Conductance,
    /// τ, the step's length in units of L.
    pub(super) duration: f64,
    /// c V/φ'' by slot.
    pub(super) compliance: &'a [f64],
    /// How much stiffer the chains are against motion than at rest; the slopes in `state`
    /// are over it.
    pub(super) stiffening: f64,
    pub(super) anchor: Option<Anchor>,
    pub(super) guess: &'a Guess,
    pub(super) coarse: &'a Coarse,
    pub(super) modes: &'a RigidModes,
}

/// The inverses of the system's own blocks: of each node, and of each voxel's pressure and
/// potential. The pressures' block stands for B K⁻¹ Bᵀ, which for chains alone is
/// c V |cof F|²/(3n), whatever the voxel size.
#[derive(Clone, Debug, Default)]
pub(super) struct Guess {
    nodes: Vec<Matrix>,
    voxels: Vec<Matrix2<f64>>,
}

impl Guess {
    pub(super) fn renew(
        &mut self,
        elastic: &Elastic,
        state: &Linearisation,
        pressing: &[Pressing],
        (conductance, duration): (&Conductance, f64),
        (compliance, stiffening): (&[f64], f64),
    ) {
        let lattice = elastic.lattice;
        self.nodes.clear();
        self.nodes.resize(lattice.stride(), Matrix::zeros());
        elastic.add_diagonal_blocks(state, &mut self.nodes);
        self.nodes.iter_mut().for_each(|block| *block *= stiffening);
        contact::add_diagonal_blocks(pressing, &lattice.skin, &mut self.nodes);
        for block in &mut self.nodes {
            *block = block.try_inverse().unwrap_or_else(Matrix::zeros);
        }
        self.voxels.clear();
        self.voxels.resize(compliance.len(), Matrix2::zeros());
        let unit = elastic.voxel_energy();
        for &slot in &lattice.slots {
            let slot = slot as usize;
            let f = state.gradient_of(slot);
            let cofactors =
                f.try_inverse().map_or(0.0, |inverse| inverse.norm_squared()) * f.determinant().powi(2);
            let volume = unit * lattice.volume[slot];
            let chains = volume * cofactors / (3.0 * stiffening * elastic.gel.numbers().crosslinks);
            let own = compliance[slot];
            let flow = unit * duration * conductance.diagonal[slot];
            let block = Matrix2::new(chains + own, own, own, own + flow);
            self.voxels[slot] = block.try_inverse().unwrap_or_else(Matrix2::zeros);
        }
    }
}

impl Saddle<'_> {
    /// K times a motion of the nodes.
    pub(super) fn stiffness_times(
        elastic: &Elastic,
        (state, stiffening): (&Linearisation, f64),
        pressing: &[Pressing],
        motion: &[f64],
    ) -> Vec<f64> {
        let slots = elastic.lattice.volume.len();
        let mut product = vec![0.0; motion.len()];
        let still = vec![0.0; slots];
        elastic.add_mixed_stiffness_times(state, (motion, &still), (&mut product, &mut vec![0.0; slots]));
        product.iter_mut().for_each(|force| *force *= stiffening);
        contact::add_stiffness_times(pressing, &elastic.lattice.skin, motion, &mut product);
        product
    }
}

impl System for Saddle<'_> {
    fn times(&self, vector: &[f64], out: &mut [f64]) {
        let lattice = self.elastic.lattice;
        let (motion, rest) = vector.split_at(3 * lattice.stride());
        let (slopes, potentials) = rest.split_at(self.compliance.len());
        let (forces, rest) = out.split_at_mut(motion.len());
        let (volumes, flows) = rest.split_at_mut(slopes.len());
        forces.fill(0.0);
        volumes.fill(0.0);
        let scaled: Vec<f64> = slopes.iter().map(|slope| slope / self.stiffening).collect();
        self.elastic.add_mixed_stiffness_times(self.state, (motion, &scaled), (forces, volumes));
        forces.iter_mut().for_each(|force| *force *= self.stiffening);
        contact::add_stiffness_times(self.pressing, &lattice.skin, motion, forces);
        self.anchor.iter().for_each(|anchor| anchor.add_stiffness_times(motion, forces));
        self.modes.project(forces);
        self.conductance.outflow_change(self.cells, &lattice.slots, potentials, flows);
        let scale = self.elastic.voxel_energy() * self.duration;
        for slot in 0..slopes.len() {
            let taken = self.compliance[slot] * (slopes[slot] + potentials[slot]);
            volumes[slot] -= taken;
            flows[slot] = -taken - scale * flows[slot];
        }
    }

    fn precondition(&self, vector: &[f64], out: &mut [f64]) {
        let stride = self.elastic.lattice.stride();
        let (forces, rest) = vector.split_at(3 * stride);
        let (volumes, flows) = rest.split_at(self.compliance.len());
        let (motion, rest) = out.split_at_mut(3 * stride);
        let (slopes, potentials) = rest.split_at_mut(volumes.len());
        for (node, block) in self.guess.nodes.iter().enumerate() {
            let way = block * Vector::new(forces[node], forces[stride + node], forces[2 * stride + node]);
            (0..3).for_each(|axis| motion[axis * stride + node] = way[axis]);
        }
        let chains = self.elastic.gel.dry_shear_modulus() * self.elastic.edge;
        self.coarse.add_answer(forces, chains * self.stiffening, motion);
        self.modes.add_coarse(forces, motion);
        self.modes.project(motion);
        for (slot, block) in self.guess.voxels.iter().enumerate() {
            let change = block * Vector2::new(volumes[slot], flows[slot]);
            (slopes[slot], potentials[slot]) = (change.x, change.y);
        }
    }
}
