//! Beads that swell, dry and swell again.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_gel::{
    Bead, Change, Gel, GelNumbers, History, Kinetics, Lattice, Obstacle, Outside, Permeability, Relaxation,
    Settings, Snapshot, Surroundings, Tolerance, swell,
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

fn bead(across: usize, stretch: f64) -> Bead {
    let free = Gel::new(SIXFOLD, Surroundings::default()).free_stretch();
    Bead::new(Arc::new(Lattice::new(across)), RADIUS / free, Vector::zeros(), stretch)
}

fn kinetics(bead: Bead, numbers: GelNumbers, settings: Settings) -> Kinetics {
    let gel = Gel::new(numbers, Surroundings::default());
    Kinetics::new(bead, numbers, Permeability::new(&gel, DIFFUSION, 1.5).unwrap(), settings).unwrap()
}

fn outside(potential: f64, salt: f64) -> Outside {
    let surroundings = Surroundings { potential, salt, ..Surroundings::default() };
    Outside { surroundings, supply: None }
}

fn history(changes: &[(f64, Outside)]) -> History {
    let change = |&(time, outside): &(f64, Outside)| Change { time: time * UNIT, outside };
    History::new(changes.iter().map(change).collect()).unwrap()
}

/// Mean tension (Pa, negative in compression) in the skin's voxels and in the eight in the
/// middle.
fn tensions(kinetics: &Kinetics) -> (f64, f64) {
    let (stress, lattice) = (kinetics.stress(), kinetics.bead().lattice());
    let mean = |wanted: &dyn Fn(usize) -> bool| {
        let voxels: Vec<usize> = (0..lattice.voxel_count()).filter(|&voxel| wanted(voxel)).collect();
        voxels.iter().map(|&voxel| stress.stress[voxel].trace() / 3.0).sum::<f64>() / voxels.len() as f64
    };
    (
        mean(&|voxel| !lattice.is_inner(voxel)),
        mean(&|voxel| lattice.voxel_offset(voxel).iter().all(|x| x.abs() < 0.8)),
    )
}

#[test]
fn a_dry_bead_swells_to_equilibrium_with_its_skin_pressed_and_its_core_pulled_on_the_way() {
    let gel = Gel::new(SIXFOLD, Surroundings::default());
    let mut kinetics = kinetics(bead(12, 1.05), SIXFOLD, Settings::default());
    let start = kinetics.water();
    let (mut unbalanced, mut skins, mut cores, mut steps) = (0.0_f64, vec![], vec![], 0);
    kinetics
        .advance(&history(&[(0.0, outside(0.0, 0.0))]), &[], 2.0 * UNIT, |kinetics, step| {
            unbalanced = unbalanced.max(((step.water - start) / step.came_in - 1.0).abs());
            let (skin, core) = tensions(kinetics);
            skins.push(skin / gel.moduli().shear);
            cores.push(core / gel.moduli().shear);
            steps += 1;
        })
        .unwrap();
    let mut rest = bead(12, 1.05);
    swell(&mut rest, &gel, &[], Tolerance::default()).unwrap();
    let uptake = kinetics.water() / (rest.volume() - rest.dry_volume());
    let pressed = skins.iter().copied().fold(0.0, f64::min);
    let pulled = cores.iter().copied().fold(0.0, f64::max);
    println!("{steps} steps, water unbalanced by {unbalanced:.1e}, uptake {uptake:.6} of rest");
    println!("skin {pressed:.3} G, core {pulled:.3} G at the most, {:?} at the end", tensions(&kinetics));
    assert!(unbalanced < 1e-6, "{unbalanced}");
    assert!((uptake - 1.0).abs() < 2e-3, "{uptake}");
    assert!(skins[5] < 0.0 && cores[5] > 0.0 && pressed < -1.0 && pulled > 1.0);
    assert!(skins[steps - 1].abs() < 1e-2 && cores[steps - 1].abs() < 1e-2);
}

#[test]
fn coarser_steps_in_time_change_the_way_little() {
    let halfway = |step_error| {
        let mut kinetics = kinetics(bead(10, 1.05), SIXFOLD, Settings { step_error, ..Settings::default() });
        let wet = history(&[(0.0, outside(0.0, 0.0))]);
        [0.01, 0.1].map(|time| {
            kinetics.advance(&wet, &[], time * UNIT, |_, _| ()).unwrap();
            kinetics.water()
        })
    };
    let (coarse, fine) = (halfway(Settings::default().step_error), halfway(5e-4));
    println!("water by coarse over fine steps: {:?}", [coarse[0] / fine[0], coarse[1] / fine[1]]);
    assert!((0..2).all(|when| (coarse[when] / fine[when] - 1.0).abs() < 0.01), "{coarse:?} {fine:?}");
}

#[test]
fn suction_dries_rain_wets_and_salt_shrinks_to_the_equilibrium_of_each() {
    let numbers = GelNumbers { crosslinks: 1e-3, chi: 0.45, charges: 0.02 };
    let phases = [outside(0.0, 0.01), outside(-2e5, 0.01), outside(0.0, 0.01), outside(0.0, 0.2)];
    let changes: Vec<(f64, Outside)> =
        phases.iter().enumerate().map(|(phase, &outside)| (4.0 * phase as f64, outside)).collect();
    let history = history(&changes);
    let mut kinetics = kinetics(bead(8, 1.3), numbers, Settings::default());
    for (phase, outside) in phases.iter().enumerate() {
        kinetics.advance(&history, &[], 4.0 * UNIT * (phase + 1) as f64, |_, _| ()).unwrap();
        let reached = kinetics.bead().volume() / kinetics.bead().dry_volume();
        let wanted = Gel::new(numbers, outside.surroundings).free_volume_ratio();
        println!("phase {phase}: J {reached:.4} ({wanted:.4})");
        assert!((reached / wanted - 1.0).abs() < 2e-3, "phase {phase}: {reached} {wanted}");
    }
}

#[test]
fn a_bead_takes_in_no_more_than_it_is_given() {
    let supply = 0.2 * 4.0 / 3.0 * std::f64::consts::PI * RADIUS.powi(3) / UNIT;
    let rain = Outside { supply: Some(supply), ..outside(0.0, 0.0) };
    let mut kinetics = kinetics(bead(8, 1.2), SIXFOLD, Settings::default());
    let (mut before, mut most, mut limited) = (0.0, 0.0_f64, 0);
    let mut visit = |_: &Kinetics, step: &bedswell_gel::Step| {
        let rate = (step.came_in - before) / step.duration / supply;
        before = step.came_in;
        most = most.max(rate);
        limited += usize::from(rate > 1.0 - 1e-6);
    };
    let history = history(&[(0.0, rain), (1.0, outside(0.0, 0.0))]);
    kinetics.advance(&history, &[], UNIT, &mut visit).unwrap();
    let given = before / (supply * UNIT);
    println!("{limited} limited steps, at most {most:.9} of the supply, {given:.6} of what was given");
    assert!(most < 1.0 + 1e-6 && limited > 3 && given > 0.9);
    kinetics.advance(&history, &[], 1.1 * UNIT, |_, _| ()).unwrap();
    assert!(kinetics.water() > before + 0.2 * supply * UNIT, "an unlimited bead drinks faster");
}

fn six_spheres() -> Vec<Obstacle> {
    let sphere = |axis, side: f64| Obstacle::Sphere {
        centre: Vector::ith(axis, side * 1.2 * RADIUS),
        radius: 0.4 * RADIUS,
    };
    (0..3).flat_map(|axis| [1.0, -1.0].map(|side| sphere(axis, side))).collect()
}

#[test]
fn a_bead_between_grains_ends_in_the_equilibrium_between_them() {
    let gel = Gel::new(SIXFOLD, Surroundings::default());
    let mut rest = bead(12, 1.05);
    let closely = Tolerance { corrections: 30, ..Tolerance::default() };
    let equilibrium = swell(&mut rest, &gel, &six_spheres(), closely).unwrap();
    let settings = Settings { corrections: 2, ..Settings::default() };
    let mut kinetics = kinetics(bead(12, 3.0), SIXFOLD, settings);
    let mut forces = vec![];
    let wet = history(&[(0.0, outside(0.0, 0.0))]);
    kinetics.advance(&wet, &six_spheres(), 2.0 * UNIT, |_, step| forces = step.forces.clone()).unwrap();
    let uptake = kinetics.water() / (rest.volume() - rest.dry_volume());
    let force = forces[0].norm() / equilibrium.forces[0].norm();
    println!("uptake {uptake:.6}, force {force:.6} of those at rest");
    assert!((uptake - 1.0).abs() < 2e-3 && (force - 1.0).abs() < 1e-2);
}

#[test]
fn a_run_resumed_from_what_was_written_goes_on_to_the_same_bits() {
    let wet = history(&[(0.0, outside(0.0, 0.0)), (0.02, outside(-1e3, 0.0))]);
    let (grains, start) = (six_spheres(), || kinetics(bead(8, 5.0), SIXFOLD, Settings::default()));
    let mut whole = start();
    whole.advance(&wet, &grains, 0.01 * UNIT, |_, _| ()).unwrap();
    let written = serde_json::to_string(&whole.snapshot()).unwrap();
    whole.advance(&wet, &grains, 0.04 * UNIT, |_, _| ()).unwrap();
    let snapshot: Snapshot = serde_json::from_str(&written).unwrap();
    assert!(!snapshot.pressures.is_empty(), "grains press when the run stops");
    let mut resumed = start().resume(&snapshot).unwrap();
    resumed.advance(&wet, &grains, 0.04 * UNIT, |_, _| ()).unwrap();
    assert_eq!(whole.snapshot(), resumed.snapshot());
}

/// Lets a bead follow what it grew in a step, and come to rest, `moves` and `steps` long.
fn rest(kinetics: &mut Kinetics, mut relaxation: Relaxation, obstacles: &[Obstacle], moves: usize) {
    let stage = kinetics.gel().limited_to((kinetics.bead().volume() / kinetics.bead().dry_volume()).cbrt());
    let lead = kinetics.lead(&relaxation);
    let reach = 0.5 * kinetics.bead().swollen_edge();
    for step in 1..=moves {
        relaxation.follow(&lead, step, moves);
        relaxation.look(&stage, obstacles, reach);
        relaxation.weigh(&stage, obstacles, reach);
        relaxation.compute_forces(&stage, obstacles);
        relaxation.advance(0.4);
    }
    relaxation.look(&stage, obstacles, reach);
    relaxation.weigh(&stage, obstacles, reach);
    for _ in 0..400 {
        relaxation.compute_forces(&stage, obstacles);
        relaxation.advance(0.4);
    }
    relaxation.compute_forces(&stage, obstacles);
    kinetics.take_over(&relaxation, obstacles);
}

#[test]
fn coming_to_rest_between_steps_changes_nothing_where_nothing_moves() {
    let far = [Obstacle::Plane { point: Vector::new(0.0, 0.0, -1.0), normal: Vector::z() }];
    let course = |rests: bool| {
        let mut kinetics = kinetics(bead(8, 2.0), SIXFOLD, Settings::default());
        let (wet, end) = (outside(0.0, 0.0), 0.02 * UNIT);
        while kinetics.time() < end {
            let relaxation = kinetics.relaxation();
            let until = (kinetics.time() + kinetics.wish(&wet, &far)).min(end);
            kinetics.step(&wet, &far, until).unwrap();
            if rests {
                rest(&mut kinetics, relaxation, &far, 10);
            }
        }
        kinetics.water()
    };
    let (alone, resting) = (course(false), course(true));
    println!("water {:.6} of what it is without rests", resting / alone);
    assert!((resting / alone - 1.0).abs() < 5e-3);
}

#[test]
fn a_bead_that_is_pressed_together_between_steps_keeps_its_water() {
    let plates = |half: f64| {
        [1.0, -1.0].map(|side| Obstacle::Plane {
            point: Vector::z() * (side * half * RADIUS),
            normal: Vector::z() * -side,
        })
    };
    let mut kinetics = kinetics(bead(8, 5.0), SIXFOLD, Settings::default());
    let wet = outside(0.0, 0.0);
    let relaxation = kinetics.relaxation();
    let before = kinetics.step(&wet, &plates(0.82), 1e-4 * UNIT).unwrap();
    let (water, volume) = (kinetics.water(), kinetics.bead().volume());
    rest(&mut kinetics, relaxation, &plates(0.80), 1);
    println!("water {:.3e}, volume {:.6}", kinetics.water() / water - 1.0, kinetics.bead().volume() / volume);
    assert_eq!(kinetics.water(), water);
    assert!((kinetics.bead().volume() / volume - 1.0).abs() < 5e-3);
    // The next step begins under the pressure that this took, and lets water out.
    let after = kinetics.step(&wet, &plates(0.80), kinetics.time() + 1e-4 * UNIT).unwrap();
    let force = |step: &bedswell_gel::Step| step.forces[0].norm();
    println!("force {:.3e} N before, {:.3e} N after", force(&before), force(&after));
    assert!(force(&after) > 1.1 * force(&before));
}
