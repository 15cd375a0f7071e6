use crate::support::{TestEnv, root};
use serde_json::Value;
use std::collections::BTreeSet;

fn readme() -> String {
    std::fs::read_to_string(root().join("README.md")).unwrap()
}

/// The lines of the fenced blocks of one language.
fn blocks(language: &str) -> Vec<String> {
    let text = readme();
    let mut lines = Vec::new();
    let mut inside = false;
    for line in text.lines() {
        match line.strip_prefix("```") {
            Some(fence) => inside = !inside && fence == language,
            None if inside => lines.push(line.to_owned()),
            None => {}
        }
    }
    lines
}

#[test]
fn every_key_of_both_summaries_is_explained() {
    let env = TestEnv::new();
    env.write_fast_scene("scene.toml");
    env.succeed(&["run", "scene.toml", "--out", "run", "--pack", "1"]);
    env.succeed(&["study", "scene.toml", "--out", "study", "--packs", "2"]);
    let mut keys = BTreeSet::new();
    collect_keys(&env.json("run/summary.json"), &mut keys);
    collect_keys(&env.json("study/summary.json"), &mut keys);
    let text = readme();
    let unexplained: Vec<&String> = keys.iter().filter(|key| !text.contains(&format!("`{key}`"))).collect();
    assert!(unexplained.is_empty(), "{unexplained:?}");
}

fn collect_keys(value: &Value, keys: &mut BTreeSet<String>) {
    match value {
        Value::Object(map) => {
            for (key, value) in map {
                keys.insert(key.clone());
                collect_keys(value, keys);
            }
        }
        Value::Array(list) => list.iter().for_each(|value| collect_keys(value, keys)),
        _ => {}
    }
}

#[test]
fn the_main_job_names_a_scene_that_is_there() {
    let commands = blocks("sh");
    let main = commands.iter().find(|line| line.contains("study scenes/")).expect("the main job");
    let scene = main.split_whitespace().find(|word| word.starts_with("scenes/")).unwrap();
    assert!(root().join(scene).is_file(), "{scene}");
    assert!(commands.iter().any(|line| line == "cargo test --workspace"), "{commands:?}");
    let checks = std::fs::read_to_string(root().join(".ci/run")).unwrap();
    assert!(checks.lines().any(|line| line == "cargo test --workspace"), "{checks}");
}

#[test]
fn every_bedswell_command_shown_is_understood() {
    let env = TestEnv::new();
    for line in blocks("sh").iter().filter(|line| line.starts_with("bedswell ")) {
        let verb = line.split_whitespace().nth(1).unwrap();
        env.succeed(&[verb, "--help"]);
        for option in line.split_whitespace().filter(|word| word.starts_with("--")) {
            let help = env.succeed(&[verb, "--help"]).stdout;
            assert!(help.contains(option), "{line}: no {option}");
        }
    }
}

#[test]
fn the_scene_shown_is_one() {
    let env = TestEnv::new();
    env.write("scene.toml", &blocks("toml").join("\n"));
    env.succeed(&["describe", "scene.toml"]);
}
