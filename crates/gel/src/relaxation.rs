use crate::bead::Bead;
use crate::contact::{self, Contacts, skin_position};
use crate::elastic::{Elastic, Linearisation};
use crate::gel_contact::Facing;
use crate::lattice::Embedded;
use crate::equilibrium::{Equilibrium, EquilibriumError, Solver, Tolerance, dot};
use crate::obstacle::Obstacle;
use crate::thermodynamics::Gel;
use bedswell_geometry::{Matrix, Vector};

/// A bead on its way to rest together with movable obstacles, by damped explicit
/// steps of unit time. Node masses are fictitious and follow the stiffness, so that
/// the steps are stable; only the rest they lead to is real.
#[derive(Clone, Debug)]
pub struct Relaxation {
    bead: Bead,
    velocities: Vec<f64>,
    /// Net force on each node with the opposite sign: the energy's gradient (N).
    gradient: Vec<f64>,
    /// One per node: heavy only along the normals of the contacts it may make, so that
    /// the skin slides as freely as the gel inside.
    masses: Vec<Matrix>,
    /// Their inverses.
    mobilities: Vec<Matrix>,
    contacts: Contacts,
    /// Where the bead comes near itself.
    folds: Facing,
    /// Longest way of a node since the folds were last measured (m).
    moved: f64,
    /// No skin point is further from the bead's centre than this (m).
    extent: f64,
    /// Velocity of the bead as a whole (m per step), besides that of its nodes.
    drift: Vector,
    /// Sum of the stiffnesses of the points that press (N/m).
    pressing_stiffness: f64,
    smallest_volume_ratio: f64,
    largest_contact_force: f64,
    contact_sum: Vector,
}

/// A force with a share turned against the motion.
#[inline]
fn damped(force: f64, velocity: f64, damping: f64) -> f64 {
    if force * velocity > 0.0 { force * (1.0 - damping) } else { force * (1.0 + damping) }
}

/// What one skin point does to an obstacle.
#[derive(Clone, Copy, Debug)]
pub struct Push {
    /// Index of the obstacle.
    pub obstacle: usize,
    /// Force on it (N).
    pub force: Vector,
    /// Where it acts (m).
    pub position: Vector,
    /// Stiffness of the contact (N/m).
    pub stiffness: f64,
}

/// Node mass over the trace of the node's own block of the stiffness. Displacements
/// that alternate from node to node along one axis are the stiffest: with volume
/// stiffness b and chains n per node their frequency² is 4(b + n) over a trace of
/// about 1.5 b + 8 n, and unit steps with damping need it below some 2.8.
const MASS_FACTOR: f64 = 2.0;

/// Pressure per penetration, in plane-strain moduli per swollen voxel edge. Stiff, as
/// nothing corrects the pressures for the penetration they take.
const PENALTY: f64 = 64.0;

/// Penetration, in swollen diameters, that the pressure of a gel held at its volume may
/// take: where that rises beyond the gel's stiffness, the contact stiffens with it.
const DEPTH: f64 = 1e-4;

/// Longest way of a node over its longest way along one axis, for nodes that move along
/// with the bead.
const AXES_TO_LENGTH: f64 = 2.0 * 1.74;

/// Mass of the bead as a whole over the stiffness of its contacts.
const DRIFT_MASS_FACTOR: f64 = 4.0;

impl Relaxation {
    /// A bead at rest.
    pub fn new(bead: Bead) -> Self {
        let values = bead.positions.len();
        Self {
            velocities: vec![0.0; values],
            gradient: vec![0.0; values],
            masses: vec![Matrix::identity(); values / 3],
            mobilities: vec![Matrix::identity(); values / 3],
            contacts: Contacts::default(),
            folds: Facing::default(),
            moved: 0.0,
            extent: bead.extent(),
            drift: Vector::zeros(),
            pressing_stiffness: 0.0,
            smallest_volume_ratio: f64::INFINITY,
            largest_contact_force: 0.0,
            contact_sum: Vector::zeros(),
            bead,
        }
    }

    /// The bead.
    pub fn bead(&self) -> &Bead {
        &self.bead
    }

    /// Grows the bead about its centre.
    pub fn grow(&mut self, by: f64) {
        self.moved += (by - 1.0) * self.extent;
        self.extent *= by;
        self.bead.scale(by);
    }

    /// A bound on the distance of the skin from the bead's centre (m).
    pub fn extent(&self) -> f64 {
        self.extent
    }

    /// Finds the skin points within `reach` (m) of an obstacle and renews the node
    /// masses. The obstacles' indices must not change over the march.
    pub fn renew(&mut self, gel: &Gel, obstacles: &[Obstacle], reach: f64) {
        let size = gel.free_stretch() * self.bead.voxel_edge();
        let lattice = self.bead.shared_lattice();
        self.contacts.area = lattice.skin.area * size * size;
        let deepest = DEPTH * lattice.across() as f64;
        let pressure = gel.confining_pressure(self.bead.volume() / self.bead.dry_volume());
        let stiffness = (PENALTY * gel.moduli().plane_strain()).max(pressure / deepest);
        self.contacts.penalty = stiffness / size;
        self.contacts.collect(&lattice.skin, &self.bead.positions, obstacles, reach);
        let mut state = Linearisation::default();
        let elastic = Elastic { lattice: &lattice, gel, edge: self.bead.voxel_edge() };
        elastic.linearise(&self.bead.positions, false, &mut state);
        let mut blocks = vec![Matrix::zeros(); lattice.stride()];
        elastic.add_diagonal_blocks(&state, &mut blocks);
        // All points within reach count, so that none turns out too light for the
        // contact it is about to make.
        for block in &mut blocks {
            *block = Matrix::from_diagonal_element(block.trace().max(f64::MIN_POSITIVE));
        }
        let positions = &self.bead.positions;
        contact::add_possible_blocks(&self.contacts, &lattice.skin, positions, obstacles, &mut blocks);
        for (mass, block) in self.masses.iter_mut().zip(&blocks) {
            *mass = block * MASS_FACTOR;
        }
        self.mobilities.clear();
        self.extent = self.bead.extent();
        let folds = Facing::own(&self.bead, reach);
        self.weigh_probes(&folds);
        self.weigh_hosts(&folds);
        self.folds = folds;
    }

    /// Net forces on the nodes, and what the skin does to the obstacles.
    pub fn compute_forces(&mut self, gel: &Gel, obstacles: &[Obstacle], mut push: impl FnMut(Push)) {
        self.gradient.fill(0.0);
        let lattice = self.bead.shared_lattice();
        let elastic = Elastic { lattice: &lattice, gel, edge: self.bead.voxel_edge() };
        self.smallest_volume_ratio = elastic.add_gradient(&self.bead.positions, &mut self.gradient);
        let stiffness = self.contacts.penalty * self.contacts.area;
        let mut pressing = 0.0;
        let mut sums = vec![Vector::zeros(); obstacles.len()];
        self.contacts.push(
            &lattice.skin,
            &self.bead.positions,
            obstacles,
            &mut self.gradient,
            |obstacle, force, position| {
                sums[obstacle] -= force;
                pressing += stiffness;
                push(Push { obstacle, force: -force, position, stiffness });
            },
        );
        self.pressing_stiffness = pressing;
        self.largest_contact_force = sums.iter().map(Vector::norm).fold(0.0, f64::max);
        self.contact_sum = sums.iter().sum();
        self.press_folds();
    }

    /// Lets the bead press on itself.
    fn press_folds(&mut self) {
        let stiffness = 0.5 * self.point_stiffness();
        let moved = 2.0 * std::mem::take(&mut self.moved);
        let mut folds = std::mem::take(&mut self.folds);
        for press in folds.measure(&self.bead, &self.bead, Vector::zeros(), true, stiffness, moved) {
            self.pull(press.point, press.force);
            self.pull_at(&press.at, -press.force);
        }
        self.folds = folds;
    }

    /// Pressure per penetration of a skin point times its area (N/m).
    pub(crate) fn point_stiffness(&self) -> f64 {
        self.contacts.penalty * self.contacts.area
    }

    /// Adds a force (N) on a skin point.
    pub(crate) fn pull(&mut self, point: u32, force: Vector) {
        let lattice = self.bead.shared_lattice();
        self.pull_nodes(lattice.skin.terms(point as usize), force);
    }

    /// Adds a force (N) on a place in the gel.
    pub(crate) fn pull_at(&mut self, at: &Embedded, force: Vector) {
        self.pull_nodes(self.bead.lattice().embedded_terms(at).into_iter(), force);
    }

    fn pull_nodes(&mut self, terms: impl Iterator<Item = (usize, f64)>, force: Vector) {
        let stride = self.masses.len();
        for (node, weight) in terms {
            for axis in 0..3 {
                self.gradient[axis * stride + node] -= weight * force[axis];
            }
        }
    }

    /// Makes the nodes behind skin points heavy enough for the contacts they may make.
    pub(crate) fn weigh_probes(&mut self, facing: &Facing) {
        let lattice = self.bead.shared_lattice();
        for (point, _, normal) in facing.possible() {
            self.weigh(lattice.skin.terms(point as usize), normal);
        }
    }

    /// Makes the nodes behind places in the gel heavy enough for the contacts they may take.
    pub(crate) fn weigh_hosts(&mut self, facing: &Facing) {
        let lattice = self.bead.shared_lattice();
        for (_, at, normal) in facing.possible() {
            self.weigh(lattice.embedded_terms(at).into_iter(), normal);
        }
    }

    fn weigh(&mut self, terms: impl Iterator<Item = (usize, f64)>, normal: &Vector) {
        let mass = contact::turning(normal) * (MASS_FACTOR * self.point_stiffness());
        for (node, weight) in terms {
            self.masses[node] += mass * weight.abs();
        }
        self.mobilities.clear();
    }

    /// Counts a neighbouring bead's force (N), with its stiffness (N/m), among the
    /// contact forces.
    pub(crate) fn note_contact(&mut self, force: Vector, stiffness: f64) {
        self.pressing_stiffness += stiffness;
        self.contact_sum -= force;
        self.largest_contact_force = self.largest_contact_force.max(force.norm());
    }

    /// Moves the nodes by one step. `damping` is the share of each force component
    /// that is turned against the velocity (local non-viscous damping, Cundall 1987,
    /// from memory). Returns the longest move of a node along an axis (m).
    pub fn advance(&mut self, damping: f64) -> f64 {
        let (stride, nodes) = (self.masses.len(), self.bead.lattice().node_count());
        let mut longest = 0.0_f64;
        // The nodes' masses together would make the bead far heavier than what holds
        // it is stiff: as a whole it answers with a mass of its own, like a grain.
        let mass = DRIFT_MASS_FACTOR * self.pressing_stiffness;
        for axis in 0..3 {
            // The grains' net force is the opposite of the bead's.
            let force = -self.contact_sum[axis];
            let drift = &mut self.drift[axis];
            *drift = if mass > 0.0 { *drift + damped(force, *drift, damping) / mass } else { 0.0 };
        }
        if self.mobilities.is_empty() {
            let inverse = |mass: &Matrix| mass.try_inverse().unwrap_or_default();
            self.mobilities.extend(self.masses.iter().map(inverse));
        }
        let (gradient, drift) = (&self.gradient, self.drift);
        for (node, mobility) in self.mobilities[..nodes].iter().enumerate() {
            let places = [node, stride + node, 2 * stride + node];
            let velocity = places.map(|place| self.velocities[place]);
            let force = Vector::from_fn(|axis, _| damped(-gradient[places[axis]], velocity[axis], damping));
            let velocity = Vector::from(velocity) + mobility * force;
            for axis in 0..3 {
                self.velocities[places[axis]] = velocity[axis];
                self.bead.positions[places[axis]] += velocity[axis] + drift[axis];
            }
            longest = longest.max(velocity.amax());
        }
        longest += drift.amax();
        self.moved += AXES_TO_LENGTH * longest;
        self.extent += AXES_TO_LENGTH * longest;
        longest
    }

    /// Brings the bead to equilibrium among obstacles that stay where they are, by
    /// Newton steps. Where none is found the bead stays as it was.
    ///
    /// # Errors
    /// When no equilibrium is found.
    pub fn settle(
        &mut self,
        gel: &Gel,
        obstacles: &[Obstacle],
        tolerance: Tolerance,
    ) -> Result<Equilibrium, EquilibriumError> {
        let mut bead = self.bead.clone();
        let mut solver = Solver::with_contacts(&bead, self.contacts.clone());
        let equilibrium = solver.settle(&mut bead, gel, obstacles, tolerance)?;
        self.bead = bead;
        self.contacts = solver.contacts;
        self.folds = Facing::own(&self.bead, 0.0);
        self.extent = self.bead.extent();
        self.compute_forces(gel, obstacles, |_| ());
        Ok(equilibrium)
    }

    /// Whether any skin point presses on something.
    pub fn touches(&self) -> bool {
        self.largest_contact_force > 0.0
    }

    /// Norm of the net nodal forces over the largest contact force, or over G R²
    /// while nothing touches.
    pub fn residual(&self, gel: &Gel) -> f64 {
        dot(&self.gradient, &self.gradient).sqrt() / self.force_scale(gel)
    }

    /// Net contact force on the bead over its largest contact force.
    pub fn balance(&self, gel: &Gel) -> f64 {
        self.contact_sum.norm() / self.force_scale(gel)
    }

    /// Largest force on one obstacle (N).
    pub fn largest_contact_force(&self) -> f64 {
        self.largest_contact_force
    }

    /// The bead's force on each obstacle (N).
    pub fn contact_forces(&self, obstacles: &[Obstacle]) -> Vec<Vector> {
        let lattice = self.bead.shared_lattice();
        self.contacts.forces(&lattice.skin, &self.bead.positions, obstacles)
    }

    /// The smallest voxel volume ratio to dry; at or below 1 the state is void.
    pub fn smallest_volume_ratio(&self) -> f64 {
        self.smallest_volume_ratio
    }

    /// Volume (m³) that the pressing skin encloses inside obstacles, less what it
    /// leaves open: the unevenness of its facets cancels, penetration stays.
    pub fn penetrated_volume(&self, obstacles: &[Obstacle]) -> f64 {
        let lattice = self.bead.shared_lattice();
        let depth: f64 = self
            .contacts
            .pairs
            .iter()
            .map(|pair| {
                let place = skin_position(&lattice.skin, &self.bead.positions, pair.point as usize);
                let distance = obstacles[pair.obstacle as usize].gap(&place).distance;
                if pair.multiplier > self.contacts.penalty * distance { -distance } else { 0.0 }
            })
            .sum();
        depth.max(0.0) * self.contacts.area
    }

    /// Volume by which the bead overlaps itself (m³).
    pub fn folded_volume(&self) -> f64 {
        0.5 * self.folds.overlap
    }

    fn force_scale(&self, gel: &Gel) -> f64 {
        let rest = gel.moduli().shear * (gel.free_stretch() * self.bead.dry_radius()).powi(2);
        self.largest_contact_force.max(1e-3 * rest)
    }
}
