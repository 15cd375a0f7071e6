//! Pots: beds in them, beads alone in them, and what lies in water.

use bedswell_gel::{WATER_DENSITY, uptake_of_volume_ratio};
use bedswell_sim::{BeadAmount, Concern, PackOutcome, Scene, read_scene, run_pack};
use std::path::Path;

fn example(name: &str) -> Scene {
    let scenes = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes");
    read_scene(&scenes.join(name)).unwrap_or_else(|error| panic!("{error}"))
}

fn run(scene: &Scene) -> PackOutcome {
    run_pack(scene, 0, &mut ()).unwrap_or_else(|error| panic!("{error}"))
}

/// A small potful of grit with one coarse bead.
fn potful() -> Scene {
    let mut scene = example("open-pot.toml");
    scene.bed.grains = 150;
    scene.bed.pot = Some(20e-3);
    scene.beads.amount = BeadAmount::Count(1);
    scene.beads.across = 8;
    scene.march.increments = 10;
    scene
}

#[test]
fn a_bed_in_an_open_pot_comes_to_rest_under_its_own_weight() {
    let outcome = run(&potful());
    let quality = outcome.quality;
    assert!(quality.grain_residual < 1e-2 && quality.gel_residual < 1e-3, "{quality:?}");
    assert_eq!((outcome.overburden_pa, outcome.lid_stress_pa), (0.0, 0.0));
    assert!(outcome.forces_after.mean_force_n > 0.0, "{:?}", outcome.forces_after);
    assert!(outcome.beads[0].volume_ratio > 0.8, "{}", outcome.beads[0].volume_ratio);
}

#[test]
fn water_makes_what_lies_in_it_press_less() {
    let forces = |flooded: bool| {
        let mut scene = potful();
        scene.bed.flooded = flooded;
        scene.march.increments = 2;
        run(&scene).forces_before.mean_force_n
    };
    let [drained, flooded] = [forces(false), forces(true)];
    // Archimedes: 2500 kg/m³ less that of water; contacts of the same grains share it.
    let expected = 1.0 - WATER_DENSITY / 2500.0;
    assert!((flooded / drained / expected - 1.0).abs() < 0.1, "{flooded} of {drained}");
}

/// Beads alone under a piston.
fn under_load(stress: f64) -> Scene {
    let mut scene = example("absorbency-under-load.toml");
    scene.bed.lid_stress = stress;
    scene.bed.pot = Some(5e-3);
    scene.beads.amount = BeadAmount::Count(2);
    scene.beads.across = 6;
    scene.march.increments = 8;
    scene
}

#[test]
fn absorbency_falls_with_load_below_that_of_gel_under_that_pressure_from_all_sides() {
    let uptakes = [500.0, 2000.0].map(|stress| {
        let scene = under_load(stress);
        // Pressure lowers what water gel takes up as suction does. The piston's mean stress
        // acts on part of the section only, as pores stay open: gel bears more than that.
        let mut pressed = scene.clone();
        pressed.water.potential -= stress;
        let pressed = pressed.swelling_gel().free_volume_ratio();
        let closed_form = uptake_of_volume_ratio(pressed, scene.gel.dry_density);
        let outcome = run(&scene);
        let uptake = outcome.beads.iter().map(|bead| bead.uptake_g_per_g).sum::<f64>() / 2.0;
        assert_eq!(outcome.grains, 0);
        assert!((outcome.lid_stress_pa / stress - 1.0).abs() < 1e-2, "{}", outcome.lid_stress_pa);
        assert!(uptake > 0.5 * closed_form, "{uptake}, closed form {closed_form}");
        assert!(uptake < closed_form, "{uptake}, closed form {closed_form}");
        uptake
    });
    assert!(uptakes[1] < 0.95 * uptakes[0], "{uptakes:?}");
}

#[test]
fn a_budget_of_voxels_makes_beads_coarser_and_says_so() {
    let mut scene = potful();
    scene.beads.across = 16;
    scene.beads.voxel_budget = 1200;
    let outcome = run(&scene);
    // π/6 of 13³ is 1150.
    assert_eq!((outcome.across, outcome.across_asked), (13, 16));
    let concerns = scene.concerns().unwrap();
    assert!(concerns.contains(&Concern::CoarserBeads { used: 13, asked: 16, budget: 1200 }), "{concerns:?}");
}

#[test]
fn doubtful_scenes_say_what_is_doubtful() {
    let mut scene = example("dosed-mix.toml");
    assert_eq!(scene.concerns().unwrap(), []);
    scene.beads.amount = BeadAmount::Dose(12e-3);
    let concerns = scene.concerns().unwrap();
    assert!(
        matches!(concerns[..], [Concern::PoresFilled { times, held: false }] if times > 1.0),
        "{concerns:?}"
    );

    let mut pressed = example("dosed-mix.toml");
    pressed.bed.lid_stress = pressed.swelling_gel().moduli().shear;
    let concerns = pressed.concerns().unwrap();
    assert!(
        matches!(concerns[..], [Concern::CoarseUnderLoad { ratio, across: 24 }] if (ratio - 1.0).abs() < 1e-9),
        "{concerns:?}"
    );
    pressed.beads.across = 24;
    assert!(!pressed.concerns().unwrap().iter().any(|c| matches!(c, Concern::CoarseUnderLoad { .. })));

    let mut pot = potful();
    let ratio = pot.estimate().unwrap().mean_grain_m / 20e-3;
    let rise = 0.05 * ratio + 0.412 * ratio * ratio;
    let concerns = pot.concerns().unwrap();
    assert!(
        matches!(
            concerns[..],
            [Concern::CoarseStrength { across: 12, .. }, Concern::NarrowPot { rise: told, .. }]
                if (told - rise).abs() < 1e-12
        ),
        "{concerns:?}"
    );
    pot.bed.grains = 40;
    let concerns = pot.concerns().unwrap();
    assert!(concerns.iter().any(|concern| matches!(concern, Concern::ThinBed { .. })), "{concerns:?}");
}
