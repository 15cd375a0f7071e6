//! One bead of 20 voxels across that swells from dry among eight spheres that are held, in
//! time, and tears: seconds, steps, and what came of it, with the time of its whole twin, which
//! gives the weakest link's answer.
//!
//! `cargo bench -p bedswell-sim --bench tearing`, on a machine that does nothing else.

#![allow(clippy::print_stdout, reason = "a program that prints a table")]

use bedswell_gel::{Change, History, Outside, Surroundings};
use bedswell_sim::{Scene, Time, Toughness, read_scene, run_pack};
use std::path::Path;
use std::time::Instant;

/// Fracture energies (J/m²) from one that no tension here reaches.
const ENERGIES: [f64; 2] = [1000.0, 12.0];

fn main() {
    println!("{:>8} {:>8} {:>7} {:>9} {:>8}  end", "J/m²", "s", "steps", "ruptures", "cracks");
    for energy in ENERGIES {
        let scene = scene(energy);
        let started = Instant::now();
        let outcome = run_pack(&scene, 0, &mut ());
        let seconds = started.elapsed().as_secs_f64();
        let outcome = match outcome {
            Ok(outcome) => outcome,
            Err(error) => {
                println!("{energy:>8} {seconds:>8.1}  {error}");
                continue;
            }
        };
        let tears = outcome.beads[0].tears.expect("a scene with a toughness");
        println!(
            "{energy:>8} {seconds:>8.1} {:>7} {:>9} {:>8.3}  uptake {:.1} g/g, weakest link {:.3}",
            outcome.timing.map_or(0, |timing| timing.course.len()),
            tears.ruptures,
            tears.crack_share,
            outcome.beads[0].uptake_g_per_g,
            outcome.beads[0].tear_probability,
        );
    }
}

fn scene(energy: f64) -> Scene {
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes/sphere-array.toml");
    let mut scene = read_scene(&file).expect("the scene that comes with the program");
    scene.beads.across = 20;
    scene.toughness = scene.toughness.map(|toughness| Toughness { energy, scatter: 0.1, ..toughness });
    let surroundings = Surroundings { salt: scene.water.salt, ..Surroundings::default() };
    let outside = Outside { surroundings, supply: None };
    let history = History::new(vec![Change { time: 0.0, outside }]).expect("one change");
    scene.time = Some(Time {
        until: 2.0 * 86_400.0,
        diffusion: 5e-10,
        exponent: 1.5,
        contact_seals: true,
        step_error: 0.02,
        history,
    });
    scene
}
