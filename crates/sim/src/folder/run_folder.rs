use super::atomic::write_text;
use super::checkpoint::CHECKPOINT_FILE;
use super::states::{STATES_FOLDER, read_state, state_path};
use super::tables::{beads_table, course_table, grains_table, history_table};
use super::tear_tables::{cycles_table, events_table};
use super::{FolderError, fingerprint};
use crate::{BeadOutcome, ForceOutcome, PackOutcome, Quality, SPHERES_FILE, Scene, read_scene};
use serde::{Deserialize, Serialize};
use std::fs;
use std::path::Path;

/// Written last: a folder with a summary is complete.
pub(super) const SUMMARY_FILE: &str = "summary.json";
/// Written first.
pub(super) const SCENE_FILE: &str = "scene.toml";
/// Every file of a run folder, besides the states.
const FILES: [&str; 16] = [
    SUMMARY_FILE,
    SCENE_FILE,
    SPHERES_FILE,
    "history.parquet",
    "history.csv",
    "beads.parquet",
    "beads.csv",
    "grains.parquet",
    "grains.csv",
    "course.parquet",
    "course.csv",
    "events.parquet",
    "events.csv",
    "cycles.parquet",
    "cycles.csv",
    CHECKPOINT_FILE,
];

/// What a single run comes to; the contents of its `summary.json`.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct RunSummary {
    /// What kind of summary this is: `run`.
    pub kind: String,
    /// Version of bedswell that made it.
    pub version: String,
    /// Tells results of different scenes apart.
    pub fingerprint: String,
    /// Name of the scene.
    pub name: String,
    /// Seed of the scene.
    pub seed: u64,
    /// Number of the pack.
    pub pack: u64,
    /// Grains in the bed.
    pub grains: usize,
    /// Pore fraction of the mixed dry bed.
    pub porosity: f64,
    /// Mass fraction of the grading left out as fines.
    pub fines_left_out: f64,
    /// Rise of the lid, or of the surface under an open top (m).
    pub heave_m: f64,
    /// That rise over the height of the mixed dry bed.
    pub heave_strain: f64,
    /// Beads squeezed out of an open pot.
    pub beads_out: usize,
    /// Water in the beads per volume of the bed at the end (L/m³).
    pub water_l_per_m3: f64,
    /// Pore fraction left open at the end.
    pub porosity_left: f64,
    /// Effective overburden under which the dry bed was made (Pa).
    pub overburden_pa: f64,
    /// Stress on the lid at the end (Pa).
    pub lid_stress_pa: f64,
    /// Mean contacts per grain that carries load.
    pub contact_number: f64,
    /// Forces between the grains before the beads swell.
    pub forces_before: ForceOutcome,
    /// Forces between the grains at the end.
    pub forces_after: ForceOutcome,
    /// Voxels across each dry bead.
    pub across: usize,
    /// Voxels across that the scene asks for.
    pub across_asked: usize,
    /// Voxels that all beads together may have.
    pub voxel_budget: usize,
    /// Overlap over the diameter that grains were softened for.
    pub chosen_overlap: f64,
    /// What to know about the scene before believing this.
    pub concerns: Vec<String>,
    /// Each bead, in order.
    pub beads: Vec<BeadOutcome>,
    /// How well the end state is at rest.
    pub quality: Quality,
}

impl RunSummary {
    /// The summary of one outcome.
    pub fn new(scene: &Scene, outcome: &PackOutcome) -> Self {
        Self {
            kind: "run".into(),
            version: env!("CARGO_PKG_VERSION").into(),
            fingerprint: fingerprint([scene].into_iter()),
            name: scene.name.clone(),
            seed: scene.seed,
            pack: outcome.pack,
            grains: outcome.grains,
            porosity: outcome.porosity,
            fines_left_out: outcome.fines_left_out,
            heave_m: outcome.heave_m,
            heave_strain: outcome.heave_strain,
            beads_out: outcome.beads_out,
            water_l_per_m3: outcome.water_l_per_m3,
            porosity_left: outcome.porosity_left,
            overburden_pa: outcome.overburden_pa,
            lid_stress_pa: outcome.lid_stress_pa,
            contact_number: outcome.contact_number,
            forces_before: outcome.forces_before,
            forces_after: outcome.forces_after,
            across: outcome.across,
            across_asked: outcome.across_asked,
            voxel_budget: scene.beads.voxel_budget,
            chosen_overlap: outcome.chosen_overlap,
            concerns: scene.concerns().unwrap_or_default().iter().map(ToString::to_string).collect(),
            beads: outcome.beads.clone(),
            quality: outcome.quality,
        }
    }
}

/// Makes the folder of a run ready before anything is computed, and writes the scene into
/// it: from then on it can be looked into, and running again finishes it.
///
/// # Errors
/// When it cannot be written, or holds anything but an earlier run, finished or not, of
/// the same pack of the same scene.
pub fn prepare_run_folder(folder: &Path, scene: &Scene, pack: u64) -> Result<(), FolderError> {
    fs::create_dir_all(folder).map_err(FolderError::write(folder))?;
    let mut entries = fs::read_dir(folder).map_err(FolderError::write(folder))?;
    if entries.next().is_some() {
        check_owner(folder, &fingerprint([scene].into_iter()), pack)?;
    }
    let prepared = write_scene(folder, SCENE_FILE, scene).and_then(|()| {
        let states = folder.join(STATES_FOLDER);
        fs::create_dir_all(&states).map_err(FolderError::write(&states))
    });
    if prepared.is_err() {
        remove_run_files(folder);
    }
    prepared
}

/// Refuses a folder that is not this run's.
fn check_owner(folder: &Path, fingerprint: &str, pack: u64) -> Result<(), FolderError> {
    let occupied = |what: &str| Err(FolderError::Occupied { path: folder.to_owned(), what: what.to_owned() });
    let (found, found_pack) = if let Ok(summary) = fs::read_to_string(folder.join(SUMMARY_FILE)) {
        match serde_json::from_str::<RunSummary>(&summary) {
            Ok(summary) => (summary.fingerprint, summary.pack),
            Err(_) => return occupied("something other than a run of this version"),
        }
    } else if let Ok(state) = read_state(&state_path(folder, 0)) {
        (state.fingerprint, state.pack)
    } else if let Ok(scene) = read_scene(&folder.join(SCENE_FILE))
        && folder.join(STATES_FOLDER).is_dir()
    {
        // Stopped before its first state: nothing to lose.
        (super::fingerprint([&scene].into_iter()), pack)
    } else {
        return occupied("files that are no run");
    };
    if found != fingerprint || found_pack != pack {
        return occupied("the run of another scene, pack or version");
    }
    Ok(())
}

/// Removes what this run has written so far; most may never have been.
pub fn remove_run_files(folder: &Path) {
    // The error of the write that failed is the one to report.
    for name in FILES {
        let _ = fs::remove_file(folder.join(name));
    }
    let _ = fs::remove_dir_all(folder.join(STATES_FOLDER));
}

/// Writes everything a run came to; the summary last, so that a folder with a
/// summary is complete.
///
/// # Errors
/// When a file cannot be written; the files of this run are then removed again.
pub fn write_run_folder(
    folder: &Path,
    scene: &Scene,
    outcome: &PackOutcome,
    csv: bool,
) -> Result<RunSummary, FolderError> {
    let written = write_files(folder, scene, outcome, csv);
    if written.is_err() {
        remove_run_files(folder);
    }
    written
}

fn write_files(
    folder: &Path,
    scene: &Scene,
    outcome: &PackOutcome,
    csv: bool,
) -> Result<RunSummary, FolderError> {
    if let Some(timing) = &outcome.timing {
        course_table(&timing.course).write(folder, "course", csv)?;
    }
    if let Some(tears) = &outcome.tears {
        events_table(&tears.events).write(folder, "events", csv)?;
        if outcome.timing.is_some() {
            cycles_table(&tears.cycles).write(folder, "cycles", csv)?;
        }
    }
    history_table(outcome).write(folder, "history", csv)?;
    beads_table(&outcome.beads).write(folder, "beads", csv)?;
    grains_table(&outcome.positions).write(folder, "grains", csv)?;
    let summary = RunSummary::new(scene, outcome);
    write_json(&folder.join(SUMMARY_FILE), &summary)?;
    // Nothing is left to go on with.
    let _ = fs::remove_file(folder.join(CHECKPOINT_FILE));
    Ok(summary)
}

/// Writes a resolved scene, with its listed spheres beside it.
pub(crate) fn write_scene(folder: &Path, name: &str, scene: &Scene) -> Result<(), FolderError> {
    if let Some(spheres) = scene.spheres_csv() {
        write_text(&folder.join(SPHERES_FILE), &spheres)?;
    }
    write_text(&folder.join(name), &scene.to_toml())
}

/// Writes a summary in the manner of all summaries: indented, with a last newline.
pub(crate) fn write_json(path: &Path, summary: &impl Serialize) -> Result<(), FolderError> {
    let text = serde_json::to_string_pretty(summary)
        .map_err(|error| FolderError::Write { path: path.to_owned(), cause: std::io::Error::other(error) })?;
    write_text(path, &(text + "\n"))
}
