//! A bead on its way to rest together with what moves around it.

mod inertia;
mod standing;
mod tear;
mod water;

use crate::bead::Bead;
use crate::contact::{Contacts, pull_nodes, skin_position};
use crate::elastic::{Elastic, Holding};
use crate::equilibrium::{Equilibrium, EquilibriumError, Solver, Tolerance, dot};
use crate::fold::{FoldLaw, Folds};
use crate::gel_contact::Push;
use crate::lattice::{Embedded, POINT_WAY};
use crate::obstacle::Obstacle;
use crate::rupture;
use crate::thermodynamics::Gel;
use bedswell_geometry::Vector;
use inertia::Inertia;
pub use standing::Motion;
use standing::Standing;
pub use water::Lead;
pub(crate) use water::{HeldWater, STIFFNESS};

/// A bead on its way to rest together with movable obstacles, by damped explicit
/// steps of unit time. Node masses are fictitious and follow the stiffness, so that
/// the steps are stable; only the rest they lead to is real.
#[derive(Clone, Debug)]
pub struct Relaxation {
    bead: Bead,
    velocities: Vec<f64>,
    /// What holds it at its water; nothing where water moves freely.
    water: Option<HeldWater>,
    /// Net force on each node with the opposite sign: the energy's gradient (N).
    gradient: Vec<f64>,
    inertia: Inertia,
    contacts: Contacts,
    /// What the bead does to each obstacle.
    loads: Vec<Load>,
    /// Skin points that press on other beads, and the forces (N) on them.
    pulls: Vec<(u32, Vector)>,
    /// Where the bead comes near itself.
    folds: Folds,
    /// Pressure per distance that a fold lacks (Pa/m).
    fold_penalty: f64,
    /// Way of the fastest node since forces were last computed (m).
    under_way: f64,
    /// The same between the last two times (m).
    last_way: f64,
    /// Obstacles where they were when forces were last computed.
    last_obstacles: Vec<Obstacle>,
    /// When contacts were last looked for.
    listed: Standing,
    /// Distance of the skin from the bead's centre then (m).
    listed_extent: f64,
    /// When the masses were last renewed.
    weighed: Standing,
    /// Velocity of the bead as a whole (m per step), besides that of its nodes.
    drift: Vector,
    /// The mass with which it last drifted.
    drift_mass: f64,
    /// The bead's weight, less its buoyancy (N).
    weight: Vector,
    /// Sum of the stiffnesses of the points that press (N/m).
    pressing_stiffness: f64,
    smallest_volume_ratio: f64,
    largest_contact_force: f64,
    /// Sum of the forces of the bead on others (N).
    contact_sum: Vector,
}

/// What a bead does to an obstacle. Its skin is smooth: forces point along normals.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Load {
    /// Force on it (N).
    pub force: Vector,
    /// Sum of the stiffnesses of the points that press on it (N/m).
    pub stiffness: f64,
}

/// Pressure per penetration, in plane-strain moduli per swollen voxel edge. Stiff, as
/// nothing corrects the pressures for the penetration they take.
const PENALTY: f64 = 128.0;

/// Penetration, in swollen diameters, that the pressure of a gel held at its volume may
/// take: where that rises beyond the gel's stiffness, the contact stiffens with it.
const DEPTH: f64 = 2.5e-5;

impl Relaxation {
    /// A bead at rest.
    pub fn new(bead: Bead) -> Self {
        let values = bead.positions.len();
        Self {
            velocities: vec![0.0; values],
            water: None,
            gradient: vec![0.0; values],
            inertia: Inertia::default(),
            contacts: Contacts::default(),
            loads: Vec::new(),
            pulls: Vec::new(),
            folds: Folds::default(),
            fold_penalty: 0.0,
            under_way: 0.0,
            last_way: 0.0,
            last_obstacles: Vec::new(),
            listed: Standing::default(),
            listed_extent: 0.0,
            weighed: Standing::default(),
            drift: Vector::zeros(),
            drift_mass: 0.0,
            weight: Vector::zeros(),
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
        self.under_way += (by - 1.0) * self.extent();
        self.bead.scale(by);
    }

    /// Gives the bead a weight (N), less its buoyancy.
    pub fn set_weight(&mut self, weight: Vector) {
        self.weight = weight;
    }

    /// Finds the skin points within `reach` (m) of an obstacle or of gel from elsewhere in the
    /// bead; this lasts until they have approached by as much. The obstacles' indices must not
    /// change over the march.
    pub fn look(&mut self, gel: &Gel, obstacles: &[Obstacle], reach: f64) {
        let size = gel.free_stretch() * self.bead.voxel_edge();
        let lattice = self.bead.shared_lattice();
        self.contacts.area = lattice.skin.area * size * size;
        self.fold_penalty = self.soft_penalty(gel);
        let points = lattice.skin.len_with_inner();
        self.contacts.face_cracks(&lattice.skin, &self.bead.positions);
        self.contacts.collect(&lattice.skin, points, &self.bead.positions, obstacles, reach);
        let law = self.fold_law();
        // Both points of a pair may go that way.
        self.folds.renew(&self.bead, law, 2.0 * reach);
        self.listed_extent = self.bead.extent();
        self.listed = self.standing(obstacles, self.listed_extent + reach);
        self.weighed = Standing::default();
    }

    /// Renews the contacts' stiffness and the node masses, for contacts within `near` (m); this
    /// lasts until they have approached by half as much. Contacts to other beads must be weighed
    /// anew.
    pub fn weigh(&mut self, gel: &Gel, obstacles: &[Obstacle], near: f64) {
        let lattice = self.bead.shared_lattice();
        let deepest = DEPTH * lattice.across() as f64;
        let pressure = match &self.water {
            None => gel.confining_pressure(self.bead.volume() / self.bead.dry_volume()),
            Some(water) => water.pressure(&Elastic { lattice: &lattice, gel, edge: self.bead.voxel_edge() }),
        };
        let size = gel.free_stretch() * self.bead.voxel_edge();
        self.contacts.penalty = self.soft_penalty(gel).max(pressure / (deepest * size));
        let mut inertia = std::mem::take(&mut self.inertia);
        inertia.renew(self, gel, obstacles, near);
        self.inertia = inertia;
        let way = self.moved_since_look().map_or(0.0, |motion| motion.way);
        self.weighed = self.standing(obstacles, self.listed_extent + way + near);
    }

    /// Where nodes and obstacles are now; `near` (m) from the bead's centre counts as near.
    fn standing(&self, obstacles: &[Obstacle], near: f64) -> Standing {
        let centre = self.bead.centre();
        let slack = |obstacle: &Obstacle| (obstacle.gap(&centre).distance - near).max(0.0);
        Standing {
            positions: self.bead.positions.clone(),
            centre,
            slack: obstacles.iter().map(slack).collect(),
            obstacles: obstacles.to_vec(),
        }
    }

    /// Whether contacts were looked for and masses renewed since the bead was made, cut, or held
    /// at other water.
    pub fn is_settled_in(&self) -> bool {
        let values = self.bead.positions.len();
        self.listed.positions.len() == values && self.weighed.positions.len() == values
    }

    /// How the bead has moved since contacts were last looked for; nothing when they never were.
    pub fn moved_since_look(&self) -> Option<Motion> {
        self.listed.motion(&self.bead)
    }

    /// The same since masses were last renewed.
    pub fn moved_since_weighed(&self) -> Option<Motion> {
        self.weighed.motion(&self.bead)
    }

    /// Distance (m) by which a skin point and an obstacle may have come nearer since contacts were
    /// last looked for, when the bead has moved by `motion` since; without end when they never
    /// were.
    pub fn approach(&self, motion: Option<&Motion>, obstacles: &[Obstacle]) -> f64 {
        self.listed.approach(motion, obstacles)
    }

    /// The same since masses were last renewed.
    pub fn approach_since_weighed(&self, motion: Option<&Motion>, obstacles: &[Obstacle]) -> f64 {
        self.weighed.approach(motion, obstacles)
    }

    /// Distance of the skin from the bead's centre (m), at most, when contacts were last
    /// looked for.
    pub fn extent(&self) -> f64 {
        if self.listed_extent > 0.0 { self.listed_extent } else { self.bead.extent() }
    }

    /// A bound on how far a skin point has moved between the last two times that forces
    /// were computed (m).
    pub fn last_way(&self) -> f64 {
        POINT_WAY * self.last_way
    }

    /// Takes back the masses that contacts to other beads added.
    pub fn forget_others(&mut self) {
        self.inertia.forget_others();
    }

    /// Net forces on the nodes, and the loads on the obstacles.
    pub fn compute_forces(&mut self, gel: &Gel, obstacles: &[Obstacle]) {
        self.gradient.fill(0.0);
        self.pulls.clear();
        let lattice = self.bead.shared_lattice();
        let elastic = Elastic { lattice: &lattice, gel, edge: self.bead.voxel_edge() };
        self.smallest_volume_ratio = match &self.water {
            None => elastic.add_gradient(&self.bead.positions, &mut self.gradient),
            Some(water) => {
                water.add_gradient(&elastic, &self.bead.positions, &mut self.gradient);
                water.driest(&lattice.slots)
            }
        };
        if self.weight != Vector::zeros() {
            let stride = self.gradient.len() / 3;
            for (node, share) in lattice.node_shares.iter().enumerate() {
                for axis in 0..3 {
                    self.gradient[axis * stride + node] -= share * self.weight[axis];
                }
            }
        }
        self.last_way = std::mem::take(&mut self.under_way);
        let stiffness = self.point_stiffness();
        let moved = self.moved(obstacles);
        self.loads.clear();
        self.loads.resize(obstacles.len(), Load::default());
        let loads = &mut self.loads;
        let visit = |obstacle: usize, force: Vector| {
            loads[obstacle].force -= force;
            loads[obstacle].stiffness += stiffness;
        };
        let positions = &self.bead.positions;
        self.contacts.push(&lattice.skin, positions, obstacles, &moved, &mut self.gradient, visit);
        self.pressing_stiffness = self.loads.iter().map(|load| load.stiffness).sum();
        self.largest_contact_force = self.loads.iter().map(|load| load.force.norm()).fold(0.0, f64::max);
        self.contact_sum = self.loads.iter().map(|load| load.force).sum();
        self.press_folds();
    }

    /// A bound on what a skin point and each obstacle have come nearer by since forces were
    /// last computed (m).
    fn moved(&mut self, obstacles: &[Obstacle]) -> Vec<f64> {
        let own = self.last_way();
        let moved = if self.last_obstacles.len() == obstacles.len() {
            let ways = self.last_obstacles.iter().zip(obstacles);
            ways.map(|(before, now)| own + before.way(now, &Vector::zeros())).collect()
        } else {
            vec![f64::INFINITY; obstacles.len()]
        };
        self.last_obstacles.clear();
        self.last_obstacles.extend_from_slice(obstacles);
        moved
    }

    /// What the bead does to each obstacle, since the last `compute_forces`.
    pub fn loads(&self) -> &[Load] {
        &self.loads
    }

    /// Lets the bead press on itself.
    fn press_folds(&mut self) {
        let law = self.fold_law();
        let mut folds = std::mem::take(&mut self.folds);
        let moved = self.last_way();
        let (bead, gradient) = (&self.bead, &mut self.gradient);
        folds.press(bead, law, moved, |a, b, force| {
            pull_nodes(gradient, bead.lattice().skin.terms(a as usize), force);
            pull_nodes(gradient, bead.lattice().skin.terms(b as usize), -force);
        });
        self.folds = folds;
    }

    /// Pressure per penetration of a skin point times its area (N/m).
    pub(crate) fn point_stiffness(&self) -> f64 {
        self.contacts.penalty * self.contacts.area
    }

    /// How the gel of `faced` pushes this bead's skin points out: both skins are probed,
    /// each with half the pressure.
    pub(crate) fn push_by(&self, faced: &Relaxation) -> Push {
        Push { stiffness: 0.5 * self.point_stiffness(), area: self.contacts.area, edge: faced.free_edge() }
    }

    /// Pressure per penetration (Pa/m) where none is so high that little may be left of it.
    fn soft_penalty(&self, gel: &Gel) -> f64 {
        PENALTY * gel.moduli().plane_strain() / (gel.free_stretch() * self.bead.voxel_edge())
    }

    /// Skins that meet keep a distance, so that what a fold gives way by is not lost: folds
    /// stay soft in gel that is held tight, and slide.
    fn fold_law(&self) -> FoldLaw {
        let area = self.contacts.area;
        FoldLaw { stiffness: self.fold_penalty * area, area, edge: self.free_edge() }
    }

    /// Edge of a free-swollen voxel when contacts were last looked for (m).
    fn free_edge(&self) -> f64 {
        (self.contacts.area / self.bead.lattice().skin.area).sqrt()
    }

    /// Adds a force (N) on a skin point.
    pub(crate) fn pull(&mut self, point: u32, force: Vector) {
        self.pulls.push((point, force));
        pull_nodes(&mut self.gradient, self.bead.lattice().skin.terms(point as usize), force);
    }

    /// Adds a force (N) on a place in the gel.
    pub(crate) fn pull_at(&mut self, at: &Embedded, force: Vector) {
        let stride = self.gradient.len() / 3;
        let gradient = &mut self.gradient;
        self.bead.lattice().for_each_term(at, |node, weight| {
            (0..3).for_each(|axis| gradient[axis * stride + node] -= weight * force[axis]);
        });
    }

    /// Counts a neighbouring bead's force (N), with its stiffness (N/m), among the
    /// contact forces.
    pub fn note_contact(&mut self, force: Vector, stiffness: f64) {
        self.pressing_stiffness += stiffness;
        self.contact_sum -= force;
        self.largest_contact_force = self.largest_contact_force.max(force.norm());
    }

    /// Brings the bead to equilibrium among obstacles that stay where they are, by
    /// Newton steps that do not know contact of the bead with itself. Where none is
    /// found the bead stays as it was.
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
        let chains = gel.dry_shear_modulus() * bead.voxel_edge();
        solver.contacts.ties = rupture::drags(bead.lattice(), chains);
        let equilibrium = solver.settle(&mut bead, gel, obstacles, tolerance)?;
        self.bead = bead;
        self.contacts = solver.contacts;
        self.contacts.ties.clear();
        self.fold_penalty = self.soft_penalty(gel);
        let law = self.fold_law();
        self.folds.renew(&self.bead, law, 0.0);
        self.listed = Standing::default();
        self.compute_forces(gel, obstacles);
        Ok(equilibrium)
    }

    /// Skin points that press on other beads, with the force (N) on each and its stiffness
    /// (N/m).
    pub(crate) fn pulls(&self) -> impl Iterator<Item = (u32, Vector, f64)> {
        let stiffness = 0.5 * self.point_stiffness();
        let pulls = self.pulls.iter().filter(|(_, force)| force.norm_squared() > 0.0);
        pulls.map(move |&(point, force)| (point, force, stiffness))
    }

    /// What holds the voxels at their water, if something does.
    pub(crate) fn holding(&self) -> Option<&Holding> {
        self.water.as_ref().map(|water| &water.holding)
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

    /// Net force on the bead over its largest contact force.
    pub fn balance(&self, gel: &Gel) -> f64 {
        self.net_force().norm() / self.force_scale(gel)
    }

    fn net_force(&self) -> Vector {
        self.weight - self.contact_sum
    }

    /// Largest force on one obstacle or one other bead (N).
    pub fn largest_contact_force(&self) -> f64 {
        self.largest_contact_force
    }

    /// The smallest voxel volume ratio to dry; at or below 1 the state is void.
    pub fn smallest_volume_ratio(&self) -> f64 {
        self.smallest_volume_ratio
    }

    /// Volume (m³) that the pressing skin encloses inside obstacles.
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

    /// Whether the bead presses on itself.
    pub fn is_folded(&self) -> bool {
        self.folds.pressing > 0
    }

    /// Volume that folded skins may have lost to each other (m³).
    pub fn folded_volume(&self) -> f64 {
        self.folds.overlap
    }

    fn force_scale(&self, gel: &Gel) -> f64 {
        let rest = gel.moduli().shear * (gel.free_stretch() * self.bead.dry_radius()).powi(2);
        self.largest_contact_force.max(1e-3 * rest)
    }
}

/// A force with a share turned against the motion.
#[inline]
fn damped(force: f64, velocity: f64, damping: f64) -> f64 {
    if force * velocity > 0.0 { force * (1.0 - damping) } else { force * (1.0 + damping) }
}
