use crate::annotate::place_in_words;
use crate::frame::{BeadView, Frame};
use crate::look::{GrainLook, Look};
use crate::{Field, Run};
use bedswell_painter::{Camera, Plane, Point};
use bedswell_sim::figures::{digits, force, length, stress};

/// What lies under the pointer.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pick {
    /// The thing.
    pub what: Picked,
    /// Where the line of sight meets it (m).
    pub place: Point,
    /// Its distance from the eye (m).
    distance: f32,
}

/// A thing that can be picked.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Picked {
    /// A grain, by its place among the frame's grains.
    Grain(usize),
    /// A bead's skin or section, with the voxel there.
    Gel {
        /// The bead.
        bead: usize,
        /// The voxel.
        voxel: usize,
    },
    /// A bond of a bead.
    Bond {
        /// The bead.
        bead: usize,
        /// The bond.
        bond: usize,
    },
}

/// A bond is picked from this many pixels away.
const NEAR: f32 = 4.0;

/// What lies under a place in the picture (pixels from the top left); things that can be
/// seen through or are not shown are passed over, unless there is nothing else.
pub fn pick(frame: &Frame, look: &Look, camera: &Camera, x: f32, y: f32) -> Option<Pick> {
    let sight = Sight {
        eye: camera.eye,
        way: camera.sight(x, y),
        cut: look.cut.map(|cut| cut.plane(frame)),
        wide: NEAR / camera.focal,
    };
    let mut best: Option<Pick> = None;
    let mut offer = |pick: Option<Pick>| {
        if let Some(pick) = pick
            && best.is_none_or(|best| pick.distance < best.distance)
        {
            best = Some(pick);
        }
    };
    for (index, bead) in frame.beads.iter().enumerate() {
        if look.skin || look.section && sight.cut.is_some() {
            offer(sight.gel(index, bead));
        }
        if look.bonds {
            offer(sight.bond(index, bead));
        }
    }
    if look.grains == GrainLook::Plain {
        offer(sight.grain(frame));
    }
    match best {
        None if look.grains == GrainLook::Ghosted => sight.grain(frame),
        found => found,
    }
}

/// A line of sight.
struct Sight {
    eye: Point,
    way: Point,
    cut: Option<Plane>,
    /// Distance from the line that still counts, per distance from the eye.
    wide: f32,
}

impl Sight {
    fn at(&self, distance: f32) -> Point {
        self.eye + self.way * distance
    }

    fn is_cut_away(&self, place: &Point) -> bool {
        self.cut.is_some_and(|plane| plane.normal.dot(place) > plane.offset)
    }

    /// Where the line meets the cutting plane from the side that is taken away.
    fn on_cut(&self) -> Option<f32> {
        let plane = self.cut?;
        let distance = (plane.offset - plane.normal.dot(&self.eye)) / plane.normal.dot(&self.way);
        (plane.normal.dot(&self.way) < 0.0 && distance > 0.0).then_some(distance)
    }

    fn grain(&self, frame: &Frame) -> Option<Pick> {
        let hits = frame.grains.iter().enumerate().filter_map(|(index, grain)| {
            let offset = grain.centre - self.eye;
            let along = offset.dot(&self.way);
            let half = grain.radius * grain.radius - (offset.norm_squared() - along * along);
            if half <= 0.0 {
                return None;
            }
            let (enter, leave) = (along - half.sqrt(), along + half.sqrt());
            let distance = if self.is_cut_away(&self.at(enter)) {
                self.on_cut().filter(|cut| (enter..leave).contains(cut))?
            } else {
                enter
            };
            (distance > 0.0).then_some((distance, index))
        });
        let (distance, index) = hits.min_by(|a, b| a.0.total_cmp(&b.0))?;
        Some(Pick { what: Picked::Grain(index), place: self.at(distance), distance })
    }

    /// The skin where it is not cut away, or the section.
    fn gel(&self, index: usize, bead: &BeadView) -> Option<Pick> {
        let points: Vec<Point> = bead.model.skin.iter().map(|point| bead.place(point)).collect();
        let mut hits: Vec<(f32, u32)> = (bead.model.triangles.iter())
            .filter_map(|triangle| {
                let distance = self.triangle(triangle.map(|point| points[point as usize]))?;
                Some((distance, bead.model.skin[triangle[0] as usize].voxel))
            })
            .collect();
        hits.sort_by(|a, b| a.0.total_cmp(&b.0));
        let first = *hits.first()?;
        let (distance, voxel) = if self.is_cut_away(&self.at(first.0)) {
            // Inside the gel at the plane if the line has gone in more often than out.
            let cut = self.on_cut()?;
            if hits.iter().filter(|hit| hit.0 < cut).count() % 2 == 0 {
                return None;
            }
            let place = self.at(cut);
            let apart = |voxel: &usize| (bead.middles[*voxel] - place).norm_squared();
            let nearest = (0..bead.middles.len()).min_by(|a, b| apart(a).total_cmp(&apart(b)))?;
            (cut, nearest)
        } else {
            (first.0, first.1 as usize)
        };
        Some(Pick { what: Picked::Gel { bead: index, voxel }, place: self.at(distance), distance })
    }

    /// Distance to a triangle (Möller & Trumbore 1997, J. Graphics Tools 2:21, from memory).
    fn triangle(&self, [a, b, c]: [Point; 3]) -> Option<f32> {
        let (ab, ac) = (b - a, c - a);
        let across = self.way.cross(&ac);
        let facing = ab.dot(&across);
        if facing == 0.0 {
            return None;
        }
        let from = self.eye - a;
        let u = from.dot(&across) / facing;
        let turned = from.cross(&ab);
        let v = self.way.dot(&turned) / facing;
        let distance = ac.dot(&turned) / facing;
        (u >= 0.0 && v >= 0.0 && u + v <= 1.0 && distance > 0.0).then_some(distance)
    }

    fn bond(&self, index: usize, bead: &BeadView) -> Option<Pick> {
        let hits = bead.bond_voxels().iter().enumerate().filter_map(|(bond, voxels)| {
            let [from, to] = voxels.map(|voxel| bead.middles[voxel as usize]);
            let (place, apart) = self.nearest(from, to);
            let distance = (place - self.eye).norm();
            (apart < self.wide * distance && !self.is_cut_away(&place)).then_some((distance, bond, place))
        });
        let (distance, bond, place) = hits.min_by(|a, b| a.0.total_cmp(&b.0))?;
        Some(Pick { what: Picked::Bond { bead: index, bond }, place, distance })
    }

    /// The place on a stretch that is nearest to the line, and its distance from it.
    fn nearest(&self, from: Point, to: Point) -> (Point, f32) {
        let (along, offset) = (to - from, from - self.eye);
        let flat = |v: Point| v - self.way * v.dot(&self.way);
        let (along_flat, offset_flat) = (flat(along), flat(offset));
        let length = along_flat.norm_squared();
        let share = if length > 0.0 { (-offset_flat.dot(&along_flat) / length).clamp(0.0, 1.0) } else { 0.5 };
        (from + along * share, (offset_flat + along_flat * share).norm())
    }
}

impl Pick {
    /// What is known of it, in lines of words with units.
    pub fn in_words(&self, run: &Run, frame: &Frame) -> Vec<String> {
        let mut lines = match self.what {
            Picked::Grain(index) => {
                let grain = frame.grains[index];
                vec![
                    format!("grain {}", grain.grain),
                    format!("diameter {}", length(2.0 * f64::from(grain.radius))),
                    format!("moved {}", length(grain.displacement.into())),
                    format!("largest contact force {}", force(grain.force.into())),
                ]
            }
            Picked::Gel { bead, voxel } => gel_in_words(run, frame, bead, voxel),
            Picked::Bond { bead, bond } => {
                let view = &frame.beads[bead];
                let [low, high] = view.bond_voxels()[bond].map(|voxel| view.middles[voxel as usize]);
                vec![
                    format!("bond {bond} of bead {bead}"),
                    format!("tension {}", stress(view.bonds[bond].into())),
                    format!("length {}", length((high - low).norm().into())),
                ]
            }
        };
        lines.push(format!("at {}", place_in_words(&(self.place - frame.corner))));
        lines
    }
}

fn gel_in_words(run: &Run, frame: &Frame, bead: usize, voxel: usize) -> Vec<String> {
    let view = &frame.beads[bead];
    let mut lines = vec![format!("gel of bead {bead}")];
    for field in [Field::LargestPrincipal, Field::SmallestPrincipal, Field::LargestShear] {
        lines.push(format!("{} {}", field.name(), stress(view.value(field, voxel).into())));
    }
    lines.push(format!("water uptake {} g/g", digits(view.value(Field::Uptake, voxel).into())));
    let share = 100.0 * view.tear_share[voxel];
    lines.push(format!("holds {} % of the bead's tear probability", digits(share.into())));
    if let Some(outcome) = run.summary.as_ref().and_then(|summary| summary.beads.get(bead)) {
        lines.push(format!("the bead: {} contacts at the end", outcome.contacts));
    }
    lines
}
