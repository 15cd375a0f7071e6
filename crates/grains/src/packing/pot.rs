use bedswell_geometry::Vector;
use std::f64::consts::PI;

/// A round pot to pack into.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pot {
    /// Inner diameter (m).
    pub diameter: f64,
    /// Weight less buoyancy of the grains' solid (N/m³), as
    /// [`submerged_weight`] gives it; 0 for none.
    pub grain_weight: f64,
    /// The same of the dry beads.
    pub bead_weight: f64,
    /// Whether the lid is taken off once it has levelled the bed.
    pub open: bool,
}

impl Pot {
    /// Area of the floor (m²).
    pub(super) fn section(&self) -> f64 {
        0.25 * PI * self.diameter * self.diameter
    }

    /// Width of the cell that holds the pot, its height (m) as given.
    pub(super) fn size(&self, height: f64) -> Vector {
        Vector::new(self.diameter, self.diameter, height)
    }
}

/// Weight less buoyancy per volume of a solid (N/m³), from its density and that of the
/// fluid around it (kg/m³).
pub fn submerged_weight(density: f64, fluid_density: f64) -> f64 {
    (density - fluid_density) * STANDARD_GRAVITY
}

/// m/s².
const STANDARD_GRAVITY: f64 = 9.80665;

/// By how much the mean porosity of equal spheres in a round pot is expected to exceed
/// the 0.40 of a wide bed, for grains of `ratio` times the pot's diameter (0 to 0.5):
/// 0.05 x + 0.412 x² (Dixon 1988, from memory).
pub fn wall_porosity_rise(ratio: f64) -> f64 {
    ratio * (0.05 + 0.412 * ratio)
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    #[test]
    fn narrow_pots_are_as_loose_as_dixon_found() {
        // Computed from Dixon 1988 as recalled.
        for (ratio, porosity) in
            [(0.05, 0.40353), (0.1, 0.40912), (0.2, 0.42648), (0.3, 0.45208), (0.5, 0.528)]
        {
            assert_relative_eq!(0.4 + wall_porosity_rise(ratio), porosity, epsilon = 1.0e-9);
        }
    }

    #[test]
    fn quartz_in_water_weighs_sixteen_kilonewtons() {
        assert_relative_eq!(submerged_weight(2650.0, 1000.0), 16_180.97, epsilon = 0.01);
    }
}
