use crate::support::{TestEnv, quick_scene};

/// A study of two factors with two values each.
pub(crate) fn factorial_of(scene: &str) -> String {
    let factor = |key: &str, values: &str| format!("[[factor]]\nkey = \"{key}\"\nvalues = [{values}]\n");
    format!("scene = \"{scene}\"\n")
        + &factor("water.salt", "\"0.002 mol/L\", \"0.02 mol/L\"")
        + &factor("strength.modulus", "6, 10")
}

#[test]
fn one_and_two_threads_give_the_same_bits() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    for threads in ["1", "2"] {
        env.succeed(&["study", "scene.toml", "--out", threads, "--packs", "3", "--threads", threads]);
    }
    for name in ["outcomes.parquet", "levels.parquet", "summary.json"] {
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
    assert!(text.contains("lid_stress  packs") && text.contains("\n  0.6 kPa"), "{text}");
    let summary = env.json("out/summary.json");
    let uptake = |level: usize| summary["levels"][level]["uptake_g_per_g"]["mean"].as_f64().unwrap();
    // More load, less water.
    assert!(uptake(0) > uptake(1), "{} {}", uptake(0), uptake(1));
    assert_eq!(summary["packs"], 4);
}

#[test]
fn a_study_of_two_factors_tells_combinations_and_effects() {
    let env = TestEnv::new();
    env.write_fast_scene("scene.toml");
    env.write("study.toml", &factorial_of("scene.toml"));
    let text = env.succeed(&["study", "study.toml", "--out", "out", "--packs", "3"]).stdout;
    for words in [
        "\n  0.02 mol/L   10 ",
        "averaged over the others",
        "\n  salt     to 0.02 mol/L",
        "salt with modulus",
    ] {
        assert!(text.contains(words), "no {words:?} in:\n{text}");
    }
    let tables = text.lines().filter(|line| line.starts_with("  "));
    assert!(tables.clone().count() > 6 && tables.clone().all(|line| line.chars().count() <= 100), "{text}");

    let summary = env.json("out/summary.json");
    assert_eq!(summary["levels"][3]["values"], serde_json::json!(["0.02 mol/L", "10"]));
    let uptake =
        summary["effects"].as_array().unwrap().iter().find(|one| one["response"] == "uptake_g_per_g");
    let factors = &uptake.unwrap()["factors"];
    let change = |factor: usize| factors[factor]["levels"][1]["difference"]["value"].as_f64().unwrap();
    // Salt takes water out of a charged gel; the scatter of strength leaves it where it is.
    assert!(change(0) < -1.0, "{factors}");
    assert_eq!(change(1), 0.0);
}

#[test]
fn a_study_of_ranges_draws_a_point_from_each_stratum() {
    let env = TestEnv::new();
    env.write_fast_scene("scene.toml");
    env.write(
        "study.toml",
        "scene = \"scene.toml\"\nsamples = 6\npacks = 1\n[[factor]]\nkey = \"water.salt\"\nfrom = \"2 mmol/L\"\n\
         to = \"20 mmol/L\"\nlogarithmic = true\n",
    );
    let text = env.succeed(&["study", "study.toml", "--out", "out", "--csv"]).stdout;
    for words in ["2 mmol/L to 20 mmol/L", "Rank correlation", "linear model explains: water uptake"] {
        assert!(text.contains(words), "no {words:?} in:\n{text}");
    }
    let table = String::from_utf8(env.read("out/levels.csv")).unwrap();
    let strata = table.lines().skip(1).map(|row| {
        let salt: f64 = row.split(',').nth(1).unwrap().parse().unwrap();
        (6.0 * (salt / 2.0).log10()) as usize
    });
    let mut strata: Vec<usize> = strata.collect();
    strata.sort_unstable();
    assert_eq!(strata, [0, 1, 2, 3, 4, 5]);
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
    let column = |name: &str| names.iter().position(|known| *known == name).unwrap();
    let row = rows.find(|row| row[column("pack")] == "2").unwrap();
    let repeated = env.json("run/summary.json")["beads"][0]["uptake_g_per_g"].as_f64().unwrap();
    assert_eq!(row[column("uptake_g_per_g")].parse::<f64>().unwrap().to_bits(), repeated.to_bits());
}
