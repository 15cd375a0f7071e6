//! What it costs to follow one free bead from dry to swollen: steps, iterations, seconds.
//! Takes the voxels across, or 20.

#![allow(clippy::print_stdout, reason = "an example that measures")]

use bedswell_gel::{
    Bead, Change, Gel, GelNumbers, History, Kinetics, Lattice, Outside, Permeability, Settings, Surroundings,
};
use bedswell_geometry::Vector;
use std::{error::Error, sync::Arc, time::Instant};

fn main() -> Result<(), Box<dyn Error>> {
    let across = std::env::args().nth(1).map_or(Ok(20), |across| across.parse())?;
    let numbers = GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 };
    let gel = Gel::new(numbers, Surroundings::default());
    let bead = Bead::new(Arc::new(Lattice::new(across)), 1e-3, Vector::zeros(), 1.05);
    let permeability = Permeability::new(&gel, 1e-10, 1.5)?;
    let wet = History::new(vec![Change { time: 0.0, outside: Outside::default() }])?;
    let until = 1.5 * permeability.bead_time(bead.dry_radius());
    let (nodes, free) = (bead.lattice().node_count(), (gel.free_volume_ratio() - 1.0) * bead.dry_volume());
    let mut kinetics = Kinetics::new(bead, numbers, permeability, Settings::default())?;
    let (clock, mut steps, mut newton, mut iterations) = (Instant::now(), 0, 0, 0);
    kinetics.advance(&wet, &[], until, |_, step| {
        steps += 1;
        newton += step.newton_steps;
        iterations += step.iterations;
    })?;
    let uptake = kinetics.water() / free;
    println!(
        "{across} across, {nodes} nodes: {steps} steps, {newton} Newton steps, {iterations} iterations, {:.1} s; uptake {uptake:.5} of free",
        clock.elapsed().as_secs_f64()
    );
    Ok(())
}
