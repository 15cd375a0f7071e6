use super::RunSummary;
use super::run_folder::{SCENE_FILE, SUMMARY_FILE};
use super::states::{STATES_FOLDER, read_state, state_path};
use crate::{Scene, SceneError, State, read_scene};
use std::fs;
use std::path::{Path, PathBuf};
use thiserror::Error;

/// Why a folder or a part of it cannot be shown.
#[derive(Debug, Error)]
pub enum ReadError {
    /// The folder is not a run's.
    #[error("{path} is no run folder: {why}", path = path.display())]
    NoRun {
        /// The folder.
        path: PathBuf,
        /// What is missing.
        why: String,
    },
    /// A file cannot be read.
    #[error("cannot read {path}: {cause}", path = path.display())]
    Read {
        /// The file.
        path: PathBuf,
        /// What the system says.
        cause: std::io::Error,
    },
    /// A file was cut short or altered.
    #[error("{path} is incomplete or was altered; run the scene again into this folder", path = path.display())]
    Damaged {
        /// The file.
        path: PathBuf,
    },
    /// A file is in a form that this version does not know.
    #[error(
        "{path} has format {format} and this bedswell knows {known}: use the version that wrote it, or a newer one",
        path = path.display()
    )]
    Newer {
        /// The file.
        path: PathBuf,
        /// Its format.
        format: u32,
        /// The format that can be read.
        known: u32,
    },
    /// The scene of the folder cannot be used.
    #[error(transparent)]
    Scene(#[from] SceneError),
}

/// A run as its folder holds it: finished, or as far as it went.
#[derive(Clone, Debug)]
pub struct RunFolder {
    /// The folder.
    pub path: PathBuf,
    /// Its scene.
    pub scene: Scene,
    /// Number of the pack.
    pub pack: u64,
    /// What it came to; `None` when it was stopped or is still running.
    pub summary: Option<RunSummary>,
    /// The states, from the mixed dry bed on, without gaps.
    pub states: Vec<State>,
    /// What a user should know: states that could not be read, a run that was stopped.
    pub notes: Vec<String>,
}

/// Reads a run's folder: the scene and every state up to the first that is missing or
/// cannot be read, which is told in the notes.
///
/// # Errors
/// When the folder is no run's, or holds no state that can be shown.
pub fn read_run_folder(path: &Path) -> Result<RunFolder, ReadError> {
    let no_run = |why: &str| ReadError::NoRun { path: path.to_owned(), why: why.to_owned() };
    if !path.is_dir() {
        return Err(no_run("there is no such folder"));
    }
    let scene_file = path.join(SCENE_FILE);
    if !scene_file.is_file() {
        return Err(no_run("it holds no scene.toml; name the folder that `bedswell run` filled"));
    }
    let scene = read_scene(&scene_file)?;
    if !path.join(STATES_FOLDER).is_dir() {
        return Err(no_run(
            "it holds no states; if it was made by an earlier version, run its scene.toml again into a new folder",
        ));
    }
    let mut notes = Vec::new();
    let mut states = Vec::new();
    for increment in 0..=scene.march.increments {
        let file = state_path(path, increment);
        if !file.exists() {
            break;
        }
        match read_state(&file) {
            Ok(state) => states.push(state),
            // Nothing to show at all: the first state's own error says most.
            Err(error) if states.is_empty() => return Err(error),
            Err(error) => {
                notes.push(format!("showing increments up to {}: {error}", increment - 1));
                break;
            }
        }
    }
    let Some(first) = states.first() else {
        return Err(no_run("its run was stopped before the first state; run its scene.toml again"));
    };
    let pack = first.pack;
    let summary = read_summary(path)?;
    if notes.is_empty() && states.len() <= scene.march.increments {
        notes.push(format!(
            "the run stands at increment {} of {}; running the scene again into this folder finishes it",
            states.len() - 1,
            scene.march.increments
        ));
    }
    Ok(RunFolder { path: path.to_owned(), scene, pack, summary, states, notes })
}

fn read_summary(path: &Path) -> Result<Option<RunSummary>, ReadError> {
    let file = path.join(SUMMARY_FILE);
    match fs::read_to_string(&file) {
        Ok(text) => serde_json::from_str(&text).map(Some).map_err(|_| ReadError::Damaged { path: file }),
        Err(cause) if cause.kind() == std::io::ErrorKind::NotFound => Ok(None),
        Err(cause) => Err(ReadError::Read { path: file, cause }),
    }
}
