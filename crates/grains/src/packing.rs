//! Random packs of grains and dry beads.

mod dose;
mod error;
mod pot;
mod protocol;
mod report;

pub use dose::beads_for_dose;
pub use error::PackError;
pub use pot::{Pot, submerged_weight, wall_porosity_rise};
pub use report::PackReport;

use crate::assembly::Assembly;
use bedswell_geometry::{Sphere, Stream};
use protocol::Recipe;

/// What to pack.
#[derive(Clone, Debug, PartialEq)]
pub struct PackRequest {
    /// Grain diameters (m), as [`MassCurve::sample`](crate::MassCurve::sample)
    /// gives them. None, where there are beads enough to be a bed of their own.
    pub grains: Vec<f64>,
    /// Dry beads mixed in among the grains.
    pub beads: usize,
    /// Their diameter (m).
    pub bead_diameter: f64,
    /// Pores over the whole cell from floor to lid (under an open top, to the mean
    /// surface), the dry beads counted as solid. `None`: as loose as the preparation leaves it.
    pub porosity: Option<f64>,
    /// Hand out a bed looser than this friction can hold as it is, its grains apart
    /// from each other, instead of refusing it: the lid's stress will close it.
    pub accept_loose: bool,
    /// Vertical stress under the lid (Pa), above 0; of the lid that levels the bed before
    /// it is taken off, where the top is open.
    pub lid_stress: f64,
    /// Friction coefficient during preparation. With none the pack is compressed to
    /// random close packing; the more there is, the looser it can be.
    pub friction: f64,
    /// Rolling friction coefficient, from the preparation on; without friction it has no
    /// effect.
    pub rolling: f64,
    /// What closes the cell.
    pub sides: Sides,
}

/// What closes a pack's cell.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Sides {
    /// Periodic in x and y, between a floor and a lid: a bed.
    FloorAndLid,
    /// Periodic in all directions, under pressure: the inside of an endless bed.
    Periodic,
    /// A round pot with a rough wall, in which grains have weight.
    Pot(Pot),
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
/// the porosity; a bed too dense for random points is collapsed with less friction.
/// Without a target the start is loose, and the lid collapses the bed to wherever
/// friction stops it; without friction that is random close packing.
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
        Some(porosity) => pack_to_porosity(&recipe, request, porosity, random)?,
        None if request.friction > 0.0 => recipe.collapse(LOOSE_START, request.friction, random)?,
        None => recipe.compress_smooth(random)?,
    };
    let report = PackReport::new(&assembly, steps);
    if report.stable && !at_rest(&assembly) {
        return Err(PackError::NotAtRest { residual: report.rest.residual(), steps });
    }
    Ok(Pack { assembly, grain_count: request.grains.len(), report })
}

/// Solid fraction of the loosest start: far below what grains at rest can have.
const LOOSE_START: f64 = 0.4;

/// Largest net force over mean contact force of a pack that is handed out. Beds
/// near their loosest rearrange for ever more slowly; every march that follows
/// brings them closer to rest.
const REST_REQUIRED: f64 = 0.2;

/// Starts, or frictions, tried for one target.
const ATTEMPTS: usize = 6;

fn pack_to_porosity(recipe: &Recipe, request: &PackRequest, porosity: f64, random: &mut Stream) -> Attempt {
    let target = 1.0 - porosity;
    let Some((mut grains, mut steps)) = recipe.spread(target, random)? else {
        return pack_densely(recipe, target, random);
    };
    let free = grains.clone();
    steps += recipe.lock(&mut grains);
    if hits(&grains, target) {
        return Ok((grains, steps));
    }
    if request.accept_loose {
        return Ok((free, steps));
    }
    // Bracket the target by the start that closed too far and the loosest one.
    let mut dense = (target, grains.filled_fraction());
    let (loosest, taken) = recipe.collapse(LOOSE_START, recipe.friction, random)?;
    steps += taken;
    if hits(&loosest, target) {
        return Ok((loosest, steps));
    }
    let mut loose = (LOOSE_START, loosest.filled_fraction());
    for _ in 0..ATTEMPTS {
        if loose.1 > target || dense.1 < target {
            break;
        }
        let start = loose.0 + (dense.0 - loose.0) * (target - loose.1) / (dense.1 - loose.1);
        let (grains, taken) = recipe.collapse(start, recipe.friction, random)?;
        steps += taken;
        if hits(&grains, target) {
            return Ok((grains, steps));
        }
        let reached = (start, grains.filled_fraction());
        if reached.1 > target { dense = reached } else { loose = reached }
    }
    let (densest, _) = recipe.compress_smooth(random)?;
    Err(out_of_reach(target, densest.filled_fraction(), loosest.filled_fraction()))
}

/// A bed between random points that can still be pushed apart and random close
/// packing: friction during the collapse is lowered until it fits.
fn pack_densely(recipe: &Recipe, target: f64, random: &mut Stream) -> Attempt {
    let (mut grains, mut steps) = recipe.compress_smooth(random)?;
    steps += recipe.lock(&mut grains);
    if hits(&grains, target) {
        return Ok((grains, steps));
    }
    let densest = grains.filled_fraction();
    let (mut smooth, mut rough) = (0.0, recipe.friction);
    for _ in 0..ATTEMPTS {
        if target > densest {
            break;
        }
        let friction = 0.5 * (smooth + rough);
        let (mut grains, taken) = recipe.collapse(DENSE_START * densest, friction, random)?;
        steps += taken + recipe.lock(&mut grains);
        if hits(&grains, target) {
            return Ok((grains, steps));
        }
        if grains.filled_fraction() > target { smooth = friction } else { rough = friction }
    }
    let (loosest, _) = recipe.collapse(LOOSE_START, recipe.friction, random)?;
    Err(out_of_reach(target, densest, loosest.filled_fraction()))
}

/// Start of a dense bed over random close packing: the densest random points that
/// are quickly pushed apart.
const DENSE_START: f64 = 0.95;

/// A bed and the steps it took.
type Attempt = Result<(Assembly, usize), PackError>;

fn hits(grains: &Assembly, target: f64) -> bool {
    (grains.filled_fraction() - target).abs() < 0.9 * POROSITY_TOLERANCE && at_rest(grains)
}

fn at_rest(grains: &Assembly) -> bool {
    grains.rest().residual() < REST_REQUIRED
}

fn out_of_reach(target: f64, densest: f64, loosest: f64) -> PackError {
    PackError::PorosityOutOfReach { porosity: 1.0 - target, densest: 1.0 - densest, loosest: 1.0 - loosest }
}
