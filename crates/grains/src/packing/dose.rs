use super::PackError;
use bedswell_geometry::volume_of_radius;

/// How many beads of `bead_diameter` (m) and `bead_density` (kg/m³) make up a
/// `dose` (dry gel per dry soil, kg/kg) among grains of the given diameters (m) and
/// `grain_density` (kg/m³), to the nearest bead.
///
/// # Errors
/// A number that is not above 0, a dose of less than half a bead, or one that gives
/// the beads more volume than the grains.
pub fn beads_for_dose(
    dose: f64,
    bead_diameter: f64,
    bead_density: f64,
    grains: &[f64],
    grain_density: f64,
) -> Result<usize, PackError> {
    let positive = [
        ("dose (kg/kg)", dose),
        ("bead diameter (m)", bead_diameter),
        ("dry bead density (kg/m³)", bead_density),
        ("grain density (kg/m³)", grain_density),
    ];
    if let Some(&(name, value)) = positive.iter().find(|(_, value)| !(value.is_finite() && *value > 0.0)) {
        return Err(PackError::NotPositive { name, value });
    }
    if grains.is_empty() {
        return Err(PackError::NoGrains);
    }
    let grain_volume: f64 = grains.iter().map(|diameter| volume_of_radius(0.5 * diameter)).sum();
    let ratio = dose * grain_density / bead_density;
    if ratio > 1.0 {
        return Err(PackError::DoseLeavesNoGrains { dose, ratio, largest: bead_density / grain_density });
    }
    let beads = ratio * grain_volume / volume_of_radius(0.5 * bead_diameter);
    if beads < 0.5 {
        let needed = (grains.len() as f64 / beads).ceil() as usize;
        return Err(PackError::DoseLeavesNoBead { dose, beads, grains: grains.len(), needed });
    }
    Ok(beads.round() as usize)
}
