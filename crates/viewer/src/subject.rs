use crate::args::Arguments;
use crate::error::ViewError;
use crate::study::{Packs, read_packs};
use bedswell_picture::Run;
use bedswell_sim::{Scene, prepare_run_folder, read_scene, read_study};
use std::path::{Path, PathBuf};

/// What is to be looked at.
pub(crate) enum Subject {
    /// A run that is there.
    Run(Box<Run>, PathBuf),
    /// A scene to run.
    Scene(Box<ToRun>),
    /// A study.
    Study(Box<Packs>),
}

/// A pack of a scene that is to be run into a folder.
pub(crate) struct ToRun {
    /// The scene.
    pub(crate) scene: Scene,
    /// Number of the pack.
    pub(crate) pack: u64,
    /// Where its run is written.
    pub(crate) folder: PathBuf,
}

/// Finds out what a path names, and reads it.
pub(crate) fn open(path: &Path, arguments: &Arguments) -> Result<Subject, ViewError> {
    if path.is_dir() {
        return Ok(if is_study(path) {
            Subject::Study(Box::new(read_packs(path)?))
        } else {
            Subject::Run(Box::new(Run::open(path)?), path.to_owned())
        });
    }
    let out = |name: String| arguments.out.clone().unwrap_or_else(|| Path::new("out").join(name));
    if let Ok(scene) = read_scene(path) {
        let folder = out(format!("{}-pack-{}", scene.name, arguments.pack));
        let to_run = ToRun { scene, pack: arguments.pack, folder };
        if finished(&to_run).is_none() {
            // Ask for the folder before there is a window.
            prepare_run_folder(&to_run.folder, &to_run.scene, to_run.pack)?;
        }
        return Ok(Subject::Scene(Box::new(to_run)));
    }
    // A study file, or an error that tells what is wrong with either.
    let study = read_study(path)?;
    let folder = out(study.name.clone());
    Ok(Subject::Study(Box::new(Packs::planned(study, folder))))
}

/// The run of a scene, if it is complete already.
pub(crate) fn finished(to_run: &ToRun) -> Option<Run> {
    let run = Run::open(&to_run.folder).ok()?;
    let same = *run.scene == to_run.scene && run.pack == to_run.pack && run.summary.is_some();
    same.then_some(run)
}

fn is_study(folder: &Path) -> bool {
    let kind = |text: String| {
        let summary: serde_json::Value = serde_json::from_str(&text).ok()?;
        Some(summary.get("kind")? == "study")
    };
    folder.join("journal.txt").is_file()
        || std::fs::read_to_string(folder.join("summary.json")).ok().and_then(kind).unwrap_or(false)
}
