use super::{Assembly, Lid};
use crate::contact_law::ContactLaw;
use bedswell_geometry::{Vector, close_pairs, offset};

impl Assembly {
    /// Clears all loads and computes the contact forces of grains with each other,
    /// the floor and the lid. Call it once per step: it also takes up the slip of
    /// the last [`advance`](Self::advance).
    pub fn compute_contacts(&mut self) {
        if self.contacts.outdated(self) {
            self.rebuild_contacts();
        }
        self.forces.fill(Vector::zeros());
        self.torques.fill(Vector::zeros());
        self.stiffnesses.fill(0.0);
        self.contacts.force_sum = 0.0;
        self.contacts.touching = 0;
        self.contacts.deepest = 0.0;
        let mut boundary = Boundary::default();
        self.push_pairs(&mut boundary);
        if !self.cell.periodic[2] {
            self.push_plates(&mut boundary);
        }
        self.lid_state.force = boundary.force - self.lid_load();
        self.lid_state.stiffness = boundary.stiffness;
        self.contacts.slip = false;
    }

    /// What the lid presses with (N); the work of the pressure per strain (J) in a
    /// fully periodic cell; zero for a lid that is held.
    pub(super) fn lid_load(&self) -> f64 {
        match self.lid {
            Lid::Fixed => 0.0,
            Lid::Stress(stress) if self.cell.periodic[2] => 3.0 * stress * self.cell.volume(),
            Lid::Stress(stress) => stress * self.cell.size.x * self.cell.size.y,
        }
    }

    /// Contact forces between grains.
    fn push_pairs(&mut self, boundary: &mut Boundary) {
        let Self { cell, centres, radii, velocities, spins, forces, torques, stiffnesses, law, .. } = self;
        let list = &mut self.contacts;
        let (periodic, rough) = (cell.periodic[2], law.friction > 0.0);
        for pair in &mut list.pairs {
            let (a, b) = (pair.a as usize, pair.b as usize);
            let mut apart = centres[b] - centres[a];
            if pair.image != [0; 3] {
                apart += offset(cell, pair.image);
            }
            let reach = radii[a] + radii[b];
            let square = apart.norm_squared();
            if square >= reach * reach {
                pair.contact = ContactState::default();
                continue;
            }
            let distance = square.sqrt().max(f64::MIN_POSITIVE);
            let normal = apart / distance;
            let overlap = reach - distance;
            let (push, stiffness) = law.normal.push(overlap, radii[a] * radii[b] / reach);
            let mut on_b = normal * push;
            if rough {
                // Both arms end in one point, so that angular momentum is kept.
                let (arm_a, arm_b) = (radii[a] * distance / reach, radii[b] * distance / reach);
                let moved = if list.slip {
                    velocities[b] - velocities[a] - (spins[a] * arm_a + spins[b] * arm_b).cross(&normal)
                } else {
                    Vector::zeros()
                };
                let drag = pair.contact.rub(law, &normal, moved, push, stiffness);
                on_b -= drag;
                let twist = normal.cross(&drag);
                torques[a] += twist * arm_a;
                torques[b] += twist * arm_b;
            }
            pair.contact.force = push;
            forces[a] -= on_b;
            forces[b] += on_b;
            stiffnesses[a] += stiffness;
            stiffnesses[b] += stiffness;
            list.force_sum += push;
            list.touching += 1;
            list.deepest = list.deepest.max(overlap / radii[a].min(radii[b]));
            if periodic {
                boundary.force += push * distance;
                boundary.stiffness += stiffness * square;
            }
        }
    }

    /// Contact forces with floor and lid.
    fn push_plates(&mut self, boundary: &mut Boundary) {
        let list = &mut self.contacts;
        for touch in &mut list.plates {
            let grain = touch.grain as usize;
            let radius = self.radii[grain];
            // The outward normal of the grain, towards the plate.
            let (gap, normal, plate_speed) = match touch.plate {
                Plate::Floor => (self.centres[grain].z - radius, -Vector::z(), 0.0),
                Plate::Lid => {
                    let speed = self.lid_state.velocity;
                    (self.cell.size.z - self.centres[grain].z - radius, Vector::z(), speed)
                }
            };
            if gap >= 0.0 {
                touch.contact = ContactState::default();
                continue;
            }
            let (push, stiffness) = self.law.normal.push(-gap, radius);
            let mut on_plate = normal * push;
            if self.law.friction > 0.0 {
                let arm = radius + gap;
                let moved = if list.slip {
                    Vector::z() * plate_speed
                        - self.velocities[grain]
                        - (self.spins[grain] * arm).cross(&normal)
                } else {
                    Vector::zeros()
                };
                let drag = touch.contact.rub(&self.law, &normal, moved, push, stiffness);
                on_plate -= drag;
                self.torques[grain] += normal.cross(&drag) * arm;
            }
            touch.contact.force = push;
            self.forces[grain] -= on_plate;
            self.stiffnesses[grain] += stiffness;
            list.force_sum += push;
            list.touching += 1;
            list.deepest = list.deepest.max(-gap / radius);
            if touch.plate == Plate::Lid {
                boundary.force += on_plate.z;
                boundary.stiffness += stiffness;
            }
        }
    }

    /// Wraps the grains into the box and lists anew what touches or nearly does;
    /// contacts that go on keep their history.
    fn rebuild_contacts(&mut self) {
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
        let old = std::mem::take(&mut self.contacts.pairs);
        let mut old = old.into_iter().filter(|pair| pair.contact.force > 0.0).map(|mut pair| {
            let (of_a, of_b) = (wraps[pair.a as usize], wraps[pair.b as usize]);
            pair.image = [0, 1, 2].map(|axis| pair.image[axis] + of_b[axis] - of_a[axis]);
            pair
        });
        let mut before = old.next();
        self.contacts.pairs = close_pairs(&self.cell, &self.centres, &self.radii, margin)
            .into_iter()
            .map(|close| {
                let key = (close.a, close.b, close.image);
                while before.is_some_and(|pair| (pair.a, pair.b, pair.image) < key) {
                    before = old.next();
                }
                let contact = match before {
                    Some(pair) if (pair.a, pair.b, pair.image) == key => pair.contact,
                    _ => ContactState::default(),
                };
                Pair { a: close.a, b: close.b, image: close.image, contact }
            })
            .collect();
        self.rebuild_plates();
        self.contacts.listed_centres.clone_from(&self.centres);
        self.contacts.listed_size = self.cell.size;
    }

    fn rebuild_plates(&mut self) {
        let margin = self.contacts.margin;
        let old = std::mem::take(&mut self.contacts.plates);
        if self.cell.periodic[2] {
            return;
        }
        for grain in 0..self.radii.len() {
            let floor_gap = self.centres[grain].z - self.radii[grain];
            let lid_gap = self.cell.size.z - self.centres[grain].z - self.radii[grain];
            for (plate, gap) in [(Plate::Floor, floor_gap), (Plate::Lid, lid_gap)] {
                if gap < margin {
                    let key = (grain as u32, plate);
                    let contact = old
                        .binary_search_by_key(&key, |touch| (touch.grain, touch.plate))
                        .map_or(ContactState::default(), |at| old[at].contact);
                    self.contacts.plates.push(PlatePair { grain: grain as u32, plate, contact });
                }
            }
        }
    }
}

/// What touches or nearly does, in order of index, with its history.
#[derive(Clone, Debug)]
pub(super) struct ContactList {
    pub(super) pairs: Vec<Pair>,
    pub(super) plates: Vec<PlatePair>,
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
}

impl ContactList {
    /// An empty list, outdated from the start.
    pub(super) fn new(radii: &[f64]) -> Self {
        let mean_diameter = 2.0 * radii.iter().sum::<f64>() / radii.len().max(1) as f64;
        Self {
            pairs: Vec::new(),
            plates: Vec::new(),
            force_sum: 0.0,
            touching: 0,
            deepest: 0.0,
            slip: false,
            margin: 0.1 * mean_diameter,
            listed_centres: Vec::new(),
            listed_size: Vector::zeros(),
        }
    }

    pub(super) fn truncate(&mut self, count: usize) {
        self.pairs.retain(|pair| (pair.b as usize) < count);
        self.plates.retain(|touch| (touch.grain as usize) < count);
        self.listed_centres.truncate(count);
    }

    /// Whether a pair that is not listed could have come to touch.
    fn outdated(&self, grains: &Assembly) -> bool {
        if self.listed_centres.len() != grains.centres.len() {
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
#[derive(Clone, Copy, Debug)]
pub(super) struct Pair {
    pub(super) a: u32,
    pub(super) b: u32,
    pub(super) image: [i8; 3],
    pub(super) contact: ContactState,
}

/// A grain that touches floor or lid, or nearly does.
#[derive(Clone, Copy, Debug)]
pub(super) struct PlatePair {
    pub(super) grain: u32,
    pub(super) plate: Plate,
    pub(super) contact: ContactState,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Plate {
    Floor,
    Lid,
}

/// The memory of a contact.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct ContactState {
    /// Normal force (N), zero when apart.
    pub(super) force: f64,
    /// Stretch of the tangential spring (m).
    spring: Vector,
}

impl ContactState {
    /// Takes up the relative motion `moved` (m) of the second surface and returns
    /// the tangential force (N) with which it drags the first one along: a spring
    /// that slips at Coulomb's limit (Cundall & Strack 1979, from memory).
    #[inline]
    fn rub(&mut self, law: &ContactLaw, normal: &Vector, moved: Vector, push: f64, stiffness: f64) -> Vector {
        let mut spring = self.spring + moved;
        spring -= normal * normal.dot(&spring);
        let tangential = law.tangential_ratio * stiffness;
        let limit = law.friction * push / tangential;
        let square = spring.norm_squared();
        if square > limit * limit {
            spring *= limit / square.sqrt();
        }
        self.spring = spring;
        spring * tangential
    }
}

/// What the contacts do to the lid, or to the size of a fully periodic cell.
#[derive(Default)]
struct Boundary {
    force: f64,
    stiffness: f64,
}
