//! A bed in a pot: its wall, and what grains and beads weigh there.

use crate::Scene;
use bedswell_gel::{Bead, WATER_DENSITY};
use bedswell_geometry::{Vector, volume_of_radius};
use bedswell_grains::{Assembly, AssemblyError, Sides, submerged_weight};
use std::f64::consts::PI;

/// A pot with the weights per volume in it, less the buoyancy of the water that floods it.
#[derive(Clone, Copy, Debug)]
pub(super) struct Pot {
    /// Inner diameter (m).
    diameter: f64,
    /// The top is open.
    open: bool,
    /// Of a grain's solid (N/m³).
    grain: f64,
    /// Of dry gel (N/m³).
    polymer: f64,
    /// Of the water in a bead (N/m³): nothing in water.
    water: f64,
}

impl Pot {
    /// The pot of a scene; `None` for a cell, whose overburden outweighs what lies in it.
    pub(super) fn of(scene: &Scene) -> Option<Self> {
        let fluid = if scene.bed.flooded { WATER_DENSITY } else { 0.0 };
        let alone = scene.bed.grains == 0;
        Some(Self {
            diameter: scene.bed.pot?,
            open: scene.bed.open,
            grain: if alone { 0.0 } else { submerged_weight(scene.soil.density, fluid) },
            polymer: submerged_weight(scene.gel.dry_density, fluid),
            water: submerged_weight(WATER_DENSITY, fluid),
        })
    }

    /// What the packing needs to know.
    pub(super) fn sides(&self) -> Sides {
        Sides::Pot(bedswell_grains::Pot {
            diameter: self.diameter,
            grain_weight: self.grain,
            bead_weight: self.polymer,
            open: self.open,
        })
    }

    /// Stress (Pa) of a lid as heavy as a layer of grains of this mean diameter (m), which
    /// levels a bed that is then left open.
    pub(super) fn levelling_stress(&self, mean_diameter: f64) -> f64 {
        /// Solid fraction of an ordinary bed.
        const SOLID: f64 = 0.6;
        SOLID * self.grain * mean_diameter
    }

    /// Stress (Pa) on the floor under the weight of grains of this volume (m³).
    pub(super) fn own_stress(&self, solid: f64) -> f64 {
        self.grain * solid / (0.25 * PI * self.diameter * self.diameter)
    }

    /// Puts a wall round grains and gives them weight. The spheres from number `grains` on
    /// are beads of `dry` volume (m³).
    pub(super) fn enclose(
        &self,
        assembly: Assembly,
        grains: usize,
        dry: f64,
    ) -> Result<Assembly, AssemblyError> {
        let mut assembly = assembly.with_wall(0.5 * self.diameter)?;
        for (index, &radius) in assembly.radii.iter().enumerate() {
            let volume = volume_of_radius(radius);
            let weight = if index < grains { self.grain * volume } else { self.weight_of_gel(dry, volume) };
            assembly.weights[index] = -Vector::z() * weight;
        }
        Ok(assembly)
    }

    /// Weight (N) of a bead as it is now, less its buoyancy: gel and the water in it keep
    /// their volumes.
    pub(super) fn bead_weight(&self, bead: &Bead) -> Vector {
        -Vector::z() * self.weight_of_gel(bead.dry_volume(), bead.volume())
    }

    fn weight_of_gel(&self, dry: f64, volume: f64) -> f64 {
        self.polymer * dry + self.water * (volume - dry)
    }
}
