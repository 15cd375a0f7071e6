use crate::bead::Bead;
use bedswell_geometry::{Matrix, Vector};
use kiddo::{ImmutableKdTree, SquaredEuclidean};

/// Skin points nearer than this (swollen voxel edges) may touch.
const NEAR: f64 = 0.5;
/// Skin points closer than this when dry (voxel edges) are neighbours, not a fold.
const NEIGHBOURS: f64 = 3.0;

impl Bead {
    /// A place (m) where the bead's skin meets itself: two points that were far apart
    /// when dry lie together with opposed normals. `None` where the skin is free.
    pub fn self_contact(&self) -> Option<Vector> {
        let skin = &self.lattice().skin;
        let size = self.voxel_edge() * (self.volume() / self.dry_volume()).cbrt();
        let places: Vec<Vector> = (0..skin.len()).map(|point| self.skin_point(point)).collect();
        let normals = self.skin_normals();
        let points: Vec<[f64; 3]> = places.iter().map(|place| (*place).into()).collect();
        let tree: ImmutableKdTree<f64, 3> = ImmutableKdTree::new_from_slice(&points).ok()?;
        let half = 0.5 * self.lattice().across() as f64;
        let apart_when_dry = |a: usize, b: usize| {
            half * (Vector::from(skin.direction[a]) - Vector::from(skin.direction[b])).norm()
        };
        (0..places.len()).find_map(|a| {
            let near = tree
                .query(&points[a])
                .within::<SquaredEuclidean<f64>>((NEAR * size).powi(2))
                .unsorted()
                .execute();
            near.iter().find_map(|near| {
                let b = near.item as usize;
                let folded = normals[a].dot(&normals[b]) < -0.3 && apart_when_dry(a, b) > NEIGHBOURS;
                folded.then_some(places[a])
            })
        })
    }

    /// Outward unit normals of the skin points.
    pub(crate) fn skin_normals(&self) -> Vec<Vector> {
        let skin = &self.lattice().skin;
        let gradients = self.gradients();
        (0..skin.len())
            .map(|point| normal(&gradients[skin.host[point] as usize], skin.direction[point]))
            .collect()
    }
}

/// The outward normal of a skin point, carried along by the deformation (Nanson).
fn normal(f: &Matrix, dry: [f64; 3]) -> Vector {
    let columns = [f.column(0).into_owned(), f.column(1).into_owned(), f.column(2).into_owned()];
    let turned = columns[1].cross(&columns[2]) * dry[0]
        + columns[2].cross(&columns[0]) * dry[1]
        + columns[0].cross(&columns[1]) * dry[2];
    turned.try_normalize(0.0).unwrap_or_default()
}
