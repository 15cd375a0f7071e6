//! Fixes the one constant of the rupture criterion on strips with a cut. Takes the strips'
//! heights in voxels, or 12, 18 and 24.

#![allow(clippy::print_stdout, reason = "an example that measures")]

#[path = "../tests/strip/mod.rs"]
mod strip;

use bedswell_gel::Toughness;
use std::error::Error;
use strip::{Strip, gel, released};

/// Fracture energy over W · height: less than one, for cracks that go on.
const WEAKENED: f64 = 0.85;

fn main() -> Result<(), Box<dyn Error>> {
    let heights: Vec<usize> =
        std::env::args().skip(1).map(|height| height.parse()).collect::<Result<_, _>>()?;
    let heights = if heights.is_empty() { vec![12, 18, 24] } else { heights };
    // Above the least, some strip would stop; below the most, some would start too early.
    let (mut least, mut most) = (f64::INFINITY, 0.0_f64);
    for height in heights {
        for (angle, oblique) in [(0, false), (45, true)] {
            let strip = Strip::new(height, oblique);
            for stretch in [1.1, 1.25, 1.5] {
                let mut rupture = strip.pull(stretch, WEAKENED * released(stretch))?;
                let mut loads = Vec::new();
                strip.tear(&mut rupture, 0.3, |rupture| loads.push(rupture.load(&gel(), 0.5)))?;
                // The constant with which the crack would just have grown from each state.
                let constant = |load: f64| Toughness::TIP_TENSION * WEAKENED.sqrt() * load;
                let hardest = constant(loads.iter().copied().fold(f64::INFINITY, f64::min));
                println!(
                    "{height} voxels high, {angle} degrees, stretch {stretch}: {:.3} to leave the cut, {hardest:.3} to go on over {} units",
                    constant(loads[0]),
                    loads.len() - 1
                );
                (least, most) = (least.min(hardest), most.max(constant(loads[0])));
            }
        }
    }
    let middle = (least * most).sqrt();
    println!(
        "constant {middle:.3}, within {:.1} %: Γ within {:.1} %",
        100.0 * (most / middle - 1.0),
        100.0 * ((most / middle).powi(2) - 1.0)
    );
    Ok(())
}
