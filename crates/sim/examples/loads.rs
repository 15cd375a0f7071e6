//! Uptake, heave and the quality of the end states over a range of loads: means over packs of
//! one scene, and by how much each row differs from the first, pack by pack.
//!
//! `cargo run --release -p bedswell-sim --example loads -- SCENE PACKS ACROSS[,ACROSS…] RATIO[,RATIO…]
//! [OPTION=VALUE[,VALUE…]…]`

#![allow(clippy::print_stdout, reason = "a program that prints a table")]

use bedswell_sim::{PackOutcome, Scene, read_scene, run_pack};
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
    println!(
        "name         packs  uptake/free    heave mm        swallowed grains   gel      balance  s/pack"
    );
    let mut first: Option<[Vec<(u64, f64)>; 2]> = None;
    for (name, scene) in variants(&base, across, ratios, options)? {
        let started = Instant::now();
        let outcomes: Vec<_> =
            (0..packs).into_par_iter().map(|pack| run_pack(&scene, pack, &mut ())).collect();
        let seconds = started.elapsed().as_secs_f64() / packs as f64;
        let mut done = Vec::new();
        for (pack, outcome) in outcomes.into_iter().enumerate() {
            match outcome {
                Ok(outcome) => done.push(outcome),
                Err(error) => println!("  pack {pack}: {error}"),
            }
        }
        let (uptake, heave) = (of_each(&done, uptake), of_each(&done, heave));
        let worst = |quality: fn(&PackOutcome) -> f64| done.iter().map(quality).fold(0.0, f64::max);
        println!(
            "{name:<12} {:>5}  {}  {}  {:.1e}   {:.1e}  {:.1e}  {:.1e}  {seconds:.1}",
            done.len(),
            mean_with_error(&uptake),
            mean_with_error(&heave),
            worst(|outcome| outcome.quality.swallowed),
            worst(|outcome| outcome.quality.grain_residual),
            worst(|outcome| outcome.quality.gel_residual),
            worst(|outcome| outcome.quality.bead_balance),
        );
        match &first {
            None => first = Some([uptake, heave]),
            Some([first_uptake, first_heave]) => {
                let (uptake, heave) = (differences(first_uptake, &uptake), differences(first_heave, &heave));
                println!("  change            {}  {}", mean_with_error(&uptake), mean_with_error(&heave));
            }
        }
    }
    Ok(())
}

/// The scenes to run, with what tells each from the others.
fn variants(
    base: &Scene,
    across: &str,
    ratios: &str,
    options: &[String],
) -> Result<Vec<(String, Scene)>, Box<dyn std::error::Error>> {
    let modulus = base.swelling_gel().moduli().shear;
    let mut all = Vec::new();
    let mut more = Vec::new();
    for across in across.split(',') {
        for ratio in ratios.split(',') {
            let mut scene = base.clone();
            scene.beads.across = across.parse()?;
            scene.bed.lid_stress = ratio.parse::<f64>()? * modulus;
            all.push((format!("{across}, {ratio} G"), scene));
        }
    }
    for option in options {
        let (name, values) = option.split_once('=').ok_or("write options as NAME=VALUE")?;
        for (index, value) in values.split(',').enumerate() {
            if index == 0 {
                all.iter_mut().try_for_each(|(_, scene)| set(scene, name, value))?;
            } else {
                more.push((name, value));
            }
        }
    }
    for (name, value) in more {
        let (_, mut scene) = all[0].clone();
        set(&mut scene, name, value)?;
        all.push((format!("{name}={value}"), scene));
    }
    Ok(all)
}

fn set(scene: &mut Scene, name: &str, value: &str) -> Result<(), Box<dyn std::error::Error>> {
    match name {
        "grains" => scene.bed.grains = value.parse()?,
        "increments" => scene.march.increments = value.parse()?,
        "overlap" => scene.march.overlap = value.parse()?,
        "damping" => scene.march.damping = value.parse()?,
        _ => return Err(format!("{name}: grains=, increments=, overlap= or damping=").into()),
    }
    Ok(())
}

/// Mean volume of the beads over the free-swollen one.
fn uptake(outcome: &PackOutcome) -> f64 {
    outcome.beads.iter().map(|bead| bead.volume_ratio).sum::<f64>() / outcome.beads.len() as f64
}

/// Heave (mm).
fn heave(outcome: &PackOutcome) -> f64 {
    1e3 * outcome.heave_m
}

/// A value of each pack, by its number.
fn of_each(done: &[PackOutcome], value: fn(&PackOutcome) -> f64) -> Vec<(u64, f64)> {
    done.iter().map(|outcome| (outcome.pack, value(outcome))).collect()
}

/// What the same packs differ by.
fn differences(before: &[(u64, f64)], now: &[(u64, f64)]) -> Vec<(u64, f64)> {
    let of = |&(pack, value): &(u64, f64)| {
        let same = before.iter().find(|before| before.0 == pack)?;
        Some((pack, value - same.1))
    };
    now.iter().filter_map(of).collect()
}

/// A mean and its standard error.
fn mean_with_error(values: &[(u64, f64)]) -> String {
    let count = values.len().max(1) as f64;
    let mean = values.iter().map(|value| value.1).sum::<f64>() / count;
    let squares: f64 = values.iter().map(|value| (value.1 - mean).powi(2)).sum();
    format!("{mean:>7.4}±{:.4}", (squares / (count * (count - 1.0).max(1.0))).sqrt())
}
