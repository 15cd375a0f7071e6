//! Beads that tear while water flows through them.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_gel::{
    Bead, Change, Gel, GelNumbers, History, Kinetics, Lattice, Outside, Permeability, Settings, Snapshot,
    Surroundings, Toughness,
};
use bedswell_geometry::Vector;
use std::sync::Arc;

/// Neutral, swelling sixfold.
const SIXFOLD: GelNumbers = GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 };
/// Cooperative diffusion coefficient (m²/s).
const DIFFUSION: f64 = 1e-10;
/// Radius of the free-swollen bead (m).
const RADIUS: f64 = 1e-3;
/// R²/D (s).
const UNIT: f64 = RADIUS * RADIUS / DIFFUSION;

fn gel() -> Gel {
    Gel::new(SIXFOLD, Surroundings::default())
}

/// A fracture energy as a share of G* R* (J/m²).
fn toughness(energy: f64) -> Toughness {
    let energy = energy * gel().moduli().shear * RADIUS;
    Toughness { energy, length: Some(RADIUS / 3.0), ..Toughness::default() }
}

/// A bead of 12 voxels across that has swollen to a stretch.
fn kinetics(stretch: f64, energy: f64) -> Kinetics {
    let bead = Bead::new(Arc::new(Lattice::new(12)), RADIUS / gel().free_stretch(), Vector::zeros(), stretch);
    let permeability = Permeability::new(&gel(), DIFFUSION, 1.5).unwrap();
    let kinetics = Kinetics::new(bead, SIXFOLD, permeability, Settings::default()).unwrap();
    kinetics.tearing(&toughness(energy), &gel()).unwrap()
}

/// Water outside, at potentials (Pa) from times (R²/D) on.
fn history(changes: &[(f64, f64)]) -> History {
    let change = |&(time, potential): &(f64, f64)| {
        let surroundings = Surroundings { potential, ..Surroundings::default() };
        Change { time: time * UNIT, outside: Outside { surroundings, supply: None } }
    };
    History::new(changes.iter().map(change).collect()).unwrap()
}

/// A bead that swells too fast pulls its core apart; one that is tough does not tear.
#[test]
fn a_brittle_bead_tears_in_its_core_while_it_swells_and_keeps_its_water() {
    let wet = history(&[(0.0, 0.0)]);
    for energy in [0.3, 0.1, 0.03] {
        let mut kinetics = kinetics(2.0, energy);
        let (start, mut unbalanced) = (kinetics.water(), 0.0_f64);
        kinetics
            .advance(&wet, &[], 0.3 * UNIT, |_, step| {
                unbalanced = unbalanced.max(((step.water - start) / step.came_in - 1.0).abs());
            })
            .unwrap();
        let events = kinetics.ruptures();
        let depth = events.first().map(|event| event.depth / RADIUS);
        println!(
            "Γ {energy} G R: {} ruptures, first {depth:?} deep, water unbalanced by {unbalanced:.1e}, bodies {}",
            events.len(),
            kinetics.bead().lattice().bodies().len(),
        );
    }
}
