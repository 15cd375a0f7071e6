use crate::{BeadTears, Cracks, PackTears, TensionField};
use serde::{Deserialize, Serialize};

/// What became of one pack: the bed, each bead, and how it got there.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct PackOutcome {
    /// Number of the pack within its study (0 for a single run).
    pub pack: u64,
    /// Grains in the bed.
    pub grains: usize,
    /// Pore fraction of the mixed dry bed.
    pub porosity: f64,
    /// Mass fraction of the grading left out as fines.
    pub fines_left_out: f64,
    /// Rise of the lid, or of the grains' mean surface under an open top, from dry to
    /// equilibrium (m).
    pub heave_m: f64,
    /// That rise over the height of the mixed dry bed.
    pub heave_strain: f64,
    /// Beads squeezed out of an open pot: their centre lies above the mean height of the
    /// grains' surface, as seen from above, at the end. None under a lid.
    pub beads_out: usize,
    /// Water in the beads that are not squeezed out, per volume of the bed at the end (L/m³).
    pub water_l_per_m3: f64,
    /// Pore fraction left open between grains and gel at the end.
    pub porosity_left: f64,
    /// Effective overburden (Pa) under which the dry bed was made: the lid's stress, less
    /// what water carries of it; 0 under an open top.
    pub overburden_pa: f64,
    /// Stress on the lid at the end (Pa): its load, or the bed's swelling pressure where
    /// the lid is held.
    pub lid_stress_pa: f64,
    /// Mean contacts per grain that carries load, at the end.
    pub contact_number: f64,
    /// Forces between the grains before the beads swell.
    pub forces_before: ForceOutcome,
    /// Forces between the grains at the end.
    pub forces_after: ForceOutcome,
    /// Voxels across each dry bead.
    pub across: usize,
    /// Voxels across that the scene asks for; more than `across` where its budget of voxels
    /// did not allow them.
    pub across_asked: usize,
    /// Overlap over the diameter that grains were softened for: that of a typical contact
    /// under the bed's stress. What it came to at most is in `quality`.
    pub chosen_overlap: f64,
    /// Each bead, in order.
    pub beads: Vec<BeadOutcome>,
    /// How well the end state is at rest.
    pub quality: Quality,
    /// One entry per increment.
    pub history: Vec<Step>,
    /// Each grain before and after; kept by a single run, left out of a study's journal.
    #[serde(skip)]
    pub positions: Vec<GrainRecord>,
    /// The tension in each bead at the end; kept by a single run, left out of a study's journal.
    #[serde(skip)]
    pub tensions: Vec<TensionField>,
    /// When it happened, where the scene gives a history in time.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub timing: Option<Timing>,
    /// The cracks of its beads, where the scene gives the gel a toughness.
    #[serde(skip)]
    pub tears: Option<PackTears>,
}

/// When things happened.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Timing {
    /// Time of each entry of the history (s).
    pub seconds: Vec<f64>,
    /// Every bead after every step in time; kept by a single run, left out of a study's
    /// journal.
    #[serde(skip)]
    pub course: Vec<CoursePoint>,
}

/// A bead after a step in time.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct CoursePoint {
    /// Time (s).
    pub time_s: f64,
    /// The bead.
    pub bead: usize,
    /// Water taken up per mass of dry gel (g/g).
    pub uptake_g_per_g: f64,
    /// 99 % volume quantile of the largest principal tension (Pa).
    pub tension_q99_pa: f64,
    /// Largest principal tension in any voxel (Pa).
    pub largest_tension_pa: f64,
    /// Its cracks, where the scene gives the gel a toughness.
    pub cracks: Option<Cracks>,
}

/// When things happened to a bead.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct BeadTiming {
    /// When it first held half of the water that it holds at the end (s).
    pub half_time_s: f64,
    /// When it first held 90 % of that (s).
    pub ninety_time_s: f64,
    /// Most that the 99 % volume quantile of the largest principal tension came to (Pa).
    pub most_tension_q99_pa: f64,
    /// When that was (s).
    pub most_tension_time_s: f64,
}

impl PackOutcome {
    /// Beads that tore, and beads.
    pub fn torn_beads(&self) -> (u64, u64) {
        (self.beads.iter().filter(|bead| bead.torn).count() as u64, self.beads.len() as u64)
    }
}

/// How forces go through the grains, with floor and lid.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct ForceOutcome {
    /// Mean normal force of a contact (N).
    pub mean_force_n: f64,
    /// 95 % quantile of the normal force over the mean.
    pub force_q95: f64,
    /// Share of the contacts that carry more than the mean.
    pub share_above_mean: f64,
    /// Chains: three grains or more joined by contacts that carry the mean force or more
    /// within 45 degrees of the largest stress.
    pub chains: usize,
    /// Grains in chains.
    pub chain_grains: usize,
}

/// Where a grain lay and where it came to lie.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct GrainRecord {
    /// Diameter (m).
    pub diameter_m: f64,
    /// Centre in the mixed dry bed (m).
    pub before_m: [f64; 3],
    /// Centre at the end (m), not wrapped into the cell.
    pub after_m: [f64; 3],
}

/// What became of one bead.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct BeadOutcome {
    /// Water taken up per mass of dry gel (g/g).
    pub uptake_g_per_g: f64,
    /// Volume relative to the free-swollen bead in the same water.
    pub volume_ratio: f64,
    /// Volume-mean pressure in the gel (Pa), positive in compression.
    pub mean_pressure_pa: f64,
    /// Largest principal tension in any voxel (Pa).
    pub largest_tension_pa: f64,
    /// Where that is, as mixed in: offset from the bead's centre over its dry radius.
    pub largest_tension_at: [f64; 3],
    /// 99 % volume quantile of the largest principal tension (Pa).
    pub tension_q99_pa: f64,
    /// 99.9 % volume quantile of the largest principal compression (Pa).
    pub compression_q999_pa: f64,
    /// Largest force on one grain, wall or neighbouring bead (N).
    pub largest_contact_force_n: f64,
    /// Grains and walls that the bead presses on.
    pub contacts: usize,
    /// Asphericity of the gyration tensor: 0 for a sphere, 1 for a rod.
    pub asphericity: f64,
    /// Probability that the bead tears, by the weakest link, from the tension in a bead that
    /// stays whole.
    pub tear_probability: f64,
    /// Whether it tore in this pack: in earnest, where the scene gives the gel a toughness;
    /// otherwise by its own strength, drawn from the seed.
    pub torn: bool,
    /// When things happened to it, where the scene gives a history in time. Its tear
    /// probability is then that of the largest tension that each place has borne.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub timing: Option<BeadTiming>,
    /// Its ruptures, where the scene gives the gel a toughness.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub tears: Option<BeadTears>,
}

/// How well a state is at rest.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Quality {
    /// Largest net force on a grain over the mean contact force.
    pub grain_residual: f64,
    /// Norm of the net nodal forces of a bead over its largest contact force.
    pub gel_residual: f64,
    /// Net force on a bead over its largest contact force.
    pub bead_balance: f64,
    /// Share of the beads' volume that lies inside grains.
    pub swallowed: f64,
    /// Deepest overlap of two grains over the smaller diameter.
    pub overlap: f64,
}

/// The state after one increment.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Step {
    /// Number of the increment, from 1.
    pub increment: usize,
    /// Free stretch of the gel from dry.
    pub free_stretch: f64,
    /// Mean water uptake of the beads (g/g).
    pub uptake_g_per_g: f64,
    /// Rise of the lid (m).
    pub heave_m: f64,
    /// Mean over beads of the 99 % tension quantile (Pa).
    pub tension_q99_pa: f64,
    /// Mean over beads of the tear probability.
    pub tear_probability: f64,
    /// How well this state is at rest.
    pub quality: Quality,
}
