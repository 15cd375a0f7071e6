//! Random packs of grains and dry beads.

mod dose;
mod error;
mod protocol;
mod report;

pub use dose::beads_for_dose;
pub use error::PackError;
pub use report::PackReport;

use crate::assembly::Assembly;
use bedswell_geometry::{Sphere, Stream};
use protocol::Recipe;

/// What to pack.
#[derive(Clone, Debug, PartialEq)]
pub struct PackRequest {
    /// Grain diameters (m), as [`MassCurve::sample`](crate::MassCurve::sample)
    /// gives them.
    pub grains: Vec<f64>,
    /// Dry beads mixed in among the grains.
    pub beads: usize,
    /// Their diameter (m).
    pub bead_diameter: f64,
    /// Pores over the whole cell from floor to lid, the dry beads counted as solid.
    /// `None`: as loose as the preparation leaves it.
    pub porosity: Option<f64>,
    /// Vertical stress under the lid (Pa), above 0.
    pub lid_stress: f64,
    /// Friction coefficient during preparation. With none the pack is compressed to
    /// random close packing; the more there is, the looser it can be.
    pub friction: f64,
    /// What closes the cell.
    pub sides: Sides,
}

/// What closes a pack's cell.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sides {
    /// Periodic in x and y, between a floor and a lid: a bed.
    FloorAndLid,
    /// Periodic in all directions, under pressure: the inside of an endless bed.
    Periodic,
}

/// A pack at rest under its lid.
#[derive(Clone, Debug)]
pub struct Pack {
    /// The grains, then the beads, with their contacts as the preparation left them.
    pub assembly: Assembly,
    /// How many of its spheres are grains.
    pub grain_count: usize,
    /// What was reached.
    pub report: PackReport,
}

impl Pack {
    /// The soil's grains.
    pub fn grains(&self) -> Vec<Sphere> {
        let mut spheres = self.assembly.spheres();
        spheres.truncate(self.grain_count);
        spheres
    }

    /// The dry beads.
    pub fn beads(&self) -> Vec<Sphere> {
        self.assembly.spheres().split_off(self.grain_count)
    }
}

/// How far the porosity reached may lie from the one asked for.
pub const POROSITY_TOLERANCE: f64 = 0.005;

/// Packs grains and beads at random places and brings them to rest.
///
/// With a target porosity, random points at the target density are pushed apart
/// without friction, then friction is switched on and the lid pressed down. As the
/// lid closes the bed a little, looser starts are tried until the bed at rest has
/// the porosity. Without a target the start is loose, and the lid collapses the bed
/// to wherever friction stops it; without friction that is random close packing.
///
/// Porosity is that of the whole cell. The floor and the lid hold the grains apart
/// (Benenati & Brosilow 1962, from memory), so that the middle of the bed is a few
/// hundredths denser; the report gives its porosity too.
///
/// # Errors
/// Input out of range, a bed too small for its largest grain or bead, or a porosity
/// out of reach, with the range that is in reach.
pub fn pack(request: &PackRequest, random: &mut Stream) -> Result<Pack, PackError> {
    let recipe = Recipe::new(request)?;
    let (assembly, steps) = match request.porosity {
        Some(porosity) => pack_to_porosity(&recipe, porosity, random)?,
        None if request.friction > 0.0 => recipe.collapse(LOOSE_START, random)?,
        None => recipe.compress_smooth(random)?,
    };
    let report = PackReport::new(&assembly, steps);
    if !(report.rest.residual() < REST_REQUIRED) {
        return Err(PackError::NotAtRest { residual: report.rest.residual(), steps });
    }
    Ok(Pack { assembly, grain_count: request.grains.len(), report })
}

/// Solid fraction of the loosest start: far below what grains at rest can have.
const LOOSE_START: f64 = 0.4;

/// Largest net force over mean contact force of a pack that is handed out.
const REST_REQUIRED: f64 = 0.05;

/// Starts tried for one target.
const ATTEMPTS: usize = 6;

fn pack_to_porosity(
    recipe: &Recipe,
    porosity: f64,
    random: &mut Stream,
) -> Result<(Assembly, usize), PackError> {
    let target = 1.0 - porosity;
    let hit = |grains: &Assembly| (grains.solid_fraction() - target).abs() < 0.8 * POROSITY_TOLERANCE;
    let mut start = target;
    let mut steps = 0;
    for attempt in 0..ATTEMPTS {
        let Some((mut grains, taken)) = recipe.spread(start, random)? else {
            // Too dense for random points: come from the dense side.
            return pack_from_dense(recipe, target, random);
        };
        steps += taken;
        steps += if attempt == 0 { recipe.lock(&mut grains) } else { recipe.settle(&mut grains) };
        if hit(&grains) && grains.rest().residual() < REST_REQUIRED {
            return Ok((grains, steps));
        }
        start = (start - (grains.solid_fraction() - target).max(0.001)).min(target);
        if start < LOOSE_START {
            break;
        }
    }
    let (loosest, _) = recipe.collapse(LOOSE_START, random)?;
    let (densest, _) = recipe.compress_smooth(random)?;
    Err(PackError::PorosityOutOfReach {
        porosity,
        densest: 1.0 - densest.solid_fraction(),
        loosest: 1.0 - loosest.solid_fraction(),
    })
}

/// Random close packing, opened to the target.
fn pack_from_dense(
    recipe: &Recipe,
    target: f64,
    random: &mut Stream,
) -> Result<(Assembly, usize), PackError> {
    let (mut grains, mut steps) = recipe.compress_smooth(random)?;
    let densest = grains.solid_fraction();
    if target < densest - 0.2 * POROSITY_TOLERANCE {
        steps += recipe.open(&mut grains, target);
    }
    steps += recipe.lock(&mut grains);
    if (grains.solid_fraction() - target).abs() < POROSITY_TOLERANCE {
        return Ok((grains, steps));
    }
    let (loosest, _) = recipe.collapse(LOOSE_START, random)?;
    Err(PackError::PorosityOutOfReach {
        porosity: 1.0 - target,
        densest: 1.0 - densest,
        loosest: 1.0 - loosest.solid_fraction(),
    })
}
