use super::{BeadAmount, Scene, SoilGrading};
use bedswell_gel::{Gel, GelNumbers, Surroundings, uptake_of_volume_ratio};
use bedswell_geometry::volume_of_radius;
use serde::Serialize;
use std::f64::consts::PI;

/// Porosity assumed for sizing a bed whose own is not given.
const USUAL_POROSITY: f64 = 0.40;

/// What a scene comes to, worked out without running it.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Estimate {
    /// Grains in the cell.
    pub grains: usize,
    /// Beads in the cell.
    pub beads: f64,
    /// Voxels of each bead.
    pub voxels_per_bead: f64,
    /// Voxels of all beads.
    pub voxels: f64,
    /// Edge (m) of a cube with the volume of the mixed dry bed, or the shortest edge of a given cell.
    pub bed_edge_m: f64,
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

    /// What the scene comes to, before anything is allocated.
    pub fn estimate(&self) -> Estimate {
        let soil_volume = match &self.soil.grading {
            SoilGrading::Spheres { spheres, .. } => spheres.iter().map(|sphere| sphere.volume()).sum(),
            grading => self.bed.grains as f64 * grading.mean_grain_volume(),
        };
        let bead_volume = volume_of_radius(0.5 * self.beads.dry_diameter);
        let beads = match &self.beads.amount {
            BeadAmount::Count(count) => *count as f64,
            BeadAmount::At(centres) => centres.len() as f64,
            BeadAmount::Dose(dose) => {
                (dose * self.soil.density * soil_volume / (self.gel.dry_density * bead_volume)).round()
            }
        };
        let bed_edge_m = match &self.soil.grading {
            SoilGrading::Spheres { size, .. } => size.iter().copied().fold(f64::INFINITY, f64::min),
            _ => {
                let porosity = self.bed.porosity.unwrap_or(USUAL_POROSITY);
                ((soil_volume + beads * bead_volume) / (1.0 - porosity)).cbrt()
            }
        };
        let voxels_per_bead = PI / 6.0 * (self.beads.across as f64).powi(3);
        let gel = self.swelling_gel();
        let free_stretch = gel.free_stretch();
        let swollen_modulus_pa = gel.moduli().shear;
        Estimate {
            grains: self.bed.grains,
            beads,
            voxels_per_bead,
            voxels: beads * voxels_per_bead,
            bed_edge_m,
            free_stretch,
            swollen_diameter_m: free_stretch * self.beads.dry_diameter,
            free_uptake_g_per_g: uptake_of_volume_ratio(gel.free_volume_ratio(), self.gel.dry_density),
            swollen_modulus_pa,
            load_ratio: self.bed.lid_stress / swollen_modulus_pa,
        }
    }
}
