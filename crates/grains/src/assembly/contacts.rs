use super::contact_list::Plate;
use super::spring::{ContactState, roll, rolling_stiffness};
use super::{Assembly, Boundary, Lid};
use bedswell_geometry::Vector;

impl Assembly {
    /// Clears all loads but the weights and computes the contact forces of grains with
    /// each other, the floor, the lid and the wall. Call it once per step: it also takes up the slip of
    /// the last [`advance`](Self::advance).
    pub fn compute_contacts(&mut self) {
        if self.contacts.outdated(self) {
            self.rebuild_contacts();
        }
        self.forces.copy_from_slice(&self.weights);
        self.torques.fill(Vector::zeros());
        self.stiffnesses.fill(0.0);
        self.contacts.force_sum = 0.0;
        self.contacts.touching = 0;
        self.contacts.deepest = 0.0;
        self.boundary = Boundary::default();
        if let Some(ledger) = &mut self.ledger {
            ledger.clear_loads();
        }
        self.lid_state.stiffness = 0.0;
        let virial = self.push_pairs();
        if !self.cell.periodic[2] {
            self.push_plates();
        }
        let lifting = if self.cell.periodic[2] { virial } else { self.boundary.lid.z };
        self.lid_state.force = lifting - self.lid_load();
        self.contacts.slip = false;
    }

    /// What the lid presses with (N); the work of the pressure per strain (J) in a
    /// fully periodic cell; zero for a lid that is held or absent.
    pub(super) fn lid_load(&self) -> f64 {
        match self.lid {
            Lid::Fixed | Lid::Open => 0.0,
            Lid::Stress(stress) if self.cell.periodic[2] => 3.0 * stress * self.cell.volume(),
            Lid::Stress(stress) => stress * self.section(),
        }
    }

    /// Contact forces with floor, lid and wall.
    fn push_plates(&mut self) {
        let rolls = self.law.resists_rolling();
        let list = &mut self.contacts;
        for touch in &mut list.plates {
            let grain = touch.grain as usize;
            let radius = self.radii[grain];
            let (gap, normal) = touch.plate.facing(&self.cell, self.wall, &self.centres[grain], radius);
            if gap >= 0.0 || (touch.plate == Plate::Lid && self.lid == Lid::Open) {
                if touch.contact.force > 0.0
                    && let Some(ledger) = &mut self.ledger
                {
                    let turned = -self.spins[grain];
                    let moved = (turned * radius).cross(&normal) - self.velocities[grain];
                    let springs = [touch.contact.slide, touch.bend];
                    ledger.part(&self.law, springs, [moved, turned], radius);
                    ledger.open(touch.contact.force, gap);
                }
                touch.contact = ContactState::default();
                touch.bend = Vector::zeros();
                continue;
            }
            let (push, stiffness) = self.law.normal.push(-gap, radius);
            let plate_speed = if touch.plate == Plate::Lid { self.lid_state.velocity } else { 0.0 };
            let approach = self.velocities[grain] - Vector::z() * plate_speed;
            if touch.contact.force == 0.0
                && list.slip
                && let Some(ledger) = &mut self.ledger
            {
                ledger.close(push, approach.dot(&normal) + gap);
            }
            let mut on_plate = normal * push;
            if self.contact_damping > 0.0 && list.slip {
                let drag = (self.contact_damping * stiffness * approach.dot(&normal)).max(-push);
                on_plate += normal * drag;
                if let Some(ledger) = &mut self.ledger {
                    ledger.dash(grain, normal * -drag);
                    if touch.plate == Plate::Lid {
                        ledger.lid_dash += normal.z * drag;
                    }
                }
            }
            if self.law.friction > 0.0 {
                let arm = radius + gap;
                let moved = if list.slip {
                    Vector::z() * plate_speed
                        - self.velocities[grain]
                        - (self.spins[grain] * arm).cross(&normal)
                } else {
                    Vector::zeros()
                };
                let before = touch.contact.slide;
                let drag = touch.contact.rub(&self.law, &normal, moved, push, stiffness);
                on_plate -= drag;
                self.torques[grain] += normal.cross(&drag) * arm;
                if let Some(ledger) = &mut self.ledger {
                    let tangential = self.law.tangential_ratio * stiffness;
                    ledger.slip(tangential, before, moved, touch.contact.slide);
                }
                if rolls {
                    let turned = if list.slip { -self.spins[grain] } else { Vector::zeros() };
                    let before = touch.bend;
                    self.torques[grain] +=
                        roll(&mut touch.bend, &self.law, &normal, turned, push, stiffness, radius);
                    if let Some(ledger) = &mut self.ledger {
                        let rigidity = rolling_stiffness(&self.law, stiffness, radius);
                        ledger.slip(rigidity, before, turned, touch.bend);
                    }
                }
            }
            touch.contact.force = push;
            self.forces[grain] -= on_plate;
            self.stiffnesses[grain] += stiffness;
            list.force_sum += push;
            list.touching += 1;
            list.deepest = list.deepest.max(-gap / radius);
            match touch.plate {
                Plate::Floor => self.boundary.floor += on_plate,
                Plate::Lid => {
                    self.boundary.lid += on_plate;
                    self.lid_state.stiffness += stiffness;
                }
                Plate::Wall => {
                    self.boundary.wall += on_plate;
                    self.boundary.wall_push += push;
                }
            }
        }
    }
}
