//! Contact of a bead with itself, behind and between grains.
//!
//! Skin points that were far apart when dry repel each other once they come near: an
//! energy of their distance alone, smooth however the gel is crumpled, whose forces
//! balance in force and torque. Skins that meet so keep about half a voxel apart.

use crate::bead::Bead;
use crate::lattice::{Lattice, POINT_WAY};
use bedswell_geometry::{Matrix, Vector, visit_close_points};

/// Points nearer than this when dry (voxel edges) are neighbours on one skin.
const NEIGHBOURS: f64 = 3.0;
/// Pairs are listed whose points are nearer than this beyond that distance (free-swollen
/// voxel edges).
const REACH: f64 = 0.8;
/// Distance at which points begin to repel each other (free-swollen voxel edges).
const THICKNESS: f64 = 0.6;
/// Points of the other skin that a point typically presses on at once.
const SHARED_BY: f64 = 4.0;
/// What remains of the distance where skins count as overlapping (of the thickness).
const CRUSHED: f64 = 0.25;

/// Pairs of skin points that may repel each other.
#[derive(Clone, Debug, Default)]
pub(crate) struct Folds {
    pairs: Vec<FoldPair>,
    /// Nodes where they were when pairs were last looked for, and the free-swollen voxel
    /// edge then (m).
    listed: (Vec<f64>, f64),
    /// Volume that folded skins may have lost to each other (m³).
    pub(crate) overlap: f64,
    /// Pairs that repel each other.
    pub(crate) pressing: usize,
}

#[derive(Clone, Copy, Debug)]
struct FoldPair {
    a: u32,
    b: u32,
    /// What the points may come nearer by before they can repel each other (m).
    clearance: f64,
}

/// How folds push.
#[derive(Clone, Copy, Debug)]
pub(crate) struct FoldLaw {
    /// Stiffness of a skin point (N/m).
    pub(crate) stiffness: f64,
    /// Area that it stands for (m²).
    pub(crate) area: f64,
    /// Edge of a free-swollen voxel (m).
    pub(crate) edge: f64,
}

impl FoldLaw {
    fn of_pair(self) -> f64 {
        self.stiffness / SHARED_BY
    }
}

impl Folds {
    /// Looks for pairs anew if any may be missing that are within `reach` (m) of repelling
    /// each other.
    pub(crate) fn renew(&mut self, bead: &Bead, law: FoldLaw, reach: f64) {
        let (listed, edge) = &self.listed;
        let complete = listed.len() == bead.positions.len() && {
            // Pairs left out were further apart than this; growth has taken them further
            // apart, distortion nearer at most.
            let apart = (THICKNESS + REACH) * edge;
            let Change { growth, distortion } = Change::between(listed, &bead.positions, bead.lattice());
            growth * apart - 2.0 * distortion > THICKNESS * law.edge + reach
        };
        if !complete {
            *self = Self::find(bead, law);
        }
    }

    fn find(bead: &Bead, law: FoldLaw) -> Self {
        let skin = &bead.lattice().skin;
        let places: Vec<Vector> = (0..skin.len()).map(|point| bead.skin_point(point)).collect();
        let mut pairs = Vec::new();
        visit_close_points(&places, (THICKNESS + REACH) * law.edge, |a, b| {
            if skin.apart_when_dry(a, b) > NEIGHBOURS {
                let clearance = (places[a] - places[b]).norm() - THICKNESS * law.edge;
                pairs.push(FoldPair { a: a as u32, b: b as u32, clearance });
            }
        });
        Self { pairs, listed: (bead.positions.clone(), law.edge), overlap: 0.0, pressing: 0 }
    }

    /// Visits the pairs that repel each other, with the force (N) on the first point.
    /// Since the last visit no point has moved by more than `moved` (m).
    pub(crate) fn press(
        &mut self,
        bead: &Bead,
        law: FoldLaw,
        moved: f64,
        mut visit: impl FnMut(u32, u32, Vector),
    ) {
        let thickness = THICKNESS * law.edge;
        let mut crushed = 0.0;
        self.pressing = 0;
        for pair in &mut self.pairs {
            pair.clearance -= 2.0 * moved;
            if pair.clearance > 0.0 {
                continue;
            }
            let apart = bead.skin_point(pair.a as usize) - bead.skin_point(pair.b as usize);
            let distance = apart.norm().max(f64::MIN_POSITIVE);
            pair.clearance = distance - thickness;
            if distance < thickness {
                visit(pair.a, pair.b, apart * (law.of_pair() * (thickness - distance) / distance));
                self.pressing += 1;
                crushed += (CRUSHED * thickness - distance).max(0.0);
            }
        }
        self.overlap = crushed * law.area;
    }

    /// Every point of a pair within `reach` (m) of repelling, with a bound on the pair's
    /// stiffness (N/m).
    pub(crate) fn possible(&self, law: FoldLaw, reach: f64) -> impl Iterator<Item = (u32, Matrix)> + '_ {
        let stiffness = Matrix::from_diagonal_element(MARGIN * law.of_pair());
        let near = self.pairs.iter().filter(move |pair| pair.clearance < reach);
        near.flat_map(move |pair| [(pair.a, stiffness), (pair.b, stiffness)])
    }
}

/// How a shape has changed: growth about its middle, and what is left (m) at most.
struct Change {
    growth: f64,
    distortion: f64,
}

impl Change {
    fn between(before: &[f64], now: &[f64], lattice: &Lattice) -> Self {
        let (stride, nodes) = (before.len() / 3, lattice.node_count());
        let place = |of: &[f64], node: usize| Vector::new(of[node], of[stride + node], of[2 * stride + node]);
        let middle = |of: &[f64]| (0..nodes).map(|node| place(of, node)).sum::<Vector>() / nodes as f64;
        let (from, to) = (middle(before), middle(now));
        let size = |of: &[f64], middle: Vector| {
            (0..nodes).map(|node| (place(of, node) - middle).norm_squared()).sum::<f64>().sqrt()
        };
        let growth = size(now, to) / size(before, from);
        let moved = |node: usize| (place(now, node) - to) - (place(before, node) - from) * growth;
        let distortion = (0..nodes).map(|node| moved(node).norm_squared()).fold(0.0, f64::max).sqrt();
        Self { growth, distortion: POINT_WAY * distortion }
    }
}

/// Bound on a pair's part in the stiffness of a node: both ends move, through nodes with
/// weights of both signs.
const MARGIN: f64 = 4.0;

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;
    use std::sync::Arc;

    const LAW: FoldLaw = FoldLaw { stiffness: 3.0, area: 0.5, edge: 2.0 };

    /// A bead flattened along x until its opposite skins lie closer than the thickness.
    fn flattened() -> Bead {
        let mut bead = Bead::new(Arc::new(Lattice::new(8)), 4.0, Vector::zeros(), 2.0);
        let stride = bead.lattice().stride();
        for node in 0..bead.lattice().node_count() {
            let [x, y, z] = bead.lattice().node_offset(node);
            bead.positions[node] = 0.1 * x + 0.02 * (y * z).sin();
            bead.positions[stride + node] += 0.05 * x * z;
        }
        bead
    }

    fn forces(bead: &Bead, folds: &mut Folds) -> Vec<(u32, Vector)> {
        let mut forces = Vec::new();
        folds.press(bead, LAW, 0.0, |a, b, force| forces.extend([(a, force), (b, -force)]));
        forces
    }

    /// Half the stiffness of a pair times the square of what it lacks to the thickness (J).
    fn energy(bead: &Bead, folds: &Folds) -> f64 {
        let place = |point: u32| bead.skin_point(point as usize);
        let lacking = |pair: &FoldPair| THICKNESS * LAW.edge - (place(pair.a) - place(pair.b)).norm();
        folds.pairs.iter().map(|pair| 0.5 * LAW.of_pair() * lacking(pair).max(0.0).powi(2)).sum()
    }

    #[test]
    fn forces_are_the_slope_of_the_energy() {
        let mut bead = flattened();
        let mut folds = Folds::find(&bead, LAW);
        let mut pulls = vec![0.0; bead.positions.len()];
        let stride = bead.lattice().stride();
        for (point, force) in forces(&bead, &mut folds) {
            for (node, weight) in bead.lattice().skin.terms(point as usize) {
                (0..3).for_each(|axis| pulls[axis * stride + node] += weight * force[axis]);
            }
        }
        let largest = pulls.iter().fold(0.0_f64, |most, pull| most.max(pull.abs()));
        assert!(largest > 0.0);
        for place in (0..pulls.len()).step_by(7) {
            let mut at = |by: f64| {
                bead.positions[place] += by;
                let energy = energy(&bead, &folds);
                bead.positions[place] -= by;
                energy
            };
            let step = 1e-5;
            let slope = (at(step) - at(-step)) / (2.0 * step);
            assert_relative_eq!(-slope, pulls[place], epsilon = 1e-6 * largest);
        }
    }

    #[test]
    fn forces_balance_in_force_and_torque() {
        let bead = flattened();
        let forces = forces(&bead, &mut Folds::find(&bead, LAW));
        let size: f64 = forces.iter().map(|(_, force)| force.norm()).sum();
        let net: Vector = forces.iter().map(|(_, force)| force).sum();
        let torque: Vector =
            forces.iter().map(|&(point, force)| bead.skin_point(point as usize).cross(&force)).sum();
        assert!(size > 0.0);
        assert!(net.norm() < 1e-12 * size && torque.norm() < 1e-12 * size * bead.extent());
    }

    #[test]
    fn neighbours_on_one_skin_do_not_repel_each_other() {
        let bead = Bead::new(Arc::new(Lattice::new(8)), 4.0, Vector::zeros(), 2.0);
        let mut folds = Folds::find(&bead, LAW);
        assert!(forces(&bead, &mut folds).is_empty() && folds.pressing == 0);
    }
}
