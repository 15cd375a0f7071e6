use crate::support::{TestEnv, quick_scene};

#[test]
fn one_and_two_threads_give_the_same_bits() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    for threads in ["1", "2"] {
        env.succeed(&["study", "scene.toml", "--out", threads, "--packs", "3", "--threads", threads]);
    }
    for name in ["outcomes.parquet", "summary.json"] {
        assert!(env.read(&format!("1/{name}")) == env.read(&format!("2/{name}")), "{name} differs");
    }
}

#[test]
fn a_study_ends_with_the_tear_probability_and_its_interval() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    let text = env.succeed(&["study", "scene.toml", "--out", "out", "--packs", "3"]).stdout;
    assert!(text.contains("tear probability") && text.contains(" to "), "{text}");
    let summary = env.json("out/summary.json");
    assert_eq!(summary["packs"], 3);
    let torn = summary["torn"].as_f64().unwrap();
    let fraction = summary["tear_fraction"].as_f64().unwrap();
    approx::assert_relative_eq!(fraction, torn / 3.0);
    // Exact and Wilson limits of 0 to 3 of 3, by statsmodels: 0/3 has the upper limits 0.70760 and 0.56150.
    if torn == 0.0 {
        let high = |key: &str| summary[key].as_f64().unwrap();
        approx::assert_abs_diff_eq!(high("tear_fraction_clopper_pearson_high"), 0.70760, epsilon = 1e-5);
        approx::assert_abs_diff_eq!(high("tear_fraction_wilson_high"), 0.56150, epsilon = 1e-5);
    }
}

#[test]
fn a_study_of_a_factor_tells_every_level() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    env.write(
        "study.toml",
        "scene = \"scene.toml\"\npacks = 2\n[factor]\nkey = \"bed.lid_stress\"\nvalues = [\"0.3 kPa\", \"0.6 kPa\"]\n",
    );
    let text = env.succeed(&["study", "study.toml", "--out", "out"]).stdout;
    assert!(text.contains("bed.lid_stress = 0.6 kPa") && text.contains("bed.lid_stress = 0.3 kPa"), "{text}");
    let summary = env.json("out/summary.json");
    let uptake = |level: usize| summary["levels"][level]["uptake_g_per_g"]["mean"].as_f64().unwrap();
    // More load, less water.
    assert!(uptake(0) > uptake(1), "{} {}", uptake(0), uptake(1));
    assert_eq!(summary["packs"], 4);
}

#[test]
fn a_run_repeats_a_pack_of_a_study() {
    let env = TestEnv::new();
    env.write_fast_scene("scene.toml");
    env.succeed(&["study", "scene.toml", "--out", "study", "--packs", "3", "--csv"]);
    env.succeed(&["run", "study/scene.toml", "--out", "run", "--pack", "2"]);
    let table = String::from_utf8(env.read("study/outcomes.csv")).unwrap();
    let mut rows = table.lines().map(|row| row.split(',').collect::<Vec<_>>());
    let names = rows.next().unwrap();
    let column = names.iter().position(|name| *name == "uptake_g_per_g").unwrap();
    let row = rows.find(|row| row[2] == "2").unwrap();
    let repeated = env.json("run/summary.json")["beads"][0]["uptake_g_per_g"].as_f64().unwrap();
    assert_eq!(row[column].parse::<f64>().unwrap().to_bits(), repeated.to_bits());
}
