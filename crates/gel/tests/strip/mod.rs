//! A strip with a cut, pulled in pure shear.
//!
//! A long strip whose grips hold its length and let its thickness contract stores the
//! energy W per volume ahead of the cut and none behind it, so that a crack grows at
//! W · height = Γ (Rivlin & Thomas 1953, J. Polym. Sci. 10:291, from memory).

use bedswell_gel::{
    Bead, Face, Gel, GelNumbers, Grip, Lattice, Rupture, RuptureError, Surroundings, Tolerance, Toughness,
};
use bedswell_geometry::Vector;
use std::sync::Arc;

/// Height of the free-swollen strip (m); the rest over it.
const HEIGHT: f64 = 1e-3;
const LENGTH: f64 = 3.0;
const THICKNESS: f64 = 0.34;
/// The length ℓ over which stress is averaged.
const AVERAGED: f64 = 1.0 / 6.0;

const TOLERANCE: Tolerance = Tolerance { residual: 1e-5, corrections: 0, held: true };

pub(crate) fn gel() -> Gel {
    Gel::new(GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 }, Surroundings::default())
}

/// A strip of some angle to the lattice, with a cut along the middle of one half.
pub(crate) struct Strip {
    bead: Bead,
    /// Unit vectors on the lattice.
    along: Vector,
    up: Vector,
    /// Voxels.
    height: f64,
}

impl Strip {
    /// A strip `height` voxels high along the lattice, or at 45 degrees to it.
    pub(crate) fn new(height: usize, oblique: bool) -> Self {
        let (long, high) = (LENGTH * height as f64, height as f64);
        let thick = (THICKNESS * high).round() as usize;
        let half = std::f64::consts::FRAC_1_SQRT_2;
        let (along, up, size) = if oblique {
            let side = ((long + high) * half + 4.0).ceil() as usize;
            (Vector::new(half, half, 0.0), Vector::new(-half, half, 0.0), [side, side, thick])
        } else {
            (Vector::x(), Vector::y(), [long as usize, height + 2, thick])
        };
        let lattice = Lattice::carved(size, |voxel| {
            let place = Vector::from_fn(|axis, _| voxel[axis] as f64 + 0.5 - 0.5 * size[axis] as f64);
            // The grips take a voxel beyond the height.
            place.dot(&along).abs() < 0.5 * long && place.dot(&up).abs() < 0.5 * high + 1.2
        });
        let stretch = gel().free_stretch();
        let dry = 0.5 * HEIGHT / high / stretch * size[0] as f64;
        Self { bead: Bead::new(Arc::new(lattice), dry, Vector::zeros(), stretch), along, up, height: high }
    }

    /// The strip, cut and pulled to `stretch`, of a gel with the fracture energy `energy`
    /// (J/m²).
    pub(crate) fn pull(&self, stretch: f64, energy: f64) -> Result<Rupture, RuptureError> {
        let toughness = Toughness { energy, length: Some(AVERAGED * HEIGHT), scatter: 0.0, seed: 0 };
        let mut rupture = Rupture::new(self.bead.clone(), &toughness, &gel())?;
        rupture.grip(self.grips(stretch))?;
        rupture.cut(&self.cut());
        rupture.settle(&gel(), &[], TOLERANCE)?;
        Ok(rupture)
    }

    /// Lets a pulled strip tear until it stops, or has torn over `share` of its height;
    /// `visit` sees every state. Returns how far it tore, over the height.
    pub(crate) fn tear(
        &self,
        rupture: &mut Rupture,
        share: f64,
        mut visit: impl FnMut(&Rupture),
    ) -> Result<f64, RuptureError> {
        let torn = |rupture: &Rupture| {
            let ahead = rupture.events().iter().filter(|e| e.place.dot(&self.up).abs() < 0.25 * HEIGHT);
            ahead.map(|event| event.area).sum::<f64>() / (THICKNESS * HEIGHT * HEIGHT)
        };
        visit(rupture);
        while torn(rupture) < share && rupture.rupture_once(&gel(), &[], true)? > 0 {
            visit(rupture);
        }
        Ok(torn(rupture))
    }

    /// Faces of the bonds that the cut severs.
    fn cut(&self) -> Vec<Face> {
        let lattice = self.bead.lattice();
        let place = |voxel: usize| Vector::from(lattice.voxel_offset(voxel));
        let is_above = |voxel: usize| place(voxel).dot(&self.up) > 1e-9;
        let is_cut = |&(low, high, _): &(usize, usize, usize)| {
            is_above(low) != is_above(high) && (place(low) + place(high)).dot(&self.along) < 0.0
        };
        let face = |(low, _, axis): (usize, usize, usize)| Face { low: low as u32, axis: axis as u8 };
        lattice.bonds().into_iter().filter(is_cut).map(face).collect()
    }

    /// Holds all nodes at or beyond the height.
    fn grips(&self, stretch: f64) -> Vec<Grip> {
        let lattice = self.bead.lattice();
        let edge = HEIGHT / self.height;
        let grip = |node: usize| {
            let offset = Vector::from(lattice.node_offset(node));
            let level = offset.dot(&self.up);
            let place = (offset + self.up * (level * (stretch - 1.0))) * edge;
            let grip = Grip { node: node as u32, place, along: [true, true, false] };
            (level.abs() > 0.5 * self.height - 1e-6).then_some(grip)
        };
        (0..lattice.node_count()).filter_map(grip).collect()
    }
}

/// W · height (J/m²) at a stretch: energy in pure shear with nothing to hold the thickness,
/// less that when free-swollen.
pub(crate) fn released(stretch: f64) -> f64 {
    let (gel, free) = (gel(), gel().free_stretch());
    let n = gel.numbers().crosslinks;
    let energy = |height: f64, thickness: f64| {
        let squares = free * free * (1.0 + height * height + thickness * thickness);
        0.5 * n * (squares - 3.0) + gel.mixing(free.powi(3) * height * thickness)
    };
    // The thickness of least energy, by golden section.
    let (mut low, mut high) = (0.3, 1.2);
    let ratio = 0.5 * (5.0_f64.sqrt() - 1.0);
    for _ in 0..80 {
        let (a, b) = (high - ratio * (high - low), low + ratio * (high - low));
        if energy(stretch, a) < energy(stretch, b) { high = b } else { low = a }
    }
    (energy(stretch, low) - energy(1.0, 1.0)) * gel.energy_density() / free.powi(3) * HEIGHT
}
