use super::Beads;
use std::f64::consts::PI;

/// Voxels of all beads that a scene has without saying so: some minutes a pack.
pub(super) const USUAL_VOXELS: usize = 300_000;
/// Voxels that a scene may ask for: more than the memory of most machines holds.
pub(super) const MOST_VOXELS: usize = 10_000_000;
/// Fewest voxels across to which a budget brings beads down. Contact forces are some 5 %
/// off at 16 across; the scene itself must ask for what is coarser.
const LEAST_ACROSS: usize = 12;

impl Beads {
    /// Voxels across the dry diameter of each of `count` beads: as many as asked for, or
    /// as the budget allows, but not below 12 (or what is asked for, if that is less).
    pub fn across_for(&self, count: usize) -> usize {
        let least = self.across.min(LEAST_ACROSS);
        let fits = |across: &usize| voxels(count, *across) <= self.voxel_budget as f64;
        (least..=self.across).rev().find(fits).unwrap_or(least)
    }
}

/// Voxels of `count` balls, the cut ones by their part.
pub(super) fn voxels(count: usize, across: usize) -> f64 {
    count as f64 * PI / 6.0 * (across as f64).powi(3)
}

#[cfg(test)]
mod tests {
    use crate::{BeadAmount, Beads};

    fn across(asked: usize, voxel_budget: usize, count: usize) -> usize {
        let beads = Beads {
            amount: BeadAmount::Count(count),
            dry_diameter: 1e-3,
            across: asked,
            voxel_budget,
            held: false,
        };
        beads.across_for(count)
    }

    #[test]
    fn a_budget_lowers_across_to_what_fits_but_not_below_twelve() {
        // π/6 of 20³, 19³ and 12³ are 4189, 3591 and 905 voxels.
        assert_eq!(across(20, 42_000, 10), 20);
        assert_eq!(across(20, 41_000, 10), 19);
        assert_eq!(across(20, 9_100, 10), 12);
        assert_eq!(across(20, 100, 10), 12);
        assert_eq!(across(8, 100, 10), 8);
    }
}
