use super::{Assembly, Lid};
use bedswell_geometry::Vector;

impl Assembly {
    /// Moves grains and lid by one damped explicit step under the loads gathered
    /// since [`compute_contacts`](Self::compute_contacts).
    ///
    /// `damping` is the part of every force component that is turned against the
    /// velocity (local non-viscous damping, Cundall 1987, from memory). Use 0.2 to
    /// 0.8: more of it rests sooner and rearranges less on the way; below about
    /// 0.1 the masses, which change with the contacts, feed in energy instead.
    ///
    /// Masses follow the stiffnesses, so that the unit step is always stable. With
    /// K the sum of the stiffnesses that touch a grain, m = 1.25 K and inertia
    /// 2 m r²: weighting the four motions that shear a contact (two slides, two
    /// turns, the turns half) bounds every frequency of the network by
    /// ω² <= max(2, 3 k_t/k_n)/1.25, and (1 + damping) ω² stays below the explicit
    /// step's limit of 4. Rolling springs of stiffness k_t R², with R at most r, add at
    /// most a third to the stiffness against turns; a third more inertia keeps the bound.
    pub fn advance(&mut self, damping: f64) {
        if self.held {
            return;
        }
        let before = self
            .ledger
            .is_some()
            .then(|| (self.velocities.clone(), self.spins.clone(), self.lid_state.velocity));
        let inertia_factor = if self.law.resists_rolling() { 8.0 / 3.0 } else { 2.0 };
        let kept = 1.0 - self.drag;
        for grain in 0..self.centres.len() {
            if self.pinned[grain] {
                continue;
            }
            let floor = self.law.normal.typical_stiffness(self.radii[grain]);
            let mass = MASS_PER_STIFFNESS * self.stiffnesses[grain].max(floor);
            let velocity = &mut self.velocities[grain];
            if self.stiffnesses[grain] == 0.0 && self.weights[grain] == Vector::zeros() {
                // Nothing acts on it: no damping would ever stop it.
                *velocity *= FREE_FLIGHT;
            }
            *velocity *= kept;
            push(velocity, &self.forces[grain], mass, damping);
            self.centres[grain] += *velocity;
            if self.law.friction > 0.0 {
                self.spins[grain] *= kept;
                let inertia = inertia_factor * mass * self.radii[grain].powi(2);
                push(&mut self.spins[grain], &self.torques[grain], inertia, damping);
            }
        }
        if matches!(self.lid, Lid::Stress(_)) {
            self.advance_lid(damping);
        }
        if let (Some(mut ledger), Some(before)) = (self.ledger.take(), before) {
            ledger.step(self, &before);
            self.ledger = Some(ledger);
        }
        self.contacts.slip = true;
    }

    fn advance_lid(&mut self, damping: f64) {
        let count = self.radii.len().max(1) as f64;
        let radius = self.radii.iter().sum::<f64>() / count;
        let typical = self.law.normal.typical_stiffness(radius);
        // Where nothing resists yet, as heavy as a layer (or a cell) of grains.
        let (floor, fastest, per_stiffness) = if self.cell.periodic[2] {
            // A contact then answers three motions, and the box is the heaviest.
            (typical * 4.0 * radius * radius * count, LID_SPEED, 4.0)
        } else {
            let fastest = LID_SPEED * self.cell.size.z;
            let floor = if self.radii.is_empty() {
                // Over gel alone, about as heavy as when it last touched.
                (FORGETTING * self.lid_state.last_stiffness).max(self.lid_load().abs() / fastest)
            } else {
                typical * (self.section() / (4.0 * radius * radius)).max(1.0)
            };
            (floor, fastest, MASS_PER_STIFFNESS)
        };
        let state = &mut self.lid_state;
        state.last_stiffness = state.stiffness.max(floor);
        let mass = per_stiffness * state.last_stiffness;
        let forced = damped(state.force, state.velocity, damping);
        state.velocity = (state.velocity + forced / mass).clamp(-fastest, fastest);
        if self.cell.periodic[2] {
            let stretch = 1.0 + state.velocity;
            self.cell.size *= stretch;
            for centre in &mut self.centres {
                *centre *= stretch;
            }
        } else {
            self.cell.size.z += state.velocity;
        }
    }
}

/// Fictitious mass over the sum of the stiffnesses that touch.
const MASS_PER_STIFFNESS: f64 = 1.25;

/// What a grain on which nothing acts keeps of its velocity per step.
const FREE_FLIGHT: f64 = 0.9;

/// Fastest motion of the lid, in strain of the bed per step: it only bites while
/// the lid closes an open gap, where it keeps the blow small.
const LID_SPEED: f64 = 1.0e-3;

/// What a lid over gel alone keeps per step of the stiffness that touched it.
const FORGETTING: f64 = 0.99;

#[inline]
fn push(velocity: &mut Vector, force: &Vector, mass: f64, damping: f64) {
    for axis in 0..3 {
        velocity[axis] += damped(force[axis], velocity[axis], damping) / mass;
    }
}

#[inline]
fn damped(force: f64, velocity: f64, damping: f64) -> f64 {
    if force * velocity > 0.0 { force * (1.0 - damping) } else { force * (1.0 + damping) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ContactLaw;
    use approx::assert_relative_eq;
    use bedswell_geometry::{Cell, Sphere};

    #[test]
    fn drag_takes_its_share_of_velocity_and_spin_with_every_step() {
        let cell = Cell::with_floor_and_lid(Vector::repeat(4.0));
        let grain = Sphere { centre: Vector::repeat(2.0), radius: 1.0 };
        let law = ContactLaw::for_stress(1.0, 1e-3, 0.5);
        let mut grains = Assembly::new(cell, &[grain], law, Lid::Fixed).unwrap();
        // Hardly a weight, but enough to count as one.
        grains.weights[0].z = -1e-300;
        grains.drag = 0.25;
        grains.velocities[0].x = 1e-3;
        grains.spins[0].y = 1e-3;
        for _ in 0..2 {
            grains.compute_contacts();
            grains.advance(0.0);
        }
        assert_relative_eq!(grains.velocities[0].x, 0.5625e-3);
        assert_relative_eq!(grains.spins[0].y, 0.5625e-3);
        assert_relative_eq!(grains.centres[0].x, 2.0 + 0.75e-3 + 0.5625e-3);
    }
}
