//! Water on its way through a bead.
//!
//! Water flows down its potential (Darcy's law in the network's frame, `conductance.rs`) and
//! the solid is in equilibrium at every instant. Each implicit increment minimises energy
//! and dissipation together (`increment.rs`): given the water, the chains' pressures hold
//! each voxel at its volume. Time advances by the two-stage, second-order, L-stable
//! diagonally implicit scheme of Alexander 1977, SIAM J. Numer. Anal. 14:1006 (from memory),
//! whose stages are such increments.

mod aperture;
mod coarse;
mod conductance;
mod history;
mod increment;
mod minres;
mod permeability;
mod saddle;
mod snapshot;
mod stencil;

use crate::bead::Bead;
use crate::contact::{Pair, skin_position};
use crate::elastic::{self, Elastic};
use crate::equilibrium::PENALTY;
use crate::lattice::Shape;
use crate::obstacle::Obstacle;
use crate::rigid::Held;
use crate::stress::StressField;
use crate::thermodynamics::{Gel, GelNumbers};
use bedswell_geometry::Vector;
use coarse::Coarse;
pub use history::{Change, History, HistoryError, Outside};
use increment::{Problem, Reference, Scratch, Solved, State, weighed_mean};
pub use permeability::{Permeability, PermeabilityError};
pub use snapshot::Snapshot;
use stencil::{Cell, cells};
use thiserror::Error;

/// γ = 1 - 1/√2, the share of a step that each stage takes.
const STAGE: f64 = 1.0 - std::f64::consts::FRAC_1_SQRT_2;
/// Bounds on how much longer or shorter the next step gets.
const CHANGE: std::ops::RangeInclusive<f64> = 0.2..=2.5;
/// Where Newton's method fails, the step is tried again at this share of its length.
const RETRY: f64 = 0.25;
const TRIES: usize = 25;

/// A bead in time.
#[derive(Clone, Debug)]
pub struct Kinetics {
    bead: Bead,
    numbers: GelNumbers,
    permeability: Permeability,
    settings: Settings,
    state: State,
    time: f64,
    came_in: f64,
    next: f64,
    outside: Option<Outside>,
    /// Skin points that contact seals, and the cells without them.
    sealed: Vec<u32>,
    cells: Vec<Cell>,
    coarse: Coarse,
    scratch: Scratch,
}

/// How closely time is followed, and what contact does to the skin.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Settings {
    /// Error of the voxels' volumes that one step may make, over themselves (root of the
    /// mean square).
    pub step_error: f64,
    /// Correction that Newton's method may leave, over the bead's own stretch.
    pub residual: f64,
    /// Times per step that contact pressures are corrected for the penetration they took.
    pub corrections: usize,
    /// Time by which the chains lag behind their force (s).
    pub retardation: f64,
    /// Pressed skin passes no water.
    pub contact_seals: bool,
    /// The bead's centre and orientation are held, for obstacles that would let it slip out
    /// sideways.
    pub held: bool,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            step_error: 1e-2,
            residual: 1e-5,
            corrections: 1,
            retardation: 3e-4,
            contact_seals: true,
            held: false,
        }
    }
}

/// What a step did.
#[derive(Clone, Debug, PartialEq)]
pub struct Step {
    /// Time at its end (s).
    pub time: f64,
    /// Its length (s).
    pub duration: f64,
    /// Water in the bead at its end (m³).
    pub water: f64,
    /// Water that has come in through the skin since the start (m³).
    pub came_in: f64,
    /// The bead's force on each obstacle (N).
    pub forces: Vec<Vector>,
    /// Deepest penetration of a skin point (m).
    pub penetration: f64,
    /// Correction that Newton's method left, over the bead's own stretch.
    pub residual: f64,
    /// Error of the voxels' volumes that the step made, over themselves.
    pub error: f64,
    /// Newton steps taken, with those of tries that failed.
    pub newton_steps: usize,
    /// Iterations of linear solves taken.
    pub iterations: usize,
}

/// Why a bead cannot go on in time.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum KineticsError {
    /// A voxel holds no water.
    #[error("voxel {voxel} holds no water (volume ratio {ratio}); start from a stretch above 1, as 1.05")]
    Dry {
        /// The voxel.
        voxel: usize,
        /// Its volume ratio to dry.
        ratio: f64,
    },
    /// A snapshot of another lattice.
    #[error("the snapshot has {found} values per field where this lattice has {expected}")]
    OtherLattice {
        /// Values found.
        found: usize,
        /// Values expected.
        expected: usize,
    },
    /// No step is short enough.
    #[error(
        "no state follows {time} s, not even after {duration:.1e} s; look for obstacles deep in the bead"
    )]
    Stalled {
        /// Where time stopped (s).
        time: f64,
        /// The shortest step that was tried (s).
        duration: f64,
    },
}

impl Kinetics {
    /// The bead as it is, at time 0. The water's pressure is guessed from the chains alone
    /// and found in the first step.
    ///
    /// # Errors
    /// When a voxel holds no water.
    pub fn new(
        bead: Bead,
        numbers: GelNumbers,
        permeability: Permeability,
        settings: Settings,
    ) -> Result<Self, KineticsError> {
        let lattice = bead.shared_lattice();
        let mut state = State {
            positions: bead.positions.clone(),
            velocities: vec![0.0; bead.positions.len()],
            water: vec![1.0; lattice.volume.len()],
            slopes: vec![0.0; lattice.volume.len()],
            ..State::default()
        };
        for (voxel, f) in bead.gradients().iter().enumerate() {
            let ratio = f.determinant();
            if ratio.is_nan() || ratio <= 1.0 {
                return Err(KineticsError::Dry { voxel, ratio });
            }
            let slot = lattice.slots[voxel] as usize;
            state.water[slot] = ratio;
            state.slopes[slot] = -numbers.crosslinks * f.norm_squared() / (3.0 * ratio);
        }
        Ok(Self {
            cells: cells(&lattice, |_| true),
            coarse: Coarse::new(&lattice),
            bead,
            numbers,
            permeability,
            settings,
            state,
            time: 0.0,
            came_in: 0.0,
            next: 0.0,
            outside: None,
            sealed: Vec::new(),
            scratch: Scratch::default(),
        })
    }

    /// Goes on from a snapshot of a bead with the same lattice, size, gel and settings.
    ///
    /// # Errors
    /// When the snapshot is of another lattice.
    pub fn resume(mut self, snapshot: &Snapshot) -> Result<Self, KineticsError> {
        let state = &mut self.state;
        for (field, own) in [
            (&snapshot.positions, &mut state.positions),
            (&snapshot.velocities, &mut state.velocities),
            (&snapshot.water, &mut state.water),
            (&snapshot.slopes, &mut state.slopes),
        ] {
            if field.len() != own.len() {
                return Err(KineticsError::OtherLattice { found: field.len(), expected: own.len() });
            }
            own.copy_from_slice(field);
        }
        let pair = |&(point, obstacle, multiplier): &(u32, u32, f64)| Pair { point, obstacle, multiplier };
        state.contacts.pairs = snapshot.pressures.iter().map(pair).collect();
        state.contacts.area = snapshot.point_area;
        self.bead.positions.copy_from_slice(&snapshot.positions);
        (self.time, self.came_in, self.next) = (snapshot.time, snapshot.came_in, snapshot.next);
        self.outside = snapshot.outside;
        Ok(self)
    }

    /// All that is needed to go on from here.
    pub fn snapshot(&self) -> Snapshot {
        let pressing = self.state.contacts.pairs.iter().filter(|pair| pair.multiplier > 0.0);
        Snapshot {
            time: self.time,
            positions: self.state.positions.clone(),
            velocities: self.state.velocities.clone(),
            water: self.state.water.clone(),
            slopes: self.state.slopes.clone(),
            pressures: pressing.map(|pair| (pair.point, pair.obstacle, pair.multiplier)).collect(),
            point_area: self.state.contacts.area,
            came_in: self.came_in,
            next: self.next,
            outside: self.outside,
        }
    }

    /// The bead.
    pub fn bead(&self) -> &Bead {
        &self.bead
    }

    /// Time (s).
    pub fn time(&self) -> f64 {
        self.time
    }

    /// Water in the bead (m³).
    pub fn water(&self) -> f64 {
        let mean = weighed_mean(&self.bead.lattice().volume, &self.state.water);
        (mean - 1.0) * self.bead.dry_volume()
    }

    /// The gel outside which is what the last step found there.
    pub fn gel(&self) -> Gel {
        Gel::new(self.numbers, self.outside.unwrap_or_default().surroundings)
    }

    /// Potential of each voxel's water against that outside (Pa): below 0 where more will
    /// come.
    pub fn potentials(&self) -> Vec<f64> {
        let gel = self.gel();
        let slots = self.bead.lattice().slots.iter().map(|&slot| slot as usize);
        let potential = |slot: usize| gel.mixing_slope(self.state.water[slot]) - self.state.slopes[slot];
        slots.map(|slot| potential(slot) * gel.energy_density()).collect()
    }

    /// The stress in the bead, with that of chains which lag behind.
    pub fn stress(&self) -> StressField {
        let lattice = self.bead.lattice();
        let rates = elastic::gradients(lattice, self.bead.voxel_edge(), &self.state.velocities);
        let lag = self.retardation();
        StressField::with(&self.bead, &self.gel(), |voxel, f| {
            (f + rates[voxel] * lag, self.state.slopes[lattice.slots[voxel] as usize])
        })
    }

    /// Time by which the chains lag behind (s).
    fn retardation(&self) -> f64 {
        self.settings.retardation * self.permeability.bead_time(self.bead.dry_radius())
    }

    /// Follows a history to `until` (s) among obstacles that stay where they are; `visit`
    /// sees every step.
    ///
    /// # Errors
    /// When no step is short enough.
    pub fn advance(
        &mut self,
        history: &History,
        obstacles: &[Obstacle],
        until: f64,
        mut visit: impl FnMut(&Self, &Step),
    ) -> Result<(), KineticsError> {
        while self.time < until {
            let change = history.next_change(self.time).unwrap_or(f64::INFINITY);
            let step = self.step(&history.at(self.time), obstacles, change.min(until))?;
            visit(self, &step);
        }
        Ok(())
    }

    /// One step, as long as its error allows and not beyond `until` (s). Obstacles may have
    /// moved since the last.
    ///
    /// # Errors
    /// When no step is short enough.
    pub fn step(
        &mut self,
        outside: &Outside,
        obstacles: &[Obstacle],
        until: f64,
    ) -> Result<Step, KineticsError> {
        let gel = Gel::new(self.numbers, outside.surroundings);
        let lattice = self.bead.shared_lattice();
        let elastic = Elastic { lattice: &lattice, gel: &gel, edge: self.bead.voxel_edge() };
        self.prepare_contacts(&elastic, obstacles);
        let mut scratch = std::mem::take(&mut self.scratch);
        let voxel = self.bead.voxel_edge().powi(3);
        let problem = Problem {
            elastic,
            obstacles,
            cells: &self.cells,
            coarse: &self.coarse,
            permeability: &self.permeability,
            supply: outside.supply.map(|supply| supply / voxel),
            held: self.held(obstacles),
            tolerance: self.settings.residual,
            retardation: self.retardation(),
        };
        let left = until - self.time;
        if self.outside != Some(*outside) || self.next == 0.0 {
            self.state.velocities.fill(0.0);
            self.next = self.settings.step_error * problem.pace(&self.state, &mut scratch);
        }
        let mut duration = self.next;
        let mut effort = Solved::default();
        let mut outcome = Err(KineticsError::Stalled { time: self.time, duration });
        for _ in 0..TRIES {
            // The last step takes all that is left; none leaves less than itself.
            let last = duration >= left;
            duration = if last { left } else { duration.min(0.5 * left) };
            let tried = problem.two_stages(&self.state, duration, self.settings.corrections, &mut scratch);
            let Some(stages) = tried else {
                duration *= RETRY;
                outcome = Err(KineticsError::Stalled { time: self.time, duration });
                continue;
            };
            effort.steps += stages.solved.steps;
            effort.iterations += stages.solved.iterations;
            let ratio = 0.9 * (self.settings.step_error / stages.error.max(f64::MIN_POSITIVE)).sqrt();
            let next = duration * ratio.clamp(*CHANGE.start(), *CHANGE.end());
            if stages.error > self.settings.step_error {
                duration = next;
                continue;
            }
            self.came_in += stages.came_in * voxel;
            self.time = if last { until } else { self.time + duration };
            self.next = next.max(if last { self.next } else { 0.0 });
            self.outside = Some(*outside);
            self.bead.positions.copy_from_slice(&stages.state.positions);
            self.state = stages.state;
            outcome = Ok(Step {
                time: self.time,
                duration,
                water: 0.0,
                came_in: self.came_in,
                forces: self.state.contacts.forces(&lattice.skin, &self.state.positions, obstacles),
                penetration: 0.0,
                residual: stages.solved.residual,
                error: stages.error,
                newton_steps: effort.steps,
                iterations: effort.iterations,
            });
            break;
        }
        self.scratch = scratch;
        outcome.map(|step| Step { water: self.water(), penetration: self.penetration(obstacles), ..step })
    }

    /// What must not move: all where nothing touches, the orientation of a ball, which
    /// frictionless obstacles do not tell, and nothing of a block.
    fn held(&self, obstacles: &[Obstacle]) -> Held {
        match self.bead.lattice().shape() {
            _ if self.settings.held || obstacles.is_empty() => Held::Everything,
            Shape::Ball(_) => Held::Rotation,
            Shape::Block(_) => Held::Nothing,
        }
    }

    /// Fits contact stiffness and the sealed skin to the state.
    fn prepare_contacts(&mut self, elastic: &Elastic, obstacles: &[Obstacle]) {
        let skin = &elastic.lattice.skin;
        let size = elastic.edge * weighed_mean(&elastic.lattice.volume, &self.state.water).cbrt();
        let contacts = &mut self.state.contacts;
        let area = skin.area * size * size;
        // Pressures outlive a change of their points' area as forces.
        let rescale = if contacts.area > 0.0 { contacts.area / area } else { 1.0 };
        contacts.pairs.iter_mut().for_each(|pair| pair.multiplier *= rescale);
        contacts.area = area;
        contacts.penalty = PENALTY * elastic.gel.moduli().plane_strain() / size;
        if !self.settings.contact_seals {
            return;
        }
        contacts.collect(skin, skin.len(), &self.state.positions, obstacles, 0.0);
        let pressing = contacts.linearise(skin, &self.state.positions, obstacles, false);
        let mut sealed: Vec<u32> = pressing.iter().map(|pressing| pressing.point).collect();
        sealed.dedup();
        if sealed != self.sealed {
            self.cells = cells(elastic.lattice, |point| sealed.binary_search(&(point as u32)).is_err());
            self.sealed = sealed;
        }
    }

    fn penetration(&self, obstacles: &[Obstacle]) -> f64 {
        let skin = &self.bead.lattice().skin;
        let depth = |pair: &Pair| {
            let place = skin_position(skin, &self.state.positions, pair.point as usize);
            -obstacles[pair.obstacle as usize].gap(&place).distance
        };
        self.state.contacts.pairs.iter().map(depth).fold(0.0, f64::max)
    }
}

/// A step's outcome.
struct Stages {
    state: State,
    /// Water that came in (voxel volumes).
    came_in: f64,
    error: f64,
    solved: Solved,
}

impl Problem<'_> {
    /// Both stages of a step of `duration` (s). `None` where one is not found.
    fn two_stages(
        &self,
        from: &State,
        duration: f64,
        corrections: usize,
        scratch: &mut Scratch,
    ) -> Option<Stages> {
        let share = STAGE * duration;
        let mut state = from.clone();
        let start = Reference { positions: from.positions.clone(), water: from.water.clone() };
        let first = self.solve(&mut state, &start, share, scratch)?;
        let middle = state.water.clone();
        let ahead = |start: &[f64], middle: &[f64]| -> Vec<f64> {
            let further = (1.0 - STAGE) / STAGE;
            start.iter().zip(middle).map(|(start, middle)| start + further * (middle - start)).collect()
        };
        let reference = Reference {
            positions: ahead(&from.positions, &state.positions),
            water: ahead(&from.water, &middle),
        };
        let mut solved = self.solve(&mut state, &reference, share, scratch)?;
        for _ in 0..if self.obstacles.is_empty() { 0 } else { corrections } {
            let skin = &self.elastic.lattice.skin;
            state.contacts.update_multipliers(skin, &state.positions, self.obstacles);
            let again = self.solve(&mut state, &reference, share, scratch)?;
            solved = Solved {
                steps: solved.steps + again.steps,
                iterations: solved.iterations + again.iterations,
                ..again
            };
        }
        // The difference to the first-order step that goes on at the first stage's rate.
        let errors: Vec<f64> = (0..middle.len())
            .map(|slot| {
                let (first, second) =
                    (middle[slot] - from.water[slot], state.water[slot] - reference.water[slot]);
                ((second - first) / state.water[slot]).powi(2)
            })
            .collect();
        let came_in = duration * ((1.0 - STAGE) * first.intake + STAGE * solved.intake);
        solved.steps += first.steps;
        solved.iterations += first.iterations;
        Some(Stages {
            state,
            came_in,
            error: weighed_mean(&self.elastic.lattice.volume, &errors).sqrt(),
            solved,
        })
    }
}
