use super::Assembly;
use super::boundary::outward;
use super::pairs::Sums;
use super::spring::ContactState;
use bedswell_geometry::{Cell, Vector, close_pairs};
use serde::{Deserialize, Serialize};

/// What touches or nearly does, in order of index, with its history.
#[derive(Clone, Debug)]
pub(super) struct ContactList {
    pub(super) pairs: Vec<Pair>,
    /// Bends of the pairs' rolling springs (rad), in the same order; empty until contacts
    /// resist rolling, so that they cost nothing where they do not.
    pub(super) bends: Vec<Vector>,
    pub(super) plates: Vec<PlatePair>,
    /// Room for the sums of the pairs' shares.
    pub(super) sums: Vec<Sums>,
    /// Sum of the normal forces (N), number of contacts, and deepest overlap over
    /// the smaller grain's radius, at the last `compute_contacts`.
    pub(super) force_sum: f64,
    pub(super) touching: usize,
    pub(super) deepest: f64,
    /// Whether grains have moved since then.
    pub(super) slip: bool,
    /// Surfaces closer than this (m) are listed.
    margin: f64,
    listed_centres: Vec<Vector>,
    listed_size: Vector,
    listed_wall: Option<f64>,
}

impl ContactList {
    /// An empty list, outdated from the start.
    pub(super) fn new(radii: &[f64]) -> Self {
        let mean_diameter = 2.0 * radii.iter().sum::<f64>() / radii.len().max(1) as f64;
        Self {
            pairs: Vec::new(),
            bends: Vec::new(),
            plates: Vec::new(),
            sums: Vec::new(),
            force_sum: 0.0,
            touching: 0,
            deepest: 0.0,
            slip: false,
            margin: 0.1 * mean_diameter,
            listed_centres: Vec::new(),
            listed_size: Vector::zeros(),
            listed_wall: None,
        }
    }

    /// Takes over contacts that go on, as of grains that have not moved since; what else is
    /// near is listed anew at the next look.
    pub(super) fn restore(&mut self, pairs: Vec<Pair>, bends: Vec<Vector>, plates: Vec<PlatePair>) {
        (self.pairs, self.bends, self.plates) = (pairs, bends, plates);
        self.slip = false;
        self.listed_centres.clear();
        self.listed_wall = None;
    }

    pub(super) fn truncate(&mut self, count: usize) {
        let mut bends = std::mem::take(&mut self.bends).into_iter();
        self.pairs.retain(|pair| {
            let keep = (pair.b as usize) < count;
            self.bends.extend(bends.next().filter(|_| keep));
            keep
        });
        self.plates.retain(|touch| (touch.grain as usize) < count);
        self.listed_centres.truncate(count);
    }

    /// Whether a pair that is not listed could have come to touch.
    pub(super) fn outdated(&self, grains: &Assembly) -> bool {
        if self.listed_centres.len() != grains.centres.len() || self.listed_wall != grains.wall {
            return true;
        }
        let size = grains.cell.size;
        let (stretch, approach) = if grains.cell.periodic[2] {
            // The box shrinks or grows as one and takes the grains along.
            let stretch = size.component_div(&self.listed_size);
            let widest = 2.0 * grains.radii.iter().copied().fold(0.0, f64::max) + self.margin;
            (stretch, (1.0 - stretch.min()).max(0.0) * widest)
        } else {
            (Vector::repeat(1.0), (size.z - self.listed_size.z).abs())
        };
        let free = 0.5 * (self.margin - approach);
        // Written so that a centre that is not a number counts as far away.
        !(free > 0.0
            && grains.centres.iter().zip(&self.listed_centres).all(|(centre, listed)| {
                (centre - listed.component_mul(&stretch)).norm_squared() < free * free
            }))
    }
}

/// Two grains that touch or nearly do.
#[derive(Clone, Copy, Debug, Serialize, Deserialize)]
pub(super) struct Pair {
    pub(super) a: u32,
    pub(super) b: u32,
    pub(super) image: [i8; 3],
    pub(super) contact: ContactState,
}

/// A grain that touches a plate, or nearly does.
#[derive(Clone, Copy, Debug, Serialize, Deserialize)]
pub(super) struct PlatePair {
    pub(super) grain: u32,
    pub(super) plate: Plate,
    pub(super) contact: ContactState,
    /// Bend of the rolling spring (rad).
    pub(super) bend: Vector,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
pub(super) enum Plate {
    Floor,
    Lid,
    Wall,
}

impl Plate {
    /// Gap (m) between the plate and a grain, and the direction from the grain towards
    /// it. A wall that is not there is out of reach.
    #[inline]
    pub(super) fn facing(
        self,
        cell: &Cell,
        wall: Option<f64>,
        centre: &Vector,
        radius: f64,
    ) -> (f64, Vector) {
        match self {
            Self::Floor => (centre.z - radius, -Vector::z()),
            Self::Lid => (cell.size.z - centre.z - radius, Vector::z()),
            Self::Wall => match wall {
                Some(wall) => {
                    let (normal, distance) = outward(cell, centre);
                    (wall - distance - radius, normal)
                }
                None => (f64::INFINITY, Vector::x()),
            },
        }
    }
}

impl Assembly {
    /// Wraps the grains into the box and lists anew what touches or nearly does;
    /// contacts that go on keep their history.
    pub(super) fn rebuild_contacts(&mut self) {
        let wraps: Vec<[i8; 3]> = self
            .centres
            .iter_mut()
            .map(|centre| {
                let inside = self.cell.wrap(centre);
                let moved = *centre - inside;
                *centre = inside;
                [0, 1, 2].map(|axis| (moved[axis] / self.cell.size[axis]).round() as i8)
            })
            .collect();
        let margin = self.contacts.margin;
        let bends = std::mem::take(&mut self.contacts.bends);
        let old = std::mem::take(&mut self.contacts.pairs);
        let mut old = (old.into_iter().enumerate()).filter(|(_, pair)| pair.contact.force > 0.0).map(
            |(index, mut pair)| {
                let (of_a, of_b) = (wraps[pair.a as usize], wraps[pair.b as usize]);
                pair.image = [0, 1, 2].map(|axis| pair.image[axis] + of_b[axis] - of_a[axis]);
                (index, pair)
            },
        );
        let mut before = old.next();
        let list = &mut self.contacts;
        list.pairs = close_pairs(&self.cell, &self.centres, &self.radii, margin)
            .into_iter()
            .map(|close| {
                let key = (close.a, close.b, close.image);
                while before.is_some_and(|(_, pair)| (pair.a, pair.b, pair.image) < key) {
                    before = old.next();
                }
                let known = before.filter(|(_, pair)| (pair.a, pair.b, pair.image) == key);
                if !bends.is_empty() {
                    list.bends.push(known.map_or_else(Vector::zeros, |(index, _)| bends[index]));
                }
                let contact = known.map_or_else(ContactState::default, |(_, pair)| pair.contact);
                Pair { a: close.a, b: close.b, image: close.image, contact }
            })
            .collect();
        self.rebuild_plates();
        self.contacts.listed_centres.clone_from(&self.centres);
        self.contacts.listed_size = self.cell.size;
        self.contacts.listed_wall = self.wall;
    }

    fn rebuild_plates(&mut self) {
        let margin = self.contacts.margin;
        let old = std::mem::take(&mut self.contacts.plates);
        if self.cell.periodic[2] {
            return;
        }
        for grain in 0..self.radii.len() {
            for plate in [Plate::Floor, Plate::Lid, Plate::Wall] {
                let (gap, _) = plate.facing(&self.cell, self.wall, &self.centres[grain], self.radii[grain]);
                if gap < margin {
                    let key = (grain as u32, plate);
                    let (contact, bend) = old
                        .binary_search_by_key(&key, |touch| (touch.grain, touch.plate))
                        .map_or_else(|_| Default::default(), |at| (old[at].contact, old[at].bend));
                    self.contacts.plates.push(PlatePair { grain: grain as u32, plate, contact, bend });
                }
            }
        }
    }
}
