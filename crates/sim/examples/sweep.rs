//! Random scenes over gradings, doses, loads, beds and gels: how each of them ends.
//!
//! `cargo run --release -p bedswell-sim --example sweep -- SCENES [FIRST]`

#![allow(clippy::print_stdout, reason = "a program that prints a table")]

use bedswell_geometry::{Stream, stream};
use bedswell_sim::{BeadAmount, Scene, SoilGrading, read_scene, run_pack};
use rand::RngExt;
use rayon::prelude::*;
use std::path::Path;
use std::time::Instant;

/// How a scene ended, with what there is to say.
enum End {
    AtRest,
    Creeping(String),
    Stopped(String),
    Refused(String),
}

/// Residuals (grains, gel) of a state that counts as at rest.
const AT_REST: (f64, f64) = (1.01e-4, 1.01e-4);

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let numbers: Vec<u64> = std::env::args().skip(1).map(|text| text.parse()).collect::<Result<_, _>>()?;
    let [scenes, rest @ ..] = &numbers[..] else { return Err("give how many scenes to run".into()) };
    let first = rest.first().copied().unwrap_or(0);
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes/tree-pit.toml");
    let base = read_scene(&file)?;
    let folder = tempfile::tempdir()?;
    let counts: Vec<[u32; 4]> = (first..first + scenes)
        .into_par_iter()
        .map(|number| {
            let (scene, words) = random_scene(&base, &mut stream(2_026, &[number]));
            let started = Instant::now();
            let end = end_of(&scene, &folder.path().join(format!("{number}.toml")));
            let seconds = started.elapsed().as_secs_f64();
            let (kind, name, reason) = match end {
                End::AtRest => (0, "at rest", String::new()),
                End::Creeping(reason) => (1, "creeping", reason),
                End::Stopped(reason) => (2, "stopped", reason),
                End::Refused(reason) => (3, "refused", reason),
            };
            println!("{number:>4} {name:<9} {seconds:>6.1} s  {words}  {reason}");
            let mut count = [0; 4];
            count[kind] = 1;
            count
        })
        .collect();
    let total = |kind: usize| counts.iter().map(|count| count[kind]).sum::<u32>();
    println!(
        "{scenes} scenes: {} at rest, {} still creeping a little, {} stopped, {} refused",
        total(0),
        total(1),
        total(2),
        total(3)
    );
    Ok(())
}

fn end_of(scene: &Scene, file: &Path) -> End {
    if let Err(error) = std::fs::write(file, scene.to_toml()) {
        return End::Refused(error.to_string());
    }
    // Read back, so that what scene files may not say is refused as there.
    let scene = match read_scene(file) {
        Ok(scene) => scene,
        Err(error) => return End::Refused(error.to_string()),
    };
    match run_pack(&scene, 0, &mut ()) {
        Ok(outcome) => {
            let quality = outcome.quality;
            if quality.grain_residual <= AT_REST.0 && quality.gel_residual <= AT_REST.1 {
                End::AtRest
            } else {
                End::Creeping(format!(
                    "grains {:.1e}, gel {:.1e}",
                    quality.grain_residual, quality.gel_residual
                ))
            }
        }
        Err(error) => End::Stopped(error.to_string()),
    }
}

/// A scene that a user might write, and what is random about it in words.
fn random_scene(base: &Scene, random: &mut Stream) -> (Scene, String) {
    let mut between = |low: f64, high: f64| random.random_range(low..high);
    let mut scene = base.clone();
    scene.seed = between(0.0, 1e6) as u64;
    scene.bed.grains = between(80.0, 240.0) as usize;
    scene.bed.porosity = None;
    scene.soil.friction = between(0.2, 0.7);
    let (median, spread) = (between(1.5e-3, 4e-3), between(1.0, 1.7));
    scene.soil.grading = SoilGrading::Lognormal { median, spread, fines_cutoff: None };
    let beads = between(1.0, 4.0) as usize;
    scene.beads.amount = BeadAmount::Count(beads);
    scene.beads.dry_diameter = between(0.4e-3, 1.1e-3);
    scene.beads.across = between(8.0, 13.0) as usize;
    scene.march.increments = between(12.0, 31.0) as usize;
    scene.gel.crosslinks *= 10_f64.powf(between(-0.5, 0.7));
    scene.gel.charges *= 10_f64.powf(between(-0.3, 0.3));
    let ratio = 10_f64.powf(between(-2.0, 0.5));
    scene.bed.lid_stress = ratio * scene.swelling_gel().moduli().shear;
    let bed = between(0.0, 1.0);
    scene.bed.lid_held = bed < 0.15;
    if bed > 0.7 {
        scene.bed.pot = Some(median * between(5.0, 8.0));
        scene.bed.open = bed > 0.85;
        scene.bed.flooded = between(0.0, 1.0) < 0.5;
        if scene.bed.open {
            scene.bed.lid_stress = 0.0;
        }
    }
    let words = format!(
        "{} grains of {:.1} mm x {spread:.2}, {beads} beads of {:.2} mm at {} across, stretch {:.1}, p/G* {ratio:.3}{}",
        scene.bed.grains,
        1e3 * median,
        1e3 * scene.beads.dry_diameter,
        scene.beads.across,
        scene.swelling_gel().free_stretch(),
        match (scene.bed.lid_held, scene.bed.pot, scene.bed.open) {
            (true, ..) => ", lid held",
            (_, Some(_), true) => ", open pot",
            (_, Some(_), false) => ", pot",
            _ => "",
        }
    );
    (scene, words)
}
