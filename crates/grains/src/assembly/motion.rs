use super::{Assembly, Lid};
use bedswell_geometry::Vector;

impl Assembly {
    /// Moves grains and lid by one damped explicit step under the loads gathered
    /// since [`compute_contacts`](Self::compute_contacts).
    ///
    /// `damping` (0 to 1, usually 0.2 to 0.7) is the part of every force component
    /// that is turned against the velocity (local non-viscous damping, Cundall
    /// 1987, from memory); more of it comes to rest in fewer swings but creeps.
    ///
    /// The mass of a grain is the sum of the stiffnesses that touch it. For
    /// frequencies ω of the contact network ω² is then at most the larger of 2 and
    /// four times the tangential over normal stiffness (row sums of the stiffness
    /// matrix), and a unit step is stable below 4.
    pub fn advance(&mut self, damping: f64) {
        if self.held {
            return;
        }
        for grain in 0..self.centres.len() {
            let floor = self.law.normal.typical_stiffness(self.radii[grain]);
            let mass = self.stiffnesses[grain].max(floor);
            let velocity = &mut self.velocities[grain];
            if self.stiffnesses[grain] == 0.0 {
                // Nothing touches it: no damping would ever stop it.
                *velocity *= FREE_FLIGHT;
            }
            push(velocity, &self.forces[grain], mass, damping);
            self.centres[grain] += *velocity;
            if self.law.friction > 0.0 {
                let inertia = mass * self.radii[grain] * self.radii[grain];
                push(&mut self.spins[grain], &self.torques[grain], inertia, damping);
            }
        }
        if self.lid != Lid::Fixed {
            self.advance_lid(damping);
        }
        self.contacts.slip = true;
    }

    fn advance_lid(&mut self, damping: f64) {
        let count = self.radii.len().max(1) as f64;
        let radius = self.radii.iter().sum::<f64>() / count;
        let typical = self.law.normal.typical_stiffness(radius);
        // Where nothing resists yet, as heavy as a layer (or a cell) of grains.
        let (floor, fastest) = if self.cell.periodic[2] {
            (typical * 4.0 * radius * radius * count, LID_SPEED)
        } else {
            let layer = self.cell.size.x * self.cell.size.y / (4.0 * radius * radius);
            (typical * layer.max(1.0), LID_SPEED * self.cell.size.z)
        };
        let state = &mut self.lid_state;
        let mass = state.stiffness.max(floor);
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

/// What a grain that nothing touches keeps of its velocity per step.
const FREE_FLIGHT: f64 = 0.9;

/// Fastest motion of the lid, in strain of the bed per step: it only bites while
/// the lid closes an open gap, where it keeps the blow small.
const LID_SPEED: f64 = 1.0e-3;

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
