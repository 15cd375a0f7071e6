//! A bead in time among things that move: between its steps it comes to rest with them at
//! the water it holds.
//!
//! A step holds the things around the bead in place; then bead and things relax together
//! while each voxel keeps its water. Both lower the same energy, so that the split is stable
//! whatever the step, and it is of first order: a step sees a bed that gives way only after
//! it.

use super::{Kinetics, Lag, Prop};
use crate::elastic::{Elastic, Holding};
use crate::obstacle::Obstacle;
use crate::relaxation::{HeldWater, Lead, Relaxation, STIFFNESS};
use crate::rupture;
use crate::thermodynamics::Gel;

impl Kinetics {
    /// The bead as it is, to come to rest at the water it holds.
    pub fn relaxation(&self) -> Relaxation {
        let mut relaxation = Relaxation::new(self.bead.clone());
        let mut lag = self.chain_forces(&self.state.velocities);
        lag.iter_mut().for_each(|force| *force *= self.retardation);
        relaxation.hold(HeldWater { holding: self.holding(1.0), stiffening: 1.0, lag });
        relaxation
    }

    /// The bead as it is, pressing on obstacles that it has come to rest with already.
    pub fn relaxed(&self, obstacles: &[Obstacle]) -> Relaxation {
        let mut relaxation = self.relaxation();
        relaxation.press_as(self.state.contacts.clone(), &self.gel(), obstacles);
        relaxation
    }

    /// The way from where a relaxation is, before the last steps, to where they ended. A bead
    /// that tore in them has none, as its nodes are others.
    pub fn lead(&self, from: &Relaxation) -> Lead {
        let stiffening = match self.lag.seconds {
            0.0 => 1.0,
            seconds => 1.0 + self.retardation / seconds,
        };
        let mut lag = match self.lag.seconds {
            0.0 => vec![0.0; self.state.positions.len()],
            _ => self.chain_forces(&self.lag.start),
        };
        lag.iter_mut().for_each(|force| *force *= 1.0 - stiffening);
        let start = from.holding().cloned().unwrap_or_else(|| self.holding(1.0));
        Lead {
            way: (self.state.positions.iter().zip(&from.bead().positions)).map(|(to, at)| to - at).collect(),
            start: Holding { slopes: start.slopes.iter().map(|slope| slope / stiffening).collect(), ..start },
            end: HeldWater { holding: self.holding(stiffening), stiffening, lag },
        }
    }

    /// Takes over where the bead came to rest, among obstacles as they are now.
    pub fn take_over(&mut self, rest: &Relaxation, obstacles: &[Obstacle]) {
        let gel = self.gel();
        let lattice = self.bead.shared_lattice();
        let elastic = Elastic { lattice: &lattice, gel: &gel, edge: self.bead.voxel_edge() };
        let positions = &rest.bead().positions;
        let (mut forces, mut ratios) = (vec![0.0; positions.len()], vec![1.0; self.state.water.len()]);
        elastic.add_mixed_gradient(positions, &self.state.slopes, &mut forces, &mut ratios);
        for &slot in &lattice.slots {
            let slot = slot as usize;
            if let Some(slope) = rest.held_slope(slot, ratios[slot]) {
                self.state.slopes[slot] = slope;
            }
        }
        self.state.contacts = rest.skin_contacts(obstacles);
        let chains = gel.dry_shear_modulus() * self.bead.voxel_edge();
        self.state.contacts.ties = rupture::drags(&lattice, chains);
        self.loads = rest.other_forces(&gel, obstacles);
        self.props = rest
            .pulls()
            .map(|(point, force, stiffness)| Prop {
                point,
                place: rest.bead().skin_point(point as usize),
                force,
                stiffness,
            })
            .collect();
        if self.lag.seconds > 0.0 {
            let Lag { start, seconds } = &self.lag;
            let ways = positions.iter().zip(start);
            self.state.velocities = ways.map(|(to, from)| (to - from) / seconds).collect();
        }
        self.state.positions.clone_from(positions);
        self.bead.positions.clone_from(positions);
    }

    /// What holds every voxel at its water, with slopes and stiffness over `stiffening`.
    fn holding(&self, stiffening: f64) -> Holding {
        let crosslinks = self.numbers.crosslinks;
        // What lies in the padding means nothing.
        let stiffness = |water: &f64| STIFFNESS * crosslinks * water.max(1.0).powf(-4.0 / 3.0) / stiffening;
        Holding {
            slopes: self.state.slopes.iter().map(|slope| slope / stiffening).collect(),
            stiffness: self.state.water.iter().map(stiffness).collect(),
            water: self.state.water.clone(),
        }
    }

    /// Forces of the chains alone where the nodes are at `positions` (N), as the gradient of
    /// their energy.
    fn chain_forces(&self, positions: &[f64]) -> Vec<f64> {
        let (gel, lattice): (Gel, _) = (self.gel(), self.bead.shared_lattice());
        let elastic = Elastic { lattice: &lattice, gel: &gel, edge: self.bead.voxel_edge() };
        let slots = self.state.water.len();
        let mut forces = vec![0.0; positions.len()];
        elastic.add_mixed_gradient(positions, &vec![0.0; slots], &mut forces, &mut vec![0.0; slots]);
        forces
    }
}
