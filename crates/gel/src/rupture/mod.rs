//! Beads that tear.
//!
//! A bead in equilibrium ruptures where the tension averaged over the gel's own length ℓ
//! exceeds its strength; the lattice splits (`lattice/split.rs`) and the bead comes to rest
//! again before the next rupture, until nothing is overloaded: an avalanche at one water
//! content. Cracks stay when the bead shrinks and swells again.
//!
//! Straight cracks grow alike along the lattice and at 45 degrees to it; how well they keep
//! other angles has not been measured.

mod average;
mod fragment;
mod grip;
mod snapshot;
mod strength;
mod toughness;
mod unit;

use crate::bead::Bead;
use crate::contact::Contacts;
use crate::equilibrium::{Equilibrium, EquilibriumError, Solver, Tolerance, rest_force};
use crate::lattice::Face;
use crate::obstacle::Obstacle;
use crate::stress::StressField;
use crate::thermodynamics::Gel;
use average::Field;
use bedswell_geometry::{Matrix, Vector};
pub use fragment::{Fragment, fragments};
pub(crate) use fragment::{drags, drags_on};
pub use grip::Grip;
use serde::{Deserialize, Serialize};
pub use snapshot::RuptureSnapshot;
use thiserror::Error;
pub use toughness::{Criterion, Toughness, ToughnessError};
pub(crate) use unit::Loaded;
use unit::loaded;

/// A bead that may tear, among fixed obstacles.
#[derive(Clone, Debug)]
pub struct Rupture {
    bead: Bead,
    criterion: Criterion,
    contacts: Contacts,
    grips: Vec<Grip>,
    events: Vec<Event>,
}

/// Bonds that ruptured together: a patch no wider than ℓ.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Event {
    /// Middle of the new crack surface, from the centre of the free-swollen bead (m).
    pub place: Vector,
    /// Where that lay in space just before (m).
    pub lay: Vector,
    /// How far it lies below the free-swollen bead's surface (m).
    pub depth: f64,
    /// Area of one side when free-swollen (m²).
    pub area: f64,
    /// Averaged tension over the strength there, before.
    pub ratio: f64,
    /// Newton steps to the equilibrium after it, shared with ruptures at the same time.
    pub newton_steps: usize,
}

/// Why a bead cannot be torn further.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum RuptureError {
    /// The toughness cannot be used.
    #[error(transparent)]
    Toughness(#[from] ToughnessError),
    /// No equilibrium was found.
    #[error("after {events} ruptures: {source}")]
    Equilibrium {
        /// Ruptures so far.
        events: usize,
        /// What stalled.
        source: EquilibriumError,
    },
    /// A grip or a snapshot is of another lattice.
    #[error("{what} {found} where the lattice has {count}")]
    OtherLattice {
        /// What does not fit.
        what: &'static str,
        /// What was found.
        found: usize,
        /// How many the lattice has.
        count: usize,
    },
}

/// Net nodal forces that may remain between ruptures, over what an area ℓ² of mean strength
/// bears: with more, cracks would stop where they have not.
const BETWEEN_RUPTURES: f64 = 0.01;
/// Ruptures at the same time lie further apart than this (ℓ).
const APART: f64 = 4.0;
/// Drag with which states that snap are followed, over the stiffness of chains along an
/// edge, and how often the gel may move on under it. Without any, Newton's method just goes
/// on from where it was given up.
pub(crate) const SNAP_DRAGS: [f64; 7] = [0.0, 0.0, 0.03, 0.1, 0.0, 0.3, 1.0];
pub(crate) const SNAP_STEPS: usize = 10;

impl Rupture {
    /// A bead whose gel has a toughness, measured when free-swollen as `swollen`.
    ///
    /// # Errors
    /// When the toughness is out of range or the lattice too coarse for its length.
    pub fn new(bead: Bead, toughness: &Toughness, swollen: &Gel) -> Result<Self, RuptureError> {
        let criterion = Criterion::new(toughness, swollen, &bead)?;
        Ok(Self { bead, criterion, contacts: Contacts::default(), grips: Vec::new(), events: Vec::new() })
    }

    /// The bead.
    pub fn bead(&self) -> &Bead {
        &self.bead
    }

    /// All ruptures so far.
    pub fn events(&self) -> &[Event] {
        &self.events
    }

    /// Area of one side of all cracks when free-swollen (m²).
    pub fn crack_area(&self) -> f64 {
        self.criterion.crack_area(&self.bead)
    }

    /// Cuts bonds, as with a blade.
    pub fn cut(&mut self, faces: &[Face]) {
        self.bead.split(faces);
    }

    /// Brings the bead to rest among obstacles, without ruptures.
    ///
    /// # Errors
    /// When no equilibrium is found.
    pub fn settle(
        &mut self,
        gel: &Gel,
        obstacles: &[Obstacle],
        tolerance: Tolerance,
    ) -> Result<Equilibrium, RuptureError> {
        let mut outcome = self.solve(gel, obstacles, tolerance, 0.0);
        // Gel that snaps from one state to another has none in between: drag on all of it
        // leads down to the next.
        for drag in SNAP_DRAGS {
            if outcome.is_ok() {
                break;
            }
            let loose = Tolerance {
                residual: self.between_ruptures(gel, obstacles),
                corrections: SNAP_STEPS,
                ..tolerance
            };
            let _ = self.solve(gel, obstacles, loose, drag);
            outcome = self.solve(gel, obstacles, tolerance, 0.0);
        }
        outcome.map_err(|source| RuptureError::Equilibrium { events: self.events.len(), source })
    }

    /// A state at rest, or as near as the solver came; with drag on all nodes that have no
    /// other (over the stiffness of chains along an edge).
    fn solve(
        &mut self,
        gel: &Gel,
        obstacles: &[Obstacle],
        tolerance: Tolerance,
        drag: f64,
    ) -> Result<Equilibrium, EquilibriumError> {
        let (lattice, chains) = (self.bead.lattice(), gel.dry_shear_modulus() * self.bead.voxel_edge());
        self.contacts.ties = grip::ties(&self.grips, chains);
        self.contacts.ties.extend(drags(lattice, chains));
        if drag > 0.0 {
            self.contacts.ties.extend(drags_on(0..lattice.node_count(), drag * chains));
        }
        let mut solver = Solver::with_contacts(&self.bead, self.contacts.clone());
        let outcome = solver.settle(&mut self.bead, gel, obstacles, tolerance);
        self.contacts = solver.contacts;
        outcome
    }

    /// Brings the bead to rest among obstacles and lets it tear until nothing is
    /// overloaded any more: an avalanche at one state of the water. Ruptures are added to
    /// `events`; returns the state at rest.
    ///
    /// # Errors
    /// When no equilibrium is found after a rupture.
    pub fn relax(
        &mut self,
        gel: &Gel,
        obstacles: &[Obstacle],
        tolerance: Tolerance,
    ) -> Result<Equilibrium, RuptureError> {
        self.settle(gel, obstacles, Tolerance { corrections: 0, ..tolerance })?;
        loop {
            while self.rupture_once(gel, obstacles, tolerance.held)? > 0 {}
            // Contacts that have been corrected may overload what was not.
            let equilibrium = self.settle(gel, obstacles, tolerance)?;
            if self.rupture_once(gel, obstacles, tolerance.held)? == 0 {
                return Ok(equilibrium);
            }
        }
    }

    /// Breaks what is most overloaded, and what else is far from it, and brings the bead to
    /// rest as closely as the next rupture needs; its place is `held` as by `Tolerance`.
    /// Returns how many units of bonds broke.
    ///
    /// # Errors
    /// When no equilibrium is found.
    pub fn rupture_once(
        &mut self,
        gel: &Gel,
        obstacles: &[Obstacle],
        held: bool,
    ) -> Result<usize, RuptureError> {
        let chosen = overloaded(&self.bead, &StressField::of(&self.bead, gel).stress, &self.criterion);
        if chosen.is_empty() {
            return Ok(0);
        }
        let first = self.events.len();
        self.events.extend(chosen.iter().map(|loaded| loaded.event(&self.bead, &self.criterion)));
        let faces: Vec<Face> = chosen.iter().flat_map(|loaded| loaded.faces()).copied().collect();
        self.cut(&faces);
        let tolerance = Tolerance { residual: self.between_ruptures(gel, obstacles), corrections: 0, held };
        let steps = self.settle(gel, obstacles, tolerance)?.steps;
        self.events[first..].iter_mut().for_each(|event| event.newton_steps = steps);
        Ok(chosen.len())
    }

    /// Largest averaged tension over strength anywhere; at 1 the bead ruptures. 0 where it
    /// is below `least`.
    pub fn load(&self, gel: &Gel, least: f64) -> f64 {
        let stress = StressField::of(&self.bead, gel).stress;
        let loaded = loaded_in(&self.bead, &stress, &self.criterion, least, 0.0);
        loaded.iter().map(|loaded| loaded.ratio).fold(0.0, f64::max)
    }

    /// Residual to which a state is solved between ruptures.
    fn between_ruptures(&self, gel: &Gel, obstacles: &[Obstacle]) -> f64 {
        let patch = self.criterion.tension * (self.criterion.length * self.criterion.stretch).powi(2);
        let (skin, rest) = (&self.bead.lattice().skin, rest_force(gel, &self.bead));
        BETWEEN_RUPTURES * patch / self.contacts.force_scale(skin, &self.bead.positions, obstacles, rest)
    }
}

/// What ruptures next, at once, in a bead with this stress (Pa); nothing where nothing is
/// overloaded.
pub(crate) fn overloaded(bead: &Bead, stress: &[Matrix], criterion: &Criterion) -> Vec<Loaded> {
    loaded_in(bead, stress, criterion, 1.0, APART)
}

/// Units that are loaded to at least `ratio`, further apart than `apart` (ℓ).
fn loaded_in(bead: &Bead, stress: &[Matrix], criterion: &Criterion, ratio: f64, apart: f64) -> Vec<Loaded> {
    let gradients = bead.gradients();
    let field = Field { lattice: bead.lattice(), stress, gradients: &gradients };
    let edge = bead.voxel_edge();
    loaded(&field, criterion, edge, ratio, apart * criterion.length / edge)
}
