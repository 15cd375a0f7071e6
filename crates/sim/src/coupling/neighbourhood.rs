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
    /// Grains that may come near next, where they were when it was last extended, and how much
    /// further away than what is near (m).
    watched: Vec<(usize, Vector, f64)>,
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

    /// Adds the grains that came within `reach` (m) of the bead, and watches those within
    /// `WATCH` times as much more.
    pub(super) fn extend(&mut self, bead: &Relaxation, grains: &Assembly, reach: f64) {
        let centre = bead.bead().centre();
        let extent = bead.bead().extent() + reach;
        self.watched.clear();
        for (grain, place) in grains.centres.iter().enumerate() {
            let apart = grains.cell.separation(&centre, place).norm_squared();
            let near = extent + grains.radii[grain];
            if apart >= (near + WATCH * reach).powi(2) || self.grains.contains(&grain) {
                continue;
            }
            if apart < near * near {
                self.grains.push(grain);
            } else {
                self.watched.push((grain, *place, apart.sqrt() - near));
            }
        }
        self.update(bead, grains);
    }

    /// Whether a grain that is watched has come nearer by more than `limit` (m) since the last
    /// `extend`.
    pub(super) fn has_strayed(&self, grains: &Assembly, limit: f64) -> bool {
        self.watched.iter().any(|&(grain, before, slack)| {
            (grains.centres[grain] - before).norm_squared() > (limit + slack).powi(2)
        })
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

/// Grains are watched within this many times the reach of an extension beyond it.
pub(super) const WATCH: f64 = 4.0;
/// Height (m) of a lid that is out of every bead's reach.
const NO_LID: f64 = 1e3;
