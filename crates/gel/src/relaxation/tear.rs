//! Ruptures of a bead on its way to rest.

use super::{Relaxation, Standing};
use crate::fold::Folds;
use crate::lattice::Face;
use crate::rupture::{self, Criterion, Event};
use crate::stress::StressField;
use crate::thermodynamics::Gel;

impl Relaxation {
    /// Whether anything is overloaded in the bead as it is.
    pub fn is_overloaded(&self, gel: &Gel, criterion: &Criterion) -> bool {
        !rupture::overloaded(&self.bead, &StressField::of(&self.bead, gel).stress, criterion).is_empty()
    }

    /// Ruptures what is most overloaded in the bead as it is, and what else is far from it;
    /// nothing where nothing is. Ask when everything is at rest, and again when it has come
    /// to rest anew: contacts and masses must be renewed first, also those to other beads.
    pub fn tear(&mut self, gel: &Gel, criterion: &Criterion) -> Vec<Event> {
        let stress = StressField::of(&self.bead, gel).stress;
        let overloaded = rupture::overloaded(&self.bead, &stress, criterion);
        let events = overloaded.iter().map(|loaded| loaded.event(&self.bead, criterion)).collect();
        self.cut(&overloaded.iter().flat_map(|loaded| loaded.faces()).copied().collect::<Vec<_>>());
        events
    }

    /// Cuts bonds, as with a blade; then as after `tear`.
    pub fn cut(&mut self, faces: &[Face]) {
        if faces.is_empty() {
            return;
        }
        let before = self.bead.shared_lattice();
        self.bead.split(faces);
        self.velocities = self.bead.lattice().carry_nodes(&before, &self.velocities);
        self.gradient = vec![0.0; self.bead.positions.len()];
        // Points inside have other numbers now.
        self.contacts.pairs.retain(|pair| (pair.point as usize) < before.skin.len());
        self.folds = Folds::default();
        self.listed = Standing::default();
    }
}
