//! What cannot be seen from one key alone.

use super::error::SceneError;
use super::raw::Node;
use super::section::Entry;
use super::{BeadAmount, Scene, SoilGrading};
use bedswell_geometry::{Cell, Vector};

/// Voxels a scene may have over all its beads.
pub(crate) const VOXEL_BUDGET: f64 = 1e7;
/// Smallest part of a bead's dry diameter by which a given bead may overlap a sphere.
const OVERLAP_TOLERANCE: f64 = 1e-3;

/// Refuses a scene whose parts do not fit together.
pub(crate) fn check_limits(document: &Node, scene: &Scene) -> Result<(), SceneError> {
    check_porosity(document, scene)?;
    let estimate = scene.estimate();
    if matches!(scene.beads.amount, BeadAmount::Dose(_)) && estimate.beads < 1.0 {
        let grains = scene.bed.grains;
        return Err(entry(document, "beads.dose").refuse(format!(
            "leaves no bead: {grains} grains are too few for one bead of this size; raise the dose or bed.grains, or \
             use smaller beads"
        )));
    }
    if estimate.voxels >= VOXEL_BUDGET {
        let gibibytes = estimate.voxels * BYTES_PER_VOXEL / (1u64 << 30) as f64;
        let key = if estimate.voxels_per_bead >= VOXEL_BUDGET { "beads.across" } else { amount_key(scene) };
        return Err(entry(document, key).refuse(format!(
            "the beads would have {:.3e} voxels, some {gibibytes:.0} GiB; at most {VOXEL_BUDGET:.0e} are allowed: \
             lower beads.across or the number of beads",
            estimate.voxels
        )));
    }
    check_bead_size(document, scene)?;
    check_given_centres(document, scene)
}

/// Memory of one voxel with its nodes, bonds and solver vectors (bytes).
pub(crate) const BYTES_PER_VOXEL: f64 = 1500.0;

fn check_bead_size(document: &Node, scene: &Scene) -> Result<(), SceneError> {
    let estimate = scene.estimate();
    let edge = estimate.bed_edge_m;
    let listed = matches!(scene.soil.grading, SoilGrading::Spheres { .. });
    let (diameter, state) = if listed {
        (scene.beads.dry_diameter, "dry")
    } else {
        (estimate.swollen_diameter_m, "free-swollen")
    };
    if diameter < edge {
        return Ok(());
    }
    let largest = scene.beads.dry_diameter * edge / diameter;
    let mend = if listed {
        "use a smaller bead or a larger soil.cell".to_owned()
    } else {
        let needed = scene.bed.grains as f64 * (diameter / edge).powi(3);
        format!("use a smaller bead or at least {needed:.0} grains")
    };
    Err(entry(document, "beads.dry_diameter").refuse(format!(
        "the {state} bead, {diameter:.3e} m wide, is larger than the bed, {edge:.3e} m; the dry diameter must be \
         below {largest:.3e} m: {mend}"
    )))
}

/// Loosest and densest states of spheres: close packing by the formula of Farr 2013
/// (Powder Technol. 245:28, coefficients second-hand) for the spread of the grading,
/// loose packing 0.09 below (0.64 and 0.55 for equal spheres; Jerkins et al. 2008,
/// Phys. Rev. Lett. 101:018301), each with a margin so that nothing attainable is
/// refused here; the packing itself has the last word.
fn check_porosity(document: &Node, scene: &Scene) -> Result<(), SceneError> {
    const MARGIN: f64 = 0.025;
    const LOOSENING: f64 = 0.09;
    let Some(porosity) = scene.bed.porosity else { return Ok(()) };
    if matches!(scene.soil.grading, SoilGrading::Spheres { .. }) {
        return Err(entry(document, "bed.porosity")
            .refuse("the soil lists its spheres where they lie; leave this key out"));
    }
    let densest = 1.0 - close_packing(scene.soil.grading.log_spread());
    let range = densest - MARGIN..=densest + LOOSENING + MARGIN;
    if range.contains(&porosity) {
        return Ok(());
    }
    Err(entry(document, "bed.porosity").refuse(format!(
        "out of reach for this grading, whose spheres pack at porosities of about {:.2} to {:.2}; choose one in \
         between, or leave the key out to take the state that the preparation gives",
        range.start(),
        range.end()
    )))
}

/// Solid fraction at random close packing of lognormal spheres with log-spread σ.
fn close_packing(sigma: f64) -> f64 {
    let turn = 1.0 - (-0.75 * sigma.powf(0.7) - 0.025 * sigma.powi(4)).exp();
    1.0 - 0.57 * (-sigma).exp()
        + 0.2135 * (-0.57 * sigma / 0.2135).exp()
        + 0.0019 * ((2.0 * std::f64::consts::PI * turn).cos() - 1.0)
}

fn check_given_centres(document: &Node, scene: &Scene) -> Result<(), SceneError> {
    let (BeadAmount::At(centres), SoilGrading::Spheres { spheres, size, periodic }) =
        (&scene.beads.amount, &scene.soil.grading)
    else {
        return Ok(());
    };
    let cell = Cell { size: Vector::from(*size), periodic: [*periodic, *periodic, false] };
    let radius = 0.5 * scene.beads.dry_diameter;
    let listed = entry(document, "beads.centres").list()?;
    for (index, (centre, entry)) in
        centres.iter().map(|centre| Vector::from(*centre)).zip(&listed).enumerate()
    {
        for axis in 0..3 {
            let inside = centre[axis] >= radius && centre[axis] <= cell.size[axis] - radius;
            if !cell.periodic[axis] && !inside {
                return Err(entry.refuse(format!(
                    "the dry bead sticks out of the cell, which is {:.3e} m long along {}",
                    cell.size[axis],
                    ["x", "y", "z"][axis]
                )));
            }
        }
        let overlaps = |other: &Vector, reach: f64| {
            cell.separation(&centre, other).norm() < reach - OVERLAP_TOLERANCE * 2.0 * radius
        };
        if let Some(sphere) = spheres.iter().position(|s| overlaps(&s.centre, s.radius + radius)) {
            return Err(entry.refuse(format!("the dry bead overlaps sphere {} of the list", sphere + 1)));
        }
        if let Some(other) = centres[..index].iter().position(|c| overlaps(&Vector::from(*c), 2.0 * radius)) {
            return Err(entry.refuse(format!("the dry bead overlaps bead {}", other + 1)));
        }
    }
    Ok(())
}

fn amount_key(scene: &Scene) -> &'static str {
    match scene.beads.amount {
        BeadAmount::Count(_) => "beads.count",
        BeadAmount::Dose(_) => "beads.dose",
        BeadAmount::At(_) => "beads.centres",
    }
}

/// The value under a key; the whole document where a default was taken.
fn entry<'a>(document: &'a Node, key: &str) -> Entry<'a> {
    Entry { key: key.to_owned(), node: document.find(key).unwrap_or(document) }
}

#[cfg(test)]
mod tests {
    use super::close_packing;

    #[test]
    fn close_packing_agrees_with_the_published_formula_to_its_printed_digits() {
        // Values of Farr's formula, computed independently.
        for (sigma, density) in [(0.0, 0.6435), (0.2, 0.6570), (0.4, 0.6885), (0.6, 0.7267)] {
            assert!((close_packing(sigma) - density).abs() < 0.51e-4, "{sigma}: {}", close_packing(sigma));
        }
    }
}
