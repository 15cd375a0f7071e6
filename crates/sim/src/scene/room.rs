//! Whether a bed has room for its beads.

use super::error::SceneError;
use super::limits::{amount_key, entry};
use super::overburden::MOST_STRESS;
use super::raw::Node;
use super::{Scene, SceneEstimate};
use crate::figures::digits;
use bedswell_gel::WATER_DENSITY;

/// Share of the volume below which random spheres no longer touch from end to end (Scher &
/// Zallen 1970, J. Chem. Phys. 53:3759, from memory).
const CONNECTED: f64 = 0.16;
/// Fewest diameters of the largest grain across a pot.
const POT_GRAINS: f64 = 3.0;
/// Fewest layers of the largest grain.
const LAYERS: f64 = 2.0;

/// Refuses more gel than grains can lie in and still be a bed.
pub(super) fn check_room(document: &Node, scene: &Scene, estimate: &SceneEstimate) -> Result<(), SceneError> {
    if estimate.grains == 0 {
        return Ok(());
    }
    let amount = entry(document, amount_key(scene));
    if scene.bed.lid_held || scene.bed.fixed_grains {
        let room = estimate.pore_volume_m3 / estimate.dry_gel_volume_m3;
        let pressure = if room > 1.0 { scene.swelling_gel().confining_pressure(room) } else { f64::INFINITY };
        if pressure > MOST_STRESS {
            return Err(amount.refuse(format!(
                "free-swollen, the beads would fill the pores {} times over in a bed that cannot rise, and press on \
                 it with more than the {MOST_STRESS:.0e} Pa that grains bear here: use less gel or more grains",
                digits(estimate.pores_filled)
            )));
        }
        return Ok(());
    }
    // Were the gel to carry the lid alone it would swell as far as under that pressure.
    let swollen = scene.gel_under(scene.bed.lid_stress).free_volume_ratio() * estimate.dry_gel_volume_m3;
    let share = estimate.soil_volume_m3 / (estimate.soil_volume_m3 + swollen);
    if share < CONNECTED {
        let most = (1.0 / CONNECTED - 1.0) / (1.0 / share - 1.0);
        return Err(amount.refuse(format!(
            "the swollen beads would leave grains a share of {share:.2} of the volume; below {CONNECTED} they no \
             longer touch from floor to top, and this is no bed: use at most {most:.2} times as much gel"
        )));
    }
    Ok(())
}

/// Refuses a pot that is too small for its grains, or in which something floats.
pub(super) fn check_pot(document: &Node, scene: &Scene, estimate: &SceneEstimate) -> Result<(), SceneError> {
    let Some(diameter) = scene.bed.pot else { return Ok(()) };
    let largest = if estimate.grains == 0 { scene.beads.dry_diameter } else { estimate.largest_grain_m };
    if diameter < POT_GRAINS * largest {
        return Err(entry(document, "bed.pot").refuse(format!(
            "the largest grain is {largest:.3e} m wide, and a pot narrower than {POT_GRAINS} of them, {:.3e} m, holds \
             no bed: take a wider pot or leave out what is coarse",
            POT_GRAINS * largest
        )));
    }
    let layers = estimate.bed_height_m / largest;
    if estimate.grains > 0 && layers < LAYERS {
        let needed = (LAYERS / layers * estimate.grains as f64).ceil();
        return Err(entry(document, "bed.grains").refuse(format!(
            "these would lie {:.3e} m high in the pot, less than {LAYERS} layers of the largest grain: give at least \
             {needed} or a narrower pot",
            estimate.bed_height_m
        )));
    }
    let floats = |key: &str, density: f64| {
        (scene.bed.flooded && density <= WATER_DENSITY).then(|| {
            entry(document, key).refuse(format!(
                "floats up in a flooded pot; the density must be above {WATER_DENSITY} kg/m3, or leave out flooded"
            ))
        })
    };
    let grains = (estimate.grains > 0).then(|| floats("soil.density", scene.soil.density)).flatten();
    grains.or_else(|| floats("gel.dry_density", scene.gel.dry_density)).map_or(Ok(()), Err)
}
