//! Contact forces between grains, in shares that threads take up.

use super::Assembly;
use super::account::Ledger;
use super::contact_list::Pair;
use super::spring::{ContactState, roll, rolling_stiffness};
use crate::contact_law::ContactLaw;
use bedswell_geometry::{Cell, Vector, offset};
use rayon::prelude::*;

/// Pairs of a share, at least: fewer are not worth another thread.
const PAIRS_PER_SHARE: usize = 8192;
/// Shares at most: each has sums of its own over all grains.
const MOST_SHARES: usize = 8;

/// What a share of the pairs adds up to.
#[derive(Clone, Debug, Default)]
pub(super) struct Sums {
    forces: Vec<Vector>,
    torques: Vec<Vector>,
    stiffnesses: Vec<f64>,
    force: f64,
    touching: usize,
    deepest: f64,
    /// Work of the pushes per strain of a fully periodic cell (J), and its stiffness.
    virial: f64,
    cell_stiffness: f64,
}

impl Sums {
    fn empty(&mut self, grains: usize) {
        let Self { forces, torques, stiffnesses, .. } = std::mem::take(self);
        *self = Self { forces, torques, stiffnesses, ..Self::default() };
        self.forces.clear();
        self.torques.clear();
        self.stiffnesses.clear();
        self.forces.resize(grains, Vector::zeros());
        self.torques.resize(grains, Vector::zeros());
        self.stiffnesses.resize(grains, 0.0);
    }

    fn add(&mut self, other: &Self) {
        for (sum, more) in self.forces.iter_mut().zip(&other.forces) {
            *sum += more;
        }
        for (sum, more) in self.torques.iter_mut().zip(&other.torques) {
            *sum += more;
        }
        for (sum, more) in self.stiffnesses.iter_mut().zip(&other.stiffnesses) {
            *sum += more;
        }
        self.force += other.force;
        self.touching += other.touching;
        self.deepest = self.deepest.max(other.deepest);
        self.virial += other.virial;
        self.cell_stiffness += other.cell_stiffness;
    }
}

impl Assembly {
    /// Adds the contact forces between grains. Returns the work of the pushes per strain
    /// (J) of a fully periodic cell, which they keep from shrinking.
    ///
    /// How pairs are shared out depends on their number alone, and sums are added in the
    /// order of the shares: the result does not depend on the threads.
    pub(super) fn push_pairs(&mut self) -> f64 {
        let count = self.centres.len();
        let mut pairs = std::mem::take(&mut self.contacts.pairs);
        let mut bends = std::mem::take(&mut self.contacts.bends);
        let mut sums = std::mem::take(&mut self.contacts.sums);
        let mut ledger = self.ledger.take();
        let rolls = self.law.resists_rolling();
        if rolls {
            bends.resize(pairs.len(), Vector::zeros());
        }
        let shares = (pairs.len() / PAIRS_PER_SHARE).clamp(1, MOST_SHARES);
        sums.resize_with(shares, Sums::default);
        let (first, others) = sums.split_first_mut().expect("at least one share");
        others.iter_mut().for_each(|sums| sums.empty(count));
        // The first share adds to what is there already.
        *first = Sums {
            forces: std::mem::take(&mut self.forces),
            torques: std::mem::take(&mut self.torques),
            stiffnesses: std::mem::take(&mut self.stiffnesses),
            ..Sums::default()
        };
        let size = pairs.len().div_ceil(shares).max(1);
        let rolling = bends.chunks_mut(size).map(Some).chain(std::iter::repeat_with(|| None));
        let work = pairs.chunks_mut(size).zip(rolling).zip(&mut sums);
        let state = State::of(self);
        // Without an account there is nothing to book, and nothing to ask in the loop.
        match &mut ledger {
            Some(ledger) => {
                for ((pairs, bends), sums) in work {
                    state.push::<true>(pairs, bends.filter(|_| rolls), sums, Some(ledger));
                }
            }
            None if shares == 1 => {
                for ((pairs, bends), sums) in work {
                    state.push::<false>(pairs, bends.filter(|_| rolls), sums, None);
                }
            }
            None => {
                work.collect::<Vec<_>>().into_par_iter().for_each(|((pairs, bends), sums)| {
                    state.push::<false>(pairs, bends.filter(|_| rolls), sums, None);
                });
            }
        }
        let (first, others) = sums.split_first_mut().expect("at least one share");
        others.iter().for_each(|more| first.add(more));
        self.forces = std::mem::take(&mut first.forces);
        self.torques = std::mem::take(&mut first.torques);
        self.stiffnesses = std::mem::take(&mut first.stiffnesses);
        self.lid_state.stiffness += first.cell_stiffness;
        let virial = first.virial;
        let list = &mut self.contacts;
        list.force_sum += first.force;
        list.touching += first.touching;
        list.deepest = list.deepest.max(first.deepest);
        (list.pairs, list.bends, list.sums) = (pairs, bends, sums);
        self.ledger = ledger;
        virial
    }
}

/// What contacts depend on.
struct State<'a> {
    cell: &'a Cell,
    centres: &'a [Vector],
    radii: &'a [f64],
    velocities: &'a [Vector],
    spins: &'a [Vector],
    law: &'a ContactLaw,
    /// Force per closing speed over stiffness (steps).
    dashpot: f64,
    /// Whether grains have moved since contacts were last computed.
    slip: bool,
}

impl<'a> State<'a> {
    fn of(grains: &'a Assembly) -> Self {
        Self {
            cell: &grains.cell,
            centres: &grains.centres,
            radii: &grains.radii,
            velocities: &grains.velocities,
            spins: &grains.spins,
            law: &grains.law,
            dashpot: grains.contact_damping,
            slip: grains.contacts.slip,
        }
    }

    /// Adds the forces of some pairs to `sums`; `bends` are those of their rolling springs,
    /// if contacts resist rolling.
    fn push<const BOOKED: bool>(
        &self,
        pairs: &mut [Pair],
        mut bends: Option<&mut [Vector]>,
        sums: &mut Sums,
        ledger: Option<&mut Ledger>,
    ) {
        let Self { cell, centres, radii, velocities, spins, law, dashpot, slip } = *self;
        let mut ledger = ledger.filter(|_| BOOKED);
        let (periodic, rough) = (cell.periodic[2], law.friction > 0.0);
        for (index, pair) in pairs.iter_mut().enumerate() {
            let (a, b) = (pair.a as usize, pair.b as usize);
            let mut apart = centres[b] - centres[a];
            if pair.image != [0; 3] {
                apart += offset(cell, pair.image);
            }
            let reach = radii[a] + radii[b];
            let square = apart.norm_squared();
            if square >= reach * reach {
                if pair.contact.force > 0.0 {
                    let bend =
                        bends.as_mut().map_or(Vector::zeros(), |bends| std::mem::take(&mut bends[index]));
                    if let Some(ledger) = &mut ledger {
                        let turns = spins[a] * radii[a] + spins[b] * radii[b];
                        let moved = velocities[b] - velocities[a] - turns.cross(&apart.normalize());
                        let motion = [moved, spins[b] - spins[a]];
                        ledger.part(law, [pair.contact.slide, bend], motion, radii[a] * radii[b] / reach);
                        ledger.open(pair.contact.force, square.sqrt() - reach);
                    }
                    pair.contact = ContactState::default();
                }
                continue;
            }
            let distance = square.sqrt().max(f64::MIN_POSITIVE);
            let normal = apart / distance;
            let overlap = reach - distance;
            let reduced = radii[a] * radii[b] / reach;
            let (push, stiffness) = law.normal.push(overlap, reduced);
            if pair.contact.force == 0.0
                && slip
                && let Some(ledger) = &mut ledger
            {
                ledger.close(push, (velocities[a] - velocities[b]).dot(&normal) - overlap);
            }
            let mut on_b = normal * push;
            if dashpot > 0.0 && slip {
                let closing = (velocities[a] - velocities[b]).dot(&normal);
                // It never holds grains together.
                let drag = normal * (dashpot * stiffness * closing).max(-push);
                on_b += drag;
                if let Some(ledger) = &mut ledger {
                    ledger.dash(a, -drag);
                    ledger.dash(b, drag);
                }
            }
            if rough {
                // Both arms end in one point, so that angular momentum is kept.
                let (arm_a, arm_b) = (radii[a] * distance / reach, radii[b] * distance / reach);
                let moved = if slip {
                    velocities[b] - velocities[a] - (spins[a] * arm_a + spins[b] * arm_b).cross(&normal)
                } else {
                    Vector::zeros()
                };
                let before = pair.contact.slide;
                let drag = pair.contact.rub(law, &normal, moved, push, stiffness);
                on_b -= drag;
                let twist = normal.cross(&drag);
                sums.torques[a] += twist * arm_a;
                sums.torques[b] += twist * arm_b;
                if let Some(ledger) = &mut ledger {
                    ledger.slip(law.tangential_ratio * stiffness, before, moved, pair.contact.slide);
                }
                if let Some(bends) = &mut bends {
                    let turned = if slip { spins[b] - spins[a] } else { Vector::zeros() };
                    let bend = &mut bends[index];
                    let before = *bend;
                    let moment = roll(bend, law, &normal, turned, push, stiffness, reduced);
                    sums.torques[a] += moment;
                    sums.torques[b] -= moment;
                    if let Some(ledger) = &mut ledger {
                        ledger.slip(rolling_stiffness(law, stiffness, reduced), before, turned, *bend);
                    }
                }
            }
            pair.contact.force = push;
            sums.forces[a] -= on_b;
            sums.forces[b] += on_b;
            sums.stiffnesses[a] += stiffness;
            sums.stiffnesses[b] += stiffness;
            sums.force += push;
            sums.touching += 1;
            sums.deepest = sums.deepest.max(overlap / radii[a].min(radii[b]));
            if periodic {
                sums.virial += push * distance;
                sums.cell_stiffness += stiffness * square;
            }
        }
    }
}
