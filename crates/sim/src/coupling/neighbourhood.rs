use bedswell_gel::{Obstacle, Push, Relaxation};
use bedswell_geometry::Vector;
use bedswell_grains::Assembly;

/// What one bead can press on: the floor, the lid and the grains that have ever been
/// near it, in an order that never changes.
#[derive(Clone, Debug, Default)]
pub(super) struct Neighbourhood {
    pub(super) grains: Vec<usize>,
    /// Where they are now, next to the bead.
    pub(super) obstacles: Vec<Obstacle>,
}

/// Obstacles before the first grain.
pub(super) const PLATES: usize = 2;

impl Neighbourhood {
    /// Adds the grains that came within `reach` (m) of the bead.
    pub(super) fn extend(&mut self, bead: &Relaxation, grains: &Assembly, reach: f64) {
        let centre = bead.bead().centre();
        let extent = bead.bead().extent() + reach;
        for grain in 0..grains.radii.len() {
            let distance = grains.cell.separation(&centre, &grains.centres[grain]).norm();
            if distance < extent + grains.radii[grain] && !self.grains.contains(&grain) {
                self.grains.push(grain);
            }
        }
        self.update(bead, grains);
    }

    /// Moves the obstacles to where grains and lid are now.
    pub(super) fn update(&mut self, bead: &Relaxation, grains: &Assembly) {
        let centre = bead.bead().centre();
        self.obstacles.clear();
        self.obstacles.push(Obstacle::Plane { point: Vector::zeros(), normal: Vector::z() });
        self.obstacles
            .push(Obstacle::Plane { point: Vector::z() * grains.cell.size.z, normal: -Vector::z() });
        for &grain in &self.grains {
            let offset = grains.cell.separation(&centre, &grains.centres[grain]);
            self.obstacles.push(Obstacle::Sphere { centre: centre + offset, radius: grains.radii[grain] });
        }
    }

    /// Hands a push of the bead's skin on to the grain or the lid.
    pub(super) fn pass_on(&self, push: Push, grains: &mut Assembly) {
        match push.obstacle {
            0 => {}
            1 => grains.add_lid_load(push.force.z, push.stiffness),
            // Without friction the force points at the grain's centre: no torque.
            grain => {
                grains.add_load(self.grains[grain - PLATES], push.force, Vector::zeros(), push.stiffness);
            }
        }
    }
}
