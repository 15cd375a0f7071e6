//! Equilibrium of one bead among fixed obstacles: Newton steps by preconditioned
//! conjugate gradients, staged from dry.

use crate::bead::Bead;
use crate::contact::{self, Contacts, Pressing, skin_position};
use crate::elastic::{Elastic, Linearisation};
use crate::obstacle::Obstacle;
use crate::rigid::{Held, RigidModes};
use crate::thermodynamics::Gel;
use bedswell_geometry::{Matrix, Vector};
use thiserror::Error;

/// How closely an equilibrium is solved.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Tolerance {
    /// Norm of the net nodal forces over the largest contact force.
    pub residual: f64,
    /// Times that contact pressures are corrected for the penetration they took.
    pub corrections: usize,
    /// The bead's centre and orientation are held, for obstacles that would let it
    /// slip out sideways.
    pub held: bool,
}

impl Default for Tolerance {
    fn default() -> Self {
        Self { residual: 1e-8, corrections: 3, held: false }
    }
}

/// What holds a bead in equilibrium.
#[derive(Clone, Debug, PartialEq)]
pub struct Equilibrium {
    /// The bead's force on each obstacle (N).
    pub forces: Vec<Vector>,
    /// Norm of the net nodal forces over the largest contact force (over G R² where
    /// nothing touches).
    pub residual: f64,
    /// Net torque of the contact forces on the bead over the largest contact force
    /// times the swollen radius. A lattice resists turning a little where a
    /// frictionless ball would not.
    pub torque: f64,
    /// Deepest penetration of a skin point (m).
    pub penetration: f64,
    /// Newton steps taken.
    pub steps: usize,
    /// Conjugate-gradient iterations taken.
    pub iterations: usize,
}

/// Why no equilibrium was found.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum EquilibriumError {
    /// The solver stalled.
    #[error(
        "no equilibrium at stretch {stretch:.3}: the residual stays at {residual:.2e} of the largest contact force"
    )]
    Stalled {
        /// Free stretch of the stage.
        stretch: f64,
        /// Where the residual stopped.
        residual: f64,
    },
}

/// Pressure per penetration, in plane-strain moduli per swollen voxel edge.
pub(crate) const PENALTY: f64 = 8.0;
/// Largest growth of the free stretch in one stage.
const STAGE_GROWTH: f64 = 1.25;
/// Stretch at which the way from dry starts: the mixing energy ends at J = 1.
const FIRST_STRETCH: f64 = 1.05;
const NEWTON_STEPS: usize = 60;
/// Residual at which contact pressures are corrected. What a solve leaves undone goes into
/// the pressures, and no later solve can take it out: a held bead then pushes its
/// obstacles unevenly.
const BEFORE_CORRECTIONS: f64 = 1e-5;

/// Swells `bead` from the stretch it has to free swelling among `obstacles`, by
/// stages from dry that grow its free stretch by at most a quarter.
///
/// # Errors
/// When a stage finds no equilibrium.
pub fn swell(
    bead: &mut Bead,
    gel: &Gel,
    obstacles: &[Obstacle],
    tolerance: Tolerance,
) -> Result<Equilibrium, EquilibriumError> {
    let free = gel.free_stretch();
    let mut stretch = FIRST_STRETCH.min(free);
    let mut solver = Solver::new(bead);
    *bead = Bead::new(bead.shared_lattice(), bead.dry_radius(), bead.centre(), stretch);
    while stretch * STAGE_GROWTH < free {
        let next = stretch * STAGE_GROWTH;
        if solver.contacts.pairs.is_empty() {
            bead.scale(next / stretch);
        }
        stretch = next;
        let stage = Tolerance { residual: 1e-2, corrections: 0, held: tolerance.held };
        solver.settle(bead, &gel.limited_to(stretch), obstacles, stage)?;
    }
    if solver.contacts.pairs.is_empty() {
        bead.scale(free / stretch);
    }
    solver.settle(bead, gel, obstacles, tolerance)
}

/// Brings `bead` to equilibrium among `obstacles` from the state it is in.
///
/// # Errors
/// When none is found.
pub fn settle(
    bead: &mut Bead,
    gel: &Gel,
    obstacles: &[Obstacle],
    tolerance: Tolerance,
) -> Result<Equilibrium, EquilibriumError> {
    Solver::new(bead).settle(bead, gel, obstacles, tolerance)
}

/// Scratch memory and contacts that live through several solves.
pub(crate) struct Solver {
    pub(crate) contacts: Contacts,
    state: Linearisation,
    gradient: Vec<f64>,
    blocks: Vec<Matrix>,
    steps: usize,
    iterations: usize,
}

impl Solver {
    fn new(bead: &Bead) -> Self {
        Self::with_contacts(bead, Contacts::default())
    }

    pub(crate) fn with_contacts(bead: &Bead, contacts: Contacts) -> Self {
        Self {
            contacts,
            state: Linearisation::default(),
            gradient: vec![0.0; bead.positions.len()],
            blocks: Vec::new(),
            steps: 0,
            iterations: 0,
        }
    }

    pub(crate) fn settle(
        &mut self,
        bead: &mut Bead,
        gel: &Gel,
        obstacles: &[Obstacle],
        tolerance: Tolerance,
    ) -> Result<Equilibrium, EquilibriumError> {
        let stretch = gel.free_stretch();
        let voxel = stretch * bead.voxel_edge();
        let skin_area = bead.lattice().skin.area * voxel * voxel;
        let penalty = PENALTY * gel.moduli().plane_strain() / voxel;
        let rest_force = rest_force(gel, bead);
        let longest_step = longest_step(voxel, obstacles);
        let (elastic, positions) = bead.elastic_and_positions(gel);
        // Pressures outlive a change of their points' area as forces.
        let rescale = if self.contacts.area > 0.0 { self.contacts.area / skin_area } else { 1.0 };
        self.contacts.pairs.iter_mut().for_each(|pair| pair.multiplier *= rescale);
        (self.contacts.area, self.contacts.penalty) = (skin_area, penalty);

        let held = match tolerance.held {
            _ if self.contacts.is_gripped() => Held::Nothing,
            true => Held::Everything,
            false => Held::Rotation,
        };
        for correction in 0..=tolerance.corrections {
            let last = correction == tolerance.corrections;
            let target = if last { tolerance.residual } else { tolerance.residual.max(BEFORE_CORRECTIONS) };
            self.newton(&elastic, positions, obstacles, (longest_step, rest_force), (target, held))?;
            if !last {
                self.contacts.update_multipliers(&elastic.lattice.skin, positions, obstacles);
            }
        }
        let mut balance = self.balance(&elastic, positions, obstacles, rest_force);
        if held == Held::Rotation && balance.torque > tolerance.residual {
            self.turn(&elastic, positions, obstacles, (longest_step, rest_force), tolerance.residual);
            balance = self.balance(&elastic, positions, obstacles, rest_force);
        }
        let skin = &elastic.lattice.skin;
        let mut penetration = 0.0_f64;
        for pair in &self.contacts.pairs {
            let place = skin_position(skin, positions, pair.point as usize);
            penetration = penetration.max(-obstacles[pair.obstacle as usize].gap(&place).distance);
        }
        Ok(Equilibrium {
            forces: self.contacts.forces(skin, positions, obstacles),
            residual: balance.residual,
            torque: balance.torque,
            penetration,
            steps: self.steps,
            iterations: self.iterations,
        })
    }

    fn newton(
        &mut self,
        elastic: &Elastic,
        positions: &mut Vec<f64>,
        obstacles: &[Obstacle],
        (longest_step, rest_force): (f64, f64),
        (target, held): (f64, Held),
    ) -> Result<f64, EquilibriumError> {
        let skin = &elastic.lattice.skin;
        let mut trial = positions.clone();
        let mut residual = f64::INFINITY;
        let mut convex = false;
        self.contacts.face_cracks(skin, positions);
        self.contacts.follow(positions);
        self.contacts.collect(skin, skin.len(), positions, obstacles, 2.0 * longest_step);
        self.evaluate(elastic, positions, obstacles);
        for _ in 0..NEWTON_STEPS {
            let scale = self.contacts.force_scale(skin, positions, obstacles, rest_force);
            hold(elastic, positions, held, &mut self.gradient);
            residual = norm(&self.gradient) / scale;
            if residual <= target {
                return Ok(residual);
            }
            self.steps += 1;
            let forcing = (0.3 * residual.sqrt()).clamp(1e-4, 0.1).max(0.3 * target / residual);
            let mut direction = self.direction(elastic, positions, obstacles, forcing, (convex, held));
            if direction.is_none() {
                convex = true;
                direction = self.direction(elastic, positions, obstacles, forcing, (true, held));
            }
            let Some(direction) = direction else { break };
            let longest = largest(&direction);
            let mut length = (longest_step / longest).min(1.0);
            let before: f64 = dot(&self.gradient, &direction);
            let mut accepted = false;
            for _ in 0..12 {
                for ((trial, position), step) in trial.iter_mut().zip(&*positions).zip(&direction) {
                    *trial = position + length * step;
                }
                self.contacts.collect(skin, skin.len(), &trial, obstacles, 2.0 * longest_step);
                let smallest = self.evaluate(elastic, &trial, obstacles);
                // Near enough to the minimum along the step, or still descending.
                if smallest > 1.0 + 1e-9 && dot(&self.gradient, &direction) <= -0.5 * before {
                    accepted = true;
                    break;
                }
                length *= 0.5;
            }
            if !accepted {
                break;
            }
            std::mem::swap(positions, &mut trial);
        }
        Err(EquilibriumError::Stalled { stretch: elastic.gel.free_stretch(), residual })
    }

    /// Lets the bead turn to where its lattice's own resistance to turning balances.
    /// Where none is found the bead stays as it was.
    fn turn(
        &mut self,
        elastic: &Elastic,
        positions: &mut Vec<f64>,
        obstacles: &[Obstacle],
        scales: (f64, f64),
        target: f64,
    ) {
        let before = positions.clone();
        let pairs = self.contacts.pairs.clone();
        if self.newton(elastic, positions, obstacles, scales, (target, Held::Nothing)).is_err() {
            *positions = before;
            self.contacts.pairs = pairs;
        }
    }

    /// How well a state is balanced, rotation held and not.
    fn balance(
        &mut self,
        elastic: &Elastic,
        positions: &[f64],
        obstacles: &[Obstacle],
        rest_force: f64,
    ) -> Balance {
        self.evaluate(elastic, positions, obstacles);
        let scale = self.contacts.force_scale(&elastic.lattice.skin, positions, obstacles, rest_force);
        let stride = positions.len() / 3;
        let at = |values: &[f64], node: usize| {
            Vector::new(values[node], values[stride + node], values[2 * stride + node])
        };
        let nodes = elastic.lattice.node_count();
        let centre = (0..nodes).map(|node| at(positions, node)).sum::<Vector>() / nodes as f64;
        let torque: Vector =
            (0..nodes).map(|node| (at(positions, node) - centre).cross(&at(&self.gradient, node))).sum();
        let radius = 0.5 * elastic.edge * elastic.lattice.across() as f64 * elastic.gel.free_stretch();
        if !self.contacts.is_gripped() {
            hold(elastic, positions, Held::Rotation, &mut self.gradient);
        }
        Balance { residual: norm(&self.gradient) / scale, torque: torque.norm() / (scale * radius) }
    }

    /// Net forces at a state, as the energy's gradient. Returns the smallest J.
    fn evaluate(&mut self, elastic: &Elastic, positions: &[f64], obstacles: &[Obstacle]) -> f64 {
        self.gradient.fill(0.0);
        let smallest = elastic.add_gradient(positions, &mut self.gradient);
        self.contacts.add_gradient(&elastic.lattice.skin, positions, obstacles, &mut self.gradient);
        smallest
    }

    /// The Newton direction by conjugate gradients, to `forcing` of the gradient.
    /// `None` where the stiffness is not positive and no progress was made.
    fn direction(
        &mut self,
        elastic: &Elastic,
        positions: &[f64],
        obstacles: &[Obstacle],
        forcing: f64,
        (convex, held): (bool, Held),
    ) -> Option<Vec<f64>> {
        let skin = &elastic.lattice.skin;
        elastic.linearise(positions, convex, &mut self.state);
        let pressing = self.contacts.linearise(skin, positions, obstacles, !convex);
        self.blocks.clear();
        self.blocks.resize(elastic.lattice.stride(), Matrix::zeros());
        elastic.add_diagonal_blocks(&self.state, &mut self.blocks);
        contact::add_diagonal_blocks(&pressing, skin, &mut self.blocks);
        for block in &mut self.blocks {
            *block = block.try_inverse().unwrap_or_else(Matrix::zeros);
        }
        let stiffness = Stiffness { elastic, state: &self.state, pressing: &pressing };
        let modes = RigidModes::new(elastic.lattice.node_count(), positions, held, |direction| {
            stiffness.times(direction)
        });
        let (direction, iterations) =
            conjugate_gradients(&stiffness, &self.blocks, &modes, &self.gradient, forcing);
        self.iterations += iterations;
        direction
    }
}

/// How well a state is balanced, over the largest contact force.
struct Balance {
    residual: f64,
    torque: f64,
}

/// Takes the forces along held motions out of a gradient.
fn hold(elastic: &Elastic, positions: &[f64], held: Held, gradient: &mut [f64]) {
    if held != Held::Nothing {
        let modes = RigidModes::held(elastic.lattice.node_count(), positions, held);
        modes.project(gradient);
    }
}

/// Elastic and contact stiffness at a state.
struct Stiffness<'a> {
    elastic: &'a Elastic<'a>,
    state: &'a Linearisation,
    pressing: &'a [Pressing],
}

impl Stiffness<'_> {
    fn times(&self, direction: &[f64]) -> Vec<f64> {
        let mut product = vec![0.0; direction.len()];
        self.times_into(direction, &mut product);
        product
    }

    fn times_into(&self, direction: &[f64], product: &mut [f64]) {
        product.fill(0.0);
        self.elastic.add_stiffness_times(self.state, direction, product);
        contact::add_stiffness_times(self.pressing, &self.elastic.lattice.skin, direction, product);
    }
}

/// Solves `stiffness · direction = -gradient`. The block diagonal and the rigid
/// motions precondition; rigid motions without stiffness are projected out.
fn conjugate_gradients(
    stiffness: &Stiffness,
    blocks: &[Matrix],
    modes: &RigidModes,
    gradient: &[f64],
    forcing: f64,
) -> (Option<Vec<f64>>, usize) {
    let mut residual: Vec<f64> = gradient.iter().map(|g| -g).collect();
    let escape = modes.project(&mut residual);
    let target = forcing * norm(&residual);
    let mut solution = vec![0.0; residual.len()];
    let mut preconditioned = vec![0.0; residual.len()];
    let mut product = vec![0.0; residual.len()];
    precondition(blocks, modes, &residual, &mut preconditioned);
    let mut search = preconditioned.clone();
    let mut energy = dot(&residual, &preconditioned);
    let mut iterations = 0;
    let limit = 2000;
    while norm(&residual) > target && iterations < limit {
        iterations += 1;
        stiffness.times_into(&search, &mut product);
        let curvature = dot(&search, &product);
        if curvature <= 0.0 {
            if iterations < 4 {
                return (None, iterations);
            }
            break;
        }
        let length = energy / curvature;
        for ((x, r), (s, p)) in solution.iter_mut().zip(&mut residual).zip(search.iter().zip(&product)) {
            *x += length * s;
            *r -= length * p;
        }
        modes.project(&mut residual);
        precondition(blocks, modes, &residual, &mut preconditioned);
        let next = dot(&residual, &preconditioned);
        let ratio = next / energy;
        energy = next;
        for (s, z) in search.iter_mut().zip(&preconditioned) {
            *s = z + ratio * *s;
        }
    }
    for (x, e) in solution.iter_mut().zip(&escape) {
        *x += e;
    }
    (Some(solution), iterations)
}

fn precondition(blocks: &[Matrix], modes: &RigidModes, residual: &[f64], out: &mut [f64]) {
    let nodes = blocks.len();
    for (node, block) in blocks.iter().enumerate() {
        let r = Vector::new(residual[node], residual[nodes + node], residual[2 * nodes + node]);
        let z = block * r;
        out[node] = z.x;
        out[nodes + node] = z.y;
        out[2 * nodes + node] = z.z;
    }
    modes.add_coarse(residual, out);
    modes.project(out);
}

/// G R² of the free-swollen bead (N).
pub(crate) fn rest_force(gel: &Gel, bead: &Bead) -> f64 {
    gel.moduli().shear * (gel.free_stretch() * bead.dry_radius()).powi(2)
}

/// The longest move of a node in one step (m): no point may jump through an obstacle.
pub(crate) fn longest_step(voxel: f64, obstacles: &[Obstacle]) -> f64 {
    obstacles.iter().fold(2.0 * voxel, |least, obstacle| match obstacle {
        Obstacle::Sphere { radius, .. } => least.min(0.25 * radius),
        Obstacle::Cavity { .. } | Obstacle::Tube { .. } | Obstacle::Plane { .. } => least,
    })
}

fn largest(vector: &[f64]) -> f64 {
    let nodes = vector.len() / 3;
    (0..nodes)
        .map(|node| (0..3).map(|axis| vector[axis * nodes + node].powi(2)).sum::<f64>())
        .fold(0.0, f64::max)
        .sqrt()
}

fn norm(vector: &[f64]) -> f64 {
    dot(vector, vector).sqrt()
}

/// Eight running sums, so that the compiler may use vector instructions.
pub(crate) fn dot(a: &[f64], b: &[f64]) -> f64 {
    let mut sums = [0.0; 8];
    let (chunks, rest) = (a.chunks_exact(8), a.chunks_exact(8).remainder());
    for (a, b) in chunks.zip(b.chunks_exact(8)) {
        for lane in 0..8 {
            sums[lane] += a[lane] * b[lane];
        }
    }
    let tail: f64 = rest.iter().zip(&b[a.len() - rest.len()..]).map(|(a, b)| a * b).sum();
    sums.iter().sum::<f64>() + tail
}
