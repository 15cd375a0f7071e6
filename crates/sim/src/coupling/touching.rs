//! Beads that press on each other.

use bedswell_gel::{Bead, BeadContact, Relaxation};
use bedswell_geometry::{Cell, Vector};
use rayon::prelude::*;

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
}

/// Adds the forces of touching beads on each other.
pub(super) fn press(pairs: &mut [Pair], beads: &mut [Relaxation]) {
    pairs.par_iter_mut().for_each(|pair| {
        let (first, second) = (&beads[pair.first], &beads[pair.second]);
        let moved = first.last_way() + second.last_way();
        pair.contact.measure(first, second, pair.shift, moved);
    });
    for pair in pairs {
        let (first, second) = two(beads, pair.first, pair.second);
        pair.force = pair.contact.press(first, second);
    }
}

/// Finds the beads within `reach` (m) of those that are `due`. Beads that this concerns must be
/// weighed: they are added to `concerned`.
pub(super) fn look(
    pairs: &mut Vec<Pair>,
    beads: &[Relaxation],
    cell: &Cell,
    due: &[bool],
    reach: f64,
    concerned: &mut [bool],
) {
    pairs.retain(|pair| !due[pair.first] && !due[pair.second]);
    let found = near(beads, cell, due, reach);
    for pair in &found {
        concerned[pair.first] = true;
        concerned[pair.second] = true;
    }
    pairs.extend(found);
    pairs.sort_unstable_by_key(|pair| (pair.first, pair.second));
}

/// Gives beads whose masses were renewed, and those they may touch, the mass that their contacts
/// within `near` (m) need.
pub(super) fn weigh(pairs: &[Pair], beads: &mut [Relaxation], renewed: &[bool], near: f64) {
    let mut concerned = renewed.to_vec();
    for pair in pairs.iter().filter(|pair| renewed[pair.first] || renewed[pair.second]) {
        concerned[pair.first] = true;
        concerned[pair.second] = true;
    }
    for (bead, _) in beads.iter_mut().zip(&concerned).filter(|(_, concerned)| **concerned) {
        bead.forget_others();
    }
    for pair in pairs {
        let (first, second) = two(beads, pair.first, pair.second);
        if concerned[pair.first] {
            pair.contact.weigh_first(first, second, near);
        }
        if concerned[pair.second] {
            pair.contact.weigh_second(first, second, near);
        }
    }
}

/// The pairs of beads within reach of each other, one of them `due`.
fn near(beads: &[Relaxation], cell: &Cell, due: &[bool], reach: f64) -> Vec<Pair> {
    let centres: Vec<Vector> = beads.iter().map(|bead| bead.bead().centre()).collect();
    let mut close: Vec<(usize, usize, Vector)> = Vec::new();
    for second in 1..beads.len() {
        for first in (0..second).filter(|first| due[*first] || due[second]) {
            // Extents are those of each bead's last look; it has moved by less than reach since.
            let far = beads[first].extent() + beads[second].extent() + 3.0 * reach;
            let [one, other] = [first, second].map(|bead| centres[bead]);
            cell.for_each_image(&one, &other, far, |apart| {
                if apart.norm_squared() < far * far {
                    close.push((first, second, one + apart - other));
                }
            });
        }
    }
    let found = close.into_par_iter().filter_map(|(first, second, shift)| {
        let contact = BeadContact::find(&beads[first], &beads[second], shift, 2.0 * reach);
        (!contact.is_empty()).then(|| Pair { first, second, shift, contact, force: Vector::zeros() })
    });
    found.collect()
}

/// Two beads at once; the first has the lower number.
fn two(beads: &mut [Relaxation], first: usize, second: usize) -> (&mut Relaxation, &mut Relaxation) {
    let (before, after) = beads.split_at_mut(second);
    (&mut before[first], &mut after[0])
}
