//! Ruptures between steps in time, with the water where it is.

use super::in_time::InTime;
use super::march::AFTER_RUPTURE;
use super::measure::Watch;
use super::tearing::Tearing;
use bedswell_gel::Kinetics;
use rayon::prelude::*;

impl InTime<'_> {
    /// Lets beads at rest rupture where they are overloaded, and everything come to rest
    /// again, until nothing is overloaded.
    pub(super) fn tear(&mut self, increment: usize, is_end: bool) -> Result<(), String> {
        while self.is_overloaded() {
            // What has not quite come to rest may be overloaded in passing.
            self.rest_nearer()?;
            while self.rupture(increment)? {
                let beads = self.kinetics.iter().map(Kinetics::relaxation).collect();
                self.rest_with(beads, &[], 1)?;
                self.rest_nearer()?;
            }
            if is_end {
                self.come_to_rest()?;
            }
        }
        Ok(())
    }

    fn is_overloaded(&self) -> bool {
        let Self { kinetics, tearing: Some(tearing), .. } = self else { return false };
        let beads = kinetics.par_iter().zip(&tearing.criteria);
        beads.any(|(bead, criterion)| bead.is_overloaded(criterion))
    }

    fn rest_nearer(&mut self) -> Result<(), String> {
        let stage = self.stage();
        self.march.rest(&stage, AFTER_RUPTURE)?;
        self.take_over(&stage);
        Ok(())
    }

    /// Ruptures what is most overloaded in each bead. Whether anything was.
    fn rupture(&mut self, increment: usize) -> Result<bool, String> {
        let Self { kinetics, tearing: Some(tearing), .. } = self else { return Ok(false) };
        let mut count = 0;
        for (bead, criterion) in kinetics.iter_mut().zip(&tearing.criteria) {
            count += bead.rupture_once(criterion).map_err(|error| error.to_string())?;
        }
        self.note(increment);
        Ok(count > 0)
    }

    /// Tells of the beads' new ruptures.
    fn note(&mut self, increment: usize) {
        let at = self.moment(increment);
        let Self { kinetics, tearing, march, .. } = self;
        let Some(tearing) = tearing else { return };
        for (index, bead) in kinetics.iter().enumerate() {
            let new = &bead.ruptures()[tearing.count(index)..];
            tearing.note((index, bead.bead()), new, at, &march.bodies);
        }
    }

    /// The pack as it is, while its beads may tear and none has.
    pub(super) fn if_whole(&self) -> Option<Self> {
        self.tearing.as_ref().is_some_and(Tearing::is_whole).then(|| self.clone())
    }

    /// Where a bead has just ruptured for the first time: what the pack would come to, had it
    /// gone on from where it was `before` with beads that stay whole.
    pub(super) fn tell_whole(
        &mut self,
        before: Option<Self>,
        watch: &Watch<'_>,
        times: &[f64],
        increment: usize,
    ) {
        let torn = self.tearing.as_mut().filter(|tearing| !tearing.is_whole());
        let (Some(tearing), Some(mut whole)) = (torn, before) else { return };
        whole.tearing = None;
        let mut probabilities = Vec::new();
        for increment in increment..=times.len() {
            if whole.go_on(watch, times, increment).is_err() {
                break;
            }
            let seen = whole.see(watch);
            probabilities.push(seen.iter().map(|seen| watch.tear_probability(seen)).collect());
        }
        tearing.set_whole(increment, probabilities);
    }
}
