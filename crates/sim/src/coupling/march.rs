use super::bed::DryBed;
use super::bodies::Bodies;
use super::contents::Contents;
use super::measure::{self, Seen, Watch};
use super::pot::Pot;
use super::tearing::Tearing;
use crate::{GrainRecord, Moment, Observer, PackOutcome, Quality, RunError, Scene, State, Step};
use bedswell_gel::{Bead, Gel, Lattice, Relaxation, Tolerance};
use bedswell_geometry::Vector;
use std::ops::ControlFlow;
use std::sync::Arc;

/// Stretch at which the march starts. The mixing energy ends at the dry state, and
/// a nearly dry gel is as hard as the grains' contacts.
pub(super) const FIRST_STRETCH: f64 = 1.25;
/// Steps per increment, in the mean, over which the free stretch rises.
const RAMP_STEPS: usize = 220;
/// Fastest growth per step: small gel hardly moves the bed.
const FASTEST_GROWTH: f64 = 8e-4;
/// Fastest growth per step of a bed that is nothing but gel: the lid must follow it.
const GROWTH_OF_BED: f64 = 4e-4;
/// Steps between looks at the residuals.
const LOOK: usize = 10;
/// Largest residual (grains, gel) of a recorded state on the way.
const ON_THE_WAY: Target = Target { grains: 1e-2, gel: 3e-3, balance: 3e-3, steps: 40, required: false };
/// The same between two steps in time, in which less happens than in an increment.
pub(super) const BETWEEN_STEPS: Target = Target { steps: 80, ..ON_THE_WAY };
/// The same between ruptures: long enough for what a crack sets free to go through the bead.
pub(super) const AFTER_RUPTURE: Target = Target { steps: 300, ..ON_THE_WAY };
/// The same of the end state.
const AT_THE_END: Target = Target { grains: 1e-4, gel: 1e-4, balance: 1e-5, steps: 60_000, required: true };
/// The same of an end state of beads alone. Without grains between them nothing but smooth
/// skins holds them, and points of skin that barely touch come and go for ever.
const AT_THE_END_ALONE: Target =
    Target { grains: 1e-3, gel: 5e-3, balance: 5e-3, steps: 20_000, required: true };
/// What an end state may be left with when a grain keeps creeping: to give such packs up
/// would favour the others. The residuals stand in the results.
const TOLERABLE: Target = Target { grains: 1e-2, gel: 1e-3, balance: 1e-3, steps: 0, required: true };

/// Drag on the grains on the way to an end state while the bed as a whole hardly changes any
/// more: what is left are swings of thousands of steps, whose slips set off others. Earlier it
/// would hold up what still creeps.
const LATE_DRAG: f64 = 4e-3;
/// Steps between looks at how the bed changes, and the largest change of its height and of the
/// gel's volume, of themselves, over these steps that is hardly any.
const CALM: (usize, f64) = (500, 2e-5);

/// Steps after which a tolerable state will do where nothing that is measured changes any more.
const PATIENCE: usize = 20_000;

/// Further steps in which a tolerable state is waited for.
const LAST_STEPS: usize = 1_000;

/// What an end state may be left with when nothing that is measured changes any more: the
/// grains that still creep then carry next to nothing.
const UNCHANGING: Target = Target { grains: 1e-3, gel: 1e-4, balance: 1e-5, steps: 2_500, required: true };
/// Largest change of the bed's height and of the gel's volume, of themselves, over these
/// steps where nothing changes.
const CHANGE: f64 = 1e-5;

/// When a state counts as at rest.
#[derive(Clone, Copy, Debug)]
pub(super) struct Target {
    grains: f64,
    gel: f64,
    balance: f64,
    /// Steps after which the search is given up.
    steps: usize,
    /// Giving up is a failure; otherwise the march goes on from where it is.
    required: bool,
}

impl Target {
    /// Where a bead has found no way to go on for so many times: nearer to rest each time.
    pub(super) fn nearer(tries: usize) -> Self {
        let share = 0.25_f64.powi(tries as i32);
        let Self { grains, gel, balance, .. } = ON_THE_WAY;
        Self {
            grains: share * grains,
            gel: share * gel,
            balance: share * balance,
            steps: 1000 * tries,
            required: false,
        }
    }

    fn is_met(&self, quality: &Quality) -> bool {
        quality.grain_residual <= self.grains
            && quality.gel_residual <= self.gel
            && quality.bead_balance <= self.balance
    }
}

/// Takes a pack from dry to joint equilibrium of grains, lid and beads.
pub(crate) fn march(
    scene: &Scene,
    gel: &Gel,
    bed: DryBed,
    number: u64,
    observer: &mut dyn Observer,
) -> Result<PackOutcome, RunError> {
    let watch = Watch { scene, gel, number, height_before: bed.height };
    show_dry_bed(&watch, &bed, observer)?;
    let mut march = March::new(scene, &bed, gel);
    let ramp = Ramp { gel, start: bed.stretch.min(gel.free_stretch()), count: scene.march.increments };
    let beads = march.bodies.beads.iter().map(Relaxation::bead);
    let mut tearing =
        Tearing::new(scene, gel, number, beads).map_err(|reason| RunError::March { increment: 1, reason })?;
    let mut history = Vec::with_capacity(ramp.count);
    for increment in 1..=ramp.count {
        let at = |reason| RunError::March { increment, reason };
        let stage = march.grow(&ramp, increment).map_err(at)?;
        if let Some(tearing) = &mut tearing {
            march.tear(&watch, &ramp, increment, tearing).map_err(at)?;
        }
        let seen = watch.see_drained(&stage, &march.bodies.beads);
        let mut step =
            watch.step((increment, stage.free_stretch()), &seen, &march.bodies.grains, march.quality(&stage));
        if let Some(tearing) = &mut tearing {
            tearing.record(march.bodies.beads.iter().map(Relaxation::bead));
            step.tear_probability = tearing.whole_mean(increment).unwrap_or(step.tear_probability);
        }
        history.push(step);
        let mut onwards = observer.step(&step, ramp.count);
        if observer.looks() && onwards.is_continue() {
            onwards = observer.look(march.snapshot(scene, number, &seen, step));
        }
        if onwards.is_break() {
            return Err(RunError::Stopped { increment });
        }
    }
    let seen = watch.see_drained(gel, &march.bodies.beads);
    let outcome = march.outcome(&watch, bed, &seen, march.quality(gel), history);
    Ok(match tearing {
        None => outcome,
        Some(tearing) => tearing.tell(outcome, ramp.moment(ramp.count)),
    })
}

/// How the gel's free stretch rises from increment to increment.
pub(super) struct Ramp<'a> {
    gel: &'a Gel,
    start: f64,
    pub(super) count: usize,
}

impl Ramp<'_> {
    /// Free stretch at an increment.
    fn stretch(&self, increment: usize) -> f64 {
        self.start * (self.gel.free_stretch() / self.start).powf(increment as f64 / self.count as f64)
    }

    /// Steps that lead from the increment before to this one: the square of the stretch rises
    /// evenly, so that beads slow down as they come to shoulder grains aside. A bed lags behind
    /// what swells faster; thrown about, it makes more room than it does where it is led.
    fn steps(&self, increment: usize) -> usize {
        let square = |stretch: f64| stretch * stretch;
        let (from, to) = (self.stretch(increment - 1), self.stretch(increment));
        let whole = square(self.gel.free_stretch()) - square(self.start);
        let share = (square(to) - square(from)) / whole.max(f64::MIN_POSITIVE);
        let even = (share * (RAMP_STEPS * self.count) as f64).ceil();
        even.max(((to / from).ln() / FASTEST_GROWTH).ceil()).max(1.0) as usize
    }

    /// The gel at an increment.
    pub(super) fn stage(&self, increment: usize) -> Gel {
        if increment == self.count { *self.gel } else { self.gel.limited_to(self.stretch(increment)) }
    }

    pub(super) fn moment(&self, increment: usize) -> Moment {
        Moment { increment, free_stretch: self.stage(increment).free_stretch(), time_s: 0.0 }
    }
}

/// Shows the observer the grains' contacts before anything swells.
pub(super) fn show_dry_bed(
    watch: &Watch<'_>,
    bed: &DryBed,
    observer: &mut dyn Observer,
) -> Result<(), RunError> {
    if !observer.looks() {
        return Ok(());
    }
    let Watch { scene, gel, number, .. } = *watch;
    let mut dry = March::new(scene, bed, gel);
    dry.bodies.grains.compute_contacts();
    let stage = gel.limited_to(bed.stretch.min(gel.free_stretch()));
    let seen = watch.see_drained(&stage, &dry.bodies.beads);
    let step = watch.step((0, stage.free_stretch()), &seen, &dry.bodies.grains, Quality::default());
    let state =
        State { time_s: scene.time.as_ref().map(|_| 0.0), ..dry.snapshot(scene, number, &seen, step) };
    match observer.look(state) {
        ControlFlow::Continue(()) => Ok(()),
        ControlFlow::Break(()) => Err(RunError::Stopped { increment: 0 }),
    }
}

/// The bodies of a pack on their way.
#[derive(Clone)]
pub(super) struct March {
    pub(super) bodies: Bodies,
    /// The beads' centres are held.
    pub(super) hold_beads: bool,
    pub(super) pot: Option<Pot>,
}

impl March {
    pub(super) fn new(scene: &Scene, bed: &DryBed, gel: &Gel) -> Self {
        let lattice = Arc::new(Lattice::new(scene.beads.across_for(bed.beads.len())));
        let radius = 0.5 * scene.beads.dry_diameter;
        let stretch = bed.stretch.min(gel.free_stretch());
        let bead =
            |centre: &Vector| Relaxation::new(Bead::new(Arc::clone(&lattice), radius, *centre, stretch));
        let beads = bed.beads.iter().map(bead).collect();
        let bodies = Bodies::new(bed.grains.clone(), beads, scene.march.damping);
        let mut march = Self { bodies, hold_beads: scene.beads.held, pot: Pot::of(scene) };
        march.weigh();
        march
    }

    /// Grows the beads by one increment and brings everything to rest. Returns their gel.
    pub(super) fn grow(&mut self, ramp: &Ramp<'_>, increment: usize) -> Result<Gel, String> {
        let growth = ramp.stretch(increment) / ramp.stretch(increment - 1);
        let (stage, last) = (ramp.stage(increment), increment == ramp.count);
        if !self.hold_still(&stage, growth, last) {
            self.swell(ramp, increment);
            let target = if last { self.at_the_end() } else { ON_THE_WAY };
            self.rest(&stage, target)?;
        }
        measure::guard(&self.bodies)?;
        Ok(stage)
    }

    /// Brings everything to rest where the beads do not grow.
    pub(super) fn rest_again(&mut self, gel: &Gel, last: bool) -> Result<(), String> {
        if self.hold_still(gel, 1.0, last) {
            return Ok(());
        }
        let target = if last { self.at_the_end() } else { AFTER_RUPTURE };
        self.rest(gel, target)
    }

    /// Gives every bead in a pot the weight that goes with what it holds now.
    pub(super) fn weigh(&mut self) {
        let Some(pot) = self.pot else { return };
        self.bodies.beads.iter_mut().for_each(|bead| bead.set_weight(pot.bead_weight(bead.bead())));
    }

    /// What came of a pack whose march has ended.
    pub(super) fn outcome(
        &self,
        watch: &Watch<'_>,
        bed: DryBed,
        beads: &[Seen<'_>],
        quality: Quality,
        history: Vec<Step>,
    ) -> PackOutcome {
        let Watch { scene, number, .. } = *watch;
        let grains = &self.bodies.grains;
        let contents = Contents::of(&self.bodies);
        let after = grains.centres.iter();
        let positions = (bed.spheres.iter().zip(after))
            .map(|(grain, after)| GrainRecord {
                diameter_m: 2.0 * grain.radius,
                before_m: grain.centre.into(),
                after_m: (grain.centre + grains.cell.separation(&grain.centre, after)).into(),
            })
            .collect();
        let mut before = bed.grains;
        before.compute_contacts();
        PackOutcome {
            pack: number,
            grains: bed.spheres.len(),
            porosity: bed.porosity,
            fines_left_out: bed.fines_left_out,
            heave_m: contents.height - watch.height_before,
            heave_strain: contents.height / watch.height_before - 1.0,
            beads_out: contents.beads_out,
            water_l_per_m3: contents.water_l_per_m3(),
            porosity_left: contents.porosity_left(),
            overburden_pa: scene.bed.lid_stress,
            lid_stress_pa: grains.boundary().lid.z / grains.section(),
            contact_number: grains.contact_number(),
            forces_before: measure::forces(&before),
            forces_after: measure::forces(grains),
            across: self.bodies.beads.first().map_or(0, |bead| bead.bead().lattice().across()),
            across_asked: scene.beads.across,
            chosen_overlap: scene.march.overlap,
            beads: watch.beads(beads),
            tensions: beads.iter().map(|seen| seen.tension.clone()).collect(),
            quality,
            history,
            positions,
            timing: None,
            tears: None,
        }
    }

    /// A single bead among grains that stay where they are needs no march: Newton
    /// steps find its equilibrium. Where they do not, nothing is changed.
    fn hold_still(&mut self, gel: &Gel, growth: f64, last: bool) -> bool {
        let Bodies { grains, beads, around, .. } = &mut self.bodies;
        let ([bead], [around]) = (&mut beads[..], &mut around[..]) else { return false };
        if !grains.held {
            return false;
        }
        let mut grown = bead.clone();
        if !grown.touches() {
            grown.grow(growth);
        }
        around.extend(&grown, grains, 0.5 * grown.bead().extent());
        let tolerance = if last {
            Tolerance { held: self.hold_beads, ..Tolerance::default() }
        } else {
            Tolerance { residual: 1e-3, corrections: 0, held: self.hold_beads }
        };
        let settled = grown.settle(gel, &around.obstacles, tolerance).is_ok() && !grown.is_folded();
        if settled {
            *bead = grown;
        }
        settled
    }

    /// Raises the free stretch by one increment.
    fn swell(&mut self, ramp: &Ramp<'_>, increment: usize) {
        let (from, to) = (ramp.stretch(increment - 1), ramp.stretch(increment));
        let mut steps = ramp.steps(increment);
        if self.bodies.grains.radii.is_empty() {
            steps = steps.max(((to / from).ln() / GROWTH_OF_BED).ceil() as usize);
        }
        let growth = (to / from).powf(1.0 / steps as f64);
        let mut stretch = from;
        for _ in 0..steps {
            stretch *= growth;
            let stage = ramp.gel.limited_to(stretch);
            self.bodies.beads.iter_mut().for_each(|bead| bead.grow(growth));
            self.bodies.step(&stage);
        }
    }

    /// When the last state counts as at rest.
    pub(super) fn at_the_end(&self) -> Target {
        if self.bodies.grains.radii.is_empty() { AT_THE_END_ALONE } else { AT_THE_END }
    }

    /// Steps until grains, lid and beads are at rest.
    pub(super) fn rest(&mut self, gel: &Gel, target: Target) -> Result<(), String> {
        let outcome = self.come_to(gel, target);
        self.bodies.grains.drag = 0.0;
        outcome
    }

    fn come_to(&mut self, gel: &Gel, target: Target) -> Result<(), String> {
        self.weigh();
        let (mut before, mut lately, mut is_unchanging) = (None, None, false);
        let longest = if target.required { target.steps + LAST_STEPS } else { target.steps };
        for step in 0..longest {
            self.bodies.compute_forces(gel);
            if target.required && step % CALM.0 == 0 {
                let now = self.size();
                let is_calm = lately.is_some_and(|lately| change(lately, now) <= CALM.1);
                self.bodies.grains.drag = if is_calm { LATE_DRAG } else { 0.0 };
                lately = Some(now);
            }
            if step % LOOK == 0 {
                let quality = self.rest_quality(gel);
                let is_tolerable = target.required && TOLERABLE.is_met(&quality);
                let will_do = step >= target.steps || (step >= PATIENCE && is_unchanging);
                if target.is_met(&quality) || (is_tolerable && will_do) {
                    return Ok(());
                }
                if target.required && step % UNCHANGING.steps == 0 {
                    let now = self.size();
                    is_unchanging = before.is_some_and(|before| change(before, now) <= CHANGE);
                    if UNCHANGING.is_met(&quality) && is_unchanging {
                        return Ok(());
                    }
                    before = Some(now);
                }
            }
            self.bodies.advance();
        }
        if !target.required {
            return Ok(());
        }
        let quality = self.rest_quality(gel);
        Err(format!(
            "no joint equilibrium after {} steps: net force on grain {} {:.1e} of the mean contact force (allowed {:.0e}), in the gel of bead {} {:.1e} (allowed {:.0e}), on a bead {:.1e} (allowed {:.0e}); take more increments",
            longest,
            self.bodies.grains.rest().worst,
            quality.grain_residual,
            TOLERABLE.grains,
            self.least_at_rest(gel),
            quality.gel_residual,
            TOLERABLE.gel,
            quality.bead_balance,
            TOLERABLE.balance
        ))
    }

    /// Height of the lid (m) and volume of the gel (m³).
    fn size(&self) -> [f64; 2] {
        let volume = self.bodies.beads.iter().map(|bead| bead.bead().volume()).sum();
        [self.bodies.grains.cell.size.z, volume]
    }

    /// The bead whose gel is furthest from rest.
    fn least_at_rest(&self, gel: &Gel) -> usize {
        let residual = |bead: &usize| self.bodies.beads[*bead].residual(gel);
        (0..self.bodies.beads.len()).max_by(|a, b| residual(a).total_cmp(&residual(b))).unwrap_or(0)
    }

    /// How well the state is at rest, after its forces are computed.
    fn rest_quality(&self, gel: &Gel) -> Quality {
        let rest = self.bodies.grains.rest();
        let worst =
            |value: &dyn Fn(&Relaxation) -> f64| self.bodies.beads.iter().map(value).fold(0.0, f64::max);
        let held = self.bodies.grains.held;
        Quality {
            grain_residual: if held { 0.0 } else { rest.residual().max(rest.lid_unbalance) },
            gel_residual: worst(&|bead| bead.residual(gel)),
            bead_balance: worst(&|bead| bead.balance(gel)),
            swallowed: 0.0,
            overlap: rest.deepest_overlap,
        }
    }

    pub(super) fn quality(&self, gel: &Gel) -> Quality {
        Quality { swallowed: measure::swallowed(&self.bodies), ..self.rest_quality(gel) }
    }
}

/// Largest change of a size, of itself.
fn change(before: [f64; 2], now: [f64; 2]) -> f64 {
    before.iter().zip(&now).map(|(before, now)| (now / before - 1.0).abs()).fold(0.0, f64::max)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The work that swelling gel does on grains and lid lifts the lid's load, is stored in
    /// contacts, or is lost by friction and by the march's damping; each is measured by itself.
    #[test]
    fn the_work_of_swelling_is_accounted_for() {
        let scenes = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes");
        let mut scene = crate::read_scene(&scenes.join("tree-pit.toml")).unwrap();
        scene.bed.grains = 150;
        scene.beads.across = 8;
        let gel = scene.swelling_gel();
        let shear = gel.moduli().shear;
        for ratio in [0.05, 0.5] {
            scene.bed.lid_stress = ratio * shear;
            let bed = DryBed::build(&scene, 0, scene.bed.lid_stress.max(0.05 * shear)).unwrap();
            let mut march = March::new(&scene, &bed, &gel);
            march.bodies.grains.compute_contacts();
            march.bodies.grains.start_account();
            let ramp = Ramp { gel: &gel, start: bed.stretch, count: 12 };
            for increment in 1..=ramp.count {
                march.swell(&ramp, increment);
                march.rest(&ramp.stage(increment), ON_THE_WAY).unwrap();
            }
            march.rest(&gel, Target { steps: 2_000, required: false, ..AT_THE_END }).unwrap();
            let account = march.bodies.grains.account().unwrap();
            assert!(account.loads > 0.0 && account.lifted > 0.1 * account.loads, "{account:?}");
            assert!(account.friction > 0.0, "{account:?}");
            assert!(account.gap().abs() < 1e-3 * account.loads, "{ratio}: {account:?}");
        }
    }

    /// Contacts are looked for when something has come far enough, each on a schedule of its
    /// own: what then presses is what a look at everything finds.
    #[test]
    fn no_contact_is_missed_between_looks() {
        let scenes = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes");
        let mut scene = crate::read_scene(&scenes.join("tree-pit.toml")).unwrap();
        scene.bed.grains = 120;
        scene.beads.amount = crate::BeadAmount::Count(12);
        scene.beads.across = 8;
        let gel = scene.swelling_gel();
        let bed = DryBed::build(&scene, 0, 0.05 * gel.moduli().shear).unwrap();
        let mut march = March::new(&scene, &bed, &gel);
        let ramp = Ramp { gel: &gel, start: bed.stretch, count: 10 };
        let (mut touching, mut furthest) = (0, 0.0_f64);
        for increment in 1..=ramp.count {
            march.swell(&ramp, increment);
            let stage = ramp.stage(increment);
            march.bodies.compute_forces(&stage);
            let known = march.bodies.weighed_anew(&stage);
            let mut fresh = known.clone();
            fresh.renew(fresh.beads.iter().map(|bead| Relaxation::new(bead.bead().clone())).collect());
            fresh.compute_forces(&stage);
            for (bead, anew) in known.beads.iter().zip(&fresh.beads) {
                let largest = anew.largest_contact_force();
                let loads = bead.loads().iter().copied().chain(std::iter::repeat(Default::default()));
                for (load, anew) in loads.zip(anew.loads()) {
                    furthest = furthest.max((load.force - anew.force).norm() / largest);
                }
            }
            let known_reach = known.reach(&stage);
            for pair in &fresh.pairs {
                let same = known.pairs.iter().filter(|known| known.is_same(pair, known_reach));
                let force: Vector = same.map(|pair| pair.force).sum();
                let largest = fresh.beads[pair.first].largest_contact_force();
                furthest = furthest.max((force - pair.force).norm() / largest);
                touching += usize::from(pair.force.norm() > 0.1 * largest);
            }
        }
        // Slopes at which beads meet are those of the last search: forces differ by 0.03.
        assert!(touching > 50 && furthest < 0.1, "{touching} {furthest}");
    }
}
