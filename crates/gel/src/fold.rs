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
