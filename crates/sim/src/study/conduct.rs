use super::journal::{JOURNAL_FILE, Journal, PackEnd, Row};
use super::outcomes::outcomes_table;
use super::plan::Plan;
use super::summary::summarise;
use super::survival::{agreement_table, survival_table};
use super::tables::levels_table;
use super::{Study, StudySummary};
use crate::folder::{fingerprint, write_json, write_scene};
use crate::{FolderError, PackOutcome, RunError, Scene};
use std::fs;
use std::path::Path;
use std::sync::mpsc::{Sender, channel};
use std::sync::{Mutex, PoisonError};

/// Computes one pack of a scene; [`crate::run_pack`] in earnest.
pub type PackRunner<'a> = dyn Fn(&Scene, u64) -> Result<PackOutcome, RunError> + Sync + 'a;

/// How a study is conducted; nothing here changes its results.
#[derive(Clone, Copy, Debug)]
pub struct StudyOptions {
    /// Packs computed at once.
    pub threads: usize,
    /// Whether the table is written as CSV as well.
    pub csv: bool,
}

/// Watches a study.
pub trait StudyObserver {
    /// Called at the start, and after each pack is on the disk, with the packs done and wanted.
    fn progress(&mut self, done: u64, wanted: u64);
    /// Called when a pack did not reach equilibrium.
    fn failed(&mut self, level: usize, pack: u64, reason: &str);
}

/// An observer that looks away.
impl StudyObserver for () {
    fn progress(&mut self, _: u64, _: u64) {}
    fn failed(&mut self, _: usize, _: u64, _: &str) {}
}

/// Conducts a study in `folder`, or carries on with one that was stopped there.
///
/// Each pack goes to the journal as it finishes and to `outcomes.parquet` soon
/// after. The final files depend on the study alone: not on the number of threads,
/// nor on whether and where it was stopped and resumed.
///
/// # Errors
/// When the folder cannot be written or holds something else. Packs that finished
/// stay in the journal.
pub fn run_study(
    study: &Study,
    folder: &Path,
    options: StudyOptions,
    runner: &PackRunner<'_>,
    observer: &mut dyn StudyObserver,
) -> Result<StudySummary, FolderError> {
    let fingerprint = fingerprint(study.levels.iter().map(|level| &level.scene));
    let (mut journal, rows) = open_folder(study, folder, &fingerprint)?;
    let rows_kept = rows.len() as u64;
    let mut plan = Plan::new(study);
    for row in rows.into_iter().filter(|row| row.pack < study.packs) {
        plan.record(row);
    }
    let (done, wanted) = plan.progress();
    observer.progress(done, wanted);

    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(options.threads.max(1))
        .build()
        .map_err(|error| FolderError::write(folder)(std::io::Error::other(error)))?;
    let plan = Mutex::new(plan);
    let (mut kept, mut unlisted) = (rows_kept, 0);
    let mut keep = |row: Row| -> Result<(), FolderError> {
        journal.append(&row).map_err(|error| error.keeping(kept))?;
        kept += 1;
        if let PackEnd::Failed(reason) = &row.end {
            observer.failed(row.level, row.pack, reason);
        }
        let mut plan = lock(&plan);
        plan.record(row);
        let (done, wanted) = plan.progress();
        observer.progress(done, wanted);
        // The table is rewritten as a whole, the less often the longer it is.
        unlisted += 1;
        if unlisted > done / 32 {
            unlisted = 0;
            outcomes_table(study, &plan)
                .write(folder, "outcomes", false)
                .map_err(|error| error.keeping(kept))?;
        }
        Ok(())
    };
    let (sender, receiver) = channel();
    let listened = pool.in_place_scope(|scope| {
        for _ in 0..options.threads.max(1) {
            let (sender, plan) = (sender.clone(), &plan);
            scope.spawn(move |_| work(study, plan, runner, &sender));
        }
        drop(sender);
        let listened = receiver.iter().try_for_each(&mut keep);
        // The workers stop at their next pack once nobody listens.
        drop(receiver);
        listened
    });
    listened?;

    let plan = lock(&plan);
    let summary = summarise(study, &plan, &fingerprint);
    outcomes_table(study, &plan)
        .write(folder, "outcomes", options.csv)
        .and_then(|()| levels_table(study, &summary.levels).write(folder, "levels", options.csv))
        .and_then(|()| {
            survival_table(study, &plan).map_or(Ok(()), |table| table.write(folder, "survival", options.csv))
        })
        .and_then(|()| {
            let judged = summary.agreement.as_ref().map(agreement_table);
            judged.map_or(Ok(()), |table| table.write(folder, "agreement", options.csv))
        })
        .and_then(|()| write_json(&folder.join("summary.json"), &summary))
        .map_err(|error| error.keeping(kept))?;
    Ok(summary)
}

/// Computes packs until none is left or nobody listens.
fn work(study: &Study, plan: &Mutex<Plan>, runner: &PackRunner<'_>, sender: &Sender<Row>) {
    loop {
        let next = lock(plan).next();
        let Some((level, pack)) = next else { return };
        let end = match runner(&study.levels[level].scene, pack) {
            Ok(outcome) => finished(outcome),
            Err(error) => PackEnd::Failed(error.to_string()),
        };
        let values = study.levels[level].values.clone();
        if sender.send(Row { level, pack, values, end }).is_err() {
            return;
        }
    }
}

/// The outcome as the journal keeps it: without the path, and only if every figure is finite.
fn finished(mut outcome: PackOutcome) -> PackEnd {
    outcome.history.clear();
    outcome.positions.clear();
    outcome.tensions.clear();
    // JSON has no number for what is not finite, and an outcome has no other nulls.
    match serde_json::to_value(&outcome) {
        Ok(value) if !holds_null(&value) => PackEnd::Finished(Box::new(outcome)),
        _ => PackEnd::Failed("the outcome is not finite; please report the scene and its seed".into()),
    }
}

fn holds_null(value: &serde_json::Value) -> bool {
    match value {
        serde_json::Value::Null => true,
        serde_json::Value::Array(list) => list.iter().any(holds_null),
        serde_json::Value::Object(map) => map.values().any(holds_null),
        _ => false,
    }
}

/// Makes the folder this study's own, and writes the scenes it uses.
fn open_folder(study: &Study, folder: &Path, fingerprint: &str) -> Result<(Journal, Vec<Row>), FolderError> {
    fs::create_dir_all(folder).map_err(FolderError::write(folder))?;
    let mut entries = fs::read_dir(folder).map_err(FolderError::write(folder))?;
    if entries.next().is_some() && !folder.join(JOURNAL_FILE).exists() {
        return Err(FolderError::Occupied {
            path: folder.to_owned(),
            what: "files that are no study".into(),
        });
    }
    let factors = study.factors.iter().map(|factor| factor.key.clone()).collect();
    let opened = Journal::open(folder, fingerprint, factors)?;
    match study.levels.as_slice() {
        [level] => write_scene(folder, "scene.toml", &level.scene)?,
        levels => {
            for (index, level) in levels.iter().enumerate() {
                let own = folder.join(format!("level-{index}"));
                fs::create_dir_all(&own).map_err(FolderError::write(&own))?;
                write_scene(&own, "scene.toml", &level.scene)?;
            }
        }
    }
    Ok(opened)
}

/// A worker that panics takes the study down by itself; the plan stays usable.
fn lock(plan: &Mutex<Plan>) -> std::sync::MutexGuard<'_, Plan> {
    plan.lock().unwrap_or_else(PoisonError::into_inner)
}
