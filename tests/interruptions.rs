//! A study may be stopped at any moment, by a kill or a full disk: finished packs
//! survive and the end is the same.

use crate::studies::factorial_of;
use crate::support::{COMMAND, TestEnv, ended, replace_once, root};
use std::process::{Command, Stdio};
use std::time::{Duration, Instant};

const STUDY: [&str; 6] = ["study", "study.toml", "--packs", "2", "--csv", "--out"];

fn results(env: &TestEnv, folder: &str) -> [Vec<u8>; 4] {
    ["outcomes.parquet", "outcomes.csv", "levels.parquet", "summary.json"]
        .map(|name| env.read(&format!("{folder}/{name}")))
}

/// The results of a study of four combinations that nothing interrupts.
fn uninterrupted(env: &TestEnv) -> [Vec<u8>; 4] {
    env.write_fast_scene("scene.toml");
    env.write("study.toml", &factorial_of("scene.toml"));
    env.succeed(&[&STUDY[..], &["whole", "--threads", "1"]].concat());
    results(env, "whole")
}

fn rows(env: &TestEnv, folder: &str) -> usize {
    let journal = std::fs::read_to_string(env.path(&format!("{folder}/journal.txt"))).unwrap_or_default();
    journal.lines().count().saturating_sub(1)
}

#[test]
fn a_killed_study_resumes_to_the_same_bits() {
    let env = TestEnv::new();
    let whole = uninterrupted(&env);
    let mut child = env
        .command(&[&STUDY[..], &["killed", "--threads", "2"]].concat())
        .stdout(Stdio::null())
        .stderr(Stdio::null())
        .spawn()
        .unwrap();
    let start = Instant::now();
    while rows(&env, "killed") < 2 {
        assert!(start.elapsed() < Duration::from_secs(300), "no pack finished");
        std::thread::sleep(Duration::from_millis(5));
    }
    child.kill().unwrap(); // SIGKILL
    child.wait().unwrap();
    let survived = rows(&env, "killed");
    assert!((2..8).contains(&survived), "{survived} rows survived");

    let resumed = env.succeed(&[&STUDY[..], &["killed", "--threads", "2"]].concat());
    assert!(resumed.stderr.contains("carrying on"), "{}", resumed.stderr);
    assert!(results(&env, "killed") == whole, "the resumed study differs");
}

#[test]
fn finished_packs_survive_a_full_disk() {
    let env = TestEnv::new();
    let whole = uninterrupted(&env);
    // No file may grow past a few blocks; the signal is ignored so that writing fails as on a full disk.
    let script =
        format!("trap '' XFSZ; ulimit -f 3; exec \"{COMMAND}\" {} full --threads 1", STUDY.join(" "));
    let output = Command::new("sh").args(["-c", &script]).current_dir(env.path(".")).output().unwrap();
    let ended = ended(output);
    assert_eq!(ended.code, 3, "{}", ended.stderr);
    assert!(ended.stderr.contains("cannot write full/"), "{}", ended.stderr);
    assert!(ended.stderr.contains("finished packs are kept"), "{}", ended.stderr);
    assert!(rows(&env, "full") >= 1, "no row survived");
    assert!(!env.files().iter().any(|path| path.extension().is_some_and(|end| end == "part")));

    env.succeed(&[&STUDY[..], &["full"]].concat());
    assert!(results(&env, "full") == whole, "the resumed study differs");
}

#[test]
fn a_full_disk_leaves_no_half_written_run() {
    let env = TestEnv::new();
    env.write_fast_scene("scene.toml");
    let script = format!("trap '' XFSZ; ulimit -f 3; exec \"{COMMAND}\" run scene.toml --pack 1 --out out");
    let output = Command::new("sh").args(["-c", &script]).current_dir(env.path(".")).output().unwrap();
    let ended = ended(output);
    assert_eq!(ended.code, 3, "{}", ended.stderr);
    assert_eq!(env.files(), [env.path("bench-array.csv"), env.path("scene.toml")]);
}

#[test]
fn a_killed_history_goes_on_to_the_same_bits() {
    let scene = std::fs::read_to_string(root().join("scenes/bench-array.toml")).unwrap();
    let scene = replace_once(&replace_once(&scene, "across = 16", "across = 8"), "= 20", "= 8");
    let time = "\n[time]\nuntil = \"2 days\"\ndiffusion = \"2e-10 m2/s\"\n\
                [[time.outside]]\nat = \"1 days\"\npotential = \"-100 kPa\"\n";
    kill_and_go_on(&format!("{scene}{time}"), "unfinished.state", &[]);
}

#[test]
fn a_history_killed_after_ruptures_goes_on_to_the_same_bits() {
    let scene = std::fs::read_to_string(root().join("scenes/sphere-array.toml")).unwrap();
    let scene = [
        ("across = 16", "across = 10"),
        ("increments = 16", "increments = 6"),
        ("energy = \"0.02 J/m2\"", "energy = \"9 J/m2\""),
        ("length = \"0.7 mm\"", "length = \"1.1 mm\""),
        ("scatter = 0.3", "scatter = 0.1"),
    ]
    .iter()
    .fold(scene, |scene, (from, to)| replace_once(&scene, from, to));
    let time = "\n[time]\nuntil = \"6 h\"\ndiffusion = \"5e-10 m2/s\"\nstep_error = 0.1\n\
                [[time.outside]]\nat = \"3 h\"\npotential = \"-20 kPa\"\n";
    // The first increment is past the first rupture.
    let env = kill_and_go_on(&format!("{scene}{time}"), "states/0001.state", &["events.csv", "cycles.csv"]);
    let first = &env.json("whole/summary.json")["beads"][0]["tears"]["first"]["at"]["increment"];
    assert_eq!(first, 1, "it tears in the first increment");
}

/// Runs a scene as a whole and killed, in another folder, once a file is there; the results
/// must be the same.
fn kill_and_go_on(scene: &str, once: &str, more: &[&str]) -> TestEnv {
    let env = TestEnv::new();
    env.write_fast_scene("fast.toml");
    env.write("scene.toml", scene);
    env.succeed(&["run", "scene.toml", "--out", "whole", "--csv"]);
    let mut child = env
        .command(&["run", "scene.toml", "--out", "killed", "--csv"])
        .stdout(Stdio::null())
        .stderr(Stdio::null())
        .spawn()
        .unwrap();
    let (start, kept) = (Instant::now(), env.path("killed/unfinished.state"));
    while !kept.exists() || !env.path(&format!("killed/{once}")).exists() {
        assert!(start.elapsed() < Duration::from_secs(300), "nothing was kept");
        std::thread::sleep(Duration::from_millis(2));
    }
    child.kill().unwrap(); // SIGKILL
    child.wait().unwrap();
    assert!(!env.path("killed/summary.json").exists(), "it was done before it was killed");
    let first = std::fs::metadata(env.path("killed/states/0000.state")).unwrap().modified().unwrap();
    env.succeed(&["run", "scene.toml", "--out", "killed", "--csv"]);
    let names = ["summary.json", "history.csv", "course.parquet", "course.csv", "beads.csv"];
    for name in names.iter().chain(more) {
        assert!(env.read(&format!("whole/{name}")) == env.read(&format!("killed/{name}")), "{name} differs");
    }
    // It went on instead of starting anew.
    let again = std::fs::metadata(env.path("killed/states/0000.state")).unwrap().modified().unwrap();
    assert_eq!(first, again);
    assert!(!kept.exists(), "nothing is left to go on from");
    env
}
