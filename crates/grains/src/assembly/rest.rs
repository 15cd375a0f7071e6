use super::Assembly;
use super::contact_list::Plate;
use bedswell_geometry::{Vector, offset};

/// How far an assembly is from rest.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Rest {
    /// Largest net force, weight included, on a grain that may move, or net torque over
    /// its radius (N).
    pub largest_net_force: f64,
    /// Index of that grain; 0 where there is no net force.
    pub worst: usize,
    /// Mean normal force of the contacts (N); zero when nothing touches.
    pub mean_contact_force: f64,
    /// Net force on the lid over the force it is loaded with (in a fully periodic
    /// cell: relative error of the pressure); zero for a lid that is held or absent.
    pub lid_unbalance: f64,
    /// Deepest overlap over the smaller grain's diameter.
    pub deepest_overlap: f64,
}

impl Rest {
    /// Largest net force over mean contact force; zero when there is no force.
    pub fn residual(&self) -> f64 {
        if self.largest_net_force == 0.0 { 0.0 } else { self.largest_net_force / self.mean_contact_force }
    }
}

/// One contact, as the last `compute_contacts` left it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Contact {
    /// The grain.
    pub grain: usize,
    /// What it touches.
    pub partner: Partner,
    /// Normal force (N).
    pub force: f64,
    /// Tangential force on the grain (N).
    pub drag: Vector,
    /// Unit vector from the grain to its partner.
    pub normal: Vector,
    /// From the grain's centre to its partner's, or to the foot on a plate (m).
    pub branch: Vector,
    /// Middle of the overlap (m), next to the grain's centre: it may lie outside
    /// the box along periodic axes.
    pub position: Vector,
}

/// The other side of a contact.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Partner {
    /// A grain, by index.
    Grain(usize),
    /// The floor.
    Floor,
    /// The lid.
    Lid,
    /// The wall of the pot.
    Wall,
}

impl Assembly {
    /// How far the assembly is from rest under the loads gathered since
    /// [`compute_contacts`](Self::compute_contacts).
    pub fn rest(&self) -> Rest {
        let list = &self.contacts;
        let (mut largest_net_force, mut worst) = (0.0, 0);
        let loads = self.forces.iter().zip(&self.torques).zip(self.radii.iter().zip(&self.pinned));
        for (grain, ((force, torque), (radius, &pinned))) in loads.enumerate() {
            let net = force.norm().max(torque.norm() / radius);
            if net > largest_net_force && !pinned {
                (largest_net_force, worst) = (net, grain);
            }
        }
        let lid_load = self.lid_load().abs();
        Rest {
            largest_net_force,
            worst,
            mean_contact_force: if list.touching == 0 { 0.0 } else { list.force_sum / list.touching as f64 },
            lid_unbalance: if lid_load == 0.0 { 0.0 } else { self.lid_state.force.abs() / lid_load },
            deepest_overlap: 0.5 * list.deepest,
        }
    }

    /// The contacts that carry force, in order of index.
    pub fn contacts(&self) -> impl Iterator<Item = Contact> + '_ {
        let pairs = self.contacts.pairs.iter().filter(|pair| pair.contact.force > 0.0).map(|pair| {
            let (a, b) = (pair.a as usize, pair.b as usize);
            let apart = self.centres[b] + offset(&self.cell, pair.image) - self.centres[a];
            let distance = apart.norm();
            let reach = self.radii[a] + self.radii[b];
            let depth = reach - distance;
            let (_, stiffness) = self.law.normal.push(depth, self.radii[a] * self.radii[b] / reach);
            Contact {
                grain: a,
                partner: Partner::Grain(b),
                force: pair.contact.force,
                drag: pair.contact.slide * (self.law.tangential_ratio * stiffness),
                normal: apart / distance,
                branch: apart,
                position: self.centres[a] + apart * ((self.radii[a] - 0.5 * depth) / distance),
            }
        });
        let plates = self.contacts.plates.iter().filter(|touch| touch.contact.force > 0.0).map(|touch| {
            let grain = touch.grain as usize;
            let (centre, radius) = (self.centres[grain], self.radii[grain]);
            let (gap, normal) = touch.plate.facing(&self.cell, self.wall, &centre, radius);
            let partner = match touch.plate {
                Plate::Floor => Partner::Floor,
                Plate::Lid => Partner::Lid,
                Plate::Wall => Partner::Wall,
            };
            let (_, stiffness) = self.law.normal.push(-gap, radius);
            let branch = normal * (radius + gap);
            Contact {
                grain,
                partner,
                force: touch.contact.force,
                drag: touch.contact.slide * (self.law.tangential_ratio * stiffness),
                normal,
                branch,
                position: centre + branch,
            }
        });
        pairs.chain(plates)
    }

    /// Mean number of contacts of the grains that carry load. Grains with fewer
    /// than four contacts (two with friction) cannot be held by them and are left
    /// out, again and again until none is left to drop.
    pub fn contact_number(&self) -> f64 {
        let needed = if self.law.friction > 0.0 { 2 } else { 4 };
        let mut kept = vec![true; self.radii.len()];
        loop {
            let mut counts = vec![0_usize; self.radii.len()];
            for contact in self.contacts() {
                match contact.partner {
                    Partner::Grain(other) if kept[contact.grain] && kept[other] => {
                        counts[contact.grain] += 1;
                        counts[other] += 1;
                    }
                    Partner::Grain(_) => {}
                    Partner::Floor | Partner::Lid | Partner::Wall => counts[contact.grain] += 1,
                }
            }
            let mut dropped = false;
            for (keep, &count) in kept.iter_mut().zip(&counts) {
                if *keep && count < needed {
                    *keep = false;
                    dropped = true;
                }
            }
            if !dropped {
                let carrying = kept.iter().filter(|&&keep| keep).count();
                let touches: usize =
                    counts.iter().zip(&kept).filter(|(_, keep)| **keep).map(|(count, _)| count).sum();
                return if carrying == 0 { 0.0 } else { touches as f64 / carrying as f64 };
            }
        }
    }
}
