use super::Lattice;
use bedswell_geometry::Vector;

/// Finds the voxels that are still connected within a reach.
pub(crate) struct Neighbourhood {
    /// Voxel edges.
    reach: f64,
    seen: Vec<u32>,
    round: u32,
    queue: Vec<(usize, f64)>,
}

impl Neighbourhood {
    pub(crate) fn new(lattice: &Lattice, reach: f64) -> Self {
        Self { reach, seen: vec![0; lattice.voxel_count()], round: 0, queue: Vec::new() }
    }

    /// The voxels within reach of a place (voxel edges from the centre) that intact bonds
    /// connect to one of `seeds` without leaving it, each with the weight 1 - r²/ℓ².
    pub(crate) fn find(
        &mut self,
        lattice: &Lattice,
        seeds: impl Iterator<Item = usize>,
        place: &Vector,
    ) -> &[(usize, f64)] {
        self.round += 1;
        self.queue.clear();
        let square = self.reach * self.reach;
        let weight =
            |voxel: usize| 1.0 - (Vector::from(lattice.voxel_offset(voxel)) - place).norm_squared() / square;
        for voxel in seeds {
            if self.seen[voxel] != self.round {
                self.seen[voxel] = self.round;
                self.queue.push((voxel, weight(voxel).max(f64::MIN_POSITIVE)));
            }
        }
        let mut at = 0;
        while let Some(&(voxel, _)) = self.queue.get(at) {
            at += 1;
            for next in (0..6).filter_map(|face| lattice.neighbour(voxel, face)) {
                if self.seen[next] != self.round {
                    self.seen[next] = self.round;
                    let weight = weight(next);
                    if weight > 0.0 {
                        self.queue.push((next, weight));
                    }
                }
            }
        }
        &self.queue
    }
}
