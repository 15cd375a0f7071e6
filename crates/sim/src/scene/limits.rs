//! What cannot be seen from one key alone.

use super::budget::MOST_VOXELS;
use super::error::SceneError;
use super::raw::Node;
use super::room::{check_pot, check_room};
use super::section::Entry;
use super::time::check_records;
use super::toughness::check_toughness;
use super::{BeadAmount, Scene, SceneEstimate, SoilGrading};
use bedswell_geometry::{Cell, Vector};
use bedswell_grains::MassCurve;

/// Smallest part of a bead's dry diameter by which a given bead may overlap a sphere.
const OVERLAP_TOLERANCE: f64 = 1e-3;

/// Refuses a scene whose parts do not fit together.
pub(crate) fn check_limits(document: &Node, scene: &Scene) -> Result<(), SceneError> {
    let listed = matches!(scene.soil.grading, SoilGrading::Spheres { .. });
    if !listed && !scene.bed.open && scene.bed.lid_stress <= 0.0 {
        let key = if document.find("bed.depth").is_some() { "bed.depth" } else { "bed.lid_stress" };
        return Err(entry(document, key)
            .refuse("a random bed is made by pressing on it, so the load must be above zero"));
    }
    check_porosity(document, scene)?;
    check_beads_alone(document, scene)?;
    let estimate =
        scene.estimate().map_err(|error| entry(document, amount_key(scene)).refuse(error.to_string()))?;
    if estimate.voxels > scene.beads.voxel_budget as f64 {
        return Err(entry(document, amount_key(scene)).refuse(format!(
            "at {} voxels across the beads would have {:.3e} voxels and need some {:.1} GiB; beads.voxel_budget \
             allows {}: use fewer beads, a larger budget (up to {MOST_VOXELS}), or beads.across below {}",
            estimate.across,
            estimate.voxels,
            estimate.memory_bytes / f64::from(1 << 30),
            scene.beads.voxel_budget,
            estimate.across,
        )));
    }
    check_bead_size(document, scene, &estimate)?;
    check_pot(document, scene, &estimate)?;
    check_room(document, scene, &estimate)?;
    check_records(document, scene)?;
    check_toughness(document, scene, &estimate)?;
    check_given_centres(document, scene)
}

fn check_beads_alone(document: &Node, scene: &Scene) -> Result<(), SceneError> {
    match scene.beads.amount {
        _ if scene.soil.grading != SoilGrading::Absent => Ok(()),
        BeadAmount::Count(2..) => Ok(()),
        BeadAmount::Count(_) => {
            Err(entry(document, "beads.count").refuse("a bed without grains takes at least two beads"))
        }
        _ => Err(entry(document, amount_key(scene))
            .refuse("a bed without grains has no soil to dose; give beads.count instead")),
    }
}

fn check_bead_size(document: &Node, scene: &Scene, estimate: &SceneEstimate) -> Result<(), SceneError> {
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
    } else if scene.bed.pot.is_some() {
        "use a smaller bead or a wider pot".to_owned()
    } else {
        let needed = scene.bed.grains as f64 * (diameter / edge).powi(3);
        format!("use a smaller bead or at least {needed:.0} grains")
    };
    Err(entry(document, "beads.dry_diameter").refuse(format!(
        "the {state} bead, {diameter:.3e} m wide, is larger than the bed, {edge:.3e} m; the dry diameter must be \
         below {largest:.3e} m: {mend}"
    )))
}

/// Refuses a porosity that no pack of this grading can have.
///
/// Dense end: close packing by the formula of Farr 2013 (Powder Technol. 245:28,
/// coefficients second-hand) for the spread of the grading. Loose end: 0.09 looser
/// (0.64 against 0.55 for equal spheres; Jerkins et al. 2008, Phys. Rev. Lett.
/// 101:018301). Both have a margin, the loose one also for what floor and lid hold
/// apart, so that nothing attainable is refused here; the packing has the last word.
fn check_porosity(document: &Node, scene: &Scene) -> Result<(), SceneError> {
    const MARGIN: f64 = 0.025;
    const LOOSENING: f64 = 0.09;
    const WALLS: f64 = 0.04;
    let Some(porosity) = scene.bed.porosity else { return Ok(()) };
    let entry = entry(document, "bed.porosity");
    if matches!(scene.soil.grading, SoilGrading::Spheres { .. }) {
        return Err(entry.refuse("the soil lists its spheres where they lie; leave this key out"));
    }
    let Ok(grading) = scene.soil.grading() else { return Ok(()) };
    let densest = 1.0 - close_packing(log_spread(&grading.packed));
    let range = densest - MARGIN..=densest + LOOSENING + WALLS + MARGIN;
    if range.contains(&porosity) {
        return Ok(());
    }
    Err(entry.refuse(format!(
        "out of reach for this grading, whose spheres pack at porosities of about {:.2} to {:.2}; choose one in \
         between, or leave the key out to take the state that the preparation gives",
        range.start(),
        range.end()
    )))
}

/// Standard deviation, by mass, of the logarithm of size.
fn log_spread(curve: &MassCurve) -> f64 {
    // Mass is spread evenly over the logarithm of size between points.
    let (mut mean, mut square) = (0.0, 0.0);
    for ends in curve.points().windows(2) {
        let ((d1, p1), (d2, p2)) = (ends[0], ends[1]);
        let (low, high) = (d1.ln(), d2.ln());
        mean += (p2 - p1) * 0.5 * (low + high);
        square += (p2 - p1) * (low * low + low * high + high * high) / 3.0;
    }
    (square - mean * mean).max(0.0).sqrt()
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

pub(super) fn amount_key(scene: &Scene) -> &'static str {
    match scene.beads.amount {
        BeadAmount::Count(_) => "beads.count",
        BeadAmount::Dose(_) => "beads.dose",
        BeadAmount::At(_) => "beads.centres",
    }
}

/// The value under a key; the whole document where a default was taken.
pub(super) fn entry<'a>(document: &'a Node, key: &str) -> Entry<'a> {
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
