//! Outcomes of the bench: what their tables say, what they refuse, and what they tell.

use bedswell_gel::{Datasheet, calibrate_datasheet, uptake_of_volume_ratio};
use bedswell_sim::{
    BenchArray, BenchOutcomes, LoadCase, SceneError, Strength, TensionField, fit_strength, gel_table,
    read_bench_outcomes, read_scene, run_pack,
};
use std::path::{Path, PathBuf};

fn scenes() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes")
}

/// A table of this text beside copies of the example arrays.
fn read(text: &str) -> Result<BenchOutcomes, SceneError> {
    let folder = tempfile::tempdir().unwrap();
    for name in ["bench-array.toml", "bench-array-hard.toml", "bench-array.csv", "tree-pit.toml"] {
        std::fs::copy(scenes().join(name), folder.path().join(name)).unwrap();
    }
    let soft = std::fs::read_to_string(scenes().join("bench-array.toml")).unwrap();
    let soft = soft.replace("crosslinks = 2.2e-4", "crosslinks = 1.1e-4");
    std::fs::write(folder.path().join("other-gel.toml"), &soft).unwrap();
    let fine = std::fs::read_to_string(scenes().join("bench-array.toml"))
        .unwrap()
        .replace("across = 16", "across = 20");
    std::fs::write(folder.path().join("fine.toml"), fine).unwrap();
    let path = folder.path().join("outcomes.csv");
    std::fs::write(&path, text).unwrap();
    read_bench_outcomes(&path)
}

/// The table is refused with a message that names the line and holds all of `words`.
#[track_caller]
fn refused(text: &str, line: usize, words: &[&str]) {
    let message = read(text).unwrap_err().to_string();
    for word in words.iter().copied().chain([format!("outcomes.csv, line {line}:").as_str()]) {
        assert!(message.contains(word), "no {word:?} in: {message}");
    }
}

#[test]
fn the_example_holds_two_grades_in_three_arrays() {
    let outcomes = read_bench_outcomes(&scenes().join("bench-outcomes.csv")).unwrap();
    assert_eq!(outcomes.arrays.len(), 3);
    let counts = |grade: usize| {
        let grade = &outcomes.grades[grade];
        (grade.name.as_str(), grade.torn(), grade.beads(), grade.counts.len())
    };
    assert_eq!((counts(0), counts(1)), (("plain", 27, 60, 3), ("toughened", 0, 12, 1)));
}

#[test]
fn tables_come_as_spreadsheets_write_them() {
    let plain = read("geometry,grade,torn\nbench-array.toml,soft,yes\nbench-array.toml,soft,no\n").unwrap();
    for text in [
        "\u{feff}geometry;grade;torn\r\nbench-array.toml;soft;yes\r\nbench-array.toml;soft;no\r\n",
        "day,Torn,Grade,Geometry\n1,Yes,soft,bench-array.toml\n\n# a break\n,,,\n2, NO ,soft,\"bench-array.toml\"\n",
    ] {
        assert_eq!(read(text).unwrap(), plain, "{text}");
    }
}

#[test]
fn a_missing_or_misspelt_column() {
    refused("geometry,grade\nbench-array.toml,soft\n", 1, &["no column `torn`", "geometry,grade,torn"]);
    refused("# mine\ngeomtry,grade,torn\n", 2, &["no column `geometry`", "is `geomtry` meant?"]);
}

#[test]
fn an_empty_table() {
    refused("", 1, &["the table is empty", "geometry,grade,torn"]);
    refused("# nothing yet\n", 1, &["the table is empty"]);
    refused("\ngeometry,grade,torn\n", 2, &["no outcomes below the header", "bench-array.toml,soft,yes"]);
}

#[test]
fn an_outcome_that_is_neither_yes_nor_no() {
    let good = "# mine\ngeometry,grade,torn\nbench-array.toml,soft,yes\n";
    refused(&format!("{good}bench-array.toml,soft,perhaps\n"), 4, &["torn = \"perhaps\"", "write yes or no"]);
    refused(&format!("{good}\n\nbench-array.toml,soft\n"), 6, &["torn = \"\"", "write yes or no"]);
    refused(&format!("{good}bench-array.toml,,no\n"), 4, &["grade is missing", "write a name"]);
    refused(&format!("{good},soft,no\n"), 4, &["geometry is missing", "write a scene file"]);
}

#[test]
fn an_unknown_scene() {
    let text = "geometry,grade,torn\nbench-array.toml,soft,yes\nnowhere.toml,soft,no\n";
    refused(text, 3, &["geometry = \"nowhere.toml\"", "cannot read", "relative to the table"]);
}

#[test]
fn a_scene_that_is_no_array_of_the_bench() {
    let text = "geometry,grade,torn\ntree-pit.toml,soft,yes\n";
    refused(text, 2, &["geometry = \"tree-pit.toml\"", "beads.centres", "soil.spheres", "bed.fixed_grains"]);
}

#[test]
fn one_grade_of_two_gels() {
    let text = "geometry,grade,torn\nbench-array.toml,soft,yes\nother-gel.toml,soft,no\n";
    refused(text, 3, &["grade = \"soft\"", "bench-array.toml and other-gel.toml differ in [gel]"]);
    refused(
        &text.replace("other-gel", "fine"),
        3,
        &["bench-array.toml and fine.toml differ in beads.across"],
    );
    assert_eq!(read(&text.replace("gel.toml,soft", "gel.toml,softer")).unwrap().grades.len(), 2);
}

#[test]
fn text_that_is_no_table() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("outcomes.csv");
    let error = read_bench_outcomes(&path).unwrap_err().to_string();
    assert!(error.contains("cannot read") && error.contains("outcomes.csv"), "{error}");
    std::fs::write(&path, [0xff, 0xfe, 0x00]).unwrap();
    assert!(read_bench_outcomes(&path).unwrap_err().to_string().contains("cannot read"));
}

/// The example array with a coarse bead.
fn array() -> BenchArray {
    let mut scene = read_scene(&scenes().join("bench-array-hard.toml")).unwrap();
    scene.beads.across = 10;
    scene.march.increments = 10;
    BenchArray { name: "array".into(), scene }
}

#[test]
fn the_tension_gives_the_probability_of_the_run() {
    let array = array();
    let outcome = run_pack(&array.scene, 0, &mut ()).unwrap();
    let probability = array.tension().unwrap().tear_probability(&array.scene.strength);
    assert_eq!(probability, outcome.beads[0].tear_probability);
}

/// Mean of the tension weighed towards its highest values as the weakest link does.
fn level(field: &TensionField) -> f64 {
    let total: f64 = field.volumes.iter().sum();
    let parts = field.volumes.iter().zip(&field.tensions);
    parts.map(|(volume, tension)| volume / total * tension.max(0.0).powi(6)).sum::<f64>().powf(1.0 / 6.0)
}

/// Why outcomes tell the strength alone: at one free swell a gel of half or twice the modulus is
/// in about half or twice the tension.
#[test]
fn among_held_spheres_tension_goes_with_the_modulus() {
    let mut array = array();
    let gel = array.scene.swelling_gel();
    let (modulus, at_first) = (gel.moduli().shear, level(&array.tension().unwrap()));
    for times in [0.5, 2.0] {
        let scene = &mut array.scene;
        let sheet = Datasheet {
            dry_density: scene.gel.dry_density,
            free_swell_water: uptake_of_volume_ratio(gel.free_volume_ratio(), scene.gel.dry_density),
            water_salt: scene.water.salt,
            free_swell_saline: None,
            saline_salt: 0.154,
            swollen_modulus: Some(times * modulus),
            chi: scene.gel.chi,
            temperature: scene.water.temperature,
        };
        let numbers = calibrate_datasheet(&sheet).unwrap().numbers;
        (scene.gel.crosslinks, scene.gel.charges) = (numbers.crosslinks, numbers.charges);
        approx::assert_relative_eq!(
            scene.swelling_gel().moduli().shear,
            times * modulus,
            max_relative = 1e-6
        );
        let ratio = level(&array.tension().unwrap()) / at_first;
        approx::assert_relative_eq!(ratio, times, max_relative = 0.05);
    }
}

#[test]
fn the_fitted_tables_take_the_place_of_those_of_a_scene() {
    let outcomes = read("geometry,grade,torn\nbench-array.toml,two\u{b7}ply,yes\n").unwrap();
    let strength = Strength { scale: 432.1, modulus: 7.0, ..outcomes.grades[0].strength };
    let cases: Vec<LoadCase> = [(350.0, 9), (420.0, 28), (500.0, 39)]
        .map(|(tension, torn)| LoadCase {
            name: String::new(),
            field: TensionField::uniform(strength.volume, tension),
            torn,
            beads: 40,
        })
        .into();
    let fit = fit_strength(&cases, &strength).unwrap();
    let table = gel_table(&outcomes.grades[0], &fit, "outcomes.csv").unwrap();
    let scene = &outcomes.arrays[0].scene;
    let mut kept = true;
    let others: String = scene
        .to_toml()
        .lines()
        .filter(|line| {
            if line.starts_with('[') {
                kept = !["[gel]", "[strength]"].contains(line);
            }
            kept
        })
        .map(|line| format!("{line}\n"))
        .collect();
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("scene.toml");
    std::fs::write(&path, others + &table).unwrap();
    std::fs::write(folder.path().join(bedswell_sim::SPHERES_FILE), scene.spheres_csv().unwrap()).unwrap();
    let read_back = read_scene(&path).unwrap();
    assert_eq!((read_back.gel, read_back.strength.volume), (scene.gel, strength.volume));
    let fitted = fit.strength(&strength).unwrap();
    approx::assert_relative_eq!(read_back.strength.scale, fitted.scale, max_relative = 1e-5);
    approx::assert_relative_eq!(read_back.strength.modulus, fitted.modulus, max_relative = 1e-5);
    assert!(
        table.starts_with("# Grade two\u{b7}ply: strength from outcomes.csv, 1 of 1 beads torn, by"),
        "{table}"
    );

    let none_torn = [LoadCase { torn: 0, ..cases[0].clone() }];
    let bound = fit_strength(&none_torn, &strength).unwrap();
    assert_eq!(gel_table(&outcomes.grades[0], &bound, "outcomes.csv"), None);
}

/// Tension counts as one over a length, so that the weakest link does not hang on a voxel.
#[test]
fn what_strength_is_measured_against_hardly_depends_on_the_voxels() {
    let largest = |across: usize, length: Option<f64>| {
        let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes/bench-array-hard.toml");
        let mut scene = read_scene(&file).unwrap_or_else(|error| panic!("{error}"));
        scene.beads.across = across;
        scene.strength.length = length;
        let outcome = run_pack(&scene, 0, &mut ()).unwrap_or_else(|error| panic!("{error}"));
        outcome.tensions[0].tensions.iter().copied().fold(f64::NEG_INFINITY, f64::max)
    };
    let [coarse, middle, fine] = [12, 16, 24].map(|across| largest(across, None));
    assert!((coarse / middle - 1.0).abs() < 0.05, "{coarse} and {middle} Pa");
    assert!((fine / middle - 1.0).abs() < 0.05, "{fine} and {middle} Pa");
    // Single voxels differ by much more.
    let [coarse, middle] = [12, 16].map(|across| largest(across, Some(1e-6)));
    assert!((coarse / middle - 1.0).abs() > 0.3, "{coarse} and {middle} Pa");
}
