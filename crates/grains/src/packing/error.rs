use crate::assembly::AssemblyError;
use thiserror::Error;

/// Why there is no pack.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum PackError {
    /// Nothing to pack.
    #[error("no grains to pack: ask for at least one, or for at least two beads")]
    NoGrains,
    /// A diameter that is no size.
    #[error("sphere {index} has a diameter of {diameter} m: it must be above 0")]
    Diameter {
        /// Index among the grains, the beads after them.
        index: usize,
        /// The diameter (m).
        diameter: f64,
    },
    /// A porosity that no bed has.
    #[error("porosity is {0}: it must lie between 0 and 1")]
    Porosity(f64),
    /// A porosity that these grains do not take.
    #[error(
        "a porosity of {porosity} is out of reach of this grading: its packs range from {densest:.3} (frictionless) \
         to {loosest:.3} (loosest with this preparation friction); more friction widens the loose end"
    )]
    PorosityOutOfReach {
        /// The porosity asked for.
        porosity: f64,
        /// Porosity of random close packing in this cell.
        densest: f64,
        /// Porosity of the loosest pack.
        loosest: f64,
    },
    /// Solids that float, or a weight that is none.
    #[error(
        "the {name} weigh {value} N/m³ less their buoyancy: it must be 0 or more, their density at least the fluid's"
    )]
    Weight {
        /// Which of them.
        name: &'static str,
        /// Weight less buoyancy (N/m³).
        value: f64,
    },
    /// An open top over something without weight.
    #[error(
        "grains or beads without weight do not stay in a pot with an open top: give them weight or a lid"
    )]
    NothingHoldsDown,
    /// No stress to press with.
    #[error("lid stress is {0} Pa: a pack is made by pressing on it, so it must be above 0")]
    LidStress(f64),
    /// A bed that is no wider or higher than its largest grains.
    #[error(
        "the cell would be {height:.3e} m high, less than two of its largest grains of {largest:.3e} m: \
         ask for at least {needed} grains or leave out the coarsest"
    )]
    TooFewGrains {
        /// Height of the cell (m).
        height: f64,
        /// Largest grain diameter (m).
        largest: f64,
        /// About how many grains it takes.
        needed: usize,
    },
    /// A bead that does not fit into the bed.
    #[error(
        "a bead of {diameter:.3e} m is larger than the bed, {side:.3e} m wide and {height:.3e} m high: \
         ask for at least {needed} grains or for smaller beads"
    )]
    BeadLargerThanBed {
        /// Bead diameter (m).
        diameter: f64,
        /// Width of the cell (m).
        side: f64,
        /// Height of the cell (m).
        height: f64,
        /// About how many grains it takes.
        needed: usize,
    },
    /// A dose or a density that is no such thing.
    #[error("{name} is {value}: it must be above 0")]
    NotPositive {
        /// What it is.
        name: &'static str,
        /// Its value.
        value: f64,
    },
    /// A dose of less than half a bead.
    #[error(
        "a dose of {dose} kg/kg is {beads:.3} beads among {grains} grains: ask for at least {needed} grains, \
         smaller beads or a larger dose, or give the number of beads"
    )]
    DoseLeavesNoBead {
        /// Dry gel per dry soil (kg/kg).
        dose: f64,
        /// Beads that would be, unrounded.
        beads: f64,
        /// Number of grains.
        grains: usize,
        /// Grains it takes for one bead.
        needed: usize,
    },
    /// A dose that makes the bed a heap of beads.
    #[error(
        "a dose of {dose} kg/kg gives the beads {ratio:.2} times the volume of the grains, which leaves no bed \
         of grains: keep the dose below {largest:.4} kg/kg"
    )]
    DoseLeavesNoGrains {
        /// Dry gel per dry soil (kg/kg).
        dose: f64,
        /// Volume of beads over volume of grains.
        ratio: f64,
        /// The dose at which both are equal (kg/kg).
        largest: f64,
    },
    /// The march did not come to rest.
    #[error(
        "after {steps} steps the largest net force is still {residual:.2e} of the mean contact force: \
         try another seed, or a porosity further from the loosest"
    )]
    NotAtRest {
        /// Largest net force over mean contact force.
        residual: f64,
        /// Steps taken.
        steps: usize,
    },
    /// Spheres or contact law out of range.
    #[error(transparent)]
    Assembly(#[from] AssemblyError),
}
