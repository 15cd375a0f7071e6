//! Beads that press on each other.

use super::bodies::{DRIFT, TRUSTED};
use bedswell_gel::{Bead, BeadContact, Pushes, Relaxation};
use bedswell_geometry::{Cell, Vector};
use rayon::prelude::*;

/// Two beads that touch or may come to.
#[derive(Clone, Debug)]
pub(super) struct Pair {
    pub(super) first: usize,
    pub(super) second: usize,
    /// Shift of the second to the image that the first sees (m).
    shift: Vector,
    pub(super) contact: BeadContact,
    /// Force on the first (N).
    pub(super) force: Vector,
    /// Of all points that press (N/m).
    stiffness: f64,
    /// When the places that may touch were found.
    found: Nearness,
    /// When both beads got mass for them.
    weighed: Nearness,
}

/// How two beads once lay to each other.
#[derive(Clone, Copy, Debug)]
struct Nearness {
    /// From the first bead's centre to the second's (m).
    apart: Vector,
    /// By how much their skins may have come nearer (m) before they must be seen to again; less
    /// than nothing where they must.
    allowed: f64,
}

impl Nearness {
    /// Of beads that must be seen to.
    const OVER: Self = Self { apart: Vector::new(0.0, 0.0, 0.0), allowed: f64::NEG_INFINITY };

    /// Notes that it no longer holds if so, with beads that lie `apart` (m) and whose skins have
    /// moved by `ways` (m) besides.
    fn judge(&mut self, apart: &Vector, ways: [f64; 2]) {
        if (apart - self.apart).norm() + ways[0] + ways[1] > self.allowed {
            self.allowed = f64::NEG_INFINITY;
        }
    }

    fn is_over(&self) -> bool {
        self.allowed < 0.0
    }
}

/// What a bead has to do before forces are computed, and by how much its skin has moved, at
/// most and besides its centre (m).
#[derive(Clone, Copy, Debug)]
pub(super) struct Due {
    pub(super) looks: bool,
    pub(super) weighs: bool,
    /// It is not what its contacts were found for.
    pub(super) is_new: bool,
    pub(super) centre: Vector,
    pub(super) way_since_look: f64,
    pub(super) way_since_weighed: f64,
}

/// Distance (m) of a place from the nearest point of a bead's skin.
pub(super) fn nearest_skin(bead: &Bead, place: &Vector) -> f64 {
    let points = 0..bead.lattice().skin_point_count();
    points.map(|point| (bead.skin_point(point) - place).norm()).fold(f64::INFINITY, f64::min)
}

impl Pair {
    /// Two beads of which nothing is known yet.
    fn met([first, second]: [usize; 2], shift: Vector) -> Self {
        Self {
            first,
            second,
            shift,
            contact: BeadContact::default(),
            force: Vector::zeros(),
            stiffness: 0.0,
            found: Nearness::OVER,
            weighed: Nearness::OVER,
        }
    }

    /// Whether it is of the same beads and images, which lie much further apart than `near` (m).
    pub(super) fn is_same(&self, other: &Self, near: f64) -> bool {
        self.ends() == other.ends() && (self.shift - other.shift).norm() < near
    }

    fn ends(&self) -> [usize; 2] {
        [self.first, self.second]
    }

    /// From the first bead's centre to the second's (m).
    fn apart(&self, due: &[Due]) -> Vector {
        due[self.second].centre + self.shift - due[self.first].centre
    }

    /// Finds what may touch.
    fn find(&mut self, beads: &[Relaxation], due: &[Due], reach: f64) {
        let [first, second] = self.ends().map(|bead| &beads[bead]);
        let apart = self.apart(due);
        let slack = apart.norm() - far(beads, self.ends(), reach);
        self.contact = if slack < 0.0 {
            BeadContact::find(first, second, self.shift, 2.0 * reach)
        } else {
            BeadContact::default()
        };
        let ways: f64 = self.ends().iter().map(|&bead| due[bead].way_since_look).sum();
        self.found = Nearness { apart, allowed: 2.0 * TRUSTED * reach + slack.max(0.0) - ways };
        self.weighed = Nearness::OVER;
    }

    /// The other bead, seen from one of the two, and the shift to the image that this one sees
    /// (m).
    pub(super) fn seen_from(&self, bead: usize) -> Option<(usize, Vector)> {
        match bead {
            first if first == self.first => Some((self.second, self.shift)),
            second if second == self.second => Some((self.first, -self.shift)),
            _ => None,
        }
    }
}

/// Adds the forces of touching beads on each other.
pub(super) fn press(pairs: &mut [Pair], beads: &mut [Relaxation]) {
    pairs.par_iter_mut().for_each(|pair| {
        let (first, second) = (&beads[pair.first], &beads[pair.second]);
        let moved = first.last_way() + second.last_way();
        pair.contact.measure(first, second, pair.shift, moved);
        pair.force = pair.contact.force();
        pair.stiffness = pair.contact.stiffness(&Pushes::of(first, second));
    });
    let pressing: Vec<&Pair> = pairs.iter().filter(|pair| pair.stiffness > 0.0).collect();
    beads.par_iter_mut().enumerate().for_each(|(index, bead)| {
        for pair in &pressing {
            if pair.first == index {
                pair.contact.press_first(bead);
                bead.note_contact(pair.force, pair.stiffness);
            }
            if pair.second == index {
                pair.contact.press_second(bead);
                bead.note_contact(-pair.force, pair.stiffness);
            }
        }
    });
}

/// Lets both beads of a pair look or be weighed where they have come too near.
pub(super) fn judge(pairs: &mut [Pair], due: &mut [Due]) {
    for pair in pairs {
        let (apart, ends) = (pair.apart(due), pair.ends());
        pair.found.judge(&apart, ends.map(|bead| due[bead].way_since_look));
        pair.weighed.judge(&apart, ends.map(|bead| due[bead].way_since_weighed));
        for bead in ends {
            due[bead].looks |= pair.found.is_over();
            due[bead].weighs |= pair.found.is_over() || pair.weighed.is_over();
        }
    }
}

/// Finds anew what may touch within twice the `reach` (m) in pairs that have come too near, and
/// gives their beads the mass that this needs until they have come `near` (m) by more. Beads that
/// are `due` have looked and were weighed.
pub(super) fn look(
    pairs: &mut Vec<Pair>,
    beads: &mut [Relaxation],
    cell: &Cell,
    due: &mut [Due],
    [reach, near]: [f64; 2],
) {
    pairs.retain(|pair| !pair.ends().iter().any(|&bead| due[bead].is_new));
    for pair in pairs.iter_mut() {
        for bead in pair.ends() {
            let Due { looks, weighs, way_since_look, way_since_weighed, .. } = due[bead];
            pair.found.allowed -= if looks { way_since_look } else { 0.0 };
            pair.weighed.allowed -= if weighs { way_since_weighed } else { 0.0 };
        }
    }
    due.iter_mut().filter(|due| due.looks).for_each(|due| due.way_since_look = 0.0);
    due.iter_mut().filter(|due| due.weighs).for_each(|due| due.way_since_weighed = 0.0);
    meet(pairs, beads, cell, due, reach);
    let over = pairs.par_iter_mut().filter(|pair| pair.found.is_over());
    over.for_each(|pair| pair.find(beads, due, reach));
    weigh(pairs, beads, due, near);
}

/// Adds the pairs with a bead that looked that may come to touch before it looks again, and
/// leaves out those that will not.
fn meet(pairs: &mut Vec<Pair>, beads: &[Relaxation], cell: &Cell, due: &[Due], reach: f64) {
    let watched = |[first, second]: [usize; 2]| far(beads, [first, second], reach) + 3.0 * DRIFT * reach;
    let looks = |ends: [usize; 2]| ends.iter().any(|&bead| due[bead].looks);
    pairs.retain(|pair| !looks(pair.ends()) || pair.apart(due).norm() < watched(pair.ends()));
    let known = pairs.len();
    for second in 1..beads.len() {
        for first in (0..second).filter(|&first| looks([first, second])) {
            let [one, other] = [first, second].map(|bead| due[bead].centre);
            let watched = watched([first, second]);
            let start = pairs[..known].partition_point(|pair| pair.ends() < [first, second]);
            cell.for_each_image(&one, &other, watched, |apart| {
                let met = Pair::met([first, second], one + apart - other);
                let mut same = pairs[start..known].iter().take_while(|pair| pair.ends() == met.ends());
                if apart.norm() < watched && !same.any(|pair| pair.is_same(&met, reach)) {
                    pairs.push(met);
                }
            });
        }
    }
    pairs.sort_by_key(Pair::ends);
}

/// Distance (m) of the centres of two beads beyond which nothing of them can be in reach. Their
/// extents are those of each bead's last look; skins have moved by less than `reach` since.
fn far(beads: &[Relaxation], [first, second]: [usize; 2], reach: f64) -> f64 {
    beads[first].extent() + beads[second].extent() + 4.0 * reach
}

/// Gives the beads of pairs that came too near the mass that contacts need until they have come
/// `near` (m) by more.
fn weigh(pairs: &mut [Pair], beads: &mut [Relaxation], due: &[Due], near: f64) {
    let mut renewed: Vec<bool> = due.iter().map(|due| due.is_new).collect();
    for pair in pairs.iter_mut().filter(|pair| pair.weighed.is_over()) {
        let ways: f64 = pair.ends().iter().map(|&bead| due[bead].way_since_weighed).sum();
        let allowed = if pair.contact.is_empty() { f64::INFINITY } else { near - ways };
        pair.weighed = Nearness { apart: pair.apart(due), allowed };
        pair.ends().iter().for_each(|&bead| renewed[bead] = true);
    }
    let pairs = pairs.iter().filter(|pair| !pair.contact.is_empty());
    let pairs: Vec<(&Pair, Pushes)> =
        pairs.map(|pair| (pair, Pushes::of(&beads[pair.first], &beads[pair.second]))).collect();
    let renewed = beads.par_iter_mut().enumerate().filter(|(index, _)| renewed[*index]);
    renewed.for_each(|(index, bead)| {
        bead.forget_others();
        for (pair, pushes) in &pairs {
            if index == pair.first {
                pair.contact.weigh_first(bead, pushes, 2.0 * near);
            } else if index == pair.second {
                pair.contact.weigh_second(bead, pushes, 2.0 * near);
            }
        }
    });
}
