//! A folder of its own for each test, and the command to run in it.

use serde_json::Value;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

pub(crate) const COMMAND: &str = env!("CARGO_BIN_EXE_under-test");

/// The repository's root.
pub(crate) fn root() -> &'static Path {
    Path::new(concat!(env!("CARGO_MANIFEST_DIR"), "/.."))
}

/// The default scene with a small bed, a coarse bead and few increments: seconds a pack.
pub(crate) fn quick_scene() -> String {
    let text = fs::read_to_string(root().join("scenes/tree-pit.toml")).unwrap();
    [
        ("grains = 600 ", "grains = 120 "),
        ("across = 12 ", "across = 8 "),
        ("increments = 30 ", "increments = 12 "),
    ]
    .into_iter()
    .fold(text, |text, (from, to)| replace_once(&text, from, to))
}

/// A scene whose packs take a second each: a bead at random places among fixed spheres,
/// where in some packs it finds no equilibrium. Its table is `bench-array.csv`.
pub(crate) fn fast_scene() -> String {
    let text = fs::read_to_string(root().join("scenes/bench-array.toml")).unwrap();
    let centres = "centres = [[\"4 mm\", \"4 mm\", \"4 mm\"]]";
    [(centres, "count = 1"), ("across = 16", "across = 10"), ("increments = 20", "increments = 10")]
        .into_iter()
        .fold(text, |text, (from, to)| replace_once(&text, from, to))
}

/// Replaces text that must be there.
pub(crate) fn replace_once(text: &str, from: &str, to: &str) -> String {
    assert!(text.contains(from), "the scene no longer holds {from:?}");
    text.replacen(from, to, 1)
}

/// A temporary folder with the command.
pub(crate) struct TestEnv {
    folder: tempfile::TempDir,
}

/// What the command did.
pub(crate) struct Ended {
    pub(crate) code: i32,
    pub(crate) stdout: String,
    pub(crate) stderr: String,
}

impl TestEnv {
    pub(crate) fn new() -> Self {
        Self { folder: tempfile::tempdir().unwrap() }
    }

    pub(crate) fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    pub(crate) fn write(&self, name: &str, text: &str) {
        fs::write(self.path(name), text).unwrap();
    }

    /// Writes the fast scene with its table.
    pub(crate) fn write_fast_scene(&self, name: &str) {
        self.write(name, &fast_scene());
        fs::copy(root().join("scenes/bench-array.csv"), self.path("bench-array.csv")).unwrap();
    }

    pub(crate) fn read(&self, name: &str) -> Vec<u8> {
        let path = self.path(name);
        fs::read(&path).unwrap_or_else(|error| panic!("{}: {error}", path.display()))
    }

    pub(crate) fn json(&self, name: &str) -> Value {
        serde_json::from_slice(&self.read(name)).unwrap()
    }

    /// The command, to be run in the folder.
    pub(crate) fn command(&self, arguments: &[&str]) -> Command {
        let mut command = Command::new(COMMAND);
        command.args(arguments).current_dir(self.folder.path());
        command
    }

    /// Runs the command to its end.
    pub(crate) fn run(&self, arguments: &[&str]) -> Ended {
        ended(self.command(arguments).output().unwrap())
    }

    /// Runs a command that must succeed.
    pub(crate) fn succeed(&self, arguments: &[&str]) -> Ended {
        let ended = self.run(arguments);
        assert_eq!(ended.code, 0, "{arguments:?}\n{}{}", ended.stdout, ended.stderr);
        ended
    }

    /// Runs a command that must fail with `code` and a message that holds every one of `words`.
    #[track_caller]
    pub(crate) fn refuse(&self, arguments: &[&str], code: i32, words: &[&str]) {
        let ended = self.run(arguments);
        assert_eq!(ended.code, code, "{arguments:?}\n{}{}", ended.stdout, ended.stderr);
        for word in words {
            assert!(ended.stderr.contains(word), "no {word:?} in: {}", ended.stderr);
        }
        assert!(!ended.stderr.contains("panicked"), "{}", ended.stderr);
    }

    /// Every file below the folder.
    pub(crate) fn files(&self) -> Vec<PathBuf> {
        let mut found = Vec::new();
        let mut folders = vec![self.folder.path().to_owned()];
        while let Some(folder) = folders.pop() {
            for entry in fs::read_dir(folder).unwrap() {
                let path = entry.unwrap().path();
                if path.is_dir() { folders.push(path) } else { found.push(path) }
            }
        }
        found.sort();
        found
    }
}

pub(crate) fn ended(output: Output) -> Ended {
    Ended {
        code: output.status.code().unwrap_or(-1),
        stdout: String::from_utf8(output.stdout).unwrap(),
        stderr: String::from_utf8(output.stderr).unwrap(),
    }
}
