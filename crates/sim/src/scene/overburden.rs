use super::error::SceneError;
use super::section::Section;
use super::unit::Kind;
use bedswell_gel::WATER_DENSITY;

/// Largest stress (Pa) on a bed, about that under 50 m of soil. Sand begins to crush at a
/// few MPa, and its grains here never do (common practice, no one source).
pub(super) const MOST_STRESS: f64 = 1e6;
/// Standard gravity (m/s²), by definition.
const GRAVITY: f64 = 9.80665;

/// The vertical stress that the bed bears under its lid (Pa): given as it is, or as the
/// effective stress at a depth. `flooded` is the density of the grains (kg/m³) if they lie
/// in water, which then carries part of their weight; under an open top there is no stress.
pub(super) fn read_lid_stress(
    section: &Section<'_>,
    open: bool,
    flooded: Option<f64>,
) -> Result<f64, SceneError> {
    let (stress, depth) = (section.get("lid_stress"), section.get("depth"));
    if open {
        return match stress.or(depth) {
            Some(entry) => {
                Err(entry.refuse("nothing lies on an open top; leave this key out, or give top = \"lid\""))
            }
            None => Ok(0.0),
        };
    }
    match (stress, depth) {
        (Some(stress), None) => stress.quantity(Kind::Stress, 0.0..=MOST_STRESS),
        (None, Some(depth)) => {
            let bulk =
                section.need("bulk_density", "bulk_density = \"1500 kg/m3\"")?.positive(Kind::Density)?;
            let stress = overburden(depth.quantity(Kind::Length, 0.0..=100.0)?, bulk, flooded);
            if stress < 0.0 {
                return Err(depth.refuse(format!(
                    "these grains float in water, whose density is {WATER_DENSITY} kg/m3: give soil.density above \
                     that, or leave out flooded"
                )));
            }
            if stress > MOST_STRESS {
                return Err(depth.refuse(format!(
                    "comes to a stress of {stress:.3e} Pa, and grains begin to crush, which is not computed, beyond \
                     the {MOST_STRESS:.0e} Pa that are allowed: choose a smaller depth"
                )));
            }
            Ok(stress)
        }
        (Some(_), Some(depth)) => {
            Err(depth.refuse("the load is given twice; keep either lid_stress or depth with bulk_density"))
        }
        (None, None) => {
            let mend =
                "write lid_stress = \"0.2 kPa\", or depth = \"30 cm\" with bulk_density = \"1500 kg/m3\"";
            Err(section.missing("lid_stress", mend.into()))
        }
    }
}

/// Effective vertical stress (Pa) at a depth (m) in soil of a dry bulk density (kg/m³):
/// its weight, less the buoyancy of grains of the density `flooded` in water (Terzaghi's
/// principle of effective stress).
fn overburden(depth: f64, bulk_density: f64, flooded: Option<f64>) -> f64 {
    let buoyancy = flooded.map_or(0.0, |grains| WATER_DENSITY / grains);
    depth * bulk_density * (1.0 - buoyancy) * GRAVITY
}

#[cfg(test)]
mod tests {
    use super::overburden;
    use approx::assert_relative_eq;

    #[test]
    fn water_carries_the_volume_of_the_grains() {
        let dry = overburden(0.3, 1500.0, None);
        let wet = overburden(0.3, 1500.0, Some(2650.0));
        assert_relative_eq!(dry, 4412.9925, max_relative = 1e-12);
        // Soil solids take 1500/2650 of the volume and displace as much water.
        let displaced = 0.3 * 1500.0 / 2650.0 * 997.0 * 9.80665;
        assert_relative_eq!(wet, dry - displaced, max_relative = 1e-12);
    }
}
