use bedswell_gel::{Load, Obstacle, Relaxation};
use bedswell_geometry::Vector;
use bedswell_grains::{Assembly, Lid};

/// What one bead can press on: the floor, the lid, the pot's wall if there is one, and
/// the grains that have ever been near it, in an order that never changes.
#[derive(Clone, Debug, Default)]
pub(super) struct Neighbourhood {
    pub(super) grains: Vec<usize>,
    /// Where they are now, next to the bead.
    pub(super) obstacles: Vec<Obstacle>,
    /// Obstacles before the first grain.
    pub(super) plates: usize,
}

/// What an obstacle of a neighbourhood is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Thing {
    Floor,
    Lid,
    Wall,
    Grain(usize),
}

impl Neighbourhood {
    /// What obstacle number `index` is.
    pub(super) fn thing(&self, index: usize) -> Thing {
        match index {
            0 => Thing::Floor,
            1 => Thing::Lid,
            _ if index < self.plates => Thing::Wall,
            _ => Thing::Grain(self.grains[index - self.plates]),
        }
    }

    /// Adds the grains that came within `reach` (m) of the bead.
    pub(super) fn extend(&mut self, bead: &Relaxation, grains: &Assembly, reach: f64) {
        let centre = bead.bead().centre();
        let extent = bead.bead().extent() + reach;
        for grain in 0..grains.radii.len() {
            let distance = grains.cell.separation(&centre, &grains.centres[grain]).norm_squared();
            if distance < (extent + grains.radii[grain]).powi(2) && !self.grains.contains(&grain) {
                self.grains.push(grain);
            }
        }
        self.update(bead, grains);
    }

    /// Moves the obstacles to where grains and lid are now.
    pub(super) fn update(&mut self, bead: &Relaxation, grains: &Assembly) {
        let centre = bead.bead().centre();
        let axis = Vector::new(0.5 * grains.cell.size.x, 0.5 * grains.cell.size.y, 0.0);
        self.obstacles.clear();
        self.obstacles.push(Obstacle::Plane { point: Vector::zeros(), normal: Vector::z() });
        let height = if grains.lid == Lid::Open { NO_LID } else { grains.cell.size.z };
        self.obstacles.push(Obstacle::Plane { point: Vector::z() * height, normal: -Vector::z() });
        self.obstacles.extend(grains.wall.map(|radius| Obstacle::Tube { axis, radius }));
        self.plates = self.obstacles.len();
        for &grain in &self.grains {
            let offset = grains.cell.separation(&centre, &grains.centres[grain]);
            self.obstacles.push(Obstacle::Sphere { centre: centre + offset, radius: grains.radii[grain] });
        }
    }

    /// Hands the bead's loads on to grains, lid, floor and wall.
    pub(super) fn pass_on(&self, bead: &Relaxation, grains: &mut Assembly) {
        for (index, &Load { force, stiffness }) in bead.loads().iter().enumerate() {
            if stiffness == 0.0 {
                continue;
            }
            match self.thing(index) {
                Thing::Floor => grains.add_floor_load(force),
                Thing::Lid => grains.add_lid_load(force.z, stiffness),
                Thing::Wall => grains.add_wall_load(&bead.bead().centre(), force),
                // Without friction the force points at the grain's centre: no torque.
                Thing::Grain(grain) => grains.add_load(grain, force, Vector::zeros(), stiffness),
            }
        }
    }
}

/// Height (m) of a lid that is out of every bead's reach.
const NO_LID: f64 = 1e3;
