//! Strips with a cut, pulled in pure shear: the one constant of the rupture criterion.
//!
//! A long strip whose grips hold its length and let its thickness contract stores the
//! energy W per volume ahead of the cut and none behind it, so that a crack grows at
//! W · height = Γ (Rivlin & Thomas 1953, J. Polym. Sci. 10:291, from memory).

#![allow(clippy::print_stdout, reason = "an example that measures")]

use bedswell_gel::{Bead, Face, Gel, GelNumbers, Grip, Lattice, Rupture, Surroundings, Tolerance, Toughness};
use bedswell_geometry::Vector;
use std::{error::Error, sync::Arc, time::Instant};

/// Length and thickness of a strip over its height; where the cut ends, over its length.
const LENGTH: f64 = 3.0;
const THICKNESS: f64 = 0.34;
const CUT: f64 = 0.5;
/// ℓ over the height.
const AVERAGED: f64 = 1.0 / 6.0;

fn main() -> Result<(), Box<dyn Error>> {
    let gel =
        Gel::new(GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 }, Surroundings::default());
    let args: Vec<f64> = std::env::args().skip(1).filter_map(|a| a.parse().ok()).collect();
    let heights: &[usize] = if args.is_empty() { &[12, 18, 24] } else { &[args[0] as usize] };
    for &height in heights {
        for oblique in [false, true] {
            for stretch in [1.1, 1.25, 1.5] {
                let clock = Instant::now();
                let strip = Strip::new(height, oblique, &gel);
                let constant = strip.tear(&gel, stretch)?;
                println!(
                    "{height} voxels high, {} degrees, stretch {stretch}: constant {constant:?}, {:.1} s",
                    if oblique { 45 } else { 0 },
                    clock.elapsed().as_secs_f64()
                );
            }
        }
    }
    Ok(())
}

struct Strip {
    bead: Bead,
    /// Unit vectors along the strip and up, on the lattice.
    along: Vector,
    up: Vector,
    /// In voxels.
    height: f64,
}

impl Strip {
    fn new(height: usize, oblique: bool, gel: &Gel) -> Self {
        let (long, high) = (LENGTH * height as f64, height as f64);
        let thick = (THICKNESS * height as f64).round() as usize;
        let (along, up) = if oblique {
            let half = std::f64::consts::FRAC_1_SQRT_2;
            (Vector::new(half, half, 0.0), Vector::new(-half, half, 0.0))
        } else {
            (Vector::x(), Vector::y())
        };
        // Grips need a voxel beyond the height.
        let size = if oblique {
            let side = ((long + high) * up.y + 4.0).ceil() as usize;
            [side, side, thick]
        } else {
            [long as usize, height + 2, thick]
        };
        let place =
            |voxel: [usize; 3]| Vector::from_fn(|axis, _| voxel[axis] as f64 + 0.5 - 0.5 * size[axis] as f64);
        let lattice = Lattice::carved(size, |voxel| {
            let place = place(voxel);
            place.dot(&along).abs() < 0.5 * long && place.dot(&up).abs() < 0.5 * high + 1.2
        });
        let stretch = gel.free_stretch();
        let edge = 1e-3 / high / stretch;
        let bead = Bead::new(Arc::new(lattice), 0.5 * edge * size[0] as f64, Vector::zeros(), stretch);
        Self { bead, along, up, height: high }
    }

    /// The cut along the strip's middle, from its end.
    fn cut(&self) -> Vec<Face> {
        let lattice = self.bead.lattice();
        let level = |voxel: usize| Vector::from(lattice.voxel_offset(voxel)).dot(&self.up);
        let end = (CUT - 0.5) * LENGTH * self.height;
        let crosses = |&(low, high, _): &(usize, usize, usize)| {
            (level(low) < 1e-9) != (level(high) < 1e-9)
                && 0.5
                    * (Vector::from(lattice.voxel_offset(low)) + Vector::from(lattice.voxel_offset(high)))
                        .dot(&self.along)
                    < end
        };
        let face = |(low, _, axis): (usize, usize, usize)| Face { low: low as u32, axis: axis as u8 };
        lattice.bonds().into_iter().filter(crosses).map(face).collect()
    }

    /// Holds all nodes at or beyond the height, stretched.
    fn grips(&self, stretch: f64) -> Vec<Grip> {
        let lattice = self.bead.lattice();
        let half = 0.5 * self.height;
        let edge = self.bead.voxel_edge() * (self.bead.volume() / self.bead.dry_volume()).cbrt();
        let gripped =
            |&node: &usize| Vector::from(lattice.node_offset(node)).dot(&self.up).abs() > half - 1e-6;
        let grip = |node: usize| {
            let offset = Vector::from(lattice.node_offset(node));
            let level = offset.dot(&self.up);
            let place = offset + self.up * (level * (stretch - 1.0));
            Grip { node: node as u32, place: place * edge, along: [true, true, false] }
        };
        (0..lattice.node_count()).filter(gripped).map(grip).collect()
    }

    /// The constant with which the strip's cut, on its way by half the height, has just
    /// W · height = Γ to grow by at every unit that stops it most, and that at the cut's own
    /// tip.
    fn tear(&self, gel: &Gel, stretch: f64) -> Result<(f64, f64), Box<dyn Error>> {
        let released = stored_energy(gel, stretch) * 1e-3;
        // A weaker gel tears on and on.
        let weakened = 0.85;
        let toughness =
            Toughness { energy: weakened * released, length: Some(AVERAGED * 1e-3), scatter: 0.0, seed: 0 };
        let mut rupture = Rupture::new(self.bead.clone(), &toughness, gel)?;
        rupture.grip(self.grips(stretch))?;
        rupture.cut(&self.cut());
        let tolerance = Tolerance { residual: 1e-3, corrections: 0, held: true };
        rupture.settle(gel, &[], tolerance)?;
        let constant = |rupture: &Rupture| Toughness::TIP_TENSION * weakened.sqrt() * rupture.load(gel, 0.5);
        let start = rupture.crack_area();
        let goal = start + 0.3 * THICKNESS * 1e-6;
        let at_cut = constant(&rupture);
        let (mut hardest, mut softest) = (at_cut, at_cut);
        while rupture.crack_area() < goal && rupture.rupture_once(gel, &[], tolerance)? > 0 {
            let now = constant(&rupture);
            hardest = hardest.min(now);
            softest = softest.max(now);
        }
        let off: f64 =
            rupture.events().iter().map(|event| event.place.dot(&self.up).abs()).fold(0.0, f64::max);
        println!(
            "   {at_cut:.3} {hardest:.3} {softest:.3}, {} events, grew {:.3}, off {:.2}",
            rupture.events().len(),
            (rupture.crack_area() - start) / (THICKNESS * 1e-6),
            off / 1e-3 * self.height
        );
        Ok((hardest, at_cut))
    }
}

/// Energy per volume of free-swollen gel (J/m³) in pure shear, with nothing to hold its
/// thickness, over that when free-swollen.
fn stored_energy(gel: &Gel, stretch: f64) -> f64 {
    let free = gel.free_stretch();
    let n = gel.numbers().crosslinks;
    let energy = |thickness: f64| {
        let squares = free * free * (1.0 + stretch * stretch + thickness * thickness);
        0.5 * n * (squares - 3.0) + gel.mixing(free.powi(3) * stretch * thickness)
    };
    // The thickness with the least energy, by golden section.
    let (mut low, mut high) = (0.3, 1.2);
    let ratio = 0.5 * (5.0_f64.sqrt() - 1.0);
    for _ in 0..80 {
        let (a, b) = (high - ratio * (high - low), low + ratio * (high - low));
        if energy(a) < energy(b) { high = b } else { low = a }
    }
    let rest = 0.5 * n * (3.0 * free * free - 3.0) + gel.mixing(free.powi(3));
    (energy(0.5 * (low + high)) - rest) * gel.energy_density() / free.powi(3)
}
