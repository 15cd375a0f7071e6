//! Contact of two beads.
//!
//! A skin point that has entered gel lies at some place of that gel's dry ball, whose
//! distance g to the dry surface is known exactly and is smooth wherever the point
//! slides. The contact is an energy of g alone: its forces on the point and on the nodes
//! that carry the place balance exactly, in force and torque, and cannot feed the motion.

use crate::bead::Bead;
use crate::contact::{self, skin_position};
use crate::lattice::{Depth, Embedded};
use crate::relaxation::Relaxation;
use bedswell_geometry::{Matrix, Vector};
use kiddo::{ImmutableKdTree, SquaredEuclidean};

/// Skin points are looked for within this distance (swollen voxel edges): stretched
/// skin has its points further apart than free skin.
const SEARCH: f64 = 0.9;
/// Penetration beyond which the push does not grow (voxel edges).
const DEEPEST_PUSH: f64 = 0.02;
/// Depth beyond which a point cannot have come through the surface nearby (voxel edges):
/// where gel is crumpled, the map of places may have other answers.
const TOO_DEEP: f64 = 0.75;
/// What a contact's stiffness is taken to be at most, over what it is: both skins press
/// at the same place, each through nodes with weights of both signs, and gel that is
/// compressed on the way is stiffer.
const MARGIN: f64 = 4.0;
/// Share of a gap that may be closed before it is measured again.
const TRUSTED: f64 = 0.5;

/// Where the skins of two beads are near each other, in both directions: both skins
/// are probed, each with half the pressure.
#[derive(Clone, Debug, Default)]
pub struct BeadContact {
    first_in_second: Facing,
    second_in_first: Facing,
}

/// The skin points of one bead near the gel of another.
#[derive(Clone, Debug, Default)]
pub(crate) struct Facing {
    probes: Vec<Probe>,
    /// Volume by which the gels overlap (m³), counted from this side.
    pub(crate) overlap: f64,
}

#[derive(Clone, Copy, Debug)]
struct Probe {
    point: u32,
    at: Embedded,
    /// Gradient of the depth there (voxel edges per m), inward.
    slope: Vector,
    /// What may be moved before the point can touch (m).
    clearance: f64,
}

/// A force (N) on a skin point from gel that it has entered.
pub(crate) struct Press {
    pub(crate) point: u32,
    pub(crate) at: Embedded,
    pub(crate) force: Vector,
}

impl BeadContact {
    /// Finds the places where the skins come within `reach` (m); the second bead is
    /// seen `shift` (m) from where its coordinates say (a periodic image).
    pub fn find(first: &Relaxation, second: &Relaxation, shift: Vector, reach: f64) -> Self {
        Self {
            first_in_second: Facing::look(first.bead(), second.bead(), -shift, reach),
            second_in_first: Facing::look(second.bead(), first.bead(), shift, reach),
        }
    }

    /// Makes the first bead heavy enough for this contact.
    pub fn weigh_first(&self, first: &mut Relaxation, second: &Relaxation) {
        first.weigh_probes(&self.first_in_second, first.push_by(second));
        first.weigh_hosts(&self.second_in_first, second.push_by(first));
    }

    /// Makes the second bead heavy enough for this contact.
    pub fn weigh_second(&self, first: &Relaxation, second: &mut Relaxation) {
        second.weigh_probes(&self.second_in_first, second.push_by(first));
        second.weigh_hosts(&self.first_in_second, first.push_by(second));
    }

    /// Whether the beads are out of reach of each other.
    pub fn is_empty(&self) -> bool {
        self.first_in_second.probes.is_empty() && self.second_in_first.probes.is_empty()
    }

    /// Volume by which the two beads overlap (m³).
    pub fn overlap(&self) -> f64 {
        0.5 * (self.first_in_second.overlap + self.second_in_first.overlap)
    }

    /// Adds the forces of the two beads on each other, which have come nearer by at most
    /// `moved` (m) since the last call. Returns the force (N) on the first.
    pub fn press(
        &mut self,
        first: &mut Relaxation,
        second: &mut Relaxation,
        shift: Vector,
        moved: f64,
    ) -> Vector {
        let mut total = Vector::zeros();
        let mut stiffnesses = 0.0;
        for (facing, from_first) in [(&mut self.first_in_second, true), (&mut self.second_in_first, false)] {
            let (probing, faced, seen) = if from_first {
                (&mut *first, &mut *second, -shift)
            } else {
                (&mut *second, &mut *first, shift)
            };
            let push = probing.push_by(faced);
            let presses = facing.measure(probing.bead(), faced.bead(), seen, push, moved);
            for press in &presses {
                probing.pull(press.point, press.force);
                faced.pull_at(&press.at, -press.force);
                stiffnesses += push.stiffness;
                total += if from_first { press.force } else { -press.force };
            }
        }
        first.note_contact(total, stiffnesses);
        second.note_contact(-total, stiffnesses);
        total
    }
}

impl Facing {
    /// The points of `probing` within `reach` (m) of the gel of `faced`; `probing` is
    /// seen `seen` (m) from where its coordinates say.
    fn look(probing: &Bead, faced: &Bead, seen: Vector, reach: f64) -> Self {
        let lattice = faced.lattice();
        let places: Vec<[f64; 3]> = skin_places(faced).map(Into::into).collect();
        let Ok(tree) = ImmutableKdTree::<f64, 3>::new_from_slice(&places) else { return Self::default() };
        let search = (SEARCH * faced.swollen_edge() + reach).powi(2);
        let (centre, extent) = (faced.centre(), faced.extent() + reach);
        let mut probes = Vec::new();
        for (point, place) in skin_places(probing).enumerate() {
            let place = place + seen;
            if (place - centre).norm_squared() > extent * extent {
                continue;
            }
            let query = place.into();
            let near = tree.query(&query).nearest_one::<SquaredEuclidean<f64>>().execute();
            if near.distance > search {
                continue;
            }
            let start = lattice.skin_point_in_voxel(near.item as usize);
            let point = point as u32;
            if let Some((at, found)) = sound(faced, &place, start)
                && found.distance() > -reach
                && found.depth < TOO_DEEP
            {
                probes.push(Probe { point, at, slope: found.carry * found.inward, clearance: 0.0 });
            }
        }
        Self { probes, overlap: 0.0 }
    }

    /// The forces on the points that have entered gel. The gels have come nearer by at
    /// most `moved` (m) since the last call.
    pub(crate) fn measure(
        &mut self,
        probing: &Bead,
        faced: &Bead,
        seen: Vector,
        law: Push,
        moved: f64,
    ) -> Vec<Press> {
        let mut presses = Vec::new();
        let mut depths = 0.0;
        for probe in &mut self.probes {
            probe.clearance -= moved;
            if probe.clearance > 0.0 {
                continue;
            }
            let place = probing.skin_point(probe.point as usize) + seen;
            let (force, depth) = probe.push(faced, &place, law);
            if depth > 0.0 {
                presses.push(Press { point: probe.point, at: probe.at, force });
            }
            depths += depth;
        }
        self.overlap = depths * law.edge * law.area;
        presses
    }

    /// The points that may press, where they may, and their stiffness (N/m) in space.
    pub(crate) fn possible(&self, law: Push) -> impl Iterator<Item = (u32, &Embedded, Matrix)> + '_ {
        self.probes.iter().map(move |probe| {
            let slope = probe.slope * law.edge;
            let share = slope.norm_squared().max(1.0);
            let stiffness = contact::turning(&slope.normalize()) * (MARGIN * law.stiffness * share);
            (probe.point, &probe.at, stiffness)
        })
    }
}

impl Probe {
    /// The force (N) on the point at a place, and its depth (voxel edges) as far as the
    /// contact counts.
    fn push(&mut self, faced: &Bead, place: &Vector, law: Push) -> (Vector, f64) {
        let nothing = (Vector::zeros(), 0.0);
        let Some((at, found)) = sound(faced, place, self.at) else { return nothing };
        self.at = at;
        self.slope = found.carry * found.inward;
        if found.depth <= 0.0 {
            self.clearance = -TRUSTED * found.distance();
            return nothing;
        }
        if found.depth >= TOO_DEEP {
            return nothing;
        }
        (found.carry * found.inward * -law.push(found.depth), found.depth)
    }
}

/// How entered gel pushes a skin point out.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Push {
    /// Stiffness of a point (N/m).
    pub(crate) stiffness: f64,
    /// Area that a point stands for (m²).
    pub(crate) area: f64,
    /// Edge of a free-swollen voxel of the entered gel (m).
    pub(crate) edge: f64,
}

impl Push {
    /// Slope of the energy (J per voxel edge) at a depth in voxel edges.
    fn push(&self, depth: f64) -> f64 {
        self.stiffness * self.edge * self.edge * depth.min(DEEPEST_PUSH)
    }
}

/// Where a place lies in gel.
fn sound(faced: &Bead, place: &Vector, from: Embedded) -> Option<(Embedded, Depth)> {
    let (at, gradient) = faced.lattice().embed(&faced.positions, place, from)?;
    Some((at, faced.lattice().depth(&at, &gradient)?))
}

fn skin_places(bead: &Bead) -> impl Iterator<Item = Vector> + '_ {
    let skin = &bead.lattice().skin;
    (0..skin.len()).map(|point| skin_position(skin, &bead.positions, point))
}
