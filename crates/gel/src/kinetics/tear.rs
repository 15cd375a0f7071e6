//! Ruptures in time: between steps, and too fast for water to move.

use super::history::Outside;
use super::increment::{Problem, Reference, State};
use super::stencil::cells;
use super::{Kinetics, KineticsError, Lag};
use crate::elastic::Elastic;
use crate::lattice::Face;
use crate::obstacle::Obstacle;
use crate::rupture::{self, Criterion, Event, Toughness, ToughnessError};
use crate::thermodynamics::Gel;

/// A time in which no water moves (s).
const INSTANT: f64 = 1e-30;

impl Kinetics {
    /// Lets the bead tear, with a toughness measured when free-swollen as `swollen`. After
    /// each step in time what is overloaded ruptures, until nothing is. Water no longer
    /// flows across a crack; the faces of one that reaches the skin are wetted.
    ///
    /// # Errors
    /// When the toughness is out of range or the lattice too coarse for its length.
    pub fn tearing(mut self, toughness: &Toughness, swollen: &Gel) -> Result<Self, ToughnessError> {
        self.criterion = Some(Criterion::new(toughness, swollen, &self.bead)?);
        Ok(self)
    }

    /// Whether anything is overloaded in the bead as it is.
    pub fn is_overloaded(&self, criterion: &Criterion) -> bool {
        !rupture::overloaded(&self.bead, &self.stress().stress, criterion).is_empty()
    }

    /// Ruptures what is most overloaded, and what else is far from it, with nothing moved yet:
    /// for beads that do not tear in their own steps. Let them come to rest (`relaxation`,
    /// `take_over`) and ask again, until nothing is. Returns how many units of bonds ruptured.
    ///
    /// # Errors
    /// Never for bonds of this lattice.
    pub fn rupture_once(&mut self, criterion: &Criterion) -> Result<usize, KineticsError> {
        let overloaded = rupture::overloaded(&self.bead, &self.stress().stress, criterion);
        self.ruptures.extend(overloaded.iter().map(|loaded| loaded.event(&self.bead, criterion)));
        self.split(&overloaded.iter().flat_map(|loaded| loaded.faces()).copied().collect::<Vec<_>>())?;
        if !overloaded.is_empty() {
            // What was going on before says little about how long the next step may be.
            self.next = 0.0;
        }
        Ok(overloaded.len())
    }

    /// All ruptures so far.
    pub fn ruptures(&self) -> &[Event] {
        &self.ruptures
    }

    /// Cuts bonds, as with a blade.
    ///
    /// # Errors
    /// When there is no such bond in the whole lattice.
    pub fn cut(&mut self, faces: &[Face]) -> Result<(), KineticsError> {
        self.next = 0.0;
        self.split(faces)
    }

    /// Ruptures what is overloaded until nothing is, with the water where it is. Returns how
    /// many units of bonds ruptured.
    pub(super) fn tear(&mut self, outside: &Outside, obstacles: &[Obstacle]) -> Result<usize, KineticsError> {
        let Some(criterion) = self.criterion.clone() else { return Ok(0) };
        let before = self.ruptures.len();
        loop {
            let first = self.ruptures.len();
            if self.rupture_once(&criterion)? == 0 {
                return Ok(first - before);
            }
            let steps = self.rebalance(outside, obstacles)?;
            self.ruptures[first..].iter_mut().for_each(|event| event.newton_steps = steps);
        }
    }

    /// Ruptures bonds, with nothing moved yet.
    pub(super) fn split(&mut self, faces: &[Face]) -> Result<(), KineticsError> {
        let before = self.bead.shared_lattice();
        if let Some(face) =
            faces.iter().find(|face| face.low as usize >= before.voxel_count() || face.axis > 2)
        {
            return Err(KineticsError::OtherLattice {
                found: face.low as usize,
                expected: before.voxel_count(),
            });
        }
        if faces.is_empty() {
            return Ok(());
        }
        self.bead.split(faces);
        let lattice = self.bead.shared_lattice();
        let state = &mut self.state;
        state.positions.clone_from(&self.bead.positions);
        state.velocities = vec![0.0; state.positions.len()];
        state.water = lattice.carry_slots(&before, &state.water, 1.0);
        state.slopes = lattice.carry_slots(&before, &state.slopes, 0.0);
        let chains = self.gel().dry_shear_modulus() * self.bead.voxel_edge();
        self.state.contacts.ties = rupture::drags(&lattice, chains);
        self.coarse.follow(&lattice);
        // What acted on the nodes as they were acts on none of the new ones.
        (self.loads, self.props, self.lag) = (Vec::new(), Vec::new(), Lag::default());
        self.cells = cells(&lattice, |point| self.sealed.binary_search(&(point as u32)).is_err());
        Ok(())
    }

    /// Brings the solid to equilibrium where no water moves. Returns the Newton steps taken.
    fn rebalance(&mut self, outside: &Outside, obstacles: &[Obstacle]) -> Result<usize, KineticsError> {
        let (gel, lattice) = (Gel::new(self.numbers, outside.surroundings), self.bead.shared_lattice());
        let mut scratch = std::mem::take(&mut self.scratch);
        let elastic = Elastic { lattice: &lattice, gel: &gel, edge: self.bead.voxel_edge() };
        let problem = Problem { supply: None, retardation: 0.0, ..self.problem(elastic, outside, obstacles) };
        let chains = gel.dry_shear_modulus() * self.bead.voxel_edge();
        let mut steps = 0;
        let mut solve = |state: &mut State| {
            let reference = Reference { positions: state.positions.clone(), water: state.water.clone() };
            state.velocities.fill(0.0);
            let solved = problem.solve(state, &reference, INSTANT, &mut scratch);
            state.water = reference.water;
            state.velocities.fill(0.0);
            steps += solved.map_or(0, |solved| solved.steps);
            solved.is_some()
        };
        let mut state = self.state.clone();
        let mut found = solve(&mut state);
        // Gel that snaps is led down by drag on all of it, as at rest.
        for drag in rupture::SNAP_DRAGS {
            if found {
                break;
            }
            state.clone_from(&self.state);
            let own = state.contacts.ties.clone();
            state.contacts.ties.extend(rupture::drags_on(0..lattice.node_count(), drag * chains));
            if (0..rupture::SNAP_STEPS).all(|_| solve(&mut state)) {
                state.contacts.ties = own;
                found = solve(&mut state);
            }
        }
        self.scratch = scratch;
        if !found {
            return Err(KineticsError::Torn { time: self.time, ruptures: self.ruptures.len() });
        }
        self.bead.positions.copy_from_slice(&state.positions);
        self.state = state;
        Ok(steps)
    }
}
