//! Beds under heavy loads and under lids that are held.

use bedswell_sim::{PackOutcome, Scene, read_scene, run_pack};
use std::path::Path;

/// The standard mix in a small bed.
fn standard_mix() -> Scene {
    let scenes = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes");
    let mut scene = read_scene(&scenes.join("tree-pit.toml")).unwrap();
    scene.bed.grains = 300;
    scene
}

fn run(scene: &Scene) -> PackOutcome {
    run_pack(scene, 0, &mut ()).unwrap()
}

#[test]
fn gel_squeezed_between_grains_meets_itself_and_comes_to_rest() {
    let mut scene = standard_mix();
    scene.bed.lid_stress = scene.swelling_gel().moduli().shear;
    let outcome = run(&scene);
    let (uptake, quality) = (outcome.beads[0].volume_ratio, outcome.quality);
    assert!((0.4..0.6).contains(&uptake), "{uptake}");
    assert!(quality.swallowed < 1e-3, "{quality:?}");
    assert!(quality.gel_residual < 1e-3 && quality.grain_residual < 1e-2, "{quality:?}");
    assert!((outcome.lid_stress_pa / scene.bed.lid_stress - 1.0).abs() < 1e-2, "{}", outcome.lid_stress_pa);
}

#[test]
fn under_a_held_lid_a_bed_presses_harder_than_it_was_loaded() {
    let mut scene = standard_mix();
    scene.bed.lid_held = true;
    let outcome = run(&scene);
    assert_eq!(outcome.heave_m, 0.0);
    assert!(outcome.lid_stress_pa > 2.0 * scene.bed.lid_stress, "{}", outcome.lid_stress_pa);
}
