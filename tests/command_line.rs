use crate::support::{TestEnv, quick_scene};

#[test]
fn a_new_scene_loads_and_never_overwrites() {
    let env = TestEnv::new();
    env.succeed(&["new", "mine.toml"]);
    env.succeed(&["describe", "mine.toml"]);
    env.write("mine.toml", "precious");
    env.refuse(&["new", "mine.toml"], 3, &["cannot write mine.toml", "choose a name that is free"]);
    assert_eq!(env.read("mine.toml"), b"precious");
}

#[test]
fn describe_tells_soil_gel_load_cost_and_cautions() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    let text = env.succeed(&["describe", "scene.toml"]).stdout;
    for word in ["120 grains", "D10", "Cu", "Cc", "voxels", "90.0 g/g", "5.80 kPa", "of the gel's modulus"] {
        assert!(text.contains(word), "no {word:?} in\n{text}");
    }
    for caution in ["children and animals", "Dust", "slippery", "regulated", "estimates"] {
        assert!(text.contains(caution), "no {caution:?} in\n{text}");
    }
}

#[test]
fn describe_as_json_has_its_figures_in_si_units() {
    let env = TestEnv::new();
    env.write("scene.toml", &quick_scene());
    let text = env.succeed(&["describe", "scene.toml", "--json"]).stdout;
    let value: serde_json::Value = serde_json::from_str(&text).unwrap();
    // The datasheet's own numbers: 90 g/g and 6 kPa at 25 °C; the bed is at 15 °C.
    let uptake = value["estimate"]["free_uptake_g_per_g"].as_f64().unwrap();
    approx::assert_relative_eq!(uptake, 90.0, max_relative = 1e-6);
    let modulus = value["estimate"]["swollen_modulus_pa"].as_f64().unwrap();
    approx::assert_relative_eq!(modulus, 6000.0 * 288.15 / 298.15, max_relative = 1e-6);
    assert_eq!(value["lid_stress_pa"], 300.0);
    // 45 % passes 2 mm: D50 lies 5/40 of the way to 3.15 mm on a logarithmic scale.
    let d50 = value["d50_m"].as_f64().unwrap();
    approx::assert_relative_eq!(d50, 2e-3 * 1.575_f64.powf(0.125), max_relative = 1e-9);
}

#[test]
fn errors_as_json_carry_the_exit_code() {
    let env = TestEnv::new();
    let ended = env.run(&["--json", "describe", "nowhere.toml"]);
    let value: serde_json::Value = serde_json::from_str(&ended.stderr).unwrap();
    assert_eq!(value["exit_code"], 2);
    assert!(value["error"].as_str().unwrap().contains("nowhere.toml"));
    assert_eq!(ended.stdout, "");
}

#[test]
fn a_wrong_command_line_is_refused() {
    let env = TestEnv::new();
    env.refuse(&["swim"], 2, &["swim"]);
    env.refuse(&["run", "scene.toml"], 2, &["--out"]);
    env.refuse(&["study", "scene.toml", "--out", "x", "--packs", "0"], 2, &["--packs"]);
    env.refuse(&["study", "scene.toml", "--out", "x", "--threads", "0"], 2, &["--threads"]);
}

#[test]
fn completions_come_for_every_shell() {
    let env = TestEnv::new();
    for shell in ["bash", "zsh", "fish", "elvish", "powershell"] {
        let script = env.succeed(&["completions", shell]).stdout;
        assert!(script.contains("describe") && script.contains("packs"), "{shell}");
    }
}

#[test]
fn help_tells_the_exit_codes() {
    let text = TestEnv::new().succeed(&["--help"]).stdout;
    assert!(text.contains("Exit codes"), "{text}");
}
