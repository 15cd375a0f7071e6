use super::neighbourhood::{Neighbourhood, WATCH};
use super::touching::{self, Pair};
use bedswell_gel::{Gel, Relaxation};
use bedswell_geometry::Vector;
use bedswell_grains::Assembly;
use rayon::prelude::*;

/// Force of a contact's dashpot per closing speed, over the contact's stiffness (steps).
const CONTACT_DAMPING: f64 = 0.4;
/// Share of each force component that is turned against the motion, on the gel's nodes.
const GEL_DAMPING: f64 = 0.4;
/// Skin points within this many swollen voxel edges of an obstacle are followed.
const REACH: f64 = 0.45;
/// Share of that distance after which contacts are looked for again.
const TRUSTED: f64 = 0.9;
/// Skin points within this many swollen voxel edges of what they may touch have mass for it;
/// masses are renewed after half of that way.
const NEAR: f64 = 0.3;
/// Grains within this many times that distance of a bead are its obstacles.
const LOOK: f64 = 2.0;

/// Grains and beads in motion.
#[derive(Clone, Debug)]
pub(super) struct Bodies {
    pub(super) grains: Assembly,
    pub(super) beads: Vec<Relaxation>,
    pub(super) around: Vec<Neighbourhood>,
    /// Pairs of beads that may touch.
    pub(super) pairs: Vec<Pair>,
    /// Where the grains were when all beads' neighbours were last looked for.
    listed: Vec<Vector>,
    /// Share of each force component on grains and lid that is turned against the motion.
    /// Little of it lets slow rearrangements come to their end soonest.
    damping: f64,
}

impl Bodies {
    pub(super) fn new(mut grains: Assembly, beads: Vec<Relaxation>, damping: f64) -> Self {
        grains.contact_damping = CONTACT_DAMPING;
        let around = vec![Neighbourhood::default(); beads.len()];
        Self { grains, beads, around, pairs: Vec::new(), listed: Vec::new(), damping }
    }

    /// Puts beads at rest in the place of the same beads; grains stay as they are.
    pub(super) fn renew(&mut self, beads: Vec<Relaxation>) {
        self.beads = beads;
        self.pairs.clear();
        self.listed.clear();
    }

    /// How near (m) an obstacle is that beads of a gel follow.
    pub(super) fn reach(&self, gel: &Gel) -> f64 {
        let edge = self.beads.iter().map(|bead| bead.bead().voxel_edge()).fold(0.0, f64::max);
        REACH * edge * gel.free_stretch()
    }

    /// Forces on everything, at the places where everything is.
    pub(super) fn compute_forces(&mut self, gel: &Gel) {
        self.look_around(gel);
        let (grains, beads) = (&mut self.grains, &mut self.beads);
        let around = &self.around;
        rayon::join(
            || grains.compute_contacts(),
            || {
                beads
                    .par_iter_mut()
                    .zip(around)
                    .for_each(|(bead, around)| bead.compute_forces(gel, &around.obstacles));
            },
        );
        for (bead, around) in self.beads.iter().zip(&self.around) {
            around.pass_on(bead, &mut self.grains);
        }
        touching::press(&mut self.pairs, &mut self.beads);
    }

    /// Moves everything by one step.
    pub(super) fn advance(&mut self) {
        let damping = self.damping;
        let (grains, beads) = (&mut self.grains, &mut self.beads);
        rayon::join(
            || grains.advance(damping),
            || beads.par_iter_mut().for_each(|bead| bead.advance(GEL_DAMPING)),
        );
    }

    pub(super) fn step(&mut self, gel: &Gel) {
        self.compute_forces(gel);
        self.advance();
    }

    /// Looks for contacts anew where something has moved too far since the last look.
    fn look_around(&mut self, gel: &Gel) {
        let reach = self.reach(gel);
        // What no bead watches may come as near as what they follow: half of that way until all
        // look again, half before.
        let all = self.grains_strayed(0.5 * (LOOK * (1.0 + WATCH) - 1.0) * reach);
        if all {
            self.listed.clone_from(&self.grains.centres);
        }
        let near = NEAR / REACH * reach;
        let grains = &self.grains;
        let due: Vec<(bool, bool)> = (self.beads.par_iter_mut().zip(&mut self.around))
            .map(|(bead, around)| {
                around.update(grains);
                let limit = TRUSTED * reach;
                let looks =
                    all || around.has_strayed(grains, limit) || bead.approach(&around.obstacles) > limit;
                if looks {
                    around.extend(bead, grains, LOOK * reach);
                    bead.look(gel, &around.obstacles, reach);
                }
                let weighs = looks || bead.approach_since_weighed(&around.obstacles) > 0.5 * near;
                if weighs {
                    bead.weigh(gel, &around.obstacles, near);
                }
                (looks, weighs)
            })
            .collect();
        if self.beads.len() > 1 {
            let (looks, mut weighs): (Vec<bool>, Vec<bool>) = due.into_iter().unzip();
            if looks.contains(&true) {
                touching::look(&mut self.pairs, &self.beads, &self.grains.cell, &looks, reach, &mut weighs);
            }
            if weighs.contains(&true) {
                touching::weigh(&self.pairs, &mut self.beads, &weighs, 2.0 * near);
            }
        }
    }

    /// Whether a grain has moved by more than `limit` (m) since the last look.
    fn grains_strayed(&self, limit: f64) -> bool {
        self.listed.len() != self.grains.centres.len()
            || (self.grains.centres.iter().zip(&self.listed))
                .any(|(now, before)| (now - before).norm_squared() > limit * limit)
    }
}
