//! Ruptures on the march to equilibrium, one water content at a time.

use super::march::{March, Ramp};
use super::measure::{self, Watch};
use super::tearing::Tearing;
use bedswell_gel::{Criterion, Gel, Relaxation};

impl March {
    /// Lets beads at rest rupture where they are overloaded, and everything come to rest
    /// again, until nothing is overloaded: an avalanche at one increment.
    pub(super) fn tear(
        &mut self,
        watch: &Watch<'_>,
        ramp: &Ramp<'_>,
        increment: usize,
        tearing: &mut Tearing,
    ) -> Result<(), String> {
        let (stage, last) = (ramp.stage(increment), increment == ramp.count);
        while self.is_overloaded(&stage, tearing) {
            let whole = tearing.is_whole().then(|| self.clone());
            // What has not quite come to rest may be overloaded in passing.
            self.rest_again(&stage, last)?;
            if !self.rupture(&stage, ramp, increment, tearing) {
                continue;
            }
            if let Some(whole) = whole {
                tearing.set_whole(increment, whole.stay_whole(watch, ramp, increment));
            }
            self.rest_again(&stage, false)?;
            while self.rupture(&stage, ramp, increment, tearing) {
                self.rest_again(&stage, false)?;
            }
            self.rest_again(&stage, last)?;
        }
        measure::guard(&self.bodies)
    }

    fn is_overloaded(&self, gel: &Gel, tearing: &Tearing) -> bool {
        let overloaded = |(bead, criterion): (&Relaxation, &Criterion)| bead.is_overloaded(gel, criterion);
        self.bodies.beads.iter().zip(&tearing.criteria).any(overloaded)
    }

    /// Ruptures what is most overloaded in each bead. Whether anything was.
    fn rupture(&mut self, gel: &Gel, ramp: &Ramp<'_>, increment: usize, tearing: &mut Tearing) -> bool {
        let mut any = false;
        for index in 0..self.bodies.beads.len() {
            let events = self.bodies.beads[index].tear(gel, &tearing.criteria[index]);
            any |= !events.is_empty();
            let bead = self.bodies.beads[index].bead();
            tearing.note((index, bead), &events, ramp.moment(increment), &self.bodies);
        }
        any
    }

    /// Goes on to the end without ruptures. Tear probabilities of every bead after each
    /// increment from this one on, as far as that goes.
    fn stay_whole(mut self, watch: &Watch<'_>, ramp: &Ramp<'_>, increment: usize) -> Vec<Vec<f64>> {
        let mut probabilities = Vec::new();
        for increment in increment..=ramp.count {
            if !probabilities.is_empty() && self.grow(ramp, increment).is_err() {
                break;
            }
            let seen = watch.see_drained(&ramp.stage(increment), &self.bodies.beads);
            probabilities.push(seen.iter().map(|seen| watch.tear_probability(seen)).collect());
        }
        probabilities
    }
}
