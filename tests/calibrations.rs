use crate::support::{TestEnv, root};

/// The example table with its arrays, of coarser beads.
fn bench() -> TestEnv {
    let env = TestEnv::new();
    for name in ["bench-array.csv", "bench-outcomes.csv"] {
        std::fs::copy(root().join("scenes").join(name), env.path(name)).unwrap();
    }
    for name in ["bench-array.toml", "bench-array-gentle.toml", "bench-array-hard.toml"] {
        let scene = std::fs::read_to_string(root().join("scenes").join(name)).unwrap();
        env.write(name, &scene.replace("across = 16", "across = 12"));
    }
    env
}

#[test]
fn the_example_tells_a_law_of_one_grade_and_a_bound_of_the_other() {
    let text = bench().succeed(&["calibrate", "bench-outcomes.csv"]).stdout;
    for words in [
        "grade plain: 27 of 60 beads torn, in 3 arrays",
        "bench-array-gentle.toml",
        "agreement: chi-squared",
        "grade toughened: 0 of 12 beads torn, in 1 array",
        "none tore: outcomes of one kind cannot fix both numbers",
        "at least",
        "if the modulus is 8.00",
        "stiffness is taken from the scenes",
    ] {
        assert!(text.contains(words), "no {words:?} in\n{text}");
    }
}

#[test]
fn the_tables_that_are_written_make_a_scene_that_agrees() {
    let env = bench();
    env.succeed(&["calibrate", "bench-outcomes.csv", "--grade", "plain", "--out", "plain.toml"]);
    let table = String::from_utf8(env.read("plain.toml")).unwrap();
    let scene = String::from_utf8(env.read("bench-array.toml")).unwrap();
    let part = |from: &str, to: &str| &scene[scene.find(from).unwrap()..scene.find(to).unwrap()];
    let others =
        [part("[scene]", "[gel]"), part("[water]", "[strength]"), &scene[scene.find("[march]").unwrap()..]];
    env.write("fitted.toml", &(others.concat() + &table));
    let told = env.succeed(&["calibrate", "bench-outcomes.csv", "--grade", "plain", "--json"]).stdout;
    let told: serde_json::Value = serde_json::from_str(&told).unwrap();
    let array = told["grades"][0]["arrays"].as_array().unwrap();
    let array = array.iter().find(|array| array["geometry"] == "bench-array.toml").unwrap();
    env.succeed(&["run", "fitted.toml", "--out", "run"]);
    let probability = env.json("run/summary.json")["beads"][0]["tear_probability"].as_f64().unwrap();
    approx::assert_relative_eq!(
        probability,
        array["tear_probability"].as_f64().unwrap(),
        max_relative = 1e-4
    );
}

#[test]
fn what_cannot_be_written_is_refused() {
    let env = bench();
    let calibrate = |more: &[&str], code, words: &[&str]| {
        env.refuse(&[&["calibrate", "bench-outcomes.csv"], more].concat(), code, words);
    };
    calibrate(&["--grade", "plane"], 2, &["no such grade", "plain, toughened"]);
    calibrate(&["--out", "gel.toml"], 2, &["--out gel.toml holds one grade", "--grade", "plain, toughened"]);
    calibrate(&["--grade", "toughened", "--out", "gel.toml"], 2, &["a bound alone is no strength"]);
    env.write("mine.toml", "precious");
    calibrate(
        &["--grade", "plain", "--out", "mine.toml"],
        3,
        &["cannot write mine.toml", "a name that is free"],
    );
    assert_eq!(env.read("mine.toml"), b"precious");
    assert!(!env.path("gel.toml").exists());
}

#[test]
fn a_bad_table_is_refused_with_its_line() {
    let env = bench();
    env.write("outcomes.csv", "geometry,grade,torn\nbench-array.toml,plain,maybe\n");
    env.refuse(&["calibrate", "outcomes.csv"], 2, &["outcomes.csv, line 2", "write yes or no"]);
    env.refuse(&["calibrate", "nowhere.csv"], 2, &["cannot read nowhere.csv"]);
}
