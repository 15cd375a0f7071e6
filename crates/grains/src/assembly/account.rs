use super::Assembly;
use super::spring::rolling_stiffness;
use crate::contact_law::ContactLaw;
use bedswell_geometry::{Vector, offset};

/// Where the work of loads on grains and lid went since
/// [`start_account`](Assembly::start_account), all in J.
///
/// Each entry is measured on its own: loads, lifting and damping from forces and the
/// mean velocity before and after each step, friction from the slip of each spring,
/// and what is stored from the springs' state. That they balance is therefore a check,
/// exact for [`Normal::Linear`](crate::Normal::Linear) up to the length of a step. (With
/// Hertz contacts the tangential stiffness follows the push, and what that does to the
/// springs' energy is no one's work.)
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct WorkAccount {
    /// Work done by [`add_load`](Assembly::add_load) and
    /// [`add_lid_load`](Assembly::add_lid_load).
    pub loads: f64,
    /// Elastic energy gained by the contacts: pushes, tangential and rolling springs.
    pub stored: f64,
    /// Work against the lid's stress and against the grains' weights.
    pub lifted: f64,
    /// Lost where contacts slip or yield in rolling.
    pub friction: f64,
    /// Taken out of the motion by the march's damping and the contacts' dashpots, with what
    /// its fictitious masses hold (the work of the net forces), and where contacts close and open between
    /// steps.
    pub damping: f64,
}

impl WorkAccount {
    /// What the entries miss (J): zero when the account balances.
    pub fn gap(&self) -> f64 {
        self.loads - self.stored - self.lifted - self.friction - self.damping
    }
}

impl Assembly {
    /// Begins to keep account of work, after a
    /// [`compute_contacts`](Self::compute_contacts) and from rest. Changing the law or
    /// taking grains out is no work and spoils the account.
    pub fn start_account(&mut self) {
        let count = self.radii.len();
        self.ledger = Some(Box::new(Ledger {
            sums: WorkAccount::default(),
            stored_at_start: self.stored_energy(),
            forces: vec![Vector::zeros(); count],
            torques: vec![Vector::zeros(); count],
            lid_force: 0.0,
            dashes: vec![Vector::zeros(); count],
            lid_dash: 0.0,
        }));
    }

    /// The account up to the last [`compute_contacts`](Self::compute_contacts); `None`
    /// where none was started.
    pub fn account(&self) -> Option<WorkAccount> {
        let ledger = self.ledger.as_ref()?;
        Some(WorkAccount { stored: self.stored_energy() - ledger.stored_at_start, ..ledger.sums })
    }

    /// Elastic energy (J) of all contacts at the last
    /// [`compute_contacts`](Self::compute_contacts).
    pub fn stored_energy(&self) -> f64 {
        let pairs = (self.contacts.pairs.iter().enumerate())
            .filter(|(_, pair)| pair.contact.force > 0.0)
            .map(|(index, pair)| {
                let (a, b) = (pair.a as usize, pair.b as usize);
                let reach = self.radii[a] + self.radii[b];
                let apart = self.centres[b] + offset(&self.cell, pair.image) - self.centres[a];
                let bend = self.contacts.bends.get(index).copied().unwrap_or_default();
                self.energy_of(
                    [pair.contact.slide, bend],
                    reach - apart.norm(),
                    self.radii[a] * self.radii[b] / reach,
                )
            });
        let plates = self.contacts.plates.iter().filter(|touch| touch.contact.force > 0.0).map(|touch| {
            let grain = touch.grain as usize;
            let (centre, radius) = (self.centres[grain], self.radii[grain]);
            let (gap, _) = touch.plate.facing(&self.cell, self.wall, &centre, radius);
            self.energy_of([touch.contact.slide, touch.bend], -gap, radius)
        });
        pairs.chain(plates).sum()
    }

    /// Energy (J) of a contact whose tangential and rolling springs are stretched as given.
    fn energy_of(&self, [slide, bend]: [Vector; 2], overlap: f64, reduced_radius: f64) -> f64 {
        let law = &self.law;
        let (_, stiffness) = law.normal.push(overlap, reduced_radius);
        law.normal.energy(overlap, reduced_radius)
            + 0.5 * law.tangential_ratio * stiffness * slide.norm_squared()
            + 0.5 * rolling_stiffness(law, stiffness, reduced_radius) * bend.norm_squared()
    }
}

/// The running sums of an account.
#[derive(Clone, Debug)]
pub(super) struct Ledger {
    sums: WorkAccount,
    stored_at_start: f64,
    /// Loads added since the last `compute_contacts`.
    pub(super) forces: Vec<Vector>,
    pub(super) torques: Vec<Vector>,
    pub(super) lid_force: f64,
    /// Forces of dashpots since the last `compute_contacts`.
    dashes: Vec<Vector>,
    pub(super) lid_dash: f64,
}

impl Ledger {
    /// Forgets the loads of the last step.
    pub(super) fn clear_loads(&mut self) {
        self.forces.fill(Vector::zeros());
        self.torques.fill(Vector::zeros());
        self.lid_force = 0.0;
        self.dashes.fill(Vector::zeros());
        self.lid_dash = 0.0;
    }

    /// Notes the force (N) of a dashpot on a grain.
    pub(super) fn dash(&mut self, grain: usize, force: Vector) {
        self.dashes[grain] += force;
    }

    /// Books what a spring lost by slipping, its mean force times its slip, while its ends
    /// moved by `by` and its stretch went from `before` to `after` (m or rad).
    pub(super) fn slip(&mut self, stiffness: f64, before: Vector, by: Vector, after: Vector) {
        self.sums.friction += stiffness * 0.5 * (before + after).dot(&(before + by - after));
    }

    /// Books what the tangential and rolling springs of a contact lose that has parted in
    /// the last step.
    pub(super) fn part(
        &mut self,
        law: &ContactLaw,
        [slide, bend]: [Vector; 2],
        [moved, turned]: [Vector; 2],
        reduced_radius: f64,
    ) {
        let (_, stiffness) = law.normal.push(0.0, reduced_radius);
        self.slip(law.tangential_ratio * stiffness, slide, moved, Vector::zeros());
        self.slip(rolling_stiffness(law, stiffness, reduced_radius), bend, turned, Vector::zeros());
    }

    /// Books a contact that closed within the last step, after `gap` (m) without force:
    /// the step's mean force acted over the gap too. Damping, to the march.
    pub(super) fn close(&mut self, push: f64, gap: f64) {
        self.sums.damping += 0.5 * push * gap;
    }

    /// Books a contact that opened in the last step, from `push` (N) to a `gap` (m): its
    /// mean force went on to act over the gap.
    pub(super) fn open(&mut self, push: f64, gap: f64) {
        self.sums.damping -= 0.5 * push * gap;
    }

    /// Books a step, from the velocities of grains, spins and lid before it.
    pub(super) fn step(
        &mut self,
        grains: &Assembly,
        (velocities, spins, lid_velocity): &(Vec<Vector>, Vec<Vector>, f64),
    ) {
        let sums = &mut self.sums;
        for grain in 0..velocities.len() {
            let velocity = 0.5 * (velocities[grain] + grains.velocities[grain]);
            let spin = 0.5 * (spins[grain] + grains.spins[grain]);
            sums.loads += self.forces[grain].dot(&velocity) + self.torques[grain].dot(&spin);
            sums.lifted -= grains.weights[grain].dot(&velocity);
            let net = grains.forces[grain] - self.dashes[grain];
            sums.damping += net.dot(&velocity) + grains.torques[grain].dot(&spin);
        }
        let lid_velocity = 0.5 * (lid_velocity + grains.lid_state.velocity);
        sums.loads += self.lid_force * lid_velocity;
        sums.lifted += grains.lid_load() * lid_velocity;
        sums.damping += (grains.lid_state.force - self.lid_dash) * lid_velocity;
    }
}
