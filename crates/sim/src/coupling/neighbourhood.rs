use bedswell_gel::{Load, Obstacle, Relaxation};
use bedswell_geometry::Vector;
use bedswell_grains::{Assembly, Lid};
use serde::{Deserialize, Serialize};

/// What one bead can press on: the floor, the lid, the pot's wall if there is one, and
/// the grains that have ever been near it, in an order that never changes.
#[derive(Clone, Debug, Default)]
pub(super) struct Neighbourhood {
    /// In a narrow cell a bead may press on two images of one grain, which are then two.
    pub(super) grains: Vec<Image>,
    /// Where they are now, next to the bead.
    pub(super) obstacles: Vec<Obstacle>,
    /// Obstacles before the first grain.
    pub(super) plates: usize,
    /// Grains that may come near next, where they were when it was last extended, and how much
    /// further away than what is near (m).
    watched: Vec<(usize, Vector, f64)>,
}

/// One of the periodic images of a grain.
#[derive(Clone, Copy, Debug, Serialize, Deserialize)]
pub(super) struct Image {
    pub(super) grain: u32,
    /// Where it was last (m): of all images it is the one nearest to there.
    place: Vector,
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
            _ => Thing::Grain(self.grains[index - self.plates].grain as usize),
        }
    }

    /// Adds the grains that came within `reach` (m) of the bead, and watches those within
    /// `WATCH` times as much more.
    pub(super) fn extend(&mut self, bead: &Relaxation, grains: &Assembly, reach: f64) {
        let centre = bead.bead().centre();
        let extent = bead.bead().extent() + reach;
        self.follow(grains);
        self.watched.clear();
        for grain in 0..grains.centres.len() {
            let near = extent + grains.radii[grain];
            self.watch(&centre, grains, grain, near, reach);
        }
        self.update(grains);
    }

    /// Watches a grain that has come a long way since it was last looked for, where it is within
    /// `WATCH` times `reach` (m) of what is near a bead at `centre` that has moved by `drift` (m)
    /// since the last `extend`. Whether it is near.
    pub(super) fn notice(
        &mut self,
        (bead, centre, drift): (&Relaxation, &Vector, &Vector),
        grains: &Assembly,
        grain: usize,
        reach: f64,
    ) -> bool {
        // The skin may have moved by half as much since the bead's extent was measured.
        let near = bead.extent() + 1.5 * reach + grains.radii[grain];
        self.watched.retain(|watched| watched.0 != grain);
        let (grains_known, watched) = (self.grains.len(), self.watched.len());
        self.watch(centre, grains, grain, near, reach);
        self.watched[watched..].iter_mut().for_each(|(_, place, _)| *place -= drift);
        let is_near = self.grains.len() > grains_known;
        self.grains.truncate(grains_known);
        is_near
    }

    /// Adds the images of a grain that are `near` (m) a bead's centre, and watches those that are
    /// not much further away.
    fn watch(&mut self, centre: &Vector, grains: &Assembly, grain: usize, near: f64, reach: f64) {
        let (place, watch) = (grains.centres[grain], near + WATCH * reach);
        grains.cell.for_each_image(centre, &place, watch, |apart| {
            let image = Image { grain: grain as u32, place: centre + apart };
            let apart = apart.norm();
            if apart >= watch || self.knows(&image, reach) {
                return;
            }
            if apart < near {
                self.grains.push(image);
            } else {
                self.watched.push((grain, place, apart - near));
            }
        });
    }

    /// Whether an image is among its grains; images lie far further apart than `reach` (m).
    fn knows(&self, image: &Image, reach: f64) -> bool {
        let is_same = |known: &Image| {
            known.grain == image.grain && (known.place - image.place).norm_squared() < reach * reach
        };
        self.grains.iter().any(is_same)
    }

    /// Whether a grain that is watched has come nearer by more than `limit` (m) to a bead that has
    /// moved by `drift` (m) since the last `extend`.
    pub(super) fn has_strayed(&self, grains: &Assembly, drift: &Vector, limit: f64) -> bool {
        self.watched.iter().any(|&(grain, before, slack)| {
            (grains.centres[grain] - before - drift).norm_squared() > (limit + slack).powi(2)
        })
    }

    /// Moves the images to where the grains are now.
    fn follow(&mut self, grains: &Assembly) {
        for image in &mut self.grains {
            let way = grains.cell.separation(&image.place, &grains.centres[image.grain as usize]);
            image.place += way;
        }
    }

    /// Moves the obstacles to where grains and lid are now.
    pub(super) fn update(&mut self, grains: &Assembly) {
        self.follow(grains);
        let axis = Vector::new(0.5 * grains.cell.size.x, 0.5 * grains.cell.size.y, 0.0);
        self.obstacles.clear();
        self.obstacles.push(Obstacle::Plane { point: Vector::zeros(), normal: Vector::z() });
        let height = if grains.lid == Lid::Open { NO_LID } else { grains.cell.size.z };
        self.obstacles.push(Obstacle::Plane { point: Vector::z() * height, normal: -Vector::z() });
        self.obstacles.extend(grains.wall.map(|radius| Obstacle::Tube { axis, radius }));
        self.plates = self.obstacles.len();
        for image in &self.grains {
            let radius = grains.radii[image.grain as usize];
            self.obstacles.push(Obstacle::Sphere { centre: image.place, radius });
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

#[cfg(test)]
mod tests {
    use super::*;
    use bedswell_gel::{Bead, Lattice};
    use bedswell_geometry::{Cell, Sphere};
    use bedswell_grains::ContactLaw;
    use std::sync::Arc;

    /// A bead that fills a narrow cell presses on a grain from both sides; the two images
    /// stay two, whichever is the nearer, and wherever the grain goes.
    #[test]
    fn both_images_of_a_grain_beside_a_bead_are_obstacles() {
        let cell = Cell::with_floor_and_lid(Vector::new(4.0, 9.0, 9.0));
        let grain = Sphere { centre: Vector::new(3.9, 4.5, 4.5), radius: 1.0 };
        let law = ContactLaw::for_stress(1.0, 1e-3, 0.5);
        let mut grains = Assembly::new(cell, &[grain], law, Lid::Fixed).unwrap();
        let lattice = Arc::new(Lattice::new(8));
        let bead = Relaxation::new(Bead::new(lattice, 1.0, Vector::new(2.0, 4.5, 4.5), 1.0));
        let mut around = Neighbourhood::default();
        around.extend(&bead, &grains, 0.1);
        let sides = |around: &Neighbourhood| -> Vec<f64> {
            around.grains.iter().map(|image| (10.0 * image.place.x).round() / 10.0).collect()
        };
        assert_eq!(sides(&around), [-0.1, 3.9]);
        for (x, expected) in [(4.1, [0.1, 4.1]), (0.2, [0.2, 4.2]), (3.8, [-0.2, 3.8])] {
            grains.centres[0].x = x;
            around.extend(&bead, &grains, 0.1);
            assert_eq!(sides(&around), expected);
            assert_eq!(around.obstacles.len(), around.plates + 2);
        }
    }
}
