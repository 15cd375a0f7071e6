//! How contact forces are distributed, and the chains that the strong ones form.

use crate::assembly::{Assembly, Partner};
use bedswell_geometry::{Matrix, Vector};

/// Statistics of the contacts that carry force, those with floor, lid and wall included.
/// Loads from elsewhere (the gel) are not.
#[derive(Clone, Debug, PartialEq)]
pub struct ForceStatistics {
    /// Number of contacts.
    pub contacts: usize,
    /// Mean normal force (N).
    pub mean_force: f64,
    /// Normal forces over their mean, at the [`FORCE_QUANTILES`].
    pub quantiles: [f64; FORCE_QUANTILES.len()],
    /// Share of the contacts that carry more than the mean.
    pub share_above_mean: f64,
    /// Mean stress of the bed (Pa), positive in compression: contact force times the
    /// vector between centres, summed over the contacts and divided by the volume of the
    /// bed (Love 1927, Weber 1966, from memory).
    pub stress: Matrix,
    /// Largest principal stress (Pa), positive in compression.
    pub major_stress: f64,
    /// Its direction, a unit vector that points up.
    pub major_direction: Vector,
    /// Chains: groups of at least three grains joined by contacts that carry the mean
    /// force or more within 45 degrees of the major stress.
    pub chains: usize,
    /// Grains in all chains.
    pub chain_grains: usize,
    /// Grains in the largest of them.
    pub largest_chain: usize,
}

/// Where the distribution of forces is reported.
pub const FORCE_QUANTILES: [f64; 5] = [0.05, 0.25, 0.5, 0.75, 0.95];

impl ForceStatistics {
    /// Statistics of the contacts as the last
    /// [`compute_contacts`](Assembly::compute_contacts) left them; `None` where nothing
    /// touches.
    pub fn of(assembly: &Assembly) -> Option<Self> {
        let mut forces: Vec<f64> = assembly.contacts().map(|contact| contact.force).collect();
        if forces.is_empty() {
            return None;
        }
        let mean_force = forces.iter().sum::<f64>() / forces.len() as f64;
        forces.sort_unstable_by(f64::total_cmp);
        let above = forces.iter().filter(|&&force| force > mean_force).count();
        let stress = stress(assembly);
        let (major_stress, major_direction) = major(&stress);
        let groups = strong_groups(assembly, mean_force, &major_direction);
        let chains: Vec<usize> = groups.into_iter().filter(|&grains| grains >= CHAIN).collect();
        Some(Self {
            contacts: forces.len(),
            mean_force,
            quantiles: FORCE_QUANTILES.map(|level| quantile(&forces, level) / mean_force),
            share_above_mean: above as f64 / forces.len() as f64,
            stress,
            major_stress,
            major_direction,
            chains: chains.len(),
            chain_grains: chains.iter().sum(),
            largest_chain: chains.iter().copied().max().unwrap_or(0),
        })
    }
}

/// Fewest grains in a chain.
const CHAIN: usize = 3;

fn stress(assembly: &Assembly) -> Matrix {
    let volume = assembly.section() * assembly.filled_height();
    let moment: Matrix = (assembly.contacts())
        .map(|contact| (contact.normal * contact.force - contact.drag) * contact.branch.transpose())
        .sum();
    moment / volume
}

/// Largest eigenvalue of the symmetric part, and its direction.
fn major(stress: &Matrix) -> (f64, Vector) {
    let eigen = (0.5 * (stress + stress.transpose())).symmetric_eigen();
    let largest = eigen.eigenvalues.imax();
    let direction: Vector = eigen.eigenvectors.column(largest).into();
    (eigen.eigenvalues[largest], if direction.z < 0.0 { -direction } else { direction })
}

/// Sizes of the groups of grains that strong, aligned contacts join.
fn strong_groups(assembly: &Assembly, mean_force: f64, direction: &Vector) -> Vec<usize> {
    let mut parent: Vec<usize> = (0..assembly.radii.len()).collect();
    for contact in assembly.contacts() {
        let Partner::Grain(other) = contact.partner else { continue };
        let aligned = contact.normal.dot(direction).abs() >= std::f64::consts::FRAC_1_SQRT_2;
        if contact.force >= mean_force && aligned {
            let (a, b) = (root(&mut parent, contact.grain), root(&mut parent, other));
            parent[a.max(b)] = a.min(b);
        }
    }
    let mut sizes = vec![0; parent.len()];
    for grain in 0..parent.len() {
        sizes[root(&mut parent, grain)] += 1;
    }
    sizes.retain(|&size| size > 1);
    sizes
}

fn root(parent: &mut [usize], mut grain: usize) -> usize {
    while parent[grain] != grain {
        parent[grain] = parent[parent[grain]];
        grain = parent[grain];
    }
    grain
}

/// Quantile of sorted values, between the two nearest.
fn quantile(sorted: &[f64], level: f64) -> f64 {
    let place = level * (sorted.len() - 1) as f64;
    let (below, above) = (sorted[place.floor() as usize], sorted[place.ceil() as usize]);
    below + place.fract() * (above - below)
}
