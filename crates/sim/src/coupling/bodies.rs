use super::neighbourhood::Neighbourhood;
use super::touching::{self, Pair};
use bedswell_gel::{Gel, Relaxation};
use bedswell_geometry::Vector;
use bedswell_grains::Assembly;
use rayon::prelude::*;

/// Damping of grains that only chatter, where the usual one is this: they come to rest
/// sooner, as nothing rearranges any more.
const SETTLING: (f64, f64) = (0.6, 0.2);
/// Largest net force on a grain, over the mean contact force, of grains that only chatter.
const CHATTER: f64 = 2e-3;
/// Steps without growth after which, in every so many, so many are damped like those of grains
/// that only chatter: a loose grain that slides on its neighbours may flutter for ever with less.
const CALM: (usize, usize, usize) = (10_000, 5_000, 1_000);
/// Share of each force component that is turned against the motion, on the gel's nodes.
const GEL_DAMPING: f64 = 0.4;
/// Skin points within this many swollen voxel edges of an obstacle are followed.
const REACH: f64 = 0.3;

/// Grains and beads in motion.
#[derive(Clone, Debug)]
pub(super) struct Bodies {
    pub(super) grains: Assembly,
    pub(super) beads: Vec<Relaxation>,
    pub(super) around: Vec<Neighbourhood>,
    /// Pairs of beads that may touch.
    pub(super) pairs: Vec<Pair>,
    /// Where the grains were when the beads' neighbours were last looked for.
    listed: Vec<Vector>,
    /// Share of each force component on grains and lid that is turned against the motion.
    /// Little of it lets slow rearrangements come to their end soonest.
    usual_damping: f64,
    damping: f64,
}

impl Bodies {
    pub(super) fn new(grains: Assembly, beads: Vec<Relaxation>, damping: f64) -> Self {
        let around = vec![Neighbourhood::default(); beads.len()];
        Self { grains, beads, around, pairs: Vec::new(), listed: Vec::new(), usual_damping: damping, damping }
    }

    /// Puts beads at rest in the place of the same beads; grains stay as they are.
    pub(super) fn renew(&mut self, beads: Vec<Relaxation>) {
        self.beads = beads;
        self.pairs.clear();
        self.listed.clear();
        self.damping = self.usual_damping;
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
        self.pairs.iter_mut().for_each(|pair| pair.press(&mut self.beads));
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

    /// Damps as befits the largest net force on a grain, over the mean contact force, after
    /// so many steps with nothing growing.
    pub(super) fn damp(&mut self, residual: f64, step: usize) {
        let settling = SETTLING.0 * (self.usual_damping / SETTLING.1);
        let (late, cycle, calm) = CALM;
        let calms = step >= late && step % cycle < calm;
        self.damping = if residual < CHATTER || calms { settling } else { self.usual_damping };
    }

    pub(super) fn step(&mut self, gel: &Gel) {
        self.compute_forces(gel);
        self.advance();
    }

    /// Looks for contacts anew where something has moved too far since the last look.
    fn look_around(&mut self, gel: &Gel) {
        let reach = self.reach(gel);
        let all = self.grains_strayed(0.5 * reach);
        if all {
            self.listed.clone_from(&self.grains.centres);
        }
        let grains = &self.grains;
        let due: Vec<bool> = (self.beads.par_iter_mut().zip(&mut self.around))
            .map(|(bead, around)| {
                around.update(bead, grains);
                let due = all || bead.approach(&around.obstacles) > 0.5 * reach;
                if due {
                    around.extend(bead, grains, 2.0 * reach);
                    bead.renew(gel, &around.obstacles, reach);
                }
                due
            })
            .collect();
        if due.contains(&true) && self.beads.len() > 1 {
            touching::look(&mut self.pairs, &mut self.beads, &self.grains.cell, &due, reach);
        }
    }

    /// Whether a grain has moved by more than `limit` (m) since the last look.
    fn grains_strayed(&self, limit: f64) -> bool {
        self.listed.len() != self.grains.centres.len()
            || (self.grains.centres.iter().zip(&self.listed))
                .any(|(now, before)| (now - before).norm_squared() > limit * limit)
    }
}
