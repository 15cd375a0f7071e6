//! Contact of a bead with itself, behind and between grains.
//!
//! Skin points that were far apart when dry repel each other once they come near: an
//! energy of their distance alone, smooth however the gel is crumpled, whose forces
//! balance in force and torque. Skins that meet so keep about half a voxel apart.

use crate::bead::Bead;
use crate::contact::turning;
use bedswell_geometry::{Matrix, Vector, visit_close_points};

/// Points nearer than this when dry (voxel edges) are neighbours on one skin.
const NEIGHBOURS: f64 = 3.0;
/// Pairs are listed whose points are nearer than this beyond that distance (free-swollen
/// voxel edges).
const REACH: f64 = 1.6;
/// Where points can go less far than this (free-swollen voxel edges) before pairs may be
/// missing, all pairs are looked for.
const LEAST_WAY: f64 = 0.1;
/// Where more than one point in so many has gone further, all pairs are looked for.
const FEW: usize = 16;
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
    listed: Listed,
    /// Volume that folded skins may have lost to each other (m³).
    pub(crate) overlap: f64,
    /// Pairs that repel each other.
    pub(crate) pressing: usize,
}

/// Where every skin point was when its pairs were last looked for.
#[derive(Clone, Debug, Default)]
struct Listed {
    /// About the skin's middle then, in the skin's size then.
    places: Vec<Vector>,
    /// Pairs were left out whose points were further apart than this, in the skin's size.
    apart: f64,
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
    /// Looks for pairs anew where any may be missing that are within `reach` (m) of repelling
    /// each other.
    pub(crate) fn renew(&mut self, bead: &Bead, law: FoldLaw, reach: f64) {
        let skin = Placed::of(bead);
        // Points that have gone less than this way, growth aside, have no pairs missing.
        let way = 0.5 * (skin.size * self.listed.apart - THICKNESS * law.edge - reach);
        if self.listed.places.len() == skin.places.len() && way > LEAST_WAY * law.edge {
            let before = self.listed.places.iter();
            let strayed: Vec<bool> = skin
                .seen
                .iter()
                .zip(before)
                .map(|(now, before)| (now - before).norm() * skin.size > way)
                .collect();
            let count = strayed.iter().filter(|strayed| **strayed).count();
            if count <= skin.places.len() / FEW {
                self.look_again(bead, law, &skin, &strayed);
                return;
            }
        }
        *self = Self::find(bead, law, skin);
    }

    fn find(bead: &Bead, law: FoldLaw, skin: Placed) -> Self {
        let reach = (THICKNESS + REACH) * law.edge;
        let mut pairs = Vec::new();
        visit_close_points(&skin.places, reach, |a, b| pairs.extend(FoldPair::of(bead, law, &skin, a, b)));
        let listed = Listed { apart: reach / skin.size, places: skin.seen };
        Self { pairs, listed, overlap: 0.0, pressing: 0 }
    }

    /// Looks for the pairs of the points that have strayed.
    fn look_again(&mut self, bead: &Bead, law: FoldLaw, skin: &Placed, strayed: &[bool]) {
        self.pairs.retain(|pair| !strayed[pair.a as usize] && !strayed[pair.b as usize]);
        let Listed { places, apart } = &mut self.listed;
        let again = || (0..strayed.len()).filter(|&point| strayed[point]);
        again().for_each(|point| places[point] = skin.seen[point]);
        for a in again() {
            for b in 0..places.len() {
                let twice = b == a || (strayed[b] && b < a);
                if !twice && (places[b] - places[a]).norm_squared() < *apart * *apart {
                    self.pairs.extend(FoldPair::of(bead, law, skin, a, b));
                }
            }
        }
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
        let places = places(bead, self.pairs.len());
        let mut crushed = 0.0;
        self.pressing = 0;
        for pair in &mut self.pairs {
            pair.clearance -= 2.0 * moved;
            if pair.clearance > 0.0 {
                continue;
            }
            let apart = places(pair.a) - places(pair.b);
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
    pub(crate) fn possible(
        &self,
        bead: &Bead,
        law: FoldLaw,
        reach: f64,
    ) -> impl Iterator<Item = (u32, Matrix)> {
        let places = places(bead, self.pairs.len());
        let near = self.pairs.iter().filter(move |pair| pair.clearance < reach);
        near.flat_map(move |pair| {
            let apart = places(pair.a) - places(pair.b);
            let normal = apart / apart.norm().max(f64::MIN_POSITIVE);
            let stiffness = turning(&normal) * (MARGIN * law.of_pair());
            [(pair.a, stiffness), (pair.b, stiffness)]
        })
    }
}

/// Where skin points are: found once for all where each is in more than one of the pairs.
fn places(bead: &Bead, pairs: usize) -> impl Fn(u32) -> Vector {
    let points = bead.lattice().skin.len();
    let known = if pairs > points { 0..points } else { 0..0 };
    let known: Vec<Vector> = known.map(|point| bead.skin_point(point)).collect();
    move |point| known.get(point as usize).copied().unwrap_or_else(|| bead.skin_point(point as usize))
}

impl FoldPair {
    /// Two points that are no neighbours on one skin.
    fn of(bead: &Bead, law: FoldLaw, skin: &Placed, a: usize, b: usize) -> Option<Self> {
        let clearance = (skin.places[a] - skin.places[b]).norm() - THICKNESS * law.edge;
        let is_far = bead.lattice().skin.apart_when_dry(a, b) > NEIGHBOURS;
        is_far.then_some(Self { a: a as u32, b: b as u32, clearance })
    }
}

/// Where the skin points are.
struct Placed {
    places: Vec<Vector>,
    /// About the middle, in the size.
    seen: Vec<Vector>,
    /// Root mean square distance from the middle (m).
    size: f64,
}

impl Placed {
    fn of(bead: &Bead) -> Self {
        let places: Vec<Vector> =
            (0..bead.lattice().skin.len()).map(|point| bead.skin_point(point)).collect();
        let count = places.len().max(1) as f64;
        let middle = places.iter().sum::<Vector>() / count;
        let square: f64 = places.iter().map(|place| (place - middle).norm_squared()).sum();
        let size = (square / count).sqrt().max(f64::MIN_POSITIVE);
        let seen = places.iter().map(|place| (place - middle) / size).collect();
        Self { places, seen, size }
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
        let mut folds = Folds::find(&bead, LAW, Placed::of(&bead));
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
        let forces = forces(&bead, &mut Folds::find(&bead, LAW, Placed::of(&bead)));
        let size: f64 = forces.iter().map(|(_, force)| force.norm()).sum();
        let net: Vector = forces.iter().map(|(_, force)| force).sum();
        let torque: Vector =
            forces.iter().map(|&(point, force)| bead.skin_point(point as usize).cross(&force)).sum();
        assert!(size > 0.0);
        assert!(net.norm() < 1e-12 * size && torque.norm() < 1e-12 * size * bead.extent());
    }

    /// A few points that go far are looked for by themselves; none of their pairs is missed, nor
    /// of those that all together drift, grow and turn a little.
    #[test]
    fn pairs_of_points_that_stray_are_found() {
        let mut bead = flattened();
        let mut folds = Folds::default();
        folds.renew(&bead, LAW, 0.1);
        let stride = bead.lattice().stride();
        let mut partial = 0;
        for round in 0..40 {
            for node in 0..bead.lattice().node_count() {
                let way = if node % 97 == round { 0.9 } else { 0.02 };
                let angle = (node * 7 + round * 3) as f64;
                bead.positions[node] = 1.001 * bead.positions[node] + way * angle.sin();
                bead.positions[stride + node] += 0.05 + way * angle.cos();
            }
            let full = Folds::find(&bead, LAW, Placed::of(&bead));
            let before = folds.listed.apart;
            folds.renew(&bead, LAW, 0.1);
            partial += usize::from(folds.listed.apart == before);
            let near = |folds: &Folds| {
                let place = |point: u32| bead.skin_point(point as usize);
                let is_near =
                    |pair: &&FoldPair| (place(pair.a) - place(pair.b)).norm() < THICKNESS * LAW.edge + 0.1;
                let key = |pair: &FoldPair| (pair.a.min(pair.b), pair.a.max(pair.b));
                let mut near: Vec<(u32, u32)> = folds.pairs.iter().filter(is_near).map(key).collect();
                near.sort_unstable();
                near
            };
            assert!(near(&full).len() > 10, "{} pairs near", near(&full).len());
            assert_eq!(near(&folds), near(&full), "round {round}");
        }
        assert!(partial > 20, "{partial} partial looks");
    }

    #[test]
    fn neighbours_on_one_skin_do_not_repel_each_other() {
        let bead = Bead::new(Arc::new(Lattice::new(8)), 4.0, Vector::zeros(), 2.0);
        let mut folds = Folds::find(&bead, LAW, Placed::of(&bead));
        assert!(forces(&bead, &mut folds).is_empty() && folds.pressing == 0);
    }
}
