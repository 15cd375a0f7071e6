use crate::support::{TestEnv, quick_scene};

#[test]
fn a_run_fills_its_folder_and_repeats_bit_for_bit() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    env.succeed(&["run", "scene.toml", "--out", "one", "--pack", "3", "--csv"]);
    env.succeed(&["run", "one/scene.toml", "--out", "two", "--pack", "3", "--csv"]);
    for name in [
        "scene.toml",
        "summary.json",
        "history.parquet",
        "history.csv",
        "beads.parquet",
        "beads.csv",
        "grains.parquet",
        "grains.csv",
    ] {
        assert!(env.read(&format!("one/{name}")) == env.read(&format!("two/{name}")), "{name} differs");
    }
}

#[test]
fn a_run_tells_what_became_of_the_bead() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    let ended = env.succeed(&["run", "scene.toml", "--out", "out", "--json"]);
    let printed: serde_json::Value = serde_json::from_str(&ended.stdout).unwrap();
    let summary = env.json("out/summary.json");
    assert_eq!(printed, summary);
    let bead = &summary["beads"][0];
    let number = |key: &str| bead[key].as_f64().unwrap_or_else(|| panic!("no {key} in {bead}"));
    // Held back by the bed, so below the free swelling of 90 g/g, but swollen.
    assert!((45.0..90.0).contains(&number("uptake_g_per_g")), "{bead}");
    assert!((0.5..1.0).contains(&number("volume_ratio")), "{bead}");
    for key in ["tension_q99_pa", "compression_q999_pa", "largest_contact_force_n"] {
        assert!(number(key) > 0.0, "{key}: {bead}");
    }
    assert!((0.0..=1.0).contains(&number("tear_probability")), "{bead}");
    assert!(summary["heave_m"].as_f64().unwrap() > 0.0);
}

#[test]
fn packs_differ_and_depend_on_the_seed() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    let uptake = |arguments: &[&str]| {
        let ended = env.succeed(&[&["run", "--json"], arguments].concat());
        let value: serde_json::Value = serde_json::from_str(&ended.stdout).unwrap();
        value["beads"][0]["uptake_g_per_g"].as_f64().unwrap()
    };
    let first = uptake(&["scene.toml", "--out", "a", "--pack", "0"]);
    let second = uptake(&["scene.toml", "--out", "b", "--pack", "1"]);
    env.write("other.toml", &quick_scene().replace("seed = 1", "seed = 2"));
    let other = uptake(&["other.toml", "--out", "c", "--pack", "0"]);
    assert!(first != second && first != other, "{first} {second} {other}");
}
