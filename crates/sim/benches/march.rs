//! Whole packs on all cores: time to pack them dry, time from dry to joint equilibrium, and
//! the most memory held.
//!
//! `cargo bench -p bedswell-sim --bench march [-- NAME…]`, on a machine that does nothing else.

#![allow(clippy::print_stdout, clippy::print_stderr, reason = "a program that prints a table")]

use bedswell_sim::{BeadAmount, Observer, Scene, State, Step, read_scene, run_pack};
use std::ops::ControlFlow;
use std::path::Path;
use std::time::Instant;

/// Name, grains, beads, voxels across.
const CASES: [(&str, usize, usize, usize); 4] = [
    ("one-bead", 5_000, 1, 20),
    ("twice-the-grains", 10_000, 1, 20),
    ("twenty-beads", 1_000, 20, 12),
    ("two-hundred-beads", 10_000, 200, 12),
];

fn main() {
    let chosen: Vec<String> = std::env::args().skip(1).filter(|name| !name.starts_with("--")).collect();
    println!(
        "{:<20} {:>7} {:>6} {:>7} {:>7} {:>8} {:>8}  end",
        "case", "grains", "beads", "across", "pack s", "swell s", "MiB"
    );
    for (name, grains, beads, across) in CASES {
        if !chosen.is_empty() && !chosen.iter().any(|chosen| chosen == name) {
            continue;
        }
        let scene = scene(grains, beads, across);
        let started = Instant::now();
        let mut packed = Packed { at: None, started };
        let end = match run_pack(&scene, 0, &mut packed) {
            Ok(outcome) => format!(
                "uptake {:.1} g/g, grains {:.1e}, gel {:.1e}, swallowed {:.1e}",
                outcome.beads.iter().map(|bead| bead.uptake_g_per_g).sum::<f64>() / beads as f64,
                outcome.quality.grain_residual,
                outcome.quality.gel_residual,
                outcome.quality.swallowed
            ),
            Err(error) => error.to_string(),
        };
        let packed = packed.at.unwrap_or_else(Instant::now);
        let [packing, swelling] = [packed - started, packed.elapsed()].map(|time| time.as_secs_f64());
        let memory = most_memory().map_or("-".to_owned(), |mebibytes| format!("{mebibytes:.0}"));
        println!(
            "{name:<20} {grains:>7} {beads:>6} {across:>7} {packing:>7.1} {swelling:>8.1} {memory:>8}  {end}"
        );
    }
}

/// When the bed was packed dry. Tells on standard error how far the march has come.
struct Packed {
    at: Option<Instant>,
    started: Instant,
}

impl Observer for Packed {
    fn step(&mut self, step: &Step, count: usize) -> ControlFlow<()> {
        let seconds = self.started.elapsed().as_secs_f64();
        eprintln!("increment {} of {count} after {seconds:.0} s", step.increment);
        ControlFlow::Continue(())
    }

    fn looks(&self) -> bool {
        self.at.is_none()
    }

    fn look(&mut self, _: State) -> ControlFlow<()> {
        self.at.get_or_insert_with(Instant::now);
        ControlFlow::Continue(())
    }
}

fn scene(grains: usize, beads: usize, across: usize) -> Scene {
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes/tree-pit.toml");
    let mut scene = read_scene(&file).expect("the scene that comes with the program");
    scene.bed.grains = grains;
    scene.bed.porosity = None;
    scene.beads.amount = BeadAmount::Count(beads);
    scene.beads.across = across;
    scene
}

/// The most memory that this process has held (MiB), where the system tells.
fn most_memory() -> Option<f64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find(|line| line.starts_with("VmHWM:"))?;
    Some(line.split_whitespace().nth(1)?.parse::<f64>().ok()? / 1024.0)
}
