//! Beds under heavy loads and under lids that are held.

use bedswell_sim::{BeadAmount, PackOutcome, Scene, read_scene, run_pack};
use std::path::Path;

/// The standard mix, small and in few increments.
fn standard_mix() -> Scene {
    let scenes = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes");
    let mut scene = read_scene(&scenes.join("tree-pit.toml")).unwrap();
    scene.bed.grains = 160;
    scene.march.increments = 16;
    scene
}

fn run(scene: &Scene) -> PackOutcome {
    run_pack(scene, 0, &mut ()).unwrap()
}

#[test]
fn gel_squeezed_between_grains_meets_itself_and_comes_to_rest() {
    let mut scene = standard_mix();
    let modulus = scene.swelling_gel().moduli().shear;
    let mut before = 1.0;
    for ratio in [0.1, 1.0, 10.0] {
        scene.bed.lid_stress = ratio * modulus;
        let outcome = run(&scene);
        let (uptake, quality) = (outcome.beads[0].volume_ratio, outcome.quality);
        assert!(uptake < before && uptake > 0.3, "{ratio}: {uptake}");
        assert!(quality.swallowed < 1e-3, "{ratio}: {quality:?}");
        assert!(quality.gel_residual < 1e-3 && quality.grain_residual < 1e-2, "{ratio}: {quality:?}");
        before = uptake;
    }
}

#[test]
fn under_a_held_lid_more_gel_presses_harder() {
    let mut scene = standard_mix();
    scene.bed.lid_held = true;
    scene.beads.dry_diameter = 0.7e-3;
    let pressures = [1, 4].map(|count| {
        scene.beads.amount = BeadAmount::Count(count);
        let outcome = run(&scene);
        assert_eq!(outcome.heave_m, outcome.heave_strain * 0.0, "a held lid does not rise");
        outcome.lid_stress_pa
    });
    assert!(pressures[1] > 1.5 * pressures[0] && pressures[0] > scene.bed.lid_stress, "{pressures:?}");
}
