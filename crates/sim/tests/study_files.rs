//! Study files: the combinations they make, and what they refuse.

use bedswell_sim::{Study, Variation, read_study};
use std::collections::BTreeSet;
use std::path::Path;

/// Reads a study of the standard mix, or tells why it is refused.
fn read(text: &str) -> Result<Study, String> {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("study.toml");
    let scene = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes/tree-pit.toml");
    std::fs::write(&path, format!("scene = {scene:?}\n{text}")).unwrap();
    read_study(&path).map_err(|error| error.to_string())
}

#[track_caller]
fn refuse(text: &str, words: &[&str]) {
    let error = read(text).unwrap_err();
    for word in words {
        assert!(error.contains(word), "no {word:?} in: {error}");
    }
}

fn factor(key: &str, rest: &str) -> String {
    format!("[[factor]]\nkey = \"{key}\"\n{rest}\n")
}

const STRESSES: &str = "values = [\"0.2 kPa\", \"0.4 kPa\", \"0.6 kPa\"]";
const DIAMETERS: &str = "from = \"0.8 mm\"\nto = \"1.2 mm\"";

#[test]
fn listed_values_make_every_combination_with_the_last_factor_fastest() {
    let study =
        read(&(factor("bed.lid_stress", STRESSES) + &factor("strength.modulus", "values = [6, 8.5]")))
            .unwrap();
    let values: Vec<String> = study.levels.iter().map(|level| level.values.join(" | ")).collect();
    assert_eq!(values[..3], ["0.2 kPa | 6", "0.2 kPa | 8.5", "0.4 kPa | 6"]);
    assert_eq!((values.len(), values[5].as_str()), (6, "0.6 kPa | 8.5"));
    assert_eq!(study.levels[3].scene.bed.lid_stress, 400.0);
    assert_eq!(study.levels[3].scene.strength.modulus, 8.5);
    assert_eq!(study.levels[3].positions, [1.0, 1.0]);
    assert!(!study.is_sampled());
}

#[test]
fn a_single_table_is_a_study_of_one_factor() {
    let study = read("[factor]\nkey = \"bed.lid_stress\"\nvalues = [\"0.2 kPa\", \"0.4 kPa\"]\n").unwrap();
    assert_eq!((study.factors.len(), study.levels.len()), (1, 2));
}

#[test]
fn ranges_are_sampled_once_in_each_stratum_and_values_in_equal_numbers() {
    let text = "samples = 30\n".to_owned()
        + &factor("beads.dry_diameter", DIAMETERS)
        + &factor("bed.lid_stress", STRESSES)
        + &factor("water.salt", "from = \"0.001 mol/L\"\nto = \"0.1 mol/L\"\nlogarithmic = true");
    let study = read(&text).unwrap();
    assert!(study.is_sampled());
    for factor in [0, 2] {
        let strata: BTreeSet<usize> =
            study.levels.iter().map(|level| (30.0 * level.positions[factor]) as usize).collect();
        assert_eq!(strata.len(), 30);
    }
    for level in 0..3 {
        assert_eq!(study.levels.iter().filter(|at| at.positions[1] == level as f64).count(), 10);
    }
    // Evenly over the logarithm: half of the salts lie below the geometric mean.
    assert_eq!(study.levels.iter().filter(|level| level.scene.water.salt < 0.01).count(), 15);
    for level in &study.levels {
        let diameter = level.scene.beads.dry_diameter;
        assert!((0.8e-3..=1.2e-3).contains(&diameter), "{diameter}");
        approx::assert_abs_diff_eq!((diameter - 0.8e-3) / 0.4e-3, level.positions[0], epsilon = 1e-9);
    }
    assert_eq!(
        study.factors[2].variation,
        Variation::Range { from: "0.001 mol/L".into(), to: "0.1 mol/L".into(), logarithmic: true }
    );
    assert_eq!(read(&text).unwrap(), study);
}

#[test]
fn a_factor_takes_the_place_of_the_key_that_it_stands_for() {
    let study = read(&factor("beads.dose", "values = [\"0.4 g/kg\", \"0.8 g/kg\"]")).unwrap();
    assert_ne!(study.levels[0].scene.bead_count().unwrap(), study.levels[1].scene.bead_count().unwrap());
    refuse(&factor("bed.depth", "values = [\"3 cm\"]"), &["bed.bulk_density", "at bed.depth = 3 cm"]);
}

#[test]
fn factors_that_cannot_vary_together() {
    let two = |first: &str, second: &str| factor(first, STRESSES) + &factor(second, STRESSES);
    refuse(&two("bed.lid_stress", "bed.lid_stress"), &["line 6", "varies already", "one [[factor]]"]);
    refuse(&two("bed.lid_stress", "bed.depth"), &["line 6", "only one of `bed.lid_stress` and `bed.depth`"]);
    refuse(&two("gel.datasheet", "gel.datasheet.free_swell"), &["line 6", "set the same key"]);
}

#[test]
fn ranges_that_cannot_be_drawn_from() {
    let range = |rest: &str| "samples = 4\n".to_owned() + &factor("beads.dry_diameter", rest);
    refuse(
        &range("from = \"2 mm\"\nto = \"1 mm\""),
        &["line 5", "factor.from = \"2 mm\"", "below `to`", "swap"],
    );
    refuse(&range("from = \"1 mm\"\nto = \"2 cm\""), &["line 6", "factor.to = \"2 cm\"", "the unit mm"]);
    refuse(&range("from = \"wide\"\nto = \"2 mm\""), &["line 5", "not a number with a unit"]);
    refuse(&range("from = \"1\"\nto = \"2 mm\""), &["line 5", "the unit is missing"]);
    refuse(&range("from = \"1 mm\""), &["line 3", "`factor.to` is missing"]);
    refuse(
        &range("from = \"0 mm\"\nto = \"2 mm\"\nlogarithmic = true"),
        &["line 5", "both ends above zero", "leave `logarithmic` out"],
    );
    refuse(&range("from = 1\nto = 2"), &["beads.dry_diameter = ", "the unit is missing", "in the study, at"]);
    refuse(&range(&format!("{DIAMETERS}\nvalues = [\"1 mm\"]")), &["either `values` or a range"]);
    refuse(&factor("bed.lid_stress", "values = [1]\nlogarithmic = true"), &["belongs to a range"]);
}

#[test]
fn samples_and_ranges_need_each_other() {
    refuse(&factor("beads.dry_diameter", DIAMETERS), &["`samples` is missing", "write samples = 40"]);
    refuse(
        &("samples = 9\n".to_owned() + &factor("bed.lid_stress", STRESSES)),
        &["line 2", "samples = 9", "no factor has a range"],
    );
    refuse("samples = 9\n", &["no factor has a range"]);
    refuse(
        &("samples = 1\n".to_owned() + &factor("beads.dry_diameter", DIAMETERS)),
        &["samples = 1", "from 2 to 10000"],
    );
}

#[test]
fn too_many_combinations_are_counted() {
    let numbers: Vec<String> = (0..101).map(|number| format!("{number}.5")).collect();
    let many = format!("values = [{}]", numbers.join(", "));
    let text = factor("strength.modulus", &many) + &factor("soil.friction", &many);
    refuse(&text, &["101 x 101 values", "10201 combinations", "10000 allowed"]);
}

#[test]
fn values_that_say_nothing() {
    refuse(&factor("bed.lid_stress", "values = []"), &["line 4", "names no value"]);
    refuse(&factor("bed.lid_stress", "values = [\"1 kPa\", \"1 kPa\"]"), &["factor.values[2]", "twice"]);
    refuse(&factor("bed.lid_stress", ""), &["`factor.values` is missing", "from = \"2 mm\""]);
    refuse("factor = 3\n", &["line 2", "[factor]"]);
    refuse("factor = []\n", &["line 2", "[factor]"]);
    refuse(&factor("bed.lid_stress", "levels = [1]"), &["unknown key `factor.levels`"]);
}

#[test]
fn a_combination_is_named_where_its_scene_is_refused() {
    let text = factor("beads.dry_diameter", "values = [\"1 mm\", \"3 mm\"]")
        + &factor("bed.grains", "values = [600, 100]");
    refuse(&text, &["the free-swollen bead", "at beads.dry_diameter = 3 mm, bed.grains = 600"]);
}
