use super::bed::DryBed;
use super::measure::{self, Watch};
use super::neighbourhood::Neighbourhood;
use crate::{GrainRecord, Observer, PackOutcome, Quality, RunError, Scene};
use bedswell_gel::{Bead, BeadContact, Gel, Lattice, Relaxation, Tolerance};
use bedswell_geometry::Vector;
use bedswell_grains::Assembly;
use std::sync::Arc;

/// Stretch at which the march starts. The mixing energy ends at the dry state, and
/// a nearly dry gel is as hard as the grains' contacts.
pub(super) const FIRST_STRETCH: f64 = 1.25;
/// Steps over which the free stretch rises by one increment.
const RAMP_STEPS: usize = 60;
/// Share of each force component on grains and lid that is turned against the motion.
/// Little of it lets slow rearrangements come to their end soonest.
pub(super) const DAMPING: f64 = 0.2;
/// The same on the gel's nodes.
const GEL_DAMPING: f64 = 0.4;
/// Steps between looks at the residuals.
const LOOK: usize = 10;
/// Skin points within this many swollen voxel edges of an obstacle are followed.
const REACH: f64 = 0.2;
/// Largest residual (grains, gel) of a recorded state on the way.
const ON_THE_WAY: Target = Target { grains: 1e-2, gel: 3e-3, balance: 3e-3, steps: 200, required: false };
/// The same of the end state.
const AT_THE_END: Target = Target { grains: 1e-4, gel: 1e-4, balance: 1e-5, steps: 60_000, required: true };
/// What an end state may be left with when a grain keeps creeping: to give such packs up
/// would favour the others. The residuals stand in the results.
const TOLERABLE: Target = Target { grains: 1e-2, gel: 1e-3, balance: 1e-3, steps: 0, required: true };

/// When a state counts as at rest.
#[derive(Clone, Copy, Debug)]
struct Target {
    grains: f64,
    gel: f64,
    balance: f64,
    /// Steps after which the search is given up.
    steps: usize,
    /// Giving up is a failure; otherwise the march goes on from where it is.
    required: bool,
}

/// Takes a pack from dry to joint equilibrium of grains, lid and beads.
pub(crate) fn march(
    scene: &Scene,
    gel: &Gel,
    bed: DryBed,
    number: u64,
    observer: &mut dyn Observer,
) -> Result<PackOutcome, RunError> {
    let before = &bed.spheres;
    let mut march = March::new(scene, &bed, gel);
    let watch = Watch { scene, gel, number, lid_before: bed.lid };
    let free = gel.free_stretch();
    let start = bed.stretch.min(free);
    let count = scene.march.increments;
    let mut history = Vec::with_capacity(count);
    let mut stretch = start;
    if observer.looks() {
        // The grains' contacts before anything swells, without touching the march.
        let mut dry = March { grains: march.grains.clone(), ..March::new(scene, &bed, gel) };
        dry.grains.compute_contacts();
        let stage = gel.limited_to(start);
        let step = watch.step(0, &stage, &dry.beads, &dry.grains, Quality::default());
        if observer.look(dry.snapshot(scene, number, &stage, step)).is_break() {
            return Err(RunError::Stopped { increment: 0 });
        }
    }
    for increment in 1..=count {
        let next = start * (free / start).powf(increment as f64 / count as f64);
        let stage = if increment == count { *gel } else { gel.limited_to(next) };
        let settled = march.hold_still(&stage, next / stretch, increment == count) || {
            march.swell(gel, stretch, next);
            false
        };
        stretch = next;
        if !settled {
            let target = if increment == count { AT_THE_END } else { ON_THE_WAY };
            march.rest(&stage, target).map_err(|reason| RunError::March { increment, reason })?;
        }
        measure::guard(&march).map_err(|reason| RunError::March { increment, reason })?;
        let step = watch.step(increment, &stage, &march.beads, &march.grains, march.quality(&stage));
        history.push(step);
        let mut onwards = observer.step(&step, count);
        if observer.looks() && onwards.is_continue() {
            onwards = observer.look(march.snapshot(scene, number, &stage, step));
        }
        if onwards.is_break() {
            return Err(RunError::Stopped { increment });
        }
    }
    let after = march.grains.centres.iter();
    let positions = before
        .iter()
        .zip(after)
        .map(|(grain, after)| GrainRecord {
            diameter_m: 2.0 * grain.radius,
            before_m: grain.centre.into(),
            after_m: (grain.centre + march.grains.cell.separation(&grain.centre, after)).into(),
        })
        .collect();
    Ok(PackOutcome {
        pack: number,
        grains: before.len(),
        porosity: bed.porosity,
        fines_left_out: bed.fines_left_out,
        heave_m: march.grains.cell.size.z - watch.lid_before,
        contact_number: march.grains.contact_number(),
        beads: watch.beads(gel, &march.beads, &march.around),
        quality: march.quality(gel),
        history,
        positions,
    })
}

/// Grains and beads in motion.
pub(super) struct March {
    pub(super) grains: Assembly,
    pub(super) beads: Vec<Relaxation>,
    pub(super) around: Vec<Neighbourhood>,
    /// Pairs of beads that may touch, with the image of the second seen by the first.
    pub(super) pairs: Vec<Pair>,
    /// The beads' centres are held.
    hold_beads: bool,
    /// Distance moved since contacts were last looked for (m).
    travel: f64,
    /// Travel when contacts between beads were last measured (m).
    measured: f64,
}

/// Two beads that may touch.
pub(super) struct Pair {
    pub(super) first: usize,
    pub(super) second: usize,
    /// Shift of the second to the image that the first sees (m).
    shift: Vector,
    pub(super) contact: BeadContact,
    /// Force on the first (N).
    pub(super) force: Vector,
}

impl March {
    fn new(scene: &Scene, bed: &DryBed, gel: &Gel) -> Self {
        let lattice = Arc::new(Lattice::new(scene.beads.across));
        let radius = 0.5 * scene.beads.dry_diameter;
        let stretch = bed.stretch.min(gel.free_stretch());
        let bead =
            |centre: &Vector| Relaxation::new(Bead::new(Arc::clone(&lattice), radius, *centre, stretch));
        Self {
            grains: bed.grains.clone(),
            beads: bed.beads.iter().map(bead).collect(),
            around: vec![Neighbourhood::default(); bed.beads.len()],
            travel: f64::INFINITY,
            measured: 0.0,
            pairs: Vec::new(),
            hold_beads: scene.beads.held,
        }
    }

    /// A single bead among grains that stay where they are needs no march: Newton
    /// steps find its equilibrium. Where they do not, nothing is changed.
    fn hold_still(&mut self, gel: &Gel, growth: f64, last: bool) -> bool {
        let ([bead], [around]) = (&mut self.beads[..], &mut self.around[..]) else { return false };
        if !self.grains.held {
            return false;
        }
        let mut grown = bead.clone();
        if !grown.touches() {
            grown.grow(growth);
        }
        around.extend(&grown, &self.grains, 0.5 * grown.extent());
        let tolerance = if last {
            Tolerance { held: self.hold_beads, ..Tolerance::default() }
        } else {
            Tolerance { residual: 1e-3, corrections: 0, held: self.hold_beads }
        };
        let settled = grown.settle(gel, &around.obstacles, tolerance).is_ok() && grown.folded_volume() == 0.0;
        if settled {
            *bead = grown;
            self.travel = f64::INFINITY;
        }
        settled
    }

    /// Raises the free stretch from one value to the next.
    fn swell(&mut self, gel: &Gel, from: f64, to: f64) {
        let growth = (to / from).powf(1.0 / RAMP_STEPS as f64);
        let mut stretch = from;
        for _ in 0..RAMP_STEPS {
            stretch *= growth;
            let stage = gel.limited_to(stretch);
            for bead in &mut self.beads {
                bead.grow(growth);
                self.travel += (growth - 1.0) * bead.extent();
            }
            self.step(&stage);
        }
        // The last stretch is not a product of rounded factors.
        self.travel = f64::INFINITY;
    }

    /// Steps until grains, lid and beads are at rest.
    fn rest(&mut self, gel: &Gel, target: Target) -> Result<(), String> {
        for step in 0..target.steps {
            self.forces(gel);
            if step % LOOK == 0 {
                let quality = self.rest_quality(gel);
                if quality.grain_residual <= target.grains
                    && quality.gel_residual <= target.gel
                    && quality.bead_balance <= target.balance
                {
                    return Ok(());
                }
                if let Some(bead) = self.beads.iter().position(|bead| bead.smallest_volume_ratio() <= 1.0) {
                    return Err(format!(
                        "a voxel of bead {bead} was pressed out of water; take more increments or a smaller lid stress"
                    ));
                }
            }
            self.advance();
        }
        let quality = self.rest_quality(gel);
        let tolerable = quality.grain_residual < TOLERABLE.grains
            && quality.gel_residual < TOLERABLE.gel
            && quality.bead_balance < TOLERABLE.balance;
        if tolerable || !target.required {
            return Ok(());
        }
        Err(format!(
            "no joint equilibrium after {} steps: net force on a grain {:.1e} of the mean contact force (allowed {:.0e}), in the gel {:.1e} (allowed {:.0e}), on a bead {:.1e} (allowed {:.0e}); take more increments",
            target.steps,
            quality.grain_residual,
            TOLERABLE.grains,
            quality.gel_residual,
            TOLERABLE.gel,
            quality.bead_balance,
            TOLERABLE.balance
        ))
    }

    fn step(&mut self, gel: &Gel) {
        self.forces(gel);
        self.advance();
    }

    fn forces(&mut self, gel: &Gel) {
        let size =
            gel.free_stretch() * self.beads.iter().map(|bead| bead.bead().voxel_edge()).fold(0.0, f64::max);
        let reach = REACH * size;
        if self.travel > 0.5 * reach {
            self.travel = 0.0;
            self.measured = 0.0;
            for (bead, around) in self.beads.iter_mut().zip(&mut self.around) {
                around.extend(bead, &self.grains, 2.0 * reach);
                bead.renew(gel, &around.obstacles, reach);
            }
            self.pair_up(2.0 * reach);
        }
        self.grains.compute_contacts();
        for (bead, around) in self.beads.iter_mut().zip(&mut self.around) {
            around.update(bead, &self.grains);
            let grains = &mut self.grains;
            bead.compute_forces(gel, &around.obstacles, |push| around.pass_on(push, grains));
        }
        let moved = 2.0 * (self.travel - self.measured);
        self.measured = self.travel;
        for Pair { first, second, shift, contact, force } in &mut self.pairs {
            let (before, after) = self.beads.split_at_mut(*second);
            *force = contact.press(&mut before[*first], &mut after[0], *shift, moved);
        }
    }

    /// Finds the beads within `reach` (m) of each other.
    fn pair_up(&mut self, reach: f64) {
        self.pairs.clear();
        let centres: Vec<Vector> = self.beads.iter().map(|bead| bead.bead().centre()).collect();
        for second in 1..self.beads.len() {
            for first in 0..second {
                let apart = self.grains.cell.separation(&centres[first], &centres[second]);
                let (before, after) = self.beads.split_at_mut(second);
                let (one, other) = (&mut before[first], &mut after[0]);
                if apart.norm() > one.extent() + other.extent() + reach {
                    continue;
                }
                let shift = centres[first] + apart - centres[second];
                let contact = BeadContact::find(one, other, shift, reach);
                if !contact.is_empty() {
                    self.pairs.push(Pair { first, second, shift, contact, force: Vector::zeros() });
                }
            }
        }
    }

    fn advance(&mut self) {
        let mut longest = 0.0_f64;
        for bead in &mut self.beads {
            longest = longest.max(bead.advance(GEL_DAMPING));
        }
        self.grains.advance(DAMPING);
        let fastest = self.grains.velocities.iter().map(Vector::norm_squared).fold(0.0, f64::max).sqrt();
        self.travel += 1.8 * longest + fastest;
    }

    /// How well the state is at rest, after `forces`.
    fn rest_quality(&self, gel: &Gel) -> Quality {
        let rest = self.grains.rest();
        let worst = |value: &dyn Fn(&Relaxation) -> f64| self.beads.iter().map(value).fold(0.0, f64::max);
        let moving = !self.grains.held && rest.largest_net_force > 0.0;
        Quality {
            grain_residual: if moving { rest.residual().max(rest.lid_unbalance) } else { 0.0 },
            gel_residual: worst(&|bead| bead.residual(gel)),
            bead_balance: worst(&|bead| bead.balance(gel)),
            swallowed: 0.0,
            overlap: rest.deepest_overlap,
        }
    }

    fn quality(&self, gel: &Gel) -> Quality {
        Quality { swallowed: measure::swallowed(self), ..self.rest_quality(gel) }
    }
}
