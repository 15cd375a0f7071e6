use crate::support::{TestEnv, fast_scene, quick_scene, replace_once, root};

/// The scene with one thing changed is refused by `run` before anything is written; the
/// message holds the line of the change and all of `words`.
#[track_caller]
fn refused(from: &str, to: &str, words: &[&str]) {
    refused_scene(&quick_scene(), from, to, words);
}

#[track_caller]
fn refused_scene(scene: &str, from: &str, to: &str, words: &[&str]) {
    let env = TestEnv::new();
    let scene = replace_once(scene, from, to);
    let changed = to.lines().last().unwrap();
    let line = 1 + scene.lines().position(|line| line.contains(changed)).unwrap();
    env.write("scene.toml", &scene);
    let place = format!("scene.toml, line {line}:");
    env.refuse(&["run", "scene.toml", "--out", "out"], 2, &[&[place.as_str()], words].concat());
    assert_eq!(env.files(), [env.path("scene.toml")], "nothing may be written");
}

#[test]
fn an_unknown_key_with_the_one_that_was_meant() {
    refused("porosity =", "porosty =", &["bed.porosty", "did you mean `bed.porosity`"]);
}

#[test]
fn an_unknown_table() {
    refused("[march]", "[marsh]", &["unknown key `marsh`", "did you mean `march`"]);
}

#[test]
fn a_key_given_twice() {
    refused("porosity = 0.40", "grains = 121", &["duplicate key", "grains = 121"]);
}

#[test]
fn a_missing_unit() {
    refused(
        "dry_diameter = \"1 mm\"",
        "dry_diameter = 1",
        &["beads.dry_diameter = 1", "unit is missing", "\"1 m\""],
    );
    refused(
        "dry_diameter = \"1 mm\"",
        "dry_diameter = \"1\"",
        &["beads.dry_diameter = \"1\"", "unit is missing", "mm"],
    );
}

#[test]
fn a_unit_of_the_wrong_kind() {
    refused(
        "dry_diameter = \"1 mm\"",
        "dry_diameter = \"3 kPa\"",
        &["beads.dry_diameter = \"3 kPa\"", "`kPa` is the unit of a stress", "a length is needed", "mm"],
    );
}

#[test]
fn an_unknown_unit() {
    refused("\"0.3 kPa\"", "\"0.3 atm\"", &["bed.lid_stress", "unknown unit `atm`", "kPa"]);
}

#[test]
fn negative_values() {
    refused(
        "dry_diameter = \"1 mm\"",
        "dry_diameter = \"-1 mm\"",
        &["beads.dry_diameter = \"-1 mm\"", "above zero"],
    );
    refused("friction = 0.5", "friction = -0.5", &["soil.friction = -0.5", "allowed range, 0 to 2"]);
    refused(
        "\"0.3 kPa\"",
        "\"-0.3 kPa\"",
        &["bed.lid_stress = \"-0.3 kPa\"", "allowed range, 0 to 1000000 Pa"],
    );
    refused("grains = 120", "grains = -120", &["bed.grains = -120", "whole number from 0 to 1000000"]);
}

#[test]
fn a_random_bed_without_load() {
    refused(
        "lid_stress = \"0.3 kPa\"",
        "lid_stress = \"0 kPa\"",
        &["bed.lid_stress = \"0 kPa\"", "must be above zero"],
    );
}

#[test]
fn an_overburden_that_is_none_or_crushes_grains() {
    let load = "lid_stress = \"0.3 kPa\"";
    let depth = |depth: &str| format!("bulk_density = \"2000 kg/m3\"\nflooded = true\ndepth = \"{depth}\"");
    refused(
        load,
        &depth("99 m"),
        &["bed.depth = \"99 m\"", "1.211e6 Pa", "crush", "1e6 Pa", "smaller depth"],
    );
    let peat = replace_once(&quick_scene(), "density = \"2650 kg/m3\"", "density = \"900 kg/m3\"");
    refused_scene(&peat, load, &depth("1 m"), &["bed.depth", "float", "997 kg/m3", "soil.density"]);
    refused(load, "lid_stress = \"0.3 kPa\"\nflooded = true", &["bed.flooded = true", "goes with depth"]);
}

#[test]
fn friction_that_contradicts_itself_or_is_not_known() {
    let friction = "friction = 0.5 ";
    refused(friction, "angle_of_repose = \"60 deg\" ", &["soil.angle_of_repose", "15.8 to 41 deg"]);
    refused(friction, "angle_of_repose = \"34 mm\" ", &["`mm` is the unit of a length", "an angle", "deg"]);
    refused(
        friction,
        "angle_of_repose = \"34 deg\"\nrolling_friction = 0.1",
        &["soil.rolling_friction = 0.1", "given twice"],
    );
    refused(friction, "friction = 0.0\nrolling_friction = 0.1", &["soil.rolling_friction = 0.1", "smooth"]);
}

/// A scene in an open pot.
fn potful() -> String {
    std::fs::read_to_string(root().join("scenes/open-pot.toml")).unwrap()
}

#[test]
fn a_pot_that_holds_no_bed() {
    let wide = "pot = \"20 mm\"";
    refused_scene(&potful(), wide, "pot = \"9 mm\"", &["bed.pot = \"9 mm\"", "largest grain", "wider pot"]);
    refused_scene(&potful(), wide, "pot = \"-1 mm\"", &["bed.pot", "above zero"]);
    refused_scene(
        &potful(),
        "grains = 300",
        "grains = 50",
        &["bed.grains = 50", "less than 2 layers", "at least"],
    );
    refused_scene(
        &replace_once(&potful(), "dose = \"0.25 g/kg\"", "count = 1"),
        "dry_diameter = \"1 mm\"",
        "dry_diameter = \"5 mm\"",
        &["beads.dry_diameter", "larger than the bed", "wider pot"],
    );
    let flooded = replace_once(&potful(), "top = \"open\"", "top = \"open\"\nflooded = true");
    refused_scene(
        &flooded,
        "density = \"2500 kg/m3\"",
        "density = \"600 kg/m3\"",
        &["soil.density", "floats up", "997 kg/m3"],
    );
    refused_scene(
        &flooded,
        "dry_density = \"1400 kg/m3\"",
        "dry_density = \"900 kg/m3\"",
        &["gel.dry_density", "floats up", "997 kg/m3"],
    );
}

#[test]
fn a_pot_around_spheres_that_lie_in_a_cell() {
    let env = TestEnv::new();
    let scene = std::fs::read_to_string(root().join("scenes/bench-array.toml")).unwrap();
    let fixed = "fixed_grains = true";
    env.write("scene.toml", &replace_once(&scene, fixed, &format!("{fixed}\npot = \"20 mm\"")));
    std::fs::copy(root().join("scenes/bench-array.csv"), env.path("bench-array.csv")).unwrap();
    env.refuse(&["describe", "scene.toml"], 2, &["scene.toml, line 12", "bed.pot", "lists its spheres"]);
}

#[test]
fn more_gel_than_a_bed_that_cannot_rise_bears() {
    let held = replace_once(&quick_scene(), "lid_stress = ", "lid_held = true\nlid_stress = ");
    refused_scene(
        &held,
        "count = 1 ",
        "count = 400 ",
        &["beads.count = 400", "fill the pores", "cannot rise", "1e6 Pa"],
    );
}

#[test]
fn an_open_top_under_a_load_or_without_a_pot() {
    let open = "top = \"open\"";
    refused_scene(&potful(), open, "top = \"open\"\nlid_stress = \"1 kPa\"", &["bed.lid_stress", "open top"]);
    refused_scene(&potful(), open, "top = \"open\"\nlid_held = true", &["bed.lid_held", "no lid to hold"]);
    refused_scene(&potful(), open, "top = \"shut\"", &["bed.top = \"shut\"", "\"open\" or \"lid\""]);
    refused("porosity = 0.40", "porosity = 0.40\ntop = \"open\"", &["bed.top = \"open\"", "give pot ="]);
    let env = TestEnv::new();
    env.write("scene.toml", &replace_once(&potful(), open, ""));
    env.refuse(&["describe", "scene.toml"], 2, &["`bed.lid_stress` is missing"]);
}

#[test]
fn beads_alone_that_are_no_bed() {
    let alone = std::fs::read_to_string(root().join("scenes/absorbency-under-load.toml")).unwrap();
    refused_scene(&alone, "count = 8", "count = 1", &["beads.count = 1", "at least two beads"]);
    refused_scene(&alone, "count = 8", "dose = \"1 g/kg\"", &["beads.dose", "no soil to dose"]);
    refused_scene(
        &alone,
        "seed = 3",
        "seed = 3\n[soil]\ndensity = \"2650 kg/m3\"",
        &["soil.density", "no grains"],
    );
    let env = TestEnv::new();
    env.write("scene.toml", &replace_once(&alone, "pot = \"8 mm\"\n", ""));
    env.refuse(&["describe", "scene.toml"], 2, &["scene.toml, line 10", "bed.grains = 0", "need a pot"]);
}

#[test]
fn values_that_are_no_number() {
    refused("friction = 0.5", "friction = nan", &["soil.friction = NaN", "allowed range, 0 to 2"]);
    refused("\"0.3 kPa\"", "\"NaN kPa\"", &["bed.lid_stress = \"NaN kPa\"", "finite"]);
    refused("modulus = 8", "modulus = inf", &["strength.modulus = inf", "allowed range, 1 to 100"]);
}

#[test]
fn a_suction_with_the_wrong_sign() {
    refused(
        "potential = \"0 kPa\"",
        "potential = \"5 kPa\"",
        &["water.potential", "allowed range, -10000000 to 0 Pa"],
    );
}

#[test]
fn a_sieve_table_that_falls() {
    refused("85.0", "35.0", &["soil.sieves[3]", "[\"3.15 mm\", 35]", "percent passing must not fall", "45"]);
}

#[test]
fn sieves_out_of_order() {
    refused("\"3.15 mm\"", "\"1.15 mm\"", &["soil.sieves[3]", "openings must increase", "0.002 m"]);
}

#[test]
fn a_sieve_table_that_does_not_end_at_100() {
    refused("100.0]", "98.0]", &["soil.sieves[4]", "must pass 100"]);
}

#[test]
fn fines_of_unknown_size() {
    refused("\"1 mm\", 0.0", "\"1 mm\", 5.0", &["soil.sieves[1]", "5 % is finer", "fines_cutoff"]);
}

#[test]
fn a_porosity_out_of_reach_for_the_grading() {
    refused(
        "porosity = 0.40",
        "porosity = 0.2",
        &["bed.porosity = 0.2", "out of reach for this grading", "0.29 to 0.47"],
    );
    refused("porosity = 0.40", "porosity = 0.7", &["bed.porosity = 0.7", "out of reach for this grading"]);
}

#[test]
fn a_dose_that_leaves_no_grains() {
    refused(
        "count = 1 ",
        "dose = \"1500 g/kg\" ",
        &["beads.dose = \"1500 g/kg\"", "no grains", "below 1000 g/kg"],
    );
    refused(
        "count = 1 ",
        "dose = \"700 g/kg\" ",
        &["beads.dose = \"700 g/kg\"", "leaves no bed of grains", "0.5283"],
    );
}

#[test]
fn a_dose_that_leaves_no_bead() {
    refused("count = 1 ", "dose = \"0.001 g/kg\" ", &["beads.dose", "at least", "grains"]);
}

#[test]
fn a_datasheet_whose_numbers_contradict_each_other() {
    refused(
        "free_swell = \"90 g/g\"",
        "free_swell_saline = \"120 g/g\"\nfree_swell = \"90 g/g\"",
        &["gel.datasheet.free_swell", "saline (120 g/g) must be below", "90 g/g"],
    );
    refused(
        "free_swell = \"90 g/g\"",
        "free_swell_saline = \"3 g/g\"\nfree_swell = \"90 g/g\"",
        &["gel.datasheet.free_swell", "contradict each other", "6000 Pa", "not 3 g/g"],
    );
}

#[test]
fn a_bead_larger_than_the_bed() {
    refused(
        "dry_diameter = \"1 mm\"",
        "dry_diameter = \"40 mm\"",
        &["beads.dry_diameter = \"40 mm\"", "larger than the bed", "must be below", "at least", "grains"],
    );
}

#[test]
fn overlapping_spheres_in_the_table() {
    let env = TestEnv::new();
    let scene = std::fs::read_to_string(root().join("scenes/bench-array.toml")).unwrap();
    env.write("bench-array.toml", &scene);
    env.write("bench-array.csv", "x [mm],y [mm],z [mm],d [mm]\n2,2,2,3\n6,2,2,3\n2,3.5,2,3\n");
    let words = ["bench-array.csv, line 4", "overlaps that of line 2", "1.500e-3 m", "at most 0.001"];
    env.refuse(&["run", "bench-array.toml", "--out", "out"], 2, &words);
    assert!(!env.path("out").exists());
}

#[test]
fn a_sphere_table_that_is_not_one() {
    let env = TestEnv::new();
    let scene = std::fs::read_to_string(root().join("scenes/bench-array.toml")).unwrap();
    env.write("bench-array.toml", &scene);
    let refuse = |table: &str, words: &[&str]| {
        env.write("bench-array.csv", table);
        env.refuse(&["describe", "bench-array.toml"], 2, words);
    };
    refuse("x [mm],y [mm],z [mm]\n1,1,1\n", &["line 1", "no column `d`"]);
    refuse("x,y,z,d\n1,1,1,1\n", &["line 1", "unit of column `x` is missing"]);
    refuse("x [mm],y [mm],z [mm],d [kPa]\n1,1,1,1\n", &["line 1", "column `d`", "unit of a stress"]);
    refuse("x [mm],y [mm],z [mm],d [mm]\n1,1,1,one\n", &["line 2", "d = \"one\"", "finite number"]);
    refuse("x [mm],y [mm],z [mm],d [mm]\n1,1,1,-1\n", &["line 2", "above zero"]);
    refuse("x [mm],y [mm],z [mm],d [mm]\n1,1,9,1\n", &["line 2", "outside the cell", "0.008 m"]);
}

#[test]
fn more_voxels_than_the_budget_before_anything_is_allocated() {
    refused(
        "count = 1 ",
        "count = 40000 ",
        &["beads.count = 40000", "8 voxels across", "1.072e7 voxels", "GiB", "allows 300000"],
    );
    refused(
        "across = 8",
        "across = 8\nvoxel_budget = 20000000",
        &["beads.voxel_budget = 20000000", "whole number from 1 to 10000000"],
    );
    refused("count = 1 ", "count = 400 ", &["beads.count = 400", "no longer touch", "times as much gel"]);
}

#[test]
fn the_same_thing_given_twice() {
    refused("count = 1 ", "count = 1\ndose = \"1 g/kg\" ", &["beads.dose", "given twice"]);
    refused(
        "lid_stress = \"0.3 kPa\"",
        "lid_stress = \"0.3 kPa\"\ndepth = \"2 cm\"",
        &["bed.depth", "given twice", "keep either"],
    );
}

#[test]
fn a_missing_key() {
    let env = TestEnv::new();
    env.write("scene.toml", &replace_once(&quick_scene(), "seed = 1", ""));
    env.refuse(
        &["describe", "scene.toml"],
        2,
        &["scene.toml, line 6", "`scene.seed` is missing", "seed = 1"],
    );
}

#[test]
fn text_that_is_no_scene() {
    let env = TestEnv::new();
    env.write("scene.toml", "[scene]\nseed = = 1\n");
    env.refuse(&["describe", "scene.toml"], 2, &["scene.toml, line 2"]);
    env.refuse(&["describe", "nowhere.toml"], 2, &["cannot read nowhere.toml"]);
}

#[test]
fn a_factor_value_is_refused_at_its_line_in_the_study() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    let study =
        "scene = \"scene.toml\"\n[factor]\nkey = \"bed.lid_stress\"\nvalues = [\"1 kPa\",\n\"2 mm\"]\n";
    env.write("study.toml", study);
    env.refuse(
        &["study", "study.toml", "--out", "out"],
        2,
        &["study.toml, line 5", "bed.lid_stress = \"2 mm\"", "`mm` is the unit of a length"],
    );
    env.write("study.toml", &study.replace("lid_stress", "lid_stres"));
    env.refuse(
        &["study", "study.toml", "--out", "out"],
        2,
        &["unknown key `bed.lid_stres`", "bed.lid_stress"],
    );
    assert!(!env.path("out").exists());
}

#[test]
fn a_study_where_a_scene_is_needed() {
    let env = TestEnv::new();
    env.write("study.toml", "packs = 3\nscene = \"scene.toml\"\n");
    env.refuse(&["describe", "study.toml"], 2, &["study.toml, line 2", "this is a study"]);
}

#[test]
fn a_study_that_names_no_scene_or_one_that_is_not_there() {
    let env = TestEnv::new();
    env.write("study.toml", "packs = 3\n");
    env.refuse(&["study", "study.toml", "--out", "out"], 2, &["study.toml, line 1", "`scene` is missing"]);
    env.write("study.toml", "packs = 3\nscene = \"nowhere.toml\"\n");
    env.refuse(
        &["study", "study.toml", "--out", "out"],
        2,
        &["study.toml, line 2", "cannot read nowhere.toml"],
    );
    assert!(!env.path("out").exists());
}

#[test]
fn an_output_folder_that_cannot_be_written() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    env.write("taken", "a file, not a folder");
    for verb in ["run", "study"] {
        env.refuse(&[verb, "scene.toml", "--out", "taken/out"], 3, &["cannot write taken/out"]);
        env.refuse(&[verb, "scene.toml", "--out", "taken"], 3, &["cannot write taken"]);
    }
}

#[test]
fn an_output_folder_that_holds_something_else() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    std::fs::create_dir(env.path("out")).unwrap();
    env.write("out/notes.txt", "mine");
    for verb in ["run", "study"] {
        env.refuse(&[verb, "scene.toml", "--out", "out"], 3, &["out holds", "--out"]);
    }
    assert_eq!(env.read("out/notes.txt"), b"mine");
}

#[test]
fn an_output_folder_that_holds_another_study() {
    let env = TestEnv::new();
    env.write_fast_scene("scene.toml");
    env.succeed(&["study", "scene.toml", "--out", "out", "--packs", "2"]);
    let before = env.read("out/outcomes.parquet");
    env.write("scene.toml", &replace_once(&fast_scene(), "seed = 4", "seed = 5"));
    env.refuse(&["study", "scene.toml", "--out", "out"], 3, &["out holds another study", "--out"]);
    env.refuse(&["run", "scene.toml", "--out", "out"], 3, &["out holds", "--out"]);
    assert_eq!(env.read("out/outcomes.parquet"), before);
}
