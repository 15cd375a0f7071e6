use super::{PackError, PackRequest, Pot, REST_REQUIRED, Sides, at_rest};
use crate::assembly::{Assembly, AssemblyError, Lid};
use crate::contact_law::ContactLaw;
use bedswell_geometry::{Cell, Sphere, Stream, Vector, volume_of_radius};
use rand::RngExt;
use std::f64::consts::TAU;

/// The steps by which packs are made, for one checked request.
pub(super) struct Recipe {
    radii: Vec<f64>,
    volume: f64,
    pub(super) friction: f64,
    rolling: f64,
    lid_stress: f64,
    /// What the lowest grains bear at most (Pa).
    stress: f64,
    weights: Vec<Vector>,
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
        // One bead alone is no bed.
        if request.grains.is_empty() && request.beads < 2 {
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
        let radii: Vec<f64> = diameters.iter().map(|diameter| 0.5 * diameter).collect();
        let weights = weights(request, &radii)?;
        let own = match request.sides {
            Sides::Pot(pot) => weights.iter().map(Vector::norm).sum::<f64>() / pot.section(),
            Sides::FloorAndLid | Sides::Periodic => 0.0,
        };
        let stress = request.lid_stress + own;
        let law = ContactLaw::for_stress(stress, STIFF, request.friction).with_rolling(request.rolling);
        law.check().map_err(AssemblyError::from)?;
        let recipe = Self {
            volume: radii.iter().map(|&radius| volume_of_radius(radius)).sum(),
            radii,
            friction: request.friction,
            rolling: request.rolling,
            lid_stress: request.lid_stress,
            stress,
            weights,
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
        self.load(grains);
        let steps: usize = STAGES
            .iter()
            .map(|&overlap| {
                grains.law = self.law(overlap, friction);
                march(grains, LIVELY, tolerance, if overlap > STIFF { 4_000 } else { 8_000 })
            })
            .sum();
        steps
            + self.stiffen(grains, LIVELY, tolerance)
            + self.uncover(grains, LIVELY, tolerance)
            + wait(grains)
    }

    /// A law that lets a typical contact overlap by that part of the diameter.
    fn law(&self, overlap: f64, friction: f64) -> ContactLaw {
        ContactLaw::for_stress(self.stress, overlap, friction).with_rolling(self.rolling)
    }

    /// Weights on and lid down.
    fn load(&self, grains: &mut Assembly) {
        grains.stop();
        grains.weights.clone_from(&self.weights);
        grains.lid = Lid::Stress(self.lid_stress);
    }

    /// Takes the lid off, if the top is to be open, and lets the bed come to rest.
    fn uncover(&self, grains: &mut Assembly, damping: f64, tolerance: f64) -> usize {
        if !matches!(self.sides, Sides::Pot(Pot { open: true, .. })) {
            return 0;
        }
        grains.stop();
        grains.lid = Lid::Open;
        march(grains, damping, tolerance, 8_000)
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
            grains.law = self.law(overlap, grains.law.friction);
            steps += march(grains, damping, tolerance, 4_000);
        }
        steps
    }

    /// Friction on, lid down, and hold the grains where they are.
    pub(super) fn lock(&self, grains: &mut Assembly) -> usize {
        self.load(grains);
        grains.law = self.law(STIFF, self.friction);
        march(grains, SLUGGISH, 1.0e-4, 3_000)
            + self.stiffen(grains, SLUGGISH, 1.0e-4)
            + self.uncover(grains, SLUGGISH, 1.0e-4)
    }

    /// Spheres at random points of a cell with the given solid fraction.
    fn deposit(&self, solid: f64, random: &mut Stream) -> Result<Assembly, PackError> {
        let size = self.size(solid);
        let cell = match self.sides {
            Sides::FloorAndLid => Cell::with_floor_and_lid(size),
            Sides::Periodic => Cell::periodic(size),
            Sides::Pot(_) => Cell { size, periodic: [false; 3] },
        };
        let spheres: Vec<Sphere> = (self.radii.iter())
            .map(|&radius| {
                let mut centre = size.map(|length| length * random.random::<f64>());
                if self.sides != Sides::Periodic {
                    centre.z = radius + (size.z - 2.0 * radius) * (centre.z / size.z);
                }
                if let Sides::Pot(pot) = self.sides {
                    let distance = (0.5 * pot.diameter - radius) * (centre.x / size.x).sqrt();
                    let (sin, cos) = (TAU * centre.y / size.y).sin_cos();
                    centre.x = 0.5 * size.x + distance * cos;
                    centre.y = 0.5 * size.y + distance * sin;
                }
                Sphere { centre, radius }
            })
            .collect();
        let law = self.law(STAGES[0], 0.0);
        let grains = Assembly::new(cell, &spheres, law, Lid::Fixed)?;
        Ok(match self.sides {
            Sides::Pot(pot) => grains.with_wall(0.5 * pot.diameter)?,
            Sides::FloorAndLid | Sides::Periodic => grains,
        })
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
            Sides::Pot(pot) => {
                let mean_diameter = 2.0 * self.radii.iter().sum::<f64>() / self.radii.len() as f64;
                let uncovered = if pot.open { UNCOVERED * mean_diameter } else { 0.0 };
                // Few beads in a wide pot lie in a single layer.
                pot.size((volume / pot.section() + uncovered).max(self.largest()))
            }
        }
    }

    fn largest(&self) -> f64 {
        2.0 * self.radii.iter().copied().fold(0.0, f64::max)
    }

    /// Whether the cell holds its largest grain and bead.
    fn check_size(&self, request: &PackRequest) -> Result<(), PackError> {
        let size = self.size(request.porosity.map_or(TYPICAL_SOLID, |porosity| 1.0 - porosity));
        let count = if request.grains.is_empty() { request.beads } else { request.grains.len() } as f64;
        // Grains it takes for a cell of least width and height.
        let needed = |diameter: f64| {
            let least = HEIGHTS * WIDTHS * WIDTHS * diameter.powi(3);
            (count * least * TYPICAL_SOLID / self.volume).ceil() as usize
        };
        let (side, height) = (size.x, size.z);
        // What is wider than a pot is refused as such: more grains would not help.
        let width = if matches!(self.sides, Sides::Pot(_)) { f64::INFINITY } else { side };
        if request.beads > 0 && request.bead_diameter > width.min(height) {
            let diameter = request.bead_diameter;
            return Err(PackError::BeadLargerThanBed { diameter, side, height, needed: needed(diameter) });
        }
        let largest = self.largest();
        let heights = if request.grains.is_empty() { 1.0 } else { HEIGHTS };
        if height < heights * largest {
            return Err(PackError::TooFewGrains { height, largest, needed: needed(largest) });
        }
        Ok(())
    }
}

/// The weight of each sphere (N); none outside pots.
fn weights(request: &PackRequest, radii: &[f64]) -> Result<Vec<Vector>, PackError> {
    let Sides::Pot(pot) = request.sides else { return Ok(vec![Vector::zeros(); radii.len()]) };
    if !(pot.diameter.is_finite() && pot.diameter > 0.0) {
        return Err(AssemblyError::WallRadius(0.5 * pot.diameter).into());
    }
    for (name, value) in [("grains", pot.grain_weight), ("beads", pot.bead_weight)] {
        if !(value.is_finite() && value >= 0.0) {
            return Err(PackError::Weight { name, value });
        }
    }
    if pot.open && pot.grain_weight.min(pot.bead_weight) == 0.0 {
        return Err(PackError::NothingHoldsDown);
    }
    let of = |index: usize| if index < request.grains.len() { pot.grain_weight } else { pot.bead_weight };
    Ok((radii.iter().enumerate())
        .map(|(index, &radius)| -Vector::z() * (of(index) * volume_of_radius(radius)))
        .collect())
}

/// How far, in mean diameters, the mean surface of a bed lies below the lid that has
/// levelled it.
const UNCOVERED: f64 = 0.3;

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

/// Goes on where a loose bed still gives way; returns the steps.
fn wait(grains: &mut Assembly) -> usize {
    if at_rest(grains) { 0 } else { march(grains, LIVELY, 0.5 * REST_REQUIRED, 40_000) }
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
