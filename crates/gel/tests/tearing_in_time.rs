//! Beads that tear while water flows through them.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_gel::{
    Bead, Change, Face, Gel, GelNumbers, History, Kinetics, Lattice, Outside, Permeability, Settings,
    Snapshot, Surroundings, Toughness,
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

#[test]
fn a_brittle_bead_tears_in_its_core_while_it_swells_and_keeps_its_water() {
    let wet = history(&[(0.0, 0.0)]);
    let mut tough = kinetics(2.0, 3.0);
    tough.advance(&wet, &[], 0.3 * UNIT, |_, _| ()).unwrap();
    assert!(tough.ruptures().is_empty(), "{:?}", tough.ruptures().first());

    let mut brittle = kinetics(2.0, 0.3);
    let (start, mut unbalanced, mut seen) = (brittle.water(), 0.0_f64, 0);
    brittle
        .advance(&wet, &[], 0.3 * UNIT, |_, step| {
            unbalanced = unbalanced.max(((step.water - start) / step.came_in - 1.0).abs());
            seen += step.ruptures;
        })
        .unwrap();
    let first = brittle.ruptures()[0];
    println!(
        "{seen} ruptures, the first {:.2} R deep, water unbalanced by {unbalanced:.1e}, {:.5} of what a whole bead holds",
        first.depth / RADIUS,
        brittle.water() / tough.water()
    );
    assert_eq!(seen, brittle.ruptures().len());
    assert!(first.depth > 0.4 * RADIUS, "its core is pulled, its skin pressed: {first:?}");
    assert!(unbalanced < 1e-6, "{unbalanced}");
    assert!((brittle.water() / tough.water() - 1.0).abs() < 0.05);
}

#[test]
fn a_tearing_run_resumed_from_what_was_written_goes_on_to_the_same_bits() {
    let changes = history(&[(0.0, 0.0), (0.02, -2e3), (0.04, 0.0)]);
    let mut whole = kinetics(2.0, 0.3);
    while whole.ruptures().is_empty() {
        let until = whole.time() + 1e-3 * UNIT;
        whole.advance(&changes, &[], until, |_, _| ()).unwrap();
        assert!(until < 0.02 * UNIT, "it tears early");
    }
    let written = serde_json::to_string(&whole.snapshot()).unwrap();
    let torn = whole.snapshot().ruptured;
    whole.advance(&changes, &[], 0.045 * UNIT, |_, _| ()).unwrap();
    let snapshot: Snapshot = serde_json::from_str(&written).unwrap();
    let mut resumed = kinetics(2.0, 0.3).resume(&snapshot).unwrap();
    resumed.advance(&changes, &[], 0.045 * UNIT, |_, _| ()).unwrap();
    println!("{} of {} bonds ruptured before", torn.len(), whole.snapshot().ruptured.len());
    assert_eq!(whole.snapshot(), resumed.snapshot());
    assert_eq!(whole.snapshot().ruptured[..torn.len()], torn[..], "cracks stay through drying and wetting");
}

/// A cut through the middle brings water there.
#[test]
fn a_bead_that_is_cut_in_halves_drinks_faster() {
    let wet = history(&[(0.0, 0.0)]);
    let drunk = |is_cut: bool| {
        let mut bead = kinetics(2.0, 1e3);
        let lattice = bead.bead().lattice();
        let middle = |&(low, _, axis): &(usize, usize, usize)| {
            is_cut && axis == 2 && lattice.voxel_offset(low)[2] == -0.5
        };
        let face = |(low, _, axis): (usize, usize, usize)| Face { low: low as u32, axis: axis as u8 };
        let faces: Vec<Face> = lattice.bonds().into_iter().filter(middle).map(face).collect();
        bead.cut(&faces).unwrap();
        let start = bead.water();
        bead.advance(&wet, &[], 0.03 * UNIT, |_, _| ()).unwrap();
        bead.water() - start
    };
    let (whole, halves) = (drunk(false), drunk(true));
    println!("halves drink {:.3} times as fast", halves / whole);
    assert!(halves > 1.1 * whole, "{halves} {whole}");
}
