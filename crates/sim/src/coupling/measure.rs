use super::bodies::Bodies;
use crate::{BeadOutcome, ForceOutcome, Quality, Scene, Step, TensionField};
use bedswell_gel::{Gel, Relaxation, StressField, asphericity, uptake_of_volume_ratio};
use bedswell_geometry::stream;
use bedswell_grains::{Assembly, FORCE_QUANTILES, ForceStatistics};
use rand::RngExt;

/// Share of the beads' volume inside grains above which a state is void.
const SWALLOWED: f64 = 1e-2;
/// Purpose of the random stream that draws each bead's own strength.
const STRENGTH: u64 = 1;

/// What a run's states are measured with.
pub(super) struct Watch<'a> {
    pub(super) scene: &'a Scene,
    pub(super) gel: &'a Gel,
    pub(super) number: u64,
    /// Height of the dry bed (m).
    pub(super) height_before: f64,
}

/// A bead with the stress in it.
pub(super) struct Seen<'a> {
    pub(super) bead: &'a Relaxation,
    pub(super) field: StressField,
    /// What its strength is measured against.
    pub(super) tension: TensionField,
}

impl Watch<'_> {
    /// The beads with the stress that a gel whose water moves freely has.
    pub(super) fn see_drained<'a>(&self, stage: &Gel, beads: &'a [Relaxation]) -> Vec<Seen<'a>> {
        beads.iter().map(|bead| self.see(bead, StressField::of(bead.bead(), stage))).collect()
    }

    /// A bead with its stress.
    pub(super) fn see<'a>(&self, bead: &'a Relaxation, field: StressField) -> Seen<'a> {
        Seen { bead, tension: self.tension(bead, &field), field }
    }

    /// The state after an increment, of gel with a given free stretch.
    pub(super) fn step(
        &self,
        (increment, free_stretch): (usize, f64),
        beads: &[Seen<'_>],
        grains: &Assembly,
        quality: Quality,
    ) -> Step {
        let count = beads.len().max(1) as f64;
        let mut step = Step {
            increment,
            free_stretch,
            uptake_g_per_g: 0.0,
            heave_m: grains.filled_height() - self.height_before,
            tension_q99_pa: 0.0,
            tear_probability: 0.0,
            quality,
        };
        for seen in beads {
            step.uptake_g_per_g += self.uptake(seen) / count;
            step.tension_q99_pa += seen.field.tension_quantile(0.99) / count;
            step.tear_probability += self.tear_probability(seen) / count;
        }
        step
    }

    /// What became of the beads.
    pub(super) fn beads(&self, beads: &[Seen<'_>]) -> Vec<BeadOutcome> {
        beads
            .iter()
            .enumerate()
            .map(|(index, seen)| {
                let Seen { bead, field, .. } = seen;
                let (largest_tension_pa, voxel) = field.largest_tension();
                let half = 0.5 * bead.bead().lattice().across() as f64;
                let forces: Vec<f64> = bead.loads().iter().map(|load| load.force.norm()).collect();
                let tear_probability = self.tear_probability(seen);
                let strength: f64 = stream(self.scene.seed, &[self.number, STRENGTH, index as u64]).random();
                BeadOutcome {
                    uptake_g_per_g: self.uptake(seen),
                    volume_ratio: field.volume.iter().sum::<f64>() / field.free_volume.iter().sum::<f64>(),
                    mean_pressure_pa: field.mean_pressure(),
                    largest_tension_pa,
                    largest_tension_at: bead.bead().lattice().voxel_offset(voxel).map(|c| c / half),
                    tension_q99_pa: field.tension_quantile(0.99),
                    compression_q999_pa: field.compression_quantile(0.999),
                    largest_contact_force_n: bead.largest_contact_force(),
                    contacts: forces.iter().filter(|force| **force > 0.0).count(),
                    asphericity: asphericity(bead.bead(), field),
                    tear_probability,
                    torn: strength < tear_probability,
                    timing: None,
                    tears: None,
                }
            })
            .collect()
    }

    fn uptake(&self, seen: &Seen<'_>) -> f64 {
        let dry = seen.bead.bead().dry_volume();
        uptake_of_volume_ratio(seen.field.volume.iter().sum::<f64>() / dry, self.scene.gel.dry_density)
    }

    pub(super) fn tear_probability(&self, seen: &Seen<'_>) -> f64 {
        seen.tension.tear_probability(&self.scene.strength)
    }

    fn tension(&self, bead: &Relaxation, field: &StressField) -> TensionField {
        let lattice = bead.bead().lattice();
        let reach = self.scene.strength_reach(lattice.across());
        // Volumes are those of the free-swollen gel in the scene's water, also on the way.
        let scale = self.gel.free_volume_ratio() / field.reference_volume_ratio;
        TensionField {
            volumes: field.free_volume.iter().map(|v| v * scale).collect(),
            tensions: field.tensions_over(lattice, reach),
        }
    }
}

/// How forces go through the grains, as their contacts were last computed.
pub(super) fn forces(grains: &Assembly) -> ForceOutcome {
    ForceStatistics::of(grains).map_or(ForceOutcome::default(), |forces| ForceOutcome {
        mean_force_n: forces.mean_force,
        force_q95: forces.quantiles[FORCE_QUANTILES.len() - 1],
        share_above_mean: forces.share_above_mean,
        chains: forces.chains,
        chain_grains: forces.chain_grains,
    })
}

/// Stops a march whose state the model does not cover.
pub(super) fn guard(bodies: &Bodies) -> Result<(), String> {
    let cell = &bodies.grains.cell;
    for (index, bead) in bodies.beads.iter().enumerate() {
        let width = 2.0 * bead.bead().extent();
        for axis in 0..2 {
            if cell.periodic[axis] && width > 0.9 * cell.size[axis] {
                return Err(format!(
                    "bead {index} has grown to {width:.3e} m and meets its own image in a cell {:.3e} m wide: give the bed more grains",
                    cell.size[axis]
                ));
            }
        }
    }
    if let Some(bead) = bodies.beads.iter().position(|bead| bead.smallest_volume_ratio() <= 1.0) {
        return Err(format!(
            "a voxel of bead {bead} was pressed out of water; take more increments or a smaller lid stress"
        ));
    }
    let share = swallowed(bodies);
    if share > SWALLOWED {
        return Err(format!(
            "{:.2} % of the gel lies inside grains or other gel: the state is void; take more increments or more voxels across",
            100.0 * share
        ));
    }
    Ok(())
}

/// Share of the beads' volume that lies inside grains, other beads or the bead itself:
/// what the skin has penetrated, and whole voxels that a grain has swallowed.
pub(super) fn swallowed(bodies: &Bodies) -> f64 {
    let mut inside: f64 = bodies.pairs.iter().map(|pair| pair.contact.overlap()).sum();
    let mut total = 0.0;
    for (relaxing, around) in bodies.beads.iter().zip(&bodies.around) {
        inside += relaxing.penetrated_volume(&around.obstacles) + relaxing.folded_volume();
        let bead = relaxing.bead();
        let size = bead.swollen_edge();
        for voxel in 0..bead.lattice().voxel_count() {
            if !bead.lattice().is_inner(voxel) {
                continue;
            }
            let place = bead.voxel_centre(voxel);
            if around.obstacles.iter().any(|obstacle| obstacle.distance(&place) < -size) {
                inside += size.powi(3);
            }
        }
        total += bead.volume();
    }
    if total > 0.0 { inside / total } else { 0.0 }
}
