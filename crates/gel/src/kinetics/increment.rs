//! One implicit increment of time: where water and solid are at its end.

use super::anchor::Anchor;
use super::coarse::Coarse;
use super::conductance::Conductance;
use super::minres;
use super::permeability::Permeability;
use super::prop::Prop;
use super::saddle::{Guess, Saddle};
use super::stencil::Cell;
use crate::contact::Contacts;
use crate::elastic::{Elastic, Linearisation};
use crate::equilibrium::longest_step;
use crate::obstacle::Obstacle;
use crate::rigid::{Held, RigidModes};

/// Newton steps before an increment is given up.
const NEWTON_STEPS: usize = 14;
/// Newton steps in which the conductance still follows the state. Later it stays, so that
/// steps converge fast: what it then misses is of higher order than the increment's error.
const FOLLOWING: usize = 2;
/// Share of a Newton step's right-hand side that its linear solve may leave.
const FORCING: f64 = 3e-2;
/// Iterations of a linear solve; one that needs more is of a state that is about to snap
/// through, where shorter increments help.
const ITERATIONS: usize = 600;
/// Newton steps that may fail to bring the state nearer.
const STRAYING: usize = 3;
/// Share of a step's right-hand side that the next must fall below to count as nearer.
const NEARER: f64 = 0.7;
/// Share of its water that a voxel keeps in one Newton step or guess at least.
const KEPT: f64 = 0.1;

/// What a bead is at one time.
#[derive(Clone, Debug, Default)]
pub(super) struct State {
    /// All x, all y, all z (m).
    pub(super) positions: Vec<f64>,
    /// How fast they move (m/s).
    pub(super) velocities: Vec<f64>,
    /// Volume ratio to dry that each voxel's water gives it, by slot.
    pub(super) water: Vec<f64>,
    /// What takes the place of φ' in the forces, by slot: φ' less the water's potential.
    pub(super) slopes: Vec<f64>,
    pub(super) contacts: Contacts,
}

/// Where an increment starts.
pub(super) struct Reference {
    pub(super) positions: Vec<f64>,
    pub(super) water: Vec<f64>,
}

/// What does not change over an increment.
pub(super) struct Problem<'a> {
    pub(super) elastic: Elastic<'a>,
    pub(super) obstacles: &'a [Obstacle],
    pub(super) cells: &'a [Cell],
    pub(super) coarse: &'a Coarse,
    pub(super) permeability: &'a Permeability,
    /// Most water that the skin takes in (voxel volumes per second).
    pub(super) supply: Option<f64>,
    pub(super) held: Held,
    /// Forces on the nodes that stay (N), as the gradient of an energy; empty where there
    /// are none.
    pub(super) loads: &'a [f64],
    /// Skin points that press on other beads.
    pub(super) props: &'a [Prop],
    pub(super) anchor: Option<Anchor>,
    /// Time by which the chains lag behind (s).
    pub(super) retardation: f64,
    /// Correction that remains, over the bead's own stretch.
    pub(super) tolerance: f64,
}

/// How an increment ended.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Solved {
    /// What the skin takes in (voxel volumes per second).
    pub(super) intake: f64,
    /// Correction that remains, over the bead's own stretch.
    pub(super) residual: f64,
    pub(super) steps: usize,
    pub(super) iterations: usize,
}

/// Memory that increments share.
#[derive(Clone, Debug, Default)]
pub(super) struct Scratch {
    state: Linearisation,
    conductance: Conductance,
    guess: Guess,
    potentials: Vec<f64>,
    ratios: Vec<f64>,
    compliance: Vec<f64>,
    right: Vec<f64>,
}

impl Problem<'_> {
    /// Units of L per second.
    pub(super) fn rate(&self) -> f64 {
        self.permeability.reference() * self.elastic.gel.energy_density() / self.elastic.edge.powi(2)
    }

    /// Most water that the skin takes in, in units of L.
    fn limit(&self) -> Option<f64> {
        self.supply.map(|supply| supply / self.rate())
    }

    /// Time (s) in which the gel's volume would change by as much as itself at the present
    /// rate (root of the voxels' mean square).
    pub(super) fn pace(&self, at: &State, scratch: &mut Scratch) -> f64 {
        let lattice = self.elastic.lattice;
        self.elastic.linearise_mixed(&at.positions, &at.slopes, &mut scratch.state);
        potentials_of(&self.elastic, at, &mut scratch.potentials);
        let parts = (self.cells, &lattice.slots[..]);
        scratch.conductance.renew(parts, &scratch.state, &at.water, self.permeability);
        scratch.conductance.limit(self.limit(), false, &scratch.potentials);
        let mut flows = vec![0.0; at.water.len()];
        scratch.conductance.outflow(self.cells, &lattice.slots, &scratch.potentials, &mut flows);
        for &slot in &lattice.slots {
            let slot = slot as usize;
            flows[slot] = (flows[slot] / (lattice.volume[slot] * at.water[slot])).powi(2);
        }
        1.0 / (self.rate() * weighed_mean(&lattice.volume, &flows).sqrt()).max(f64::MIN_POSITIVE)
    }

    /// Finds the state in which the solid is in equilibrium and water has flowed for
    /// `duration` (s) from the `reference` at the rates of that state, looked for from `at`
    /// on. Chains that lag behind add N(x - x₀) times their retardation over `duration`.
    /// `None` where Newton's method does not converge.
    pub(super) fn solve(
        &self,
        at: &mut State,
        reference: &Reference,
        duration: f64,
        scratch: &mut Scratch,
    ) -> Option<Solved> {
        let Self { elastic, obstacles, cells, .. } = self;
        let lattice = elastic.lattice;
        let (nodes, slots) = (at.positions.len(), at.water.len());
        let (seconds, stiffening) = (duration, 1.0 + self.retardation / duration);
        let duration = self.rate() * seconds;
        let stretch = (weighed_mean(&lattice.volume, &at.water)).cbrt();
        let longest = longest_step(stretch * elastic.edge, obstacles);
        at.contacts.face_cracks(&lattice.skin, &at.positions);
        at.contacts.follow(&reference.positions);
        self.guess(at, reference, seconds, &mut scratch.ratios);
        let size = elastic.voxel_energy() * elastic.gel.numbers().crosslinks * stretch * stretch;
        let target = self.tolerance * (size * lattice.volume.iter().sum::<f64>()).sqrt();
        potentials_of(elastic, at, &mut scratch.potentials);
        for column in [&mut scratch.ratios, &mut scratch.compliance] {
            column.clear();
            column.resize(slots, 0.0);
        }
        let mut limited = false;
        let (mut before, mut strayed) = (f64::INFINITY, 0);
        let mut solved = Solved::default();
        for step in 0..NEWTON_STEPS {
            let slopes: Vec<f64> = at.slopes.iter().map(|slope| slope / stiffening).collect();
            elastic.linearise_mixed(&at.positions, &slopes, &mut scratch.state);
            if step < FOLLOWING {
                let parts = (*cells, &lattice.slots[..]);
                scratch.conductance.renew(parts, &scratch.state, &at.water, self.permeability);
            }
            limited = scratch.conductance.limit(self.limit(), limited, &scratch.potentials);
            at.contacts.collect(&lattice.skin, lattice.skin.len(), &at.positions, obstacles, 2.0 * longest);
            let mut pressing = at.contacts.linearise(&lattice.skin, &at.positions, obstacles, true);
            pressing.extend(self.props.iter().map(Prop::pressing));
            self.right_hand_side(at, reference, (duration, stiffening), scratch);
            let modes = RigidModes::new(lattice.node_count(), &at.positions, self.held, |motion| {
                let mut product =
                    Saddle::stiffness_times(elastic, (&scratch.state, stiffening), &pressing, motion);
                self.anchor.iter().for_each(|anchor| anchor.add_stiffness_times(motion, &mut product));
                product
            });
            modes.project(&mut scratch.right[..nodes]);
            let flow = (&scratch.conductance, duration);
            scratch.guess.renew(elastic, &scratch.state, &pressing, flow, (&scratch.compliance, stiffening));
            let saddle = Saddle {
                elastic,
                state: &scratch.state,
                pressing: &pressing,
                cells,
                conductance: &scratch.conductance,
                duration,
                compliance: &scratch.compliance,
                stiffening,
                anchor: self.anchor,
                guess: &scratch.guess,
                coarse: self.coarse,
                modes: &modes,
            };
            let solution = minres::solve(&saddle, &scratch.right, FORCING, 0.3 * target, ITERATIONS);
            solved.residual = self.tolerance * solution.size / target;
            solved.iterations += solution.iterations;
            strayed += usize::from(solution.size.is_nan() || solution.size > NEARER * before);
            before = solution.size;
            if strayed > STRAYING || solution.iterations == ITERATIONS {
                return None;
            }
            if solution.size <= target && step >= FOLLOWING.min(1) {
                solved.intake = self.rate() * scratch.conductance.intake(&scratch.potentials);
                self.close(at, reference, seconds, scratch);
                return Some(solved);
            }
            solved.steps += 1;
            self.follow(&solution.vector, at, longest, scratch);
        }
        None
    }

    /// Moves the nodes on as fast as they were, where no voxel would lose much of its water.
    fn guess(&self, at: &mut State, reference: &Reference, seconds: f64, ratios: &mut Vec<f64>) {
        let ahead = reference.positions.iter().zip(&at.velocities).map(|(x, v)| x + seconds * v);
        let positions: Vec<f64> = ahead.collect();
        ratios.clear();
        ratios.resize(at.water.len(), 1.0);
        let mut forces = vec![0.0; positions.len()];
        self.elastic.add_mixed_gradient(&positions, &at.slopes, &mut forces, ratios);
        let keeps = |&slot: &u32| {
            let slot = slot as usize;
            ratios[slot] - 1.0 > KEPT * (at.water[slot] - 1.0)
        };
        if self.elastic.lattice.slots.iter().all(keeps) {
            at.positions = positions;
            self.elastic
                .lattice
                .slots
                .iter()
                .for_each(|&slot| at.water[slot as usize] = ratios[slot as usize]);
        }
    }

    /// Takes the water from the flows themselves, so that none is lost to what Newton's
    /// method leaves, and notes how fast the nodes moved.
    fn close(&self, at: &mut State, reference: &Reference, seconds: f64, scratch: &mut Scratch) {
        let lattice = self.elastic.lattice;
        scratch.conductance.outflow(self.cells, &lattice.slots, &scratch.potentials, &mut scratch.ratios);
        for &slot in &lattice.slots {
            let slot = slot as usize;
            let left = self.rate() * seconds * scratch.ratios[slot] / lattice.volume[slot];
            at.water[slot] = reference.water[slot] - left;
        }
        let ways = at.positions.iter().zip(&reference.positions);
        at.velocities = ways.map(|(x, from)| (x - from) / seconds).collect();
    }

    /// What each equation lacks; see `Saddle`.
    fn right_hand_side(
        &self,
        at: &State,
        reference: &Reference,
        (duration, stiffening): (f64, f64),
        scratch: &mut Scratch,
    ) {
        let Self { elastic, obstacles, cells, .. } = self;
        let lattice = elastic.lattice;
        let (nodes, slots) = (at.positions.len(), at.water.len());
        scratch.right.clear();
        scratch.right.resize(nodes + 2 * slots, 0.0);
        let (forces, rest) = scratch.right.split_at_mut(nodes);
        let (volumes, flows) = rest.split_at_mut(slots);
        elastic.add_mixed_gradient(&at.positions, &at.slopes, forces, &mut scratch.ratios);
        if stiffening > 1.0 {
            let way: Vec<f64> =
                at.positions.iter().zip(&reference.positions).map(|(x, from)| x - from).collect();
            let mut lag = vec![0.0; nodes];
            elastic.add_mixed_gradient(&way, &vec![0.0; slots], &mut lag, &mut vec![0.0; slots]);
            forces.iter_mut().zip(&lag).for_each(|(force, lag)| *force += (stiffening - 1.0) * lag);
        }
        at.contacts.add_gradient(&lattice.skin, &at.positions, obstacles, forces);
        self.anchor.iter().for_each(|anchor| anchor.add_gradient(&at.positions, forces));
        self.props.iter().for_each(|prop| prop.add_gradient(&lattice.skin, &at.positions, forces));
        forces.iter_mut().zip(self.loads).for_each(|(force, load)| *force += load);
        forces.iter_mut().for_each(|force| *force = -*force);
        scratch.conductance.outflow(cells, &lattice.slots, &scratch.potentials, flows);
        let unit = elastic.voxel_energy();
        let softest = 1e-2 * elastic.gel.numbers().crosslinks;
        for &slot in &lattice.slots {
            let slot = slot as usize;
            let (water, volume) = (at.water[slot], unit * lattice.volume[slot]);
            let curvature = elastic.gel.mixing_curvature(water).max(softest / water);
            scratch.compliance[slot] = volume / curvature;
            let lack = scratch.compliance[slot] * self.lack_of_potential(at, slot, &scratch.potentials);
            volumes[slot] = volume * (water - scratch.ratios[slot]) + lack;
            flows[slot] = volume * (water - reference.water[slot]) + unit * duration * flows[slot] + lack;
        }
    }

    /// Slope and potential over φ'.
    fn lack_of_potential(&self, at: &State, slot: usize, potentials: &[f64]) -> f64 {
        at.slopes[slot] + potentials[slot] - self.elastic.gel.mixing_slope(at.water[slot])
    }

    /// Takes a Newton step, shortened where nodes would go too far or voxels run dry.
    fn follow(&self, change: &[f64], at: &mut State, longest: f64, scratch: &mut Scratch) {
        let lattice = self.elastic.lattice;
        let unit = self.elastic.voxel_energy();
        let (motion, rest) = change.split_at(at.positions.len());
        let (slopes, potentials) = rest.split_at(at.water.len());
        let stride = lattice.stride();
        let way = |node: usize| (0..3).map(|axis| motion[axis * stride + node].powi(2)).sum::<f64>().sqrt();
        let furthest = (0..lattice.node_count()).map(way).fold(0.0, f64::max);
        let mut length = if furthest > longest { longest / furthest } else { 1.0 };
        // The column is needed no more: it takes the change of water.
        for &slot in &lattice.slots {
            let slot = slot as usize;
            let lack = self.lack_of_potential(at, slot, &scratch.potentials);
            let per_potential = scratch.compliance[slot] / (unit * lattice.volume[slot]);
            let water = per_potential * (slopes[slot] + potentials[slot] + lack);
            scratch.ratios[slot] = water;
            length = length.min((1.0 - KEPT) * (at.water[slot] - 1.0) / -water.min(-f64::MIN_POSITIVE));
        }
        at.positions.iter_mut().zip(motion).for_each(|(x, way)| *x += length * way);
        at.slopes.iter_mut().zip(slopes).for_each(|(slope, change)| *slope += length * change);
        at.water.iter_mut().zip(&scratch.ratios).for_each(|(water, change)| *water += length * change);
        scratch.potentials.iter_mut().zip(potentials).for_each(|(m, change)| *m += length * change);
    }
}

/// Writes the water's potential in every voxel against that outside, over kT/Ω.
pub(super) fn potentials_of(elastic: &Elastic, at: &State, potentials: &mut Vec<f64>) {
    potentials.clear();
    potentials.resize(at.water.len(), 0.0);
    for &slot in &elastic.lattice.slots {
        let slot = slot as usize;
        potentials[slot] = elastic.gel.mixing_slope(at.water[slot]) - at.slopes[slot];
    }
}

/// Mean of a column, weighed by another.
pub(super) fn weighed_mean(weights: &[f64], values: &[f64]) -> f64 {
    let sum: f64 = weights.iter().zip(values).map(|(weight, value)| weight * value).sum();
    sum / weights.iter().sum::<f64>()
}
