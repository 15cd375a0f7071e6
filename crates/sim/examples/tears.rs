//! What comes of the beads of a scene with a `[toughness]`, and what it costs. Takes a scene,
//! and fracture energies (J/m²) to try in place of its own.

#![allow(clippy::print_stdout, reason = "an example that measures")]

use bedswell_sim::{read_scene, run_pack};
use std::{error::Error, time::Instant};

fn main() -> Result<(), Box<dyn Error>> {
    let mut arguments = std::env::args().skip(1);
    let scene = read_scene(arguments.next().ok_or("name a scene")?.as_ref())?;
    let toughness = scene.toughness.ok_or("the scene has no [toughness]")?;
    let energies: Vec<f64> = arguments.map(|energy| energy.parse()).collect::<Result<_, _>>()?;
    for energy in if energies.is_empty() { vec![toughness.energy] } else { energies } {
        let mut scene = scene.clone();
        scene.toughness = Some(bedswell_sim::Toughness { energy, ..toughness });
        let started = Instant::now();
        let outcome = match run_pack(&scene, 0, &mut ()) {
            Ok(outcome) => outcome,
            Err(error) => {
                println!("{energy} J/m²: {error}, after {:.1} s", started.elapsed().as_secs_f64());
                continue;
            }
        };
        println!("{energy} J/m²: {:.1} s, {:?}", started.elapsed().as_secs_f64(), outcome.quality);
        for bead in &outcome.beads {
            println!(
                "  uptake {:.3} g/g, weakest link {:.3}, torn {}, {:?}",
                bead.uptake_g_per_g, bead.tear_probability, bead.torn, bead.tears
            );
        }
    }
    Ok(())
}
