use super::{Scene, SceneEstimate};
use crate::figures::{digits, length};
use bedswell_grains::{PackError, wall_porosity_rise};
use std::fmt;

/// Mean grain diameters across a pot below which its wall shows in the porosity.
const WIDE_POT: f64 = 10.0;
/// Load over the gel's modulus above which beads are pressed into the pores.
const PRESSED: f64 = 0.5;
/// Voxels across a bead from which on uptake hardly depends on them there.
const FINE_ENOUGH: usize = 24;
/// Voxels that a length must span for the tension over it to be resolved.
const LEAST_VOXELS: f64 = 2.0;

/// What a user should know about a scene that can be run all the same.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Concern {
    /// The beads have fewer voxels across than the scene asks for.
    CoarserBeads {
        /// Voxels across that are used.
        used: usize,
        /// Voxels across that the scene asks for.
        asked: usize,
        /// Voxels that all beads may have.
        budget: usize,
    },
    /// Tension counts as one over less than voxels resolve.
    CoarseStrength {
        /// Voxels over which it does.
        voxels: f64,
        /// Voxels across a bead that would do.
        across: usize,
    },
    /// The load presses beads into the pores, finer than their voxels resolve.
    CoarseUnderLoad {
        /// Load over the gel's swollen modulus.
        ratio: f64,
        /// Voxels across a bead that would do.
        across: usize,
    },
    /// Free-swollen, the beads would more than fill the pores.
    PoresFilled {
        /// Their volume over that of the pores.
        times: f64,
        /// The bed cannot rise.
        held: bool,
    },
    /// The wall of the pot loosens the bed.
    NarrowPot {
        /// Mean grain diameters across the pot.
        grains: f64,
        /// Expected rise of the porosity over that of a wide bed.
        rise: f64,
    },
    /// A bead can swell to more than the height of the bed.
    ThinBed {
        /// Height of the dry bed (m).
        height: f64,
        /// Diameter of a free-swollen bead (m).
        bead: f64,
    },
}

impl Scene {
    /// What a user should know about this scene before believing its results.
    ///
    /// # Errors
    /// When the dose leaves no bead or no grains.
    pub fn concerns(&self) -> Result<Vec<Concern>, PackError> {
        Ok(self.concerns_of(&self.estimate()?))
    }

    fn concerns_of(&self, estimate: &SceneEstimate) -> Vec<Concern> {
        let mut concerns = Vec::new();
        let (used, asked) = (estimate.across, self.beads.across);
        if used < asked {
            concerns.push(Concern::CoarserBeads { used, asked, budget: self.beads.voxel_budget });
        }
        let voxels = self.strength_reach(used);
        if voxels < LEAST_VOXELS {
            let across = (used as f64 * LEAST_VOXELS / voxels).ceil() as usize;
            concerns.push(Concern::CoarseStrength { voxels, across });
        }
        if estimate.grains == 0 {
            return concerns;
        }
        let ratio = estimate.load_ratio;
        let is_loaded = !self.bed.fixed_grains && !self.bed.lid_held;
        if ratio > PRESSED && used < FINE_ENOUGH && is_loaded {
            concerns.push(Concern::CoarseUnderLoad { ratio, across: FINE_ENOUGH });
        }
        if estimate.pores_filled > 1.0 {
            let held = self.bed.lid_held || self.bed.fixed_grains;
            concerns.push(Concern::PoresFilled { times: estimate.pores_filled, held });
        }
        if let Some(pot) = self.bed.pot {
            let grains = pot / estimate.mean_grain_m;
            if grains < WIDE_POT {
                concerns.push(Concern::NarrowPot { grains, rise: wall_porosity_rise(1.0 / grains) });
            }
            let (height, bead) = (estimate.bed_height_m, estimate.swollen_diameter_m);
            if height < bead {
                concerns.push(Concern::ThinBed { height, bead });
            }
        }
        concerns
    }
}

impl fmt::Display for Concern {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self {
            Self::CoarserBeads { used, asked, budget } => write!(
                f,
                "beads are {used} voxels across, not {asked} as asked for, to stay within beads.voxel_budget = {budget}"
            ),
            Self::CoarseStrength { voxels, across } => write!(
                f,
                "strength.length spans {} voxels where {LEAST_VOXELS} are needed: single voxels rule the tear \
                 probability; take beads.across = {across} or more, or a longer length",
                digits(voxels)
            ),
            Self::CoarseUnderLoad { ratio, across } => write!(
                f,
                "the load is {} times the gel's modulus and presses beads into the pores: with few voxels across they \
                 take up too much there, by about 6 % at 12; take beads.across = {across}",
                digits(ratio)
            ),
            Self::PoresFilled { times, held: false } => write!(
                f,
                "free-swollen, the beads would fill the pores {} times over: grains lose touch where gel lifts them",
                digits(times)
            ),
            Self::PoresFilled { times, held: true } => write!(
                f,
                "free-swollen, the beads would fill the pores {} times over, and the bed cannot rise: pressure is \
                 what stops them",
                digits(times)
            ),
            Self::NarrowPot { grains, rise } => write!(
                f,
                "the pot is {} mean grains wide: its wall makes the bed looser than a wide one, by about {} in porosity",
                digits(grains),
                digits(rise)
            ),
            Self::ThinBed { height, bead } => write!(
                f,
                "the dry bed, {} high, is thinner than a free-swollen bead, {} wide: grains no longer lie all round it",
                length(height),
                length(bead)
            ),
        }
    }
}
