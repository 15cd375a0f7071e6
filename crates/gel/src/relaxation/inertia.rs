//! Fictitious masses of a bead's nodes: as heavy as unit steps need, and no heavier.

use super::{Relaxation, damped};
use crate::contact;
use crate::elastic::{Elastic, Linearisation};
use crate::gel_contact::{Facing, Push};
use crate::obstacle::Obstacle;
use crate::thermodynamics::Gel;
use bedswell_geometry::{Matrix, Vector};

/// Node mass over the trace of the node's own block of the stiffness. Displacements
/// that alternate from node to node along one axis are the stiffest: with volume
/// stiffness b and chains n per node their frequency² is 4(b + n) over a trace of
/// about 1.5 b + 8 n, and unit steps with damping need it below some 2.8.
const MASS_FACTOR: f64 = 2.0;

/// Mass of the bead as a whole over the stiffness of its contacts.
const DRIFT_MASS_FACTOR: f64 = 4.0;

/// The same at least and at most: a mass that changed with every point that touches now and then
/// would feed in motion, or take all of it away.
const DRIFT_MASS_KEPT: (f64, f64) = (1.5, 12.0);

/// Masses are matrices: heavy only along the normals of the contacts that a node may
/// make, so that the skin slides as freely as the gel inside moves.
#[derive(Clone, Debug, Default)]
pub(super) struct Inertia {
    /// One per node, without contacts to other beads.
    own: Vec<Matrix>,
    /// What contacts to other beads add.
    others: Vec<Matrix>,
    /// One per node.
    masses: Vec<Matrix>,
    /// Their inverses.
    mobilities: Vec<Matrix>,
    /// The masses with which nodes last moved.
    moved: Vec<Matrix>,
}

impl Inertia {
    /// Masses for the gel's own stiffness and the contacts that are within `near` (m).
    pub(super) fn renew(&mut self, bead: &Relaxation, gel: &Gel, obstacles: &[Obstacle], near: f64) {
        let lattice = bead.bead.shared_lattice();
        let positions = &bead.bead.positions;
        let mut state = Linearisation::default();
        let elastic = Elastic { lattice: &lattice, gel, edge: bead.bead.voxel_edge() };
        let stiffening = match &bead.water {
            None => {
                elastic.linearise(positions, false, &mut state);
                1.0
            }
            Some(water) => {
                elastic.linearise_held(positions, &water.holding, &mut state);
                water.stiffening
            }
        };
        self.own.clear();
        self.own.resize(lattice.stride(), Matrix::zeros());
        elastic.add_diagonal_blocks(&state, &mut self.own);
        for block in &mut self.own {
            *block = Matrix::from_diagonal_element((block.trace() * stiffening).max(f64::MIN_POSITIVE));
        }
        // All points that are near count, so that none turns out too light for the
        // contact it is about to make.
        contact::add_possible_blocks(
            &bead.contacts,
            &lattice.skin,
            positions,
            obstacles,
            near,
            &mut self.own,
        );
        for (point, stiffness) in bead.folds.possible(&bead.bead, bead.fold_law(), near) {
            let terms = lattice.skin.terms(point as usize);
            terms.for_each(|(node, weight)| self.own[node] += stiffness * weight.abs());
        }
        self.own.iter_mut().for_each(|mass| *mass *= MASS_FACTOR);
        if self.others.len() != self.own.len() {
            self.forget_others();
        }
        self.mobilities.clear();
    }

    /// Takes back what contacts to other beads added.
    pub(super) fn forget_others(&mut self) {
        self.others.clear();
        self.others.resize(self.own.len(), Matrix::zeros());
        self.mobilities.clear();
    }

    /// Makes nodes heavy enough for a contact of the given stiffness (N/m).
    fn weigh(&mut self, terms: impl Iterator<Item = (usize, f64)>, stiffness: Matrix) {
        let mass = stiffness * MASS_FACTOR;
        for (node, weight) in terms {
            self.others[node] += mass * weight.abs();
        }
        self.mobilities.clear();
    }

    /// Takes up masses that were renewed. They must not feed the motion: a node keeps its
    /// velocity or its momentum, whichever has less energy.
    fn settle(&mut self, velocities: &mut [f64]) {
        if !self.mobilities.is_empty() {
            return;
        }
        self.masses.clear();
        self.masses.extend(self.own.iter().zip(&self.others).map(|(own, others)| own + others));
        self.mobilities.extend(self.masses.iter().map(|mass| mass.try_inverse().unwrap_or_default()));
        let stride = velocities.len() / 3;
        if self.moved.len() == self.masses.len() {
            for (node, (before, mass)) in self.moved.iter().zip(&self.masses).enumerate() {
                let places = [node, stride + node, 2 * stride + node];
                let velocity = Vector::from(places.map(|place| velocities[place]));
                let momentum = before * velocity;
                let slower = self.mobilities[node] * momentum;
                if slower.dot(&momentum) < velocity.dot(&(mass * velocity)) {
                    (0..3).for_each(|axis| velocities[places[axis]] = slower[axis]);
                }
            }
        }
        self.moved.clone_from(&self.masses);
    }
}

impl Relaxation {
    /// Makes the nodes behind skin points heavy enough for the contacts they may make.
    pub(crate) fn weigh_probes(&mut self, facing: &Facing, law: Push, near: f64) {
        let lattice = self.bead.shared_lattice();
        for (point, _, stiffness) in facing.possible(law, near) {
            self.inertia.weigh(lattice.skin.terms(point as usize), stiffness);
        }
    }

    /// Makes the nodes behind places in the gel heavy enough for the contacts they may take.
    pub(crate) fn weigh_hosts(&mut self, facing: &Facing, law: Push, near: f64) {
        let lattice = self.bead.shared_lattice();
        for (_, at, stiffness) in facing.possible(law, near) {
            self.inertia.weigh(lattice.possible_terms(at).into_iter(), stiffness);
        }
    }

    /// Moves the nodes by one step. `damping` is the share of each force component
    /// that is turned against the velocity (local non-viscous damping, Cundall 1987,
    /// from memory).
    pub fn advance(&mut self, damping: f64) {
        self.advance_drift(damping);
        let (stride, nodes) = (self.gradient.len() / 3, self.bead.lattice().node_count());
        let drift = self.drift;
        let mut fastest = 0.0_f64;
        self.inertia.settle(&mut self.velocities);
        for (node, mobility) in self.inertia.mobilities[..nodes].iter().enumerate() {
            let places = [node, stride + node, 2 * stride + node];
            let velocity = Vector::from(places.map(|place| self.velocities[place]));
            let force = places.map(|place| -self.gradient[place]);
            let force = Vector::from_fn(|axis, _| damped(force[axis], velocity[axis], damping));
            let velocity = velocity + mobility * force;
            let way = velocity + drift;
            for axis in 0..3 {
                self.velocities[places[axis]] = velocity[axis];
                self.bead.positions[places[axis]] += way[axis];
            }
            fastest = fastest.max(way.norm_squared());
        }
        self.under_way += fastest.sqrt();
    }

    /// The nodes' masses together would make the bead far heavier than what holds it is
    /// stiff: as a whole it answers with a mass of its own, like a grain.
    fn advance_drift(&mut self, damping: f64) {
        let stiffness = self.pressing_stiffness;
        let (least, most) = DRIFT_MASS_KEPT;
        if !(least * stiffness..=most * stiffness).contains(&self.drift_mass) {
            let mass = DRIFT_MASS_FACTOR * stiffness;
            // As for a node: momentum is kept where the mass rises.
            self.drift *= (self.drift_mass / mass.max(f64::MIN_POSITIVE)).min(1.0);
            self.drift_mass = mass;
        }
        let mass = self.drift_mass;
        let force = self.net_force();
        for axis in 0..3 {
            let drift = &mut self.drift[axis];
            *drift = if mass > 0.0 { *drift + damped(force[axis], *drift, damping) / mass } else { 0.0 };
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    fn moved_with(mass: Matrix, velocity: Vector) -> (Inertia, Vec<f64>) {
        let mut inertia = Inertia { own: vec![mass], others: vec![Matrix::zeros()], ..Inertia::default() };
        let mut velocities = velocity.as_slice().to_vec();
        inertia.settle(&mut velocities);
        (inertia, velocities)
    }

    #[test]
    fn renewed_masses_keep_velocity_or_momentum_and_add_no_energy() {
        let velocity = Vector::new(0.3, -0.2, 0.1);
        let light = Matrix::from_diagonal_element(2.0);
        let normal = Vector::new(1.0, 2.0, -1.0).normalize();
        let heavy = light + normal * normal.transpose() * 50.0;
        let (mut inertia, mut velocities) = moved_with(light, velocity);
        assert_relative_eq!(Vector::from_column_slice(&velocities), velocity);

        inertia.own = vec![heavy];
        inertia.mobilities.clear();
        inertia.settle(&mut velocities);
        let slower = Vector::from_column_slice(&velocities);
        assert_relative_eq!(heavy * slower, light * velocity, epsilon = 1e-12);
        assert!(slower.dot(&(heavy * slower)) < velocity.dot(&(light * velocity)));

        inertia.own = vec![light];
        inertia.mobilities.clear();
        inertia.settle(&mut velocities);
        assert_relative_eq!(Vector::from_column_slice(&velocities), slower);
    }
}
