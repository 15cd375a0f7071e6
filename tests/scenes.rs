use crate::support::{TestEnv, root};

fn scene_files() -> Vec<String> {
    let mut names: Vec<String> = std::fs::read_dir(root().join("scenes"))
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .filter(|name| name.ends_with(".toml"))
        .collect();
    names.sort();
    names
}

fn text_of(name: &str) -> String {
    std::fs::read_to_string(root().join("scenes").join(name)).unwrap()
}

#[test]
fn every_scene_is_marked_as_invented() {
    assert!(scene_files().len() >= 5);
    for name in scene_files() {
        assert!(text_of(&name).to_lowercase().contains("invented"), "{name}");
    }
}

#[test]
fn every_scene_describes_itself() {
    let env = TestEnv::new();
    for name in scene_files().iter().filter(|name| !name.ends_with("-study.toml")) {
        let path = root().join("scenes").join(name);
        env.succeed(&["describe", path.to_str().unwrap()]);
    }
}

/// Every scene with a small bed and few increments, so that the march of each kind of soil,
/// load and bead amount is exercised within seconds.
#[test]
fn every_scene_runs() {
    let env = TestEnv::new();
    std::fs::copy(root().join("scenes/bench-array.csv"), env.path("bench-array.csv")).unwrap();
    for name in scene_files() {
        env.write(&name, &hasten(&text_of(&name)));
    }
    for name in scene_files() {
        let folder = name.trim_end_matches(".toml");
        env.succeed(&["study", &name, "--out", folder, "--packs", "1"]);
        let summary = env.json(&format!("{folder}/summary.json"));
        assert_eq!(summary["failed"].as_array().unwrap().len(), 0, "{name}: {}", summary["failed"]);
        assert!(summary["beads"].as_u64().unwrap() >= 1, "{name}");
    }
}

fn hasten(scene: &str) -> String {
    let number = |text: &str| text.split(' ').next().unwrap().parse::<usize>().unwrap();
    let quick = |line: &str| match line.split_once(" = ") {
        Some(("grains", grains)) => {
            format!("grains = {}", number(grains) / 2)
        }
        Some(("increments", increments)) => format!("increments = {}", number(increments).min(15)),
        Some(("count", count)) => format!("count = {}", number(count).div_ceil(2)),
        // The dose that keeps as many beads among half the grains.
        Some(("dose", _)) => "dose = \"1.2 g/kg\"".to_owned(),
        Some(("values", values)) => format!("values = {}]", values.split([',', ']']).next().unwrap()),
        _ => line.to_owned(),
    };
    scene.lines().map(quick).collect::<Vec<_>>().join("\n")
}
