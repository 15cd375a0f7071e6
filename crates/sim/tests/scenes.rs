//! Scene files: what they become, and what they refuse.

use bedswell_sim::{BeadAmount, Scene, SoilGrading, read_scene, read_study};
use std::path::{Path, PathBuf};

fn scenes() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes")
}

fn example(name: &str) -> Scene {
    read_scene(&scenes().join(name)).unwrap_or_else(|error| panic!("{error}"))
}

#[test]
fn a_resolved_scene_reads_back_bit_for_bit() {
    for name in [
        "tree-pit",
        "coarse-grit",
        "planting-sand",
        "bench-array",
        "dosed-mix",
        "open-pot",
        "absorbency-under-load",
        "dry-spell",
    ] {
        let scene = example(&format!("{name}.toml"));
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("scene.toml");
        std::fs::write(&path, scene.to_toml()).unwrap();
        if let Some(spheres) = scene.spheres_csv() {
            std::fs::write(folder.path().join(bedswell_sim::SPHERES_FILE), spheres).unwrap();
        }
        assert_eq!(read_scene(&path).unwrap(), scene, "{name}");
    }
}

#[test]
fn units_and_the_load_of_a_cover_are_resolved() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("scene.toml");
    let text = std::fs::read_to_string(scenes().join("tree-pit.toml")).unwrap();
    let text = text.replace("lid_stress = \"0.3 kPa\"", "depth = \"30 cm\"\nbulk_density = \"1.5 g/cm3\"");
    std::fs::write(&path, text).unwrap();
    let scene = read_scene(&path).unwrap();
    // 1500 kg/m³ times 9.80665 m/s² times 0.3 m.
    approx::assert_relative_eq!(scene.bed.lid_stress, 4412.9925, max_relative = 1e-12);
    assert_eq!(scene.water.temperature, 288.15);
    assert_eq!(scene.beads.dry_diameter, 1e-3);
}

#[test]
fn listed_spheres_keep_their_places_in_the_cell() {
    let scene = example("bench-array.toml");
    let SoilGrading::Spheres { spheres, size, periodic } = &scene.soil.grading else {
        panic!("the bench array lists its spheres");
    };
    assert_eq!((spheres.len(), *size, *periodic), (8, [8e-3; 3], false));
    assert_eq!(scene.beads.amount, BeadAmount::At(vec![[4e-3; 3]]));
}

#[test]
fn without_a_cell_spheres_and_centres_move_to_the_corner_together() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("scene.toml");
    let text = std::fs::read_to_string(scenes().join("bench-array.toml")).unwrap();
    std::fs::write(&path, text.replace("cell = [\"8 mm\", \"8 mm\", \"8 mm\"]", "")).unwrap();
    std::fs::copy(scenes().join("bench-array.csv"), folder.path().join("bench-array.csv")).unwrap();
    let scene = read_scene(&path).unwrap();
    let SoilGrading::Spheres { spheres, size, .. } = &scene.soil.grading else { unreachable!() };
    let BeadAmount::At(centres) = &scene.beads.amount else { unreachable!() };
    for axis in 0..3 {
        // Two spheres of 3 mm, 4.16 mm apart.
        approx::assert_relative_eq!(size[axis], 7.16e-3, max_relative = 1e-12);
        approx::assert_relative_eq!(spheres[0].centre[axis], 1.5e-3, max_relative = 1e-12);
        approx::assert_relative_eq!(centres[0][axis], 3.58e-3, max_relative = 1e-12);
    }
}

#[test]
fn a_study_varies_one_key_of_its_scene() {
    let study = read_study(&scenes().join("grain-size-study.toml")).unwrap();
    let medians: Vec<f64> = study
        .levels
        .iter()
        .map(|level| match level.scene.soil.grading {
            SoilGrading::Lognormal { median, .. } => median,
            _ => unreachable!(),
        })
        .collect();
    assert_eq!(study.factors.len(), 1);
    assert_eq!(study.factors[0].key, "soil.median");
    assert_eq!(medians, [2.4e-3, 3e-3, 3.6e-3]);
    assert_eq!(study.packs, 8);
}

#[test]
fn a_study_of_a_scene_is_that_scene_alone() {
    let study = read_study(&scenes().join("tree-pit.toml")).unwrap();
    assert_eq!(study.factors, []);
    assert_eq!(study.levels.len(), 1);
    assert_eq!(study.levels[0].scene, example("tree-pit.toml"));
}

#[test]
fn the_invented_gels_swell_as_their_comments_say() {
    for name in ["tree-pit", "coarse-grit", "planting-sand", "bench-array", "dosed-mix", "dry-spell"] {
        let estimate = example(&format!("{name}.toml")).estimate().unwrap();
        assert!((4.0..6.0).contains(&estimate.free_stretch), "{name}: {estimate:?}");
        assert!((5e3..7.5e3).contains(&estimate.swollen_modulus_pa), "{name}: {estimate:?}");
        assert!(estimate.swollen_diameter_m < 0.7 * estimate.bed_edge_m, "{name}: {estimate:?}");
    }
}
