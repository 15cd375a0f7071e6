//! Uptake, heave and the quality of the end states over a range of loads: means over
//! packs of one scene, at several resolutions.
//!
//! `cargo run --release -p bedswell-sim --example loads -- SCENE PACKS ACROSS[,ACROSS…] RATIO[,RATIO…]`

#![allow(clippy::print_stdout, reason = "a program that prints a table")]

use bedswell_sim::{read_scene, run_pack};
use rayon::prelude::*;
use std::path::Path;
use std::time::Instant;

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    let [scene, packs, across, ratios, options @ ..] = &arguments[..] else {
        return Err("give a scene, packs, voxels across and loads over the gel's modulus".into());
    };
    let base = read_scene(Path::new(scene))?;
    let packs: u64 = packs.parse()?;
    let modulus = base.swelling_gel().moduli().shear;
    println!(
        "across  p/G*   packs  uptake/free     heave mm   swallowed  grains   gel      balance  overlap  s/pack"
    );
    for across in across.split(',') {
        for ratio in ratios.split(',') {
            let mut scene = base.clone();
            scene.beads.across = across.parse()?;
            scene.bed.lid_stress = ratio.parse::<f64>()? * modulus;
            for option in options {
                match option.split_once('=') {
                    Some(("grains", value)) => scene.bed.grains = value.parse()?,
                    Some(("increments", value)) => scene.march.increments = value.parse()?,
                    Some(("overlap", value)) => scene.march.overlap = value.parse()?,
                    Some(("damping", value)) => scene.march.damping = value.parse()?,
                    _ => {
                        return Err(format!("{option}: grains=, increments=, overlap= or damping=").into());
                    }
                }
            }
            let started = Instant::now();
            let mut sums = [0.0; 7];
            let (mut done, mut uptakes, mut heaves) = (0, Vec::new(), Vec::new());
            let outcomes: Vec<_> =
                (0..packs).into_par_iter().map(|pack| run_pack(&scene, pack, &mut ())).collect();
            for (pack, outcome) in outcomes.into_iter().enumerate() {
                match outcome {
                    Ok(outcome) => {
                        let uptake = outcome.beads.iter().map(|bead| bead.volume_ratio).sum::<f64>()
                            / outcome.beads.len() as f64;
                        let quality = outcome.quality;
                        uptakes.push(uptake);
                        sums[0] += uptake;
                        sums[1] += 1e3 * outcome.heave_m;
                        heaves.push(1e3 * outcome.heave_m);
                        sums[2] = f64::max(sums[2], quality.swallowed);
                        sums[3] = f64::max(sums[3], quality.grain_residual);
                        sums[4] = f64::max(sums[4], quality.gel_residual);
                        sums[5] = f64::max(sums[5], quality.bead_balance);
                        sums[6] = f64::max(sums[6], quality.overlap);
                        done += 1;
                    }
                    Err(error) => println!("  pack {pack}: {error}"),
                }
            }
            let count = f64::from(done.max(1));
            let mean = sums[0] / count;
            let spread = error_of_mean(&uptakes);
            println!(
                "{across:>6}  {ratio:<5}  {done:>5}  {mean:.4}±{spread:.4}  {:>8.4}±{:.4}   {:.1e}    {:.1e}  {:.1e}  {:.1e}  {:.1e}  {:.1}",
                sums[1] / count,
                error_of_mean(&heaves),
                sums[2],
                sums[3],
                sums[4],
                sums[5],
                sums[6],
                started.elapsed().as_secs_f64() / packs as f64
            );
        }
    }
    Ok(())
}

/// Standard error of a mean.
fn error_of_mean(values: &[f64]) -> f64 {
    let count = values.len().max(1) as f64;
    let mean = values.iter().sum::<f64>() / count;
    values.iter().map(|value| (value - mean).powi(2)).sum::<f64>().sqrt() / count
}
