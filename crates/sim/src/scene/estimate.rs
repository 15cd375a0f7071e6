use super::budget::voxels;
use super::{BeadAmount, Scene, SoilGrading, Water};
use crate::coupling::spans;
use bedswell_gel::{Gel, GelNumbers, Surroundings, uptake_of_volume_ratio};
use bedswell_geometry::volume_of_radius;
use bedswell_grains::{PackError, beads_for_dose};
use serde::Serialize;
use std::f64::consts::PI;

/// Porosity assumed for sizing a bed whose own is not given.
const USUAL_POROSITY: f64 = 0.40;
/// Memory of one voxel with its nodes, skin and solver vectors (bytes), as measured, rounded up.
const BYTES_PER_VOXEL: f64 = 1500.0;
/// Memory of one grain with its contacts (bytes), rounded up.
const BYTES_PER_GRAIN: f64 = 4000.0;
/// Time that one voxel takes in one increment (s), measured on a core of 2.x GHz.
const SECONDS_PER_VOXEL: f64 = 1.2e-4;
/// The same among grains that are held in place (s).
const SECONDS_PER_VOXEL_ALONE: f64 = 7e-6;
/// The same for one grain that moves (s).
const SECONDS_PER_GRAIN: f64 = 3e-4;
/// Steps in time of a span between changes outside, about.
const STEPS_PER_SPAN: f64 = 120.0;
/// Time that one voxel and one grain take in one step in time, with the rest after it (s).
const SECONDS_PER_VOXEL_IN_TIME: f64 = 4.5e-4;
const SECONDS_PER_GRAIN_IN_TIME: f64 = 1.2e-4;
/// Length over which tension counts as one, over a bead's free-swollen diameter: what 12
/// voxels across resolve.
const USUAL_STRENGTH_LENGTH: f64 = 1.0 / 6.0;
/// Memory of the program itself (bytes).
const BYTES_AT_LEAST: f64 = 1e7;

/// What a scene comes to, worked out without running it.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct SceneEstimate {
    /// Grains in the cell.
    pub grains: usize,
    /// Beads in the cell.
    pub beads: usize,
    /// Voxels across each bead: as many as asked for, or as the budget allows.
    pub across: usize,
    /// Voxels of all beads.
    pub voxels: f64,
    /// Inner diameter of the pot (m), the edge of a cube with the volume of the mixed dry bed,
    /// or the shortest edge of a given cell.
    pub bed_edge_m: f64,
    /// Height of the mixed dry bed (m), about.
    pub bed_height_m: f64,
    /// Diameter (m) of the largest grain; 0 without grains.
    pub largest_grain_m: f64,
    /// Mean diameter (m) of the grains by number; 0 without grains.
    pub mean_grain_m: f64,
    /// Volume (m³) of the grains.
    pub soil_volume_m3: f64,
    /// Volume (m³) between the grains of the mixed dry bed, dry beads included.
    pub pore_volume_m3: f64,
    /// Volume (m³) of the dry beads.
    pub dry_gel_volume_m3: f64,
    /// Volume of the free-swollen beads over that of the pores.
    pub pores_filled: f64,
    /// Linear stretch of the gel from dry to free-swollen.
    pub free_stretch: f64,
    /// Diameter (m) of a free-swollen bead.
    pub swollen_diameter_m: f64,
    /// Water uptake of a free-swollen bead (g/g).
    pub free_uptake_g_per_g: f64,
    /// Shear modulus (Pa) of the free-swollen gel.
    pub swollen_modulus_pa: f64,
    /// Lid stress over swollen modulus, which sets the regime.
    pub load_ratio: f64,
    /// Time (s) of one pack on one core, about.
    pub seconds_per_pack: f64,
    /// Memory (bytes) of one pack, about.
    pub memory_bytes: f64,
}

impl Scene {
    /// The gel in the scene's water.
    pub fn swelling_gel(&self) -> Gel {
        let numbers =
            GelNumbers { crosslinks: self.gel.crosslinks, chi: self.gel.chi, charges: self.gel.charges };
        let Self { water, .. } = self;
        let surroundings =
            Surroundings { salt: water.salt, potential: water.potential, temperature: water.temperature };
        Gel::new(numbers, surroundings)
    }

    /// Beads in the cell, a dose being rounded to whole beads.
    ///
    /// # Errors
    /// When the dose leaves no bead or no grains.
    pub fn bead_count(&self) -> Result<usize, PackError> {
        match &self.beads.amount {
            BeadAmount::Count(count) => Ok(*count),
            BeadAmount::At(centres) => Ok(centres.len()),
            BeadAmount::Dose(dose) => {
                let grains = self.soil.grain_diameters(self.bed.grains).map_err(|_| PackError::NoGrains)?;
                let Self { beads, gel, soil, .. } = self;
                beads_for_dose(*dose, beads.dry_diameter, gel.dry_density, &grains, soil.density)
            }
        }
    }

    /// Voxel edges over which tension counts as one in beads of so many voxels across.
    pub(crate) fn strength_reach(&self, across: usize) -> f64 {
        let diameter = self.beads.dry_diameter * self.swelling_gel().free_stretch();
        let share = self.strength.length.map_or(USUAL_STRENGTH_LENGTH, |length| length / diameter);
        share * across as f64
    }

    /// The gel in the scene's water, under this pressure (Pa) besides.
    pub(crate) fn gel_under(&self, pressure: f64) -> Gel {
        let potential = self.water.potential - pressure;
        Self { water: Water { potential, ..self.water }, ..self.clone() }.swelling_gel()
    }

    /// What the scene comes to, before anything of its size is allocated.
    ///
    /// # Errors
    /// When the dose leaves no bead or no grains.
    pub fn estimate(&self) -> Result<SceneEstimate, PackError> {
        let diameters = self.soil.grain_diameters(self.bed.grains).map_err(|_| PackError::NoGrains)?;
        let soil_volume_m3: f64 = diameters.iter().map(|diameter| volume_of_radius(0.5 * diameter)).sum();
        let beads = self.bead_count()?;
        let dry_gel_volume_m3 = beads as f64 * volume_of_radius(0.5 * self.beads.dry_diameter);
        let porosity = self.bed.porosity.unwrap_or(USUAL_POROSITY);
        let mixed = (soil_volume_m3 + dry_gel_volume_m3) / (1.0 - porosity);
        let (bed_volume, bed_edge_m, bed_height_m) = match (&self.soil.grading, self.bed.pot) {
            (SoilGrading::Spheres { size, .. }, _) => {
                (size.iter().product(), size.iter().copied().fold(f64::INFINITY, f64::min), size[2])
            }
            (_, Some(diameter)) => {
                let height = mixed / (0.25 * PI * diameter * diameter);
                (mixed, diameter, height.max(self.beads.dry_diameter))
            }
            (_, None) => (mixed, mixed.cbrt(), mixed.cbrt()),
        };
        let pore_volume_m3 = bed_volume - soil_volume_m3;
        let across = self.beads.across_for(beads);
        let voxels = voxels(beads, across);
        let seconds_per_increment = if self.bed.fixed_grains {
            SECONDS_PER_VOXEL_ALONE * voxels
        } else {
            SECONDS_PER_VOXEL * voxels + SECONDS_PER_GRAIN * diameters.len() as f64
        };
        let gel = self.wettest_gel();
        let free_stretch = gel.free_stretch();
        let swollen_modulus_pa = gel.moduli().shear;
        Ok(SceneEstimate {
            grains: diameters.len(),
            beads,
            across,
            voxels,
            bed_edge_m,
            bed_height_m,
            largest_grain_m: diameters.iter().copied().fold(0.0, f64::max),
            mean_grain_m: diameters.iter().sum::<f64>() / diameters.len().max(1) as f64,
            soil_volume_m3,
            pore_volume_m3,
            dry_gel_volume_m3,
            pores_filled: dry_gel_volume_m3 * gel.free_volume_ratio() / pore_volume_m3,
            free_stretch,
            swollen_diameter_m: free_stretch * self.beads.dry_diameter,
            free_uptake_g_per_g: uptake_of_volume_ratio(gel.free_volume_ratio(), self.gel.dry_density),
            swollen_modulus_pa,
            load_ratio: self.bed.lid_stress / swollen_modulus_pa,
            seconds_per_pack: match &self.time {
                None => self.march.increments as f64 * seconds_per_increment,
                Some(time) => {
                    let per_step = SECONDS_PER_VOXEL_IN_TIME * voxels
                        + SECONDS_PER_GRAIN_IN_TIME * diameters.len() as f64;
                    STEPS_PER_SPAN * spans(&time.history, time.until).len() as f64 * per_step
                }
            },
            memory_bytes: BYTES_AT_LEAST
                + BYTES_PER_VOXEL * voxels
                + BYTES_PER_GRAIN * diameters.len() as f64,
        })
    }
}
