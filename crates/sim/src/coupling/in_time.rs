//! The march in time. Between steps of the beads' kinetics, in which grains and lid stay
//! where they are, everything comes to rest together while the beads keep their water.

use super::bed::DryBed;
use super::checkpoint::Checkpoint;
use super::course::Course;
use super::march::{BETWEEN_STEPS, March, Target, show_dry_bed};
use super::measure::{self, Seen, Watch};
use super::neighbourhood::Image;
use super::records::record_times;
use super::tearing::Tearing;
use crate::{Moment, Observer, PackOutcome, Quality, RunError, Scene, State, Step, Time};
use bedswell_gel::{
    Bead, Gel, Kinetics, KineticsError, Lattice, Lead, Outside, Permeability, Relaxation, Settings, Snapshot,
    StressField,
};
use bedswell_geometry::Vector;
use bedswell_grains::Assembly;
use rayon::prelude::*;
use std::sync::Arc;

/// Growth of the beads' stretch per step, at most, at the usual error of a step.
const GROWTH: f64 = 1.5e-2;
/// Growth of the beads' stretch per move of everything, as in the march to equilibrium.
const GROWTH_PER_MOVE: f64 = 7e-4;
/// The same of a bed that is nothing but gel.
const GROWTH_PER_MOVE_ALONE: f64 = 4e-4;

/// What a step of a bead among things that move may leave, over the bead's own stretch.
const RESIDUAL: f64 = 1e-4;
/// Times that everything comes nearer to rest where a bead finds no way to go on.
const TRIES: usize = 4;

/// Takes a pack through a history in time, or on from where the observer says it was stopped.
pub(crate) fn march_in_time(
    scene: &Scene,
    time: &Time,
    bed: DryBed,
    number: u64,
    observer: &mut dyn Observer,
) -> Result<PackOutcome, RunError> {
    let gel = scene.swelling_gel();
    let watch = Watch { scene, gel: &gel, number, height_before: bed.height };
    let times = record_times(&time.history, time.until, scene.march.increments);
    let mut march = InTime::new(&watch, time, &bed).map_err(at(1))?;
    let mut history = Vec::with_capacity(times.len());
    let kept = observer.resume().filter(|kept| kept.is_of(scene, number, times.len()));
    if let Some(kept) = kept.filter(|kept| march.recall(kept)) {
        history = kept.history;
    } else {
        show_dry_bed(&watch, &bed, observer)?;
        march.start().map_err(at(1))?;
    }
    for increment in history.len() + 1..=times.len() {
        march.go_on(&watch, &times, increment).map_err(at(increment))?;
        let (step, state) = march.record(&watch, increment, observer.looks());
        history.push(step);
        let mut onwards = observer.step(&step, times.len());
        if let Some(state) = state.filter(|_| onwards.is_continue()) {
            onwards = observer.look(state);
        }
        if increment < times.len() && onwards.is_continue() {
            // The march itself goes on from what is kept, so that who resumes it does too.
            let kept = march.checkpoint(scene, number, &history);
            onwards = observer.keep(&kept);
            if !march.recall(&kept) {
                return Err(at(increment)("the state could not be kept; please report the scene".into()));
            }
        }
        if onwards.is_break() {
            return Err(RunError::Stopped { increment });
        }
    }
    Ok(march.outcome(&watch, bed, history, &times))
}

fn at(increment: usize) -> impl Fn(String) -> RunError {
    move |reason| RunError::March { increment, reason }
}

/// A pack on its way through time.
#[derive(Clone)]
pub(super) struct InTime<'a> {
    time: &'a Time,
    pub(super) march: March,
    /// A bead is alone among grains that stay where they are, and needs no rest besides its
    /// own steps.
    is_bench: bool,
    pub(super) kinetics: Vec<Kinetics>,
    /// The grains as mixed, and the beads before they take up water.
    dry: (Assembly, Vec<Kinetics>),
    /// Growth of the stretch (1/s) of the bead that changed most in the last step; nothing
    /// right after a change outside.
    rate: Option<f64>,
    course: Course,
    /// By what beads tear, if they may.
    pub(super) tearing: Option<Tearing>,
}

impl<'a> InTime<'a> {
    fn new(watch: &Watch<'_>, time: &'a Time, bed: &DryBed) -> Result<Self, String> {
        let Watch { scene, gel, .. } = *watch;
        let lattice = Arc::new(Lattice::new(scene.beads.across_for(bed.beads.len())));
        let permeability = Permeability::new(gel, time.diffusion, time.exponent).map_err(words)?;
        let alone = Settings {
            step_error: time.step_error,
            contact_seals: time.contact_seals,
            held: scene.beads.held,
            ..Settings::default()
        };
        // Where all come to rest after a step, that corrects what it leaves, and short steps
        // keep skins smooth. What cracks make uneven would drift before it touches anything.
        let joint = Settings { residual: RESIDUAL, anchored: true, ..alone };
        let settings = match (is_bench(scene, bed), scene.toughness) {
            (true, None) => alone,
            (true, Some(_)) => joint,
            (false, _) => Settings { most_retardation: joint.retardation, ..joint },
        };
        let radius = 0.5 * scene.beads.dry_diameter;
        let bead = |centre: &Vector| {
            let bead = Bead::new(Arc::clone(&lattice), radius, *centre, bed.stretch);
            Kinetics::new(bead, gel.numbers(), permeability, settings).map_err(words)
        };
        let kinetics: Vec<Kinetics> = bed.beads.iter().map(bead).collect::<Result<_, _>>()?;
        let tearing = Tearing::new(scene, gel, watch.number, kinetics.iter().map(Kinetics::bead))?;
        let course = Course::new(kinetics.len(), lattice.voxel_count());
        Ok(Self {
            time,
            march: March::new(scene, bed, gel),
            is_bench: is_bench(scene, bed),
            dry: (bed.grains.clone(), kinetics.clone()),
            kinetics,
            rate: None,
            course,
            tearing,
        })
    }

    fn now(&self) -> f64 {
        self.kinetics.first().map_or(self.time.until, Kinetics::time)
    }

    /// The gel that would swell freely to the beads' mean size.
    pub(super) fn stage(&self) -> Gel {
        let dry: f64 = self.kinetics.iter().map(|bead| bead.bead().dry_volume()).sum();
        let water: f64 = self.kinetics.iter().map(Kinetics::water).sum();
        self.kinetics[0].gel().limited_to((1.0 + water / dry).cbrt())
    }

    /// Brings everything to rest before the beads take up water.
    fn start(&mut self) -> Result<(), String> {
        let beads = self.kinetics.iter().map(Kinetics::relaxation).collect();
        self.rest_with(beads, &[], 1)
    }

    /// Goes on to the end of an increment.
    pub(super) fn go_on(&mut self, watch: &Watch<'_>, times: &[f64], increment: usize) -> Result<(), String> {
        let until = times[increment - 1];
        while self.now() < until {
            let before = self.if_whole();
            self.step(until)?;
            self.tear(increment, false)?;
            self.tell_whole(before, watch, times, increment);
            let Self { course, kinetics, tearing, .. } = self;
            course.note(kinetics, watch.scene, tearing.as_ref());
        }
        if increment == times.len() {
            let before = self.if_whole();
            self.come_to_rest()?;
            self.tear(increment, true)?;
            self.tell_whole(before, watch, times, increment);
        }
        measure::guard(&self.march.bodies)
    }

    pub(super) fn moment(&self, increment: usize) -> Moment {
        Moment { increment, free_stretch: self.kinetics[0].gel().free_stretch(), time_s: self.now() }
    }

    /// One step of all beads, not beyond `until` (s), and the rest after it.
    fn step(&mut self, until: f64) -> Result<(), String> {
        let now = self.now();
        let history = &self.time.history;
        let outside = history.at(now);
        if self.kinetics.iter().any(|bead| bead.last_outside().is_some_and(|last| last != outside)) {
            self.rate = None;
        }
        let start: Vec<Relaxation> = self.kinetics.iter().map(Kinetics::relaxation).collect();
        let reach = 2.0 * self.march.bodies.reach(&self.stage());
        let bodies = &mut self.march.bodies;
        let (around, grains) = (&mut bodies.around, &bodies.grains);
        let wishes: Vec<f64> = (self.kinetics.par_iter_mut().zip(around).zip(&start))
            .map(|((bead, around), start)| {
                around.extend(start, grains, reach);
                bead.wish(&outside, &around.obstacles)
            })
            .collect();
        let growth = GROWTH * (self.time.step_error / Settings::default().step_error).sqrt();
        let longest = self.rate.map_or(f64::INFINITY, |rate| growth / rate.max(f64::MIN_POSITIVE));
        let wish = wishes.into_iter().fold(longest, f64::min);
        let left = until - now;
        // The last step takes all that is left; none leaves less than itself.
        let end = if wish >= left { until } else { now + wish.min(0.5 * left) };

        let before: Vec<f64> = self.kinetics.iter().map(volume_ratio).collect();
        let is_free = self.is_bench && self.tearing.is_none() && self.rate.is_none();
        let (start, snapshots) = self.step_beads(start, &outside, end)?;
        let after = self.kinetics.iter().map(volume_ratio);
        let grown = after.zip(&before).map(|(after, before)| ((after / before).ln() / 3.0).abs());
        let grown = grown.fold(0.0, f64::max);
        self.rate = Some(grown / (end - now));

        let per_move =
            if self.march.bodies.grains.radii.is_empty() { GROWTH_PER_MOVE_ALONE } else { GROWTH_PER_MOVE };
        let moves = ((grown / per_move).ceil() as usize).max(1);
        if self.is_bench && self.rest_alone() {
            // Nothing but its own error limits the steps of a bead alone that cannot tear.
            self.rate = self.rate.filter(|_| !is_free);
            return Ok(());
        }
        if is_free && grown > growth {
            // What folds in a long step may pass through itself: it is taken again in short ones.
            return self.go_back(&snapshots);
        }
        let leads: Vec<Lead> =
            self.kinetics.iter().zip(&start).map(|(bead, start)| bead.lead(start)).collect();
        self.rest_with(start, &leads, moves)
    }

    /// Takes all beads to `end` (s). Where one finds no way, all come nearer to rest and try
    /// again. Returns where they started from, twice: to come to rest from, and to go back to.
    fn step_beads(
        &mut self,
        mut start: Vec<Relaxation>,
        outside: &Outside,
        end: f64,
    ) -> Result<(Vec<Relaxation>, Vec<Snapshot>), String> {
        let mut tries = 0;
        loop {
            let before: Vec<Snapshot> = self.kinetics.iter().map(Kinetics::snapshot).collect();
            let stepped = (self.kinetics.par_iter_mut().zip(&self.march.bodies.around)).try_for_each(
                |(bead, around)| {
                    while bead.time() < end {
                        bead.step(outside, &around.obstacles, end)?;
                    }
                    Ok(())
                },
            );
            let Err(error): Result<(), KineticsError> = stepped else { return Ok((start, before)) };
            tries += 1;
            let is_torn = self.tearing.as_ref().is_some_and(|tearing| !tearing.is_whole());
            if tries > TRIES || (self.is_bench && !is_torn) {
                return Err(words(error));
            }
            self.go_back(&before)?;
            let stage = self.stage();
            self.march.rest(&stage, Target::nearer(tries))?;
            self.take_over(&stage);
            start = self.kinetics.iter().map(Kinetics::relaxation).collect();
        }
    }

    /// Takes the beads back to where they were.
    fn go_back(&mut self, before: &[Snapshot]) -> Result<(), String> {
        let beads = std::mem::take(&mut self.kinetics).into_iter().zip(before);
        self.kinetics =
            beads.map(|(bead, before)| bead.resume(before)).collect::<Result<_, _>>().map_err(words)?;
        Ok(())
    }

    /// A bead alone among held grains is at rest after its steps, unless it presses on
    /// itself.
    fn rest_alone(&mut self) -> bool {
        let bodies = &mut self.march.bodies;
        let relaxed = self.kinetics[0].relaxed(&bodies.around[0].obstacles);
        let alone = !relaxed.is_folded();
        if alone {
            bodies.renew(vec![relaxed]);
        }
        alone
    }

    /// Lets beads follow their leads and everything come to rest.
    pub(super) fn rest_with(
        &mut self,
        beads: Vec<Relaxation>,
        leads: &[Lead],
        moves: usize,
    ) -> Result<(), String> {
        let stage = self.stage();
        self.march.bodies.renew(beads);
        self.march.weigh();
        if !leads.is_empty() {
            for number in 1..=moves {
                let beads = self.march.bodies.beads.iter_mut().zip(leads);
                beads.for_each(|(bead, lead)| bead.follow(lead, number, moves));
                self.march.bodies.step(&stage);
            }
        }
        self.march.rest(&stage, BETWEEN_STEPS)?;
        self.take_over(&stage);
        Ok(())
    }

    /// Brings everything as near to rest as the end of a march is.
    pub(super) fn come_to_rest(&mut self) -> Result<(), String> {
        if self.is_bench && !self.march.bodies.beads[0].is_folded() {
            return Ok(());
        }
        let stage = self.stage();
        let target = self.march.at_the_end();
        self.march.rest(&stage, target)?;
        self.take_over(&stage);
        Ok(())
    }

    /// The beads in time take over where everything came to rest.
    pub(super) fn take_over(&mut self, stage: &Gel) {
        let bodies = &mut self.march.bodies;
        bodies.compute_forces(stage);
        let rest = bodies.beads.par_iter().zip(&bodies.around);
        self.kinetics
            .par_iter_mut()
            .zip(rest)
            .for_each(|(bead, (rest, around))| bead.take_over(rest, &around.obstacles));
    }

    /// The beads with their stress, whose strength is measured against the largest tension
    /// that each place has borne so far.
    pub(super) fn see<'b>(&'b self, watch: &Watch<'_>) -> Vec<Seen<'b>> {
        let fields: Vec<StressField> = self.kinetics.par_iter().map(Kinetics::stress).collect();
        let beads = self.march.bodies.beads.iter().zip(fields).zip(&self.course.peaks);
        let see = |((bead, field), peaks): ((&'b Relaxation, StressField), &Vec<f64>)| {
            let mut seen = watch.see(bead, field);
            seen.tension.tensions.iter_mut().zip(peaks).for_each(|(now, peak)| *now = now.max(*peak));
            seen
        };
        beads.map(see).collect()
    }

    fn quality(&self) -> Quality {
        self.march.quality(&self.stage())
    }

    /// The figures of an increment, and what there is to see of it.
    fn record(&mut self, watch: &Watch<'_>, increment: usize, looked_at: bool) -> (Step, Option<State>) {
        let Self { tearing, kinetics, .. } = self;
        let whole = tearing.as_mut().and_then(|tearing| {
            tearing.record(kinetics.iter().map(Kinetics::bead));
            tearing.whole_mean(increment)
        });
        let seen = self.see(watch);
        let free = self.kinetics[0].gel().free_stretch();
        let mut step = watch.step((increment, free), &seen, &self.march.bodies.grains, self.quality());
        step.tear_probability = whole.unwrap_or(step.tear_probability);
        let state = looked_at.then(|| State {
            time_s: Some(self.now()),
            ..self.march.snapshot(watch.scene, watch.number, &seen, step)
        });
        (step, state)
    }

    fn checkpoint(&self, scene: &Scene, number: u64, history: &[Step]) -> Checkpoint {
        let around = self.march.bodies.around.iter();
        Checkpoint {
            fingerprint: crate::folder::fingerprint([scene].into_iter()),
            pack: number,
            grains: self.march.bodies.grains.memory(),
            around: around.map(|around| around.grains.clone()).collect(),
            beads: self.kinetics.iter().map(Kinetics::snapshot).collect(),
            rate: self.rate,
            course: self.course.clone(),
            told: self.tearing.as_ref().map(|tearing| tearing.told.clone()).unwrap_or_default(),
            history: history.to_vec(),
        }
    }

    /// Goes back to what was kept. `false` where that does not fit this pack.
    fn recall(&mut self, kept: &Checkpoint) -> bool {
        let (mut grains, dry) = self.dry.clone();
        let beads: Option<Vec<Kinetics>> =
            dry.into_iter().zip(&kept.beads).map(|(bead, kept)| bead.resume(kept).ok()).collect();
        let Some(beads) = beads.filter(|beads| beads.len() == kept.beads.len()) else { return false };
        let count = grains.radii.len();
        let known = |image: &Image| (image.grain as usize) < count;
        let fits = beads.len() == self.kinetics.len()
            && kept.around.len() == beads.len()
            && kept.around.iter().flatten().all(known)
            && kept.course.fits(&self.course)
            && grains.recall(kept.grains.clone());
        if !fits {
            return false;
        }
        let bodies = &mut self.march.bodies;
        bodies.grains = grains;
        for (around, kept) in bodies.around.iter_mut().zip(&kept.around) {
            around.grains.clone_from(kept);
            around.obstacles.clear();
        }
        bodies.renew(beads.iter().map(Kinetics::relaxation).collect());
        (self.kinetics, self.rate, self.course) = (beads, kept.rate, kept.course.clone());
        if let Some(tearing) = &mut self.tearing {
            tearing.told.clone_from(&kept.told);
        }
        true
    }

    fn outcome(self, watch: &Watch<'_>, bed: DryBed, history: Vec<Step>, times: &[f64]) -> PackOutcome {
        let end = self.moment(times.len());
        let outcome = self.march.outcome(watch, bed, &self.see(watch), self.quality(), history);
        let outcome = match self.tearing {
            None => outcome,
            Some(tearing) => tearing.tell(outcome, end),
        };
        self.course.tell(outcome, times)
    }
}

fn is_bench(scene: &Scene, bed: &DryBed) -> bool {
    bed.grains.held && scene.bed.pot.is_none() && bed.beads.len() == 1
}

/// Volume ratio to dry that a bead's water gives it.
fn volume_ratio(bead: &Kinetics) -> f64 {
    1.0 + bead.water() / bead.bead().dry_volume()
}

fn words(error: impl std::fmt::Display) -> String {
    error.to_string()
}
