//! Water on its way through a bead.
//!
//! Water flows down its potential by Darcy's law in the network's frame (`conductance.rs`),
//! and the solid is in equilibrium at every instant. An implicit increment of time minimises
//! energy and dissipation together (`increment.rs`): the chains' energy N over the nodes'
//! places x, the mixing energy φ over the water w of every voxel, and what the flow costs,
//!
//! `N(x) + c Σ V φ(w) + ½ c (w - w₀) V (τ L)⁻¹ V (w - w₀)`, with J(x) = w,
//!
//! so that water is conserved to rounding and no step is too long to be stable. The
//! pressures that hold J(x) = w stay unknowns of their own, and so do the potentials
//! (`saddle.rs`): dry, nearly incompressible gel and short, undrained steps cost no more than
//! swollen gel. Steps (`stages.rs`) are two such increments.

mod anchor;
mod coarse;
mod conductance;
mod history;
mod increment;
mod joint;
mod minres;
mod permeability;
mod prop;
mod saddle;
mod settings;
mod snapshot;
mod stages;
mod stencil;
mod step;
mod tear;

use crate::bead::Bead;
use crate::contact::{Pair, skin_position};
use crate::elastic::{self, Elastic};
use crate::equilibrium::PENALTY;
use crate::lattice::Shape;
use crate::obstacle::Obstacle;
use crate::rigid::Held;
use crate::rupture::{Criterion, Event};
use crate::stress::StressField;
use crate::thermodynamics::{Gel, GelNumbers};
use anchor::Anchor;
use coarse::Coarse;
pub use history::{Change, History, HistoryError, Outside};
use increment::{Problem, Scratch, State, weighed_mean};
pub use permeability::{Permeability, PermeabilityError};
pub use prop::Prop;
pub use settings::Settings;
pub use snapshot::Snapshot;
use stencil::{Cell, cells};
pub use step::{KineticsError, Step};

/// What chains that lag behind are held by: where the nodes were (m) when the last stage
/// of a step began, and how long ago (s) that is.
#[derive(Clone, Debug, Default)]
struct Lag {
    start: Vec<f64>,
    seconds: f64,
}

/// Time by which chains lag behind, at most, over the time since the outside changed.
const LAGGING: f64 = 0.5;

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
    /// When (s) the outside last changed, and by how long (s) the chains lagged behind in the
    /// last step.
    changed: f64,
    retardation: f64,
    /// Forces on the nodes that stay (N), as the gradient of an energy, if there are any.
    loads: Vec<f64>,
    /// Skin points that press on other beads.
    props: Vec<Prop>,
    lag: Lag,
    /// Skin points that contact seals, and the cells without them.
    sealed: Vec<u32>,
    cells: Vec<Cell>,
    coarse: Coarse,
    scratch: Scratch,
    criterion: Option<Criterion>,
    ruptures: Vec<Event>,
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
            changed: 0.0,
            retardation: 0.0,
            loads: Vec::new(),
            props: Vec::new(),
            lag: Lag::default(),
            sealed: Vec::new(),
            scratch: Scratch::default(),
            criterion: None,
            ruptures: Vec::new(),
        })
    }

    /// Goes on from a snapshot of a bead with the same lattice, size, gel and settings.
    ///
    /// # Errors
    /// When the snapshot is of another lattice.
    pub fn resume(mut self, snapshot: &Snapshot) -> Result<Self, KineticsError> {
        self.split(&snapshot.ruptured)?;
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
        let pair = |&(point, obstacle, multiplier): &(u32, u32, f64)| Pair::new(point, obstacle, multiplier);
        state.contacts.pairs = snapshot.pressures.iter().map(pair).collect();
        state.contacts.area = snapshot.point_area;
        self.bead.positions.copy_from_slice(&snapshot.positions);
        (self.time, self.came_in, self.next) = (snapshot.time, snapshot.came_in, snapshot.next);
        self.outside = snapshot.outside;
        (self.changed, self.retardation) = (snapshot.changed, snapshot.retardation);
        self.state.contacts.set_crack_pressures(&snapshot.closed);
        self.ruptures.clone_from(&snapshot.ruptures);
        self.loads.clone_from(&snapshot.loads);
        self.props.clone_from(&snapshot.props);
        self.lag = Lag::default();
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
            ruptured: self.bead.lattice().ruptured().collect(),
            closed: self.state.contacts.crack_pressures(),
            ruptures: self.ruptures.clone(),
            loads: self.loads.clone(),
            props: self.props.clone(),
            came_in: self.came_in,
            next: self.next,
            outside: self.outside,
            changed: self.changed,
            retardation: self.retardation,
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

    /// What was outside in the last step, if there was one.
    pub fn last_outside(&self) -> Option<Outside> {
        self.outside
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
        let lag = self.retardation;
        StressField::with(&self.bead, &self.gel(), |voxel, f| {
            (f + rates[voxel] * lag, self.state.slopes[lattice.slots[voxel] as usize])
        })
    }

    /// Time by which the chains lag behind in the next step (s).
    fn next_retardation(&self) -> f64 {
        let whole = self.permeability.bead_time(self.bead.dry_radius());
        let Settings { retardation, most_retardation, .. } = self.settings;
        if !self.ruptures.is_empty() {
            return retardation * whole;
        }
        (LAGGING * (self.time - self.changed)).min(most_retardation * whole).max(retardation * whole)
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
    ///
    /// # Panics
    /// When `until` is not after the present.
    #[track_caller]
    pub fn step(
        &mut self,
        outside: &Outside,
        obstacles: &[Obstacle],
        until: f64,
    ) -> Result<Step, KineticsError> {
        assert!(until > self.time, "a step from {} s until {until} s", self.time);
        self.wish(outside, obstacles);
        self.retardation = self.next_retardation();
        let gel = Gel::new(self.numbers, outside.surroundings);
        let lattice = self.bead.shared_lattice();
        let elastic = Elastic { lattice: &lattice, gel: &gel, edge: self.bead.voxel_edge() };
        let mut scratch = std::mem::take(&mut self.scratch);
        let left = until - self.time;
        let problem = self.problem(elastic, outside, obstacles);
        let outcome = problem.adapted_step(&self.state, self.next, left, &self.settings, &mut scratch);
        self.scratch = scratch;
        let stages = outcome.map_err(|duration| KineticsError::Stalled { time: self.time, duration })?;
        let last = stages.duration >= left;
        self.time = if last { until } else { self.time + stages.duration };
        // A step cut short by the end says little about how long the next may be.
        let cut = last && stages.duration < self.next;
        self.next = if cut { stages.next.max(self.next) } else { stages.next };
        self.came_in += stages.came_in * self.bead.voxel_edge().powi(3);
        self.outside = Some(*outside);
        self.bead.positions.copy_from_slice(&stages.state.positions);
        self.state = stages.state;
        self.lag = Lag { start: stages.start, seconds: stages.share };
        let ruptures = self.tear(outside, obstacles)?;
        let skin = &self.bead.lattice().skin;
        Ok(Step {
            time: self.time,
            duration: stages.duration,
            water: self.water(),
            came_in: self.came_in,
            forces: self.state.contacts.forces(skin, &self.state.positions, obstacles),
            penetration: self.penetration(obstacles),
            residual: stages.solved.residual,
            error: stages.error,
            newton_steps: stages.solved.steps,
            iterations: stages.solved.iterations,
            ruptures,
        })
    }

    /// Length (s) that the next step will have if nothing hinders it; called for by
    /// [`step`](Self::step) itself.
    pub fn wish(&mut self, outside: &Outside, obstacles: &[Obstacle]) -> f64 {
        let gel = Gel::new(self.numbers, outside.surroundings);
        let lattice = self.bead.shared_lattice();
        let elastic = Elastic { lattice: &lattice, gel: &gel, edge: self.bead.voxel_edge() };
        self.prepare_contacts(&elastic, obstacles);
        if self.outside != Some(*outside) || self.next == 0.0 {
            self.state.velocities.fill(0.0);
            let mut scratch = std::mem::take(&mut self.scratch);
            let whole = self.permeability.bead_time(self.bead.dry_radius());
            let pace = self.problem(elastic, outside, obstacles).pace(&self.state, &mut scratch);
            self.scratch = scratch;
            self.next = (self.settings.step_error * pace).min(whole);
            if self.outside != Some(*outside) {
                self.changed = self.time;
            }
            self.outside = Some(*outside);
        }
        self.next
    }

    /// What does not change over a step.
    fn problem<'a>(
        &'a self,
        elastic: Elastic<'a>,
        outside: &Outside,
        obstacles: &'a [Obstacle],
    ) -> Problem<'a> {
        let voxel = self.bead.voxel_edge().powi(3);
        Problem {
            elastic,
            obstacles,
            cells: &self.cells,
            coarse: &self.coarse,
            permeability: &self.permeability,
            supply: outside.supply.map(|supply| supply / voxel),
            held: self.held(obstacles),
            loads: &self.loads,
            props: &self.props,
            anchor: self.settings.anchored.then(|| self.anchor(elastic)),
            tolerance: self.settings.residual,
            retardation: self.retardation,
        }
    }

    /// The spring that holds a bead's centre near where it is: about as stiff as a contact
    /// that is well pressed.
    fn anchor(&self, elastic: Elastic) -> Anchor {
        let stretch = weighed_mean(&elastic.lattice.volume, &self.state.water).cbrt();
        let diameter = 2.0 * stretch * self.bead.dry_radius();
        Anchor {
            centre: self.bead.centre(),
            stiffness: elastic.gel.dry_shear_modulus() / stretch * diameter,
            nodes: elastic.lattice.node_count(),
        }
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
        let on_skin = |&point: &u32| (point as usize) < skin.len();
        let mut sealed: Vec<u32> = pressing.iter().map(|pressing| pressing.point).filter(on_skin).collect();
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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Lattice, Surroundings};
    use bedswell_geometry::Vector;
    use std::sync::Arc;

    #[test]
    fn chains_lag_the_longer_behind_the_longer_nothing_has_changed_outside() {
        let numbers = GelNumbers { crosslinks: 2.7e-5, chi: 0.3, charges: 0.0 };
        let gel = Gel::new(numbers, Surroundings::default());
        let bead = Bead::new(Arc::new(Lattice::new(8)), 2e-4, Vector::zeros(), 3.0);
        let permeability = Permeability::new(&gel, 1e-10, 1.5).unwrap();
        let (settings, whole) = (Settings::default(), permeability.bead_time(bead.dry_radius()));
        let mut kinetics = Kinetics::new(bead, numbers, permeability, settings).unwrap();
        let under = |potential: f64| Outside {
            surroundings: Surroundings { potential, ..Surroundings::default() },
            supply: None,
        };
        let dried = 0.1 * whole;
        let changes =
            [(0.0, 0.0), (dried, -5e3)].map(|(time, potential)| Change { time, outside: under(potential) });
        let history = History::new(changes.to_vec()).unwrap();
        let mut lags = Vec::new();
        kinetics
            .advance(&history, &[], 2.0 * dried, |bead, step| {
                lags.push((step.time - step.duration, bead.retardation / whole));
            })
            .unwrap();
        let (least, most) = (settings.retardation, settings.most_retardation);
        for changed in [0.0, dried] {
            let after = |(start, _): &&(f64, f64)| (*start < dried) == (changed < dried);
            let lags: Vec<(f64, f64)> = lags.iter().filter(after).copied().collect();
            approx::assert_relative_eq!(lags[0].1, least, max_relative = 1e-12);
            approx::assert_relative_eq!(lags.last().unwrap().1, most, max_relative = 1e-12);
            assert!(lags.iter().any(|(_, lag)| *lag > 1.1 * least && *lag < 0.9 * most), "{lags:?}");
            for (start, lag) in lags {
                let risen = (LAGGING * (start - changed) / whole).clamp(least, most);
                approx::assert_relative_eq!(lag, risen, max_relative = 1e-9);
            }
        }
    }
}
