use super::Toughness;
use bedswell_gel::History;
use serde::{Deserialize, Serialize};

/// Everything one pack needs, checked and in SI units. Made from a scene file by
/// [`crate::read_scene`]; the engine never sees an unchecked value.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Scene {
    /// What the scene is called in reports.
    pub name: String,
    /// The user's seed; with the pack number it fixes every random choice.
    pub seed: u64,
    /// The bed and its load.
    pub bed: Bed,
    /// The soil.
    pub soil: Soil,
    /// The beads, as mixed in.
    pub beads: Beads,
    /// The gel the beads are made of.
    pub gel: Gel,
    /// The water that reaches the bed.
    pub water: Water,
    /// The gel's strength.
    pub strength: Strength,
    /// What it takes to tear the gel, if beads are to tear in earnest.
    pub toughness: Option<Toughness>,
    /// How the march from dry to equilibrium is taken.
    pub march: March,
    /// The history in time, if the bed is followed through one.
    pub time: Option<Time>,
}

/// A history in time, and how water moves in it.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Time {
    /// When it ends (s).
    pub until: f64,
    /// Cooperative diffusion coefficient of the gel, free-swollen in the scene's water (m²/s).
    pub diffusion: f64,
    /// Power of the gel's water with which its permeability grows.
    pub exponent: f64,
    /// No water passes where a bead presses on grains or walls.
    pub contact_seals: bool,
    /// Error of the gel's volumes, over themselves, that a step may make.
    pub step_error: f64,
    /// What is outside the beads, from when on.
    pub history: History,
}

/// The bed and its load.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Bed {
    /// Number of grains (ignored when the soil lists its spheres); 0: beads alone in a pot.
    pub grains: usize,
    /// Pore fraction of the mixed dry bed; `None`: as the preparation leaves it
    /// under the lid's stress (or as the listed spheres lie).
    pub porosity: Option<f64>,
    /// Inner diameter of the round pot (m), in which grains and beads have weight; `None`: a
    /// cell that repeats sideways, an element of a wide bed.
    pub pot: Option<f64>,
    /// The pot has no lid; its bed is levelled before the beads swell.
    pub open: bool,
    /// The pot stands in water, so that its grains and beads are buoyant.
    pub flooded: bool,
    /// Effective vertical stress under the lid (Pa), when the dry bed is made and, unless the
    /// lid is held, from then on; 0 where the top is open.
    pub lid_stress: f64,
    /// The lid stays where the dry bed is made: what presses on it then is a result.
    pub lid_held: bool,
    /// Grains and lid stay where they are (bench arrays).
    pub fixed_grains: bool,
}

/// The soil.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Soil {
    /// Grain sizes or listed spheres.
    pub grading: SoilGrading,
    /// Grain density (kg/m³), for doses by mass and weights; 0 without grains.
    pub density: f64,
    /// Coulomb friction coefficient between grains.
    pub friction: f64,
    /// Rolling friction coefficient between grains, which stands for their shape: largest
    /// rolling moment over the push and the reduced radius; 0 for spheres.
    pub rolling_friction: f64,
}

/// Where the soil's spheres come from.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub enum SoilGrading {
    /// Percent passing by mass at each sieve, finest first, with the size below
    /// which grains are left out (m), if any.
    Sieves {
        /// Sieve openings (m), increasing.
        openings: Vec<f64>,
        /// Percent of the mass that passes each, not decreasing, ending at 100.
        percent_passing: Vec<f64>,
        /// Grains finer than this (m) are left out, and their mass share is reported.
        fines_cutoff: Option<f64>,
    },
    /// Lognormal by mass.
    Lognormal {
        /// Median diameter by mass (m).
        median: f64,
        /// Geometric standard deviation, above 1 (1: equal grains).
        spread: f64,
        /// Grains finer than this (m) are left out, and their mass share is reported.
        fines_cutoff: Option<f64>,
    },
    /// No grains at all.
    Absent,
    /// Spheres measured or built by somebody else: centre and radius (m), inside
    /// a cell of the given size (m).
    Spheres {
        /// Centres and radii (m).
        spheres: Vec<bedswell_geometry::Sphere>,
        /// Size of the cell (m).
        size: [f64; 3],
        /// Whether x and y repeat.
        periodic: bool,
    },
}

/// The beads, as mixed in.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Beads {
    /// How many.
    pub amount: BeadAmount,
    /// Dry diameter (m).
    pub dry_diameter: f64,
    /// Voxels across the dry diameter, unless that exceeds the budget.
    pub across: usize,
    /// Voxels that all beads together may have.
    pub voxel_budget: usize,
    /// Centre and orientation of each bead are held: for fixed grains that would let
    /// a bead slip out sideways.
    pub held: bool,
}

/// How many beads a cell holds.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub enum BeadAmount {
    /// A number of beads in the cell.
    Count(usize),
    /// Dry gel per dry soil by mass (kg/kg).
    Dose(f64),
    /// Dry beads with their centres at given places (m); for bench arrays.
    At(Vec<[f64; 3]>),
}

/// The gel, as its thermodynamic numbers.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Gel {
    /// Elastically active chains per solvent-molecule volume of dry polymer.
    pub crosslinks: f64,
    /// Flory-Huggins interaction parameter.
    pub chi: f64,
    /// Fixed charges per solvent-molecule volume of dry polymer.
    pub charges: f64,
    /// Density of the dry polymer (kg/m³).
    pub dry_density: f64,
}

/// The water that reaches the bed.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Water {
    /// Salt outside the gel, as 1:1 electrolyte (mol/L).
    pub salt: f64,
    /// Water potential (Pa), zero or negative.
    pub potential: f64,
    /// Temperature (K).
    pub temperature: f64,
}

/// Weibull strength of the gel in tension.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Strength {
    /// Tension (Pa) at which a reference volume tears with probability 1 - 1/e.
    pub scale: f64,
    /// Weibull modulus: high means little scatter.
    pub modulus: f64,
    /// Reference volume (m³) of swollen gel.
    pub volume: f64,
    /// Length (m) of free-swollen gel over which tension counts as one. By default a sixth
    /// of a bead's free-swollen diameter.
    #[serde(default)]
    pub length: Option<f64>,
}

/// How the march from dry to equilibrium is taken.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct March {
    /// Swelling increments from dry to the free stretch.
    pub increments: usize,
    /// Overlap of a typical contact of grains over their diameter, which softens the
    /// grains: results must not depend on it, steps do.
    pub overlap: f64,
    /// Share of each force on grains and lid that is turned against their motion: results
    /// must not depend on it.
    pub damping: f64,
}

impl Default for March {
    fn default() -> Self {
        Self { increments: 30, overlap: 3e-4, damping: 0.1 }
    }
}
