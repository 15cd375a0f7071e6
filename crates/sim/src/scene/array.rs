//! The table `[soil.array]`: eight equal spheres at the corners of a cube.

use super::SoilGrading;
use super::error::SceneError;
use super::raw::Node;
use super::section::Section;
use super::unit::Kind;
use bedswell_geometry::{Sphere, Vector};

/// Reads the array, if it is there, as listed spheres; also where the lower corner of its cell
/// lies when the middle between the spheres is the origin.
pub(super) fn read_array(document: &Node) -> Result<Option<(SoilGrading, Vector)>, SceneError> {
    let section = Section::new(document, "soil.array", &["diameter", "gap"])?;
    if !section.is_given() {
        return Ok(None);
    }
    let diameter = section.need("diameter", "diameter = \"2 mm\"")?.positive(Kind::Length)?;
    let gap = section.need("gap", "gap = \"1 mm\"")?.quantity(Kind::Length, 0.0..=f64::MAX)?;
    let radius = 0.5 * diameter;
    let ends = [radius, radius + gap + diameter];
    let corner = |k: usize| Vector::from_fn(|axis, _| ends[k >> axis & 1]);
    let spheres = (0..8).map(|k| Sphere { centre: corner(k), radius }).collect();
    let edge = gap + 2.0 * diameter;
    let lower = Vector::from_element(-0.5 * edge);
    Ok(Some((SoilGrading::Spheres { spheres, size: [edge; 3], periodic: false }, lower)))
}
