//! Contact of two beads.
//!
//! A skin point that has entered gel lies at some place of that gel's dry ball, whose
//! distance g to the dry surface is known exactly and is smooth wherever the point
//! slides. The contact is an energy of g alone: its forces on the point and on the nodes
//! that carry the place balance exactly, in force and torque, and cannot feed the motion.
//! Only next to a voxel's face, where g has a kink, its slope passes over smoothly instead:
//! a point that comes to rest on a kink would be jolted to and fro for ever.

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

/// How hard two beads push each other out.
#[derive(Clone, Copy, Debug)]
pub struct Pushes {
    on_first: Push,
    on_second: Push,
}

impl Pushes {
    /// Those of two beads as they are.
    pub fn of(first: &Relaxation, second: &Relaxation) -> Self {
        Self { on_first: first.push_by(second), on_second: second.push_by(first) }
    }
}

/// The skin points of one bead near the gel of another.
#[derive(Clone, Debug, Default)]
pub(crate) struct Facing {
    probes: Vec<Probe>,
    /// Forces of the points that have entered gel.
    pub(crate) presses: Vec<Press>,
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
#[derive(Clone, Copy, Debug)]
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
            first_in_second: Facing::look(first.bead(), second.bead(), second.extent(), -shift, reach),
            second_in_first: Facing::look(second.bead(), first.bead(), first.extent(), shift, reach),
        }
    }

    /// Makes the first bead heavy enough for this contact, where the skins may touch once they
    /// have come `near` (m) by less.
    pub fn weigh_first(&self, first: &mut Relaxation, pushes: &Pushes, near: f64) {
        first.weigh_probes(&self.first_in_second, pushes.on_first, near);
        first.weigh_hosts(&self.second_in_first, pushes.on_second, near);
    }

    /// The same for the second bead.
    pub fn weigh_second(&self, second: &mut Relaxation, pushes: &Pushes, near: f64) {
        second.weigh_probes(&self.second_in_first, pushes.on_second, near);
        second.weigh_hosts(&self.first_in_second, pushes.on_first, near);
    }

    /// Whether the beads are out of reach of each other.
    pub fn is_empty(&self) -> bool {
        self.first_in_second.probes.is_empty() && self.second_in_first.probes.is_empty()
    }

    /// Volume by which the two beads overlap (m³).
    pub fn overlap(&self) -> f64 {
        0.5 * (self.first_in_second.overlap + self.second_in_first.overlap)
    }

    /// Finds the forces of the two beads on each other, which have come nearer by at most
    /// `moved` (m) since the last call; the second is seen `shift` (m) from where its
    /// coordinates say.
    pub fn measure(&mut self, first: &Relaxation, second: &Relaxation, shift: Vector, moved: f64) {
        let (one, other, pushes) = (first.bead(), second.bead(), Pushes::of(first, second));
        self.first_in_second.measure(one, other, -shift, pushes.on_first, moved);
        self.second_in_first.measure(other, one, shift, pushes.on_second, moved);
    }

    /// Force (N) on the first bead as last measured.
    pub fn force(&self) -> Vector {
        self.first_in_second.force() - self.second_in_first.force()
    }

    /// Stiffness (N/m) of all points that press.
    pub fn stiffness(&self, pushes: &Pushes) -> f64 {
        self.first_in_second.presses.len() as f64 * pushes.on_first.stiffness
            + self.second_in_first.presses.len() as f64 * pushes.on_second.stiffness
    }

    /// Adds the forces last measured to the first bead.
    pub fn press_first(&self, first: &mut Relaxation) {
        self.first_in_second.press_probing(first);
        self.second_in_first.press_faced(first);
    }

    /// The same for the second bead.
    pub fn press_second(&self, second: &mut Relaxation) {
        self.first_in_second.press_faced(second);
        self.second_in_first.press_probing(second);
    }
}

impl Facing {
    /// The points of `probing` within `reach` (m) of the gel of `faced`, whose skin lay within
    /// `extent` (m) of its centre before it moved by less than `reach`; `probing` is seen `seen`
    /// (m) from where its coordinates say.
    fn look(probing: &Bead, faced: &Bead, extent: f64, seen: Vector, reach: f64) -> Self {
        let lattice = faced.lattice();
        // The centre has moved too.
        let (centre, extent) = (faced.centre(), extent + 3.0 * reach);
        let near = |(_, place): &(usize, Vector)| (place - centre).norm_squared() <= extent * extent;
        let close: Vec<(usize, Vector)> =
            skin_places(probing).map(|place| place + seen).enumerate().filter(near).collect();
        if close.is_empty() {
            return Self::default();
        }
        let places: Vec<[f64; 3]> = skin_places(faced).map(Into::into).collect();
        let Ok(tree) = ImmutableKdTree::<f64, 3>::new_from_slice(&places) else { return Self::default() };
        let search = (SEARCH * faced.swollen_edge() + reach).powi(2);
        let mut probes = Vec::new();
        for (point, place) in close {
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
                let clearance = (-TRUSTED * found.distance()).max(0.0);
                probes.push(Probe { point, at, slope: found.carry * found.inward, clearance });
            }
        }
        Self { probes, ..Self::default() }
    }

    /// Finds the forces on the points that have entered gel. The gels have come nearer by at
    /// most `moved` (m) since the last call.
    pub(crate) fn measure(&mut self, probing: &Bead, faced: &Bead, seen: Vector, law: Push, moved: f64) {
        self.presses.clear();
        let mut depths = 0.0;
        for probe in &mut self.probes {
            probe.clearance -= moved;
            if probe.clearance > 0.0 {
                continue;
            }
            let place = probing.skin_point(probe.point as usize) + seen;
            let (force, depth) = probe.push(faced, &place, law);
            if depth > 0.0 {
                self.presses.push(Press { point: probe.point, at: probe.at, force });
            }
            depths += depth;
        }
        self.overlap = depths * law.edge * law.area;
    }

    /// Force (N) on the bead that is probing.
    fn force(&self) -> Vector {
        self.presses.iter().map(|press| press.force).sum()
    }

    fn press_probing(&self, probing: &mut Relaxation) {
        self.presses.iter().for_each(|press| probing.pull(press.point, press.force));
    }

    fn press_faced(&self, faced: &mut Relaxation) {
        self.presses.iter().for_each(|press| faced.pull_at(&press.at, -press.force));
    }

    /// The points within `near` (m) of pressing, where they may, and their stiffness (N/m) in
    /// space.
    pub(crate) fn possible(
        &self,
        law: Push,
        near: f64,
    ) -> impl Iterator<Item = (u32, &Embedded, Matrix)> + '_ {
        let close = self.probes.iter().filter(move |probe| probe.clearance < TRUSTED * near);
        close.map(move |probe| {
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
    let found = faced.lattice().depth(&at, &gradient)?;
    if found.depth <= 0.0 {
        return Some((at, found));
    }
    match faced.lattice().smooth_gradient(&faced.positions, &at, &gradient) {
        Some(gradient) => Some((at, faced.lattice().depth(&at, &gradient)?)),
        None => Some((at, found)),
    }
}

fn skin_places(bead: &Bead) -> impl Iterator<Item = Vector> + '_ {
    let skin = &bead.lattice().skin;
    (0..skin.len()).map(|point| skin_position(skin, &bead.positions, point))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::lattice::{BLENDED, Lattice};
    use approx::assert_relative_eq;
    use std::sync::Arc;

    const LAW: Push = Push { stiffness: 3.0, area: 0.5, edge: 2.0 };

    /// Two beads that overlap a little, both somewhat distorted.
    fn overlapping() -> (Bead, Bead) {
        let lattice = Arc::new(Lattice::new(8));
        let place = |centre: Vector, bend: f64| {
            let mut bead = Bead::new(Arc::clone(&lattice), 4.0, centre, 2.0);
            let stride = lattice.stride();
            for node in 0..lattice.node_count() {
                let [x, y, z] = lattice.node_offset(node);
                bead.positions[node] += bend * (0.6 * y + 0.3 * z).sin();
                bead.positions[stride + node] += 0.3 * bend * (0.5 * x * z).cos();
            }
            bead
        };
        (place(Vector::zeros(), 0.15), place(Vector::new(13.0, 7.0, 4.0), -0.1))
    }

    fn look(probing: &Bead, faced: &Bead) -> Facing {
        let mut facing = Facing::look(probing, faced, faced.extent(), Vector::zeros(), 1.0);
        facing.measure(probing, faced, Vector::zeros(), LAW, 0.0);
        assert!(facing.presses.len() > 3, "{} points press", facing.presses.len());
        facing
    }

    fn place_of(bead: &Bead, at: &Embedded) -> Vector {
        bead.lattice().embedded_terms(at).into_iter().map(|(node, weight)| bead.node(node) * weight).sum()
    }

    #[test]
    fn a_point_and_the_gel_it_has_entered_push_at_the_same_place() {
        let (probing, faced) = overlapping();
        for Press { point, at, .. } in look(&probing, &faced).presses {
            let point = probing.skin_point(point as usize);
            assert_relative_eq!(place_of(&faced, &at), point, epsilon = 1e-9);
            let weights: f64 = faced.lattice().embedded_terms(&at).iter().map(|(_, weight)| weight).sum();
            assert_relative_eq!(weights, 1.0, epsilon = 1e-12);
        }
    }

    /// The forces (N) of the first bead's skin in the second's gel on the nodes of both.
    fn pulls(facing: &Facing, first: &Bead, second: &Bead) -> [Vec<Vector>; 2] {
        let mut pulls = [first, second].map(|bead| vec![Vector::zeros(); bead.lattice().node_count()]);
        for &Press { point, ref at, force } in &facing.presses {
            first.lattice().skin.terms(point as usize).for_each(|(node, w)| pulls[0][node] += force * w);
            second.lattice().embedded_terms(at).iter().for_each(|&(node, w)| pulls[1][node] -= force * w);
        }
        pulls
    }

    /// The integral of the push over the depth, for all points (J).
    fn energy(facing: &Facing, first: &Bead, second: &Bead) -> f64 {
        let of_point = |probe: &Probe| {
            let depth = sound(second, &first.skin_point(probe.point as usize), probe.at)
                .map_or(0.0, |(_, found)| if found.depth < TOO_DEEP { found.depth.max(0.0) } else { 0.0 });
            let rising = depth.min(DEEPEST_PUSH);
            LAW.stiffness * LAW.edge * LAW.edge * rising * (depth - 0.5 * rising)
        };
        facing.probes.iter().map(of_point).sum()
    }

    #[test]
    fn overlapping_beads_balance_in_force_and_torque() {
        let (first, second) = overlapping();
        let pulls = pulls(&look(&first, &second), &first, &second);
        let (mut net, mut torque, mut size) = (Vector::zeros(), Vector::zeros(), 0.0);
        for (bead, pulls) in [&first, &second].into_iter().zip(&pulls) {
            for (node, pull) in pulls.iter().enumerate() {
                net += pull;
                torque += bead.node(node).cross(pull);
                size += pull.norm();
            }
        }
        assert!(net.norm() < 1e-12 * size, "{:e}", net.norm() / size);
        assert!(torque.norm() < 1e-12 * size * first.extent(), "{:e}", torque.norm() / size);
    }

    #[test]
    fn forces_are_the_slope_of_the_energy() {
        let (first, second) = overlapping();
        let mut facing = look(&first, &second);
        // Next to a voxel's face they are not: there they pass over smoothly.
        let is_inside = |at: &Embedded| at.local.iter().all(|c| (BLENDED..=1.0 - BLENDED).contains(c));
        facing.presses.retain(|press| is_inside(&press.at));
        facing.probes.retain(|probe| is_inside(&probe.at));
        let pulls = pulls(&facing, &first, &second);
        let largest = pulls.iter().flatten().map(Vector::norm).fold(0.0, f64::max);
        let mut beads = [first, second];
        let mut compared = 0;
        for side in 0..2 {
            let stride = beads[side].lattice().stride();
            for (node, pull) in pulls[side].iter().enumerate() {
                if pull.norm() < 0.05 * largest {
                    continue;
                }
                for axis in 0..3 {
                    let mut at = |by: f64| {
                        beads[side].positions[axis * stride + node] += by;
                        let energy = energy(&facing, &beads[0], &beads[1]);
                        beads[side].positions[axis * stride + node] -= by;
                        energy
                    };
                    let step = 1e-6;
                    let slope = (at(step) - at(-step)) / (2.0 * step);
                    assert_relative_eq!(-slope, pull[axis], epsilon = 1e-5 * largest);
                    compared += 1;
                }
            }
        }
        assert!(compared > 30, "{compared} forces compared");
    }
}
