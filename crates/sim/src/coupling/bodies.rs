use super::neighbourhood::{Neighbourhood, WATCH};
use super::touching::{self, Due, Pair};
use bedswell_gel::{Gel, Motion, Relaxation};
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
pub(super) const TRUSTED: f64 = 0.9;
/// Steps in which ways are not measured between two in which they are: nothing comes far in them.
const STEPS_TO_LOOK: usize = 3;
/// Way of a bead's centre, over the same, after which they are as well: what moves with it is
/// not nearer.
pub(super) const DRIFT: f64 = 2.0;
/// Skin points within this many swollen voxel edges of what they may touch have mass for it;
/// masses are renewed after half of that way, or all of it between two beads.
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
    /// Where the grains were when beads last noticed them.
    listed: Vec<Vector>,
    /// Steps until it is found out again what has moved too far.
    steps_to_look: usize,
    /// Share of each force component on grains and lid that is turned against the motion.
    /// Little of it lets slow rearrangements come to their end soonest.
    damping: f64,
}

impl Bodies {
    pub(super) fn new(mut grains: Assembly, beads: Vec<Relaxation>, damping: f64) -> Self {
        grains.contact_damping = CONTACT_DAMPING;
        let around = vec![Neighbourhood::default(); beads.len()];
        Self { grains, beads, around, pairs: Vec::new(), listed: Vec::new(), steps_to_look: 0, damping }
    }

    /// Puts beads at rest in the place of the same beads; grains stay as they are.
    pub(super) fn renew(&mut self, beads: Vec<Relaxation>) {
        self.beads = beads;
        self.pairs.clear();
        self.listed.clear();
        self.steps_to_look = 0;
    }

    /// How near (m) an obstacle is that beads of a gel follow.
    pub(super) fn reach(&self, gel: &Gel) -> f64 {
        let edge = self.beads.iter().map(|bead| bead.bead().voxel_edge()).fold(0.0, f64::max);
        REACH * edge * gel.free_stretch()
    }

    /// How near (m) it is that contacts get their mass.
    fn near(&self, gel: &Gel) -> f64 {
        NEAR / REACH * self.reach(gel)
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

    /// Looks around where it may be due.
    fn look_around(&mut self, gel: &Gel) {
        let grains = &self.grains;
        self.around.par_iter_mut().for_each(|around| around.update(grains));
        let is_new = |bead: &Relaxation| !bead.is_settled_in();
        let goes = self.steps_to_look == 0 || self.beads.iter().any(is_new);
        self.steps_to_look = if goes { STEPS_TO_LOOK } else { self.steps_to_look - 1 };
        if goes {
            self.look_again(gel);
        }
    }

    /// Looks for contacts anew where something has moved too far since the last look, and renews
    /// masses.
    fn look_again(&mut self, gel: &Gel) {
        let (reach, near) = (self.reach(gel), self.near(gel));
        // What no bead watches may come as near as what they follow: half of what is left besides
        // the bead's own way until it is noticed again, half before.
        let strayed = self.strayed(0.5 * (LOOK * (1.0 + WATCH) - DRIFT - 1.0) * reach);
        let grains = &self.grains;
        let mut due: Vec<Due> = (self.beads.par_iter().zip(&mut self.around))
            .map(|(bead, around)| judge((bead, around), grains, &strayed, [reach, near]))
            .collect();
        touching::judge(&mut self.pairs, &mut due);
        (self.beads.par_iter_mut().zip(&mut self.around).zip(&due)).for_each(|((bead, around), due)| {
            if due.looks {
                around.extend(bead, grains, LOOK * reach);
                bead.look(gel, &around.obstacles, reach);
            }
            if due.weighs {
                bead.weigh(gel, &around.obstacles, near);
            }
        });
        if due.len() > 1 && due.iter().any(|due| due.weighs) {
            touching::look(&mut self.pairs, &mut self.beads, &grains.cell, &mut due, [reach, near]);
        }
    }

    /// The same bodies pressing on what they know of, with the contact stiffness of today.
    #[cfg(test)]
    pub(super) fn weighed_anew(&self, gel: &Gel) -> Self {
        let (mut anew, near) = (self.clone(), self.near(gel));
        let beads = anew.beads.iter_mut().zip(&self.around);
        beads.for_each(|(bead, around)| bead.weigh(gel, &around.obstacles, near));
        anew.steps_to_look = 1;
        anew.compute_forces(gel);
        anew
    }

    /// The grains that have moved by more than `limit` (m) since they last were among these.
    fn strayed(&mut self, limit: f64) -> Vec<usize> {
        let centres = &self.grains.centres;
        if self.listed.len() != centres.len() {
            // Beads that have not looked yet will.
            self.listed.clone_from(centres);
            return Vec::new();
        }
        let far = |&grain: &usize| (centres[grain] - self.listed[grain]).norm_squared() > limit * limit;
        let strayed: Vec<usize> = (0..centres.len()).filter(far).collect();
        strayed.iter().for_each(|&grain| self.listed[grain] = centres[grain]);
        strayed
    }
}

/// What a bead has to do for the sake of what it may press on besides other beads.
fn judge(
    (bead, around): (&Relaxation, &mut Neighbourhood),
    grains: &Assembly,
    strayed: &[usize],
    [reach, near]: [f64; 2],
) -> Due {
    let (look, weighed) = (bead.moved_since_look(), bead.moved_since_weighed());
    let drift = look.map_or_else(Vector::zeros, |motion| motion.drift);
    let (centre, limit) = (bead.bead().centre(), TRUSTED * reach);
    let mut notice = |&&grain: &&usize| around.notice((bead, &centre, &drift), grains, grain, LOOK * reach);
    let comes_near = strayed.iter().filter(&mut notice).count() > 0;
    let is_new = !bead.is_settled_in();
    let looks = is_new
        || comes_near
        || drift.norm() > DRIFT * reach
        || around.has_strayed(grains, &drift, limit)
        || bead.approach(look.as_ref(), &around.obstacles) > limit;
    let approach = bead.approach_since_weighed(weighed.as_ref(), &around.obstacles);
    let way = |motion: Option<Motion>| motion.map_or(0.0, |motion| motion.way);
    Due {
        looks,
        weighs: looks || approach > 0.5 * near,
        is_new,
        centre,
        way_since_look: way(look),
        way_since_weighed: way(weighed),
    }
}
