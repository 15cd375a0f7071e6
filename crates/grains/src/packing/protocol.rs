use super::{PackError, PackRequest, Sides};
use crate::assembly::{Assembly, AssemblyError, Lid};
use crate::contact_law::ContactLaw;
use bedswell_geometry::{Cell, Sphere, Stream, Vector, volume_of_radius};
use rand::RngExt;

/// The steps by which packs are made, for one checked request.
pub(super) struct Recipe {
    radii: Vec<f64>,
    volume: f64,
    pub(super) friction: f64,
    stress: f64,
    sides: Sides,
}

/// Typical overlaps, over the diameter, of a march in stages: soft grains find
/// their places in few steps, stiff ones then only settle.
const STAGES: [f64; 5] = [1.0e-2, 3.0e-3, 1.0e-3, 3.0e-4, STIFF];

/// Typical overlap in the pack handed out; the deepest is some eight times it.
const STIFF: f64 = 1.0e-4;

/// Deepest overlap, over the smaller diameter, in the pack handed out.
const DEEPEST_OVERLAP: f64 = 1.0e-3;

/// Damping of a march that should rearrange the bed, and of one that should not.
const LIVELY: f64 = 0.3;
const SLUGGISH: f64 = 0.7;

/// Narrowest and lowest cells, in diameters of the largest sphere.
const WIDTHS: f64 = 2.0;
const HEIGHTS: f64 = 2.0;

/// Starts below this solid fraction mix freely.
const DILUTE: f64 = 0.3;

impl Recipe {
    pub(super) fn new(request: &PackRequest) -> Result<Self, PackError> {
        if request.grains.is_empty() {
            return Err(PackError::NoGrains);
        }
        let beads = std::iter::repeat_n(&request.bead_diameter, request.beads);
        let diameters: Vec<f64> = request.grains.iter().chain(beads).copied().collect();
        if let Some(index) = diameters.iter().position(|d| !(d.is_finite() && *d > 0.0)) {
            return Err(PackError::Diameter { index, diameter: diameters[index] });
        }
        if let Some(porosity) = request.porosity.filter(|porosity| !(*porosity > 0.0 && *porosity < 1.0)) {
            return Err(PackError::Porosity(porosity));
        }
        if !(request.lid_stress.is_finite() && request.lid_stress > 0.0) {
            return Err(PackError::LidStress(request.lid_stress));
        }
        let law = ContactLaw::for_stress(request.lid_stress, STIFF, request.friction);
        law.check().map_err(AssemblyError::from)?;
        let radii: Vec<f64> = diameters.iter().map(|diameter| 0.5 * diameter).collect();
        let recipe = Self {
            volume: radii.iter().map(|&radius| volume_of_radius(radius)).sum(),
            radii,
            friction: request.friction,
            stress: request.lid_stress,
            sides: request.sides,
        };
        recipe.check_size(request)?;
        Ok(recipe)
    }

    /// Random points at the given solid fraction, pushed apart without friction,
    /// with the steps it took; `None` where they jam before they are free.
    pub(super) fn spread(
        &self,
        solid: f64,
        random: &mut Stream,
    ) -> Result<Option<(Assembly, usize)>, PackError> {
        let mut grains = self.deposit(solid, random)?;
        let steps = separate(&mut grains);
        Ok((grains.rest().deepest_overlap < FREE_OVERLAP).then_some((grains, steps)))
    }

    /// A start of the given solid fraction that collapses under the lid to wherever
    /// `friction` stops it.
    pub(super) fn collapse(
        &self,
        solid: f64,
        friction: f64,
        random: &mut Stream,
    ) -> Result<(Assembly, usize), PackError> {
        let mut grains = self.deposit(solid, random)?;
        let freed = separate(&mut grains);
        let settled = self.stages(&mut grains, friction, 1.0e-3);
        Ok((grains, freed + settled))
    }

    /// A dilute start compressed without friction: random close packing.
    pub(super) fn compress_smooth(&self, random: &mut Stream) -> Result<(Assembly, usize), PackError> {
        let mut grains = self.deposit(DILUTE, random)?;
        let steps = self.stages(&mut grains, 0.0, 1.0e-2);
        Ok((grains, steps))
    }

    /// Lid down, and let the grains find their places: soft first, then stiff.
    fn stages(&self, grains: &mut Assembly, friction: f64, tolerance: f64) -> usize {
        grains.stop();
        grains.lid = Lid::Stress(self.stress);
        let steps: usize = STAGES
            .iter()
            .map(|&overlap| {
                grains.law = ContactLaw::for_stress(self.stress, overlap, friction);
                march(grains, LIVELY, tolerance, if overlap > STIFF { 4_000 } else { 8_000 })
            })
            .sum();
        steps + self.stiffen(grains, LIVELY, tolerance)
    }

    /// Stiffens grains that still overlap too deeply: in wide gradings a small one
    /// can be caught between large ones.
    fn stiffen(&self, grains: &mut Assembly, damping: f64, tolerance: f64) -> usize {
        let (mut overlap, mut steps) = (STIFF, 0);
        for _ in 0..3 {
            let deepest = grains.rest().deepest_overlap;
            if deepest < DEEPEST_OVERLAP {
                break;
            }
            overlap *= 0.6 * DEEPEST_OVERLAP / deepest;
            grains.law = ContactLaw::for_stress(self.stress, overlap, grains.law.friction);
            steps += march(grains, damping, tolerance, 4_000);
        }
        steps
    }

    /// Friction on, lid down, and hold the grains where they are.
    pub(super) fn lock(&self, grains: &mut Assembly) -> usize {
        grains.stop();
        grains.lid = Lid::Stress(self.stress);
        grains.law = ContactLaw::for_stress(self.stress, STIFF, self.friction);
        march(grains, SLUGGISH, 1.0e-4, 3_000) + self.stiffen(grains, SLUGGISH, 1.0e-4)
    }

    /// Spheres at random points of a cell with the given solid fraction.
    fn deposit(&self, solid: f64, random: &mut Stream) -> Result<Assembly, PackError> {
        let size = self.size(solid);
        let cell = match self.sides {
            Sides::FloorAndLid => Cell::with_floor_and_lid(size),
            Sides::Periodic => Cell::periodic(size),
        };
        let spheres: Vec<Sphere> = (self.radii.iter())
            .map(|&radius| {
                let mut centre = size.map(|length| length * random.random::<f64>());
                if self.sides == Sides::FloorAndLid {
                    centre.z = radius + (size.z - 2.0 * radius) * (centre.z / size.z);
                }
                Sphere { centre, radius }
            })
            .collect();
        let law = ContactLaw::for_stress(self.stress, STAGES[0], 0.0);
        Ok(Assembly::new(cell, &spheres, law, Lid::Fixed)?)
    }

    /// A cube, unless that is too narrow for the largest sphere. Width does not
    /// depend on the solid fraction, so that all packs of a request are alike.
    fn size(&self, solid: f64) -> Vector {
        let volume = self.volume / solid;
        match self.sides {
            Sides::Periodic => Vector::repeat(volume.cbrt()),
            Sides::FloorAndLid => {
                let side = (self.volume / TYPICAL_SOLID).cbrt().max(WIDTHS * self.largest());
                Vector::new(side, side, volume / (side * side))
            }
        }
    }

    fn largest(&self) -> f64 {
        2.0 * self.radii.iter().copied().fold(0.0, f64::max)
    }

    /// Whether the cell holds its largest grain and bead.
    fn check_size(&self, request: &PackRequest) -> Result<(), PackError> {
        let size = self.size(request.porosity.map_or(TYPICAL_SOLID, |porosity| 1.0 - porosity));
        let count = request.grains.len() as f64;
        // Grains it takes for a cell of least width and height.
        let needed = |diameter: f64| {
            let least = HEIGHTS * WIDTHS * WIDTHS * diameter.powi(3);
            (count * least * TYPICAL_SOLID / self.volume).ceil() as usize
        };
        let (side, height) = (size.x, size.z);
        if request.beads > 0 && request.bead_diameter > side.min(height) {
            let diameter = request.bead_diameter;
            return Err(PackError::BeadLargerThanBed { diameter, side, height, needed: needed(diameter) });
        }
        let largest = self.largest();
        if height < HEIGHTS * largest {
            return Err(PackError::TooFewGrains { height, largest, needed: needed(largest) });
        }
        Ok(())
    }
}

/// Solid fraction of an ordinary bed, for the cell's width.
const TYPICAL_SOLID: f64 = 0.6;

/// Overlap, over the diameter, at which grains count as free of each other.
const FREE_OVERLAP: f64 = 5.0e-4;

/// Pushes overlapping grains apart in a cell of fixed size; returns the steps.
fn separate(grains: &mut Assembly) -> usize {
    grains.law.friction = 0.0;
    for step in 0..2_000 {
        grains.compute_contacts();
        if grains.rest().deepest_overlap < FREE_OVERLAP {
            return step;
        }
        grains.advance(LIVELY);
    }
    grains.compute_contacts();
    2_000
}

/// Marches until net forces fall below `tolerance` of the mean contact force, for
/// at most `limit` steps; returns the steps.
fn march(grains: &mut Assembly, damping: f64, tolerance: f64, limit: usize) -> usize {
    for step in 0..limit {
        grains.compute_contacts();
        let rest = grains.rest();
        if rest.mean_contact_force > 0.0 && rest.residual() < tolerance && rest.lid_unbalance < tolerance {
            return step;
        }
        grains.advance(damping);
    }
    grains.compute_contacts();
    limit
}
