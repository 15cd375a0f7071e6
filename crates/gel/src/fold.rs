//! Contact of a bead with itself, behind and between grains.
//!
//! Skin points that were far apart when dry repel each other once they come near: an
//! energy of their distance alone, smooth however the gel is crumpled, whose forces
//! balance in force and torque. Skins that meet so keep about half a voxel apart.

use crate::bead::Bead;
use bedswell_geometry::{Matrix, Vector};
use kiddo::{ImmutableKdTree, SquaredEuclidean};

/// Points nearer than this when dry (voxel edges) are neighbours on one skin.
const NEIGHBOURS: f64 = 3.0;
/// Distance at which points begin to repel each other (free-swollen voxel edges).
const THICKNESS: f64 = 0.6;
/// Points of the other skin that a point typically presses on at once.
const SHARED_BY: f64 = 4.0;
/// What remains of the distance where skins count as overlapping (of the thickness).
const CRUSHED: f64 = 0.25;

/// Pairs of skin points that may repel each other.
#[derive(Clone, Debug, Default)]
pub(crate) struct Folds {
    pairs: Vec<(u32, u32)>,
    /// Volume that folded skins may have lost to each other (m³).
    pub(crate) overlap: f64,
    /// Pairs that repel each other.
    pub(crate) pressing: usize,
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
    /// The pairs within `reach` (m) of repelling each other.
    pub(crate) fn find(bead: &Bead, law: FoldLaw, reach: f64) -> Self {
        let skin = &bead.lattice().skin;
        let places: Vec<[f64; 3]> = (0..skin.len()).map(|point| bead.skin_point(point).into()).collect();
        let Ok(tree) = ImmutableKdTree::<f64, 3>::new_from_slice(&places) else { return Self::default() };
        let search = (THICKNESS * law.edge + reach).powi(2);
        let mut pairs = Vec::new();
        for (point, place) in places.iter().enumerate() {
            let near = tree.query(place).within::<SquaredEuclidean<f64>>(search).unsorted().execute();
            pairs.extend(
                near.iter()
                    .map(|near| near.item as usize)
                    .filter(|&other| other > point && skin.apart_when_dry(point, other) > NEIGHBOURS)
                    .map(|other| (point as u32, other as u32)),
            );
        }
        pairs.sort_unstable();
        Self { pairs, overlap: 0.0, pressing: 0 }
    }

    /// Visits the pairs that repel each other, with the force (N) on the first point.
    pub(crate) fn press(&mut self, bead: &Bead, law: FoldLaw, mut visit: impl FnMut(u32, u32, Vector)) {
        let thickness = THICKNESS * law.edge;
        let mut crushed = 0.0;
        self.pressing = 0;
        for &(a, b) in &self.pairs {
            let apart = bead.skin_point(a as usize) - bead.skin_point(b as usize);
            let square = apart.norm_squared();
            if square < thickness * thickness {
                let distance = square.sqrt().max(f64::MIN_POSITIVE);
                visit(a, b, apart * (law.of_pair() * (thickness - distance) / distance));
                self.pressing += 1;
                crushed += (CRUSHED * thickness - distance).max(0.0);
            }
        }
        self.overlap = crushed * law.area;
    }

    /// Every point of a pair with a bound on the pair's stiffness (N/m).
    pub(crate) fn possible(&self, law: FoldLaw) -> impl Iterator<Item = (u32, Matrix)> + '_ {
        let stiffness = Matrix::from_diagonal_element(MARGIN * law.of_pair());
        self.pairs.iter().flat_map(move |&(a, b)| [(a, stiffness), (b, stiffness)])
    }
}

/// Bound on a pair's part in the stiffness of a node: both ends move, through nodes with
/// weights of both signs.
const MARGIN: f64 = 4.0;

#[cfg(test)]
mod tests {
    use super::*;
    use crate::lattice::Lattice;
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
        folds.press(bead, LAW, |a, b, force| forces.extend([(a, force), (b, -force)]));
        forces
    }

    /// Half the stiffness of a pair times the square of what it lacks to the thickness (J).
    fn energy(bead: &Bead, folds: &Folds) -> f64 {
        let place = |point: u32| bead.skin_point(point as usize);
        let lacking = |&(a, b): &(u32, u32)| THICKNESS * LAW.edge - (place(a) - place(b)).norm();
        folds.pairs.iter().map(|pair| 0.5 * LAW.of_pair() * lacking(pair).max(0.0).powi(2)).sum()
    }

    #[test]
    fn forces_are_the_slope_of_the_energy() {
        let mut bead = flattened();
        let mut folds = Folds::find(&bead, LAW, 0.1);
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
        let forces = forces(&bead, &mut Folds::find(&bead, LAW, 0.1));
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
        let mut folds = Folds::find(&bead, LAW, 1.0);
        assert!(forces(&bead, &mut folds).is_empty() && folds.pressing == 0);
    }
}
