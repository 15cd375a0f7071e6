//! Beads that press on each other.

use bedswell_gel::{Bead, BeadContact, Relaxation};
use bedswell_geometry::{Cell, Vector};

/// Two beads that may touch.
#[derive(Clone, Debug)]
pub(super) struct Pair {
    pub(super) first: usize,
    pub(super) second: usize,
    /// Shift of the second to the image that the first sees (m).
    shift: Vector,
    pub(super) contact: BeadContact,
    /// Force on the first (N).
    pub(super) force: Vector,
}

/// Distance (m) of a place from the nearest point of a bead's skin.
pub(super) fn nearest_skin(bead: &Bead, place: &Vector) -> f64 {
    let points = 0..bead.lattice().skin_point_count();
    points.map(|point| (bead.skin_point(point) - place).norm()).fold(f64::INFINITY, f64::min)
}

impl Pair {
    /// The other bead, seen from one of the two, and the shift to the image that this one sees
    /// (m).
    pub(super) fn seen_from(&self, bead: usize) -> Option<(usize, Vector)> {
        match bead {
            first if first == self.first => Some((self.second, self.shift)),
            second if second == self.second => Some((self.first, -self.shift)),
            _ => None,
        }
    }

    pub(super) fn press(&mut self, beads: &mut [Relaxation]) {
        let (first, second) = two(beads, self.first, self.second);
        let moved = first.last_way() + second.last_way();
        self.force = self.contact.press(first, second, self.shift, moved);
    }
}

/// Finds the beads within `reach` (m) of those that are `due`, and gives every bead that
/// this concerns the mass that its contacts need.
pub(super) fn look(pairs: &mut Vec<Pair>, beads: &mut [Relaxation], cell: &Cell, due: &[bool], reach: f64) {
    let mut concerned = due.to_vec();
    pairs.retain(|pair| {
        let kept = !due[pair.first] && !due[pair.second];
        if !kept {
            concerned[pair.first] = true;
            concerned[pair.second] = true;
        }
        kept
    });
    let centres: Vec<Vector> = beads.iter().map(|bead| bead.bead().centre()).collect();
    for second in 1..beads.len() {
        for first in (0..second).filter(|&first| due[first] || due[second]) {
            let apart = cell.separation(&centres[first], &centres[second]);
            // Extents are those of each bead's last look; it has moved by less than reach since.
            if apart.norm() > beads[first].extent() + beads[second].extent() + 3.0 * reach {
                continue;
            }
            let shift = centres[first] + apart - centres[second];
            let contact = BeadContact::find(&beads[first], &beads[second], shift, 2.0 * reach);
            if !contact.is_empty() {
                concerned[first] = true;
                concerned[second] = true;
                pairs.push(Pair { first, second, shift, contact, force: Vector::zeros() });
            }
        }
    }
    pairs.sort_unstable_by_key(|pair| (pair.first, pair.second));
    for (bead, _) in beads.iter_mut().zip(&concerned).filter(|(_, concerned)| **concerned) {
        bead.forget_others();
    }
    for pair in pairs {
        let (first, second) = two(beads, pair.first, pair.second);
        if concerned[pair.first] {
            pair.contact.weigh_first(first, second);
        }
        if concerned[pair.second] {
            pair.contact.weigh_second(first, second);
        }
    }
}

/// Two beads at once; the first has the lower number.
fn two(beads: &mut [Relaxation], first: usize, second: usize) -> (&mut Relaxation, &mut Relaxation) {
    let (before, after) = beads.split_at_mut(second);
    (&mut before[first], &mut after[0])
}
